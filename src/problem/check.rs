//! What every reader of problems must establish and every other room relies on.
//!
//! - P1: operands have smaller ids than their users; variables and tables exist.
//! - P2: operands have the types that [`Expr`] states; constraints are yes/no, objectives are numbers.
//! - P3: `Smallest`, `Largest` and `Element` have operands; divisors are positive; rows of a table are as wide as its tuple.
//! - P4: the range of every expression fits 64 bits.
//! - P5: an index never falls outside its row.
//! - P6: clauses use bits of the problem; shown bits are in increasing order and exist.
//! - P7: a kind has at least one value, a range at least one number.
//!
//! P4 and P5 are decided by interval arithmetic: the range of an expression follows from the ranges of its operands.

use thiserror::Error;

use crate::id::{Id, IdVec};
use crate::problem::{Compare, Domain, Expr, ExprId, ExprList, Problem, Type};

/// The least and the largest value that interval arithmetic allows.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub struct Interval {
    /// The least value.
    pub lo: i128,
    /// The largest value.
    pub hi: i128,
}

/// A broken invariant.
#[derive(Clone, PartialEq, Eq, Debug, Error)]
pub enum Fault {
    /// P4.
    #[error("the values of {expr} reach from {} to {}, beyond 64 bits", range.lo, range.hi)]
    TooWide {
        /// The expression.
        expr: ExprId,
        /// Its range.
        range: Interval,
    },
    /// P5.
    #[error("the index of {expr} reaches from {} to {}, its row has {len} elements", range.lo, range.hi)]
    OutsideRow {
        /// The `Element` expression.
        expr: ExprId,
        /// The range of its index.
        range: Interval,
        /// The length of its row.
        len: usize,
    },
    /// P1, P2, P3, P6, P7: a reader built a problem that means nothing; a fault of the reader, not of its input.
    #[error("malformed problem: {0}")]
    Malformed(String),
}

/// All broken invariants, in the order of the arena. Expressions built on a faulty one are not reported again.
pub fn check(problem: &Problem) -> Result<(), Vec<Fault>> {
    if let Err(what) = shape(problem) {
        return Err(vec![Fault::Malformed(what)]);
    }
    let (_, faults) = ranges(problem);
    if faults.is_empty() { Ok(()) } else { Err(faults) }
}

/// The interval of every expression, and the faults of P4 and P5. A faulty expression gets the part of its range that
/// fits, so that one mistake is reported once. The problem's shape (P1 to P3) must be sound.
pub fn ranges(problem: &Problem) -> (IdVec<ExprId, Interval>, Vec<Fault>) {
    let mut ranges: IdVec<ExprId, Interval> = IdVec::new();
    let mut faults = Vec::new();
    for (id, &expr) in problem.exprs.iter() {
        if let Expr::Element(index, list) = expr {
            let range = ranges[index];
            if range.lo < 0 || range.hi >= list.len() as i128 {
                faults.push(Fault::OutsideRow { expr: id, range, len: list.len() });
            }
        }
        let range = interval(problem, expr, &ranges);
        if range.lo < i64::MIN.into() || range.hi > i64::MAX.into() {
            faults.push(Fault::TooWide { expr: id, range });
        }
        let fit = |value: i128| value.clamp(i64::MIN.into(), i64::MAX.into());
        ranges.push(Interval { lo: fit(range.lo), hi: fit(range.hi) });
    }
    (ranges, faults)
}

/// The interval of an expression that would come next in the arena, from the intervals of those before it.
pub fn interval(problem: &Problem, expr: Expr, ranges: &IdVec<ExprId, Interval>) -> Interval {
    let of = |id: ExprId| ranges[id];
    let each = |list: ExprList| problem.exprs.items(list).iter().map(|&id| ranges[id]);
    let constant = |value: i64| Interval { lo: value.into(), hi: value.into() };
    let join = |a: Interval, b: Interval| Interval { lo: a.lo.min(b.lo), hi: a.hi.max(b.hi) };
    match expr {
        Expr::Number(number) => constant(number),
        Expr::Truth(truth) => constant(truth.into()),
        Expr::Var(var) => match problem.vars()[var].domain {
            Domain::YesNo => Interval { lo: 0, hi: 1 },
            Domain::Range { lo, hi } => Interval { lo: lo.into(), hi: hi.into() },
            domain @ Domain::Kind(_) => Interval { lo: 0, hi: problem.size(domain).into() },
        },
        Expr::AsNumber(a) => of(a),
        Expr::Count(list) | Expr::Sum(list) => {
            each(list).fold(constant(0), |sum, r| Interval { lo: sum.lo + r.lo, hi: sum.hi + r.hi })
        }
        Expr::Product(a, b) => {
            let (a, b) = (of(a), of(b));
            let ends = [a.lo * b.lo, a.lo * b.hi, a.hi * b.lo, a.hi * b.hi];
            let least = ends.into_iter().fold(i128::MAX, i128::min);
            Interval { lo: least, hi: ends.into_iter().fold(i128::MIN, i128::max) }
        }
        Expr::Negate(a) => Interval { lo: -of(a).hi, hi: -of(a).lo },
        Expr::Abs(a) => {
            let a = of(a);
            let least = if a.lo > 0 {
                a.lo
            } else if a.hi < 0 {
                -a.hi
            } else {
                0
            };
            Interval { lo: least, hi: a.lo.abs().max(a.hi.abs()) }
        }
        Expr::Quotient(a, by) => Interval { lo: of(a).lo.div_euclid(by.into()), hi: of(a).hi.div_euclid(by.into()) },
        Expr::Remainder(a, by) => {
            let (a, by) = (of(a), i128::from(by));
            // Within one period the remainder grows with the value; otherwise every remainder may occur.
            if a.lo.div_euclid(by) == a.hi.div_euclid(by) {
                Interval { lo: a.lo.rem_euclid(by), hi: a.hi.rem_euclid(by) }
            } else {
                Interval { lo: 0, hi: by - 1 }
            }
        }
        Expr::Smallest(list) => Interval {
            lo: each(list).map(|r| r.lo).min().unwrap_or(0),
            hi: each(list).map(|r| r.hi).min().unwrap_or(0),
        },
        Expr::Largest(list) => Interval {
            lo: each(list).map(|r| r.lo).max().unwrap_or(0),
            hi: each(list).map(|r| r.hi).max().unwrap_or(0),
        },
        Expr::Choose(_, yes, no) => join(of(yes), of(no)),
        Expr::Element(_, list) => each(list).reduce(join).unwrap_or(constant(0)),
        _ => Interval { lo: 0, hi: 1 },
    }
}

