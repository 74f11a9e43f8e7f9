//! The search: DPLL-style counting with components, a cache and conflict clauses.
//!
//! - T. Sang, F. Bacchus, P. Beame, H. Kautz, T. Pitassi, "Combining component caching and clause learning for effective
//!   model counting", SAT 2004.
//! - M. Thurley, "sharpSAT: counting models with advanced component caching and implicit BCP", SAT 2006.
//!
//! A part is counted by a decision on one of its variables: the sum over both values of the product over the parts that
//! are left. After a conflict in the first value the asserted literal of the learnt clause is a conclusion at the level
//! of the part, so the part is explored again with it instead of deciding the second value; a conflict there is handed
//! to the level above, which learns from it as a SAT solver would.
//!
//! A part in which no variable counts needs one model and no more (the `satisfy` module): so the counted variables are
//! decided first, and projected counting costs nothing more.
//!
//! **Learning and the cache.** A learnt clause follows from the whole formula. What it forces in a part is right if all
//! the other open parts have a model; if one has none, the product is 0 anyhow, but the counts cached meanwhile may be
//! too low. They are taken back as soon as a part without models is found, so no wrong entry outlives the node that made
//! it: if part *i* of *k* has none, the entries of the parts before it go; its own go too if parts after it are
//! uncounted, since those may be the ones without models.
//!
//! **Running out.** The count so far is a lower bound wherever a sum is unfinished; an uncounted part has at most
//! 2^counted and at least 0 models.

use num_bigint::BigUint;
use num_traits::Zero;

use super::cache::Cache;
use super::components::{Finder, Part, Range};
use super::leaf::{Leaf, MAX_LEAF};
use super::learn::{Learner, Learnt};
use super::lit::Lit;
use super::number::Number;
use super::order::Guide;
use super::prepare::{Class, Prepared};
use super::propagate::{Conflict, Propagator, Reason};
use super::store::Store;
use super::trace::Trace;
use crate::budget::Budget;
use crate::id::Id;
use crate::problem::{BitId, BitLit};

/// What is proven about a count that was not finished.
#[derive(Clone, Debug)]
pub(crate) struct Bounds {
    pub(crate) low: BigUint,
    pub(crate) high: BigUint,
    /// The share of the search that is behind, where every decision halves what is left.
    pub(crate) covered: f64,
}

impl Bounds {
    fn unknown(counted: u32) -> Self {
        Self { low: BigUint::zero(), high: BigUint::from(1u32) << counted, covered: 0.0 }
    }
}

/// How counting a part ended.
pub(crate) enum Step<N> {
    /// With a number.
    Done(Number, N),
    /// With a false clause at the level of the part: no model, and the level above learns from the clause.
    Conflict(Conflict),
    /// Without time or work left.
    Stopped(Bounds),
}

enum Branch<N> {
    Open(Step<N>),
    Refuted(Learnt),
}

/// What the search did.
#[derive(Clone, Copy, Debug, Default)]
pub(crate) struct Spent {
    pub(crate) decisions: u64,
    pub(crate) leaves: u64,
}

/// How often the budget is asked, in decisions.
const CHECK_EVERY: u64 = 256;

/// The counter of one prepared formula. It can be run several times with different orders; what it learnt and cached
/// stays.
pub(crate) struct Search<'a, T: Trace> {
    pub(crate) p: Propagator,
    pub(crate) finder: Finder,
    pub(crate) cache: Cache<T::Node>,
    pub(crate) learner: Learner,
    pub(crate) class: &'a [Class],
    pub(crate) ranks: Vec<u32>,
    pub(crate) spent: Spent,
    pub(crate) phases: Vec<bool>,
    pub(crate) trace: &'a mut T,
    names: &'a [BitLit],
    leaf: Leaf,
    budget: &'a Budget,
    work_limit: u64,
    max_depth: usize,
    depth: usize,
    stopped: bool,
    key: Vec<u8>,
}

