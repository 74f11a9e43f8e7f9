//! The choice between the ways: which comes when, and who confirms whom.

use std::cell::RefCell;
use std::time::Instant;

use num_bigint::BigUint;

use super::combine::{agree, within};
use super::engine::{Effort, prepare};
use super::hashing::{self, Accuracy};
use super::list::Limits;
use super::listed::Again;
use super::sweep::Sweep;
use super::{
    CONFIRMED, CONFIRMED_WORK, Fault, LONG_INPUTS, LONG_STATES, LONG_WORK, MIDDLE_INPUTS, Method, Options, Over,
    QUICK_INPUTS, QUICK_STATES, QUICK_WORK, Run, SHORT_LISTED_WORK, TINY_WORK, Tally, Wanted, components, counted_over,
    frontier, inputs, sweep,
};
use crate::budget::Budget;
use crate::judge::clauses::{self, Cnf};
use crate::problem::{BitId, Problem};

/// What is counted, its clauses, and the ways that ran.
pub(super) struct Job<'a> {
    pub(super) problem: &'a Problem,
    pub(super) over: Over,
    pub(super) counted: Vec<BitId>,
    pub(super) cnf: Cnf,
    pub(super) options: Options,
    runs: RefCell<Vec<Run>>,
}

impl<'a> Job<'a> {
    pub(super) fn new(problem: &'a Problem, over: Over, options: Options) -> Self {
        let counted = counted_over(problem, over);
        Self { problem, over, counted, cnf: clauses::encode(problem), options, runs: RefCell::default() }
    }

    pub(super) fn into_runs(self) -> Vec<Run> {
        self.runs.into_inner()
    }

    /// Counts by the ways that the options allow.
    pub(super) fn count(&self, budget: &Budget) -> Result<Tally, Fault> {
        match self.options.only {
            Some(method) => self.only(method, budget),
            None if sweep::is_cheap(self.problem) => self.sweep_first(budget),
            None => self.search_first(budget),
        }
    }

    /// Runs a way and notes it.
    pub(super) fn timed(&self, way: impl FnOnce() -> Result<Tally, Fault>) -> Result<Tally, Fault> {
        let start = Instant::now();
        let tally = way()?;
        self.runs.borrow_mut().push(Run::of(&tally, start.elapsed()));
        Ok(tally)
    }

    fn only(&self, method: Method, budget: &Budget) -> Result<Tally, Fault> {
        let nothing = || self.unknown(method);
        match method {
            Method::Sweep => Ok(self.swept(budget)?.unwrap_or_else(nothing)),
            Method::Inputs => Ok(self.inputs(u64::MAX, budget)?.unwrap_or_else(nothing)),
            Method::Frontier => Ok(self.frontier(u64::MAX, budget)?.unwrap_or_else(nothing)),
            Method::Components | Method::Certificate => self.components(LONG_WORK, budget),
            Method::Listing | Method::SecondListing => self.listing(self.options.keep, budget),
            Method::Hashing => {
                let accuracy = match self.options.wanted {
                    Wanted::Number => Accuracy::USUAL,
                    Wanted::NumberOrInterval(accuracy) | Wanted::Interval(accuracy) => accuracy,
                };
                Ok(self.hashed(accuracy, budget)?.unwrap_or_else(nothing))
            }
        }
    }

    /// The bounds that hold of anything.
    fn unknown(&self, method: Method) -> Tally {
        Tally::between(BigUint::ZERO, BigUint::from(1u32) << self.counted.len(), method)
    }

    fn sweep_first(&self, budget: &Budget) -> Result<Tally, Fault> {
        let Some(mut tally) = self.swept(budget)? else { return self.search_first(budget) };
        if !self.options.confirm {
            return Ok(tally);
        }
        let other = match tally.low <= BigUint::from(CONFIRMED) {
            true => self.listing(0, budget)?,
            false => self.components(QUICK_WORK, budget)?,
        };
        agree(&mut tally, &other)?;
        Ok(tally)
    }

