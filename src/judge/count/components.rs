//! Counting by components: the engine plugged into the tally, and its certificate as a confirmation.

use super::certificate::{Formula, certify_within, check};
use super::combine::disagree;
use super::{Fault, Method, Over, Tally, engine};
use crate::budget::Budget;
use crate::judge::clauses::Cnf;
use crate::problem::{BitId, Problem};

/// Work of a search whose certificate is made and checked to confirm a count: a second at most, for both.
const CERTIFIED_WORK: u64 = 1 << 22;

/// Counts within so much work; bounds where that is too little.
pub(super) fn count(cnf: &Cnf, counted: &[BitId], work: u64, budget: &Budget) -> Tally {
    let shown = (counted.len() < cnf.var_count).then_some(counted);
    let options = engine::Options { work, ..engine::Options::default() };
    let count = engine::count(&cnf.clauses, cnf.var_count, shown, &options, budget);
    Tally::between(count.low, count.high, Method::Components)
}

/// Whether a certificate of this count is quickly made, and holds. One that does not hold is a fault.
pub(super) fn has_short_certificate(
    problem: &Problem,
    over: Over,
    tally: &Tally,
    budget: &Budget,
) -> Result<bool, Fault> {
    let formula = Formula::of(problem, over);
    let Some(certificate) = certify_within(&formula, CERTIFIED_WORK, budget) else { return Ok(false) };
    match check(&formula, &certificate, budget) {
        Ok(count) if count == tally.low => Ok(true),
        Ok(count) => Err(disagree(tally.method, &tally.low, Method::Certificate, &count)),
        Err(refusal) if refusal.is_undecided() => Ok(false),
        Err(refusal) => Err(Fault::Refused { refusal: Box::new(refusal) }),
    }
}
