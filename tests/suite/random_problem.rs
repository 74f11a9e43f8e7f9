//! Random problems that every reader could have built: they pass `problem::check`, have at most [`MAX_BITS`] bits, and
//! over many seeds use every kind of expression, domains that do not fill their codes, and values of 64 bits.

use tallymark::id::Id;
use tallymark::problem::check::{check, ranges};
use tallymark::problem::{BitId, BitLit, Compare, Domain, Expr, ExprId, Kind, Origin, Problem, Table, Type};
use tallymark::random::SplitMix64;

/// The most bits a random problem has.
pub(crate) const MAX_BITS: usize = 10;

/// The random problem of a seed: the same one for ever.
pub(crate) fn random_problem(seed: u64) -> Problem {
    let mut grower = Grower { random: SplitMix64::new(seed), problem: Problem::new(), truths: vec![], numbers: vec![] };
    grower.leaves();
    let steps = 4 + grower.random.below(14);
    for _ in 0..steps {
        grower.step();
    }
    grower.constraints();
    check(&grower.problem).expect("random problems are well formed");
    grower.problem
}

struct Grower {
    random: SplitMix64,
    problem: Problem,
    truths: Vec<ExprId>,
    numbers: Vec<ExprId>,
}

impl Grower {
    fn leaves(&mut self) {
        let names = ["bow", "stern", "keel"].map(Into::into).to_vec();
        let kind = self.problem.kinds.push(Kind { name: "Port".into(), values: names });
        let wanted = 1 + self.random.below(MAX_BITS as u64) as usize;
        while self.problem.bit_count() < wanted {
            let lo = self.random.below(9) as i64 - 5;
            let domain = match self.random.below(8) {
                0..3 => Domain::YesNo,
                3..6 => Domain::Range { lo, hi: lo + self.random.below(8) as i64 },
                6 => Domain::Kind(kind),
                _ if self.random.coin() => Domain::Range { lo: i64::MIN, hi: i64::MIN + 5 },
                _ => Domain::Range { lo: i64::MAX - 3, hi: i64::MAX },
            };
            if self.problem.bit_count() + 3 > MAX_BITS && domain != Domain::YesNo {
                continue;
            }
            let name = format!("x{}", self.problem.vars().len());
            let var = self.problem.add_var(name, domain, None);
            let leaf = self.problem.exprs.node(Expr::Var(var));
            if domain == Domain::YesNo { self.truths.push(leaf) } else { self.numbers.push(leaf) }
        }
        let number = self.random.below(12) as i64 - 4;
        let number = if self.random.below(8) == 0 { i64::MAX - number.abs() } else { number };
        self.numbers.push(self.problem.exprs.node(Expr::Number(number)));
        let truth = self.random.coin();
        self.truths.push(self.problem.exprs.node(Expr::Truth(truth)));
    }

    /// Adds one expression, unless its range would not fit.
    fn step(&mut self) {
        let before = self.problem.clone();
        let expr = self.draw();
        let id = self.problem.exprs.node(expr);
        if !ranges(&self.problem).1.is_empty() {
            self.problem = before;
            return;
        }
        match self.problem.types()[id] {
            Type::YesNo => self.truths.push(id),
            Type::Number => self.numbers.push(id),
        }
    }

    fn draw(&mut self) -> Expr {
        let (q, n) = (self.truth(), self.number());
        match self.random.below(21) {
            0 => Expr::Not(q),
            1 => Expr::All(self.truth_list(0)),
            2 => Expr::Some(self.truth_list(0)),
            3 => Expr::Odd(self.truth_list(0)),
            4 | 5 => Expr::Compare([Compare::Eq, Compare::Ne][self.random.below(2) as usize], n, self.number()),
            6 | 7 => Expr::Compare([Compare::Lt, Compare::Le][self.random.below(2) as usize], n, self.number()),
            8 => Expr::Different(self.number_list(0)),
            9 => self.one_of(),
            10 => Expr::AsNumber(q),
            11 => Expr::Count(self.truth_list(0)),
            12 => Expr::Sum(self.number_list(0)),
            13 => Expr::Product(n, self.number()),
            14 => Expr::Negate(n),
            15 => Expr::Abs(n),
            16 => Expr::Quotient(n, self.divisor()),
            17 => Expr::Remainder(n, self.divisor()),
            18 if self.random.coin() => Expr::Smallest(self.number_list(1)),
            18 => Expr::Largest(self.number_list(1)),
            19 if self.random.coin() => Expr::Choose(q, n, self.number()),
            19 => Expr::Choose(q, self.truth(), self.truth()),
            _ => self.element(n),
        }
    }

