//! Collecting XORs in place: CNOTs after which each operand of an AND is the content of one qubit.
//!
//! Input:  operands, each the XOR of some qubits with the value it must have.
//! Output: CNOTs and one control for each operand; undoing the CNOTs in reverse order restores all qubits.
//! After:  the controls are different qubits. An operand that follows from the others has no control; if it contradicts
//!         them, the AND never holds.
//!
//! For every qubit that was a target we keep how its first content is the XOR of present contents; so operands may
//! share qubits, and one may contain another.

use rustc_hash::FxHashMap;

use super::plan::keep_odd;
use crate::circuit::{Control, QubitId};

/// An operand: the XOR of the qubits must be `value`.
#[derive(Clone, Debug)]
pub(super) struct Operand {
    pub(super) qubits: Vec<QubitId>,
    pub(super) value: bool,
}

/// What makes the operands controls.
#[derive(Clone, PartialEq, Eq, Debug, Default)]
pub(super) struct Conjugation {
    /// Sources and targets, in order.
    pub(super) cnots: Vec<(QubitId, QubitId)>,
    /// One qubit for each operand that does not follow from the others.
    pub(super) controls: Vec<Control>,
    /// No assignment fulfils all operands.
    pub(super) contradictory: bool,
}

/// Finds the CNOTs. Operands with few qubits come first.
pub(super) fn conjugate(mut operands: Vec<Operand>) -> Conjugation {
    operands.sort_by_key(|operand| operand.qubits.len());
    let mut worker = Worker::default();
    for at in 0..operands.len() {
        let later = if operands.len() == 2 { operands.get(at + 1) } else { None };
        worker.add(&operands[at], later);
    }
    worker.result
}

#[derive(Default)]
struct Worker {
    result: Conjugation,
    /// The value each control must have.
    wanted: FxHashMap<QubitId, bool>,
    /// The first content of a qubit as the XOR of present contents, where it is another than its own.
    first: FxHashMap<QubitId, Vec<QubitId>>,
}

impl Worker {
    fn add(&mut self, operand: &Operand, later: Option<&Operand>) {
        let present = self.present(&operand.qubits);
        let free = |qubit: &&QubitId| !self.wanted.contains_key(qubit);
        let Some(&pivot) = preferred(&present, operand, later, &free) else {
            let follows = present.iter().fold(false, |sum, qubit| sum ^ self.wanted[qubit]);
            self.result.contradictory |= follows != operand.value;
            return;
        };
        self.result.cnots.extend(present.iter().filter(|&&source| source != pivot).map(|&source| (source, pivot)));
        self.result.controls.push(Control::new(pivot, operand.value));
        self.wanted.insert(pivot, operand.value);
        if present.len() > 1 {
            self.substitute(pivot, present);
        }
    }

    fn present(&self, qubits: &[QubitId]) -> Vec<QubitId> {
        if self.first.is_empty() {
            return qubits.to_vec();
        }
        let mut present = Vec::new();
        for qubit in qubits {
            match self.first.get(qubit) {
                Some(content) => present.extend_from_slice(content),
                None => present.push(*qubit),
            }
        }
        keep_odd(&mut present);
        present
    }

    /// The pivot now holds the XOR of `sum`, of which it is a part: what it held before is that XOR too.
    fn substitute(&mut self, pivot: QubitId, sum: Vec<QubitId>) {
        let others: Vec<QubitId> = sum.iter().copied().filter(|&qubit| qubit != pivot).collect();
        for content in self.first.values_mut() {
            if content.contains(&pivot) {
                content.extend_from_slice(&others);
                keep_odd(content);
            }
        }
        self.first.entry(pivot).or_insert(sum);
    }
}

/// A free qubit to collect the operand on: one that the other operand does not share, or, where the two share most of
/// their qubits, one that both have, so that the second can start from the first.
fn preferred<'a>(
    present: &'a [QubitId],
    operand: &Operand,
    later: Option<&Operand>,
    free: &dyn Fn(&&QubitId) -> bool,
) -> Option<&'a QubitId> {
    let Some(later) = later else { return present.iter().find(free) };
    let shared = |qubit: &&QubitId| later.qubits.binary_search(qubit).is_ok();
    let common = operand.qubits.iter().filter(shared).count();
    let apart = operand.qubits.len() + later.qubits.len() - 2 * common;
    let together = common > 0 && apart + 1 < later.qubits.len();
    present.iter().filter(free).find(|qubit| shared(qubit) == together).or_else(|| present.iter().find(free))
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::id::Id;
    use crate::random::SplitMix64;

    /// Applies the CNOTs to every basis state: the controls hold exactly where all operands have their values.
    fn check(operands: &[(u32, bool)], qubits: usize) {
        let list = |mask: u32| (0..qubits).filter(|at| mask >> at & 1 == 1).map(QubitId::new).collect::<Vec<_>>();
        let found = conjugate(operands.iter().map(|&(mask, value)| Operand { qubits: list(mask), value }).collect());
        for state in 0u32..1 << qubits {
            let wanted = operands.iter().all(|&(mask, value)| ((state & mask).count_ones() % 2 == 1) == value);
            let mut after = state;
            for (source, target) in &found.cnots {
                assert_ne!(source, target);
                after ^= (after >> source.index() & 1) << target.index();
            }
            let held = found.controls.iter().all(|c| (after >> c.qubit().index() & 1 == 1) != c.is_negated());
            assert_eq!(held && !found.contradictory, wanted, "{operands:?} at {state:b}: {found:?}");
        }
        let mut targets: Vec<QubitId> = found.controls.iter().map(|control| control.qubit()).collect();
        targets.sort();
        targets.dedup();
        assert_eq!(targets.len(), found.controls.len());
    }

    #[test]
    fn controls_hold_exactly_where_the_operands_do() {
        let mut random = SplitMix64::new(1);
        for _ in 0..2000 {
            let operands: Vec<(u32, bool)> =
                (0..1 + random.below(4)).map(|_| (1 + random.below(31) as u32, random.coin())).collect();
            check(&operands, 5);
        }
    }

    #[test]
    fn a_full_adder_needs_two_cnots() {
        let operand = |qubits: [usize; 2]| Operand { qubits: qubits.map(QubitId::new).to_vec(), value: true };
        assert_eq!(conjugate(vec![operand([0, 2]), operand([1, 2])]).cnots.len(), 2);
    }
}
