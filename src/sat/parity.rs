//! Parities beside clauses: sums modulo 2 kept in Gauss-Jordan form while batsat searches.
//!
//! Input:  equations "the sum of these variables is odd (or even)", and the assignment under way.
//! Output: every literal that the equations force under it, and a conflict where they cannot hold.
//! Holds:  each row has a *basic* column that no other row has. A row whose basic column has a value has no open column
//!         at all, so every conclusion of every sum of rows is that of a single row.
//!
//! C.-S. Han, J.-H. R. Jiang, "When Boolean satisfiability meets Gaussian elimination in a simplex way", CAV 2012: when
//! a basic column gets a value, the row takes another basic column, which is eliminated from the other rows. Nothing of
//! that is undone on backtracking, since the rows span the same space all the time. Different from there, all rows are
//! looked at after each round of unit propagation: a row is a few machine words.

use batsat::{Lit as TheirLit, Theory, TheoryArg, Var as TheirVar, lbool};

/// The equations with what they know of the assignment.
#[derive(Debug, Default)]
pub(super) struct Parities {
    rows: Vec<Row>,
    words: usize,
    /// For a column, its variable.
    vars: Vec<TheirVar>,
    /// For a variable, its column.
    columns: Vec<u32>,
    assigned: Vec<u64>,
    values: Vec<u64>,
    /// Columns in the order in which they got values, and how many literals of the solver's trail were read.
    trail: Vec<u32>,
    read: usize,
    /// The lengths of both at the beginning of each level.
    levels: Vec<(usize, usize)>,
    /// For a column that a row forced, the literals of the row that did, all true.
    reasons: Vec<Vec<TheirLit>>,
    clause: Vec<TheirLit>,
}

#[derive(Debug)]
struct Row {
    bits: Vec<u64>,
    odd: bool,
    basic: u32,
}

const NONE: u32 = u32::MAX;

impl Parities {
    /// Adds an equation; false if it contradicts those before. Only between searches. A variable that comes twice
    /// falls out.
    pub(super) fn add(&mut self, vars: &[TheirVar], odd: bool) -> bool {
        let columns: Vec<u32> = vars.iter().map(|&var| self.column(var)).collect();
        let mut row = Row { bits: vec![0; self.words], odd, basic: NONE };
        for column in columns {
            row.bits[column as usize / 64] ^= 1 << (column % 64);
        }
        for other in &self.rows {
            if has(&row.bits, other.basic) {
                row.plus(other);
            }
        }
        let Some(basic) = first(row.bits.iter().copied()) else { return !row.odd };
        row.basic = basic;
        self.eliminate(&row, basic, usize::MAX);
        self.rows.push(row);
        // What was read before may be news for the new row and the new columns.
        self.read = 0;
        true
    }

    fn column(&mut self, var: TheirVar) -> u32 {
        let at = var.idx() as usize;
        if self.columns.len() <= at {
            self.columns.resize(at + 1, NONE);
        }
        if self.columns[at] == NONE {
            self.columns[at] = self.vars.len() as u32;
            self.vars.push(var);
            self.reasons.push(Vec::new());
            if self.vars.len() > 64 * self.words {
                self.words += 1;
                let lists = self.rows.iter_mut().map(|row| &mut row.bits);
                lists.chain([&mut self.assigned, &mut self.values]).for_each(|bits| bits.push(0));
            }
        }
        self.columns[at]
    }

    /// Adds a row to all others that have a column.
    fn eliminate(&mut self, row: &Row, column: u32, own: usize) {
        for (at, other) in self.rows.iter_mut().enumerate() {
            if at != own && has(&other.bits, column) {
                other.plus(row);
            }
        }
    }

    /// Takes the values that are new on the trail; says whether there were any.
    fn take(&mut self, model: &[TheirLit]) -> bool {
        let before = self.trail.len();
        for &lit in &model[self.read..] {
            let column = self.columns.get(lit.var().idx() as usize).copied().unwrap_or(NONE);
            if column == NONE || has(&self.assigned, column) {
                continue;
            }
            let (word, bit) = (column as usize / 64, 1u64 << (column % 64));
            self.assigned[word] |= bit;
            self.values[word] |= if lit.sign() { bit } else { 0 };
            self.trail.push(column);
        }
        let reread = self.read == 0;
        self.read = model.len();
        self.trail.len() > before || reread
    }

