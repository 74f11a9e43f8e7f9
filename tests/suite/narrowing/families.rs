//! Instances by seed, of the kinds whose narrowing is known: encodings of counting, adding and multiplying, parities, puzzles.

use tallymark::id::Id;
use tallymark::problem::{BitId, BitLit, Problem};
use tallymark::random::SplitMix64;

/// Clauses under construction; literals are DIMACS numbers.
#[derive(Default)]
pub(super) struct Encoder {
    problem: Problem,
    /// The variables that the problem is about, in DIMACS numbers.
    inputs: Vec<i64>,
}

impl Encoder {
    /// So many inputs.
    pub(super) fn new(inputs: usize) -> Self {
        let mut encoder = Self::default();
        encoder.inputs = (0..inputs).map(|_| encoder.var()).collect();
        encoder
    }

    pub(super) fn inputs(&self) -> Vec<i64> {
        self.inputs.clone()
    }

    pub(super) fn var(&mut self) -> i64 {
        self.problem.add_numbered_vars(1);
        self.problem.bit_count() as i64
    }

    pub(super) fn clause(&mut self, lits: &[i64]) {
        let lits: Vec<BitLit> = lits.iter().map(|&lit| BitLit::from_dimacs(lit).expect("not 0")).collect();
        self.problem.clauses.push(&lits);
    }

    /// The problem, with every variable shown.
    pub(super) fn finish(self) -> Problem {
        self.problem
    }

    /// The problem, with a show line that names the inputs.
    pub(super) fn finish_shown(mut self) -> Problem {
        self.problem.shown = Some(self.inputs.iter().map(|&var| BitId::new(var as usize - 1)).collect());
        self.problem
    }

    fn and(&mut self, a: i64, b: i64) -> i64 {
        let c = self.var();
        self.clause(&[-c, a]);
        self.clause(&[-c, b]);
        self.clause(&[c, -a, -b]);
        c
    }

    fn xor(&mut self, a: i64, b: i64) -> i64 {
        let c = self.var();
        self.odd(&[a, b, c], false);
        c
    }

    fn majority(&mut self, a: i64, b: i64, c: i64) -> i64 {
        let m = self.var();
        for (x, y) in [(a, b), (a, c), (b, c)] {
            self.clause(&[-m, x, y]);
            self.clause(&[m, -x, -y]);
        }
        m
    }

    fn choose(&mut self, c: i64, yes: i64, no: i64) -> i64 {
        let m = self.var();
        self.clause(&[-m, -c, yes]);
        self.clause(&[-m, c, no]);
        self.clause(&[m, -c, -yes]);
        self.clause(&[m, c, -no]);
        m
    }

    /// An odd number of these holds, or an even one, in one piece.
    pub(super) fn odd(&mut self, lits: &[i64], odd: bool) {
        for signs in 0u32..1 << lits.len() {
            // A clause excludes the assignment in which its negated literals hold and the others do not.
            if (signs.count_ones() % 2 == 1) != odd {
                let clause: Vec<i64> =
                    lits.iter().enumerate().map(|(at, &lit)| if signs >> at & 1 == 1 { -lit } else { lit }).collect();
                self.clause(&clause);
            }
        }
    }

    /// An exclusive or cut into pieces of at most `size` literals by new variables.
    pub(super) fn odd_cut(&mut self, lits: &[i64], odd: bool, size: usize) {
        let mut left = lits.to_vec();
        while left.len() > size {
            let rest = left.split_off(size - 1);
            let link = self.var();
            left.push(link);
            self.odd(&left, false);
            left = vec![link];
            left.extend(rest);
        }
        self.odd(&left, odd);
    }

    fn full_adder(&mut self, a: i64, b: i64, c: i64) -> (i64, i64) {
        let sum = self.var();
        self.odd(&[a, b, c, sum], false);
        (sum, self.majority(a, b, c))
    }

    fn half_adder(&mut self, a: i64, b: i64) -> (i64, i64) {
        (self.xor(a, b), self.and(a, b))
    }

