//! Conflict clauses: the first unique implication point, and the store of learnt clauses.
//!
//! J. Marques-Silva, K. Sakallah, "GRASP: A search algorithm for propositional satisfiability", IEEE Transactions on
//! Computers 48(5), 1999; L. Zhang, C. Madigan, M. Moskewicz, S. Malik, "Efficient conflict driven learning in a Boolean
//! satisfiability solver", ICCAD 2001, section 3 (first UIP). Literals that the rest of the clause implies are dropped:
//! N. Sörensson, A. Biere, "Minimizing learned clauses", SAT 2009, section 3 (local minimisation).
//!
//! A learnt clause follows from the formula, so it may propagate. It is no part of the formula that is split and
//! counted: the search for components and the keys of the cache never see it (T. Sang, F. Bacchus, P. Beame, H. Kautz,
//! T. Pitassi, "Combining component caching and clause learning for effective model counting", SAT 2004).

use super::lit::Lit;
use super::propagate::{Conflict, Propagator, Reason};
use super::store::Span;

/// A conflict clause, the literal it asserts first and one of the highest other level second.
pub(crate) struct Learnt {
    /// The literals.
    pub(crate) lits: Vec<Lit>,
    /// The level at which the first literal follows.
    pub(crate) level: u32,
}

/// What conflict analysis remembers between conflicts.
pub(crate) struct Learner {
    /// For a variable, how much it took part in late conflicts.
    pub(crate) activity: Vec<f32>,
    /// For a learnt clause, the conflict at which it was last of use.
    used: Vec<u64>,
    bump: f32,
    seen: Vec<bool>,
    conflicts: u64,
    limit: usize,
}

const FIRST_LIMIT: usize = 4000;
const LIMIT_STEP: usize = 1000;
const DECAY: f32 = 0.95;
const RESCALE: f32 = 1e20;

impl Learner {
    /// Nothing learnt.
    pub(crate) fn new(var_count: usize) -> Self {
        Self {
            activity: vec![0.0; var_count],
            used: Vec::new(),
            bump: 1.0,
            seen: vec![false; var_count],
            conflicts: 0,
            limit: FIRST_LIMIT,
        }
    }

    /// The factor that makes the latest bump of an activity 1.
    pub(crate) fn scale(&self) -> f32 {
        1.0 / self.bump
    }

    /// How many conflicts were analysed.
    pub(crate) fn conflicts(&self) -> u64 {
        self.conflicts
    }

    /// The clause to learn from a conflict at the current level, which must be above 0.
    pub(crate) fn analyze(&mut self, p: &Propagator, conflict: Conflict) -> Learnt {
        self.conflicts += 1;
        self.bump /= DECAY;
        let mut lits = vec![Lit::new(0, false)];
        let mut open = 0;
        match conflict {
            Conflict::Two(a, b) => self.meet_all(p, &[a, b], &mut lits, &mut open),
            Conflict::Three(a, b, c) => self.meet_all(p, &[a, b, c], &mut lits, &mut open),
            Conflict::Long(id) => self.meet_long(p, id, &mut lits, &mut open),
        }
        let mut at = p.trail.len();
        let point = loop {
            at -= 1;
            let lit = p.trail[at];
            if !self.seen[lit.var()] || p.levels[lit.var()] != p.level() {
                continue;
            }
            open -= 1;
            if open == 0 {
                break lit;
            }
            self.seen[lit.var()] = false;
            match p.reasons[lit.var()] {
                Reason::None => {}
                Reason::Two(a) => self.meet_all(p, &[a], &mut lits, &mut open),
                Reason::Three(a, b) => self.meet_all(p, &[a, b], &mut lits, &mut open),
                Reason::Long(id) => self.meet_long(p, id, &mut lits, &mut open),
            }
        };
        lits[0] = !point;
        self.finish(p, lits)
    }

    fn meet_long(&mut self, p: &Propagator, id: u32, lits: &mut Vec<Lit>, open: &mut usize) {
        if let Some(used) = (id as usize).checked_sub(p.store.given).and_then(|at| self.used.get_mut(at)) {
            *used = self.conflicts;
        }
        self.meet_all(p, p.store.long(id), lits, open);
    }

    /// Takes the false literals of a clause into the analysis. The literal that the clause forced is true and skipped.
    fn meet_all(&mut self, p: &Propagator, clause: &[Lit], lits: &mut Vec<Lit>, open: &mut usize) {
        for &lit in clause {
            let var = lit.var();
            if p.value(lit) != -1 || self.seen[var] || p.levels[var] == 0 {
                continue;
            }
            self.seen[var] = true;
            self.activity[var] += self.bump;
            if p.levels[var] == p.level() {
                *open += 1;
            } else {
                lits.push(lit);
            }
        }
    }

