//! Reading a circuit symbolically: what every qubit holds at the end, as a function of the inputs.
//!
//! Input: a circuit whose gates keep basis states. Output: [`End`]. Each gate is interpreted alone: an X adds the
//! conjunction of its controls to its target, a diagonal gate notes its phase on the conjunction of its controls and
//! its target. A `reset` leaves 0, and what it found is noted as a claim that must be proven.

use std::collections::BTreeMap;

use super::graph::{Graph, Signal, Sum};
use crate::budget::Budget;
use crate::circuit::{Circuit, Gate, Op};
use crate::id::Id;
use crate::judge::audit::oracle::{Roles, Trace, eighths};

/// What a circuit does to all inputs at once.
pub(super) struct End {
    /// Signals that must be "no" on every input, each with what it would mean if it were not.
    pub(super) zeros: Vec<Signal>,
    /// A bit oracle: by what `mark` was flipped.
    pub(super) flipped: Option<Signal>,
    /// Where the phase is -1, up to a global phase.
    pub(super) sign: Signal,
    /// Whether phases other than signs remain.
    pub(super) has_other_phases: bool,
}

/// Reads a circuit; search qubit `i` is input `i`, and `mark` the input after them. `None` where the budget or the room
/// is not enough.
pub(super) fn read(graph: &mut Graph, circuit: &Circuit, roles: &Roles, first: &Trace, budget: &Budget) -> Option<End> {
    let mut qubits = vec![Sum::of(graph, Signal::NO); circuit.qubit_count()];
    let inputs: Vec<_> = roles.search.iter().chain(&roles.mark).copied().collect();
    for (at, qubit) in inputs.iter().enumerate() {
        qubits[qubit.index()] = Sum::of(graph, Signal::of(at + 1));
    }
    let resets = first.resets.iter().map(|&(_, value)| value).collect::<Vec<_>>().into_iter();
    let mut reader = Reader { graph, circuit, qubits, resets, phases: BTreeMap::new(), zeros: Vec::new() };
    let mut done = 0_u64;
    for block in circuit.blocks() {
        for _ in 0..block.repeat {
            for gate in &circuit.gates()[block.gates.start as usize..block.gates.end as usize] {
                reader.step(gate);
                done += 1;
                if done.is_multiple_of(4096) && (budget.spent() || reader.graph.is_too_large()) {
                    return None;
                }
            }
        }
    }
    Some(reader.end(roles))
}

struct Reader<'a> {
    graph: &'a mut Graph,
    circuit: &'a Circuit,
    qubits: Vec<Sum>,
    /// What each `reset` must find.
    resets: std::vec::IntoIter<bool>,
    /// Phases in multiples of pi/4, by the node where they apply.
    phases: BTreeMap<usize, u8>,
    zeros: Vec<Signal>,
}

impl Reader<'_> {
    fn step(&mut self, gate: &Gate) {
        let target = gate.target().index();
        match gate.op() {
            Op::X => {
                let flips = self.controls(gate, None);
                self.qubits[target].add(self.graph, flips);
            }
            Op::Reset => {
                let value = self.resets.next().expect("the trace met every reset");
                let found = self.qubits[target].signal(self.graph);
                self.zeros.push(found ^ value);
                self.qubits[target] = Sum::of(self.graph, Signal::NO);
            }
            op => {
                let turned = eighths(op).expect("a gate that keeps basis states");
                let value = self.qubits[target].signal(self.graph);
                let place = self.controls(gate, Some(value));
                // A phase on the negation is a global phase and the opposite phase.
                let turned = if place.is_negated() { 8 - turned } else { turned };
                let phase = self.phases.entry(place.node()).or_default();
                *phase = (*phase + turned) % 8;
            }
        }
    }

    fn controls(&mut self, gate: &Gate, more: Option<Signal>) -> Signal {
        let mut operands = Vec::with_capacity(gate.control_count() + 1);
        for control in self.circuit.controls(gate) {
            operands.push(self.qubits[control.qubit().index()].signal(self.graph) ^ control.is_negated());
        }
        operands.extend(more);
        self.graph.all(&operands)
    }

    fn end(mut self, roles: &Roles) -> End {
        for (at, qubit) in roles.search.iter().enumerate() {
            self.qubits[qubit.index()].add(self.graph, Signal::of(at + 1));
        }
        for qubit in roles.search.iter().chain(&roles.work) {
            let left = self.qubits[qubit.index()].signal(self.graph);
            self.zeros.push(left);
        }
        let flipped = roles.mark.map(|mark| {
            let mark = &mut self.qubits[mark.index()];
            mark.add(self.graph, Signal::of(roles.search.len() + 1));
            mark.signal(self.graph)
        });
        let mut sign = Sum::default();
        let mut has_other_phases = false;
        for (&node, &phase) in self.phases.iter().filter(|&(&node, _)| node != 0) {
            has_other_phases |= phase % 4 != 0;
            if phase == 4 {
                sign.add(self.graph, Signal::of(node));
            }
        }
        let sign = sign.signal(self.graph);
        self.zeros.sort_unstable();
        self.zeros.dedup();
        self.zeros.retain(|&zero| zero != Signal::NO);
        End { zeros: self.zeros, flipped, sign, has_other_phases }
    }
}