impl<'a, T: Trace> Search<'a, T> {
    /// The counter of this formula, with so many bytes for its cache and so many nested decisions.
    pub(crate) fn new(
        formula: &'a Prepared,
        memory: u64,
        max_depth: usize,
        trace: &'a mut T,
        budget: &'a Budget,
    ) -> Self {
        let store = Store::new(formula.class.len(), &formula.clauses);
        let places = store.places();
        let vars = formula.class.len();
        Self {
            p: Propagator::new(store),
            finder: Finder::new(vars, places),
            cache: Cache::new(memory),
            learner: Learner::new(vars),
            class: &formula.class,
            ranks: Vec::new(),
            spent: Spent::default(),
            phases: vec![false; vars],
            trace,
            names: &formula.names,
            leaf: Leaf::new(vars),
            budget,
            work_limit: u64::MAX,
            max_depth,
            depth: 0,
            stopped: false,
            key: Vec::new(),
        }
    }

    /// The measure of work: it does not depend on the machine.
    pub(crate) fn work(&self) -> u64 {
        self.finder.work + 8 * self.spent.decisions + 16 * self.learner.conflicts()
    }

    /// Counts the whole formula, with at most so much more work.
    pub(crate) fn run(&mut self, ranks: Vec<u32>, work: u64) -> Step<T::Node> {
        self.ranks = ranks;
        self.work_limit = self.work().saturating_add(work);
        self.stopped = false;
        self.depth = 0;
        self.p.undo_to(0);
        self.p.starts.clear();
        let root = self.finder.root(self.class.len());
        match self.explore(root, 0) {
            Step::Conflict(_) => Step::Done(Number::ZERO, self.trace.nothing()),
            step => step,
        }
    }

    /// Whether the search has to end now.
    pub(crate) fn must_stop(&mut self) -> bool {
        self.spent.decisions += 1;
        if !self.stopped && self.spent.decisions.is_multiple_of(CHECK_EVERY) {
            self.stopped = self.budget.spent() || self.work() >= self.work_limit;
            self.budget.report("counting", self.spent.decisions, None);
        }
        self.stopped || self.depth >= self.max_depth
    }

    /// Counts what is left of these variables at the current level. `since` is where the trail stood before the
    /// conclusions that belong to them.
    fn explore(&mut self, above: Range, since: usize) -> Step<T::Node> {
        let mark = self.finder.mark();
        let first = self.finder.parts.len();
        let guide = Guide {
            class: self.class,
            ranks: &self.ranks,
            activity: &self.learner.activity,
            scale: self.learner.scale(),
        };
        let free = self.finder.split(&self.p, &guide, above);
        let step = self.product(above, first, free, since);
        self.finder.release(mark);
        step
    }

    fn product(&mut self, above: Range, first: usize, free: usize, since: usize) -> Step<T::Node> {
        let count = self.finder.parts.len() - first;
        let (start, used) = (self.cache.mark(), self.p.learnt_used);
        let mut value = Number::power_of_two(free);
        let mut nodes = Vec::new();
        let implied = if T::LISTENS { self.implied(above, since) } else { Vec::new() };
        for at in 0..count {
            let part = self.finder.parts[first + at];
            let own = self.cache.mark();
            let step = self.count(&part);
            let last = at + 1 == count;
            match step {
                Step::Done(factor, node) if !factor.is_zero() => {
                    value = value.times(&factor);
                    if T::LISTENS {
                        nodes.push(node);
                    }
                    continue;
                }
                Step::Stopped(bounds) => {
                    // Nobody knows whether this part and those behind it have models, so what learnt clauses forced in
                    // the others may be wrong, and a later run must not find it.
                    if self.p.learnt_used != used {
                        self.cache.retract(start, if last { own } else { u64::MAX });
                    }
                    let rest = &self.finder.parts[first + at + 1..];
                    let bits: u32 = rest.iter().map(|part| part.counted).sum();
                    let value = value.to_big();
                    let low = if last { &value * bounds.low } else { BigUint::zero() };
                    let covered = if last { bounds.covered } else { 0.0 };
                    return Step::Stopped(Bounds { low, high: (value * bounds.high) << bits, covered });
                }
                Step::Done(..) | Step::Conflict(_) => {}
            }
            if self.p.learnt_used != used {
                self.cache.retract(start, if last { own } else { u64::MAX });
            }
            return match step {
                Step::Conflict(conflict) => Step::Conflict(conflict),
                _ => Step::Done(Number::ZERO, self.trace.nothing()),
            };
        }
        Step::Done(value, self.trace.all(&implied, &nodes))
    }

