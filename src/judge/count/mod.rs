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
//! 2. the `engine` splits the clauses into components and remembers their counts: next, with little work at first;
//! 3. the listing goes through the solutions one by one: next, in short, for what the engine found hard may have few solutions;
//! 4. the engine again, then the listing again, with all the work that is allowed;
//! 5. the sweep again, if it is possible at all.
//!
//! Whoever led is confirmed by another way that costs no more than a share: the listing up to [`CONFIRMED`] solutions,
//! the sweep up to a bound on its work, the engine with little work, or a [`certificate`] of the search that is checked
//! apart from it. Work is counted, never timed, so without a deadline the same problem takes the same course everywhere.
//! Under a deadline a first try has half of the time that is left; batsat, which can be stopped, leads the listing then.

pub mod certificate;
mod components;
mod confirm;
pub mod counted;
pub mod engine;
pub mod hashing;
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
use crate::judge::clauses::{self, Cnf};
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
/// Work of a first listing, in case that there are few solutions.
pub const SHORT_LISTED_WORK: u64 = 1 << 25;
/// Work of the engine's first try, in its own units: some tenths of a second.
pub const QUICK_WORK: u64 = 1 << 24;
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

/// Counts the solutions of a problem.
pub fn count(problem: &Problem, over: Over, options: &Options, budget: &Budget) -> Result<Tally, Fault> {
    let job = Job { problem, over, counted: counted_over(problem, over), cnf: clauses::encode(problem) };
    let tally = match sweep::is_cheap(problem) {
        true => job.sweep_first(options, budget)?,
        false => job.search_first(options, budget)?,
    };
    check_solutions(problem, &tally)?;
    Ok(tally)
}

/// The bits that are counted over.
fn counted_over(problem: &Problem, over: Over) -> Vec<BitId> {
    match (&problem.shown, over) {
        (Some(shown), Over::Shown) => shown.clone(),
        _ => problem.bits().collect(),
    }
}

/// What is counted, and its clauses.
struct Job<'a> {
    problem: &'a Problem,
    over: Over,
    counted: Vec<BitId>,
    cnf: Cnf,
}

impl Job<'_> {
    fn sweep_first(&self, options: &Options, budget: &Budget) -> Result<Tally, Fault> {
        let Some(swept) = sweep::sweep(self.problem, &self.counted, options, budget) else {
            return self.search_first(options, budget);
        };
        let mut tally = tally_of_sweep(swept);
        let other = match tally.low <= BigUint::from(CONFIRMED) {
            true => self.listing(&Options { keep: 0, ..*options }, budget)?,
            false => components::count(&self.cnf, &self.counted, QUICK_WORK, budget),
        };
        agree(&mut tally, &other)?;
        Ok(tally)
    }

    fn search_first(&self, options: &Options, budget: &Budget) -> Result<Tally, Fault> {
        let quick = components::count(&self.cnf, &self.counted, QUICK_WORK, &half(budget));
        if quick.exact().is_some() {
            return self.confirmed(quick, options, budget);
        }
        let short = Limits { solutions: CONFIRMED, work: SHORT_LISTED_WORK };
        let mut short = self.listing_within(short, options, &half(budget), Again::Yes)?;
        within(&mut short, &quick)?;
        if short.exact().is_some() {
            return self.swept_too(short, options, budget);
        }
        let mut long = components::count(&self.cnf, &self.counted, LONG_WORK, &half(budget));
        within(&mut long, &short)?;
        if long.exact().is_some() {
            return self.confirmed(long, options, budget);
        }
        let mut listed = self.listing(options, budget)?;
        within(&mut listed, &long)?;
        self.swept_too(listed, options, budget)
    }

    /// A count by components, with solutions and whoever can confirm it.
    fn confirmed(&self, mut tally: Tally, options: &Options, budget: &Budget) -> Result<Tally, Fault> {
        let few = tally.low <= BigUint::from(CONFIRMED);
        let limits = Limits { solutions: if few { CONFIRMED } else { options.keep as u64 }, work: CONFIRMED_WORK };
        let listed = self.listing_within(limits, &Options { keep: options.keep, ..*options }, budget, Again::No)?;
        agree(&mut tally, &listed)?;
        tally.solutions = listed.solutions;
        tally.complete = listed.complete;
        if tally.checked_by.is_empty() && sweep::is_affordable(self.problem) {
            tally = self.swept_too(tally, options, budget)?;
        }
        if tally.checked_by.is_empty() && components::has_short_certificate(self.problem, self.over, &tally, budget)? {
            tally.checked_by.push(Method::Certificate);
        }
        Ok(tally)
    }

    /// The sweep for a tally that falls short, or stands alone.
    fn swept_too(&self, mut tally: Tally, options: &Options, budget: &Budget) -> Result<Tally, Fault> {
        if tally.exact().is_some() && !tally.checked_by.is_empty() {
            return Ok(tally);
        }
        match sweep::sweep(self.problem, &self.counted, options, budget) {
            None => Ok(tally),
            Some(swept) if tally.exact().is_some() => agree(&mut tally, &tally_of_sweep(swept)).map(|()| tally),
            Some(swept) => {
                let mut exact = tally_of_sweep(swept);
                agree(&mut exact, &tally)?;
                Ok(exact)
            }
        }
    }
}

/// A budget with half of the time that is left.
fn half(budget: &Budget) -> Budget {
    match budget.time_left() {
        Some(left) => budget.clone().within(left / 2),
        None => budget.clone(),
    }
}

/// Narrows bounds by those of another way; bounds that exclude each other are a fault.
fn within(tally: &mut Tally, other: &Tally) -> Result<(), Fault> {
    if other.high < tally.low || tally.high < other.low {
        let (mine, theirs) = if other.high < tally.low { (&tally.low, &other.high) } else { (&tally.high, &other.low) };
        return Err(disagree(tally.method, mine, other.method, theirs));
    }
    if tally.exact().is_none() {
        tally.low = tally.low.clone().max(other.low.clone());
        tally.high = tally.high.clone().min(other.high.clone());
    }
    Ok(())
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

/// Whether the second engine lists again what the first one listed.
#[derive(Clone, Copy, PartialEq, Eq)]
enum Again {
    Yes,
    No,
}

impl Job<'_> {
    /// Counts by the solvers.
    fn listing(&self, options: &Options, budget: &Budget) -> Result<Tally, Fault> {
        let timed = budget.time_left().is_some();
        let limits = if timed { Limits::none() } else { Limits { solutions: LISTED, work: LISTED_WORK } };
        self.listing_within(limits, options, budget, Again::Yes)
    }

    fn listing_within(&self, limits: Limits, options: &Options, budget: &Budget, again: Again) -> Result<Tally, Fault> {
        let split = Split::of(&self.cnf, self.problem.bit_count(), &self.counted);
        let timed = budget.time_left().is_some();
        if split.contradiction {
            return Ok(no_solution(if timed { Method::SecondListing } else { Method::Listing }));
        }
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
            if again == Again::Yes {
                confirm(&mut tally, split, &listings, budget)?;
            }
            return Ok(tally);
        }
        let (solutions, complete) = product::solutions(self.problem.bit_count(), &split, &listings, options.keep);
        let mut tally = Tally { low, high, method, checked_by: Vec::new(), solutions, complete };
        let listed: u64 = listings.iter().map(|listing| listing.found).sum();
        if tally.exact().is_some() && listed <= CONFIRMED && again == Again::Yes {
            confirm(&mut tally, split, &listings, budget)?;
        }
        Ok(tally)
    }
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
