//! Problems whose number of solutions is published, built from expressions and clauses, counted by the judge's sweep.
//!
//! The sequences are those of the On-Line Encyclopedia of Integer Sequences (N. Sloane and others), whose terms here were
//! read in a stored copy of its data; what is not in it says so.

use tallymark::budget::Budget;
use tallymark::judge::rows;
use tallymark::problem::{BitId, BitLit, Compare, Domain, Expr, ExprId, Origin, Problem};

/// A problem and shorthands.
#[derive(Default)]
struct Model {
    problem: Problem,
}

impl Model {
    fn integers(&mut self, count: usize, lo: i64, hi: i64) -> Vec<ExprId> {
        (0..count)
            .map(|at| {
                let var = self.problem.add_var(format!("x{at}"), Domain::Range { lo, hi }, None);
                self.problem.exprs.node(Expr::Var(var))
            })
            .collect()
    }

    fn truths(&mut self, count: usize) -> Vec<ExprId> {
        (0..count)
            .map(|at| {
                let var = self.problem.add_var(format!("q{at}"), Domain::YesNo, None);
                self.problem.exprs.node(Expr::Var(var))
            })
            .collect()
    }

    fn number(&mut self, value: i64) -> ExprId {
        self.problem.exprs.node(Expr::Number(value))
    }

    fn sum(&mut self, items: &[ExprId]) -> ExprId {
        self.problem.exprs.over(Expr::Sum, items)
    }

    fn less(&mut self, a: ExprId, b: ExprId) -> ExprId {
        self.problem.exprs.node(Expr::Compare(Compare::Lt, a, b))
    }

    fn equals(&mut self, a: ExprId, b: i64) -> ExprId {
        let b = self.number(b);
        self.problem.exprs.node(Expr::Compare(Compare::Eq, a, b))
    }

    fn must(&mut self, expr: ExprId) {
        self.problem.must(expr, Origin::default());
    }

    fn must_differ(&mut self, items: &[ExprId]) {
        let different = self.problem.exprs.over(Expr::Different, items);
        self.must(different);
    }

    /// Exactly `count` of these hold.
    fn must_count(&mut self, items: &[ExprId], count: i64) {
        let number = self.problem.exprs.over(Expr::Count, items);
        let exact = self.equals(number, count);
        self.must(exact);
    }

    /// `items[at]` shifted by `step * at`.
    fn sloped(&mut self, items: &[ExprId], step: i64) -> Vec<ExprId> {
        let sloped = |(at, &item)| {
            let shift = self.number(step * at as i64);
            self.sum(&[item, shift])
        };
        items.iter().enumerate().map(sloped).collect()
    }

    fn clause(&mut self, lits: &[(usize, bool)]) {
        let lit = |&(bit, value): &(usize, bool)| BitLit::new(tallymark::id::Id::new(bit), value);
        self.problem.clauses.push(&lits.iter().map(lit).collect::<Vec<BitLit>>());
    }

    #[track_caller]
    fn has(&self, count: u64) {
        tallymark::problem::check::check(&self.problem).expect("well formed");
        let sweep = rows::count(&self.problem, 2, 4, &Budget::unlimited()).expect("no budget is set");
        assert_eq!(sweep.count, count);
        assert_eq!(sweep.solutions.len() as u64, count.min(4));
        assert!(sweep.solutions.iter().all(|solution| self.problem.holds(solution)));
        let numbers: Vec<_> = sweep.solutions.iter().map(|solution| solution.to_number()).collect();
        assert!(numbers.windows(2).all(|pair| pair[0] < pair[1]), "in increasing order");
        if self.problem.bit_count() <= 20 {
            let searched: Vec<BitId> = self.problem.bits().rev().collect();
            let table = rows::truth(&self.problem, &searched);
            assert_eq!(table.iter().map(|word| u64::from(word.count_ones())).sum::<u64>(), count);
        }
    }
}

/// A000170: queens that do not attack each other.
#[test]
fn queens() {
    for (n, count) in [(4, 2), (5, 10), (6, 4), (7, 40)] {
        let mut model = Model::default();
        let columns = model.integers(n, 1, n as i64);
        let (up, down) = (model.sloped(&columns, 1), model.sloped(&columns, -1));
        [&columns, &up, &down].into_iter().for_each(|items| model.must_differ(items));
        model.has(count);
    }
}

/// A002860: Latin squares.
#[test]
fn latin_squares() {
    let mut model = Model::default();
    let cells = model.integers(9, 1, 3);
    for at in 0..3 {
        model.must_differ(&cells[3 * at..3 * at + 3]);
        model.must_differ(&[cells[at], cells[at + 3], cells[at + 6]]);
    }
    model.has(12);
}

/// A006052: magic squares, eight symmetric ones for each.
#[test]
fn magic_squares() {
    let mut model = Model::default();
    let cells = model.integers(9, 1, 9);
    model.must_differ(&cells);
    for line in [[0, 1, 2], [3, 4, 5], [6, 7, 8], [0, 3, 6], [1, 4, 7], [2, 5, 8], [0, 4, 8], [2, 4, 6]] {
        let sum = model.sum(&line.map(|at| cells[at]));
        let magic = model.equals(sum, 15);
        model.must(magic);
    }
    model.has(8);
}