    fn one_of(&mut self) -> Expr {
        let list = self.number_list(1);
        let rows =
            (0..self.random.below(5)).map(|_| (0..list.len()).map(|_| self.random.below(6) as i64 - 2).collect());
        let rows = rows.collect();
        Expr::OneOf(list, self.problem.exprs.add_table(Table::new(list.len(), rows)))
    }

    /// An element of a row, at the remainder of a number by the length, which always lies inside.
    fn element(&mut self, n: ExprId) -> Expr {
        let list = if self.random.coin() { self.truth_list(1) } else { self.number_list(1) };
        let index = self.problem.exprs.node(Expr::Remainder(n, list.len() as i64));
        Expr::Element(index, list)
    }

    fn constraints(&mut self) {
        for _ in 0..1 + self.random.below(3) {
            // The last expressions are the deepest.
            let back = self.random.below(self.truths.len().min(4) as u64) as usize;
            let expr = self.truths[self.truths.len() - 1 - back];
            self.problem.must(expr, Origin::default());
        }
        for _ in 0..self.random.below(4) {
            for _ in 0..self.random.below(4) + u64::from(self.random.below(16) != 0) {
                let bit = BitId::new(self.random.below(self.problem.bit_count() as u64) as usize);
                self.problem.clauses.push_lit(BitLit::new(bit, self.random.coin()));
            }
            self.problem.clauses.end_clause();
        }
    }

    fn truth(&mut self) -> ExprId {
        self.truths[self.random.below(self.truths.len() as u64) as usize]
    }

    fn number(&mut self) -> ExprId {
        self.numbers[self.random.below(self.numbers.len() as u64) as usize]
    }

    fn truth_list(&mut self, least: u64) -> tallymark::problem::ExprList {
        let items: Vec<ExprId> = (0..least + self.random.below(6)).map(|_| self.truth()).collect();
        self.problem.exprs.list(&items)
    }

    fn number_list(&mut self, least: u64) -> tallymark::problem::ExprList {
        let items: Vec<ExprId> = (0..least + self.random.below(4)).map(|_| self.number()).collect();
        self.problem.exprs.list(&items)
    }

    fn divisor(&mut self) -> i64 {
        match self.random.below(8) {
            0 => i64::MAX - self.random.below(4) as i64,
            _ => 1 + self.random.below(7) as i64,
        }
    }
}

/// Every kind of expression occurs, and neither "always" nor "never" is the usual answer.
#[test]
fn random_problems_use_every_kind_of_expression() {
    let mut seen = std::collections::BTreeMap::new();
    let mut mixed = 0;
    for seed in 0..300 {
        let problem = random_problem(seed);
        assert!(problem.bit_count() <= MAX_BITS);
        for (_, expr) in problem.exprs.iter() {
            let name = format!("{expr:?}");
            let name = name[..name.find('(').expect("every kind has a field")].to_owned();
            *seen.entry(name).or_insert(0) += 1;
        }
        let holds = |number| problem.holds(&tallymark::problem::Bits::from_number(number, problem.bit_count()));
        let count = (0..1u128 << problem.bit_count()).filter(|&number| holds(number)).count();
        mixed += usize::from(count > 0 && count < 1 << problem.bit_count());
    }
    assert_eq!(seen.len(), 22, "{seen:?}");
    assert!(seen.values().all(|&times| times >= 10), "{seen:?}");
    assert!(mixed >= 100, "{mixed} of 300 problems have some solutions, but not all strings");
}
