//! Listing: the solutions of a part one by one, by an engine.
//!
//! Input:  parts, an engine type, limits and a budget. Output: a [`Listing`] for each part.
//! Holds:  `found` solutions that differ in the counted variables exist, and at most `found + rest` do.
//!
//! First with blocking clauses: each solution found is excluded by a clause over the counted variables. That is fast
//! for few solutions and slows down with their number, so after [`BLOCKED`] of them the part is begun anew, depth
//! first: the counted variables are fixed in order by assumptions, to the values of the last model, and each is
//! flipped once on the way back. The unflipped branch needs no call, and what was not searched yet is known exactly.

use num_bigint::BigUint;
use num_traits::{One, Zero};

use super::parts::Part;
use crate::budget::Budget;
use crate::problem::Bits;
use crate::sat::{Answer, Engine, Lit};

/// Solutions listed with blocking clauses: about where the two ways break even (measured with varisat on colourings of
/// grids: 80,000 a second at first, 5,000 a second after 8,000; depth first 70,000 to 150,000 a second throughout).
const BLOCKED: usize = 2000;
/// Literals in all blocking clauses together.
const BLOCKED_LITERALS: usize = 1 << 21;
/// Solutions between two reports of progress.
const REPORTED: u64 = 1 << 10;

/// When to stop.
#[derive(Clone, Copy, Debug)]
pub(super) struct Limits {
    /// Solutions of all parts together.
    pub(super) solutions: u64,
    /// Variables assigned, in all calls together.
    pub(super) work: u64,
}

impl Limits {
    /// Only the budget stops.
    pub(super) fn none() -> Self {
        Self { solutions: u64::MAX, work: u64::MAX }
    }
}

/// What was found in a part.
#[derive(Clone, Debug, Default)]
pub(super) struct Listing {
    /// Solutions found.
    pub(super) found: u64,
    /// How many there can be in what was not searched.
    pub(super) rest: BigUint,
    /// Some of the solutions, over the problem's bits of the part.
    pub(super) kept: Vec<Bits>,
}

impl Listing {
    /// At most so many solutions.
    pub(super) fn high(&self) -> BigUint {
        &self.rest + self.found
    }

    /// A part that was not searched.
    fn unknown(part: &Part) -> Self {
        Self { found: 0, rest: BigUint::one() << part.counted.len(), kept: Vec::new() }
    }
}

/// Lists the solutions of all parts. Once a part has none, the others are left as they are.
pub(super) fn list_all<E: Engine>(parts: &[Part], keep: usize, limits: Limits, budget: &Budget) -> Vec<Listing> {
    let mut listings: Vec<Listing> = parts.iter().map(Listing::unknown).collect();
    // A part without solutions decides at once: look for one before listing any.
    if parts.len() > 1 {
        for (part, listing) in parts.iter().zip(&mut listings) {
            match engine_for::<E>(part).solve(&[], budget) {
                Answer::Sat => {
                    listing.found = 1;
                    listing.rest -= 1u32;
                }
                Answer::Unsat => {
                    listing.rest.set_zero();
                    return listings;
                }
                Answer::Stopped => return listings,
            }
        }
    }
    let mut left = limits;
    for (part, listing) in parts.iter().zip(&mut listings) {
        let known = std::mem::take(listing);
        let mut lister = Lister::<E>::new(part, keep, left, budget);
        *listing = lister.run();
        if listing.found < known.found {
            *listing = known;
        }
        left.solutions = left.solutions.saturating_sub(listing.found);
        left.work = lister.left.work;
    }
    listings
}

fn engine_for<E: Engine>(part: &Part) -> E {
    let mut engine = E::new();
    part.clauses().for_each(|clause| engine.add_clause(clause));
    engine
}

struct Lister<'a, E> {
    part: &'a Part,
    engine: E,
    keep: usize,
    left: Limits,
    budget: &'a Budget,
    listing: Listing,
}

impl<'a, E: Engine> Lister<'a, E> {
    fn new(part: &'a Part, keep: usize, left: Limits, budget: &'a Budget) -> Self {
        Self { part, engine: engine_for(part), keep, left, budget, listing: Listing::default() }
    }

