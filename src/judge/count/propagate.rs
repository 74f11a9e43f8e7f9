//! Unit propagation: what follows at once from a few literals.
//!
//! Input:  the clauses of a part. Output: the values that follow from the literals assumed so far, or a conflict.
//! Holds:  a value or a conflict follows from the clauses; where nothing is said, nothing is known.
//!
//! Two literals of each clause are watched: M. W. Moskewicz, C. F. Madigan, Y. Zhao, L. Zhang, S. Malik, "Chaff:
//! engineering an efficient SAT solver", DAC 2001, section 2 (from memory). Undoing needs no work on the watches.

use super::parts::Part;
use crate::sat::Lit;

/// The clauses with a partial assignment.
#[derive(Debug)]
pub(super) struct Propagator {
    lits: Vec<Lit>,
    /// Each clause of two literals or more: where its literals begin and end. The first two are watched.
    clauses: Vec<(u32, u32)>,
    /// For each literal (`variable << 1 | negated`) the clauses that watch it.
    watches: Vec<Vec<u32>>,
    values: Vec<Option<bool>>,
    trail: Vec<Lit>,
    /// Literals of the trail whose consequences are drawn.
    drawn: usize,
    /// The length of the trail before each literal that was assumed.
    levels: Vec<usize>,
}

fn index(lit: Lit) -> usize {
    lit.var() << 1 | usize::from(lit.is_negated())
}

impl Propagator {
    /// The clauses with what follows from them alone. `None` where that is a conflict.
    pub(super) fn new(part: &Part) -> Option<Self> {
        let mut this = Self {
            lits: Vec::new(),
            clauses: Vec::new(),
            watches: vec![Vec::new(); 2 * part.vars.len()],
            values: vec![None; part.vars.len()],
            trail: Vec::new(),
            drawn: 0,
            levels: Vec::new(),
        };
        let mut units = Vec::new();
        for clause in part.clauses() {
            let mut clause = clause.to_vec();
            clause.sort_unstable();
            clause.dedup();
            match clause[..] {
                [lit] => units.push(lit),
                _ => this.add(&clause),
            }
        }
        units.into_iter().all(|lit| this.set(lit)).then_some(())?;
        this.draw().then_some(this)
    }

    fn add(&mut self, clause: &[Lit]) {
        let (start, at) = (self.lits.len() as u32, self.clauses.len() as u32);
        self.lits.extend_from_slice(clause);
        self.clauses.push((start, self.lits.len() as u32));
        for &lit in &clause[..2] {
            self.watches[index(lit)].push(at);
        }
    }

    /// The value of a variable, where it is known.
    pub(super) fn value(&self, var: usize) -> Option<bool> {
        self.values[var]
    }

    /// Assumes a literal and draws the consequences. False where that is a conflict; [`Propagator::undo`] is due anyway.
    pub(super) fn assume(&mut self, lit: Lit) -> bool {
        self.levels.push(self.trail.len());
        self.set(lit) && self.draw()
    }

    /// Takes back the literal assumed last, with its consequences.
    pub(super) fn undo(&mut self) {
        let length = self.levels.pop().expect("something was assumed");
        for lit in self.trail.drain(length..) {
            self.values[lit.var()] = None;
        }
        self.drawn = length;
    }

    fn holds(&self, lit: Lit) -> Option<bool> {
        self.values[lit.var()].map(|value| value != lit.is_negated())
    }

    /// Sets a literal. False where its negation holds.
    fn set(&mut self, lit: Lit) -> bool {
        match self.holds(lit) {
            None => {
                self.values[lit.var()] = Some(!lit.is_negated());
                self.trail.push(lit);
                true
            }
            Some(holds) => holds,
        }
    }

    /// Draws all consequences. False at a conflict.
    fn draw(&mut self) -> bool {
        while let Some(&lit) = self.trail.get(self.drawn) {
            self.drawn += 1;
            let watched = index(!lit);
            let mut list = std::mem::take(&mut self.watches[watched]);
            let mut consistent = true;
            list.retain(|&clause| !consistent || self.visit(clause as usize, !lit, &mut consistent));
            self.watches[watched].append(&mut list);
            if !consistent {
                return false;
            }
        }
        true
    }

    /// A clause that watches a literal that just became false: it watches another one from now on (false is returned),
    /// or it holds, or its other watched literal follows.
    fn visit(&mut self, clause: usize, gone: Lit, consistent: &mut bool) -> bool {
        let (start, end) = self.clauses[clause];
        let (start, end) = (start as usize, end as usize);
        if self.lits[start] == gone {
            self.lits.swap(start, start + 1);
        }
        let other = self.lits[start];
        if self.holds(other) == Some(true) {
            return true;
        }
        match (start + 2..end).find(|&at| self.holds(self.lits[at]) != Some(false)) {
            Some(at) => {
                self.lits.swap(start + 1, at);
                self.watches[index(self.lits[start + 1])].push(clause as u32);
                false
            }
            None => {
                *consistent = self.set(other);
                true
            }
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

    fn propagator(clauses: &[&[i64]], vars: usize) -> Option<Propagator> {
        let mut list = Clauses::new();
        for clause in clauses {
            list.push(&clause.iter().map(|&lit| BitLit::from_dimacs(lit).unwrap()).collect::<Vec<_>>());
        }
        let bits: Vec<BitId> = (0..vars).map(BitId::new).collect();
        let split = Split::of(&Cnf { var_count: vars, clauses: list }, vars, &bits);
        assert_eq!(split.parts.len(), 1);
        Propagator::new(&split.parts[0])
    }

    #[test]
    fn a_chain_follows_and_is_taken_back() {
        let mut chain = propagator(&[&[-1, 2], &[-2, 3], &[-3, -4, 5], &[1, 4, 4]], 5).unwrap();
        assert!(chain.assume(Lit::new(0, true)));
        assert_eq!([0, 1, 2, 3, 4].map(|var| chain.value(var)), [Some(true), Some(true), Some(true), None, None]);
        assert!(!chain.assume(Lit::new(1, false)), "against what follows");
        chain.undo();
        assert!(chain.assume(Lit::new(4, false)));
        assert_eq!(chain.value(3), Some(false));
        chain.undo();
        chain.undo();
        assert_eq!([0, 1, 2, 3, 4].map(|var| chain.value(var)), [None; 5]);
        assert!(chain.assume(Lit::new(0, false)));
        assert_eq!(chain.value(3), Some(true));
    }

    #[test]
    fn units_follow_at_once_and_may_conflict() {
        let chain = propagator(&[&[1], &[-1, 2], &[-2, -1, 3]], 3).unwrap();
        assert_eq!([0, 1, 2].map(|var| chain.value(var)), [Some(true); 3]);
        assert!(propagator(&[&[1, 2], &[-1], &[-2, -2]], 2).is_none());
    }
}
