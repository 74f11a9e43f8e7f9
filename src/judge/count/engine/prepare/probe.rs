//! Failed literals: a literal whose propagation ends in a conflict is false.
//!
//! J. Freeman, "Improvements to propositional satisfiability search algorithms", PhD thesis, University of Pennsylvania,
//! 1995 (failed literals); D. Le Berre, "Exploiting the real power of unit propagation lookahead", SAT 2001 (what both
//! values of a variable force is forced; what they force to opposite values equals the variable).

use super::Effort;
use super::form::{Form, State};
use crate::judge::count::engine::lit::Lit;
use crate::judge::count::engine::propagate::{Propagator, Reason};
use crate::judge::count::engine::store::Store;

/// Literals that all probes of one round may assign.
const WORK: usize = 2_000_000;

/// Probes every variable; says whether anything was found.
pub(super) fn probe(form: &mut Form, effort: Effort) -> bool {
    let mut prober = Prober {
        p: Propagator::new(Store::new(form.class.len(), &form.clauses)),
        forced: vec![0; 2 * form.class.len()],
        round: 0,
        equal: Vec::new(),
        work: WORK,
    };
    let mut occurs = vec![false; form.class.len()];
    for lit in form.clauses.iter().flatten() {
        occurs[lit.var()] = true;
    }
    for var in (0..form.class.len()).filter(|&var| occurs[var] && form.state[var] == State::Open) {
        if prober.p.is_open(var) && prober.work > 0 && !prober.probe(Lit::new(var as u32, false)) {
            form.contradiction = true;
            return true;
        }
    }
    let mut changed = !prober.p.trail.is_empty();
    for &lit in &prober.p.trail {
        form.fix(lit);
    }
    if effort == Effort::Count {
        changed |= !prober.equal.is_empty();
        for &(a, b) in &prober.equal {
            form.merge(a, b);
        }
    }
    if changed {
        form.tidy();
    }
    changed
}

struct Prober {
    p: Propagator,
    /// For a literal, the round in which the first value forced it.
    forced: Vec<u32>,
    round: u32,
    equal: Vec<(Lit, Lit)>,
    work: usize,
}

impl Prober {
    /// Tries both values of a variable; false if there is no model.
    fn probe(&mut self, lit: Lit) -> bool {
        self.round += 1;
        let (Some(yes), Some(no)) = (self.consequences(lit), self.consequences(!lit)) else {
            let value = if self.consequences(lit).is_some() { lit } else { !lit };
            return self.p.value(value) == 1 || self.hold(value);
        };
        for &other in &yes {
            self.forced[other.index()] = self.round;
        }
        for &other in &no {
            if self.forced[other.index()] == self.round {
                if self.p.value(other) == 0 && !self.hold(other) {
                    return false;
                }
            } else if self.forced[(!other).index()] == self.round && other.var() != lit.var() {
                self.equal.push((lit, !other));
            }
        }
        true
    }

    /// What a literal forces, itself included; `None` if it fails.
    fn consequences(&mut self, lit: Lit) -> Option<Vec<Lit>> {
        let since = self.p.trail.len();
        if self.p.value(lit) != 0 {
            return (self.p.value(lit) == 1).then(Vec::new);
        }
        self.p.push_level();
        self.p.assign(lit, Reason::None);
        let conflict = self.p.propagate();
        self.work = self.work.saturating_sub(self.p.trail.len() - since);
        let list = self.p.trail[since..].to_vec();
        self.p.pop_to_level(0);
        conflict.is_none().then_some(list)
    }

    /// Makes a literal true for good; false on a conflict.
    fn hold(&mut self, lit: Lit) -> bool {
        if self.p.value(lit) != 0 {
            return self.p.value(lit) == 1;
        }
        self.p.assign(lit, Reason::None);
        self.p.propagate().is_none()
    }
}
