//! `if` on a measured bit, and `for` with constant values.

use super::scope::{Meaning, Sort};
use super::{Builder, Checked, MAX_TURNS, Value, constant};
use crate::circuit::qasm::read::MAX_MISTAKES;
use crate::circuit::qasm::read::ast::{Compared, For, If, Over, Place, Start, Statement, Step, Test};
use crate::circuit::qasm::read::fault::Fault;
use crate::circuit::{Circuit, Condition, MeasuredId};
use crate::id::Id;

/// The values of a loop's variable.
#[derive(Clone, Copy)]
pub(super) enum Turns {
    Span { start: i64, step: i64, count: u64 },
    Set(Start),
}

impl Turns {
    pub(super) fn count(self) -> u64 {
        match self {
            Turns::Span { count, .. } => count,
            Turns::Set(set) => u64::from(set.end - set.start),
        }
    }
}

/// When a test holds.
enum Holds {
    Always,
    Never,
    When(Condition),
}

impl<'a, 'p> Builder<'a, 'p> {
    pub(super) fn choose(&mut self, choice: &'p If<'a>) -> Checked {
        match self.test(&choice.test)? {
            Holds::Always => {
                self.block(&choice.then);
                self.check_only(|builder| builder.block(&choice.otherwise));
            }
            Holds::Never => {
                self.check_only(|builder| builder.block(&choice.then));
                self.block(&choice.otherwise);
            }
            Holds::When(condition) => {
                self.condition = Some(condition);
                self.block(&choice.then);
                self.condition = Some(Condition::new(condition.bit(), !condition.value()));
                self.block(&choice.otherwise);
                self.condition = None;
            }
        }
        Ok(())
    }

    fn test(&mut self, test: &Test<'a>) -> Checked<Holds> {
        let fail = |fault| Err((test.bits.place, fault));
        let lanes = self.resolve(Sort::Bit, &test.bits)?;
        let bits: Vec<MeasuredId> = self.elements(lanes).map(|bit| MeasuredId::new(bit as usize)).collect();
        let value = self.compared(test, bits.len())?;
        if self.condition.is_some() {
            return fail(Fault::NestedTest);
        }
        if bits.len() > 1 && (test.value.is_none() || !self.scope.is_old) {
            return fail(Fault::WideTest(test.bits.name.to_owned()));
        }
        let unmeasured = bits.iter().find(|bit| !self.measured[bit.index()]);
        if let (Some(&bit), false) = (unmeasured, self.scope.is_old) {
            return fail(Fault::NotMeasured(self.circuit.measured_name(bit)));
        }
        // In version 2, a bit that nothing has written yet is 0.
        let wanted = |at: usize| at < 64 && value >> at & 1 == 1;
        let open: Vec<usize> = (0..bits.len()).filter(|&at| self.measured[bits[at].index()]).collect();
        let possible = (0..bits.len()).all(|at| open.contains(&at) || !wanted(at));
        match (possible, &open[..]) {
            (false, _) => Ok(if test.negated { Holds::Always } else { Holds::Never }),
            (true, []) => Ok(if test.negated { Holds::Never } else { Holds::Always }),
            (true, &[at]) => Ok(Holds::When(Condition::new(bits[at], wanted(at) != test.negated))),
            _ => fail(Fault::WideTest(test.bits.name.to_owned())),
        }
    }

    /// What the bits are compared with, the first bit lowest.
    fn compared(&self, test: &Test<'a>, len: usize) -> Checked<u64> {
        let (value, place) = match test.value {
            None => return Ok(1),
            Some(Compared::Truth(value)) => return Ok(value.into()),
            Some(Compared::Number(expr)) => (self.integer(expr)?.try_into().ok(), expr.place),
            Some(Compared::Text(text, place)) => {
                let digits = text.trim_matches(['"', '\'']);
                let fits = digits.len() == len && digits.bytes().all(|digit| matches!(digit, b'0' | b'1'));
                (if fits { u64::from_str_radix(digits, 2).ok() } else { None }, place)
            }
        };
        let fits = |&value: &u64| len >= 64 || value >> len == 0;
        value.filter(fits).ok_or((place, if len == 1 { Fault::NotABitValue } else { Fault::NotABitsValue(len) }))
    }

