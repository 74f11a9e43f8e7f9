//! Counting: the tally of a problem.
//!
//! Input:  a [`Problem`], and whether its shown bits or all its bits are counted over.
//! Output: a [`Tally`]: the number, or proven bounds, with who found it and who confirmed it, and some solutions.
//! Holds:  every way that was affordable gave the same number, and every kept solution satisfies the problem's own
//!         evaluator; anything else is a [`Fault`] of this program.
//!
//! The ways, by what they cost:
//!
//! 1. the sweep tries every bit string: first where that costs next to nothing;
//! 2. the `inputs` alone are swept where the clauses define all else and that costs next to nothing;
//! 3. the `engine` splits the clauses into components and remembers their counts: next, with little work at first;
//! 4. the inputs again where there are a few more; the `frontier` goes along a line of variables, where that does not seem to take many states; then the engine again;
//! 5. the listing goes through the solutions one by one, in short, for what was hard so far may have few solutions;
//! 6. `hashing` gives an interval with a confidence: here, if an interval is wanted;
//! 7. the inputs, the line, and the engine again with all the work that is allowed; then hashing, if an interval will do
//!    where all else fails;
//! 8. the listing again, and the sweep again, if it is possible at all.
//!
//! Whoever led is confirmed by another way that costs no more than a share: the listing up to [`CONFIRMED`] solutions,
//! the sweep up to a bound on its work, the engine with little work, or a [`certificate`] of the search that is checked
//! apart from it. Work is counted, never timed, so without a deadline the same problem takes the same course everywhere.
//! Under a deadline a first try has half of the time that is left; batsat, which can be stopped, leads the listing then.

pub mod certificate;
mod combine;
mod components;
mod confirm;
pub mod counted;
pub mod engine;
mod frontier;
pub mod hashing;
mod inputs;
mod job;
mod list;
mod listed;
mod parts;
mod path;
mod product;
mod propagate;
mod run;
mod sweep;
pub mod tally;

pub use counted::Counted;
pub use run::Run;
pub use tally::{Method, Tally};

use num_bigint::BigUint;
use thiserror::Error;

use crate::budget::Budget;
use crate::problem::{BitId, Bits, Problem};
use hashing::Accuracy;
use job::Job;

/// Solutions that a listing goes through at most where no deadline is set.
pub const LISTED: u64 = 1 << 20;
/// Work that a listing does at most where no deadline is set. A unit is a variable assigned, measured as some 50 ns.
pub const LISTED_WORK: u64 = 1 << 28;
/// Listed solutions up to which the second engine lists them again.
pub const CONFIRMED: u64 = 100_000;
/// Work that the second engine does at most where no deadline is set, in the same units.
pub const CONFIRMED_WORK: u64 = 1 << 28;
/// Work of a first listing, in case that there are few solutions.
pub const SHORT_LISTED_WORK: u64 = 1 << 24;
/// Work of the engine's first try, in its own units: some hundredths of a second.
pub const TINY_WORK: u64 = 1 << 20;
/// Work of the engine's second try, and where it confirms: some tenths of a second.
pub const QUICK_WORK: u64 = 1 << 24;
/// Row operations of a first sweep of the inputs: some hundredths of a second.
pub const QUICK_INPUTS: u64 = 1 << 22;
/// Row operations of a second sweep of the inputs, after the engine's first try: some tenths of a second.
pub const MIDDLE_INPUTS: u64 = 1 << 25;
/// Row operations of a sweep of the inputs at most: some tens of seconds.
pub const LONG_INPUTS: u64 = 1 << 31;
/// States that a first try along a line looks at: some tenths of a second; it is not begun if it seems to take more.
pub const QUICK_STATES: u64 = 1 << 22;
/// States that counting along a line looks at, at most: some seconds.
pub const LONG_STATES: u64 = 1 << 26;
/// Work of the engine at most where no deadline is set: some minutes.
pub const LONG_WORK: u64 = 1 << 32;
/// Size of the kept solutions (times the size of the problem) up to which the evaluator checks them all.
const EVALUATED_WORK: usize = 1 << 28;

/// What is counted over.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub enum Over {
    /// The shown bits, where the problem names them: two solutions that agree on them count once.
    Shown,
    /// All bits.
    AllBits,
}

