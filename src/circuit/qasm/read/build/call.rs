//! Gate calls: modifiers, operands, broadcast.
//!
//! Modifiers commute: controls are prepended in order, inverses and powers multiply to one exponent.

use std::f64::consts::TAU;

use super::emit::{self, Application, MOST_PIECES};
use super::gates::{self, Action, General, LibraryGate};
use super::operand::Lanes;
use super::scope::{Meaning, Sort};
use super::{Builder, Checked, constant};
use crate::circuit::qasm::read::ast::{Call, Change, Index, Modifier, Name, Operand, Place};
use crate::circuit::qasm::read::fault::Fault;
use crate::circuit::{Control, QubitId};
use crate::id::Id;

/// Buffers of a call.
#[derive(Default)]
pub(super) struct Scratch {
    lanes: Vec<Lanes>,
    polarity: Vec<bool>,
    qubits: Vec<QubitId>,
    controls: Vec<Control>,
    sorted: Vec<QubitId>,
    angles: Vec<f64>,
}

/// A gate that can be called.
#[derive(Clone, Copy)]
pub(super) enum Gate {
    Library(LibraryGate),
    /// By its number among those defined.
    Defined(u32),
}

/// What holds for every gate of a definition that is expanded.
#[derive(Clone, Copy)]
pub(super) struct Outer<'c> {
    pub(super) controls: &'c [Control],
    pub(super) is_inverse: bool,
}

/// Outside of all definitions.
pub(super) const NOTHING: Outer<'static> = Outer { controls: &[], is_inverse: false };

impl<'a, 'p> Builder<'a, 'p> {
    /// A call of a gate or of a subroutine that returns nothing.
    pub(super) fn call(&mut self, call: &'p Call<'a>, place: Place) -> Checked {
        match self.scope.get(call.gate.text) {
            Some(Meaning::Subroutine(number)) => self.enter(number, call, None, place),
            _ => self.gate_call(call, place, NOTHING),
        }
    }

    /// A call of a gate.
    pub(super) fn gate_call(&mut self, call: &'p Call<'a>, place: Place, outer: Outer<'_>) -> Checked {
        let gate = self.gate(call.gate)?;
        let mut scratch = self.scratches.pop().unwrap_or_default();
        let result = self.apply(call, gate, place, outer, &mut scratch);
        self.scratches.push(scratch);
        result
    }

    /// The gate of this name.
    pub(super) fn gate(&mut self, name: Name<'a>) -> Checked<Gate> {
        let (text, is_old) = (name.text, self.scope.is_old);
        let fail = |fault| Err((name.place, fault));
        if let Some(gate) = gates::built_in(text, is_old) {
            return Ok(Gate::Library(gate));
        }
        let library = gates::library(text, is_old);
        if let (Some(gate), true) = (library, self.has_library) {
            return Ok(Gate::Library(gate));
        }
        match self.scope.get(text) {
            Some(Meaning::Gate(number)) => Ok(Gate::Defined(number)),
            Some(other) => fail(Fault::WrongName { name: text.to_owned(), found: other.words(), wanted: "gate" }),
            None if library.is_some() => {
                // Said once; the rest is read as if it had been included.
                self.has_library = true;
                fail(Fault::NotIncluded(text.to_owned(), self.library_name()))
            }
            None if gates::is_unsupported(text, is_old) => fail(Fault::UnsupportedGate(text.to_owned())),
            None => fail(Fault::UnknownGate(text.to_owned())),
        }
    }

    fn angles(&self, call: &Call<'a>, wanted: usize, angles: &mut Vec<f64>) -> Checked {
        let arguments = &self.ast.arguments[call.arguments.start as usize..call.arguments.end as usize];
        if arguments.len() != wanted {
            let gate = call.gate.text.to_owned();
            return Err((call.gate.place, Fault::Arguments { gate, wanted, found: arguments.len() }));
        }
        angles.clear();
        for &expr in arguments {
            let angle = match self.checking {
                true => constant::check_names(self.ast, &self.scope, expr).map(|()| 0.0),
                false => constant::angle(self.ast, &self.scope, expr),
            };
            angles.push(angle.map_err(|fault| (expr.place, fault))?);
        }
        Ok(())
    }

