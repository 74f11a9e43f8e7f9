//! The gates of `stdgates.inc` by name, and how each is written in the gates of a [`Circuit`].

use crate::circuit::{Circuit, Condition, Control, Op, QubitId};

/// What a gate does to its targets.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub(super) enum Action {
    /// One gate of the circuit.
    Plain(Op),
    /// Nothing.
    Identity,
    /// Y = S X Sdg.
    Y,
    /// The root of X: H S H.
    RootX,
    /// H Rz H.
    Rx,
    /// Exchanges two targets.
    Swap,
}

/// A gate of the library.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub(super) struct LibraryGate {
    pub(super) action: Action,
    /// Controls in front of the targets.
    pub(super) controls: usize,
}

impl LibraryGate {
    /// How many targets.
    pub(super) fn targets(self) -> usize {
        if self.action == Action::Swap { 2 } else { 1 }
    }

    /// How many angles.
    pub(super) fn angles(self) -> usize {
        match self.action {
            Action::Rx => 1,
            Action::Plain(op) => usize::from(op.has_angle()),
            _ => 0,
        }
    }
}

/// The gate of this name; `u1`, `phase`, `cphase` and `CX` are the library's names from version 2.
pub(super) fn library(name: &str) -> Option<LibraryGate> {
    use Action::{Identity, Plain, RootX, Rx, Swap, Y};
    let (action, controls) = match name {
        "x" => (Plain(Op::X), 0),
        "y" => (Y, 0),
        "z" => (Plain(Op::Z), 0),
        "h" => (Plain(Op::H), 0),
        "s" => (Plain(Op::S), 0),
        "sdg" => (Plain(Op::Sdg), 0),
        "t" => (Plain(Op::T), 0),
        "tdg" => (Plain(Op::Tdg), 0),
        "sx" => (RootX, 0),
        "id" => (Identity, 0),
        "p" | "phase" | "u1" => (Plain(Op::P), 0),
        "rx" => (Rx, 0),
        "ry" => (Plain(Op::Ry), 0),
        "rz" => (Plain(Op::Rz), 0),
        "cx" | "CX" => (Plain(Op::X), 1),
        "cy" => (Y, 1),
        "cz" => (Plain(Op::Z), 1),
        "ch" => (Plain(Op::H), 1),
        "cp" | "cphase" => (Plain(Op::P), 1),
        "crx" => (Rx, 1),
        "cry" => (Plain(Op::Ry), 1),
        "crz" => (Plain(Op::Rz), 1),
        "swap" => (Swap, 0),
        "ccx" => (Plain(Op::X), 2),
        "cswap" => (Swap, 1),
        _ => return None,
    };
    Some(LibraryGate { action, controls })
}

/// Whether the standard or its library has a gate of this name that this reader does not know.
pub(super) fn is_unsupported(name: &str) -> bool {
    matches!(name, "U" | "gphase" | "cu" | "u2" | "u3")
}

/// A gate with everything it acts on.
pub(super) struct Application<'a> {
    pub(super) action: Action,
    pub(super) inverse: bool,
    pub(super) angle: f64,
    pub(super) condition: Option<Condition>,
    pub(super) controls: &'a [Control],
    pub(super) targets: &'a [QubitId],
}

/// Appends the gate; controls stand on the inner gate only where the outer ones undo each other.
pub(super) fn apply(circuit: &mut Circuit, gate: &Application<'_>) {
    let target = gate.targets[0];
    let angle = if gate.inverse { -gate.angle } else { gate.angle };
    let mut put = |op: Op, controls: &[Control]| match op {
        Op::P | Op::Rz | Op::Ry => circuit.push_angle(gate.condition, op, angle, controls, target),
        op => circuit.push_if(gate.condition, op, controls, target),
    };
    match gate.action {
        Action::Plain(op) => put(if gate.inverse { inverse(op) } else { op }, gate.controls),
        Action::Identity => {}
        Action::Y => {
            put(Op::Sdg, &[]);
            put(Op::X, gate.controls);
            put(Op::S, &[]);
        }
        Action::RootX => {
            put(Op::H, &[]);
            put(if gate.inverse { Op::Sdg } else { Op::S }, gate.controls);
            put(Op::H, &[]);
        }
        Action::Rx => {
            put(Op::H, &[]);
            put(Op::Rz, gate.controls);
            put(Op::H, &[]);
        }
        Action::Swap => {
            let other = gate.targets[1];
            let mut controls = gate.controls.to_vec();
            controls.push(Control::on(target));
            circuit.push_if(gate.condition, Op::X, &[Control::on(other)], target);
            circuit.push_if(gate.condition, Op::X, &controls, other);
            circuit.push_if(gate.condition, Op::X, &[Control::on(other)], target);
        }
    }
}

fn inverse(op: Op) -> Op {
    match op {
        Op::S => Op::Sdg,
        Op::Sdg => Op::S,
        Op::T => Op::Tdg,
        Op::Tdg => Op::T,
        op => op,
    }
}