/// A008404: Costas arrays.
#[test]
fn costas_arrays() {
    let mut model = Model::default();
    let places = model.integers(6, 1, 6);
    model.must_differ(&places);
    for step in 1..6 {
        let pairs: Vec<(ExprId, ExprId)> = (step..6).map(|at| (places[at], places[at - step])).collect();
        let mut differences = Vec::new();
        for (a, b) in pairs {
            let minus = model.problem.exprs.node(Expr::Negate(b));
            differences.push(model.sum(&[a, minus]));
        }
        model.must_differ(&differences);
    }
    model.has(116);
}

/// A000111: zigzag permutations (computed for this project by exhaustive search; the number of the sequence is from
/// memory).
#[test]
fn zigzag_permutations() {
    let mut model = Model::default();
    let places = model.integers(7, 1, 7);
    model.must_differ(&places);
    for at in 1..7 {
        let (a, b) = if at % 2 == 1 { (at - 1, at) } else { (at, at - 1) };
        let step = model.less(places[a], places[b]);
        model.must(step);
    }
    model.has(272);
}

/// A001499: 0-1 matrices with two ones in every row and column.
#[test]
fn matrices_with_line_sums_of_two() {
    for (n, count) in [(4, 90), (5, 2040)] {
        let mut model = Model::default();
        let cells = model.truths(n * n);
        for line in 0..n {
            let column: Vec<ExprId> = (0..n).map(|at| cells[n * at + line]).collect();
            model.must_count(&cells[n * line..n * line + n], 2);
            model.must_count(&column, 2);
        }
        model.has(count);
    }
}

/// A006506: no two ones side by side, as clauses.
#[test]
fn independent_sets_of_grids() {
    for (n, count) in [(3, 63), (4, 1234), (5, 55447)] {
        let mut model = Model::default();
        model.truths(n * n);
        for at in 0..n * n {
            if at % n + 1 < n {
                model.clause(&[(at, false), (at + 1, false)]);
            }
            if at + n < n * n {
                model.clause(&[(at, false), (at + n, false)]);
            }
        }
        model.has(count);
    }
}

/// A004003: domino tilings of the square of side 4, one truth for each place of a domino.
#[test]
fn domino_tilings() {
    let mut model = Model::default();
    let places: Vec<(usize, usize)> = (0..16)
        .flat_map(|at| [(at % 4 < 3).then_some((at, at + 1)), (at < 12).then_some((at, at + 4))])
        .flatten()
        .collect();
    let laid = model.truths(places.len());
    for cell in 0..16 {
        let covers = |&&(at, _): &&(usize, (usize, usize))| places[at].0 == cell || places[at].1 == cell;
        let all: Vec<(usize, (usize, usize))> = places.iter().copied().enumerate().collect();
        let covering: Vec<ExprId> = all.iter().filter(covers).map(|&(at, _)| laid[at]).collect();
        model.must_count(&covering, 1);
    }
    model.has(36);
}

/// A030128: Steiner triple systems on seven points, one truth for each of 35 triples.
#[test]
fn steiner_triple_systems() {
    let mut model = Model::default();
    let triples: Vec<[usize; 3]> =
        (0..7).flat_map(|a| (0..a).flat_map(move |b| (0..b).map(move |c| [a, b, c]))).collect();
    let chosen = model.truths(triples.len());
    for a in 0..7 {
        for b in 0..a {
            let holds = |triple: &[usize; 3]| triple.contains(&a) && triple.contains(&b);
            let with: Vec<ExprId> =
                triples.iter().zip(&chosen).filter(|(triple, _)| holds(triple)).map(|(_, &chosen)| chosen).collect();
            model.must_count(&with, 1);
        }
    }
    model.has(30);
}

/// Pythagorean triples a^2 + b^2 = c^2 with 1 <= a <= b and c <= 31: eleven of them (from memory; a loop over a and b
/// in this test counts them again).
#[test]
fn pythagorean_triples() {
    let square = |c: i64| (1..32).any(|root| root * root == c);
    let again = (1..32).flat_map(|a| (a..32).map(move |b| (a, b)));
    assert_eq!(again.filter(|(a, b)| square(a * a + b * b) && a * a + b * b <= 31 * 31).count(), 11);
    let mut model = Model::default();
    let sides = model.integers(3, 1, 31);
    let squares: Vec<ExprId> = sides.iter().map(|&side| model.problem.exprs.node(Expr::Product(side, side))).collect();
    let sum = model.sum(&squares[..2]);
    let right = model.problem.exprs.node(Expr::Compare(Compare::Eq, sum, squares[2]));
    let ordered = model.problem.exprs.node(Expr::Compare(Compare::Le, sides[0], sides[1]));
    model.must(right);
    model.must(ordered);
    model.has(11);
}