    /// Gives each row an open basic column, where it has one.
    fn rebase(&mut self) {
        for at in 0..self.rows.len() {
            if !has(&self.assigned, self.rows[at].basic) {
                continue;
            }
            let open = self.rows[at].bits.iter().zip(&self.assigned).map(|(bits, assigned)| bits & !assigned);
            if let Some(column) = first(open) {
                let mut row = std::mem::replace(&mut self.rows[at], Row { bits: Vec::new(), odd: false, basic: NONE });
                row.basic = column;
                self.eliminate(&row, column, at);
                self.rows[at] = row;
            }
        }
    }

    /// The true literals of a row, but for one column.
    fn literals(&self, row: &Row, but: u32) -> impl Iterator<Item = TheirLit> {
        let columns = row.bits.iter().enumerate().flat_map(|(word, &bits)| ones(word, bits));
        let value = |column: u32| TheirLit::new(self.vars[column as usize], has(&self.values, column));
        columns.filter(move |&column| column != but).map(value)
    }

    fn check(&mut self, acts: &mut TheoryArg<'_>) {
        if self.rows.is_empty() || !self.take(acts.model()) {
            return;
        }
        self.rebase();
        for at in 0..self.rows.len() {
            let row = &self.rows[at];
            let mut sum = row.odd;
            let mut others_open = false;
            for (word, &bits) in row.bits.iter().enumerate() {
                sum ^= (bits & self.values[word]).count_ones() & 1 == 1;
                let basic = if row.basic as usize / 64 == word { 1u64 << (row.basic % 64) } else { 0 };
                others_open |= bits & !self.assigned[word] & !basic != 0;
            }
            if others_open {
                continue;
            }
            if has(&self.assigned, row.basic) {
                if sum {
                    self.clause = self.literals(row, NONE).map(|lit| !lit).collect();
                    acts.raise_conflict(&self.clause, false);
                    return;
                }
                continue;
            }
            let lit = TheirLit::new(self.vars[row.basic as usize], sum);
            if acts.value(lit.var()) == lbool::UNDEF {
                self.reasons[row.basic as usize] = self.literals(row, row.basic).collect();
                acts.propagate(lit);
            }
        }
    }
}

impl Row {
    fn plus(&mut self, other: &Row) {
        self.bits.iter_mut().zip(&other.bits).for_each(|(word, other)| *word ^= other);
        self.odd ^= other.odd;
    }
}

fn has(bits: &[u64], column: u32) -> bool {
    bits[column as usize / 64] >> (column % 64) & 1 == 1
}

fn first(mut words: impl Iterator<Item = u64>) -> Option<u32> {
    let mut at = 0;
    words.find_map(|word| {
        at += 64;
        (word != 0).then(|| at - 64 + word.trailing_zeros())
    })
}

fn ones(word: usize, mut bits: u64) -> impl Iterator<Item = u32> {
    std::iter::from_fn(move || {
        let place = bits.trailing_zeros();
        (bits != 0).then(|| {
            bits &= bits - 1;
            word as u32 * 64 + place
        })
    })
}

impl Theory for Parities {
    fn final_check(&mut self, acts: &mut TheoryArg<'_>) {
        self.check(acts);
    }

    fn partial_check(&mut self, acts: &mut TheoryArg<'_>) {
        self.check(acts);
    }

    fn create_level(&mut self) {
        self.levels.push((self.trail.len(), self.read));
    }

    fn pop_levels(&mut self, count: usize) {
        let level = self.levels.len() - count;
        let Some(&(trail, read)) = self.levels.get(level) else { return };
        for &column in &self.trail[trail..] {
            let (word, bit) = (column as usize / 64, 1u64 << (column % 64));
            self.assigned[word] &= !bit;
            self.values[word] &= !bit;
        }
        self.trail.truncate(trail);
        self.read = read;
        self.levels.truncate(level);
    }

    fn n_levels(&self) -> usize {
        self.levels.len()
    }

