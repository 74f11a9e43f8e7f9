//! 64 basis states at a time, gate by gate: the plain reading of circuits that keep basis states up to phases.
//!
//! Input: a circuit and the values of its qubits at the start, one word a qubit. Output: the same at the end, the
//! phases in multiples of pi/4, and what each `reset` found. It shares nothing with the fast kernel of the exhaustive
//! audit, so that what the one says can be checked by the other.

use crate::circuit::{Circuit, Gate, Op};
use crate::id::Id;
use crate::judge::audit::oracle::eighths;

/// 64 basis states.
#[derive(Clone, PartialEq, Eq, Debug)]
pub(in crate::judge::audit) struct Words {
    /// For each qubit, its values.
    pub(in crate::judge::audit) qubits: Vec<u64>,
    /// The three bits of the phase, lowest first.
    pub(in crate::judge::audit) phase: [u64; 3],
    /// What each `reset` found, in order.
    pub(in crate::judge::audit) resets: Vec<u64>,
}

impl Words {
    /// All qubits 0, all phases 1.
    pub(in crate::judge::audit) fn new(circuit: &Circuit) -> Self {
        Self { qubits: vec![0; circuit.qubit_count()], phase: [0; 3], resets: Vec::new() }
    }

    /// Runs a circuit of which `keeps_basis_states` holds.
    pub(in crate::judge::audit) fn run(&mut self, circuit: &Circuit) {
        for block in circuit.blocks() {
            let gates = &circuit.gates()[block.gates.start as usize..block.gates.end as usize];
            for _ in 0..block.repeat {
                gates.iter().for_each(|gate| self.step(circuit, gate));
            }
        }
    }

    fn step(&mut self, circuit: &Circuit, gate: &Gate) {
        let target = gate.target().index();
        let holds = circuit.controls(gate).iter().fold(u64::MAX, |holds, control| {
            let word = self.qubits[control.qubit().index()];
            holds & if control.is_negated() { !word } else { word }
        });
        match gate.op() {
            Op::X => self.qubits[target] ^= holds,
            Op::Reset => self.resets.push(std::mem::take(&mut self.qubits[target])),
            op => self.turn(holds & self.qubits[target], eighths(op).unwrap_or(0)),
        }
    }

    /// Adds to the phases where the word holds.
    fn turn(&mut self, holds: u64, eighths: u8) {
        for from in (0..3).filter(|from| eighths >> from & 1 == 1) {
            let mut carry = holds;
            for bit in &mut self.phase[from..] {
                (*bit, carry) = (*bit ^ carry, *bit & carry);
            }
        }
    }

    /// The phase of one of the states, in multiples of pi/4.
    pub(in crate::judge::audit) fn eighths(&self, lane: usize) -> u8 {
        (0..3).map(|bit| ((self.phase[bit] >> lane & 1) as u8) << bit).sum()
    }
}

/// The word of an input bit in the 64 inputs from `64 * block` on.
pub(in crate::judge::audit) fn input_word(bit: usize, block: u64) -> u64 {
    match bit {
        0..6 => (0..64).filter(|lane| lane >> bit & 1 == 1).fold(0, |word, lane| word | 1 << lane),
        _ if block >> (bit - 6) & 1 == 1 => u64::MAX,
        _ => 0,
    }
}
