//! Gate calls: modifiers, operands, broadcast.

use super::gates::{self, Action, Application, LibraryGate};
use super::operand::{Lanes, Sort};
use super::{Builder, Checked, constant};
use crate::circuit::qasm::read::ast::{Call, Change, Modifier, Place};
use crate::circuit::qasm::read::fault::Fault;
use crate::circuit::{Control, QubitId};
use crate::id::Id;

/// Buffers that calls share.
#[derive(Default)]
pub(super) struct Scratch {
    lanes: Vec<Lanes>,
    polarity: Vec<bool>,
    qubits: Vec<QubitId>,
    controls: Vec<Control>,
    sorted: Vec<QubitId>,
}

impl<'a, 'p> Builder<'a, 'p> {
    pub(super) fn call(&mut self, call: &'p Call<'a>, place: Place) -> Checked {
        let gate = self.gate(call)?;
        let angle = self.angle(call, gate)?;
        let mut scratch = std::mem::take(&mut self.scratch);
        let result = self.apply(call, gate, angle, place, &mut scratch);
        self.scratch = scratch;
        result
    }

    fn gate(&mut self, call: &Call<'a>) -> Checked<LibraryGate> {
        let name = call.gate.text;
        let fail = |fault| Err((call.gate.place, fault));
        match gates::library(name) {
            Some(gate) if self.has_library => Ok(gate),
            Some(_) => {
                // Said once; the rest is read as if it had been included.
                self.has_library = true;
                fail(Fault::NotIncluded(name.to_owned()))
            }
            None if gates::is_unsupported(name) => fail(Fault::UnsupportedGate(name.to_owned())),
            None => fail(Fault::UnknownGate(name.to_owned())),
        }
    }

    /// The angle of the call, 0 for a gate without one.
    fn angle(&self, call: &Call<'a>, gate: LibraryGate) -> Checked<f64> {
        let arguments = &self.ast.arguments[call.arguments.start as usize..call.arguments.end as usize];
        match (arguments, gate.angles()) {
            ([], 0) => Ok(0.0),
            ([one], 1) => constant::angle(self.ast, &self.variables, *one).map_err(|fault| (one.place, fault)),
            (_, wanted) => {
                let gate = call.gate.text.to_owned();
                Err((call.gate.place, Fault::Arguments { gate, wanted, found: arguments.len() }))
            }
        }
    }

    fn apply(
        &mut self,
        call: &Call<'a>,
        gate: LibraryGate,
        angle: f64,
        place: Place,
        scratch: &mut Scratch,
    ) -> Checked {
        let modifiers = &self.ast.modifiers[call.modifiers.start as usize..call.modifiers.end as usize];
        let operands = &self.ast.operands[call.operands.start as usize..call.operands.end as usize];
        let outer = self.polarity(modifiers, operands.len(), &mut scratch.polarity)?;
        let wanted = outer.saturating_add(gate.controls + gate.targets());
        if wanted != operands.len() {
            let name = call.gate.text.to_owned();
            return Err((place, Fault::Operands { gate: name, wanted, found: operands.len() }));
        }
        scratch.polarity.resize(outer + gate.controls, true);
        scratch.lanes.clear();
        let mut width = 1;
        for operand in operands {
            let lanes = self.resolve(Sort::Qubit, operand)?;
            if lanes.len != 1 && width != 1 && lanes.len != width {
                return Err((operand.place, Fault::Lengths(width, lanes.len)));
            }
            width = width.max(lanes.len);
            scratch.lanes.push(lanes);
        }
        let pieces = if matches!(gate.action, Action::Plain(_)) { 1 } else { 3 };
        let controls = (scratch.polarity.len() as u64 + 2) * u64::from(width);
        self.room(pieces * u64::from(width), controls, place)?;
        let inverse = modifiers.iter().filter(|modifier| matches!(modifier.change, Change::Inv)).count() % 2 == 1;
        for lane in 0..width {
            scratch.qubits.clear();
            scratch.qubits.extend(scratch.lanes.iter().map(|lanes| QubitId::new(lanes.at(lane) as usize)));
            if let Some(twice) = repeated(&scratch.qubits, &mut scratch.sorted) {
                return Err((place, Fault::Repeated(self.circuit.qubit_name(twice))));
            }
            let (controls, targets) = scratch.qubits.split_at(scratch.polarity.len());
            scratch.controls.clear();
            let signed = controls.iter().zip(&scratch.polarity);
            scratch.controls.extend(signed.map(|(&qubit, &value)| Control::new(qubit, value)));
            let condition = self.condition;
            let controls = &scratch.controls;
            gates::apply(
                &mut self.circuit,
                &Application { action: gate.action, inverse, angle, condition, controls, targets },
            );
        }
        Ok(())
    }

    /// The number of controls that modifiers add, and the polarity of each where they are not more than `most`.
    fn polarity(&self, modifiers: &[Modifier], most: usize, polarity: &mut Vec<bool>) -> Checked<usize> {
        polarity.clear();
        let mut count = 0usize;
        for modifier in modifiers {
            let fail = |fault| (modifier.place, fault);
            let (number, value) = match modifier.change {
                Change::Inv => continue,
                Change::Pow => return Err(fail(Fault::Pow)),
                Change::Ctrl(number) => (number, true),
                Change::Negctrl(number) => (number, false),
            };
            let number = number.map_or(Ok(1), |expr| constant::whole(self.ast, &self.variables, expr)).map_err(fail)?;
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
        Ok(count)
    }
}

/// A qubit that occurs twice.
fn repeated(qubits: &[QubitId], sorted: &mut Vec<QubitId>) -> Option<QubitId> {
    if qubits.len() <= 8 {
        let twice = (1..qubits.len()).find(|&at| qubits[..at].contains(&qubits[at]));
        return twice.map(|at| qubits[at]);
    }
    sorted.clear();
    sorted.extend_from_slice(qubits);
    sorted.sort_unstable();
    sorted.windows(2).find(|pair| pair[0] == pair[1]).map(|pair| pair[0])
}
