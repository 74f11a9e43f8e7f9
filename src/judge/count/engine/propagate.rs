//! Unit propagation over the clause store, and the trail it writes.
//!
//! Longer clauses are found by two watched literals: M. Moskewicz, C. Madigan, Y. Zhao, L. Zhang, S. Malik, "Chaff:
//! Engineering an efficient SAT solver", DAC 2001, section 2. Clauses of two and three literals need no watching: their
//! rests lie in the lists of their literals.
//!
//! Levels count decisions. Undoing to a trail length leaves exactly the assignments before it; nothing else depends on
//! the trail except the watches, which are right for any shorter trail.

use super::lit::Lit;
use super::store::Store;

/// Why a literal holds: the clause that forced it, without the literal itself.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub(crate) enum Reason {
    /// Decided, or true without condition.
    None,
    /// A clause of two: its other literal.
    Two(Lit),
    /// A clause of three: its other literals.
    Three(Lit, Lit),
    /// A longer or learnt clause.
    Long(u32),
}

/// A clause all of whose literals are false.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub(crate) enum Conflict {
    /// A clause of two.
    Two(Lit, Lit),
    /// A clause of three.
    Three(Lit, Lit, Lit),
    /// A longer or learnt clause.
    Long(u32),
}

/// One clause on the watch list of a literal: if `blocker` holds, the clause needs no look.
#[derive(Clone, Copy)]
pub(crate) struct Watch {
    pub(crate) clause: u32,
    pub(crate) blocker: Lit,
}

/// The clauses with an assignment under way.
pub(crate) struct Propagator {
    /// The clauses.
    pub(crate) store: Store,
    /// For a literal: 1 true, -1 false, 0 open.
    pub(crate) values: Vec<i8>,
    /// True literals in the order they came.
    pub(crate) trail: Vec<Lit>,
    /// For an assigned variable, its level.
    pub(crate) levels: Vec<u32>,
    /// For an assigned variable, why.
    pub(crate) reasons: Vec<Reason>,
    /// For each level above 0, where the trail stood when it began.
    pub(crate) starts: Vec<u32>,
    /// For a literal, the clauses to look at when it becomes false.
    pub(crate) watches: Vec<Vec<Watch>>,
    /// How often a learnt clause forced a literal or was false.
    pub(crate) learnt_used: u64,
    head: usize,
}

impl Propagator {
    /// Nothing assigned.
    pub(crate) fn new(store: Store) -> Self {
        let vars = store.var_count;
        let mut propagator = Self {
            values: vec![0; 2 * vars],
            trail: Vec::with_capacity(vars),
            levels: vec![0; vars],
            reasons: vec![Reason::None; vars],
            starts: Vec::new(),
            watches: vec![Vec::new(); 2 * vars],
            learnt_used: 0,
            head: 0,
            store,
        };
        for id in 0..propagator.store.given as u32 {
            propagator.watch(id);
        }
        propagator
    }

    /// Puts a clause of the pool on the lists of its first two literals.
    pub(crate) fn watch(&mut self, id: u32) {
        let (a, b) = (self.store.long(id)[0], self.store.long(id)[1]);
        self.watches[a.index()].push(Watch { clause: id, blocker: b });
        self.watches[b.index()].push(Watch { clause: id, blocker: a });
    }

    /// The value of a literal: 1 true, -1 false, 0 open.
    pub(crate) fn value(&self, lit: Lit) -> i8 {
        self.values[lit.index()]
    }

    /// Whether the variable has no value.
    pub(crate) fn is_open(&self, var: usize) -> bool {
        self.values[2 * var] == 0
    }

    /// The number of decisions in force.
    pub(crate) fn level(&self) -> u32 {
        self.starts.len() as u32
    }

    /// Begins a new level.
    pub(crate) fn push_level(&mut self) {
        self.starts.push(self.trail.len() as u32);
    }

    /// Goes back to this level.
    pub(crate) fn pop_to_level(&mut self, level: u32) {
        if level < self.level() {
            self.undo_to(self.starts[level as usize] as usize);
            self.starts.truncate(level as usize);
        }
    }

    /// Takes back all assignments after this many.
    pub(crate) fn undo_to(&mut self, len: usize) {
        for &lit in &self.trail[len..] {
            self.values[lit.index()] = 0;
            self.values[(!lit).index()] = 0;
        }
        self.trail.truncate(len);
        self.head = len;
    }

    /// Makes an open literal true.
    pub(crate) fn assign(&mut self, lit: Lit, reason: Reason) {
        debug_assert_eq!(self.value(lit), 0);
        self.values[lit.index()] = 1;
        self.values[(!lit).index()] = -1;
        self.levels[lit.var()] = self.level();
        self.reasons[lit.var()] = reason;
        self.trail.push(lit);
    }

