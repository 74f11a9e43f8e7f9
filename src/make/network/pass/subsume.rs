//! Clauses that others imply, and literals that others make superfluous.
//!
//! Takes the clauses of a network; gives one without the clauses that hold wherever a shorter one holds, and in which
//! `C or x` is `C` where a clause `D or not x` with all of D in C is there (self-subsuming resolution: N. Een, A. Biere,
//! "Effective preprocessing in SAT through variable and clause elimination", SAT 2005).
//!
//! Holds after: no clause contains another, as far as literals with at most [`MAX_CLAUSES`] clauses show it.

use super::Passed;
use super::copy::Copy;
use super::lists::{ClauseLists, node_set};
use super::view::{self, Clause, View};
use crate::make::network::Lit;
use crate::make::network::build::Conjuncts;

/// A literal in more clauses than this is not searched.
const MAX_CLAUSES: usize = 400;

/// A clause longer than this subsumes nothing here.
const MAX_LENGTH: usize = 16;

/// The pass.
pub(super) fn subsume(view: View<'_>) -> Option<Passed> {
    let mut clauses = view.clauses().to_vec();
    let mut store = Store::new(&mut clauses);
    // Short clauses first; a clause that became shorter is looked at again.
    let mut open: Vec<usize> = (0..store.clauses.len()).collect();
    open.sort_by_key(|&at| std::cmp::Reverse((store.clauses[at].lits.len(), at)));
    while let Some(at) = open.pop() {
        if !store.gone[at] && store.clauses[at].lits.len() <= MAX_LENGTH {
            store.use_clause(at, &mut open);
        }
    }
    if !store.changed {
        return None;
    }
    let gone = store.gone;
    let mut copy = Copy::new(view.network);
    let mut conjuncts = Conjuncts::default();
    for (clause, _) in clauses.iter().zip(gone).filter(|(_, gone)| !gone) {
        view::add(&mut copy, &mut conjuncts, clause);
    }
    Some(copy.finish(conjuncts))
}

struct Store<'a> {
    clauses: &'a mut Vec<Clause>,
    /// The clauses of each literal as they were at first: a clause that became shorter may have fewer nodes.
    at_lit: ClauseLists,
    gone: Vec<bool>,
    /// Whether a clause went or became shorter.
    changed: bool,
}

impl<'a> Store<'a> {
    fn new(clauses: &'a mut Vec<Clause>) -> Self {
        let at_lit = ClauseLists::new(clauses, |_| true);
        Self { gone: vec![false; clauses.len()], clauses, at_lit, changed: false }
    }

    /// Removes what the clause subsumes, and the literals that it resolves away.
    fn use_clause(&mut self, at: usize, open: &mut Vec<usize>) {
        let lits = self.clauses[at].lits.clone();
        // Every clause that is touched holds the rarest literal, or its complement, or another one complemented.
        let set = node_set(&lits);
        let Some(&rare) = lits.iter().min_by_key(|&&lit| (self.at_lit.len(lit), lit)) else { return };
        for &pivot in &lits {
            for (in_clause, flipped) in [(rare, None), (!pivot, Some(pivot))] {
                // Without a flipped literal once is enough; with one, the rarest of the others would do as well.
                if flipped.is_none() && pivot != rare || self.at_lit.len(in_clause) > MAX_CLAUSES {
                    continue;
                }
                let mut place = 0;
                while let Some((other, next)) = self.at_lit.next(in_clause, place, set) {
                    place = next;
                    if other == at || self.gone[other] || !self.contains(other, &lits, flipped) {
                        continue;
                    }
                    self.changed = true;
                    match flipped {
                        None => self.gone[other] = true,
                        Some(pivot) => {
                            self.clauses[other].lits.retain(|&lit| lit != !pivot);
                            open.push(other);
                        }
                    }
                }
            }
        }
    }

    /// Whether the clause has all of the literals, one of them complemented where asked for.
    fn contains(&self, at: usize, lits: &[Lit], flipped: Option<Lit>) -> bool {
        let clause = &self.clauses[at].lits;
        let want = |lit: Lit| if flipped == Some(lit) { !lit } else { lit };
        clause.len() >= lits.len() && lits.iter().all(|&lit| clause.binary_search(&want(lit)).is_ok())
    }
}
