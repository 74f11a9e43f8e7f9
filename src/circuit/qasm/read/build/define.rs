//! `gate`: definitions are checked where they stand, and expanded where they are called.
//!
//! A definition calls only gates that were defined before it, so that expansion ends; how deep it goes is bounded.

use super::call::{Gate, Outer};
use super::operand::Lanes;
use super::scope::{Meaning, Sort};
use super::{Builder, Checked, MAX_DEPTH, MAX_EXPANSIONS, Value};
use crate::circuit::QubitId;
use crate::circuit::qasm::read::ast::{GateDefinition, Kind, Name, Place, Statement};
use crate::circuit::qasm::read::fault::Fault;
use crate::id::Id;

/// A gate that was defined.
pub(super) struct Defined<'a, 'p> {
    pub(super) definition: &'p GateDefinition<'a>,
    /// How deep its expansion goes.
    pub(super) depth: usize,
    /// At least so many calls of definitions are made by one call, itself included.
    calls: u64,
}

impl<'a, 'p> Builder<'a, 'p> {
    /// Checks a definition, and gives its name a meaning if it is right.
    pub(super) fn define_gate(&mut self, definition: &'p GateDefinition<'a>) -> Checked {
        let name = definition.name;
        self.check_definition(name)?;
        match self.check_gate(definition) {
            Ok(true) => {
                self.gates.push(Defined { definition, depth: self.deepest, calls: self.calls });
                self.scope.declare(name, Meaning::Gate(self.gates.len() as u32 - 1), false);
            }
            Ok(false) => drop(self.excused.insert(name.text)),
            Err(mistake) => self.excuse(name, mistake)?,
        }
        Ok(())
    }

    /// Whether the body has no mistake; those that it has are reported.
    fn check_gate(&mut self, definition: &'p GateDefinition<'a>) -> Checked<bool> {
        let name = definition.name;
        if definition.qubits.is_empty() {
            return Err((name.place, Fault::NoQubits(name.text.to_owned())));
        }
        let before = self.scope.enter_frame();
        let angles = definition.angles.iter().map(|&angle| (angle, Meaning::Value(Value::Real(1.0))));
        let qubits = definition.qubits.iter().enumerate();
        let qubits = qubits.map(|(at, &qubit)| (qubit, Meaning::Elements(Sort::Qubit, Lanes::run(at as u32, 1))));
        let declared = self.declare_all(angles.chain(qubits));
        (self.checking, self.deepest, self.calls) = (true, 1, 1);
        let is_right = declared.is_ok() && self.check_body(&definition.body);
        self.checking = false;
        self.scope.leave_frame(&before);
        declared.map(|()| is_right)
    }

    /// Whether a gate or a subroutine of this name may be defined here.
    pub(super) fn check_definition(&mut self, name: Name<'a>) -> Checked {
        if self.depth > 0 {
            self.excused.insert(name.text);
            return Err((name.place, Fault::InnerDefinition));
        }
        self.check_name(name)
    }

    /// Declares names of a frame, which must be different.
    pub(super) fn declare_all(&mut self, names: impl Iterator<Item = (Name<'a>, Meaning)>) -> Checked {
        for (name, meaning) in names {
            if let first @ Some(_) = self.scope.declared(name.text, true) {
                return Err((name.place, Fault::Redeclared { name: name.text.to_owned(), first }));
            }
            self.scope.declare(name, meaning, true);
        }
        Ok(())
    }

    /// Whether these statements have no mistake. What calls a gate with a mistake has one too, even if it is not said
    /// again: a definition must not come to mean something through what is defined later.
    fn check_body(&mut self, statements: &'p [Statement<'a>]) -> bool {
        self.depth += 1;
        let mut is_right = true;
        for statement in statements {
            let place = statement.place;
            let checked = match &statement.kind {
                Kind::Call(call) => self.gate_call(call, place, super::call::NOTHING),
                Kind::For(repeat) => self.turns(repeat).map(|turns| {
                    // How many turns there are may depend on the loops around.
                    let calls = self.calls;
                    let before = self.scope.enter_block();
                    if let Ok(value) = self.turn_value(turns, 0) {
                        self.scope.declare(repeat.variable, Meaning::Value(Value::Whole(value)), true);
                        is_right &= self.check_body(&repeat.body);
                    }
                    self.scope.leave_block(&before);
                    self.calls = calls;
                }),
                Kind::Barrier(operands) => self.check_barrier(operands),
                Kind::Nothing => {
                    is_right = false;
                    Ok(())
                }
                _ => Err((place, Fault::NotInGate)),
            };
            if let Err((place, fault)) = checked {
                is_right = false;
                self.report(place, fault);
            }
        }
        self.depth -= 1;
        is_right
    }

