//! Parts without counted variables: one model decides.
//!
//! A conflict-driven search restricted to the variables of the part and to the levels above the current one; it uses the
//! trail, the learnt clauses and the conflict analysis of the counter. J. Marques-Silva, K. Sakallah, "GRASP", IEEE
//! Transactions on Computers 48(5), 1999; values are tried as they were last: K. Pipatsrisawat, A. Darwiche, "A
//! lightweight component caching scheme for satisfiability solvers", SAT 2007. No restarts: the parts are small.

use num_bigint::BigUint;
use num_traits::Zero;

use super::components::Part;
use super::lit::Lit;
use super::number::Number;
use super::propagate::{Conflict, Reason};
use super::search::{Bounds, Search, Step};
use super::trace::Trace;

impl<T: Trace> Search<'_, T> {
    /// Whether the part has a model: the number 1, or a conflict at the current level. Levels above the current one are
    /// taken back; what learnt clauses asserted at the current one is left to the caller.
    pub(crate) fn satisfy(&mut self, part: &Part) -> Step<T::Node> {
        let base = self.p.level();
        let since = self.p.trail.len();
        while let Some(lit) = self.next_open(part) {
            if self.must_stop() {
                self.p.pop_to_level(base);
                let bounds = Bounds { low: BigUint::zero(), high: BigUint::from(1u32), covered: 0.0 };
                return Step::Stopped(bounds);
            }
            self.learner.reduce(&mut self.p);
            self.p.push_level();
            self.p.assign(lit, Reason::None);
            if let Some(conflict) = self.settle(base) {
                return Step::Conflict(conflict);
            }
        }
        let vars = self.finder.vars_of(part);
        for &var in vars {
            self.phases[var as usize] = self.p.value(Lit::new(var, false)) == 1;
        }
        let node = if T::LISTENS {
            let own = |lit: &&Lit| vars.binary_search(&(lit.var() as u32)).is_ok();
            let values: Vec<_> = self.p.trail[since..].iter().filter(own).map(|&lit| self.name(lit)).collect();
            self.trace.witness(&values)
        } else {
            self.trace.nothing()
        };
        self.p.pop_to_level(base);
        Step::Done(Number::ONE, node)
    }

    /// Propagates, and learns until there is no conflict left; gives the conflict that cannot be mended above `base`.
    fn settle(&mut self, base: u32) -> Option<Conflict> {
        while let Some(conflict) = self.p.propagate() {
            if self.p.level() == base {
                return Some(conflict);
            }
            let learnt = self.learner.analyze(&self.p, conflict);
            self.p.pop_to_level(learnt.level.max(base));
            self.learner.assert(&mut self.p, &learnt);
        }
        None
    }

    /// The open variable of the part with the most part in late conflicts, with the value it had last.
    fn next_open(&self, part: &Part) -> Option<Lit> {
        let activity = &self.learner.activity;
        let mut best: Option<u32> = None;
        for &var in self.finder.vars_of(part) {
            if self.p.is_open(var as usize) && best.is_none_or(|best| activity[var as usize] > activity[best as usize])
            {
                best = Some(var);
            }
        }
        best.map(|var| Lit::new(var, !self.phases[var as usize]))
    }
}
