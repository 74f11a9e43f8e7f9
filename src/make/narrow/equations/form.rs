//! Constraints as equations: a sum of weighted formulas that is 0, or a parity that is even.

use rustc_hash::FxHashMap;

use crate::id::Id;
use crate::places::Formula;
use crate::problem::{BitId, Compare, Domain, Expr, ExprId, ExprList, Problem, VarId};

/// The most terms of a sum, and the most parts of a formula in it.
const MAX_TERMS: usize = 1 << 10;
/// The deepest expression that is read.
const MAX_DEPTH: usize = 64;

/// What a constraint says.
#[derive(Clone, PartialEq, Eq, Debug)]
pub(super) enum Equation {
    /// The sum is 0.
    Sum(Sum),
    /// The number of formulas that hold is even, or odd.
    Parity(Vec<Formula>, bool),
}

/// A whole number: a constant and weighted formulas, each once.
#[derive(Clone, PartialEq, Eq, Debug, Default)]
pub(super) struct Sum {
    pub(super) constant: i128,
    pub(super) terms: Vec<(i128, Formula)>,
}

impl Equation {
    /// The variables with a bit that stands alone in a term, by number.
    pub(super) fn variables(&self, problem: &Problem) -> Vec<VarId> {
        let var = |formula: &Formula| match formula {
            Formula::Bit(bit) => Some(problem.var_of(*bit).0),
            _ => None,
        };
        let mut vars: Vec<VarId> = match self {
            Equation::Sum(sum) => sum.terms.iter().filter_map(|(_, formula)| var(formula)).collect(),
            Equation::Parity(parts, _) => parts.iter().filter_map(var).collect(),
        };
        vars.sort_unstable();
        vars.dedup();
        vars
    }
}

/// The equation that an expression is, where it is one of the shapes that are read.
pub(super) fn equation(problem: &Problem, id: ExprId) -> Option<Equation> {
    let reader = Reader { problem };
    match problem.exprs.get(id) {
        Expr::Compare(Compare::Eq, a, b) => {
            let mut sum = reader.number(a, 0)?;
            sum.add(-1, reader.number(b, 0)?);
            Some(Equation::Sum(sum.tidy()?))
        }
        Expr::Odd(list) => Some(parity(reader.truths(list, 0)?, true)),
        Expr::Not(inner) => match problem.exprs.get(inner) {
            Expr::Odd(list) => Some(parity(reader.truths(list, 0)?, false)),
            _ => None,
        },
        _ => None,
    }
}

/// A parity of formulas that are neither negated nor constant.
fn parity(parts: Vec<Formula>, mut odd: bool) -> Equation {
    let plain = |part: Formula| match part {
        Formula::Not(inner) => {
            odd = !odd;
            Some(*inner)
        }
        Formula::Constant(value) => {
            odd ^= value;
            None
        }
        part => Some(part),
    };
    let parts = parts.into_iter().filter_map(plain).collect();
    Equation::Parity(parts, odd)
}

impl Sum {
    fn constant(constant: i64) -> Self {
        Self { constant: constant.into(), terms: Vec::new() }
    }

    fn add(&mut self, by: i128, other: Sum) {
        self.constant += by * other.constant;
        self.terms.extend(other.terms.into_iter().map(|(weight, formula)| (by * weight, formula)));
    }

    /// Equal formulas become one term; none where the sum is too long or its numbers are too large.
    fn tidy(self) -> Option<Self> {
        let mut place: FxHashMap<Formula, usize> = FxHashMap::default();
        let mut terms: Vec<(i128, Formula)> = Vec::with_capacity(self.terms.len());
        for (weight, formula) in self.terms {
            match place.get(&formula) {
                Some(&at) => terms[at].0 += weight,
                None => {
                    place.insert(formula.clone(), terms.len());
                    terms.push((weight, formula));
                }
            }
        }
        terms.retain(|&(weight, _)| weight != 0);
        let is_small = |number: i128| number.unsigned_abs() < 1 << 48;
        let fits = terms.len() <= MAX_TERMS && is_small(self.constant) && terms.iter().all(|term| is_small(term.0));
        fits.then_some(Self { constant: self.constant, terms })
    }
}

struct Reader<'a> {
    problem: &'a Problem,
}