    /// The binary sum of weighted literals: columns of equal weight, added up.
    pub(super) fn sum(&mut self, terms: &[(i64, u64)]) -> Vec<i64> {
        let mut columns: Vec<std::collections::VecDeque<i64>> = vec![Default::default(); 64];
        for &(lit, weight) in terms {
            (0..64).filter(|at| weight >> at & 1 == 1).for_each(|at| columns[at].push_back(lit));
        }
        let mut sum = Vec::new();
        for at in 0..63 {
            while columns[at].len() > 1 {
                let a = columns[at].pop_front().expect("two at least");
                let b = columns[at].pop_front().expect("two at least");
                let (low, carry) = match columns[at].pop_front() {
                    Some(c) => self.full_adder(a, b, c),
                    None => self.half_adder(a, b),
                };
                columns[at].push_back(low);
                columns[at + 1].push_back(carry);
            }
            if let Some(&bit) = columns[at].front() {
                sum.resize(at, 0);
                sum.push(bit);
            }
        }
        sum
    }

    /// The number spelt by these variables, low bit first, has this value; a 0 stands for a bit that is never 1.
    pub(super) fn equals(&mut self, bits: &[i64], value: u64) {
        for (at, &bit) in bits.iter().enumerate() {
            match (bit, value >> at & 1 == 1) {
                (0, true) => self.clause(&[]),
                (0, false) => {}
                (bit, true) => self.clause(&[bit]),
                (bit, false) => self.clause(&[-bit]),
            }
        }
    }

    /// The number is at most this value: where all higher bits of the value that are 1 are met, a 0 must be met by 0.
    pub(super) fn at_most_value(&mut self, bits: &[i64], value: u64) {
        for at in (0..bits.len()).filter(|&at| value >> at & 1 == 0 && bits[at] != 0) {
            let mut clause = vec![-bits[at]];
            let higher = (at + 1..bits.len()).filter(|&high| value >> high & 1 == 1);
            if higher.clone().all(|high| bits[high] != 0) {
                clause.extend(higher.map(|high| -bits[high]));
                self.clause(&clause);
            }
        }
    }

    /// At most k by a sequential counter: C. Sinz, "Towards an optimal CNF encoding of Boolean cardinality constraints", CP 2005.
    pub(super) fn at_most_sequential(&mut self, lits: &[i64], k: usize) {
        let mut before: Vec<i64> = Vec::new();
        for (at, &lit) in lits.iter().enumerate() {
            if before.len() == k && k > 0 || k == 0 {
                let mut clause = vec![-lit];
                clause.extend(before.last().map(|&last| -last));
                self.clause(&clause);
            }
            if at + 1 == lits.len() {
                break;
            }
            let now: Vec<i64> = (0..k.min(at + 1)).map(|_| self.var()).collect();
            for place in 0..now.len() {
                if place == 0 {
                    self.clause(&[-lit, now[0]]);
                } else {
                    self.clause(&[-lit, -before[place - 1], now[place]]);
                }
                if place < before.len() {
                    self.clause(&[-before[place], now[place]]);
                }
            }
            before = now;
        }
    }

    /// The unary number of a totalizer, from the literals that hold to its outputs and, if asked, back: O. Bailleux,
    /// Y. Boufkhad, "Efficient CNF encoding of Boolean cardinality constraints", CP 2003.
    pub(super) fn totalizer(&mut self, lits: &[i64], most: usize, both: bool) -> Vec<i64> {
        if lits.len() == 1 {
            return lits.to_vec();
        }
        let (left, right) = lits.split_at(lits.len() / 2);
        let (left, right) = (self.totalizer(left, most, both), self.totalizer(right, most, both));
        let out: Vec<i64> = (0..lits.len().min(most)).map(|_| self.var()).collect();
        for a in 0..=left.len() {
            for b in 0..=right.len() {
                if (1..=out.len()).contains(&(a + b)) {
                    let mut clause = vec![out[a + b - 1]];
                    clause.extend((a > 0).then(|| -left[a - 1]));
                    clause.extend((b > 0).then(|| -right[b - 1]));
                    self.clause(&clause);
                }
                if both && a + b < out.len() {
                    let mut clause = vec![-out[a + b]];
                    clause.extend(left.get(a).copied());
                    clause.extend(right.get(b).copied());
                    self.clause(&clause);
                }
            }
        }
        out
    }

