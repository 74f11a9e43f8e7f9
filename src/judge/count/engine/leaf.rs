//! Leaf tables: a part of at most ten variables is counted by its truth table, 64 rows to a word.
//!
//! Variable *i* of the part is the *i*-th bit of the row number. A clause is the OR of the columns of its literals; the
//! table is the AND of its clauses, and the count is the number of ones. Variables that do not count are quantified away
//! first: the two halves of the table are OR-ed together. Bit-parallel evaluation is old practice; that it pays at the
//! leaves of a counter was measured here (a factor of three on random formulas with two clauses a variable).

use super::lit::Lit;
use super::prepare::Class;
use super::propagate::Propagator;

/// The most variables of a leaf.
pub(crate) const MAX_LEAF: usize = 10;
const WORDS: usize = 1 << (MAX_LEAF - 6);

/// Columns of the first six variables within a word.
pub(crate) const COLUMNS: [u64; 6] = [
    0xaaaa_aaaa_aaaa_aaaa,
    0xcccc_cccc_cccc_cccc,
    0xf0f0_f0f0_f0f0_f0f0,
    0xff00_ff00_ff00_ff00,
    0xffff_0000_ffff_0000,
    0xffff_ffff_0000_0000,
];

/// Counts small parts; remembers for each variable its place in the part at hand.
pub(crate) struct Leaf {
    place: Vec<u8>,
    lits: Vec<Lit>,
}

impl Leaf {
    /// For this many variables.
    pub(crate) fn new(var_count: usize) -> Self {
        Self { place: vec![u8::MAX; var_count], lits: Vec::new() }
    }

    /// The number of assignments of the counted variables that extend to a model of the part with these variables. With
    /// `all` every variable counts (or is determined by those that do).
    pub(crate) fn count(&mut self, p: &Propagator, class: &[Class], vars: &[u32], all: bool) -> u32 {
        for (at, &var) in vars.iter().enumerate() {
            self.place[var as usize] = at as u8;
        }
        let count = match vars.len() {
            0..=6 => self.table::<1>(p, class, vars, all),
            7 => self.table::<2>(p, class, vars, all),
            8 => self.table::<4>(p, class, vars, all),
            9 => self.table::<8>(p, class, vars, all),
            _ => self.table::<WORDS>(p, class, vars, all),
        };
        for &var in vars {
            self.place[var as usize] = u8::MAX;
        }
        count
    }

    fn table<const W: usize>(&mut self, p: &Propagator, class: &[Class], vars: &[u32], all: bool) -> u32 {
        let rows = if vars.len() < 6 { (1u64 << (1 << vars.len())) - 1 } else { u64::MAX };
        let mut table = [rows; W];
        for (at, &var) in vars.iter().enumerate() {
            for lit in [Lit::new(var, false), Lit::new(var, true)] {
                self.restrict(p, at as u8, lit, &mut table);
            }
        }
        if !all {
            for (at, &var) in vars.iter().enumerate() {
                if class[var as usize] != Class::Counted {
                    forget(&mut table, at);
                }
            }
        }
        table.iter().map(|word| word.count_ones()).sum()
    }

    /// ANDs the open clauses in which this literal is the one with the lowest place.
    fn restrict<const W: usize>(&mut self, p: &Propagator, at: u8, lit: Lit, table: &mut [u64; W]) {
        let own = column::<W>(at, lit.is_negated());
        for &other in p.store.twos.of(lit.index()) {
            if p.value(other) == 0 && self.place[other.var()] > at {
                let other = self.column::<W>(other);
                for word in 0..W {
                    table[word] &= own[word] | other[word];
                }
            }
        }
        for three in p.store.threes.of(lit.index()) {
            let (a, b) = (p.value(three.a), p.value(three.b));
            if a == 1
                || b == 1
                || (a == 0 && self.place[three.a.var()] < at)
                || (b == 0 && self.place[three.b.var()] < at)
            {
                continue;
            }
            let mut clause = own;
            for (other, value) in [(three.a, a), (three.b, b)] {
                if value == 0 {
                    let other = self.column::<W>(other);
                    for word in 0..W {
                        clause[word] |= other[word];
                    }
                }
            }
            for word in 0..W {
                table[word] &= clause[word];
            }
        }
        for &id in p.store.longs.of(lit.index()) {
            if self.open_lits(p, id, at) {
                let mut clause = own;
                for &other in &self.lits {
                    let other = self.column::<W>(other);
                    for word in 0..W {
                        clause[word] |= other[word];
                    }
                }
                for word in 0..W {
                    table[word] &= clause[word];
                }
            }
        }
    }

    /// Collects the open literals of a clause beyond `at`; false if it is satisfied or belongs to a lower place.
    fn open_lits(&mut self, p: &Propagator, id: u32, at: u8) -> bool {
        self.lits.clear();
        for &lit in p.store.long(id) {
            match p.value(lit) {
                1 => return false,
                0 if self.place[lit.var()] < at => return false,
                0 if self.place[lit.var()] > at => self.lits.push(lit),
                _ => {}
            }
        }
        true
    }

    fn column<const W: usize>(&self, lit: Lit) -> [u64; W] {
        column::<W>(self.place[lit.var()], lit.is_negated())
    }
}

/// The column of a variable: one bit a row.
pub(crate) fn column<const W: usize>(at: u8, negated: bool) -> [u64; W] {
    let flip = if negated { u64::MAX } else { 0 };
    if let Some(word) = COLUMNS.get(at as usize) {
        return [word ^ flip; W];
    }
    let mut column = [flip; W];
    for (place, word) in column.iter_mut().enumerate() {
        if place >> (at - 6) & 1 == 1 {
            *word = !flip;
        }
    }
    column
}

/// Existential quantification: row r holds if r or r with bit `at` flipped held; only rows with that bit 0 remain.
fn forget<const W: usize>(table: &mut [u64; W], at: usize) {
    if at < 6 {
        for word in table.iter_mut() {
            *word = (*word | *word >> (1 << at)) & !COLUMNS[at];
        }
        return;
    }
    let step = 1 << (at - 6);
    for low in (0..W).filter(|low| low & step == 0) {
        table[low] |= table[low | step];
        table[low | step] = 0;
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn columns_are_the_bits_of_the_row_number() {
        for at in 0..10u8 {
            let (yes, no) = (column::<16>(at, false), column::<16>(at, true));
            for row in 0..1024usize {
                assert_eq!(yes[row / 64] >> (row % 64) & 1, (row >> at & 1) as u64);
                assert_eq!(no[row / 64] >> (row % 64) & 1, 1 - (row >> at & 1) as u64);
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