impl Reader<'_> {
    fn items(&self, list: ExprList) -> &[ExprId] {
        self.problem.exprs.items(list)
    }

    fn number(&self, id: ExprId, depth: usize) -> Option<Sum> {
        if depth > MAX_DEPTH {
            return None;
        }
        let next = depth + 1;
        match self.problem.exprs.get(id) {
            Expr::Number(number) => Some(Sum::constant(number)),
            Expr::Var(var) => Some(self.variable(var)),
            Expr::AsNumber(truth) => Some(held(self.truth(truth, next)?, 1)),
            Expr::Count(list) => self.sum(list, |id| Some(held(self.truth(id, next)?, 1))),
            Expr::Sum(list) => self.sum(list, |id| self.number(id, next)),
            Expr::Negate(a) => {
                let mut sum = Sum::default();
                sum.add(-1, self.number(a, next)?);
                Some(sum)
            }
            Expr::Product(a, b) => product(&self.number(a, next)?, &self.number(b, next)?),
            Expr::Choose(condition, yes, no) => {
                let condition = self.truth(condition, next)?;
                let (yes, mut sum) = (self.number(yes, next)?, self.number(no, next)?);
                let mut difference = yes;
                difference.add(-1, sum.clone());
                sum.add(1, product(&held(condition, 1), &difference.tidy()?)?);
                sum.tidy()
            }
            _ => None,
        }
    }

    fn sum(&self, list: ExprList, mut of: impl FnMut(ExprId) -> Option<Sum>) -> Option<Sum> {
        let mut sum = Sum::default();
        for &id in self.items(list) {
            sum.add(1, of(id)?);
            if sum.terms.len() > 2 * MAX_TERMS {
                return None;
            }
        }
        sum.tidy()
    }

    fn variable(&self, var: VarId) -> Sum {
        let var = &self.problem.vars()[var];
        let base = if let Domain::Range { lo, .. } = var.domain { lo } else { 0 };
        let bit = |at: u8| (1i128 << at, Formula::Bit(BitId::new(var.first_bit.index() + usize::from(at))));
        Sum { constant: base.into(), terms: (0..var.width).map(bit).collect() }
    }

    fn truths(&self, list: ExprList, depth: usize) -> Option<Vec<Formula>> {
        self.items(list).iter().map(|&id| self.truth(id, depth + 1)).collect()
    }

    fn truth(&self, id: ExprId, depth: usize) -> Option<Formula> {
        if depth > MAX_DEPTH {
            return None;
        }
        match self.problem.exprs.get(id) {
            Expr::Truth(value) => Some(Formula::Constant(value)),
            Expr::Var(var) => Some(Formula::Bit(self.problem.vars()[var].first_bit)),
            Expr::Not(a) => Some(match self.truth(a, depth + 1)? {
                Formula::Not(inner) => *inner,
                formula => Formula::Not(Box::new(formula)),
            }),
            Expr::All(list) => Some(Formula::And(self.truths(list, depth)?)),
            Expr::Some(list) => Some(Formula::Or(self.truths(list, depth)?)),
            Expr::Odd(list) => Some(Formula::Xor(self.truths(list, depth)?)),
            _ => None,
        }
    }
}

/// The weight where the formula holds, else 0: a negated bit is 1 less the bit.
fn held(formula: Formula, weight: i128) -> Sum {
    match formula {
        Formula::Constant(value) => Sum { constant: if value { weight } else { 0 }, terms: Vec::new() },
        Formula::Not(inner) => {
            let mut sum = held(*inner, -weight);
            sum.constant += weight;
            sum
        }
        formula => Sum { constant: 0, terms: vec![(weight, formula)] },
    }
}

fn product(a: &Sum, b: &Sum) -> Option<Sum> {
    if (a.terms.len() + 1) * (b.terms.len() + 1) > MAX_TERMS {
        return None;
    }
    let mut sum = Sum { constant: a.constant * b.constant, terms: Vec::new() };
    sum.terms.extend(a.terms.iter().map(|(weight, formula)| (weight * b.constant, formula.clone())));
    sum.terms.extend(b.terms.iter().map(|(weight, formula)| (weight * a.constant, formula.clone())));
    for (p, one) in &a.terms {
        for (q, other) in &b.terms {
            let both = if one == other { one.clone() } else { Formula::And(vec![one.clone(), other.clone()]) };
            sum.terms.push((p * q, both));
        }
    }
    sum.tidy()
}