    /// The literals sorted, those that hold first, by the odd-even merge network of K. Batcher, "Sorting networks and their
    /// applications", AFIPS 1968; one-sided comparators. The length is a power of two.
    pub(super) fn sorted(&mut self, lits: &[i64]) -> Vec<i64> {
        let mut wires = lits.to_vec();
        let n = wires.len();
        let mut p = 1;
        while p < n {
            let mut k = p;
            while k >= 1 {
                for j in (k % p..n - k).step_by(2 * k) {
                    for i in 0..k.min(n - j - k) {
                        if (i + j) / (2 * p) == (i + j + k) / (2 * p) {
                            let (a, b) = (wires[i + j], wires[i + j + k]);
                            let (high, low) = (self.var(), self.var());
                            self.clause(&[-a, high]);
                            self.clause(&[-b, high]);
                            self.clause(&[-a, -b, low]);
                            (wires[i + j], wires[i + j + k]) = (high, low);
                        }
                    }
                }
                k /= 2;
            }
            p *= 2;
        }
        wires
    }

    /// Random clauses of three different variables among these.
    pub(super) fn random_clauses(&mut self, among: &[i64], count: usize, random: &mut SplitMix64) {
        for _ in 0..count {
            let mut clause: Vec<i64> = Vec::new();
            while clause.len() < 3 {
                let var = among[random.below(among.len() as u64) as usize];
                if clause.iter().all(|lit| lit.abs() != var) {
                    clause.push(if random.coin() { var } else { -var });
                }
            }
            self.clause(&clause);
        }
    }
}

/// Random 3-SAT.
pub(super) fn random_3sat(n: usize, clauses: usize, seed: u64) -> Problem {
    let mut encoder = Encoder::new(n);
    let inputs = encoder.inputs();
    encoder.random_clauses(&inputs, clauses, &mut SplitMix64::new(seed));
    encoder.finish()
}

/// How a cardinality is spelt.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub(super) enum Counting {
    Sequential,
    Sorting,
    Totalizer,
    ExactlySequential,
    /// Two totalizers: at most k hold, and at most n - k do not.
    ExactlyTotalizer,
    /// One totalizer whose outputs are defined both ways.
    ExactlyBothWays,
}

impl Counting {
    pub(super) const ALL: [Self; 6] = [
        Self::Sequential,
        Self::Sorting,
        Self::Totalizer,
        Self::ExactlySequential,
        Self::ExactlyTotalizer,
        Self::ExactlyBothWays,
    ];
}

/// Random 3-SAT of this ratio on n inputs of which at most, or exactly, k hold.
pub(super) fn sat_with_count(n: usize, ratio: f64, k: usize, counting: Counting, seed: u64) -> Encoder {
    let mut encoder = Encoder::new(n);
    let inputs = encoder.inputs();
    encoder.random_clauses(&inputs, (n as f64 * ratio) as usize, &mut SplitMix64::new(seed));
    let negated: Vec<i64> = inputs.iter().map(|&lit| -lit).collect();
    match counting {
        Counting::Sequential => encoder.at_most_sequential(&inputs, k),
        Counting::Sorting => {
            let sorted = encoder.sorted(&inputs);
            encoder.clause(&[-sorted[k]]);
        }
        Counting::Totalizer => {
            let out = encoder.totalizer(&inputs, k + 1, false);
            encoder.clause(&[-out[k]]);
        }
        Counting::ExactlySequential => {
            encoder.at_most_sequential(&inputs, k);
            encoder.at_most_sequential(&negated, n - k);
        }
        Counting::ExactlyTotalizer => {
            let (ones, zeros) =
                (encoder.totalizer(&inputs, k + 1, false), encoder.totalizer(&negated, n - k + 1, false));
            encoder.clause(&[-ones[k]]);
            encoder.clause(&[-zeros[n - k]]);
        }
        Counting::ExactlyBothWays => {
            let out = encoder.totalizer(&inputs, n, true);
            encoder.clause(&[out[k - 1]]);
            encoder.clause(&[-out[k]]);
        }
    }
    encoder
}

