//! Approximate counting by hashing: random equations cut the solutions into cells of about equal size; one small cell
//! is counted, and the number of cells makes it a guess of the whole.
//!
//! Input:  clauses, the bits that are counted over, a tolerance t, a confidence, a seed.
//! Output: [`Hashed`]: an interval of the form `[c / (1 + t), c (1 + t)]` that holds the count with at least that
//!         confidence over the coins; or the count itself, where it is below the size of a cell.
//! Holds:  the same seed gives the same interval, with any number of threads. Every member of a cell was checked against the clauses.
//!
//! - S. Chakraborty, K. S. Meel, M. Y. Vardi, "A scalable approximate model counter", CP 2013.
//! - The same, "Algorithmic improvements in approximate counting for probabilistic inference: from linear to logarithmic
//!   SAT calls", IJCAI 2016: one list of equations a round, whose prefixes give nested cells, so that the right number of
//!   equations is found by halving; each round begins where the last one ended.
//!
//! Before that the formula is prepared as for the exact engine, so that the equations speak only of variables that
//! nothing defines: A. Ivrii, S. Malik, K. S. Meel, M. Y. Vardi, "On computing minimal independent support and its
//! applications to sampling and counting", Constraints 21, 2016.
//!
//! ```text
//! promise  how large a cell and how many rounds keep the promise
//! hash     equations from coins          cell     the members of a cell, by batsat with parities
//! ```

mod accuracy;
mod cell;
mod hash;
mod promise;

use std::collections::BTreeMap;
use std::sync::atomic::{AtomicU64, Ordering};
use std::thread;

use num_bigint::BigUint;
use num_traits::Zero;

use super::engine::{Effort, prepare};
use crate::budget::Budget;
use crate::problem::{BitId, Clauses};
use crate::random::SplitMix64;
pub use accuracy::{Accuracy, NotPossible};
use cell::{Formula, Size, WrongModel};
use hash::{Hash, Solved};
use promise::Promise;

/// What hashing found.
#[derive(Clone, PartialEq, Eq, Debug)]
pub struct Hashed {
    /// At least so many, with the confidence asked for.
    pub low: BigUint,
    /// At most so many, with the same confidence: both hold together.
    pub high: BigUint,
    /// Whether the count is `low` for certain: it was too small for cells.
    pub exact: bool,
}

/// A solver gave a model that breaks a clause or an equation.
#[derive(Clone, Copy, PartialEq, Eq, Debug, thiserror::Error)]
#[error("the solver gave a model that breaks a clause")]
pub struct Fault;

impl From<WrongModel> for Fault {
    fn from(_: WrongModel) -> Self {
        Fault
    }
}

/// How to hash.
#[derive(Clone, Copy, PartialEq, Debug)]
pub struct Options {
    /// How near, and how surely.
    pub accuracy: Accuracy,
    /// Seeds the equations.
    pub seed: u64,
    /// Threads for the rounds; the answer does not depend on it.
    pub threads: usize,
}

/// Counts about; `None` where the budget ran out, or a call of the solver took too long, before all rounds were done.
pub fn count(
    clauses: &Clauses,
    var_count: usize,
    shown: Option<&[BitId]>,
    options: &Options,
    budget: &Budget,
) -> Result<Option<Hashed>, Fault> {
    let prepared = prepare(clauses, var_count, shown, Effort::Count, budget);
    let exactly = |count: BigUint| Hashed { low: count.clone(), high: count, exact: true };
    if prepared.contradiction {
        return Ok(Some(exactly(BigUint::zero())));
    }
    let formula = Formula::of(&prepared);
    let promise = Promise::of(options.accuracy.tolerance(), options.accuracy.confidence());
    let whole = Solved::default();
    match formula.cell(&whole, promise.threshold, budget)? {
        Size::Exactly(count) => return Ok(Some(exactly(BigUint::from(count) << prepared.free))),
        Size::Stopped => return Ok(None),
        Size::Large => {}
    }
    let Some(guesses) = rounds(&formula, promise, options, budget)? else { return Ok(None) };
    let (low, high) = options.accuracy.around(&(&guesses[guesses.len() / 2] << prepared.free));
    Ok(Some(Hashed { low, high, exact: false }))
}

