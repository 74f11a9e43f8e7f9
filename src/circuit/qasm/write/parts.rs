//! Parts: the gates that serve one constraint as a subroutine with a name.
//!
//! Input:  a circuit with regions. Output: a `def` for each run of gates that computes or undoes what one constraint
//! needs, with its source line in a comment, and the calls.
//! After:  read back, a call gives the gates that it stands for.
//!
//! A parameter cannot be a measured bit, so runs that measure, or that depend on an outcome, are written where they
//! stand. Runs of the same gates share a subroutine.

use std::io::{self, Write};

use rustc_hash::FxHashMap;

use super::names::Names;
use super::{Readable, Writer, part_name};
use crate::circuit::{Circuit, Gate, QubitId, Region};
use crate::id::{ConstraintId, Id};

/// The subroutines of a circuit.
#[derive(Default)]
pub(super) struct Parts {
    /// First gate, end, and number of the subroutine, in order.
    calls: Vec<(u32, u32, usize)>,
    list: Vec<Subroutine>,
}

struct Subroutine {
    name: String,
    /// The region that it was made from.
    region: Region,
    constraint: ConstraintId,
    /// What the gates touch, in increasing order.
    qubits: Vec<QubitId>,
}

impl Parts {
    /// Finds the runs.
    pub(super) fn of(circuit: &Circuit) -> Self {
        let mut parts = Self::default();
        let mut same: FxHashMap<(&str, ConstraintId), Vec<usize>> = FxHashMap::default();
        for region in &circuit.regions {
            let (Some(constraint), true) = (region.constraint, can_be_called(circuit, region)) else { continue };
            let part = part_name(region.part);
            let known = same.entry((part, constraint)).or_default();
            let alike = |&&number: &&usize| gates_alike(circuit, region, &parts.list[number].region);
            let number = match known.iter().find(alike) {
                Some(&number) => number,
                None => {
                    let number = parts.list.len();
                    let again = if known.is_empty() { String::new() } else { format!("_{}", known.len() + 1) };
                    known.push(number);
                    parts.list.push(Subroutine {
                        name: format!("{part}_{constraint}{again}"),
                        region: region.clone(),
                        constraint,
                        qubits: touched(circuit, region),
                    });
                    number
                }
            };
            parts.calls.push((region.gates.start, region.gates.end, number));
        }
        parts
    }

    /// The end of the run that begins with this gate, and its subroutine.
    pub(super) fn at(&self, gate: u32) -> Option<(u32, usize)> {
        let place = self.calls.binary_search_by_key(&gate, |&(start, ..)| start).ok()?;
        Some((self.calls[place].1, self.calls[place].2))
    }

    /// Writes the call, without indent.
    pub(super) fn call(&self, number: usize, names: &Names, out: &mut impl Write) -> io::Result<()> {
        let Subroutine { name, qubits, .. } = &self.list[number];
        let given: Vec<&str> = qubits.iter().map(|qubit| names.get(qubit.index())).collect();
        writeln!(out, "{name}({});", given.join(", "))
    }

    /// Writes the definitions.
    pub(super) fn define(&self, circuit: &Circuit, readable: &Readable<'_>, out: &mut impl Write) -> io::Result<()> {
        if self.list.is_empty() {
            return Ok(());
        }
        let none = Self::default();
        let mut writer = Writer {
            circuit,
            parts: &none,
            qubits: Names::single(&circuit.qubits),
            bits: Names::new(&circuit.measured),
            regions: [].iter().peekable(),
            part: None,
            indent: "  ",
            readable: *readable,
        };
        for Subroutine { name, region, constraint, qubits } in &self.list {
            let note = (readable.note)(*constraint);
            writeln!(out, "{}", format!("// {constraint} {note}").trim_end())?;
            let parameters: Vec<String> =
                qubits.iter().map(|qubit| format!("qubit {}", writer.qubits.get(qubit.index()))).collect();
            writeln!(out, "def {name}({}) {{", parameters.join(", "))?;
            writer.part = Some(region.part);
            writer.gates(out, region.gates.start as usize..region.gates.end as usize)?;
            writeln!(out, "}}")?;
        }
        Ok(())
    }
}

fn gates<'a>(circuit: &'a Circuit, region: &Region) -> &'a [Gate] {
    &circuit.gates()[region.gates.start as usize..region.gates.end as usize]
}

/// Whether the run is unitary, and lies in one block.
fn can_be_called(circuit: &Circuit, region: &Region) -> bool {
    let plain = |gate: &Gate| gate.op().is_unitary() && gate.condition().is_none();
    let (start, end) = (region.gates.start, region.gates.end);
    let block = circuit.blocks().partition_point(|block| block.gates.end <= start);
    circuit.blocks().get(block).is_some_and(|block| end <= block.gates.end) && gates(circuit, region).iter().all(plain)
}

fn gates_alike(circuit: &Circuit, one: &Region, other: &Region) -> bool {
    let alike = |(a, b): (&Gate, &Gate)| {
        (a.op(), a.target(), circuit.angle(a), circuit.controls(a))
            == (b.op(), b.target(), circuit.angle(b), circuit.controls(b))
    };
    let (one, other) = (gates(circuit, one), gates(circuit, other));
    one.len() == other.len() && one.iter().zip(other).all(alike)
}

fn touched(circuit: &Circuit, region: &Region) -> Vec<QubitId> {
    let of = |gate: &Gate| -> Vec<QubitId> {
        circuit.controls(gate).iter().map(|control| control.qubit()).chain([gate.target()]).collect()
    };
    let mut qubits: Vec<QubitId> = gates(circuit, region).iter().flat_map(of).collect();
    qubits.sort_unstable();
    qubits.dedup();
    qubits
}
