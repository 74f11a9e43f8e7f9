//! The obligations by trying every assignment, with the reference evaluator.

use std::collections::BTreeMap;

use super::{Obligations, search_of, shown};
use crate::places::{Claim, Places};
use crate::problem::{Bits, Problem};

/// The most bits, and the most evaluated literals and expressions: some tenths of a second.
const MAX_BITS: usize = 14;
const MAX_WORK: usize = 1 << 23;

/// Whether trying everything is quick.
pub(super) fn is_quick(problem: &Problem) -> bool {
    let size = 1 + problem.clauses.lit_count() + problem.exprs.len() + problem.bit_count();
    problem.bit_count() <= MAX_BITS && size << problem.bit_count() <= MAX_WORK
}

/// Settles the obligations; see the module above.
pub(super) fn obligations(problem: &Problem, places: &Places) -> Obligations {
    let (bits, shown) = (problem.bit_count(), shown(problem));
    let part =
        |all: &Bits| -> Vec<bool> { all.iter().zip(&shown).filter(|(_, shown)| **shown).map(|(bit, _)| bit).collect() };
    // For the shown part of each solution, the marked string that was met for it.
    let mut state_of: BTreeMap<Vec<bool>, Bits> = BTreeMap::new();
    for value in 0..1u128 << bits {
        let solution = Bits::from_number(value, bits);
        if !problem.holds(&solution) {
            continue;
        }
        let search = search_of(places, &solution);
        let given = places.assignment(&search);
        if !problem.holds(&given) {
            return Obligations::Broken(solution, "its searched part is not marked".to_owned());
        }
        if places.claim != Claim::OneForMany && part(&given) != part(&solution) {
            return Obligations::Broken(solution, format!("the formulas give {given}, which shows other bits"));
        }
        if places.claim == Claim::OneForOne
            && let Some(other) = state_of.insert(part(&solution), search.clone())
            && other != search
        {
            return Obligations::Broken(solution, format!("the search string {other} shows the same bits"));
        }
    }
    Obligations::Hold(
        "every assignment was tried: what the places claim of computed and searched bits is so".to_owned(),
    )
}
