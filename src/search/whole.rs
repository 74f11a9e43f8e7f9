//! The whole search: prepare, iterate, measure.
//!
//! Input:  an oracle, the number of iterations and the level of the reflection.
//! Output: a circuit that resets what it uses, prepares the uniform state of `search`, applies oracle and reflection as
//!         a loop, and measures `search` into `found`, bit *i* from qubit *i*.
//! After:  an iteration is `(1 - 2|s><s|) O`, which is a Grover iterate but for its sign, the same for every state.
//!
//! A bit oracle is used on a mark in the state `(|0> - |1>) / sqrt 2`, which turns its flip into a sign.

use crate::circuit::{Circuit, Control, FOUND, Gate, Level, MARK, Op, Part, QubitId, SEARCH, WORK};
use crate::id::{Id, IdVec};
use crate::make::lower::{append_reflection, least_reflection_work, reflection_work};

/// The search circuit around an oracle whose registers are `search` and, where it has them, `mark` and `work`.
pub fn whole_search(oracle: &Circuit, iterations: u64, level: Level) -> Circuit {
    whole_search_within(oracle, iterations, level, u64::MAX)
}

/// The search circuit with at most so many qubits, where the oracle itself and one ancilla for the reflection fit.
pub fn whole_search_within(oracle: &Circuit, iterations: u64, level: Level, qubits: u64) -> Circuit {
    let mut circuit = Circuit::new();
    let (search, mark) = (oracle.register(SEARCH), oracle.register(MARK));
    let room = usize::try_from(qubits).unwrap_or(usize::MAX).saturating_sub(search.len() + mark.len());
    let reflecting = reflection_work(search.len(), level).min(room.max(least_reflection_work(search.len(), level)));
    let work = oracle.register(WORK).len().max(if iterations > 0 { reflecting } else { 0 });
    let search_len = search.len();
    let search = circuit.add_qubits(SEARCH, search_len);
    let mark = if mark.is_empty() { Vec::new() } else { circuit.add_qubits(MARK, mark.len()) };
    let work = if work > 0 { circuit.add_qubits(WORK, work) } else { Vec::new() };
    for register in &oracle.measured {
        circuit.add_measured(&register.name, register.len as usize);
    }
    prepare(&mut circuit, &search, &mark, &work);
    if iterations > 0 {
        let from = circuit.gates().len();
        append_oracle(&mut circuit, oracle);
        append_reflection(&mut circuit, &search, &work, level);
        circuit.repeat_from(from, iterations);
    }
    let from = circuit.gates().len();
    let found = circuit.add_measured(FOUND, search_len);
    for (&qubit, bit) in search.iter().zip(found) {
        circuit.push_measure(None, qubit, bit);
    }
    circuit.note(from, Part::Measure, None);
    circuit
}

fn prepare(circuit: &mut Circuit, search: &[QubitId], mark: &[QubitId], work: &[QubitId]) {
    for register in [search, mark, work] {
        register.iter().for_each(|&qubit| circuit.push(Op::Reset, &[], qubit));
    }
    search.iter().for_each(|&qubit| circuit.push(Op::H, &[], qubit));
    mark.iter().for_each(|&qubit| circuit.push(Op::X, &[], qubit));
    mark.iter().for_each(|&qubit| circuit.push(Op::H, &[], qubit));
    circuit.note(0, Part::Prepare, None);
}

/// Appends the oracle's gates without its opening resets; its qubits keep their places in their registers.
pub(super) fn append_oracle(circuit: &mut Circuit, oracle: &Circuit) {
    let moved = moved_qubits(circuit, oracle);
    let opening = oracle.gates().iter().take_while(|gate| gate.op() == Op::Reset).count();
    let start = circuit.gates().len();
    let mut controls = Vec::new();
    for gate in &oracle.gates()[opening..] {
        controls.clear();
        let control = |c: &Control| Control::new(moved[c.qubit()], !c.is_negated());
        controls.extend(oracle.controls(gate).iter().map(control));
        append_gate(circuit, oracle, gate, &controls, moved[gate.target()]);
    }
    for region in oracle.regions.iter().filter(|region| region.gates.start as usize >= opening) {
        let shift = |at: u32| at - opening as u32 + start as u32;
        let gates = shift(region.gates.start)..shift(region.gates.end);
        circuit.regions.push(crate::circuit::Region { gates, ..region.clone() });
    }
}

fn moved_qubits(circuit: &Circuit, oracle: &Circuit) -> IdVec<QubitId, QubitId> {
    let mut moved = Vec::with_capacity(oracle.qubit_count());
    for register in &oracle.qubits {
        let target = circuit.register(&register.name);
        moved.extend_from_slice(&target[..register.len as usize]);
    }
    debug_assert!(moved.iter().all(|qubit| qubit.index() < circuit.qubit_count()));
    moved.into()
}

fn append_gate(circuit: &mut Circuit, oracle: &Circuit, gate: &Gate, controls: &[Control], target: QubitId) {
    if let Some(bit) = gate.measured() {
        circuit.push_measure(gate.condition(), target, bit);
    } else if let Some(angle) = oracle.angle(gate) {
        circuit.push_angle(gate.condition(), gate.op(), angle, controls, target);
    } else {
        circuit.push_if(gate.condition(), gate.op(), controls, target);
    }
}
