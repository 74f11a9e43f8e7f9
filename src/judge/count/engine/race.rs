//! The race of orders: which order is best is worth factors of a thousand either way and is not known beforehand, so each
//! gets a little work in turn, then a little more, and the one that has covered most goes on alone.
//!
//! Work is counted (variables looked at, decisions, conflicts), never timed: the same input takes the same course on
//! every machine. All orders share the cache and the learnt clauses, which are facts about the formula and not about an
//! order; what a loser found is not lost.

use num_bigint::BigUint;
use num_traits::Zero;

use super::decompose::decompose;
use super::number::Number;
use super::order::OrderKind;
use super::prepare::{Class, Prepared};
use super::search::{Bounds, Search, Step};
use super::trace::Trace;

/// Work of each order in the first round; a later round gets the given factor more.
const FIRST_ROUND: u64 = 100_000;
const GROWTH: u64 = 6;
const ROUNDS: u32 = 3;
/// The share of its variables in the largest bag up to which a decomposition goes first.
const NARROW: f64 = 0.25;

/// An order with its ranks.
pub(crate) struct Runner {
    pub(crate) kind: OrderKind,
    ranks: Vec<u32>,
}

/// The orders for this formula, the most promising first; only the wanted one if one is named.
pub(crate) fn runners(formula: &Prepared, wanted: Option<OrderKind>) -> Vec<Runner> {
    let vars = formula.class.len();
    let mut runners = Vec::new();
    let is_wanted = |kind| wanted.is_none_or(|wanted| wanted == kind);
    if is_wanted(OrderKind::Dynamic) {
        runners.push(Runner { kind: OrderKind::Dynamic, ranks: Vec::new() });
    }
    if is_wanted(OrderKind::Guided)
        && let Some(tree) = decompose(vars, &formula.clauses)
    {
        let narrow = (tree.largest as f64) < NARROW * vars as f64;
        let at = if narrow { 0 } else { runners.len() };
        runners.insert(at, Runner { kind: OrderKind::Guided, ranks: tree.ranks });
    }
    if is_wanted(OrderKind::Inputs) {
        let rank = |var: usize| if formula.class[var] == Class::Counted { var } else { vars + var };
        runners.push(Runner { kind: OrderKind::Inputs, ranks: (0..vars).map(|var| rank(var) as u32).collect() });
    }
    if runners.is_empty() {
        // The wanted order cannot be had for a formula of this size.
        runners.push(Runner { kind: OrderKind::Dynamic, ranks: Vec::new() });
    }
    runners
}

/// How a race ended, and which order ended it.
pub(crate) enum Finish<N> {
    /// With the count.
    Counted(Number, N, OrderKind),
    /// Without time left: the best bounds that any order proved.
    Bounded(Bounds, OrderKind),
}

/// Runs the race.
pub(crate) fn race<T: Trace>(
    search: &mut Search<'_, T>,
    runners: Vec<Runner>,
    spent: impl Fn() -> bool,
) -> Finish<T::Node> {
    let counted = search.class.iter().filter(|&&class| class == Class::Counted).count();
    let mut known = Bounds { low: BigUint::zero(), high: BigUint::from(1u32) << counted, covered: 0.0 };
    let mut best = 0;
    let rounds = if runners.len() > 1 { ROUNDS } else { 0 };
    for round in 0..rounds {
        let mut covered = -1.0;
        for (at, runner) in runners.iter().enumerate() {
            match search.run(runner.ranks.clone(), FIRST_ROUND * GROWTH.pow(round)) {
                Step::Done(value, node) => return Finish::Counted(value, node, runner.kind),
                Step::Stopped(bounds) => {
                    if bounds.covered > covered {
                        (covered, best) = (bounds.covered, at);
                    }
                    merge(&mut known, bounds);
                }
                Step::Conflict(_) => unreachable!("a run answers conflicts at the root with 0"),
            }
            if spent() {
                return Finish::Bounded(known, runner.kind);
            }
        }
    }
    let runner = &runners[best];
    match search.run(runner.ranks.clone(), u64::MAX) {
        Step::Done(value, node) => Finish::Counted(value, node, runner.kind),
        Step::Stopped(bounds) => {
            merge(&mut known, bounds);
            Finish::Bounded(known, runner.kind)
        }
        Step::Conflict(_) => unreachable!("a run answers conflicts at the root with 0"),
    }
}

fn merge(known: &mut Bounds, bounds: Bounds) {
    if bounds.low > known.low {
        known.low = bounds.low;
    }
    if bounds.high < known.high {
        known.high = bounds.high;
    }
}
