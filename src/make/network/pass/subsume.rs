//! Clauses that others imply, and literals that others make superfluous.
//!
//! Takes the clauses of a network; gives one without the clauses that hold wherever a shorter one holds, and in which
//! `C or x` is `C` where a clause `D or not x` with all of D in C is there (self-subsuming resolution: N. Een, A. Biere,
//! "Effective preprocessing in SAT through variable and clause elimination", SAT 2005).
//!
//! Holds after: no clause contains another, as far as literals with at most [`MAX_CLAUSES`] clauses show it.

use rustc_hash::FxHashMap;

use super::Passed;
use super::copy::Copy;
use super::view::{self, Clause};
use crate::make::network::build::Conjuncts;
use crate::make::network::{Lit, Network};

/// A literal in more clauses than this is not searched.
const MAX_CLAUSES: usize = 400;

/// A clause longer than this subsumes nothing here.
const MAX_LENGTH: usize = 16;

/// The pass.
pub(super) fn subsume(network: &Network) -> Passed {
    let mut clauses = view::clauses(network);
    let mut store = Store::new(&mut clauses);
    // Short clauses first; a clause that became shorter is looked at again.
    let mut open: Vec<usize> = (0..store.clauses.len()).collect();
    open.sort_by_key(|&at| std::cmp::Reverse((store.clauses[at].lits.len(), at)));
    while let Some(at) = open.pop() {
        if !store.gone[at] && store.clauses[at].lits.len() <= MAX_LENGTH {
            store.use_clause(at, &mut open);
        }
    }
    let gone = store.gone;
    let mut copy = Copy::new(network);
    let mut conjuncts = Conjuncts::default();
    for (clause, _) in clauses.iter().zip(gone).filter(|(_, gone)| !gone) {
        view::add(&mut copy, &mut conjuncts, clause);
    }
    copy.finish(conjuncts)
}

struct Store<'a> {
    clauses: &'a mut Vec<Clause>,
    at_lit: FxHashMap<Lit, Vec<usize>>,
    gone: Vec<bool>,
}

impl<'a> Store<'a> {
    fn new(clauses: &'a mut Vec<Clause>) -> Self {
        let mut at_lit: FxHashMap<Lit, Vec<usize>> = FxHashMap::default();
        for (at, clause) in clauses.iter().enumerate() {
            clause.lits.iter().for_each(|&lit| at_lit.entry(lit).or_default().push(at));
        }
        Self { gone: vec![false; clauses.len()], clauses, at_lit }
    }

    /// Removes what the clause subsumes, and the literals that it resolves away.
    fn use_clause(&mut self, at: usize, open: &mut Vec<usize>) {
        let lits = self.clauses[at].lits.clone();
        // Every clause that is touched holds the rarest literal, or its complement, or another one complemented.
        let count = |lit: &Lit| self.at_lit.get(lit).map_or(0, Vec::len);
        let Some(&rare) = lits.iter().min_by_key(|&lit| (count(lit), *lit)) else { return };
        for &pivot in &lits {
            for (in_clause, flipped) in [(rare, None), (!pivot, Some(pivot))] {
                // Without a flipped literal once is enough; with one, the rarest of the others would do as well.
                if flipped.is_none() && pivot != rare || count(&in_clause) > MAX_CLAUSES {
                    continue;
                }
                for other in self.at_lit.get(&in_clause).cloned().unwrap_or_default() {
                    if other == at || self.gone[other] || !self.contains(other, &lits, flipped) {
                        continue;
                    }
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