/// What rounds found, each a number of equations and the size of the cell; `None` where the budget ran out.
type Found = Result<Option<Vec<(usize, u64)>>, WrongModel>;

/// The guesses of all rounds, in increasing order.
fn rounds(
    formula: &Formula,
    promise: Promise,
    options: &Options,
    budget: &Budget,
) -> Result<Option<Vec<BigUint>>, WrongModel> {
    let mut random = SplitMix64::new(options.seed);
    let seeds: Vec<u64> = (0..promise.rounds).map(|_| random.next_u64()).collect();
    let done = AtomicU64::new(0);
    let round = |seed: u64, start: usize| {
        let mut random = SplitMix64::new(seed);
        let bits = formula.counted.len();
        let hash = Hash::draw(bits, bits, || random.coin());
        let found = Cells { formula, hash, limit: promise.threshold, known: BTreeMap::new(), budget }.smallest(start);
        budget.report("hashing, rounds", done.fetch_add(1, Ordering::Relaxed) + 1, Some(promise.rounds.into()));
        found
    };
    // The first round finds about where the others have to look.
    let Some(first) = round(seeds[0], 1)? else { return Ok(None) };
    let work = &|seeds: &[u64]| seeds.iter().map(|&seed| round(seed, first.0)).collect();
    let share = (seeds.len() - 1).div_ceil(options.threads.max(1)).max(1);
    let parts: Vec<Found> = thread::scope(|scope| {
        let handles: Vec<_> = seeds[1..].chunks(share).map(|seeds| scope.spawn(move || work(seeds))).collect();
        let joined = handles.into_iter().map(|handle| handle.join());
        joined.map(|part| part.unwrap_or_else(|panic| std::panic::resume_unwind(panic))).collect()
    });
    let mut found = vec![first];
    for part in parts {
        match part? {
            Some(part) => found.extend(part),
            None => return Ok(None),
        }
    }
    let mut guesses: Vec<BigUint> = found.into_iter().map(|(count, size)| BigUint::from(size) << count).collect();
    guesses.sort_unstable();
    Ok(Some(guesses))
}

/// The nested cells of one round.
struct Cells<'a> {
    formula: &'a Formula,
    hash: Hash,
    limit: u64,
    known: BTreeMap<usize, Size>,
    budget: &'a Budget,
}

impl Cells<'_> {
    fn size(&mut self, equations: usize) -> Result<Size, WrongModel> {
        if let Some(&size) = self.known.get(&equations) {
            return Ok(size);
        }
        let size = match self.hash.solved(equations) {
            Some(solved) => self.formula.cell(&solved, self.limit, self.budget)?,
            None => Size::Exactly(0),
        };
        self.known.insert(equations, size);
        Ok(size)
    }

    /// The least number of equations with a small cell, and its size; `None` where the budget ran out. Zero equations
    /// are known to leave a large one. With all of them the cell has at most a few members; if even that is large, there
    /// was no small one at all, and the last cell is taken as it is.
    fn smallest(&mut self, start: usize) -> Result<Option<(usize, u64)>, WrongModel> {
        let most = self.formula.counted.len();
        let (mut large, mut small) = (0, most + 1);
        let mut step = 1;
        let mut at = start.clamp(1, most.max(1));
        while small - large > 1 {
            match self.size(at)? {
                Size::Stopped => return Ok(None),
                Size::Large => large = at,
                Size::Exactly(_) => small = at,
            }
            // Steps double until the place is between two cells, then halve it.
            at = if small > most {
                (large + step).min(most)
            } else if large == 0 {
                small.saturating_sub(step).max(1)
            } else {
                usize::midpoint(large, small)
            };
            step *= 2;
        }
        Ok(match self.known.get(&small) {
            Some(&Size::Exactly(size)) => Some((small, size)),
            _ => Some((most, self.limit)),
        })
    }
}
