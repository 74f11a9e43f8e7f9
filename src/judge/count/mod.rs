//! Counting: the tally of a problem.
//!
//! Input:  a [`Problem`], and whether its shown bits or all its bits are counted over.
//! Output: a [`Tally`]: the number, or proven bounds, with who found it and who confirmed it, and some solutions.
//! Holds:  every way that was affordable gave the same number, and every kept solution satisfies the problem's own
//!         evaluator; anything else is a [`Fault`] of this program.
//!
//! Small problems are swept: every bit string is tried. The others, and the small ones again, go to the solvers: the
//! clauses fall into `parts` without common variables, the solutions of each part are `list`ed one by one, and the
//! numbers multiply. Up to [`CONFIRMED`] listed solutions, the other engine lists them again. Without a deadline
//! varisat leads; with one batsat does, which can be stopped.

mod confirm;
pub mod counted;
pub mod engine;
mod list;
mod parts;
mod path;
mod product;
mod propagate;
mod sweep;
pub mod tally;

pub use counted::Counted;
pub use tally::{Method, Tally};

use num_bigint::BigUint;
use num_traits::{One, Zero};
use thiserror::Error;

use crate::budget::Budget;
use crate::judge::clauses;
use crate::problem::{BitId, Bits, Problem};
use crate::sat::{Batsat, Varisat};
use list::{Limits, Listing, Plan, Search};
use parts::Split;
use sweep::Sweep;

/// Solutions that a listing goes through at most where no deadline is set.
pub const LISTED: u64 = 1 << 20;
/// Work that a listing does at most where no deadline is set. A unit is a variable assigned, measured as some 50 ns.
pub const LISTED_WORK: u64 = 1 << 28;
/// Listed solutions up to which the second engine lists them again.
pub const CONFIRMED: u64 = 100_000;
/// Work that the second engine does at most where no deadline is set, in the same units.
pub const CONFIRMED_WORK: u64 = 1 << 28;
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

/// How to count.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub struct Options {
    /// Threads for the sweep.
    pub threads: usize,
    /// Solutions to keep.
    pub keep: usize,
}

