//! The short proof that a fault does no harm: the few gates that it changes are the same operator on their own qubits.
//!
//! Input: a fault, the good circuit and the changed one. Output: whether the gates that stand in the place of the
//! fault's are the same operator, up to a global phase, on the qubits they touch: for either value of each measured bit
//! that they depend on. Then the whole circuits are the same, however large they are and whatever is measured in them.
//! Runs with a measurement or a `reset` are left to the longer proofs.

use crate::budget::Budget;
use crate::circuit::{Circuit, Control, Gate, MeasuredId, QubitId};
use crate::judge::audit::Outcome;
use crate::judge::audit::compare::{CompareOptions, Shared, compare_superposed};
use crate::judge::audit::faults::Fault;

/// The most qubits that the gates may touch, and the most measured bits that they may depend on.
const MOST_QUBITS: usize = 12;
const MOST_CONDITIONS: usize = 4;

/// Whether the changed gates are the same operator as those they stand for; `false` also where that is not decided.
pub(super) fn is_same(fault: &Fault, good: &Circuit, changed: &Circuit, budget: &Budget) -> bool {
    let Some(at) = fault.gate().map(|at| at as usize) else { return false };
    let ours = if matches!(fault, Fault::Swap(_)) { 2 } else { 1 };
    let theirs = (ours + changed.gates().len()).checked_sub(good.gates().len());
    let windows =
        theirs.and_then(|theirs| Some((good.gates().get(at..at + ours)?, changed.gates().get(at..at + theirs)?)));
    let Some((ours, theirs)) = windows else { return false };
    let all = || ours.iter().map(|gate| (good, gate)).chain(theirs.iter().map(|gate| (changed, gate)));
    let mut qubits: Vec<QubitId> = all().flat_map(|(circuit, gate)| qubits_of(circuit, gate)).collect();
    let mut bits: Vec<MeasuredId> = all().filter_map(|(_, gate)| Some(gate.condition()?.bit())).collect();
    qubits.sort();
    qubits.dedup();
    bits.sort();
    bits.dedup();
    let fits = qubits.len() <= MOST_QUBITS && bits.len() <= MOST_CONDITIONS;
    if !fits || all().any(|(_, gate)| !gate.op().is_unitary()) {
        return false;
    }
    (0..1u32 << bits.len()).all(|values| {
        let value = |bit: MeasuredId| bits.iter().position(|&id| id == bit).is_some_and(|at| values >> at & 1 == 1);
        let (a, b) = (small(good, ours, &qubits, value), small(changed, theirs, &qubits, value));
        let compared = Shared::of(&a, &b)
            .and_then(|shared| compare_superposed(&a, &b, &shared, &CompareOptions::default(), budget));
        compared.is_ok_and(|verdict| verdict.outcome == Outcome::Equal)
    })
}

fn qubits_of(circuit: &Circuit, gate: &Gate) -> Vec<QubitId> {
    circuit.controls(gate).iter().map(|control| control.qubit()).chain([gate.target()]).collect()
}

/// These gates alone, on their qubits, for one value of each measured bit.
fn small(circuit: &Circuit, gates: &[Gate], qubits: &[QubitId], value: impl Fn(MeasuredId) -> bool) -> Circuit {
    let mut small = Circuit::new();
    let names = small.add_qubits("q", qubits.len());
    let place = |qubit: QubitId| names[qubits.iter().position(|&id| id == qubit).expect("a qubit of these gates")];
    let applied = |gate: &&Gate| gate.condition().is_none_or(|condition| value(condition.bit()) == condition.value());
    for gate in gates.iter().filter(applied) {
        let controls: Vec<Control> = circuit
            .controls(gate)
            .iter()
            .map(|control| Control::new(place(control.qubit()), !control.is_negated()))
            .collect();
        match circuit.angle(gate) {
            Some(angle) => small.push_angle(None, gate.op(), angle, &controls, place(gate.target())),
            None => small.push(gate.op(), &controls, place(gate.target())),
        }
    }
    small
}