    fn search_first(&self, budget: &Budget) -> Result<Tally, Fault> {
        if let Some(counted) = self.inputs(QUICK_INPUTS, &half(budget))? {
            return self.confirmed(counted, budget);
        }
        let tiny = self.components(TINY_WORK, &half(budget))?;
        if tiny.exact().is_some() {
            return self.confirmed(tiny, budget);
        }
        if let Some(counted) = self.inputs(MIDDLE_INPUTS, &half(budget))? {
            return self.confirmed(counted, budget);
        }
        if let Some(counted) = self.frontier(QUICK_STATES, &half(budget))? {
            return self.confirmed(counted, budget);
        }
        let quick = self.components(QUICK_WORK, &half(budget))?;
        if quick.exact().is_some() {
            return self.confirmed(quick, budget);
        }
        let limits = Limits { solutions: CONFIRMED, work: SHORT_LISTED_WORK };
        let mut short = self.listing_within(limits, self.options.keep, &half(budget), Again::Yes)?;
        within(&mut short, &quick)?;
        if short.exact().is_some() {
            return self.swept_too(short, budget);
        }
        if let Wanted::Interval(accuracy) = self.options.wanted
            && let Some(hashed) = self.hashed_beside(accuracy, &short, &half(budget))?
        {
            return Ok(hashed);
        }
        let by_line = match self.inputs(LONG_INPUTS, &half(budget))? {
            None => self.frontier(LONG_STATES, &half(budget))?,
            swept => swept,
        };
        if let Some(mut counted) = by_line {
            agree(&mut counted, &short)?;
            return self.confirmed(counted, budget);
        }
        let mut long = self.components(LONG_WORK, &half(budget))?;
        within(&mut long, &short)?;
        if long.exact().is_some() {
            return self.confirmed(long, budget);
        }
        if let Wanted::NumberOrInterval(accuracy) = self.options.wanted {
            long.solutions = short.solutions;
            if let Some(hashed) = self.hashed_beside(accuracy, &long, &half(budget))? {
                return Ok(hashed);
            }
        }
        let mut listed = self.listing(self.options.keep, budget)?;
        within(&mut listed, &long)?;
        self.swept_too(listed, budget)
    }

    fn components(&self, work: u64, budget: &Budget) -> Result<Tally, Fault> {
        self.timed(|| Ok(components::count(&self.cnf, &self.counted, work, budget)))
    }

    /// Along a line of variables, with at most so many states looked at.
    fn frontier(&self, states: u64, budget: &Budget) -> Result<Option<Tally>, Fault> {
        let start = Instant::now();
        let prepared = prepare(&self.cnf.clauses, self.cnf.var_count, self.shown(), Effort::Count, budget);
        let Some(count) = frontier::count(&prepared, states, budget) else { return Ok(None) };
        let tally = Tally::between(count.clone(), count, Method::Frontier);
        self.runs.borrow_mut().push(Run::of(&tally, start.elapsed()));
        Ok(Some(tally))
    }

    /// The sweep of the inputs, where there are few and it takes no more than so much work.
    fn inputs(&self, work: u64, budget: &Budget) -> Result<Option<Tally>, Fault> {
        let start = Instant::now();
        // Hidden variables must be defined too; so far as shown ones define them, they count for nothing.
        let prepared = prepare(&self.cnf.clauses, self.cnf.var_count, self.shown(), Effort::Models, budget);
        let Some(count) = inputs::count(&prepared, work, self.options.threads, budget) else { return Ok(None) };
        let tally = Tally::between(count.clone(), count, Method::Inputs);
        self.runs.borrow_mut().push(Run::of(&tally, start.elapsed()));
        Ok(Some(tally))
    }

    /// The variables of the clauses that are counted over, where these are not all.
    fn shown(&self) -> Option<&[BitId]> {
        (self.counted.len() < self.cnf.var_count).then_some(&self.counted[..])
    }

