//! Families of formulas with any size: what the tests of the counting engine count and what its bench measures.

use tallymark::problem::{BitId, BitLit, Clauses};
use tallymark::random::SplitMix64;

/// A formula.
#[derive(Clone, Default)]
pub(crate) struct Formula {
    pub(crate) clauses: Clauses,
    pub(crate) vars: usize,
    pub(crate) shown: Option<Vec<BitId>>,
}

impl Formula {
    /// The formula of these DIMACS clauses.
    pub(crate) fn of(vars: usize, clauses: &[Vec<i64>]) -> Self {
        let mut formula = Self { vars, ..Self::default() };
        for clause in clauses {
            formula.add(clause);
        }
        formula
    }

    pub(crate) fn add(&mut self, clause: &[i64]) {
        let lits: Vec<BitLit> = clause.iter().map(|&number| BitLit::from_dimacs(number).unwrap()).collect();
        self.clauses.push(&lits);
    }

    /// A new variable, as its DIMACS number.
    pub(crate) fn var(&mut self) -> i64 {
        self.vars += 1;
        self.vars as i64
    }

    fn vars(&mut self, count: usize) -> Vec<i64> {
        (0..count).map(|_| self.var()).collect()
    }

    fn at_most_one(&mut self, lits: &[i64]) {
        for (at, &a) in lits.iter().enumerate() {
            for &b in &lits[..at] {
                self.add(&[-a, -b]);
            }
        }
    }

    /// A variable that equals `a` and `b`.
    fn and(&mut self, a: i64, b: i64) -> i64 {
        let out = self.var();
        self.add(&[-out, a]);
        self.add(&[-out, b]);
        self.add(&[out, -a, -b]);
        out
    }

    /// Variables that equal the sum and the carry of three.
    fn full_adder(&mut self, a: i64, b: i64, c: i64) -> (i64, i64) {
        let (sum, carry) = (self.var(), self.var());
        for row in 0..8 {
            let lit = |var: i64, bit: i32| if row >> bit & 1 == 1 { -var } else { var };
            let ones = (row as u32).count_ones();
            let rest = [lit(a, 0), lit(b, 1), lit(c, 2)];
            self.add(&[rest[0], rest[1], rest[2], if ones % 2 == 1 { sum } else { -sum }]);
        }
        for (x, y) in [(a, b), (a, c), (b, c)] {
            self.add(&[-x, -y, carry]);
            self.add(&[x, y, -carry]);
        }
        (sum, carry)
    }

    fn half_adder(&mut self, a: i64, b: i64) -> (i64, i64) {
        let (sum, carry) = (self.var(), self.and(a, b));
        for (x, y, z) in [(a, b, -sum), (-a, -b, -sum), (-a, b, sum), (a, -b, sum)] {
            self.add(&[x, y, z]);
        }
        (sum, carry)
    }

    /// The sum of two numbers, low bit first.
    fn sum(&mut self, a: &[i64], b: &[i64]) -> Vec<i64> {
        let (long, short) = if a.len() >= b.len() { (a, b) } else { (b, a) };
        let mut out = Vec::new();
        let mut carry = None;
        for (at, &bit) in long.iter().enumerate() {
            let (sum, next) = match (short.get(at), carry) {
                (Some(&other), Some(carry)) => {
                    let (sum, carry) = self.full_adder(bit, other, carry);
                    (sum, Some(carry))
                }
                (Some(&other), None) | (None, Some(other)) => {
                    let (sum, carry) = self.half_adder(bit, other);
                    (sum, Some(carry))
                }
                (None, None) => (bit, None),
            };
            out.push(sum);
            carry = next;
        }
        out.extend(carry);
        out
    }

    fn equals(&mut self, bits: &[i64], number: u64) {
        for (at, &bit) in bits.iter().enumerate() {
            self.add(&[if number >> at & 1 == 1 { bit } else { -bit }]);
        }
        if number.checked_shr(bits.len() as u32).unwrap_or(0) != 0 {
            self.add(&[]);
        }
    }
}

