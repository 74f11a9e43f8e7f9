//! The reference evaluator: a direct reading of the constraints over integers.
//!
//! It knows no encoding: it takes the value of each variable and computes the value of each expression, in 128-bit
//! integers, which hold every intermediate result of a problem that passed [`check`](super::check) (ranges fit 64 bits).

use crate::id::{Id, IdVec};
use crate::problem::{Bits, Compare, Expr, ExprId, Problem};

impl Problem {
    /// Whether the bits are a solution: every code lies in its domain and every constraint holds.
    pub fn holds(&self, bits: &Bits) -> bool {
        self.decode(bits).is_some_and(|values| self.broken(&values, bits).is_none())
    }

    /// The first constraint that fails under these values (and the bits that encode them), if one does.
    pub fn broken(&self, values: &[i64], bits: &Bits) -> Option<super::ConstraintId> {
        let results = self.evaluate(values);
        let expr = self.constraints.iter().position(|constraint| results[constraint.expr] == 0);
        let clause =
            || self.clauses.iter().position(|clause| !clause.iter().any(|l| bits.get(l.bit()) != l.is_negated()));
        let first = expr.or_else(|| clause().map(|at| self.constraints.len() + at));
        first.map(super::ConstraintId::new)
    }

    /// The value of every expression under these values of the variables; yes is 1 and no is 0.
    pub fn evaluate(&self, values: &[i64]) -> IdVec<ExprId, i128> {
        let mut results: IdVec<ExprId, i128> = IdVec::new();
        for (_, &expr) in self.exprs.iter() {
            let value = self.value(expr, values, &results);
            results.push(value);
        }
        results
    }

    fn value(&self, expr: Expr, values: &[i64], results: &IdVec<ExprId, i128>) -> i128 {
        let of = |id: ExprId| results[id];
        let each = |list| self.exprs.items(list).iter().map(|&id| results[id]);
        match expr {
            Expr::Truth(truth) => truth.into(),
            Expr::Number(number) => number.into(),
            Expr::Var(var) => values[var.index()].into(),
            Expr::Not(a) => 1 - of(a),
            Expr::All(list) => each(list).all(|v| v != 0).into(),
            Expr::Some(list) => each(list).any(|v| v != 0).into(),
            Expr::Odd(list) => each(list).sum::<i128>() % 2,
            Expr::Compare(compare, a, b) => compare.holds(of(a), of(b)).into(),
            Expr::Different(list) => {
                let mut seen: Vec<i128> = each(list).collect();
                seen.sort_unstable();
                seen.windows(2).all(|pair| pair[0] != pair[1]).into()
            }
            Expr::OneOf(list, table) => {
                let tuple: Vec<i128> = each(list).collect();
                let equals = |row: &[i64]| row.iter().map(|&cell| i128::from(cell)).eq(tuple.iter().copied());
                self.exprs.table(table).rows().any(equals).into()
            }
            Expr::AsNumber(a) => of(a),
            Expr::Count(list) | Expr::Sum(list) => each(list).sum(),
            Expr::Product(a, b) => of(a) * of(b),
            Expr::Negate(a) => -of(a),
            Expr::Abs(a) => of(a).abs(),
            // The divisor is positive, so Euclidean division rounds down.
            Expr::Quotient(a, by) => of(a).div_euclid(by.into()),
            Expr::Remainder(a, by) => of(a).rem_euclid(by.into()),
            Expr::Smallest(list) => each(list).min().expect("checked: not empty"),
            Expr::Largest(list) => each(list).max().expect("checked: not empty"),
            Expr::Choose(condition, yes, no) => of(if of(condition) != 0 { yes } else { no }),
            Expr::Element(index, list) => {
                let at = usize::try_from(of(index)).expect("checked: inside the row");
                of(self.exprs.items(list)[at])
            }
        }
    }
}

impl Compare {
    /// Whether the comparison holds.
    pub fn holds<T: Ord>(self, a: T, b: T) -> bool {
        match self {
            Compare::Eq => a == b,
            Compare::Ne => a != b,
            Compare::Lt => a < b,
            Compare::Le => a <= b,
        }
    }
}
