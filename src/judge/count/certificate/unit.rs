//! Unit propagation for the checks: what follows at once from clauses and a few literals.
//!
//! Written for the checks alone, and shared with nothing that counts. Two literals of each clause are watched: M. W.
//! Moskewicz, C. F. Madigan, Y. Zhao, L. Zhang, S. Malik, "Chaff: engineering an efficient SAT solver", DAC 2001
//! (from memory).

use crate::problem::BitLit;

/// Clauses with a partial assignment.
#[derive(Debug)]
pub(super) struct Unit {
    lits: Vec<BitLit>,
    /// Each clause of two literals or more: where it begins and ends.
    clauses: Vec<(u32, u32)>,
    watches: Vec<Vec<u32>>,
    /// Literals whose watch lists are in use.
    watched: Vec<BitLit>,
    /// For a literal, whether it is true.
    truth: Vec<bool>,
    trail: Vec<BitLit>,
    drawn: usize,
}

impl Unit {
    /// No clause over so many variables.
    pub(super) fn new(var_count: usize) -> Self {
        Self {
            lits: Vec::new(),
            clauses: Vec::new(),
            watches: vec![Vec::new(); 2 * var_count],
            watched: Vec::new(),
            truth: vec![false; 2 * var_count],
            trail: Vec::new(),
            drawn: 0,
        }
    }

    /// Forgets all clauses and values.
    pub(super) fn clear(&mut self) {
        self.undo(0);
        self.watched.drain(..).for_each(|lit| self.watches[lit.index()].clear());
        self.clauses.clear();
        self.lits.clear();
    }

    /// Whether a literal is true.
    pub(super) fn is_true(&self, lit: BitLit) -> bool {
        self.truth[lit.index()]
    }

    fn is_false(&self, lit: BitLit) -> bool {
        self.truth[(!lit).index()]
    }

    /// Adds a clause without repeated literals, for good: nothing that was assumed may be open. False at a conflict.
    pub(super) fn add(&mut self, clause: &[BitLit]) -> bool {
        let from = self.lits.len();
        self.lits.extend_from_slice(clause);
        let own = &mut self.lits[from..];
        // What is not false comes first, so that it is watched.
        let mut open = 0;
        for at in 0..own.len() {
            if !self.truth[(!own[at]).index()] {
                own.swap(open, at);
                open += 1;
            }
            if open == 2 {
                break;
            }
        }
        match open {
            0 => false,
            1 => {
                let lit = own[0];
                self.lits.truncate(from);
                self.set(lit)
            }
            _ => {
                let id = self.clauses.len() as u32;
                self.clauses.push((from as u32, self.lits.len() as u32));
                for at in [from, from + 1] {
                    let lit = self.lits[at];
                    self.watches[lit.index()].push(id);
                    self.watched.push(lit);
                }
                true
            }
        }
    }

    /// Makes a literal true; false if it is false.
    pub(super) fn set(&mut self, lit: BitLit) -> bool {
        if self.is_false(lit) {
            return false;
        }
        if !self.is_true(lit) {
            self.truth[lit.index()] = true;
            self.trail.push(lit);
        }
        true
    }

    /// Draws all consequences; false at a conflict.
    pub(super) fn draw(&mut self) -> bool {
        while let Some(&lit) = self.trail.get(self.drawn) {
            self.drawn += 1;
            let gone = !lit;
            let list = std::mem::take(&mut self.watches[gone.index()]);
            let mut kept = 0;
            let mut list = list;
            let mut consistent = true;
            for at in 0..list.len() {
                let id = list[at];
                if !consistent || self.visit(id, gone, &mut consistent) {
                    list[kept] = id;
                    kept += 1;
                }
            }
            list.truncate(kept);
            self.watches[gone.index()] = list;
            if !consistent {
                return false;
            }
        }
        true
    }

    /// A clause that watches a literal that became false. False is returned if it watches another one from now on.
    fn visit(&mut self, id: u32, gone: BitLit, consistent: &mut bool) -> bool {
        let (from, to) = self.clauses[id as usize];
        let (from, to) = (from as usize, to as usize);
        if self.lits[from] == gone {
            self.lits.swap(from, from + 1);
        }
        let other = self.lits[from];
        if self.is_true(other) {
            return true;
        }
        match (from + 2..to).find(|&at| !self.is_false(self.lits[at])) {
            Some(at) => {
                self.lits.swap(from + 1, at);
                let lit = self.lits[from + 1];
                self.watches[lit.index()].push(id);
                self.watched.push(lit);
                false
            }
            None => {
                *consistent = self.set(other);
                true
            }
        }
    }

    /// Where the values stand now.
    pub(super) fn mark(&self) -> usize {
        self.trail.len()
    }

    /// Takes back the values set since.
    pub(super) fn undo(&mut self, mark: usize) {
        for lit in self.trail.drain(mark..) {
            self.truth[lit.index()] = false;
        }
        self.drawn = self.drawn.min(mark);
    }

    /// Whether these literals together lead to a conflict. All values stay as they were.
    pub(super) fn refutes(&mut self, lits: impl IntoIterator<Item = BitLit>) -> bool {
        let mark = self.mark();
        let consistent = lits.into_iter().all(|lit| self.set(lit)) && self.draw();
        self.undo(mark);
        !consistent
    }
}