    fn finish(&mut self, p: &Propagator, mut lits: Vec<Lit>) -> Learnt {
        let kept: Vec<Lit> = lits[1..].iter().copied().filter(|&lit| !self.is_implied(p, lit)).collect();
        for lit in &lits {
            self.seen[lit.var()] = false;
        }
        lits.truncate(1);
        lits.extend(kept);
        let mut level = 0;
        for at in 1..lits.len() {
            if p.levels[lits[at].var()] > level {
                level = p.levels[lits[at].var()];
                lits.swap(1, at);
            }
        }
        if self.bump > RESCALE {
            for activity in &mut self.activity {
                *activity /= RESCALE;
            }
            self.bump /= RESCALE;
        }
        Learnt { lits, level }
    }

    /// Whether the other literals of the clause under way force this literal to be false.
    fn is_implied(&self, p: &Propagator, lit: Lit) -> bool {
        let known = |other: &Lit| self.seen[other.var()] || p.levels[other.var()] == 0;
        match p.reasons[lit.var()] {
            Reason::None => false,
            Reason::Two(a) => known(&a),
            Reason::Three(a, b) => known(&a) && known(&b),
            Reason::Long(id) => p.store.long(id).iter().filter(|other| other.var() != lit.var()).all(known),
        }
    }

    /// Stores the clause and makes its first literal true at the current level, where all others must be false.
    pub(crate) fn assert(&mut self, p: &mut Propagator, learnt: &Learnt) {
        let lit = learnt.lits[0];
        p.learnt_used += 1;
        if learnt.lits.len() == 1 {
            p.assign(lit, Reason::None);
            p.levels[lit.var()] = 0;
            return;
        }
        let id = p.store.spans.len() as u32;
        p.store.spans.push(Span { start: p.store.pool.len() as u32, len: learnt.lits.len() as u32 });
        p.store.pool.extend_from_slice(&learnt.lits);
        self.used.push(self.conflicts);
        p.watch(id);
        p.assign(lit, Reason::Long(id));
    }

    /// Forgets about half of the learnt clauses once there are too many: the long ones that were not of use of late.
    pub(crate) fn reduce(&mut self, p: &mut Propagator) {
        if self.used.len() < self.limit {
            return;
        }
        self.limit += LIMIT_STEP;
        let given = p.store.given;
        let mut keep = vec![false; self.used.len()];
        for lit in &p.trail {
            if let Reason::Long(id) = p.reasons[lit.var()]
                && let Some(at) = (id as usize).checked_sub(given)
            {
                keep[at] = true;
            }
        }
        let mut order: Vec<usize> = (0..self.used.len()).collect();
        order.sort_by_key(|&at| (std::cmp::Reverse(self.used[at]), p.store.spans[given + at].len));
        for (rank, at) in order.into_iter().enumerate() {
            keep[at] |= rank < self.used.len() / 2 || p.store.spans[given + at].len == 2;
        }
        self.compact(p, &keep);
    }

    fn compact(&mut self, p: &mut Propagator, keep: &[bool]) {
        let given = p.store.given;
        let mut new_ids = vec![u32::MAX; keep.len()];
        let mut end = p.store.spans.get(given).map_or(p.store.pool.len(), |span| span.start as usize);
        let mut next = given;
        for at in (0..keep.len()).filter(|&at| keep[at]) {
            let span = p.store.spans[given + at];
            p.store.pool.copy_within(span.start as usize..(span.start + span.len) as usize, end);
            p.store.spans[next] = Span { start: end as u32, len: span.len };
            self.used[next - given] = self.used[at];
            new_ids[at] = next as u32;
            end += span.len as usize;
            next += 1;
        }
        p.store.pool.truncate(end);
        p.store.spans.truncate(next);
        self.used.truncate(next - given);
        let renamed = |id: u32| (id as usize).checked_sub(given).map_or(id, |at| new_ids[at]);
        for list in &mut p.watches {
            list.retain_mut(|watch| {
                watch.clause = renamed(watch.clause);
                watch.clause != u32::MAX
            });
        }
        for lit in &p.trail {
            if let Reason::Long(id) = &mut p.reasons[lit.var()] {
                *id = renamed(*id);
            }
        }
    }
}
