//! Preparing a start state, and taking it apart again.
//!
//! Input: a [`Start`] and the qubits of the search register, all 0. Output: gates that make the even superposition of the
//! strings that the start allows. After: every amplitude is the same positive number; no ancilla is used.
//!
//! [`preparation`] lists the gates as the sources have them, with controlled rotations and controlled Hadamard gates; the
//! writer then spells these with sign flips and rotations that no level refuses:
//! `Ry(a)` under controls is `Ry(a/2) Z' Ry(-a/2) Z'`, Z' the sign flip under the same controls, and a controlled
//! Hadamard gate is `Ry(pi/4) Z' Ry(-pi/4)`.

mod below;
mod weight;

use std::f64::consts::FRAC_PI_4;

use super::gates::Pen;
use crate::circuit::{Circuit, Control, Level, Op, QubitId};
use crate::places::{Part, Start};

/// One gate of a preparation, on places in the search register.
#[derive(Clone, PartialEq, Debug)]
pub struct Turn {
    /// X, H or Ry.
    pub op: Op,
    /// The angle of an Ry.
    pub angle: f64,
    /// Controls: the place, and the value it must have; at most two.
    pub controls: Vec<(u32, bool)>,
    /// The place it acts on.
    pub target: u32,
}

impl Turn {
    fn new(op: Op, controls: &[(u32, bool)], target: u32) -> Self {
        Self { op, angle: 0.0, controls: controls.to_vec(), target }
    }

    fn rotation(angle: f64, controls: &[(u32, bool)], target: u32) -> Self {
        Self { op: Op::Ry, angle, controls: controls.to_vec(), target }
    }

    fn inverse(&self) -> Self {
        Self { angle: -self.angle, ..self.clone() }
    }
}

/// The gates that prepare the start of a register of `len` qubits.
pub fn preparation(start: &Start, len: usize) -> Vec<Turn> {
    let mut in_parts = vec![false; len];
    let mut turns = Vec::new();
    for part in start.parts() {
        part.qubits().iter().for_each(|&qubit| in_parts[qubit as usize] = true);
        match part {
            Part::Below { qubits, size } => below::append(&mut turns, qubits, *size),
            Part::Weight { qubits, ones } => weight::append(&mut turns, qubits, *ones),
        }
    }
    let free = (0..len).filter(|&at| !in_parts[at]).map(|at| Turn::new(Op::H, &[], at as u32));
    free.chain(turns).collect()
}

/// Appends the preparation.
pub fn append_preparation(circuit: &mut Circuit, search: &[QubitId], start: &Start, level: Level) {
    for turn in preparation(start, search.len()) {
        write(circuit, search, &turn, level);
    }
}

/// Appends the inverse of [`append_preparation`]: its gates, each inverted, in reverse order.
pub fn append_unpreparation(circuit: &mut Circuit, search: &[QubitId], start: &Start, level: Level) {
    for turn in preparation(start, search.len()).iter().rev() {
        unwrite(circuit, search, turn, level);
    }
}

fn write(circuit: &mut Circuit, search: &[QubitId], turn: &Turn, level: Level) {
    let target = search[turn.target as usize];
    let ry = |circuit: &mut Circuit, angle: f64| circuit.push_angle(None, Op::Ry, angle, &[], target);
    match (turn.op, turn.controls.is_empty()) {
        (Op::Ry, true) => ry(circuit, turn.angle),
        (op, true) => circuit.push(op, &[], target),
        (Op::X, false) => flip(circuit, search, turn),
        (Op::Ry, false) => {
            flip_sign(circuit, search, turn, level);
            ry(circuit, -turn.angle / 2.0);
            flip_sign(circuit, search, turn, level);
            ry(circuit, turn.angle / 2.0);
        }
        (_, false) => {
            ry(circuit, -FRAC_PI_4);
            flip_sign(circuit, search, turn, level);
            ry(circuit, FRAC_PI_4);
        }
    }
}

fn unwrite(circuit: &mut Circuit, search: &[QubitId], turn: &Turn, level: Level) {
    if turn.op != Op::Ry || turn.controls.is_empty() {
        return write(circuit, search, &turn.inverse(), level);
    }
    let target = search[turn.target as usize];
    let ry = |circuit: &mut Circuit, angle: f64| circuit.push_angle(None, Op::Ry, angle, &[], target);
    ry(circuit, -turn.angle / 2.0);
    flip_sign(circuit, search, turn, level);
    ry(circuit, turn.angle / 2.0);
    flip_sign(circuit, search, turn, level);
}

/// A CNOT, with its control on 0 or on 1.
fn flip(circuit: &mut Circuit, search: &[QubitId], turn: &Turn) {
    let [(control, value)] = turn.controls[..] else { unreachable!("a CNOT has one control") };
    assert!(value, "the CNOTs of preparations have their control on 1");
    circuit.push(Op::X, &[Control::on(search[control as usize])], search[turn.target as usize]);
}

/// The sign flip of the target under the controls; a control on 0 stands between two flips where the level wants that.
fn flip_sign(circuit: &mut Circuit, search: &[QubitId], turn: &Turn, level: Level) {
    let flipped: Vec<QubitId> = turn
        .controls
        .iter()
        .filter(|&&(_, value)| !value && level != Level::Wide)
        .map(|&(at, _)| search[at as usize])
        .collect();
    let control = |&(at, value): &(u32, bool)| Control::new(search[at as usize], value || level != Level::Wide);
    let mut controls: Vec<Control> = turn.controls.iter().map(control).collect();
    controls.push(Control::on(search[turn.target as usize]));
    flipped.iter().for_each(|&qubit| circuit.push(Op::X, &[], qubit));
    Pen::new(circuit, level).sign(&controls);
    flipped.iter().for_each(|&qubit| circuit.push(Op::X, &[], qubit));
}
