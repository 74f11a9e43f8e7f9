//! The reflection about the uniform state: `1 - 2|s><s|`, on any number of qubits.
//!
//! Hadamards and flips take the uniform state to the state of all ones, whose sign is flipped by a Z with many controls
//! ([`multi`](super::multi)). With n qubits and a clean ancilla for each control too many this costs 4(n - 2) T gates at
//! `feedback`, and 8(n - 3) + 7 at `clifford-t` (n at least 3); a single clean ancilla is enough for twice that at
//! `feedback` and for the same at `clifford-t`.

use super::emit::OUTCOME;
use super::multi::{Idle, append_controlled, ways};
use crate::circuit::{Circuit, Level, MeasuredId, Op, Part, QubitId};

/// How many qubits a sign flip may depend on at this level.
fn sign_width(level: Level) -> usize {
    match level {
        Level::Wide => usize::MAX,
        Level::Toffoli | Level::CliffordT => 3,
        Level::Feedback => 2,
    }
}

/// How many clean ancillas [`append_reflection`] makes use of for `n` qubits.
pub fn reflection_work(n: usize, level: Level) -> usize {
    n.saturating_sub(sign_width(level))
}

/// How many clean ancillas [`append_reflection`] needs at least.
pub fn least_reflection_work(n: usize, level: Level) -> usize {
    reflection_work(n, level).min(1)
}

/// Appends the reflection about the uniform state of `search`. The qubits of `work` are clean, at least
/// [`least_reflection_work`] of them, and clean again afterwards. At `feedback` the circuit gets measured bits for it, in
/// a register of their own, if it has none yet.
pub fn append_reflection(circuit: &mut Circuit, search: &[QubitId], work: &[QubitId], level: Level) {
    let (&target, controls) = search.split_last().expect("a reflection is about a state of at least one qubit");
    let from = circuit.gates().len();
    let clean = &work[..reflection_work(search.len(), level).min(work.len())];
    let outcomes = if level == Level::Feedback { outcomes(circuit, clean.len()) } else { Vec::new() };
    search.iter().for_each(|&qubit| circuit.push(Op::H, &[], qubit));
    search.iter().for_each(|&qubit| circuit.push(Op::X, &[], qubit));
    let idle = Idle { clean, dirty: &[], outcomes: &outcomes };
    let way = *ways(controls.len(), Op::Z, idle, level).first().expect("at least one clean ancilla");
    append_controlled(circuit, level, Op::Z, (controls, target), idle, way);
    search.iter().for_each(|&qubit| circuit.push(Op::X, &[], qubit));
    search.iter().for_each(|&qubit| circuit.push(Op::H, &[], qubit));
    circuit.note(from, Part::Reflect, None);
}

/// The measured bits of the oracle's corrections serve again where there are enough; else the reflection gets its own.
fn outcomes(circuit: &mut Circuit, count: usize) -> Vec<MeasuredId> {
    use crate::id::Id;
    let found = circuit.measured.iter().find(|register| register.name == OUTCOME && register.len as usize >= count);
    match found {
        Some(register) => (0..count).map(|at| MeasuredId::new(register.start as usize + at)).collect(),
        None if count == 0 => Vec::new(),
        None => circuit.add_measured("reflected", count),
    }
}
