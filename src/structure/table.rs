//! Short clauses by their literals.

use rustc_hash::FxHashMap;

use super::Tidy;
use crate::problem::BitLit;

/// The binary and ternary clauses.
pub(super) struct Table {
    pairs: FxHashMap<[BitLit; 2], u32>,
    triples: FxHashMap<[BitLit; 3], u32>,
}

impl Table {
    pub(super) fn new(tidy: &Tidy) -> Self {
        let mut table = Self { pairs: FxHashMap::default(), triples: FxHashMap::default() };
        for at in 0..tidy.len() {
            match *tidy.get(at) {
                [a, b] => drop(table.pairs.entry([a, b]).or_insert(at as u32)),
                [a, b, c] => drop(table.triples.entry([a, b, c]).or_insert(at as u32)),
                _ => {}
            }
        }
        table
    }

    /// The clause of these two literals.
    pub(super) fn pair(&self, a: BitLit, b: BitLit) -> Option<u32> {
        self.pairs.get(&[a.min(b), a.max(b)]).copied()
    }

    /// The clause of these three literals.
    pub(super) fn triple(&self, a: BitLit, b: BitLit, c: BitLit) -> Option<u32> {
        let mut lits = [a, b, c];
        lits.sort_unstable();
        self.triples.get(&lits).copied()
    }
}