    fn explain_propagation(&mut self, lit: TheirLit) -> &[TheirLit] {
        &self.reasons[self.columns[lit.var().idx() as usize] as usize]
    }
}

#[cfg(test)]
mod tests {
    use crate::budget::Budget;
    use crate::random::SplitMix64;
    use crate::sat::{Answer, Batsat, Engine, Lit};

    const VARS: usize = 10;

    struct Mixed {
        clauses: Vec<Vec<Lit>>,
        parities: Vec<(Vec<usize>, bool)>,
    }

    impl Mixed {
        fn draw(random: &mut SplitMix64) -> Self {
            let clause = |random: &mut SplitMix64| {
                (0..3).map(|_| Lit::new(random.below(VARS as u64) as usize, random.coin())).collect()
            };
            let parity =
                |random: &mut SplitMix64| ((0..VARS).filter(|_| random.coin()).collect::<Vec<_>>(), random.coin());
            let clauses = (0..random.below(30)).map(|_| clause(random)).collect();
            Self { clauses, parities: (0..random.below(6)).map(|_| parity(random)).collect() }
        }

        fn holds(&self, row: usize) -> bool {
            let lit = |lit: &Lit| (row >> lit.var() & 1 == 1) != lit.is_negated();
            let sum = |vars: &[usize]| vars.iter().filter(|&&var| row >> var & 1 == 1).count() % 2 == 1;
            self.clauses.iter().all(|clause| clause.iter().any(lit))
                && self.parities.iter().all(|(vars, odd)| sum(vars) == *odd)
        }
    }

    /// Lists all models by blocking clauses, with parities added before and between, and compares with brute force.
    #[test]
    fn models_with_parities_equal_brute_force() {
        let mut random = SplitMix64::new(5);
        let (mut most, mut none) = (0, 0);
        for round in 0..400 {
            let mixed = Mixed::draw(&mut random);
            let mut engine = Batsat::new();
            mixed.clauses.iter().for_each(|clause| engine.add_clause(clause));
            let late = random.below(mixed.parities.len() as u64 + 1) as usize;
            for (vars, odd) in &mixed.parities[late..] {
                engine.add_parity(vars, *odd);
            }
            if random.coin() {
                engine.solve(&[Lit::new(0, random.coin())], &Budget::unlimited());
            }
            for (vars, odd) in &mixed.parities[..late] {
                engine.add_parity(vars, *odd);
            }
            let mut found = Vec::new();
            while engine.solve(&[], &Budget::unlimited()) == Answer::Sat {
                found.push((0..VARS).map(|var| usize::from(engine.value(var)) << var).sum::<usize>());
                let block: Vec<Lit> = (0..VARS).map(|var| Lit::new(var, !engine.value(var))).collect();
                engine.add_clause(&block);
            }
            found.sort_unstable();
            let want: Vec<usize> = (0..1 << VARS).filter(|&row| mixed.holds(row)).collect();
            assert_eq!(found, want, "round {round}");
            most = most.max(want.len());
            none += usize::from(want.is_empty());
        }
        assert!(most > 100 && none > 20, "{most} {none}");
    }

    /// Thirty variables fixed by dense equations together, none of them by few: unit propagation over single equations
    /// would have to guess most of them.
    #[test]
    fn sums_of_equations_are_seen_without_search() {
        let mut random = SplitMix64::new(8);
        let hidden: Vec<bool> = (0..30).map(|_| random.coin()).collect();
        let mut engine = Batsat::new();
        engine.limit(8);
        for _ in 0..60 {
            let vars: Vec<usize> = (0..30).filter(|_| random.coin()).collect();
            let odd = vars.iter().filter(|&&var| hidden[var]).count() % 2 == 1;
            engine.add_parity(&vars, odd);
        }
        assert_eq!(engine.solve(&[Lit::new(4, !hidden[4])], &Budget::unlimited()), Answer::Unsat);
        assert_eq!(engine.solve(&[Lit::new(4, hidden[4])], &Budget::unlimited()), Answer::Sat);
        assert!((0..30).all(|var| engine.value(var) == hidden[var]));
    }
}
