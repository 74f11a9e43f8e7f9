//! Fan-out: copies of searched qubits, so that constraints that share a variable are computed at the same time.
//!
//! Input:  steps, and how many runs may share one copy. Output: the steps on copies, and the CNOTs that make the copies.
//! After:  the same values are computed; copies are made by a tree of CNOTs, so that *k* of them take log2 *k* layers.
//!
//! Within a run of one constraint a searched qubit may be flipped or hold another's content, but not from run to run; so
//! each run may use another copy throughout. Copies cost qubits and CNOTs, no T gate.

use super::steps::{Step, Steps};
use crate::circuit::QubitId;
use crate::id::Id;

/// Puts the runs on copies. `search` is how many qubits are searched, `free` the first number that is not taken; each
/// pair of the result is a source and the copy made from it.
pub(super) fn fan_out(steps: &mut Steps, search: usize, free: usize, share: usize) -> Vec<(QubitId, QubitId)> {
    let runs = run_ranges(steps);
    let used: Vec<Vec<usize>> = runs.iter().map(|run| used_in(steps, run.clone(), search)).collect();
    let mut uses = vec![0usize; search];
    used.iter().flatten().for_each(|&qubit| uses[qubit] += 1);
    let (mut copies, mut spread, mut next) = (Vec::with_capacity(search), Vec::new(), free);
    for (qubit, &uses) in uses.iter().enumerate() {
        let mut list = vec![QubitId::new(qubit)];
        for at in 1..uses.div_ceil(share) {
            let copy = QubitId::new(next);
            next += 1;
            spread.push((at, list[(at - 1) / 2], copy));
            list.push(copy);
        }
        copies.push(list);
    }
    // The trees of all qubits grow together.
    spread.sort_by_key(|&(at, source, _)| (at, source));
    let mut met = vec![0usize; search];
    for (run, used) in runs.into_iter().zip(used) {
        let mut now: Vec<(usize, QubitId)> = Vec::with_capacity(used.len());
        for qubit in used {
            now.push((qubit, copies[qubit][met[qubit] % copies[qubit].len()]));
            met[qubit] += 1;
        }
        let moved = |qubit: QubitId| {
            now.binary_search_by_key(&qubit.index(), |&(qubit, _)| qubit).map_or(qubit, |place| now[place].1)
        };
        steps.move_qubits(run, moved);
    }
    spread.into_iter().map(|(_, source, copy)| (source, copy)).collect()
}

fn run_ranges(steps: &Steps) -> Vec<std::ops::Range<usize>> {
    let ends = steps.runs.iter().skip(1).map(|run| run.start).chain([steps.compute.len()]);
    steps.runs.iter().zip(ends).map(|(run, end)| run.start..end).collect()
}

/// The searched qubits that a run uses; sorted.
fn used_in(steps: &Steps, run: std::ops::Range<usize>, search: usize) -> Vec<usize> {
    let mut used = Vec::new();
    for step in &steps.compute[run] {
        match *step {
            Step::Flip(qubit) => used.push(qubit),
            Step::Cnot(source, target) => used.extend([source, target]),
            Step::And(controls, target) | Step::Toggle(controls, target) => {
                used.extend(steps.controls(controls).iter().map(|control| control.qubit()));
                used.push(target);
            }
            Step::Sign(controls) => used.extend(steps.controls(controls).iter().map(|control| control.qubit())),
        }
    }
    let mut used: Vec<usize> = used.into_iter().map(Id::index).filter(|&qubit| qubit < search).collect();
    used.sort_unstable();
    used.dedup();
    used
}
