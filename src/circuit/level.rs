//! Levels: the gate sets a circuit may be written in, from few large gates to those of a fault-tolerant machine.

use crate::circuit::{Circuit, Gate, Op};

/// A gate set.
#[derive(Clone, Copy, PartialEq, Eq, PartialOrd, Ord, Hash, Debug)]
pub enum Level {
    /// X and Z with any number of controls of either polarity.
    Wide,
    /// X, CX, CCX, Z, CZ, CCZ; controls on 1 only.
    Toffoli,
    /// H, S, T, their inverses, CX, X, Z, CZ; unitary.
    CliffordT,
    /// The same with measurement in mid-circuit and corrections that depend on it.
    Feedback,
}

impl Level {
    /// All levels, largest gates first.
    pub const ALL: [Level; 4] = [Level::Wide, Level::Toffoli, Level::CliffordT, Level::Feedback];

    /// The name on the command line and in files.
    pub fn name(self) -> &'static str {
        match self {
            Level::Wide => "wide",
            Level::Toffoli => "toffoli",
            Level::CliffordT => "clifford-t",
            Level::Feedback => "feedback",
        }
    }

    /// Whether the level has this gate. Rotations and Hadamards of a start state are counted apart and belong to every
    /// level, as do a `reset` and a measurement outside the oracle; `conditioned` gates only to `feedback`.
    pub fn has(self, circuit: &Circuit, gate: &Gate) -> bool {
        if gate.condition().is_some() && self != Level::Feedback {
            return false;
        }
        let plain = circuit.controls(gate).iter().all(|control| !control.is_negated());
        match gate.op() {
            Op::Measure | Op::Reset => true,
            Op::P | Op::Rz | Op::Ry | Op::H => gate.control_count() == 0,
            Op::X | Op::Z => match self {
                Level::Wide => true,
                Level::Toffoli => plain && gate.control_count() <= 2,
                Level::CliffordT | Level::Feedback => plain && gate.control_count() <= 1,
            },
            Op::S | Op::Sdg | Op::T | Op::Tdg => self >= Level::CliffordT && gate.control_count() == 0,
        }
    }
}

impl std::fmt::Display for Level {
    fn fmt(&self, f: &mut std::fmt::Formatter<'_>) -> std::fmt::Result {
        f.write_str(self.name())
    }
}
