//! What a search file measures at its end, and into what.

use super::End;
use crate::circuit::{COUNT, COUNTED, Circuit, FOUND, Gate, Op, QubitId, SEARCH};
use crate::id::Id;

/// The final measurements of an estimation.
pub(super) struct Readout {
    /// The place where they begin.
    pub(super) tail: usize,
    /// The qubit of each digit, the lowest first.
    pub(super) digits: Vec<QubitId>,
}

impl Readout {
    /// The place where the final measurement begins; it must take `search[i]` to `found[i]`.
    pub(super) fn found(circuit: &Circuit, search: &[QubitId]) -> Result<usize, End> {
        let (start, from) = last(circuit, FOUND)?;
        if from.len() != search.len() {
            let text = format!("`{FOUND}` has {} bits, `{SEARCH}` has {}", from.len(), search.len());
            return Err(End::Differs(text));
        }
        for (at, (&measured, &qubit)) in from.iter().zip(search).enumerate() {
            if measured != Some(qubit) {
                let got = measured.map_or("never".to_owned(), |other| format!("from {}", circuit.qubit_name(other)));
                let wanted = circuit.qubit_name(qubit);
                return Err(End::Differs(format!(
                    "{FOUND}[{at}] is to be measured from {wanted} at the end, and is measured {got}"
                )));
            }
        }
        Ok(start)
    }

    /// The final measurement of `count` into `counted`, in any order of its digits.
    pub(super) fn counted(circuit: &Circuit) -> Result<Self, End> {
        let (tail, from) = last(circuit, COUNTED)?;
        let count = circuit.register(COUNT);
        let mut digits = Vec::with_capacity(from.len());
        for (at, measured) in from.into_iter().enumerate() {
            match measured {
                Some(qubit) if count.contains(&qubit) && !digits.contains(&qubit) => digits.push(qubit),
                Some(qubit) => {
                    let qubit = circuit.qubit_name(qubit);
                    return Err(End::Differs(format!("{COUNTED}[{at}] is measured from {qubit}, and is no new digit")));
                }
                None => return Err(End::Differs(format!("{COUNTED}[{at}] is never measured at the end"))),
            }
        }
        if digits.len() != count.len() {
            let text = format!("`{COUNTED}` has {} bits, `{COUNT}` has {}", digits.len(), count.len());
            return Err(End::Differs(text));
        }
        Ok(Self { tail, digits })
    }
}

/// Where the final measurements begin, and from which qubit each bit of a register is measured there.
fn last(circuit: &Circuit, name: &str) -> Result<(usize, Vec<Option<QubitId>>), End> {
    let gates = circuit.gates();
    let is_last = |gate: &&Gate| gate.op() == Op::Measure && gate.condition().is_none();
    let last_block = circuit.blocks().last();
    let count = gates.iter().rev().take_while(is_last).count();
    let start = match last_block.filter(|block| block.repeat != 1) {
        Some(_) => gates.len(),
        None => gates.len() - count.min(last_block.map_or(0, |block| block.gates.len())),
    };
    let register = circuit.measured.iter().find(|register| register.name == name);
    let register = register.ok_or_else(|| End::Differs(format!("there is no register `{name}` for the result")))?;
    // Measurements of other qubits before these belong to the search.
    let mut from = vec![None; register.len as usize];
    for gate in &gates[start..] {
        let bit = gate.measured().expect("only measurements").index();
        if let Some(at) = bit.checked_sub(register.start as usize).filter(|&at| at < from.len()) {
            from[at] = Some(gate.target());
        }
    }
    Ok((start, from))
}
