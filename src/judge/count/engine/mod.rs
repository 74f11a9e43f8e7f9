//! The counting engine: the exact number of (projected) models of a list of clauses.
//!
//! Input:  [`Clauses`], the number of variables, and the shown ones where not all are.
//! Output: [`Count`]: the number of assignments of the shown variables that extend to a model, or proven bounds.
//!
//! It speaks of clauses only: what they mean is not known here. The way of a formula through this room:
//!
//! ```text
//! prepare/   made smaller without changing the count
//! decompose  a tree decomposition      ─┐
//! order      which variable is decided ─┤
//! race       a few orders, the best one goes on
//! search     decide, split, multiply, add          satisfy   parts without shown variables
//! ├ store, propagate, learn     clauses, their conclusions, and clauses learnt from conflicts
//! ├ components                  the parts into which the rest falls
//! ├ cache                       the counts of parts met before
//! └ leaf                        parts of few variables by truth table
//! trace      what happened, for whoever wants to keep it
//! ```
//!
//! Each file names the published method it follows.

mod cache;
mod components;
mod decompose;
mod leaf;
mod learn;
mod lit;
mod number;
mod order;
mod prepare;
mod propagate;
mod race;
mod satisfy;
mod search;
mod store;
mod trace;

use std::thread;

use num_bigint::BigUint;
use num_traits::{One, Zero};

use crate::budget::Budget;
use crate::problem::{BitId, Clauses};
pub(super) use lit::Lit;
pub(super) use number::Number;
pub use order::OrderKind;
pub use prepare::Effort;
pub(super) use prepare::{Class, Prepared, prepare};
use race::{Finish, race, runners};
use search::Search;
pub use trace::{Silent, Trace};

/// What the engine may do.
#[derive(Clone, Debug)]
pub struct Options {
    /// Bytes that the cache may hold; a budget with a memory limit lowers it.
    pub memory: u64,
    /// Threads to use. The engine uses one: the field is there for callers that set one number for all methods.
    pub threads: usize,
    /// The order to use; a race of all of them where none is named.
    pub order: Option<OrderKind>,
    /// How much the preparation may change.
    pub effort: Effort,
    /// Work after which the search stops with bounds, in units that do not depend on the machine (about a variable
    /// looked at).
    pub work: u64,
}

impl Default for Options {
    fn default() -> Self {
        Self { memory: 1 << 30, threads: 1, order: None, effort: Effort::Count, work: u64::MAX }
    }
}

/// The answer of the engine.
#[derive(Clone, PartialEq, Eq, Debug)]
pub struct Count {
    /// At least so many.
    pub low: BigUint,
    /// At most so many.
    pub high: BigUint,
    /// Whether `low` and `high` are the count.
    pub decided: bool,
    /// What it took.
    pub stats: Stats,
}

/// What a count took.
#[derive(Clone, PartialEq, Eq, Debug, Default)]
pub struct Stats {
    /// Variables left by the preparation.
    pub vars: usize,
    /// Clauses left by the preparation.
    pub clauses: usize,
    /// Variables left that count.
    pub counted: usize,
    /// The order that finished; none where the preparation did.
    pub order: Option<OrderKind>,
    /// Decisions.
    pub decisions: u64,
    /// Conflicts that were learnt from.
    pub conflicts: u64,
    /// Parts counted by truth table.
    pub leaves: u64,
    /// Lookups in the cache.
    pub lookups: u64,
    /// Lookups that found something.
    pub hits: u64,
    /// Entries dropped for want of memory.
    pub evicted: u64,
}

/// Counts the assignments of the shown variables (of all, where nothing is said) that extend to a model. Variables that
/// no clause speaks of are free: a shown one doubles the count.
pub fn count(
    clauses: &Clauses,
    var_count: usize,
    shown: Option<&[BitId]>,
    options: &Options,
    budget: &Budget,
) -> Count {
    count_traced(clauses, var_count, shown, options, budget, &mut Silent).0
}

/// The same, with a listener; the answer has its handle of the whole where the count is decided. Every variable in the
/// events is one of the given formula. With [`Effort::Models`] the events speak of all its models (on the parts where
/// shown variables are left); a shown variable in no event is free.
pub fn count_traced<T: Trace + Send>(
    clauses: &Clauses,
    var_count: usize,
    shown: Option<&[BitId]>,
    options: &Options,
    budget: &Budget,
    trace: &mut T,
) -> (Count, Option<T::Node>)
where
    T::Node: Send,
{
    let formula = prepare(clauses, var_count, shown, options.effort, budget);
    let depth = (formula.class.len() + 1).min(MAX_DEPTH);
    let stack = STACK_BASE + depth * STACK_PER_LEVEL;
    thread::scope(|scope| {
        let work = || search(&formula, options, budget, depth, trace);
        match thread::Builder::new().stack_size(stack).spawn_scoped(scope, work) {
            Ok(handle) => handle.join().unwrap_or_else(|panic| std::panic::resume_unwind(panic)),
            // No thread to be had: nothing is counted, and that is what the bounds say.
            Err(_) => (unknown(&formula), None),
        }
    })
}

/// Nested decisions beyond which a part is given up with bounds.
const MAX_DEPTH: usize = 100_000;
/// Bytes of stack for each nested decision (measured: between 1 and 2 KiB with little optimisation) and for the rest.
/// Address space only: pages that are not reached cost nothing.
const STACK_PER_LEVEL: usize = 8 << 10;
const STACK_BASE: usize = 4 << 20;

fn unknown(formula: &Prepared) -> Count {
    let counted = formula.class.iter().filter(|&&class| class == prepare::Class::Counted).count();
    let high = BigUint::one() << (counted + formula.free);
    Count { low: BigUint::zero(), high, decided: false, stats: Stats::default() }
}

fn search<T: Trace>(
    formula: &Prepared,
    options: &Options,
    budget: &Budget,
    depth: usize,
    trace: &mut T,
) -> (Count, Option<T::Node>) {
    let mut stats = Stats {
        vars: formula.class.len(),
        clauses: formula.clauses.len(),
        counted: formula.class.iter().filter(|&&class| class == prepare::Class::Counted).count(),
        ..Stats::default()
    };
    if formula.contradiction {
        let node = trace.nothing();
        return (Count { low: BigUint::zero(), high: BigUint::zero(), decided: true, stats }, Some(node));
    }
    let memory = budget.memory().map_or(options.memory, |limit| limit.min(options.memory));
    let mut search = Search::new(formula, memory, depth, trace, budget);
    let runners = runners(formula, options.order);
    let finish = race(&mut search, runners, options.work, || budget.spent());
    stats.decisions = search.spent.decisions;
    stats.leaves = search.spent.leaves;
    stats.conflicts = search.learner.conflicts();
    (stats.lookups, stats.hits, stats.evicted) = (search.cache.lookups, search.cache.hits, search.cache.evicted);
    match finish {
        Finish::Counted(value, node, order) => {
            stats.order = Some(order);
            let count = value.to_big() << formula.free;
            let node = search.trace.all(&formula.fixed, &[node]);
            (Count { low: count.clone(), high: count, decided: true, stats }, Some(node))
        }
        Finish::Bounded(bounds, order) => {
            stats.order = Some(order);
            let (low, high) = (bounds.low << formula.free, bounds.high << formula.free);
            // Bounds that meet are the count, even though no single search finished.
            (Count { decided: low == high, low, high, stats }, None)
        }
    }
}
