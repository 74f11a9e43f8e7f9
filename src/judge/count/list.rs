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
/// An assumption costs as much as so many variables assigned: it is a decision with a propagation of its own.
const ASSUMED: usize = 4;
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
        let mut answer = self.call(path.assumed());
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
                Flip::Possible => answer = self.call(path.assumed()),
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
        self.left.work = self.left.work.saturating_sub((1 + ASSUMED * assumptions.len() + assigned) as u64);
        answer
    }

    /// Notes the solution in the engine's model.
    fn note(&mut self) {
        self.listing.found += 1;
        if self.listing.kept.len() < self.plan.keep {
            self.listing.kept.push((0..self.part.bit_count).map(|var| self.engine.value(var)).collect());
        }
        if self.listing.found.is_multiple_of(REPORTED) {
            self.budget.report("listing solutions", self.listing.found, None);
        }
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::id::Id;
    use crate::judge::clauses::Cnf;
    use crate::judge::count::parts::Split;
    use crate::problem::{BitId, BitLit, Clauses};
    use crate::random::SplitMix64;
    use crate::sat::{Batsat, Varisat};

    const VARS: usize = 12;

    /// A part of twelve variables, of which those in `counted` are counted, with few clauses and so many solutions.
    fn random_part(random: &mut SplitMix64, counted: &[usize]) -> Part {
        let mut clauses = Clauses::new();
        // A clause that holds all variables together.
        clauses.push(&(0..VARS).map(|var| BitLit::new(BitId::new(var), true)).collect::<Vec<_>>());
        for _ in 0..random.below(14) {
            let length = 2 + random.below(3);
            let lit = |_| BitLit::new(BitId::new(random.below(VARS as u64) as usize), random.coin());
            clauses.push(&(0..length).map(lit).collect::<Vec<_>>());
        }
        let counted: Vec<BitId> = counted.iter().map(|&var| BitId::new(var)).collect();
        let mut split = Split::of(&Cnf { var_count: VARS, clauses }, VARS, &counted);
        assert_eq!(split.parts.len(), 1);
        split.parts.remove(0)
    }

    fn holds(part: &Part, code: usize) -> bool {
        part.clauses().all(|clause| clause.iter().any(|lit| (code >> lit.var() & 1 == 1) != lit.is_negated()))
    }

    fn brute_force(part: &Part) -> u64 {
        let mask = part.counted.iter().fold(0, |mask, &var| mask | 1 << var);
        let mut seen: Vec<usize> = (0..1 << VARS).filter(|&code| holds(part, code)).map(|code| code & mask).collect();
        seen.sort_unstable();
        seen.dedup();
        seen.len() as u64
    }

    fn plan(search: Search, limits: Limits) -> Plan {
        Plan { search, keep: 10, limits }
    }

    fn search<E: Engine>(part: &Part, plan: Plan) -> Listing {
        Lister::<E>::new(part, plan, &Budget::unlimited()).search().expect("right models")
    }

    #[test]
    fn both_engines_and_both_searches_find_every_solution() {
        let mut random = SplitMix64::new(3);
        for counted in [&(0..VARS).collect::<Vec<_>>()[..], &[1, 4, 5, 9], &[]] {
            for _ in 0..12 {
                let part = random_part(&mut random, counted);
                let expected = brute_force(&part);
                for kind in [Search::Pruned, Search::Plain] {
                    let plan = plan(kind, Limits::none());
                    for listing in [search::<Varisat>(&part, plan), search::<Batsat>(&part, plan)] {
                        assert_eq!((listing.found, listing.rest), (expected, BigUint::zero()));
                        assert_eq!(listing.kept.len() as u64, expected.min(10));
                    }
                }
                let listed = list_all::<Batsat>(&[part], plan(Search::Pruned, Limits::none()), &Budget::unlimited());
                assert_eq!(listed.unwrap()[0].found, expected);
            }
        }
    }

    #[test]
    fn a_limit_leaves_bounds_that_hold() {
        let mut random = SplitMix64::new(4);
        let counted: Vec<usize> = (0..VARS).collect();
        for (solutions, work) in [(0, u64::MAX), (7, u64::MAX), (2500, u64::MAX), (u64::MAX, 300), (u64::MAX, 0)] {
            let part = random_part(&mut random, &counted);
            let expected = brute_force(&part);
            let plan = plan(Search::Pruned, Limits { solutions, work });
            let whole = list_all::<Varisat>(std::slice::from_ref(&part), plan, &Budget::unlimited()).unwrap().remove(0);
            for listing in [search::<Varisat>(&part, plan), whole] {
                assert!(
                    listing.found <= expected && BigUint::from(expected) <= listing.high(),
                    "{listing:?}, {expected}"
                );
                assert!(listing.found <= solutions.saturating_add(1));
            }
        }
    }

    #[test]
    fn a_part_without_solutions_decides() {
        let lit = |var: usize, value| BitLit::new(BitId::new(var), value);
        let mut clauses = Clauses::new();
        clauses.push(&[lit(0, true), lit(1, true)]);
        for (a, b) in [(true, true), (true, false), (false, true), (false, false)] {
            clauses.push(&[lit(2, a), lit(3, b)]);
        }
        let bits: Vec<BitId> = (0..4).map(BitId::new).collect();
        let split = Split::of(&Cnf { var_count: 4, clauses }, 4, &bits);
        assert_eq!(split.parts.len(), 2);
        let plan = plan(Search::Pruned, Limits::none());
        let listings = list_all::<Varisat>(&split.parts, plan, &Budget::unlimited()).unwrap();
        assert!(listings.iter().any(|listing| listing.high().is_zero()));
    }

    /// An engine that says that everything is true.
    struct Optimist;

    impl Engine for Optimist {
        fn new() -> Self {
            Self
        }
        fn add_clause(&mut self, _: &[Lit]) {}
        fn solve(&mut self, _: &[Lit], _: &Budget) -> Answer {
            Answer::Sat
        }
        fn value(&self, _: usize) -> bool {
            true
        }
    }

    #[test]
    fn a_wrong_model_is_noticed() {
        let lit = |var: usize, value| BitLit::new(BitId::new(var), value);
        let mut clauses = Clauses::new();
        clauses.push(&[lit(0, false), lit(1, false)]);
        let bits = [BitId::new(0), BitId::new(1)];
        let split = Split::of(&Cnf { var_count: 2, clauses }, 2, &bits);
        let plan = plan(Search::Pruned, Limits::none());
        let searched = Lister::<Optimist>::new(&split.parts[0], plan, &Budget::unlimited()).search();
        assert!(searched.is_err());
    }
}
