//! The stage that counts: the solutions, and the marked states where these are not the same.

use num_bigint::BigUint;

use super::{Error, KEPT_SOLUTIONS, Settings};
use crate::budget::Budget;
use crate::judge::count::{self, Counted, Options, Over, Run, Tally};
use crate::judge::restate::restate;
use crate::places::Places;
use crate::problem::Problem;

/// The largest search register whose marked states are counted only to confirm the tally: a sweep of some milliseconds.
const MAX_CONFIRMED: usize = 20;

/// Counts the solutions exactly, and the marked states where the places do not claim that they are the same.
pub fn count(problem: &Problem, places: &Places, settings: Settings, budget: &Budget) -> Result<Counted, Error> {
    let options = Options { threads: settings.threads, keep: KEPT_SOLUTIONS, ..Options::default() };
    counted(problem, places, &options, budget).map(|(counted, _)| counted)
}

/// Counts as the options say, with the ways that led there. Where marked states are solutions one for one and bits are
/// computed, the marked states must come to the same number: they confirm the tally, or stand in for it where it was out
/// of reach.
pub(super) fn counted(
    problem: &Problem,
    places: &Places,
    options: &Options,
    budget: &Budget,
) -> Result<(Counted, Vec<Run>), Error> {
    let (mut tally, mut runs) = count::count_logged(problem, Over::Shown, options, budget)?;
    let space = Counted::space(places);
    if Counted::needs_states(places) {
        let states = states(problem, places, options, &mut runs, budget)?;
        return Ok((Counted { tally, states: Some(states), space }, runs));
    }
    let is_quick = places.search_len() <= MAX_CONFIRMED;
    if !places.computed.is_empty() && (is_quick || tally.exact().is_none()) {
        let states = states(problem, places, options, &mut runs, budget)?;
        let are_certain = tally.confidence >= 1.0 && states.confidence >= 1.0;
        if are_certain && (states.low > tally.high || states.high < tally.low) {
            let (one, other) = (words(&tally), words(&states));
            return Err(Error::Fault(format!("{one} solutions, but {other} marked states that should be one for one")));
        }
        if tally.exact().is_none() && states.exact().is_some() {
            tally = states;
        }
    }
    Ok((Counted { tally, states: None, space }, runs))
}

/// The tally of the marked states, with some of them as bits of the problem.
fn states(
    problem: &Problem,
    places: &Places,
    options: &Options,
    runs: &mut Vec<Run>,
    budget: &Budget,
) -> Result<Tally, Error> {
    let restated = restate(problem, places);
    let (mut states, more) = count::count_logged(&restated.problem, Over::AllBits, options, budget)?;
    runs.extend(more);
    states.solutions.iter_mut().for_each(|bits| *bits = restated.assignment(places, bits));
    states.solutions.sort();
    Ok(states)
}

fn words(tally: &Tally) -> String {
    tally.exact().map_or_else(|| format!("{} to {}", tally.low, tally.high), BigUint::to_string)
}