    pub(super) fn block(&mut self, statements: &'p [Statement<'a>]) {
        self.depth += 1;
        let before = self.scope.enter_block();
        for statement in statements {
            self.statement(statement);
            if self.faults.len() > MAX_MISTAKES {
                break;
            }
        }
        self.scope.leave_block(&before);
        self.depth -= 1;
    }

    /// The values of a loop's variable.
    pub(super) fn turns(&self, repeat: &For<'a>) -> Checked<Turns> {
        match repeat.over {
            Over::Set(set) => Ok(Turns::Set(set)),
            Over::Span(span) => {
                let fail = |fault| (repeat.variable.place, fault);
                let (start, step, stop) = constant::span(self.ast, &self.scope, span).map_err(fail)?;
                let count = constant::count(start, step, stop).map_err(fail)?;
                Ok(Turns::Span { start, step, count })
            }
        }
    }

    /// The value of one turn.
    pub(super) fn turn_value(&self, turns: Turns, at: u64) -> Checked<i64> {
        match turns {
            Turns::Span { start, step, .. } => Ok(start + at as i64 * step),
            Turns::Set(set) if set.start == set.end => Ok(0),
            Turns::Set(set) => self.integer(self.ast.members[set.start as usize + at as usize]),
        }
    }

    pub(super) fn repeat(&mut self, repeat: &'p For<'a>, place: Place) -> Checked {
        let turns = self.turns(repeat)?;
        let steps = &self.ast.steps[repeat.steps.start as usize..repeat.steps.end as usize];
        let used = steps.contains(&Step::Name(repeat.variable.text));
        let first = self.turn_value(turns, 0)?;
        match turns.count() {
            // Read for its mistakes.
            0 => self.check_only(|builder| builder.turn(repeat, first)),
            1 => self.turn(repeat, first),
            count if used || self.repeating => self.unroll(repeat, turns, count, place)?,
            count => {
                for at in 1..if matches!(turns, Turns::Set(_)) { count } else { 0 } {
                    self.turn_value(turns, at)?;
                }
                self.repeating = true;
                let from = self.circuit.gates().len();
                self.turn(repeat, first);
                self.circuit.repeat_from(from, count);
                self.repeating = false;
            }
        }
        Ok(())
    }

    /// One turn of a loop. The variable hides one of the same name outside.
    fn turn(&mut self, repeat: &'p For<'a>, value: i64) {
        let before = self.scope.enter_block();
        self.scope.declare(repeat.variable, Meaning::Value(Value::Whole(value)), true);
        self.block(&repeat.body);
        self.scope.leave_block(&before);
    }

    fn unroll(&mut self, repeat: &'p For<'a>, turns: Turns, count: u64, place: Place) -> Checked {
        let mistakes = self.faults.len();
        for at in 0..count {
            let value = self.turn_value(turns, at)?;
            self.turn(repeat, value);
            if self.faults.len() > mistakes {
                // Every further turn would say the same.
                break;
            }
            self.turns += 1;
            if self.turns > MAX_TURNS {
                return Err((place, Fault::Limit { what: "the number of turns of all loops", most: MAX_TURNS }));
            }
        }
        Ok(())
    }

    /// Reads what is never applied, for its mistakes.
    fn check_only(&mut self, read: impl FnOnce(&mut Self)) {
        let registers = Circuit {
            qubits: self.circuit.qubits.clone(),
            measured: self.circuit.measured.clone(),
            ..Circuit::default()
        };
        let circuit = std::mem::replace(&mut self.circuit, registers);
        let (measured, repeating) = (self.measured.clone(), std::mem::replace(&mut self.repeating, false));
        read(self);
        self.circuit = circuit;
        self.measured = measured;
        self.repeating = repeating;
    }
}