/// P1, P2, P3, P6 and P7.
fn shape(problem: &Problem) -> Result<(), String> {
    for (id, kind) in problem.kinds.iter() {
        ensure(!kind.values.is_empty(), || format!("{id} has no value"))?;
    }
    for (id, var) in problem.vars().iter() {
        if let Domain::Range { lo, hi } = var.domain {
            ensure(lo <= hi, || format!("{id} has an empty range"))?;
        }
    }
    for (id, &expr) in problem.exprs.iter() {
        let before = problem.exprs.operands(expr).iter().all(|&operand| operand < id);
        ensure(before, || format!("{id} uses an expression that comes after it"))?;
        if let Expr::Var(var) = expr {
            ensure(var.index() < problem.vars().len(), || format!("{id} uses a variable that is not there"))?;
        }
        let filled = match expr {
            Expr::Smallest(list) | Expr::Largest(list) | Expr::Element(_, list) => !list.is_empty(),
            Expr::Quotient(_, by) | Expr::Remainder(_, by) => by > 0,
            Expr::OneOf(list, table) => problem.exprs.table(table).width() == list.len(),
            _ => true,
        };
        ensure(filled, || format!("{id} lacks operands or has a divisor that is not positive"))?;
    }
    let types = problem.types();
    for (id, &expr) in problem.exprs.iter() {
        ensure(well_typed(problem, expr, &types), || format!("{id} has operands of the wrong type"))?;
    }
    for constraint in &problem.constraints {
        ensure(types.get(constraint.expr) == Some(&Type::YesNo), || "a constraint is not yes/no".to_owned())?;
    }
    if let Some(objective) = &problem.objective {
        ensure(types.get(objective.expr) == Some(&Type::Number), || "an objective is not a number".to_owned())?;
    }
    let known = |bit: super::BitId| bit.index() < problem.bit_count();
    ensure(problem.clauses.iter().flatten().all(|lit| known(lit.bit())), || "a clause uses an unknown bit".to_owned())?;
    let shown = problem.shown.as_deref().unwrap_or(&[]);
    ensure(shown.iter().all(|&bit| known(bit)), || "an unknown bit is shown".to_owned())?;
    ensure(shown.windows(2).all(|pair| pair[0] < pair[1]), || "shown bits are not in increasing order".to_owned())
}

fn ensure(holds: bool, what: impl FnOnce() -> String) -> Result<(), String> {
    if holds { Ok(()) } else { Err(what()) }
}

fn well_typed(problem: &Problem, expr: Expr, types: &IdVec<ExprId, Type>) -> bool {
    let all = |list: ExprList, ty: Type| problem.exprs.items(list).iter().all(|&id| types[id] == ty);
    match expr {
        Expr::Truth(_) | Expr::Number(_) | Expr::Var(_) => true,
        Expr::Not(a) | Expr::AsNumber(a) => types[a] == Type::YesNo,
        Expr::All(list) | Expr::Some(list) | Expr::Odd(list) | Expr::Count(list) => all(list, Type::YesNo),
        Expr::Compare(Compare::Eq | Compare::Ne | Compare::Lt | Compare::Le, a, b) | Expr::Product(a, b) => {
            types[a] == Type::Number && types[b] == Type::Number
        }
        Expr::Different(list) | Expr::OneOf(list, _) | Expr::Sum(list) => all(list, Type::Number),
        Expr::Smallest(list) | Expr::Largest(list) => all(list, Type::Number),
        Expr::Negate(a) | Expr::Abs(a) | Expr::Quotient(a, _) | Expr::Remainder(a, _) => types[a] == Type::Number,
        Expr::Choose(condition, a, b) => types[condition] == Type::YesNo && types[a] == types[b],
        Expr::Element(index, list) => types[index] == Type::Number && all(list, types[problem.exprs.items(list)[0]]),
    }
}
