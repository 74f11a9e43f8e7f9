//! The obligations of places that compute bits, or claim something about those that are searched.
//!
//! Input: a problem and places from whatever source. Output: whether what the places claim is so. The circuit is judged
//! elsewhere, against the problem over the searched bits ([`restate`](crate::judge::restate)), so that a marked string
//! extends to a solution: the one in which the computed bits are what their formulas say. Left to show is
//!
//! - that the searched part of every solution is marked; and
//! - unless one solution may stand for many, that solutions with the same searched part show the same bits, which are those
//!   that the formulas give; and, where each state is to be one solution, that no two states show the same bits.
//!
//! Small problems are settled by trying everything with the reference evaluator ([`exhaustive`]), all others by a solver
//! ([`refuted`]). Nothing is taken from whoever made the places.

mod exhaustive;
mod proof;
mod refuted;
mod solver;

pub use proof::{Proven, prove};

use crate::budget::Budget;
use crate::judge::audit::{Outcome, Verdict, Witness};
use crate::places::{Claim, Places};
use crate::problem::{BitId, Bits, Problem};

/// What became of the obligations.
#[derive(Clone, PartialEq, Eq, Debug)]
pub enum Obligations {
    /// They hold, for the reason given.
    Hold(String),
    /// One does not: a solution that shows it, and why.
    Broken(Bits, String),
    /// Not settled, and why.
    Open(String),
}

/// How the obligations are settled.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub enum Way {
    /// By trying everything where that is quick, else by a solver.
    Best,
    /// By a solver.
    Solver,
}

/// Whether the places have anything to prove besides what the circuit shows.
pub(super) fn are_needed(problem: &Problem, places: &Places) -> bool {
    let hidden = problem.shown.as_ref().is_some_and(|shown| shown.len() < problem.bit_count());
    !places.computed.is_empty() || places.claim == Claim::OneForOne && hidden
}

/// Settles the obligations. The places passed their check.
pub fn obligations(problem: &Problem, places: &Places, way: Way, budget: &Budget) -> Obligations {
    if way == Way::Best && exhaustive::is_quick(problem) {
        return exhaustive::obligations(problem, places);
    }
    refuted::obligations(problem, places, budget)
}

/// Adds the obligations to a verdict on the circuit.
pub(super) fn add(problem: &Problem, places: &Places, verdict: &mut Verdict, budget: &Budget) {
    if verdict.outcome == Outcome::Differs || !are_needed(problem, places) {
        return;
    }
    match obligations(problem, places, Way::Best, budget) {
        Obligations::Hold(why) => verdict.notes.push(why),
        Obligations::Open(why) => {
            verdict.outcome = Outcome::Undecided;
            verdict.notes.push(format!("what the places claim is not settled: {why}"));
        }
        Obligations::Broken(bits, got) => {
            verdict.outcome = Outcome::Differs;
            let expected = "a solution as the places claim it".to_owned();
            verdict.witness = Some(Witness { bits, expected, got });
        }
    }
}

/// Which bits a solution is projected on.
fn shown(problem: &Problem) -> Vec<bool> {
    let mut shown = vec![problem.shown.is_none(); problem.bit_count()];
    problem.shown.iter().flatten().for_each(|&bit| shown[crate::id::Id::index(bit)] = true);
    shown
}

/// The string of the search register for bits of the problem.
fn search_of(places: &Places, bits: &Bits) -> Bits {
    places.searched.iter().map(|&bit: &BitId| bits.get(bit)).collect()
}