/// n queens on an n x n board, one variable a square.
pub(crate) fn queens(n: usize) -> Formula {
    let mut formula = Formula::default();
    let squares = formula.vars(n * n);
    let at = |row: usize, column: usize| squares[row * n + column];
    for line in 0..n {
        let row: Vec<i64> = (0..n).map(|other| at(line, other)).collect();
        let column: Vec<i64> = (0..n).map(|other| at(other, line)).collect();
        formula.add(&row);
        formula.add(&column);
        formula.at_most_one(&row);
        formula.at_most_one(&column);
    }
    for diagonal in 0..2 * n - 1 {
        let fall = |row: usize| (diagonal >= row && diagonal - row < n).then(|| at(row, diagonal - row));
        let rise = |row: usize| (diagonal >= row && diagonal - row < n).then(|| at(n - 1 - row, diagonal - row));
        let (fall, rise): (Vec<i64>, Vec<i64>) = ((0..n).filter_map(fall).collect(), (0..n).filter_map(rise).collect());
        formula.at_most_one(&fall);
        formula.at_most_one(&rise);
    }
    formula
}

/// Proper colourings of a grid with `colours` colours, one variable a cell and colour.
pub(crate) fn grid(width: usize, height: usize, colours: usize) -> Formula {
    let mut formula = Formula::default();
    let cells: Vec<Vec<i64>> = (0..width * height).map(|_| formula.vars(colours)).collect();
    for cell in &cells {
        formula.add(cell);
        formula.at_most_one(cell);
    }
    for y in 0..height {
        for x in 0..width {
            let here = y * width + x;
            let mut next = Vec::new();
            if x + 1 < width {
                next.push(here + 1);
            }
            if y + 1 < height {
                next.push(here + width);
            }
            for other in next {
                for (&own, &far) in cells[here].iter().zip(&cells[other]) {
                    formula.add(&[-own, -far]);
                }
            }
        }
    }
    formula
}

/// Random clauses of `width` different variables each.
pub(crate) fn random(vars: usize, clauses: usize, width: usize, seed: u64) -> Formula {
    let mut random = SplitMix64::new(seed);
    let mut formula = Formula { vars, ..Formula::default() };
    for _ in 0..clauses {
        let mut clause: Vec<i64> = Vec::new();
        while clause.len() < width.min(vars) {
            let var = random.below(vars as u64) as i64 + 1;
            if clause.iter().all(|lit| lit.abs() != var) {
                clause.push(if random.coin() { var } else { -var });
            }
        }
        formula.add(&clause);
    }
    formula
}

/// Subsets of `n` random weights of `bits` bits with half of the whole sum, by a chain of adders; all gates two-sided.
pub(crate) fn subset_sum(n: usize, bits: u32, seed: u64) -> (Formula, Vec<u64>, u64) {
    let mut random = SplitMix64::new(seed);
    let weights: Vec<u64> = (0..n).map(|_| 1 + random.below((1 << bits) - 1)).collect();
    let target = weights.iter().sum::<u64>() / 2;
    let mut formula = Formula::default();
    let picks = formula.vars(n);
    let never = formula.var();
    formula.add(&[-never]);
    let mut total: Vec<i64> = Vec::new();
    for (&weight, &pick) in weights.iter().zip(&picks) {
        let len = 64 - weight.leading_zeros();
        let own: Vec<i64> = (0..len).map(|bit| if weight >> bit & 1 == 1 { pick } else { never }).collect();
        total = if total.is_empty() { own } else { formula.sum(&total, &own) };
    }
    formula.equals(&total, target);
    (formula, weights, target)
}

/// Ways to write a number as a product of two factors of `bits` bits, by an array multiplier.
pub(crate) fn product(bits: usize, number: u64) -> Formula {
    let mut formula = Formula::default();
    let (a, b) = (formula.vars(bits), formula.vars(bits));
    let mut total: Vec<i64> = Vec::new();
    for (shift, &bit) in b.iter().enumerate() {
        let row: Vec<i64> = a.iter().map(|&other| formula.and(bit, other)).collect();
        if total.is_empty() {
            total = row;
            continue;
        }
        let high = formula.sum(&total[shift..], &row);
        total.truncate(shift);
        total.extend(high);
    }
    formula.equals(&total, number);
    formula
}

/// A fixed parity of n variables, by a chain of helper variables.
pub(crate) fn parity(n: usize) -> Formula {
    let mut formula = Formula::default();
    let bits = formula.vars(n);
    let mut sum = bits[0];
    for &bit in &bits[1..] {
        let out = formula.var();
        for (x, y, z) in [(sum, bit, -out), (-sum, -bit, -out), (-sum, bit, out), (sum, -bit, out)] {
            formula.add(&[x, y, z]);
        }
        sum = out;
    }
    formula.add(&[sum]);
    formula
}
