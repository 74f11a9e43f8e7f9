//! The stages around an objective: the optimum with its proof, the ladder of thresholds, the search for the best value.

use num_bigint::BigUint;
use num_traits::Zero;

use super::{Error, Settings, certify, count};
use crate::budget::Budget;
use crate::judge::count::Counted;
use crate::places::Places;
use crate::problem::check::ranges;
use crate::problem::{Problem, Sense};
use crate::search::plan::ladder::{Ladder, Optimal, Rung};
use crate::search::plan::minimum::minimum;

/// At most so many thresholds are counted one by one; what is worse than all of them counts as one class.
const MOST_RUNGS: usize = 512;

/// Counts threshold by threshold. The problem has an objective.
pub fn ladder(problem: &Problem, places: &Places, settings: Settings, budget: &Budget) -> Result<Ladder, Error> {
    let objective = problem.objective.clone().ok_or(Error::NoObjective)?;
    let range = ranges(problem).0[objective.expr];
    let exact = |problem: &Problem| -> Result<BigUint, Error> {
        count(problem, places, settings, budget)?.tally.exact().cloned().ok_or(Error::NotCounted)
    };
    let solutions = exact(problem)?;
    let fits = |value: i128| i64::try_from(value).expect("the range of an expression fits 64 bits");
    let (best, worst, step) = match objective.sense {
        Sense::Least => (range.lo, range.hi, 1),
        Sense::Most => (range.hi, range.lo, -1),
    };
    let as_good = |value: i128| exact(&problem.at_least_as_good(fits(value)).expect("it has an objective"));
    let mut ladder =
        Ladder { sense: objective.sense, solutions, rungs: Vec::new(), is_cut: false, optimal: None, search: None };
    if ladder.solutions.is_zero() {
        return Ok(ladder);
    }
    // The best value that some solution has: distances from the best end, by halving.
    let (mut low, mut high) = (0i128, (worst - best) * step);
    while low < high {
        let middle = low + (high - low) / 2;
        if as_good(best + middle * step)?.is_zero() { low = middle + 1 } else { high = middle }
    }
    ladder.optimal = Some(match low {
        0 => Optimal::Range,
        _ => refuted(problem, fits(best + (low - 1) * step), places, settings, budget)?,
    });
    let end = (worst - best) * step;
    let mut so_far = BigUint::zero();
    for at in low..=end {
        let number = as_good(best + at * step)?;
        if number > so_far {
            ladder.rungs.push(Rung { value: fits(best + at * step), as_good: number.clone() });
            so_far = number;
        }
        if so_far == ladder.solutions {
            break;
        }
        if ladder.rungs.len() == MOST_RUNGS {
            ladder.is_cut = true;
            break;
        }
    }
    let mut before = BigUint::zero();
    let mut classes = Vec::with_capacity(ladder.rungs.len() + 1);
    for rung in &ladder.rungs {
        classes.push(&rung.as_good - &before);
        before.clone_from(&rung.as_good);
    }
    if before < ladder.solutions {
        classes.push(&ladder.solutions - &before);
    }
    ladder.search = minimum(&Counted::space(places), &classes);
    Ok(ladder)
}

/// Shows that no solution is as good as this value.
fn refuted(
    problem: &Problem,
    value: i64,
    places: &Places,
    settings: Settings,
    budget: &Budget,
) -> Result<Optimal, Error> {
    let better = problem.at_least_as_good(value).expect("it has an objective");
    let counted = count(&better, places, settings, budget)?;
    let certified = certify(&better, &counted.tally, None, budget)?;
    match certified.count.is_zero() {
        true => Ok(Optimal::Refuted { steps: certified.certificate.size() }),
        false => Err(Error::Fault(format!("a solution as good as {value} was not counted"))),
    }
}