    /// Draws all conclusions of the trail; gives the first false clause met.
    pub(crate) fn propagate(&mut self) -> Option<Conflict> {
        while self.head < self.trail.len() {
            let lit = !self.trail[self.head];
            self.head += 1;
            let conflict = self.visit_twos(lit).or_else(|| self.visit_threes(lit)).or_else(|| self.visit_watches(lit));
            if conflict.is_some() {
                self.head = self.trail.len();
                return conflict;
            }
        }
        None
    }

    fn visit_twos(&mut self, lit: Lit) -> Option<Conflict> {
        for at in 0..self.store.twos.of(lit.index()).len() {
            let other = self.store.twos.of(lit.index())[at];
            match self.value(other) {
                0 => self.assign(other, Reason::Two(lit)),
                -1 => return Some(Conflict::Two(lit, other)),
                _ => {}
            }
        }
        None
    }

    fn visit_threes(&mut self, lit: Lit) -> Option<Conflict> {
        for at in 0..self.store.threes.of(lit.index()).len() {
            let three = self.store.threes.of(lit.index())[at];
            match (self.value(three.a), self.value(three.b)) {
                (-1, 0) => self.assign(three.b, Reason::Three(lit, three.a)),
                (0, -1) => self.assign(three.a, Reason::Three(lit, three.b)),
                (-1, -1) => return Some(Conflict::Three(lit, three.a, three.b)),
                _ => {}
            }
        }
        None
    }

    fn visit_watches(&mut self, lit: Lit) -> Option<Conflict> {
        let mut list = std::mem::take(&mut self.watches[lit.index()]);
        let (mut read, mut write) = (0, 0);
        let mut conflict = None;
        while read < list.len() {
            let watch = list[read];
            read += 1;
            if self.value(watch.blocker) == 1 {
                list[write] = watch;
                write += 1;
                continue;
            }
            let (other, moved) = self.rewatch(watch.clause, lit);
            if moved {
                continue;
            }
            list[write] = Watch { clause: watch.clause, blocker: other };
            write += 1;
            match self.value(other) {
                0 => self.assign(other, Reason::Long(watch.clause)),
                -1 => conflict = Some(Conflict::Long(watch.clause)),
                _ => continue,
            }
            self.learnt_used += u64::from(watch.clause as usize >= self.store.given);
            if conflict.is_some() {
                break;
            }
        }
        list.copy_within(read.., write);
        list.truncate(write + list.len() - read);
        self.watches[lit.index()] = list;
        conflict
    }

    /// Looks for a literal that may be watched instead of the false `lit`; gives the other watched literal and whether
    /// one was found (and now watches).
    fn rewatch(&mut self, id: u32, lit: Lit) -> (Lit, bool) {
        let span = self.store.spans[id as usize];
        let clause = &mut self.store.pool[span.start as usize..][..span.len as usize];
        if clause[0] == lit {
            clause.swap(0, 1);
        }
        let other = clause[0];
        if self.values[other.index()] == 1 {
            return (other, false);
        }
        for at in 2..clause.len() {
            if self.values[clause[at].index()] != -1 {
                clause.swap(1, at);
                self.watches[clause[1].index()].push(Watch { clause: id, blocker: other });
                return (other, true);
            }
        }
        (other, false)
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    fn lit(number: i32) -> Lit {
        Lit::new(number.unsigned_abs() - 1, number < 0)
    }

    fn propagator(vars: usize, clauses: &[&[i32]]) -> Propagator {
        let clauses: Vec<Vec<Lit>> = clauses.iter().map(|c| c.iter().map(|&l| lit(l)).collect()).collect();
        Propagator::new(Store::new(vars, &clauses))
    }

    #[test]
    fn draws_conclusions_through_clauses_of_every_length() {
        let mut p = propagator(6, &[&[-1, 2], &[-1, -2, 3], &[-1, -2, -3, 4, 5], &[-6, 1]]);
        p.push_level();
        p.assign(lit(-5), Reason::None);
        assert_eq!(p.propagate(), None);
        p.push_level();
        p.assign(lit(1), Reason::None);
        assert_eq!(p.propagate(), None);
        let want: Vec<Lit> = [-5, 1, 2, 3, 4].map(lit).to_vec();
        assert_eq!(p.trail, want);
        assert!(p.is_open(5));
        p.pop_to_level(0);
        assert!(p.trail.is_empty() && p.values.iter().all(|&value| value == 0));
        // The watches have moved; the same conclusions must come in another order too.
        p.push_level();
        p.assign(lit(1), Reason::None);
        assert_eq!(p.propagate(), None);
        assert!(p.is_open(3));
        p.assign(lit(-4), Reason::None);
        assert_eq!(p.propagate(), None);
        assert_eq!(p.value(lit(5)), 1);
    }

    #[test]
    fn finds_a_false_clause() {
        let mut p = propagator(4, &[&[-1, 2, 3, 4], &[-1, -2], &[-1, -3], &[-1, -4]]);
        p.push_level();
        p.assign(lit(1), Reason::None);
        assert!(p.propagate().is_some());
    }
}
