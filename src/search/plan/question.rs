//! One question, one answer: whatever is known of the count and whatever is wanted, in one place.
//!
//! Input: a [`Question`]. Output: an [`Answer`] with the common figures, those of its aim, and what was asked for
//! besides: noise, shallow machines, all solutions; or why the question has no answer. Nothing is computed here that
//! the modules of the single aims do not define.

use num_bigint::BigUint;
use num_traits::Zero;
use serde::Serialize;
use thiserror::Error;

use super::certainty::{Certainty, certainty};
use super::collect::{FindAll, find_all};
use super::estimate::{Estimation, estimation, precision_of_exact_count};
use super::fixed_point::{FixedPoint, FixedPointError, fixed_point};
use super::interval::{Interval, interval};
use super::noise::{Noisy, NoisyPlan, break_even, runs_for};
use super::schedule::{Expected, Schedule, Stop};
use super::split::{Machines, Split, split};
use super::{Aim, Outline, Plan, plan, plan_for_least_work, plan_within};
use crate::search::Advice;
use crate::search::number::Wide;

/// What is known of the number of marked states.
#[derive(Clone, PartialEq, Eq, Debug)]
pub enum Known {
    /// The number itself.
    Exactly(BigUint),
    /// It lies between these two, both included.
    Between(BigUint, BigUint),
    /// Nothing.
    Nothing,
}

impl Known {
    /// The aim that serves where none is named: the strongest promise that so much knowledge allows.
    pub fn usual_aim(&self, space: &BigUint) -> Aim {
        match self {
            Known::Exactly(_) => Aim::HighestSuccess,
            Known::Between(_, high) if high < space => Aim::BestWorstCase,
            Known::Between(..) => Aim::AtLeastSoMany,
            Known::Nothing => Aim::NothingKnown,
        }
    }

    fn ends(&self, space: &BigUint) -> (BigUint, BigUint) {
        match self {
            Known::Exactly(marked) => (marked.clone(), marked.clone()),
            Known::Between(low, high) => (low.clone(), high.clone()),
            Known::Nothing => (BigUint::zero(), space.clone()),
        }
    }
}

/// A machine that errs.
#[derive(Clone, PartialEq, Debug)]
pub struct Erring {
    /// The chance that an iteration loses everything.
    pub error: f64,
    /// All strings of the register, at least as many as the space has states.
    pub strings: BigUint,
    /// What one guess costs, in units of one iteration.
    pub guess_cost: f64,
}

/// What is asked.
#[derive(Clone, PartialEq, Debug)]
pub struct Question {
    /// N, not 0.
    pub space: BigUint,
    /// What is known of M.
    pub known: Known,
    /// What is wanted.
    pub aim: Aim,
    /// The most iterations, for [`Aim::HighestWithinBound`].
    pub bound: Option<BigUint>,
    /// The cost of a try besides its iterations, in units of one iteration.
    pub try_cost: f64,
    /// The failure that is allowed, between 0 and 1, for the aims that promise a success without knowing the count.
    pub failure: f64,
    /// How near an estimate of M/N must come, for [`Aim::CountOnMachine`]; without it, to half a state.
    pub precision: Option<f64>,
    /// The confidence for which runs are counted, from 0 up and below 1.
    pub confidence: f64,
    /// The error of the machine, if it is to be taken into account.
    pub erring: Option<Erring>,
    /// Shallow machines and how many bits can be guessed, if bits may be guessed.
    pub machines: Option<(Machines, u64)>,
    /// Whether all solutions are wanted.
    pub find_all: bool,
}

impl Question {
    /// The question for the usual aim with nothing asked besides.
    pub fn new(space: BigUint, known: Known) -> Self {
        let aim = known.usual_aim(&space);
        Self {
            space,
            known,
            aim,
            bound: None,
            try_cost: 1.0,
            failure: 0.01,
            precision: None,
            confidence: 0.99,
            erring: None,
            machines: None,
            find_all: false,
        }
    }
}

