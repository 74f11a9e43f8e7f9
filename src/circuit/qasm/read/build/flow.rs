//! `if` on a measured bit, and `for` with constant bounds.

use super::operand::Sort;
use super::{Builder, Checked, MAX_TURNS, constant};
use crate::circuit::qasm::read::MAX_MISTAKES;
use crate::circuit::qasm::read::ast::{For, If, Place, Statement, Step};
use crate::circuit::qasm::read::fault::Fault;
use crate::circuit::{Circuit, Condition, MeasuredId};
use crate::id::Id;

impl<'a, 'p> Builder<'a, 'p> {
    pub(super) fn choose(&mut self, choice: &'p If<'a>) -> Checked {
        let operand = choice.test.bit;
        let bits = self.resolve(Sort::Bit, &operand)?;
        let fail = |fault| Err((operand.place, fault));
        if bits.len != 1 {
            return fail(Fault::WideTest(operand.name.to_owned()));
        }
        if self.condition.is_some() {
            return fail(Fault::NestedTest);
        }
        let bit = MeasuredId::new(bits.at(0) as usize);
        if !self.measured[bit.index()] {
            return fail(Fault::NotMeasured(self.circuit.measured_name(bit)));
        }
        self.condition = Some(Condition::new(bit, choice.test.value));
        self.block(&choice.then);
        self.condition = Some(Condition::new(bit, !choice.test.value));
        self.block(&choice.otherwise);
        self.condition = None;
        Ok(())
    }

    fn block(&mut self, statements: &'p [Statement<'a>]) {
        self.depth += 1;
        for statement in statements {
            self.statement(statement);
            if self.faults.len() > MAX_MISTAKES {
                break;
            }
        }
        self.depth -= 1;
    }

    pub(super) fn repeat(&mut self, repeat: &'p For<'a>, place: Place) -> Checked {
        let fail = |fault| (repeat.variable.place, fault);
        let (start, step, stop) = constant::span(self.ast, &self.variables, repeat.span).map_err(fail)?;
        let count = constant::count(start, step, stop).map_err(fail)?;
        let steps = &self.ast.steps[repeat.steps.start as usize..repeat.steps.end as usize];
        let used = steps.contains(&Step::Name(repeat.variable.text));
        match count {
            0 => self.check_only(repeat, start),
            1 => self.turn(repeat, start),
            _ if used || self.repeating => self.unroll(repeat, start, step, count, place)?,
            _ => {
                self.repeating = true;
                let from = self.circuit.gates().len();
                self.turn(repeat, start);
                self.circuit.repeat_from(from, count);
                self.repeating = false;
            }
        }
        Ok(())
    }

    /// One turn of a loop. The variable hides one of the same name outside.
    fn turn(&mut self, repeat: &'p For<'a>, value: i64) {
        let name = repeat.variable.text;
        let hidden = self.variables.insert(name, value);
        self.block(&repeat.body);
        match hidden {
            Some(value) => self.variables.insert(name, value),
            None => self.variables.remove(name),
        };
    }

    fn unroll(&mut self, repeat: &'p For<'a>, start: i64, step: i64, count: u64, place: Place) -> Checked {
        let mistakes = self.faults.len();
        for at in 0..count {
            self.turn(repeat, start + at as i64 * step);
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

    /// Reads a body that is never applied, for its mistakes.
    fn check_only(&mut self, repeat: &'p For<'a>, start: i64) {
        let registers = Circuit {
            qubits: self.circuit.qubits.clone(),
            measured: self.circuit.measured.clone(),
            ..Circuit::default()
        };
        let circuit = std::mem::replace(&mut self.circuit, registers);
        let measured = self.measured.clone();
        self.turn(repeat, start);
        self.circuit = circuit;
        self.measured = measured;
    }
}
