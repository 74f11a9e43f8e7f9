//! Leaf tables: a part of at most [`MAX_LEAF`] variables is counted by its truth table, 64 rows to a word.
//!
//! Variable *i* of the part is the *i*-th bit of the row number. The first six vary within a word (they are *inner*), the
//! others between words (*outer*). A clause clears the rows that falsify it: in every word in which its outer literals are
//! false, only the rows where an inner literal holds remain. Each outer literal halves the words to visit, which is why
//! this beats the OR of whole columns. The count is the number of ones left. Variables that do not count are quantified
//! away first: the two halves of the table are OR-ed together.
//!
//! Bit-parallel evaluation is old practice; that it pays at the leaves of a counter was measured here.

use super::lit::Lit;
use super::prepare::Class;
use super::propagate::Propagator;
use crate::columns::COLUMNS;

/// The most variables of a leaf.
pub(crate) const MAX_LEAF: usize = 12;
const INNER: usize = COLUMNS.len();
const WORDS: usize = 1 << (MAX_LEAF - INNER);

/// A table with room for the widest leaf; the first 2^(variables - 6) words are in use.
type Table = [u64; WORDS];

/// A clause under way: the rows of a word that an inner literal saves, and the words in which all outer ones are false.
#[derive(Clone, Copy, Default)]
struct Rule {
    saved: u64,
    outer: usize,
    value: usize,
}

impl Rule {
    /// Adds the literal of the variable at this place.
    fn add(&mut self, at: u8, negated: bool) {
        let at = at as usize;
        if at < INNER {
            self.saved |= if negated { !COLUMNS[at] } else { COLUMNS[at] };
        } else {
            // A negated literal is false where the variable is 1.
            self.outer |= 1 << (at - INNER);
            self.value |= usize::from(negated) << (at - INNER);
        }
    }

    /// Clears what falsifies the clause.
    fn apply(self, table: &mut [u64]) {
        if self.outer == 0 {
            table.iter_mut().for_each(|word| *word &= self.saved);
            return;
        }
        // All numbers that agree with `value` on `outer`: set the outer bits, so that adding one carries across them.
        let mut word = self.value;
        while word < table.len() {
            table[word] &= self.saved;
            word = (((word | self.outer) + 1) & !self.outer) | self.value;
        }
    }
}

/// Counts small parts; remembers for each variable its place in the part at hand.
pub(crate) struct Leaf {
    place: Vec<u8>,
}

impl Leaf {
    /// For this many variables.
    pub(crate) fn new(var_count: usize) -> Self {
        Self { place: vec![u8::MAX; var_count] }
    }

    /// The number of assignments of the counted variables that extend to a model of the part with these variables. With
    /// `all` every variable counts (or is determined by those that do).
    // Its table must not lie in the frames of the recursion that calls it.
    #[inline(never)]
    pub(crate) fn count(&mut self, p: &Propagator, class: &[Class], vars: &[u32], all: bool) -> u32 {
        for (at, &var) in vars.iter().enumerate() {
            self.place[var as usize] = at as u8;
        }
        let mut room: Table = [0; WORDS];
        let words = 1 << vars.len().saturating_sub(INNER);
        let table = &mut room[..words];
        table.fill(if vars.len() < INNER { (1 << (1 << vars.len())) - 1 } else { u64::MAX });
        for (at, &var) in vars.iter().enumerate() {
            for lit in [Lit::new(var, false), Lit::new(var, true)] {
                self.restrict(p, at as u8, lit, table);
            }
        }
        if !all {
            for (at, &var) in vars.iter().enumerate() {
                if class[var as usize] != Class::Counted {
                    forget(table, at);
                }
            }
        }
        table.iter().map(|word| word.count_ones()).sum()
    }

    /// Applies the open clauses in which this literal is the one with the lowest place.
    fn restrict(&self, p: &Propagator, at: u8, lit: Lit, table: &mut [u64]) {
        let mut own = Rule::default();
        own.add(at, lit.is_negated());
        for &other in p.store.twos.of(lit.index()) {
            if p.value(other) == 0 && self.place[other.var()] > at {
                let mut rule = own;
                rule.add(self.place[other.var()], other.is_negated());
                rule.apply(table);
            }
        }
        for three in p.store.threes.of(lit.index()) {
            if let Some(rule) = self.rule(p, at, own, &[three.a, three.b]) {
                rule.apply(table);
            }
        }
        for &id in p.store.longs.of(lit.index()) {
            if let Some(rule) = self.rule(p, at, own, p.store.long(id)) {
                rule.apply(table);
            }
        }
    }

    /// The clause of the literal at place `at` with these others; `None` if it holds or belongs to a lower place.
    fn rule(&self, p: &Propagator, at: u8, own: Rule, others: &[Lit]) -> Option<Rule> {
        // A clause that holds may have open variables outside the part: it must not be looked at further.
        if others.iter().any(|&lit| p.value(lit) == 1) {
            return None;
        }
        let mut rule = own;
        for &lit in others {
            match p.value(lit) {
                0 if self.place[lit.var()] < at => return None,
                0 => rule.add(self.place[lit.var()], lit.is_negated()),
                _ => {}
            }
        }
        Some(rule)
    }
}

/// Existential quantification: row r holds if r or r with bit `at` flipped held; only rows with that bit 0 remain.
fn forget(table: &mut [u64], at: usize) {
    if at < INNER {
        for word in table.iter_mut() {
            *word = (*word | *word >> (1 << at)) & !COLUMNS[at];
        }
        return;
    }
    let step = 1 << (at - INNER);
    for low in (0..table.len()).filter(|low| low & step == 0) {
        table[low] |= table[low | step];
        table[low | step] = 0;
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn a_clause_clears_exactly_the_rows_that_falsify_it() {
        let clauses: [&[(u8, bool)]; 6] = [
            &[(0, true), (3, false)],
            &[(5, true), (6, false)],
            &[(6, true), (9, false)],
            &[(7, false), (8, false), (9, true)],
            &[(2, false), (6, true), (7, true), (9, true)],
            &[(9, false)],
        ];
        for clause in clauses {
            let mut rule = Rule::default();
            clause.iter().for_each(|&(at, negated)| rule.add(at, negated));
            let mut table = [u64::MAX; 16];
            rule.apply(&mut table);
            for row in 0..1024usize {
                let holds = clause.iter().any(|&(at, negated)| (row >> at & 1 == 1) != negated);
                assert_eq!(table[row / 64] >> (row % 64) & 1 == 1, holds, "{clause:?} at {row}");
            }
        }
    }

    #[test]
    fn forgetting_a_column_joins_its_halves() {
        for at in 0..8 {
            let mut table = [0x8421_0000_1248_0001u64, 0, 3, 1 << 60];
            let before = table;
            forget(&mut table, at);
            for row in 0..256usize {
                let bit = |table: &[u64; 4], row: usize| table[row / 64] >> (row % 64) & 1;
                let want = if row >> at & 1 == 1 { 0 } else { bit(&before, row) | bit(&before, row | 1 << at) };
                assert_eq!(bit(&table, row), want, "column {at} row {row}");
            }
        }
    }
}
