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
        let fits = fit(terms);
        if !fits {
            self.faults.push(Fault { at: at.clone(), kind: Kind::WideSum });
        }
        fits
    }

    fn row(&mut self, row: &Row) {
        let lowered = if fit(&row.terms) { None } else { lowered(row) };
        let row = lowered.as_ref().unwrap_or(row);
        if !self.fits(&row.terms, &row.at) {
            return;
        }
        let span = Span::new(self.file, row.at.start, row.at.end);
        let plain = row.terms.iter().all(|term| term.weight == 1);
        let expr = if plain && row.relation == Relation::AtLeast && row.bound == 1 {
            let items: Vec<_> = row.terms.iter().map(|term| self.product(term, span)).collect();
            let list = self.problem.exprs.list(&items);
            self.problem.exprs.add(Expr::Some(list), Some(span))
        } else if let Ok(bound) = i64::try_from(row.bound) {
            let sum = self.sum(&row.terms, span);
            let bound = self.problem.exprs.add(Expr::Number(bound), Some(span));
            let compare = match row.relation {
                Relation::AtLeast => Expr::Compare(Compare::Le, bound, sum),
                Relation::Equal => Expr::Compare(Compare::Eq, sum, bound),
                Relation::AtMost => Expr::Compare(Compare::Le, sum, bound),
            };
            self.problem.exprs.add(compare, Some(span))
        } else {
            // The sum fits 64 bits and the bound does not, so its sign decides.
            let holds = match row.relation {
                Relation::AtLeast => row.bound < 0,
                Relation::Equal => false,
                Relation::AtMost => row.bound > 0,
            };
            self.problem.exprs.add(Expr::Truth(holds), Some(span))
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
        let weight = i64::try_from(term.weight).expect("the sum fits 64 bits");
        let weight = self.problem.exprs.add(Expr::Number(weight), Some(span));
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

/// Whether the sizes of the weights add up to less than 2^63.
fn fit(terms: &[Term]) -> bool {
    terms.iter().map(|term| term.weight.unsigned_abs()).sum::<u128>() <= i64::MAX as u128
}

/// The same constraint with smaller weights (saturation, as in every pseudo-Boolean solver). Seen from the least value
/// of the sum, a term adds the size of its weight or nothing, and `need` is what has to be added: more than that at
/// once makes no difference. For `<=` all signs are turned. An equation stays as it is.
fn lowered(row: &Row) -> Option<Row> {
    let sign = match row.relation {
        Relation::AtLeast => 1,
        Relation::AtMost => -1,
        Relation::Equal => return None,
    };
    let least = |terms: &[Term]| terms.iter().map(|term| (sign * term.weight).min(0)).sum::<i128>();
    let need = (sign * row.bound - least(&row.terms)).max(0);
    let lower = |term: &Term| Term { weight: term.weight.clamp(-need, need), literals: term.literals.clone() };
    let terms: Vec<Term> = row.terms.iter().map(lower).collect();
    let bound = sign * (least(&terms) + need);
    Some(Row { terms, relation: row.relation, bound, at: row.at.clone() })
}