impl Default for Options {
    fn default() -> Self {
        Self { threads: 1, keep: 1000 }
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
    /// A way gave a solution that the problem does not have.
    #[error("{method:?} gave {bits}, which is no solution")]
    NotASolution {
        /// The way.
        method: Method,
        /// What it gave.
        bits: Bits,
    },
}

/// Counts the solutions of a problem.
pub fn count(problem: &Problem, over: Over, options: &Options, budget: &Budget) -> Result<Tally, Fault> {
    let counted: Vec<BitId> = match (&problem.shown, over) {
        (Some(shown), Over::Shown) => shown.clone(),
        _ => problem.bits().collect(),
    };
    let tally = match sweep::is_cheap(problem) {
        true => sweep_then_list(problem, &counted, options, budget)?,
        false => list_then_sweep(problem, &counted, options, budget)?,
    };
    check_solutions(problem, &tally)?;
    Ok(tally)
}

fn sweep_then_list(problem: &Problem, counted: &[BitId], options: &Options, budget: &Budget) -> Result<Tally, Fault> {
    let Some(swept) = sweep::sweep(problem, counted, options, budget) else {
        return list_then_sweep(problem, counted, options, budget);
    };
    let mut tally = tally_of_sweep(swept);
    if tally.low <= BigUint::from(CONFIRMED) {
        let listed = listing(problem, counted, &Options { keep: 0, ..*options }, budget)?;
        agree(&mut tally, &listed)?;
    }
    Ok(tally)
}

fn list_then_sweep(problem: &Problem, counted: &[BitId], options: &Options, budget: &Budget) -> Result<Tally, Fault> {
    let mut listed = listing(problem, counted, options, budget)?;
    // The sweep is dear here: it is for where the listing fell short, or stands alone.
    if listed.exact().is_some() && !listed.checked_by.is_empty() {
        return Ok(listed);
    }
    match sweep::sweep(problem, counted, options, budget) {
        None => Ok(listed),
        Some(swept) if listed.exact().is_some() => agree(&mut listed, &tally_of_sweep(swept)).map(|()| listed),
        Some(swept) => {
            let mut tally = tally_of_sweep(swept);
            agree(&mut tally, &listed)?;
            Ok(tally)
        }
    }
}

fn tally_of_sweep(swept: Sweep) -> Tally {
    Tally {
        low: swept.count.clone(),
        high: swept.count,
        method: Method::Sweep,
        checked_by: Vec::new(),
        solutions: swept.solutions,
        complete: swept.complete,
    }
}

/// Notes that another way confirms the exact tally, where it does; bounds must hold it between them.
fn agree(tally: &mut Tally, other: &Tally) -> Result<(), Fault> {
    if other.low > tally.low || other.high < tally.low {
        let second_count = if other.low > tally.low { &other.low } else { &other.high };
        return Err(disagree(tally.method, &tally.low, other.method, second_count));
    }
    if other.exact().is_some() {
        tally.checked_by.push(other.method);
        tally.checked_by.extend(other.checked_by.iter().copied());
    }
    Ok(())
}

fn disagree(first: Method, first_count: &BigUint, second: Method, second_count: &BigUint) -> Fault {
    Fault::Disagree { first, first_count: first_count.clone(), second, second_count: second_count.clone() }
}

/// Counts by the solvers.
fn listing(problem: &Problem, counted: &[BitId], options: &Options, budget: &Budget) -> Result<Tally, Fault> {
    let cnf = clauses::encode(problem);
    let split = Split::of(&cnf, problem.bit_count(), counted);
    let timed = budget.time_left().is_some();
    if split.contradiction {
        return Ok(no_solution(if timed { Method::SecondListing } else { Method::Listing }));
    }
    let limits = if timed { Limits::none() } else { Limits { solutions: LISTED, work: LISTED_WORK } };
    let plan = Plan { search: Search::Pruned, keep: options.keep, limits };
    let (method, listings) = match timed {
        true => (Method::SecondListing, list::list_all::<Batsat>(&split.parts, plan, budget)),
        false => (Method::Listing, list::list_all::<Varisat>(&split.parts, plan, budget)),
    };
    let listings = listings.map_err(|_| Fault::WrongModel { method })?;
    let free = BigUint::one() << split.free.len();
    let product = |of: fn(&Listing) -> BigUint| listings.iter().map(of).product::<BigUint>() * &free;
    let (low, high) = (product(|listing| listing.found.into()), product(Listing::high));
    if high.is_zero() {
        let mut tally = no_solution(method);
        confirm(&mut tally, split, &listings, budget)?;
        return Ok(tally);
    }
    let (solutions, complete) = product::solutions(problem.bit_count(), &split, &listings, options.keep);
    let mut tally = Tally { low, high, method, checked_by: Vec::new(), solutions, complete };
    let listed: u64 = listings.iter().map(|listing| listing.found).sum();
    if tally.exact().is_some() && listed <= CONFIRMED {
        confirm(&mut tally, split, &listings, budget)?;
    }
    Ok(tally)
}

fn no_solution(method: Method) -> Tally {
    let zero = BigUint::zero();
    Tally { low: zero.clone(), high: zero, method, checked_by: Vec::new(), solutions: Vec::new(), complete: true }
}

/// Lists again with the other engine, if there is time.
fn confirm(tally: &mut Tally, split: Split, first: &[Listing], budget: &Budget) -> Result<(), Fault> {
    let second = if tally.method == Method::Listing { Method::SecondListing } else { Method::Listing };
    let timed = second == Method::Listing;
    let limits = if timed { Limits::none() } else { Limits { solutions: CONFIRMED, work: CONFIRMED_WORK } };
    let plan = Plan { search: Search::Plain, keep: 0, limits };
    let again = match timed {
        true => confirm::beside(split.parts, plan, budget),
        false => Some(list::list_all::<Batsat>(&split.parts, plan, budget)),
    };
    let again = again.transpose().map_err(|_| Fault::WrongModel { method: second })?;
    // A contradiction in one part decides; the others may be listed or not.
    let decided = |listings: &[Listing]| listings.iter().any(|listing| listing.high().is_zero());
    let Some(again) = again.filter(|again| decided(again) || again.iter().all(|listing| listing.rest.is_zero())) else {
        return Ok(());
    };
    let total = |listings: &[Listing]| match decided(listings) {
        true => BigUint::zero(),
        false => listings.iter().map(|listing| BigUint::from(listing.found)).product(),
    };
    let (count, other) = (total(first), total(&again));
    if count != other {
        return Err(disagree(tally.method, &count, second, &other));
    }
    tally.checked_by.push(second);
    Ok(())
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
        let (low, high) = (low.into(), high.into());
        Tally { low, high, method, checked_by: Vec::new(), solutions: Vec::new(), complete: false }
    }

    #[test]
    fn ways_that_disagree_are_a_fault() {
        let swept = || tally(5, 5, Method::Sweep);
        let mut first = swept();
        assert_eq!(agree(&mut first, &tally(5, 5, Method::Listing)), Ok(()));
        assert_eq!(first.checked_by, [Method::Listing]);
        // Bounds confirm nothing, but they must hold.
        assert_eq!(agree(&mut first, &tally(2, 9, Method::Listing)), Ok(()));
        assert_eq!(first.checked_by, [Method::Listing]);
        for (low, high) in [(6, 6), (4, 4), (6, 9), (0, 4)] {
            let fault = agree(&mut swept(), &tally(low, high, Method::Listing)).unwrap_err();
            assert!(matches!(fault, Fault::Disagree { .. }), "{fault}");
        }
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
