//! The reflection about the uniform state: `1 - 2|s><s|`, on any number of qubits.
//!
//! Hadamards and flips take the uniform state to the state of all ones, whose sign is flipped by a Z with many controls;
//! clean ancillas hold the ANDs of pairs, in a balanced tree. With n qubits this costs no T gate at `feedback` beyond
//! 4(n - 2), and 8(n - 3) + 7 at `clifford-t` (n at least 3).

use super::emit::OUTCOME;
use super::gates::Pen;
use crate::circuit::{Circuit, Control, Level, MeasuredId, Op, Part, QubitId};

/// How many qubits a sign flip may depend on at this level.
fn sign_width(level: Level) -> usize {
    match level {
        Level::Wide => usize::MAX,
        Level::Toffoli | Level::CliffordT => 3,
        Level::Feedback => 2,
    }
}

/// How many clean ancillas [`append_reflection`] needs for `n` qubits.
pub fn reflection_work(n: usize, level: Level) -> usize {
    n.saturating_sub(sign_width(level))
}

/// Appends the reflection about the uniform state of `search`. The qubits of `work` are clean, at least
/// [`reflection_work`] of them, and clean again afterwards. At `feedback` the circuit gets measured bits for it, in a
/// register of their own, if it has none yet.
pub fn append_reflection(circuit: &mut Circuit, search: &[QubitId], work: &[QubitId], level: Level) {
    assert!(!search.is_empty(), "a reflection is about a state of at least one qubit");
    let from = circuit.gates().len();
    let ancillas = &work[..reflection_work(search.len(), level)];
    let outcomes = if level == Level::Feedback { outcomes(circuit, ancillas.len()) } else { Vec::new() };
    search.iter().for_each(|&qubit| circuit.push(Op::H, &[], qubit));
    search.iter().for_each(|&qubit| circuit.push(Op::X, &[], qubit));
    let mut operands: std::collections::VecDeque<QubitId> = search.iter().copied().collect();
    let mut pairs = Vec::with_capacity(ancillas.len());
    for &ancilla in ancillas {
        let mut next = || Control::on(operands.pop_front().expect("more operands than the sign takes"));
        let pair = [next(), next()];
        Pen::new(circuit, level).and(&pair, ancilla);
        operands.push_back(ancilla);
        pairs.push((pair, ancilla));
    }
    let controls: Vec<Control> = operands.into_iter().map(Control::on).collect();
    Pen::new(circuit, level).sign(&controls);
    for (at, (pair, ancilla)) in pairs.iter().enumerate().rev() {
        Pen::new(circuit, level).erase(pair, *ancilla, outcomes.get(at).copied());
    }
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
