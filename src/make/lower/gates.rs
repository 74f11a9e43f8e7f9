//! The gates of a level: ANDs into clean ancillas, their erasure, signs.
//!
//! An AND into a clean ancilla is one gate at `wide` and `toffoli`; below it is the 13-gate list with 4 T gates of
//! C. Gidney, "Halving the cost of quantum addition", Quantum 2:74 (2018). Its inverse is the list backwards at
//! `clifford-t`; at `feedback` it is a measurement in the X basis and, where that gave 1, a CZ on the two operands.

use crate::circuit::qasm::gadget::{Gadget, GadgetGate};
use crate::circuit::{Circuit, Condition, Control, Level, MeasuredId, Op, QubitId};

/// Writes gates of a level, all of them under one condition.
pub(super) struct Pen<'c> {
    pub(super) circuit: &'c mut Circuit,
    pub(super) level: Level,
    /// The gates are applied where this holds.
    pub(super) condition: Option<Condition>,
}

impl<'c> Pen<'c> {
    /// A pen without a condition.
    pub(super) fn new(circuit: &'c mut Circuit, level: Level) -> Self {
        Self { circuit, level, condition: None }
    }

    pub(super) fn push(&mut self, op: Op, controls: &[Control], target: QubitId) {
        self.circuit.push_if(self.condition, op, controls, target);
    }

    pub(super) fn cx(&mut self, source: QubitId, target: QubitId) {
        self.push(Op::X, &[Control::on(source)], target);
    }

    /// -1 where all controls hold; the last of them holds on 1.
    pub(super) fn sign(&mut self, controls: &[Control]) {
        let (&last, rest) = controls.split_last().expect("at least one control");
        match (self.level, rest) {
            (Level::CliffordT | Level::Feedback, [a, b]) => self.ccz(a.qubit(), b.qubit(), last.qubit()),
            _ => self.push(Op::Z, rest, last.qubit()),
        }
    }

    /// X on a qubit of unknown content where all controls hold.
    pub(super) fn toggle(&mut self, controls: &[Control], target: QubitId) {
        match (self.level, controls) {
            (Level::Wide | Level::Toffoli, controls) => self.push(Op::X, controls, target),
            (_, [a, b]) => {
                self.push(Op::H, &[], target);
                self.ccz(a.qubit(), b.qubit(), target);
                self.push(Op::H, &[], target);
            }
            (level, controls) => unreachable!("{} controls at {level}", controls.len()),
        }
    }

    /// A Toffoli up to phases on the basis states, which applying it again takes back (the Margolus form; D. Maslov, Phys.
    /// Rev. A 93:022311, 2016): 4 T gates where a Toffoli has 7.
    pub(super) fn toffoli_up_to_phases(&mut self, [a, b]: [QubitId; 2], target: QubitId) {
        if self.level <= Level::Toffoli {
            self.push(Op::X, &[Control::on(a), Control::on(b)], target);
            return;
        }
        let gates = [
            (Op::H, None),
            (Op::T, None),
            (Op::X, Some(b)),
            (Op::Tdg, None),
            (Op::X, Some(a)),
            (Op::T, None),
            (Op::X, Some(b)),
            (Op::Tdg, None),
            (Op::H, None),
        ];
        gates.into_iter().for_each(|(op, control)| self.put(op, control, target));
    }

    /// The AND of the controls into a target that is 0.
    pub(super) fn and(&mut self, controls: &[Control], target: QubitId) {
        if self.level <= Level::Toffoli {
            self.push(Op::X, controls, target);
            return;
        }
        let qubits = [controls[0].qubit(), controls[1].qubit(), target];
        for (op, control, at) in AND {
            self.put(op, control.map(|at| qubits[at]), qubits[at]);
        }
    }

    /// Undoes [`Pen::and`]; the measured bit is used at `feedback` only.
    pub(super) fn erase(&mut self, controls: &[Control], target: QubitId, outcome: Option<MeasuredId>) {
        match self.level {
            Level::Wide | Level::Toffoli => self.push(Op::X, controls, target),
            Level::CliffordT => {
                let qubits = [controls[0].qubit(), controls[1].qubit(), target];
                for (op, control, at) in AND.into_iter().rev() {
                    self.put(inverse(op), control.map(|at| qubits[at]), qubits[at]);
                }
            }
            Level::Feedback => {
                let outcome = outcome.expect("one measured bit for each AND");
                self.measure_away(target, outcome);
                let condition = Some(Condition::new(outcome, true));
                self.circuit.push_if(condition, Op::Z, &controls[..1], controls[1].qubit());
                self.circuit.push(Op::Reset, &[], target);
            }
        }
    }

    /// Measures a qubit in the X basis. Under a condition only the change of basis depends on it: where it does not
    /// hold, the qubit is 0 and so is the outcome, and whatever depends on the outcome rests too.
    pub(super) fn measure_away(&mut self, qubit: QubitId, outcome: MeasuredId) {
        self.push(Op::H, &[], qubit);
        self.circuit.push_measure(None, qubit, outcome);
    }

    fn put(&mut self, op: Op, control: Option<QubitId>, target: QubitId) {
        match control {
            Some(control) => self.push(op, &[Control::on(control)], target),
            None => self.push(op, &[], target),
        }
    }

    fn ccz(&mut self, a: QubitId, b: QubitId, c: QubitId) {
        let qubits = [a, b, c];
        for (op, control, at) in CCZ {
            self.put(op, control.map(|at| qubits[at]), qubits[at]);
        }
    }
}

/// CCZ by 7 T gates, one for each parity of the three qubits: the textbook Toffoli without its Hadamards.
const CCZ: [GadgetGate; 13] = [
    (Op::X, Some(1), 2),
    (Op::Tdg, None, 2),
    (Op::X, Some(0), 2),
    (Op::T, None, 2),
    (Op::X, Some(1), 2),
    (Op::Tdg, None, 2),
    (Op::X, Some(0), 2),
    (Op::T, None, 1),
    (Op::T, None, 2),
    (Op::X, Some(0), 1),
    (Op::T, None, 0),
    (Op::Tdg, None, 1),
    (Op::X, Some(0), 1),
];

/// The gates of the AND with 4 T gates, in the qubits `[a, b, target]`: the operation, its control, its target.
const AND: [GadgetGate; 13] = [
    (Op::H, None, 2),
    (Op::T, None, 2),
    (Op::X, Some(0), 2),
    (Op::X, Some(1), 2),
    (Op::X, Some(2), 0),
    (Op::X, Some(2), 1),
    (Op::Tdg, None, 0),
    (Op::Tdg, None, 1),
    (Op::T, None, 2),
    (Op::X, Some(2), 0),
    (Op::X, Some(2), 1),
    (Op::H, None, 2),
    (Op::S, None, 2),
];

/// The runs of gates that this file writes, by name: an AND into a clean ancilla, its inverse, and a CCZ.
pub fn gadgets() -> Vec<Gadget> {
    let qubits = &["a", "b", "c"];
    let undone = AND.into_iter().rev().map(|(op, control, at)| (inverse(op), control, at)).collect();
    vec![
        Gadget { name: "and_into_clean", qubits, gates: AND.to_vec() },
        Gadget { name: "undo_and", qubits, gates: undone },
        Gadget { name: "sign_of_three", qubits, gates: CCZ.to_vec() },
    ]
}

fn inverse(op: Op) -> Op {
    match op {
        Op::T => Op::Tdg,
        Op::Tdg => Op::T,
        Op::S => Op::Sdg,
        Op::Sdg => Op::S,
        other => other,
    }
}
