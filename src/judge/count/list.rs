//! Listing: the solutions of a part one by one, by an engine.
//!
//! Input:  parts, an engine type, limits and a budget. Output: a [`Listing`] for each part.
//! Holds:  `found` solutions that differ in the counted variables exist, and at most `found + rest` do.
//!
//! First with blocking clauses: each solution found is excluded by a clause over the counted variables. That is fast
//! for few solutions and slows down with their number, so after [`BLOCKED`] of them the part is begun anew, depth
//! first: the counted variables are fixed in order by assumptions, to the values of the last model, and each is
//! flipped once on the way back. The unflipped branch needs no call, and what was not searched yet is known exactly.
//!
//! Where the search is [`Pruned`](Search::Pruned), unit propagation of our own tells which flips are impossible and
//! saves their calls, which are most of them where variables are coded one-hot. The way that confirms is plain, so that
//! the two share no more than this file.

use num_bigint::BigUint;
use num_traits::{One, Zero};

use super::parts::Part;
use super::path::{Flip, Path};
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

/// How to search depth first.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub(super) enum Search {
    /// With unit propagation.
    Pruned,
    /// By calls only.
    Plain,
}

/// A model of an engine that breaks a clause.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub(super) struct WrongModel;

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

/// How to list.
#[derive(Clone, Copy, Debug)]
pub(super) struct Plan {
    pub(super) search: Search,
    /// Solutions to keep of each part.
    pub(super) keep: usize,
    pub(super) limits: Limits,
}

/// Lists the solutions of all parts. Once a part has none, the others are left as they are.
pub(super) fn list_all<E: Engine>(parts: &[Part], plan: Plan, budget: &Budget) -> Result<Vec<Listing>, WrongModel> {
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
                    return Ok(listings);
                }
                Answer::Stopped => return Ok(listings),
            }
        }
    }
    let mut left = plan.limits;
    for (part, listing) in parts.iter().zip(&mut listings) {
        let mut lister = Lister::<E>::new(part, Plan { limits: left, ..plan }, budget);
        let listed = lister.run()?;
        left.solutions = left.solutions.saturating_sub(listed.found);
        left.work = lister.left.work;
        if listed.found >= listing.found {
            *listing = listed;
        }
    }
    Ok(listings)
}

fn engine_for<E: Engine>(part: &Part) -> E {
    let mut engine = E::new();
    part.clauses().for_each(|clause| engine.add_clause(clause));
    engine
}

struct Lister<'a, E> {
    part: &'a Part,
    engine: E,
    plan: Plan,
    left: Limits,
    budget: &'a Budget,
    listing: Listing,
}

impl<'a, E: Engine> Lister<'a, E> {
    fn new(part: &'a Part, plan: Plan, budget: &'a Budget) -> Self {
        Self { part, engine: engine_for(part), plan, left: plan.limits, budget, listing: Listing::default() }
    }

    fn run(&mut self) -> Result<Listing, WrongModel> {
        let blocked = self.block();
        if blocked.rest.is_zero() || self.is_spent() {
            return Ok(blocked);
        }
        self.engine = engine_for(self.part);
        let searched = self.search()?;
        // A search that was stopped early may know less than what was blocked before.
        Ok(if searched.found < blocked.found { blocked } else { searched })
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
    fn search(&mut self) -> Result<Listing, WrongModel> {
        let mut path = Path::new(self.part, self.plan.search);
        let mut answer = self.call(&path.assumed());
        loop {
            if answer == Answer::Sat {
                path.descend(self.part, &self.engine)?;
                self.note();
            } else if answer == Answer::Stopped || path.is_empty() {
                break;
            }
            let stops = self.is_spent();
            match path.flip_next(stops) {
                Flip::None => return Ok(std::mem::take(&mut self.listing)),
                Flip::Left => break,
                Flip::Possible => answer = self.call(&path.assumed()),
                Flip::Impossible => {
                    self.left.work = self.left.work.saturating_sub(1);
                    answer = Answer::Unsat;
                }
            }
        }
        self.listing.rest = path.unsearched(self.part.counted.len(), answer == Answer::Stopped);
        Ok(std::mem::take(&mut self.listing))
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
        if self.listing.kept.len() < self.plan.keep {
            self.listing.kept.push((0..self.part.bit_count).map(|var| self.engine.value(var)).collect());
        }
        if self.listing.found % REPORTED == 0 {
            self.budget.report("listing solutions", self.listing.found, None);
        }
    }
}