/// Why a question has no answer.
#[derive(Clone, PartialEq, Eq, Debug, Error)]
pub enum Unanswerable {
    /// The space has no state.
    #[error("a space without states cannot be searched")]
    EmptySpace,
    /// More states are marked than there are, or the interval is empty.
    #[error("the marked states are not among those of the start state")]
    OutsideSpace,
    /// The number must be known.
    #[error("{0} rests on the exact number of marked states")]
    NeedsCount(&'static str),
    /// The bound is missing.
    #[error("the highest success within a bound needs the bound")]
    NeedsBound,
    /// The fixed-point search cannot promise anything.
    #[error(transparent)]
    FixedPoint(#[from] FixedPointError),
    /// The split would run for nothing.
    #[error("with guessed bits a try without iterations must cost something")]
    FreeTries,
}

/// The figures of an aim.
#[derive(Clone, PartialEq, Debug)]
pub enum Details {
    /// Plain iterations for a known count.
    Plain(Plan),
    /// Tuned iterations.
    Certainty(Certainty),
    /// Plain iterations for an interval.
    Interval(Interval),
    /// A sequence of phases.
    FixedPoint(FixedPoint),
    /// The random schedule, when it stops, and what it costs where the count is known after all.
    Schedule(Schedule, Stop, Option<Expected>),
    /// An estimation.
    Estimation(Estimation),
    /// Nothing is marked, and the aim has no figures for that.
    NothingMarked,
}

/// The figures of a machine that errs.
#[derive(Clone, PartialEq, Debug, Serialize)]
pub struct NoiseFigures {
    /// The chance that an iteration loses everything.
    pub error: f64,
    /// The number of iterations with the highest success.
    pub highest_success: NoisyPlan,
    /// The number of iterations with the least expected work, the cost of a try included.
    pub least_work: NoisyPlan,
    /// Runs of the first, of which one succeeds with the confidence wanted.
    pub runs: Option<Wide>,
    /// The error from which on every search costs more than guessing; 0 where it does without error, no number where
    /// it never does.
    pub break_even: Option<f64>,
}

/// The answer.
#[derive(Clone, PartialEq, Debug)]
pub struct Answer {
    /// N.
    pub space: BigUint,
    /// What is known of M.
    pub known: Known,
    /// The common figures.
    pub outline: Outline,
    /// Those of the aim.
    pub details: Details,
    /// Runs of which one succeeds with the confidence wanted; `None` where no run does for sure.
    pub runs: Option<Wide>,
    /// The confidence that was wanted.
    pub confidence: f64,
    /// On a machine that errs.
    pub noise: Option<NoiseFigures>,
    /// On shallow machines.
    pub split: Option<Split>,
    /// For all solutions.
    pub find_all: Option<FindAll>,
}

/// Answers a question.
pub fn answer(question: &Question) -> Result<Answer, Unanswerable> {
    let Question { space, known, .. } = question;
    let (low, high) = known.ends(space);
    if space.is_zero() {
        return Err(Unanswerable::EmptySpace);
    }
    if low > high || high > *space {
        return Err(Unanswerable::OutsideSpace);
    }
    let (mut outline, details) = of_aim(question, &low, &high)?;
    let runs = match question.aim {
        // Neither is a run of one circuit again and again.
        Aim::NothingKnown | Aim::CountOnMachine => None,
        _ => runs_for(Wide::new(outline.success_low), question.confidence),
    };
    let noise = match &question.erring {
        Some(erring) => noise(question, erring, &exact(known, "a plan for a machine that errs")?),
        None => None,
    };
    if let Some(figures) = &noise {
        outline.advice.extend(noise_advice(figures));
    }
    Ok(Answer {
        space: space.clone(),
        known: known.clone(),
        outline,
        details,
        runs,
        confidence: question.confidence,
        noise,
        split: guessed(question)?,
        find_all: match question.find_all {
            true => find_all(space, &exact(known, "finding all solutions")?, question.try_cost),
            false => None,
        },
    })
}

fn exact(known: &Known, what: &'static str) -> Result<BigUint, Unanswerable> {
    match known {
        Known::Exactly(marked) => Ok(marked.clone()),
        Known::Between(low, high) if low == high => Ok(low.clone()),
        _ => Err(Unanswerable::NeedsCount(what)),
    }
}

/// The common figures and those of the aim.
fn of_aim(question: &Question, low: &BigUint, high: &BigUint) -> Result<(Outline, Details), Unanswerable> {
    let Question { space, known, aim, .. } = question;
    let plain = |plan: Plan| (plan.outline(), Details::Plain(plan));
    let marked = || exact(known, aim.name());
    Ok(match aim {
        Aim::HighestSuccess => plain(plan(space, &marked()?)),
        Aim::HighestWithinBound => {
            let bound = question.bound.as_ref().ok_or(Unanswerable::NeedsBound)?;
            plain(plan_within(space, &marked()?, bound))
        }
        Aim::LeastWork => plain(plan_for_least_work(space, &marked()?, question.try_cost)),
        Aim::NothingKnown => schedule(question),
        Aim::CountOnMachine => counting(question, high),
        _ if high.is_zero() => (nothing_marked(*aim), Details::NothingMarked),
        Aim::Certainty => {
            let tuned = certainty(space, &marked()?).expect("something is marked");
            (tuned.outline(), Details::Certainty(tuned))
        }
        Aim::BestWorstCase => {
            let found = interval(space, low, high);
            (found.outline(low), Details::Interval(found))
        }
        Aim::AtLeastSoMany => {
            let sequence = fixed_point(space, low, question.failure)?;
            (sequence.outline(), Details::FixedPoint(sequence))
        }
    })
}

fn nothing_marked(aim: Aim) -> Outline {
    Outline {
        aim,
        iterations: BigUint::zero(),
        success_low: 0.0,
        success_high: 0.0,
        expected_oracle_calls: None,
        advice: vec![Advice::no_solution()],
    }
}

fn schedule(question: &Question) -> (Outline, Details) {
    let schedule = Schedule::new(&question.space);
    let stop = schedule.stop(question.failure);
    let mut outline = schedule.outline(question.failure);
    let expected = match &question.known {
        Known::Exactly(marked) => schedule.expected(marked),
        _ => None,
    };
    outline.expected_oracle_calls = expected.map(|expected| expected.iterations);
    (outline, Details::Schedule(schedule, stop, expected))
}

fn counting(question: &Question, high: &BigUint) -> (Outline, Details) {
    let precision = question.precision.map_or_else(|| precision_of_exact_count(&question.space), Wide::new);
    let share = match question.known {
        Known::Nothing => None,
        _ => Some(Wide::ratio(high, &question.space)),
    };
    let estimation = estimation(precision, share, question.failure);
    (estimation.outline(), Details::Estimation(estimation))
}

fn noise(question: &Question, erring: &Erring, marked: &BigUint) -> Option<NoiseFigures> {
    if marked.is_zero() {
        return None;
    }
    let Erring { error, strings, guess_cost } = erring;
    let noisy = Noisy::new(&question.space, marked, strings, *error);
    let highest_success = noisy.best();
    Some(NoiseFigures {
        error: *error,
        runs: runs_for(highest_success.success, question.confidence),
        least_work: noisy.least_work(question.try_cost),
        break_even: break_even(&question.space, marked, strings, question.try_cost, *guess_cost),
        highest_success,
    })
}

fn noise_advice(figures: &NoiseFigures) -> Option<Advice> {
    match figures.break_even {
        Some(0.0) => Some(Advice::guessing_is_cheaper()),
        Some(break_even) if figures.error >= break_even => Some(Advice::noise_wins(figures.error, break_even)),
        _ => None,
    }
}

fn guessed(question: &Question) -> Result<Option<Split>, Unanswerable> {
    let Some((machines, bits)) = &question.machines else { return Ok(None) };
    let marked = exact(&question.known, "a plan with guessed bits")?;
    if machines.try_cost <= 0.0 {
        return Err(Unanswerable::FreeTries);
    }
    Ok(split(&question.space, &marked, *bits, machines))
}