/// Terms with random weights of so many bits; the sum by adders equals, or is at most, half of all.
pub(super) fn weighted(n: usize, bits: u32, equal: bool, seed: u64) -> Encoder {
    let mut random = SplitMix64::new(seed);
    let mut encoder = Encoder::new(n);
    let terms: Vec<(i64, u64)> = encoder.inputs().iter().map(|&lit| (lit, 1 + random.below((1 << bits) - 1))).collect();
    let half = terms.iter().map(|(_, weight)| weight).sum::<u64>() / 2;
    let chosen: u64 = terms.iter().filter(|_| random.coin()).map(|(_, weight)| weight).sum();
    let sum = encoder.sum(&terms);
    if equal {
        encoder.equals(&sum, chosen)
    } else {
        encoder.at_most_value(&sum, half)
    }
    encoder
}

/// x times y is a product of two numbers of so many bits: an array of ANDs, added up.
pub(super) fn product(bits: usize, value: u64) -> Encoder {
    let mut encoder = Encoder::new(2 * bits);
    let inputs = encoder.inputs();
    let (x, y) = inputs.split_at(bits);
    let mut terms = Vec::new();
    for (i, &a) in x.iter().enumerate() {
        for (j, &b) in y.iter().enumerate() {
            terms.push((encoder.and(a, b), 1u64 << (i + j)));
        }
    }
    let sum = encoder.sum(&terms);
    encoder.equals(&sum, value);
    encoder
}

/// A random circuit of gates over earlier signals; the last one holds.
pub(super) fn random_circuit(inputs: usize, gates: usize, seed: u64) -> Encoder {
    let mut random = SplitMix64::new(seed);
    let mut encoder = Encoder::new(inputs);
    let mut signals = encoder.inputs();
    for _ in 0..gates {
        let mut picked: Vec<i64> = Vec::new();
        while picked.len() < 3 {
            let signal = signals[random.below(signals.len() as u64) as usize];
            if !picked.contains(&signal) {
                picked.push(signal);
            }
        }
        let lits: Vec<i64> = picked.iter().map(|&lit| if random.coin() { lit } else { -lit }).collect();
        let made = match random.below(4) {
            0 => encoder.and(lits[0], lits[1]),
            1 => encoder.xor(lits[0], lits[1]),
            2 => encoder.choose(lits[0], lits[1], lits[2]),
            _ => encoder.majority(lits[0], lits[1], lits[2]),
        };
        signals.push(made);
    }
    encoder.clause(&[*signals.last().expect("a gate at least")]);
    encoder
}

/// Exclusive ors of so many of the inputs each, cut into pieces of four.
pub(super) fn parities(inputs: usize, equations: usize, width: usize, seed: u64) -> Encoder {
    let mut random = SplitMix64::new(seed);
    let mut encoder = Encoder::new(inputs);
    for _ in 0..equations {
        let mut picked: Vec<i64> = Vec::new();
        while picked.len() < width {
            let var = 1 + random.below(inputs as u64) as i64;
            if !picked.contains(&var) {
                picked.push(var);
            }
        }
        let odd = random.coin();
        encoder.odd_cut(&picked, odd, 4);
    }
    encoder
}

/// Parities at the nodes of a torus of rows by columns: a variable for each edge, an odd sum at one node (G. Tseitin, 1968).
pub(super) fn tseitin_torus(rows: usize, columns: usize) -> Problem {
    let nodes = rows * columns;
    let mut encoder = Encoder::new(2 * nodes);
    let right = |r: usize, c: usize| ((r % rows) * columns + c % columns + 1) as i64;
    let down = |r: usize, c: usize| (nodes + (r % rows) * columns + c % columns + 1) as i64;
    for r in 0..rows {
        for c in 0..columns {
            let edges = [right(r, c), right(r, c + columns - 1), down(r, c), down(r + rows - 1, c)];
            encoder.odd(&edges, (r, c) == (0, 0));
        }
    }
    encoder.finish()
}

