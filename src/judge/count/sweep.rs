//! The sweep: every bit string of a small problem is tried, by the judge's [`rows`].
//!
//! A count over some bits only follows from the solutions over all bits where these are few enough to be listed.

use num_bigint::BigUint;

use super::Options;
use crate::budget::Budget;
use crate::judge::rows;
use crate::problem::{BitId, Bits, Problem};

/// Bits that are swept at most.
const SWEPT_BITS: usize = 28;
/// Bit strings times the size of the problem, up to which the sweep comes first: some tenths of a second.
const CHEAP_WORK: u64 = 1 << 33;
/// The same, up to which the sweep confirms another way: some seconds.
const AFFORDABLE_WORK: u64 = 1 << 36;
/// Solutions over all bits that are listed to count over some of them.
const PROJECTED: usize = 1 << 16;

/// What a sweep found.
#[derive(Clone, Debug)]
pub(super) struct Sweep {
    pub(super) count: BigUint,
    pub(super) solutions: Vec<Bits>,
    pub(super) complete: bool,
}

/// Whether a sweep costs next to nothing.
pub(super) fn is_cheap(problem: &Problem) -> bool {
    costs_at_most(CHEAP_WORK, problem)
}

/// Whether a sweep is worth its cost as a confirmation.
pub(super) fn is_affordable(problem: &Problem) -> bool {
    costs_at_most(AFFORDABLE_WORK, problem)
}

fn costs_at_most(work: u64, problem: &Problem) -> bool {
    let size = 1 + problem.clauses.lit_count() as u64 + problem.exprs.len() as u64;
    problem.bit_count() <= SWEPT_BITS && size <= work >> problem.bit_count()
}

/// Sweeps; `None` where there are too many bits, or the budget ran out, or the projection is out of reach.
pub(super) fn sweep(problem: &Problem, counted: &[BitId], options: &Options, budget: &Budget) -> Option<Sweep> {
    if problem.bit_count() > SWEPT_BITS {
        return None;
    }
    if counted.len() == problem.bit_count() {
        let swept = rows::count(problem, options.threads, options.keep, budget)?;
        return Some(Sweep { count: swept.count.into(), solutions: swept.solutions, complete: swept.complete });
    }
    let swept = rows::count(problem, options.threads, PROJECTED, budget)?;
    swept.complete.then(|| project(swept.solutions, counted, options.keep))
}

/// The number of different values of the counted bits, with one solution of each.
fn project(solutions: Vec<Bits>, counted: &[BitId], keep: usize) -> Sweep {
    let seen = |bits: &Bits| counted.iter().map(|&bit| bits.get(bit)).collect::<Bits>();
    let mut seen: Vec<(Bits, Bits)> = solutions.into_iter().map(|bits| (seen(&bits), bits)).collect();
    seen.sort_unstable();
    seen.dedup_by(|a, b| a.0 == b.0);
    let count = BigUint::from(seen.len());
    let complete = seen.len() <= keep;
    let mut solutions: Vec<Bits> = seen.into_iter().take(keep).map(|(_, bits)| bits).collect();
    solutions.sort_unstable();
    Sweep { count, solutions, complete }
}
