//! Gates taken from one circuit into another with the same registers.

use super::{Circuit, Gate, Op};

impl Circuit {
    /// A circuit without gates that has the registers of another, so that its gates can be taken over.
    pub fn with_registers_of(other: &Circuit) -> Self {
        Self { qubits: other.qubits.clone(), measured: other.measured.clone(), ..Self::default() }
    }

    /// Appends a gate of a circuit that has the same registers.
    pub fn push_copy(&mut self, from: &Circuit, gate: &Gate) {
        let (condition, controls, target) = (gate.condition(), from.controls(gate), gate.target());
        match (from.angle(gate), gate.measured()) {
            (Some(angle), _) => self.push_angle(condition, gate.op(), angle, controls, target),
            (_, Some(bit)) => self.push_measure(condition, target, bit),
            _ => self.push_if(condition, gate.op(), controls, target),
        }
    }

    /// Appends the inverse of a unitary gate of a circuit that has the same registers.
    pub fn push_inverse(&mut self, from: &Circuit, gate: &Gate) {
        let (condition, controls, target) = (gate.condition(), from.controls(gate), gate.target());
        let op = match gate.op() {
            Op::S => Op::Sdg,
            Op::Sdg => Op::S,
            Op::T => Op::Tdg,
            Op::Tdg => Op::T,
            op => op,
        };
        assert!(op.is_unitary(), "{op:?} has no inverse");
        match from.angle(gate) {
            Some(angle) => self.push_angle(condition, op, -angle, controls, target),
            None => self.push_if(condition, op, controls, target),
        }
    }
}
