//! Counting by depth-first search over the variables: a second reading of expressions, written for the tests, that
//! shares nothing with the evaluator of the library. A constraint is tried as soon as its last variable has a value.

use tallymark::id::Id;
use tallymark::problem::{Compare, Domain, Expr, ExprId, Problem};

/// A constraint with the expressions it is made of, operands first.
struct Part {
    nodes: Vec<ExprId>,
    root: ExprId,
}

/// The number of solutions of a problem without clauses.
pub(super) fn solutions(problem: &Problem) -> u64 {
    assert!(problem.clauses.is_empty() && problem.shown.is_none(), "the language makes no clauses");
    let mut by_last: Vec<Vec<Part>> = (0..=problem.vars().len()).map(|_| Vec::new()).collect();
    for constraint in &problem.constraints {
        let nodes = nodes(problem, constraint.expr);
        let vars = nodes.iter().filter_map(|&id| match problem.exprs.get(id) {
            Expr::Var(var) => Some(var.index() + 1),
            _ => None,
        });
        let last = vars.max().unwrap_or(0);
        by_last[last].push(Part { nodes, root: constraint.expr });
    }
    let mut search = Search { problem, by_last, values: Vec::new(), scratch: vec![0; problem.exprs.len()] };
    search.count()
}

fn nodes(problem: &Problem, root: ExprId) -> Vec<ExprId> {
    let mut used = vec![false; root.index() + 1];
    used[root.index()] = true;
    for at in (0..=root.index()).rev() {
        if used[at] {
            problem.exprs.operands(problem.exprs.get(ExprId::new(at))).iter().for_each(|id| used[id.index()] = true);
        }
    }
    (0..used.len()).filter(|&at| used[at]).map(ExprId::new).collect()
}

struct Search<'p> {
    problem: &'p Problem,
    by_last: Vec<Vec<Part>>,
    values: Vec<i64>,
    scratch: Vec<i128>,
}

impl Search<'_> {
    fn count(&mut self) -> u64 {
        let at = self.values.len();
        for part in &self.by_last[at] {
            for &id in &part.nodes {
                self.scratch[id.index()] = value(self.problem, id, &self.values, &self.scratch);
            }
            if self.scratch[part.root.index()] == 0 {
                return 0;
            }
        }
        let Some(var) = self.problem.vars().as_slice().get(at) else { return 1 };
        let (lo, hi) = match var.domain {
            Domain::YesNo => (0, 1),
            Domain::Range { lo, hi } => (lo, hi),
            Domain::Kind(kind) => (0, self.problem.kinds[kind].values.len() as i64 - 1),
        };
        let mut sum = 0;
        for value in lo..=hi {
            self.values.push(value);
            sum += self.count();
            self.values.pop();
        }
        sum
    }
}

fn value(problem: &Problem, id: ExprId, values: &[i64], known: &[i128]) -> i128 {
    let of = |id: ExprId| known[id.index()];
    let all = |list| problem.exprs.items(list).iter().map(|&id| known[id.index()]).collect::<Vec<i128>>();
    let truth = i128::from;
    match problem.exprs.get(id) {
        Expr::Truth(yes) => truth(yes),
        Expr::Number(number) => number.into(),
        Expr::Var(var) => values[var.index()].into(),
        Expr::Not(a) => truth(of(a) == 0),
        Expr::All(list) => truth(!all(list).contains(&0)),
        Expr::Some(list) => truth(all(list).contains(&1)),
        Expr::Odd(list) => all(list).into_iter().fold(0, |parity, one| parity ^ one),
        Expr::Compare(Compare::Eq, a, b) => truth(of(a) == of(b)),
        Expr::Compare(Compare::Ne, a, b) => truth(of(a) != of(b)),
        Expr::Compare(Compare::Lt, a, b) => truth(of(a) < of(b)),
        Expr::Compare(Compare::Le, a, b) => truth(of(a) <= of(b)),
        Expr::Different(list) => {
            let all = all(list);
            truth((0..all.len()).all(|i| (0..i).all(|j| all[i] != all[j])))
        }
        Expr::OneOf(list, table) => {
            let tuple = all(list);
            let mut rows = problem.exprs.table(table).rows();
            truth(rows.any(|row| (0..row.len()).all(|at| i128::from(row[at]) == tuple[at])))
        }
        Expr::AsNumber(a) => of(a),
        Expr::Count(list) => all(list).iter().filter(|&&one| one == 1).count() as i128,
        Expr::Sum(list) => all(list).iter().sum(),
        Expr::Product(a, b) => of(a) * of(b),
        Expr::Negate(a) => 0 - of(a),
        Expr::Abs(a) => of(a).max(-of(a)),
        Expr::Quotient(a, by) => floor(of(a), by.into()),
        Expr::Remainder(a, by) => of(a) - floor(of(a), by.into()) * i128::from(by),
        Expr::Smallest(list) => all(list).into_iter().fold(i128::MAX, i128::min),
        Expr::Largest(list) => all(list).into_iter().fold(i128::MIN, i128::max),
        Expr::Choose(condition, a, b) => {
            if of(condition) == 1 {
                of(a)
            } else {
                of(b)
            }
        }
        Expr::Element(index, list) => all(list)[of(index) as usize],
    }
}

/// The largest integer that times `by` is at most `a`.
fn floor(a: i128, by: i128) -> i128 {
    let towards_zero = a / by;
    if towards_zero * by > a { towards_zero - 1 } else { towards_zero }
}