    fn run(&mut self) -> Listing {
        let blocked = self.block();
        if blocked.rest.is_zero() || self.is_spent() {
            return blocked;
        }
        self.engine = engine_for(self.part);
        let searched = self.search();
        // A search that was stopped early may know less than what was blocked before.
        if searched.found < blocked.found { blocked } else { searched }
    }

    /// Lists with blocking clauses, up to [`BLOCKED`] solutions.
    fn block(&mut self) -> Listing {
        let counted = &self.part.counted;
        let most = BLOCKED.min(BLOCKED_LITERALS / counted.len().max(1)).max(1) as u64;
        let space = BigUint::one() << counted.len();
        while self.listing.found <= most && !self.is_spent() {
            match self.call(&[]) {
                Answer::Sat => {
                    self.note();
                    let block: Vec<Lit> = counted.iter().map(|&var| Lit::new(var, !self.engine.value(var))).collect();
                    self.engine.add_clause(&block);
                }
                Answer::Unsat => return std::mem::take(&mut self.listing),
                Answer::Stopped => break,
            }
        }
        self.listing.rest = space - self.listing.found;
        std::mem::take(&mut self.listing)
    }

    /// Lists depth first.
    fn search(&mut self) -> Listing {
        let counted = &self.part.counted;
        // The counted variables fixed so far, and whether each was flipped.
        let mut prefix: Vec<Lit> = Vec::new();
        let mut flipped: Vec<bool> = Vec::new();
        let mut answer = self.call(&prefix);
        loop {
            match answer {
                Answer::Sat => {
                    for &var in &counted[prefix.len()..] {
                        prefix.push(Lit::new(var, self.engine.value(var)));
                        flipped.push(false);
                    }
                    self.note();
                }
                Answer::Unsat => {}
                Answer::Stopped => {
                    self.listing.rest = unsearched(&flipped, counted.len(), true);
                    break;
                }
            }
            if answer == Answer::Unsat && prefix.is_empty() {
                break;
            }
            while flipped.last() == Some(&true) {
                flipped.pop();
                prefix.pop();
            }
            let Some(last) = flipped.last_mut() else { break };
            if self.is_spent() {
                self.listing.rest = unsearched(&flipped, counted.len(), false);
                break;
            }
            *last = true;
            let lit = prefix.pop().expect("as long as the flips");
            prefix.push(!lit);
            answer = self.call(&prefix);
        }
        std::mem::take(&mut self.listing)
    }

    fn is_spent(&self) -> bool {
        self.left.work == 0 || self.listing.found > self.left.solutions || self.budget.spent()
    }

    fn call(&mut self, assumptions: &[Lit]) -> Answer {
        let answer = self.engine.solve(assumptions, self.budget);
        let assigned = if answer == Answer::Sat { self.part.vars.len() } else { 0 };
        self.left.work = self.left.work.saturating_sub((1 + assumptions.len() + assigned) as u64);
        answer
    }

    /// Notes the solution in the engine's model.
    fn note(&mut self) {
        self.listing.found += 1;
        if self.listing.kept.len() < self.keep {
            self.listing.kept.push((0..self.part.bit_count).map(|var| self.engine.value(var)).collect());
        }
        if self.listing.found % REPORTED == 0 {
            self.budget.report("listing solutions", self.listing.found, None);
        }
    }
}

/// How many assignments to the counted variables were not searched: for each unflipped variable those under its flip,
/// and, where the last call was stopped, those under the prefix itself.
fn unsearched(flipped: &[bool], counted: usize, stopped: bool) -> BigUint {
    let under = |level: usize| BigUint::one() << (counted - 1 - level);
    let flips = flipped.iter().enumerate().filter(|&(_, &flipped)| !flipped).map(|(level, _)| under(level));
    let prefix = BigUint::one() << (counted - flipped.len());
    flips.sum::<BigUint>() + if stopped { prefix } else { BigUint::zero() }
}
