//! From statements to a problem.

use super::fault::{Fault, Kind};
use super::parse::{Body, Literal, Relation, Row, Term};
use crate::id::Id;
use crate::problem::{Compare, Domain, Expr, ExprId, Objective, Origin, Problem, Sense, VarId};
use crate::span::{FileId, Span};

/// The problem, and the sums that do not fit.
pub(super) fn build(file: FileId, body: &Body) -> (Problem, Vec<Fault>) {
    let mut problem = Problem::new();
    for var in 1..=body.vars {
        problem.add_var(format!("x{var}"), Domain::YesNo, None);
    }
    let mut builder = Builder { file, problem, literals: vec![[None; 2]; body.vars as usize], faults: Vec::new() };
    if let Some(goal) = &body.goal
        && builder.fits(&goal.terms, &goal.at)
    {
        let span = Span::new(file, goal.at.start, goal.at.end);
        let expr = builder.sum(&goal.terms, span);
        let sense = if goal.most { Sense::Most } else { Sense::Least };
        builder.problem.objective = Some(Objective { sense, expr, span: Some(span) });
    }
    for row in &body.rows {
        builder.row(row);
    }
    (builder.problem, builder.faults)
}

struct Builder {
    file: FileId,
    problem: Problem,
    /// The nodes of a variable and of its negation.
    literals: Vec<[Option<ExprId>; 2]>,
    faults: Vec<Fault>,
}

impl Builder {
    /// Whether the values of the sum fit 64 bits, on either side of 0.
    fn fits(&mut self, terms: &[Term], at: &std::ops::Range<usize>) -> bool {
        let size: u128 = terms.iter().map(|term| u128::from(term.weight.unsigned_abs())).sum();
        let fits = size <= i64::MAX as u128;
        if !fits {
            self.faults.push(Fault { at: at.clone(), kind: Kind::WideSum });
        }
        fits
    }

    fn row(&mut self, row: &Row) {
        if !self.fits(&row.terms, &row.at) {
            return;
        }
        let span = Span::new(self.file, row.at.start, row.at.end);
        let plain = row.terms.iter().all(|term| term.weight == 1);
        let expr = if plain && row.relation == Relation::AtLeast && row.bound == 1 {
            let items: Vec<_> = row.terms.iter().map(|term| self.product(term, span)).collect();
            let list = self.problem.exprs.list(&items);
            self.problem.exprs.add(Expr::Some(list), Some(span))
        } else {
            let sum = self.sum(&row.terms, span);
            let bound = self.problem.exprs.add(Expr::Number(row.bound), Some(span));
            let compare = match row.relation {
                Relation::AtLeast => Expr::Compare(Compare::Le, bound, sum),
                Relation::Equal => Expr::Compare(Compare::Eq, sum, bound),
                Relation::AtMost => Expr::Compare(Compare::Le, sum, bound),
            };
            self.problem.exprs.add(compare, Some(span))
        };
        self.problem.must(expr, Origin { span: Some(span), bindings: Vec::new() });
    }

    fn sum(&mut self, terms: &[Term], span: Span) -> ExprId {
        let items: Vec<_> = terms.iter().map(|term| self.term(term, span)).collect();
        let list = self.problem.exprs.list(&items);
        self.problem.exprs.add(Expr::Sum(list), Some(span))
    }

    fn term(&mut self, term: &Term, span: Span) -> ExprId {
        let product = self.product(term, span);
        let number = self.problem.exprs.add(Expr::AsNumber(product), Some(span));
        if term.weight == 1 {
            return number;
        }
        let weight = self.problem.exprs.add(Expr::Number(term.weight), Some(span));
        self.problem.exprs.add(Expr::Product(weight, number), Some(span))
    }

    fn product(&mut self, term: &Term, span: Span) -> ExprId {
        let items: Vec<_> = term.literals.iter().map(|&literal| self.literal(literal)).collect();
        if let [one] = items[..] {
            return one;
        }
        let list = self.problem.exprs.list(&items);
        self.problem.exprs.add(Expr::All(list), Some(span))
    }

    fn literal(&mut self, Literal { var, negated }: Literal) -> ExprId {
        let at = var as usize - 1;
        let exprs = &mut self.problem.exprs;
        let [plain, inverse] = &mut self.literals[at];
        let plain = *plain.get_or_insert_with(|| exprs.node(Expr::Var(VarId::new(at))));
        if !negated { plain } else { *inverse.get_or_insert_with(|| exprs.node(Expr::Not(plain))) }
    }
}