/// What is wanted.
#[derive(Clone, Copy, PartialEq, Debug)]
pub enum Wanted {
    /// The number itself, or proven bounds.
    Number,
    /// The number itself; where it is out of reach, an interval with a confidence.
    NumberOrInterval(Accuracy),
    /// The number where it comes quickly; else an interval with a confidence, before the long ways to the number.
    Interval(Accuracy),
}

/// How to count.
#[derive(Clone, Copy, PartialEq, Debug)]
pub struct Options {
    /// Threads for the sweep and for the rounds of hashing.
    pub threads: usize,
    /// Solutions to keep.
    pub keep: usize,
    /// Whether an interval will do.
    pub wanted: Wanted,
    /// Seeds the hashing.
    pub seed: u64,
    /// The only way to use; all of them where none is named.
    pub only: Option<Method>,
    /// Whether a second way confirms the first where it costs no more than a share.
    pub confirm: bool,
}

impl Default for Options {
    fn default() -> Self {
        Self { threads: 1, keep: 1000, wanted: Wanted::Number, seed: 1, only: None, confirm: true }
    }
}

/// Two ways to count that do not agree: a fault of this program or of an engine, never of the input.
#[derive(Clone, PartialEq, Eq, Debug, Error)]
pub enum Fault {
    /// Two ways gave two numbers.
    #[error("two ways to count disagree: {first_count} by {first:?}, {second_count} by {second:?}")]
    Disagree {
        /// The way that led.
        first: Method,
        /// Its number.
        first_count: BigUint,
        /// The way that was to confirm.
        second: Method,
        /// Its number.
        second_count: BigUint,
    },
    /// An engine gave a model that breaks a clause.
    #[error("{method:?} gave a model that breaks a clause")]
    WrongModel {
        /// The way.
        method: Method,
    },
    /// A certificate that was just made does not hold.
    #[error("a certificate just made is refused: {refusal}")]
    Refused {
        /// Why.
        refusal: Box<certificate::Refusal>,
    },
    /// A way gave a solution that the problem does not have.
    #[error("{method:?} gave {bits}, which is no solution")]
    NotASolution {
        /// The way.
        method: Method,
        /// What it gave.
        bits: Bits,
    },
}

/// The bits that are counted over.
fn counted_over(problem: &Problem, over: Over) -> Vec<BitId> {
    match (&problem.shown, over) {
        (Some(shown), Over::Shown) => shown.clone(),
        _ => problem.bits().collect(),
    }
}

/// Counts the solutions of a problem.
pub fn count(problem: &Problem, over: Over, options: &Options, budget: &Budget) -> Result<Tally, Fault> {
    count_logged(problem, over, options, budget).map(|(tally, _)| tally)
}

/// The same, with the ways that were tried, in their order.
pub fn count_logged(
    problem: &Problem,
    over: Over,
    options: &Options,
    budget: &Budget,
) -> Result<(Tally, Vec<Run>), Fault> {
    let job = Job::new(problem, over, *options);
    let tally = job.count(budget)?;
    check_solutions(problem, &tally)?;
    Ok((tally, job.into_runs()))
}

/// Every kept solution must be one, by the evaluator; a sample of them where there are too many.
fn check_solutions(problem: &Problem, tally: &Tally) -> Result<(), Fault> {
    let size = 1 + problem.clauses.lit_count() + problem.exprs.len() + problem.bit_count();
    let checked = (EVALUATED_WORK / size).max(1);
    let wrong = tally.solutions.iter().take(checked).find(|bits| !problem.holds(bits));
    match wrong {
        None => Ok(()),
        Some(bits) => Err(Fault::NotASolution { method: tally.method, bits: bits.clone() }),
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    fn tally(low: u32, high: u32, method: Method) -> Tally {
        Tally::between(low.into(), high.into(), method)
    }

    #[test]
    fn what_is_no_solution_is_a_fault() {
        let mut problem = Problem::new();
        problem.add_numbered_vars(1);
        problem.clauses.push(&[crate::problem::BitLit::from_dimacs(1).expect("a literal")]);
        let mut found = tally(1, 1, Method::Listing);
        found.solutions = vec![Bits::zeros(1)];
        assert!(matches!(check_solutions(&problem, &found), Err(Fault::NotASolution { .. })));
    }
}