    /// Notes how deep the definition at hand goes with so many calls of this gate, and how many calls it makes.
    pub(super) fn check_nesting(&mut self, gate: Gate, times: u64, place: Place) -> Checked {
        let Gate::Defined(number) = gate else { return Ok(()) };
        let Defined { depth, calls, .. } = self.gates[number as usize];
        self.calls = self.calls.saturating_add(calls.saturating_mul(times));
        self.go_to(depth, place)
    }

    /// Notes that the definition at hand calls one of this depth.
    pub(super) fn go_to(&mut self, depth: usize, place: Place) -> Checked {
        self.deepest = self.deepest.max(self.depth + depth);
        if self.deepest > MAX_DEPTH { Err((place, Fault::DefinitionsTooDeep)) } else { Ok(()) }
    }

    /// Counts an expansion.
    pub(super) fn spend(&mut self, place: Place) -> Checked {
        self.expansions += 1;
        self.check_calls_left(0, place)
    }

    /// Whether so many more calls are within the limit: what cannot end in time is not begun.
    fn check_calls_left(&self, calls: u64, place: Place) -> Checked {
        if self.expansions.saturating_add(calls) > MAX_EXPANSIONS {
            return Err((place, Fault::Limit { what: "the number of calls of definitions", most: MAX_EXPANSIONS }));
        }
        Ok(())
    }

    /// Appends the gates of a defined gate so many times.
    pub(super) fn expand(
        &mut self,
        number: u32,
        angles: &[f64],
        qubits: &[QubitId],
        times: u64,
        outer: Outer<'_>,
        place: Place,
    ) -> Checked {
        let Defined { definition, calls, .. } = self.gates[number as usize];
        self.check_calls_left(calls.saturating_mul(times), place)?;
        for _ in 0..times {
            self.spend(place)?;
            let before = self.scope.enter_frame();
            for (&name, &angle) in definition.angles.iter().zip(angles) {
                self.scope.declare(name, Meaning::Value(Value::Real(angle)), true);
            }
            for (&name, qubit) in definition.qubits.iter().zip(qubits) {
                let lanes = Lanes::run(qubit.index() as u32, 1);
                self.scope.declare(name, Meaning::Elements(Sort::Qubit, lanes), true);
            }
            let result = self.expand_body(&definition.body, outer);
            self.scope.leave_frame(&before);
            result?;
        }
        Ok(())
    }

    fn expand_body(&mut self, statements: &'p [Statement<'a>], outer: Outer<'_>) -> Checked {
        let len = statements.len();
        (0..len).try_for_each(|at| {
            let statement = &statements[if outer.is_inverse { len - 1 - at } else { at }];
            match &statement.kind {
                Kind::Call(call) => self.gate_call(call, statement.place, outer),
                Kind::For(repeat) => {
                    let turns = self.turns(repeat)?;
                    let count = turns.count();
                    (0..count).try_for_each(|at| {
                        self.spend(statement.place)?;
                        let value = self.turn_value(turns, if outer.is_inverse { count - 1 - at } else { at })?;
                        let before = self.scope.enter_block();
                        self.scope.declare(repeat.variable, Meaning::Value(Value::Whole(value)), true);
                        let result = self.expand_body(&repeat.body, outer);
                        self.scope.leave_block(&before);
                        result
                    })
                }
                _ => Ok(()),
            }
        })
    }
}
