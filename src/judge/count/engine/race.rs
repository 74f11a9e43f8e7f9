//! The race of orders: which order is best is worth factors of a thousand either way and is not known beforehand, so the
//! orders take turns with growing work, and those that will not make it in time are dropped.
//!
//! The share of the search that an order has covered says little by itself: one that lives by the cache covers little for
//! long and the rest at once. Its growth says more: if a share c grew by a factor g in the last rounds, the order needs
//! about log(1/c) / log(g) more rounds.
//!
//! Work is counted (variables looked at, decisions, conflicts), never timed: the same input takes the same course on
//! every machine. All orders share the cache and the learnt clauses, which are facts about the formula and not about an
//! order: taking up an order again costs little, and what a loser found is not lost.

use num_bigint::BigUint;
use num_traits::Zero;

use super::decompose::decompose;
use super::number::Number;
use super::order::OrderKind;
use super::prepare::{Class, Prepared};
use super::search::{Bounds, Search, Step};
use super::trace::Trace;

/// Work of each order in the first round; each later round gets the given factor more.
const FIRST_ROUND: u64 = 50_000;
const GROWTH: u64 = 3;
/// Rounds that all orders run.
const FAIR_ROUNDS: usize = 3;
/// An order is dropped if it seems to need so many rounds more than the best one.
const PATIENCE: f64 = 1.0;
/// Growth can mislead: an order that has covered this share of what the leader has stays in any case.
const LEAD: f64 = 2.0;
/// The share of its variables in the largest bag up to which a decomposition goes first.
const NARROW: f64 = 0.25;

/// An order with its ranks.
pub(crate) struct Runner {
    pub(crate) kind: OrderKind,
    ranks: Vec<u32>,
    /// The share covered in each round.
    covered: Vec<f64>,
}

impl Runner {
    fn new(kind: OrderKind, ranks: Vec<u32>) -> Self {
        Self { kind, ranks, covered: Vec::new() }
    }

    /// The share covered in the last round.
    fn share(&self) -> f64 {
        self.covered.last().copied().unwrap_or(0.0)
    }

    /// About how many more rounds this order needs, by its growth over the last two.
    fn rounds_left(&self) -> f64 {
        match self.covered[..] {
            [.., before, _, now] => {
                let growth = (now / before.max(f64::MIN_POSITIVE)).ln() / 2.0;
                if growth > 0.0 { -now.max(f64::MIN_POSITIVE).ln() / growth } else { f64::INFINITY }
            }
            // Too early to tell: the one that has covered most goes first.
            _ => 1.0 - self.share(),
        }
    }
}

/// The orders for this formula, the most promising first; only the wanted one if one is named.
pub(crate) fn runners(formula: &Prepared, wanted: Option<OrderKind>) -> Vec<Runner> {
    let vars = formula.class.len();
    let mut runners = Vec::new();
    let is_wanted = |kind| wanted.is_none_or(|wanted| wanted == kind);
    if is_wanted(OrderKind::Dynamic) {
        runners.push(Runner::new(OrderKind::Dynamic, Vec::new()));
    }
    if is_wanted(OrderKind::Guided)
        && let Some(tree) = decompose(vars, &formula.clauses)
    {
        let narrow = (tree.largest as f64) < NARROW * vars as f64;
        let at = if narrow { 0 } else { runners.len() };
        runners.insert(at, Runner::new(OrderKind::Guided, tree.ranks));
    }
    if is_wanted(OrderKind::Inputs) {
        let rank = |var: usize| if formula.class[var] == Class::Counted { var } else { vars + var };
        runners.push(Runner::new(OrderKind::Inputs, (0..vars).map(|var| rank(var) as u32).collect()));
    }
    if runners.is_empty() {
        // The wanted order cannot be had for a formula of this size.
        runners.push(Runner::new(OrderKind::Dynamic, Vec::new()));
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

/// Runs the race, with about so much work in all.
pub(crate) fn race<T: Trace>(
    search: &mut Search<'_, T>,
    mut runners: Vec<Runner>,
    limit: u64,
    spent: impl Fn() -> bool,
) -> Finish<T::Node> {
    let counted = search.class.iter().filter(|&&class| class == Class::Counted).count();
    let mut known = Bounds { low: BigUint::zero(), high: BigUint::from(1u32) << counted, covered: 0.0 };
    let mut work = FIRST_ROUND;
    loop {
        let alone = runners.len() == 1;
        for runner in &mut runners {
            let left = limit.saturating_sub(search.work());
            match search.run(runner.ranks.clone(), if alone { left } else { work.min(left) }) {
                Step::Done(value, node) => return Finish::Counted(value, node, runner.kind),
                Step::Stopped(bounds) => {
                    runner.covered.push(bounds.covered);
                    merge(&mut known, bounds);
                }
                Step::Conflict(_) => unreachable!("a run answers conflicts at the root with 0"),
            }
            if alone || spent() || search.work() >= limit {
                return Finish::Bounded(known, runner.kind);
            }
        }
        runners.sort_by(|a, b| a.rounds_left().total_cmp(&b.rounds_left()));
        let limit = runners[0].rounds_left() + PATIENCE;
        let most = runners.iter().map(Runner::share).fold(0.0, f64::max);
        runners.retain(|runner| {
            runner.covered.len() < FAIR_ROUNDS || runner.rounds_left() <= limit || runner.share() >= most / LEAD
        });
        work = work.saturating_mul(GROWTH);
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
