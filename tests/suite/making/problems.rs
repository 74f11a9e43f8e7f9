//! Random small problems of every kind of expression.

use tallymark::problem::{Compare, Domain, Expr, ExprId, Kind, Origin, Problem, Table, check::check};
use tallymark::random::SplitMix64;

/// A problem of at most `max_bits` bits that passes the checker.
pub(crate) fn random_problem(seed: u64, max_bits: usize) -> Problem {
    let mut random = SplitMix64::new(seed);
    loop {
        let mut worker = Worker { problem: Problem::new(), random: &mut random };
        worker.fill();
        let problem = worker.problem;
        if (1..=max_bits).contains(&problem.bit_count()) && check(&problem).is_ok() {
            return problem;
        }
    }
}

struct Worker<'a> {
    problem: Problem,
    random: &'a mut SplitMix64,
}

impl Worker<'_> {
    fn fill(&mut self) {
        let values = ["red", "green", "blue"].map(Box::from).to_vec();
        let kind = self.problem.kinds.push(Kind { name: "Hue".into(), values });
        for at in 0..2 + self.random.below(4) {
            let lo = self.random.below(9) as i64 - 4;
            let domain = match self.random.below(5) {
                0 | 1 => Domain::YesNo,
                2 => Domain::Kind(kind),
                _ => Domain::Range { lo, hi: lo + self.random.below(9) as i64 },
            };
            self.problem.add_var(format!("v{at}"), domain, None);
        }
        for _ in 0..1 + self.random.below(3) {
            let expr = self.truth(3);
            self.problem.must(expr, Origin::default());
        }
    }

    fn truths(&mut self, depth: usize) -> Vec<ExprId> {
        (0..self.random.below(4)).map(|_| self.truth(depth)).collect()
    }

    fn numbers(&mut self, depth: usize) -> Vec<ExprId> {
        (0..1 + self.random.below(3)).map(|_| self.number(depth)).collect()
    }

    fn node(&mut self, expr: Expr) -> ExprId {
        self.problem.exprs.node(expr)
    }

    fn variable(&mut self, yes_no: bool) -> Option<ExprId> {
        let fitting: Vec<_> = self
            .problem
            .vars()
            .iter()
            .filter(|(_, v)| (v.domain == Domain::YesNo) == yes_no)
            .map(|(id, _)| id)
            .collect();
        let at = self.random.below(fitting.len().max(1) as u64) as usize;
        fitting.get(at).map(|&var| self.problem.exprs.node(Expr::Var(var)))
    }

    fn truth(&mut self, depth: usize) -> ExprId {
        if depth == 0 || self.random.below(8) == 0 {
            let constant = self.random.coin();
            return self.variable(true).unwrap_or_else(|| self.node(Expr::Truth(constant)));
        }
        let deeper = depth - 1;
        match self.random.below(11) {
            0 => {
                let a = self.truth(deeper);
                self.node(Expr::Not(a))
            }
            1..=3 => {
                let items = self.truths(deeper);
                let make = [Expr::All, Expr::Some, Expr::Odd][self.random.below(3) as usize];
                self.problem.exprs.over(make, &items)
            }
            4..=7 => {
                let compare = [Compare::Eq, Compare::Ne, Compare::Lt, Compare::Le][self.random.below(4) as usize];
                let (a, b) = (self.number(deeper), self.number(deeper));
                self.node(Expr::Compare(compare, a, b))
            }
            8 => {
                let items = self.numbers(deeper);
                self.problem.exprs.over(Expr::Different, &items)
            }
            9 => {
                let items = self.numbers(deeper);
                let mut rows = Vec::new();
                for _ in 0..1 + self.random.below(8) {
                    rows.push(items.iter().map(|_| self.random.below(8) as i64 - 3).collect());
                }
                let table = self.problem.exprs.add_table(Table::new(items.len(), rows));
                self.problem.exprs.over(|list| Expr::OneOf(list, table), &items)
            }
            _ => {
                let (condition, a, b) = (self.truth(deeper), self.truth(deeper), self.truth(deeper));
                self.node(Expr::Choose(condition, a, b))
            }
        }
    }

    fn number(&mut self, depth: usize) -> ExprId {
        if depth == 0 || self.random.below(6) == 0 {
            let constant = self.random.below(9) as i64 - 4;
            let picked = if self.random.below(4) == 0 { None } else { self.variable(false) };
            return picked.unwrap_or_else(|| self.node(Expr::Number(constant)));
        }
        let deeper = depth - 1;
        match self.random.below(13) {
            0 => {
                let a = self.truth(deeper);
                self.node(Expr::AsNumber(a))
            }
            1 => {
                let items = self.truths(deeper);
                self.problem.exprs.over(Expr::Count, &items)
            }
            2 | 3 => {
                let items = self.numbers(deeper);
                self.problem.exprs.over(Expr::Sum, &items)
            }
            4 => {
                let (a, b) = (self.number(deeper), self.number(deeper));
                self.node(Expr::Product(a, b))
            }
            5 => {
                let a = self.number(deeper);
                self.node(Expr::Negate(a))
            }
            6 => {
                let a = self.number(deeper);
                self.node(Expr::Abs(a))
            }
            7 | 8 => {
                let (a, by) = (self.number(deeper), 1 + self.random.below(6) as i64);
                let expr = if self.random.coin() { Expr::Quotient(a, by) } else { Expr::Remainder(a, by) };
                self.node(expr)
            }
            9 => {
                let items = self.numbers(deeper);
                let make = if self.random.coin() { Expr::Smallest } else { Expr::Largest };
                self.problem.exprs.over(make, &items)
            }
            10 => {
                let (condition, a, b) = (self.truth(deeper), self.number(deeper), self.number(deeper));
                self.node(Expr::Choose(condition, a, b))
            }
            _ => self.element(deeper),
        }
    }

    /// An element of a row, at an index that is kept inside by a remainder.
    fn element(&mut self, depth: usize) -> ExprId {
        let items: Vec<ExprId> = (0..1 + self.random.below(6)).map(|_| self.number(depth)).collect();
        let any = self.number(depth);
        let index = self.node(Expr::Remainder(any, items.len() as i64));
        self.problem.exprs.over(|list| Expr::Element(index, list), &items)
    }
}
