//! Gadgets: runs of gates that have a name, so that a reader sees one line where there are many.

use std::io::{self, Write};

use crate::circuit::{Circuit, Gate, Op, QubitId};

/// A gate of a gadget: what it does, its control if it has one, its target; numbers are those of the gadget's qubits.
pub type GadgetGate = (Op, Option<usize>, usize);

/// A named run of gates without angles and conditions, each with at most one control.
#[derive(Clone, PartialEq, Eq, Debug)]
pub struct Gadget {
    /// The name, which is no gate of the standard library.
    pub name: &'static str,
    /// The names of its qubits.
    pub qubits: &'static [&'static str],
    /// Its gates.
    pub gates: Vec<GadgetGate>,
}

impl Gadget {
    /// Writes the definition.
    pub(super) fn define(&self, keyword: impl Fn(Op) -> &'static str, out: &mut impl Write) -> io::Result<()> {
        writeln!(out, "gate {} {} {{", self.name, self.qubits.join(", "))?;
        for &(op, control, target) in &self.gates {
            match control {
                Some(control) => {
                    writeln!(out, "  c{} {}, {};", keyword(op), self.qubits[control], self.qubits[target])?
                }
                None => writeln!(out, "  {} {};", keyword(op), self.qubits[target])?,
            }
        }
        writeln!(out, "}}")
    }

    /// The qubits on which the gates at the start of the run are this gadget.
    pub(super) fn found_in(&self, circuit: &Circuit, run: &[Gate]) -> Option<Vec<QubitId>> {
        let mut places: Vec<Option<QubitId>> = vec![None; self.qubits.len()];
        for (gate, &(op, control, target)) in run.get(..self.gates.len())?.iter().zip(&self.gates) {
            let controls = circuit.controls(gate);
            let fits = match (control, controls) {
                (None, []) => true,
                (Some(place), [only]) => !only.is_negated() && put(&mut places, place, only.qubit()),
                _ => false,
            };
            if !fits || gate.op() != op || gate.condition().is_some() || !put(&mut places, target, gate.target()) {
                return None;
            }
        }
        places.into_iter().collect()
    }
}

/// Whether the place holds the qubit, now or already, and no other place does.
fn put(places: &mut [Option<QubitId>], place: usize, qubit: QubitId) -> bool {
    match places[place] {
        Some(held) => held == qubit,
        None => {
            let new = !places.contains(&Some(qubit));
            places[place] = Some(qubit);
            new
        }
    }
}