    fn apply(
        &mut self,
        call: &'p Call<'a>,
        gate: Gate,
        place: Place,
        outer: Outer<'_>,
        scratch: &mut Scratch,
    ) -> Checked {
        let modifiers = &self.ast.modifiers[call.modifiers.start as usize..call.modifiers.end as usize];
        let operands = &self.ast.operands[call.operands.start as usize..call.operands.end as usize];
        let (angles, controls, targets) = match gate {
            Gate::Library(gate) => (gate.angles(), gate.controls, gate.targets()),
            Gate::Defined(number) => {
                let definition = self.gates[number as usize].definition;
                (definition.angles.len(), 0, definition.qubits.len())
            }
        };
        self.angles(call, angles, &mut scratch.angles)?;
        let (prepended, mut power) = self.modifiers(modifiers, operands.len(), &mut scratch.polarity)?;
        let wanted = prepended.saturating_add(controls + targets);
        if wanted != operands.len() {
            let gate = call.gate.text.to_owned();
            return Err((place, Fault::Operands { gate, wanted, found: operands.len() }));
        }
        scratch.polarity.resize(prepended + controls, true);
        if outer.is_inverse {
            power = -power;
        }
        let width = self.lanes(operands, &mut scratch.lanes)?;
        self.check_room(gate, power, (outer.controls.len() + scratch.polarity.len()) as u64, width, place)?;
        for lane in 0..width {
            scratch.qubits.clear();
            scratch.qubits.extend(scratch.lanes.iter().map(|&lanes| QubitId::new(self.element(lanes, lane) as usize)));
            if let Some(at) = repeated(&scratch.qubits, &mut scratch.sorted) {
                return Err((place, Fault::Repeated(self.qubit_words(&operands[at], scratch.qubits[at]))));
            }
            if self.checking {
                return self.check_nesting(gate, power.unsigned_abs(), place);
            }
            let (controls, targets) = scratch.qubits.split_at(scratch.polarity.len());
            scratch.controls.clear();
            scratch.controls.extend_from_slice(outer.controls);
            let signed = controls.iter().zip(&scratch.polarity);
            scratch.controls.extend(signed.map(|(&qubit, &value)| Control::new(qubit, value)));
            match gate {
                Gate::Library(gate) => {
                    let mut angles = [0.0; 4];
                    angles[..scratch.angles.len()].copy_from_slice(&scratch.angles);
                    check_meaning(gate, angles, power, call)?;
                    let (action, condition, controls) = (gate.action, self.condition, &scratch.controls);
                    let application = Application { action, power, angles, condition, controls, targets };
                    emit::apply(&mut self.circuit, &application);
                }
                Gate::Defined(number) => {
                    let outer = Outer { controls: &scratch.controls, is_inverse: power < 0 };
                    self.expand(number, &scratch.angles, targets, power.unsigned_abs(), outer, place)?;
                }
            }
        }
        Ok(())
    }

