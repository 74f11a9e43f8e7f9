//! The tally alone, with everything that `count` may be asked.

use std::time::Duration;

use num_bigint::BigUint;
use num_traits::{One, Zero};

use super::Error;
use super::counting::counted;
use crate::budget::Budget;
use crate::judge::count::hashing::Accuracy;
use crate::judge::count::{self, Counted, Options, Over, Run, Wanted};
use crate::places::Places;
use crate::problem::Problem;
use crate::search::number::Wide;
use crate::search::plan::tolerance::{ForPlan, Slope, reported};

/// A tally, and the ways that led to it.
#[derive(Clone, PartialEq, Debug)]
pub struct Tallied {
    /// The tally.
    pub counted: Counted,
    /// The ways, in the order in which they ran.
    pub runs: Vec<Run>,
    /// What a plan makes of it, where one was asked for and there is anything to find.
    pub plan: Option<ForPlan>,
}

impl Tallied {
    /// Whether all that was asked for was reached: a number, or an interval near enough.
    pub fn is_complete(&self) -> bool {
        let marks = self.counted.marks();
        let answered = self.counted.tally.is_answer() && marks.is_answer();
        self.plan.as_ref().map_or(answered, |plan| plan.is_reached() || marks.exact().is_some())
    }
}

/// A plan that the tally is for.
#[derive(Clone, Copy, PartialEq, Debug)]
pub struct Margin {
    /// How far the worst case may lie below the best.
    pub margin: f64,
    /// What the plan aims at.
    pub slope: Slope,
    /// The confidence of an interval.
    pub confidence: f64,
}

/// Tolerances that are tried for a margin, each half of the one before: iteration counts are whole, so the first may
/// miss the margin by a little.
const TRIES: usize = 4;

/// Counts the solutions alone. The space is that of the bits that are counted over: what of it a search would leave out is
/// a question of the plan, and finding it out takes longer than most counts.
pub fn tally_alone(problem: &Problem, options: &Options, budget: &Budget) -> Result<Tallied, Error> {
    let (tally, runs) = count::count_logged(problem, Over::Shown, options, budget)?;
    let bits = problem.shown.as_ref().map_or(problem.bit_count(), Vec::len);
    let counted = Counted { tally, states: None, space: BigUint::one() << bits };
    Ok(Tallied { counted, runs, plan: None })
}

/// Counts the solutions, and the marked states of a search with these places.
pub fn tally(problem: &Problem, places: &Places, options: &Options, budget: &Budget) -> Result<Tallied, Error> {
    let (counted, runs) = counted(problem, places, options, budget)?;
    Ok(Tallied { counted, runs, plan: None })
}

/// Counts as near as a plan needs.
pub fn tally_for_plan(
    problem: &Problem,
    places: &Places,
    options: &Options,
    margin: Margin,
    budget: &Budget,
) -> Result<Tallied, Error> {
    let mut tolerance = margin.slope.tolerance(margin.margin).min(1.0);
    let mut runs = Vec::new();
    loop {
        let accuracy = Accuracy::new(tolerance, margin.confidence).map_err(|error| Error::Fault(error.to_string()))?;
        let options = Options { wanted: Wanted::Interval(accuracy), ..*options };
        let mut tallied = tally(problem, places, &options, budget)?;
        runs.append(&mut tallied.runs);
        tallied.plan = for_plan(&tallied.counted, margin);
        let reached = tallied.plan.as_ref().is_none_or(ForPlan::is_reached);
        let last = runs.len() >= TRIES * 8 || tolerance / 2.0 < Accuracy::LEAST_TOLERANCE;
        if reached || last || tallied.counted.marks().confidence >= 1.0 || out_of_time(budget) {
            tallied.runs = runs;
            return Ok(tallied);
        }
        tolerance /= 2.0;
    }
}

fn out_of_time(budget: &Budget) -> bool {
    budget.spent() || budget.time_left().is_some_and(|left| left < Duration::from_millis(1))
}

fn for_plan(counted: &Counted, margin: Margin) -> Option<ForPlan> {
    let marks = counted.marks();
    if marks.high.is_zero() || counted.space.is_zero() {
        return None;
    }
    let low = marks.low.clone().max(BigUint::one());
    let reported = reported(margin.slope, &counted.space, &low, &marks.high);
    let spread = Wide::ratio(&marks.high, &low);
    Some(ForPlan { margin: margin.margin, tolerance: spread.sqrt().to_f64() - 1.0, reported })
}