/// Each of these groups has exactly one, pair by pair.
fn one_of_each(encoder: &mut Encoder, groups: &[Vec<i64>], at_least: bool, at_most: bool) {
    for group in groups {
        if at_least {
            encoder.clause(group);
        }
        for (at, &a) in group.iter().enumerate() {
            for &b in group[..at].iter().filter(|_| at_most) {
                encoder.clause(&[-a, -b]);
            }
        }
    }
}

/// Queens on a board: one in each row and column, at most one in each diagonal.
pub(super) fn queens(n: usize) -> Problem {
    let mut encoder = Encoder::new(n * n);
    let square = |r: usize, c: usize| (r * n + c + 1) as i64;
    let rows: Vec<Vec<i64>> = (0..n).map(|r| (0..n).map(|c| square(r, c)).collect()).collect();
    let columns: Vec<Vec<i64>> = (0..n).map(|c| (0..n).map(|r| square(r, c)).collect()).collect();
    let diagonal = |keep: &dyn Fn(usize, usize) -> bool| -> Vec<i64> {
        (0..n * n).filter(|at| keep(at / n, at % n)).map(|at| square(at / n, at % n)).collect()
    };
    let falling = (0..2 * n - 1).map(|d| diagonal(&|r, c| r + n - 1 - c == d));
    let rising = (0..2 * n - 1).map(|d| diagonal(&|r, c| r + c == d));
    let diagonals: Vec<Vec<i64>> = falling.chain(rising).collect();
    one_of_each(&mut encoder, &rows, true, true);
    one_of_each(&mut encoder, &columns, true, true);
    one_of_each(&mut encoder, &diagonals, false, true);
    encoder.finish()
}

/// Colourings of a grid, one variable for each square and colour.
pub(super) fn colouring(rows: usize, columns: usize, colours: usize) -> Problem {
    let mut encoder = Encoder::new(rows * columns * colours);
    let var = |r: usize, c: usize, k: usize| ((r * columns + c) * colours + k + 1) as i64;
    let squares: Vec<Vec<i64>> =
        (0..rows * columns).map(|at| (0..colours).map(|k| var(at / columns, at % columns, k)).collect()).collect();
    one_of_each(&mut encoder, &squares, true, true);
    for (r, c) in (0..rows).flat_map(|r| (0..columns).map(move |c| (r, c))) {
        for k in 0..colours {
            if r + 1 < rows {
                encoder.clause(&[-var(r, c, k), -var(r + 1, c, k)]);
            }
            if c + 1 < columns {
                encoder.clause(&[-var(r, c, k), -var(r, c + 1, k)]);
            }
        }
    }
    encoder.finish()
}

/// Perfect matchings of the complete graph: a variable for each edge.
pub(super) fn matchings(nodes: usize) -> Problem {
    let edges: Vec<(usize, usize)> = (0..nodes).flat_map(|a| (a + 1..nodes).map(move |b| (a, b))).collect();
    let mut encoder = Encoder::new(edges.len());
    let groups: Vec<Vec<i64>> = (0..nodes)
        .map(|node| {
            let touching = edges.iter().enumerate().filter(|(_, edge)| edge.0 == node || edge.1 == node);
            touching.map(|(at, _)| at as i64 + 1).collect()
        })
        .collect();
    one_of_each(&mut encoder, &groups, true, true);
    encoder.finish()
}

/// Pigeons in holes: each pigeon in one at least, each hole with one at most.
pub(super) fn pigeons(pigeons: usize, holes: usize) -> Problem {
    let mut encoder = Encoder::new(pigeons * holes);
    let var = |p: usize, h: usize| (p * holes + h + 1) as i64;
    let by_pigeon: Vec<Vec<i64>> = (0..pigeons).map(|p| (0..holes).map(|h| var(p, h)).collect()).collect();
    let by_hole: Vec<Vec<i64>> = (0..holes).map(|h| (0..pigeons).map(|p| var(p, h)).collect()).collect();
    one_of_each(&mut encoder, &by_pigeon, true, false);
    one_of_each(&mut encoder, &by_hole, false, true);
    encoder.finish()
}