    /// The elements of each operand, and how many lanes they are.
    fn lanes(&mut self, operands: &[Operand<'a>], all: &mut Vec<Lanes>) -> Checked<u32> {
        all.clear();
        let mut width = 1;
        for operand in operands {
            if self.checking && !matches!(operand.index, Index::Whole) {
                return Err((operand.place, Fault::IndexInGate(operand.name.to_owned())));
            }
            let lanes = self.resolve(Sort::Qubit, operand)?;
            if lanes.len != 1 && width != 1 && lanes.len != width {
                return Err((operand.place, Fault::Lengths(width, lanes.len)));
            }
            width = width.max(lanes.len);
            all.push(lanes);
        }
        Ok(width)
    }

    fn check_room(&mut self, gate: Gate, power: i64, controls: u64, width: u32, place: Place) -> Checked {
        let Gate::Library(LibraryGate { action, .. }) = gate else { return Ok(()) };
        if self.checking {
            return Ok(());
        }
        let times = emit::repetitions(action, power).saturating_mul(u64::from(width));
        let (pieces, controlled) = match action {
            Action::Plain(_) => (2, 1),
            Action::General(_) | Action::GlobalPhase => (MOST_PIECES, MOST_PIECES),
            _ => (MOST_PIECES, 2),
        };
        self.room(times.saturating_mul(pieces), times.saturating_mul((controls + 2) * controlled), place)
    }

    fn qubit_words(&self, operand: &Operand<'a>, qubit: QubitId) -> String {
        if self.checking { format!("`{}`", operand.name) } else { self.circuit.qubit_name(qubit) }
    }

    /// The number of controls that modifiers add, the polarity of each where they are not more than `most`, and the
    /// power.
    fn modifiers(&self, modifiers: &[Modifier], most: usize, polarity: &mut Vec<bool>) -> Checked<(usize, i64)> {
        polarity.clear();
        let (mut count, mut power) = (0usize, 1i64);
        for modifier in modifiers {
            let fail = |fault| (modifier.place, fault);
            let (number, value) = match modifier.change {
                Change::Inv => {
                    power = -power;
                    continue;
                }
                Change::Pow(exponent) => {
                    power = self.exponent(exponent).and_then(|by| product(power, by)).map_err(fail)?;
                    continue;
                }
                Change::Ctrl(number) => (number, true),
                Change::Negctrl(number) => (number, false),
            };
            let number = number.map_or(Ok(1), |expr| constant::whole(self.ast, &self.scope, expr)).map_err(fail)?;
            let number = usize::try_from(number).ok().filter(|&number| number > 0);
            let number = number.ok_or_else(|| fail(Fault::ControlCount))?;
            // The standard's text and its formula disagree on negctrl(n) for n > 1: all 0, or not all 1.
            if !value && number > 1 {
                return Err(fail(Fault::NegctrlCount));
            }
            count = count.saturating_add(number);
            if count <= most {
                polarity.resize(count, value);
            }
        }
        Ok((count, power))
    }

    fn exponent(&self, expr: crate::circuit::qasm::read::ast::Expr) -> Result<i64, Fault> {
        match constant::whole(self.ast, &self.scope, expr) {
            Err(Fault::NotWhole | Fault::Quotient) => Err(Fault::Pow),
            other => other,
        }
    }
}

/// The product of two exponents, small enough to be negated.
fn product(a: i64, b: i64) -> Result<i64, Fault> {
    a.checked_mul(b).filter(|&product| product != i64::MIN).ok_or(Fault::NumberTooLarge)
}

/// Refuses a gate that careful readers understand differently, and angles that are too large to be computed with.
fn check_meaning(gate: LibraryGate, angles: [f64; 4], power: i64, call: &Call<'_>) -> Checked {
    let [_, phi, lambda, _] = angles;
    let sum: f64 = angles.iter().map(|angle| angle.abs()).sum();
    if !(2.0 * sum * power as f64).is_finite() {
        return Err((call.gate.place, Fault::NotFinite));
    }
    let turns = (phi + lambda) / 2.0 / TAU;
    let differs = gate.action == Action::General(General::Either) && (turns - turns.round()).abs() > 1e-12;
    if differs { Err((call.gate.place, Fault::Ambiguous(call.gate.text.to_owned()))) } else { Ok(()) }
}

/// The place of a qubit that occurs twice.
fn repeated(qubits: &[QubitId], sorted: &mut Vec<QubitId>) -> Option<usize> {
    if qubits.len() <= 8 {
        return (1..qubits.len()).find(|&at| qubits[..at].contains(&qubits[at]));
    }
    sorted.clear();
    sorted.extend_from_slice(qubits);
    sorted.sort_unstable();
    let twice = sorted.windows(2).find(|pair| pair[0] == pair[1]).map(|pair| pair[0])?;
    qubits.iter().position(|&qubit| qubit == twice)
}