    /// Counts one part at the current level, and leaves the trail as it was unless the answer is a conflict.
    fn count(&mut self, part: &Part) -> Step<T::Node> {
        if part.counted > 0 && part.len as usize <= MAX_LEAF && !T::LISTENS {
            self.spent.leaves += 1;
            let vars = self.finder.vars_of(part);
            let count = self.leaf.count(&self.p, self.class, vars, part.hidden == 0);
            return Step::Done(Number::Small(u128::from(count)), self.trace.nothing());
        }
        self.finder.write_key(part, &mut self.key);
        let hash = Cache::<T::Node>::hash(&self.key);
        if let Some((value, node)) = self.cache.get(&self.key, hash) {
            return Step::Done(value, node);
        }
        let since = self.p.trail.len();
        self.depth += 1;
        let step = if part.counted == 0 { self.satisfy(part) } else { self.decide(part, since) };
        self.depth -= 1;
        if matches!(step, Step::Conflict(_)) {
            return step;
        }
        self.p.undo_to(since);
        if let Step::Done(value, node) = &step {
            self.finder.write_key(part, &mut self.key);
            self.cache.put(&self.key, hash, value.clone(), node.clone());
        }
        step
    }

    fn decide(&mut self, part: &Part, since: usize) -> Step<T::Node> {
        if self.must_stop() {
            return Step::Stopped(Bounds::unknown(part.counted));
        }
        let lit = Lit::new(part.choice, false);
        let half = part.counted - u32::from(self.class[part.choice as usize] == Class::Counted);
        let (first, node) = match self.branch(part, lit) {
            Branch::Refuted(learnt) => {
                self.learner.assert(&mut self.p, &learnt);
                return match self.p.propagate() {
                    Some(conflict) => Step::Conflict(conflict),
                    None => self.explore(part.range(), since),
                };
            }
            Branch::Open(Step::Done(value, node)) => (value, node),
            Branch::Open(Step::Stopped(mut bounds)) => {
                bounds.high += BigUint::from(1u32) << half;
                bounds.covered /= 2.0;
                return Step::Stopped(bounds);
            }
            Branch::Open(Step::Conflict(_)) => unreachable!("a branch learns from its conflicts"),
        };
        let (second, other) = match self.branch(part, !lit) {
            Branch::Refuted(learnt) => {
                // The clause is kept for later; its literal goes with the trail of this part.
                self.learner.assert(&mut self.p, &learnt);
                (Number::ZERO, self.trace.nothing())
            }
            Branch::Open(Step::Done(value, node)) => (value, node),
            Branch::Open(Step::Stopped(bounds)) => {
                let first = first.to_big();
                let covered = 0.5 + bounds.covered / 2.0;
                return Step::Stopped(Bounds { low: &first + bounds.low, high: first + bounds.high, covered });
            }
            Branch::Open(Step::Conflict(_)) => unreachable!("a branch learns from its conflicts"),
        };
        let name = self.names[lit.var()];
        let (when_true, when_false) = if name.is_negated() { (other, node) } else { (node, other) };
        Step::Done(first.plus(&second), self.trace.either(name.bit(), when_true, when_false))
    }

    /// Counts the part with one more literal true.
    fn branch(&mut self, part: &Part, lit: Lit) -> Branch<T::Node> {
        self.learner.reduce(&mut self.p);
        let (level, since) = (self.p.level(), self.p.trail.len());
        self.p.push_level();
        self.p.assign(lit, Reason::None);
        let step = match self.p.propagate() {
            Some(conflict) => Step::Conflict(conflict),
            None => self.explore(part.range(), since),
        };
        let answer = match step {
            Step::Conflict(conflict) => Branch::Refuted(self.learner.analyze(&self.p, conflict)),
            step => Branch::Open(step),
        };
        self.p.pop_to_level(level);
        answer
    }

    /// The literals of these variables that became true since, under their own names.
    fn implied(&self, above: Range, since: usize) -> Vec<BitLit> {
        let vars = &self.finder.vars[above.from as usize..above.to as usize];
        let own = |lit: &&Lit| vars.binary_search(&(lit.var() as u32)).is_ok();
        self.p.trail[since..].iter().filter(own).map(|&lit| self.name(lit)).collect()
    }

    /// The literal of the given formula.
    pub(crate) fn name(&self, lit: Lit) -> BitLit {
        let name = self.names[lit.var()];
        BitLit::new(BitId::new(name.bit().index()), name.is_negated() == lit.is_negated())
    }
}

#[cfg(test)]
mod tests;