    fn hashed(&self, accuracy: Accuracy, budget: &Budget) -> Result<Option<Tally>, Fault> {
        let options = hashing::Options { accuracy, seed: self.options.seed, threads: self.options.threads };
        let start = Instant::now();
        let hashed = hashing::count(&self.cnf.clauses, self.cnf.var_count, self.shown(), &options, budget)
            .map_err(|_| Fault::WrongModel { method: Method::Hashing })?;
        let Some(hashed) = hashed else { return Ok(None) };
        let confidence = if hashed.exact { 1.0 } else { accuracy.confidence() };
        let tally = Tally { confidence, ..Tally::between(hashed.low, hashed.high, Method::Hashing) };
        self.runs.borrow_mut().push(Run::of(&tally, start.elapsed()));
        Ok(Some(tally))
    }

    /// Hashing within bounds that are proven. An interval that lies outside was a bad draw and is not given.
    fn hashed_beside(&self, accuracy: Accuracy, proven: &Tally, budget: &Budget) -> Result<Option<Tally>, Fault> {
        let Some(mut hashed) = self.hashed(accuracy, budget)? else { return Ok(None) };
        if hashed.high < proven.low || proven.high < hashed.low {
            return Ok(None);
        }
        hashed.low = hashed.low.max(proven.low.clone());
        hashed.high = hashed.high.min(proven.high.clone());
        hashed.solutions.clone_from(&proven.solutions);
        Ok(Some(hashed))
    }

    /// A count by components, with solutions and whoever can confirm it.
    fn confirmed(&self, mut tally: Tally, budget: &Budget) -> Result<Tally, Fault> {
        let (keep, confirm) = (self.options.keep, self.options.confirm);
        if keep == 0 && !confirm {
            return Ok(tally);
        }
        let few = confirm && tally.low <= BigUint::from(CONFIRMED);
        let limits = Limits { solutions: if few { CONFIRMED } else { keep as u64 }, work: CONFIRMED_WORK };
        let listed = self.listing_within(limits, keep, budget, Again::No)?;
        agree(&mut tally, &listed)?;
        tally.solutions = listed.solutions;
        tally.complete = listed.complete;
        let by_line = matches!(tally.method, Method::Frontier | Method::Inputs);
        if tally.checked_by.is_empty() && confirm && by_line {
            agree(&mut tally, &self.components(QUICK_WORK, budget)?)?;
        }
        if tally.checked_by.is_empty() && confirm && sweep::is_affordable(self.problem) {
            tally = self.swept_too(tally, budget)?;
        }
        if tally.checked_by.is_empty() && confirm && self.has_short_certificate(&tally, budget)? {
            tally.checked_by.push(Method::Certificate);
        }
        Ok(tally)
    }

    fn has_short_certificate(&self, tally: &Tally, budget: &Budget) -> Result<bool, Fault> {
        let start = Instant::now();
        let holds = components::has_short_certificate(self.problem, self.over, tally, budget)?;
        if holds {
            let certified = Tally { method: Method::Certificate, ..tally.clone() };
            self.runs.borrow_mut().push(Run::of(&certified, start.elapsed()));
        }
        Ok(holds)
    }

    /// The sweep for a tally that falls short, or stands alone.
    fn swept_too(&self, mut tally: Tally, budget: &Budget) -> Result<Tally, Fault> {
        if tally.exact().is_some() && (!tally.checked_by.is_empty() || !self.options.confirm) {
            return Ok(tally);
        }
        match self.swept(budget)? {
            None => Ok(tally),
            Some(swept) if tally.exact().is_some() => agree(&mut tally, &swept).map(|()| tally),
            Some(mut exact) => {
                agree(&mut exact, &tally)?;
                Ok(exact)
            }
        }
    }

    fn swept(&self, budget: &Budget) -> Result<Option<Tally>, Fault> {
        let start = Instant::now();
        let Some(swept) = sweep::sweep(self.problem, &self.counted, &self.options, budget) else { return Ok(None) };
        let Sweep { count, solutions, complete } = swept;
        let tally = Tally { solutions, complete, ..Tally::between(count.clone(), count, Method::Sweep) };
        self.runs.borrow_mut().push(Run::of(&tally, start.elapsed()));
        Ok(Some(tally))
    }
}

/// A budget with half of the time that is left.
fn half(budget: &Budget) -> Budget {
    match budget.time_left() {
        Some(left) => budget.clone().within(left / 2),
        None => budget.clone(),
    }
}
