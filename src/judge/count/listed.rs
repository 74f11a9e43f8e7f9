//! The listing as a way of counting: the parts of the problem listed by one solver, and again by the other.

use num_bigint::BigUint;
use num_traits::{One, Zero};

use super::combine::disagree;
use super::job::Job;
use super::list::{self, Limits, Listing, Plan, Search};
use super::parts::Split;
use super::{CONFIRMED, CONFIRMED_WORK, Fault, LISTED, LISTED_WORK, Method, Tally, confirm, product};
use crate::budget::Budget;
use crate::sat::{Batsat, Varisat};

/// Whether the second engine lists again what the first one listed.
#[derive(Clone, Copy, PartialEq, Eq)]
pub(super) enum Again {
    Yes,
    No,
}

impl Job<'_> {
    /// Counts by the solvers.
    pub(super) fn listing(&self, keep: usize, budget: &Budget) -> Result<Tally, Fault> {
        let timed = budget.time_left().is_some();
        let limits = if timed { Limits::none() } else { Limits { solutions: LISTED, work: LISTED_WORK } };
        self.listing_within(limits, keep, budget, Again::Yes)
    }

    pub(super) fn listing_within(
        &self,
        limits: Limits,
        keep: usize,
        budget: &Budget,
        again: Again,
    ) -> Result<Tally, Fault> {
        self.timed(|| self.listing_of_parts(limits, keep, budget, again))
    }

    fn listing_of_parts(&self, limits: Limits, keep: usize, budget: &Budget, again: Again) -> Result<Tally, Fault> {
        let again = if self.options.confirm { again } else { Again::No };
        let split = Split::of(&self.cnf, self.problem.bit_count(), &self.counted);
        let timed = budget.time_left().is_some();
        if split.contradiction {
            return Ok(no_solution(if timed { Method::SecondListing } else { Method::Listing }));
        }
        let plan = Plan { search: Search::Pruned, keep, limits };
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
                confirm_by_the_other(&mut tally, split, &listings, budget)?;
            }
            return Ok(tally);
        }
        let (solutions, complete) = product::solutions(self.problem.bit_count(), &split, &listings, keep);
        let mut tally = Tally { solutions, complete, ..Tally::between(low, high, method) };
        let listed: u64 = listings.iter().map(|listing| listing.found).sum();
        if tally.exact().is_some() && listed <= CONFIRMED && again == Again::Yes {
            confirm_by_the_other(&mut tally, split, &listings, budget)?;
        }
        Ok(tally)
    }
}

fn no_solution(method: Method) -> Tally {
    let zero = BigUint::zero();
    Tally { complete: true, ..Tally::between(zero.clone(), zero, method) }
}

/// Lists again with the other engine, if there is time.
fn confirm_by_the_other(tally: &mut Tally, split: Split, first: &[Listing], budget: &Budget) -> Result<(), Fault> {
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
