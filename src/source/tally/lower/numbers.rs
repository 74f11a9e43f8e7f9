//! Arithmetic. Constants are computed exactly; a sum is one node however long it is.

use super::{Lowered, Lowering, Stop};
use crate::problem::Expr;
use crate::source::tally::ast::{Additive, Kind, Multiplicative, NodeId, Op};
use crate::source::tally::mistakes::values;
use crate::source::tally::scope::{Ty, Val};
use crate::span::Span;

impl Lowering<'_, '_> {
    pub(super) fn negate(&mut self, inner: NodeId, span: Span) -> Lowered {
        // -2^63 fits where 2^63 does not.
        if let Kind::Int(value) = self.ast.get(inner).kind {
            return self.exact(-i128::from(value), span);
        }
        let inner = self.number(inner)?;
        self.minus(inner, span)
    }

    fn minus(&mut self, val: Val, span: Span) -> Lowered {
        match val {
            Val::Const(value) => self.exact(-i128::from(value), span),
            Val::Node(id) => self.add(Expr::Negate(id), span),
        }
    }

    pub(super) fn abs(&mut self, inner: NodeId, span: Span) -> Lowered {
        match self.number(inner)? {
            Val::Const(value) => self.exact(i128::from(value).abs(), span),
            Val::Node(id) => self.add(Expr::Abs(id), span),
        }
    }

    pub(super) fn sum(&mut self, first: NodeId, rest: &[(Op<Additive>, NodeId)], span: Span) -> Lowered {
        let mut items = Vec::with_capacity(rest.len() + 1);
        let mut failed = false;
        let signed = std::iter::once((Additive::Plus, first)).chain(rest.iter().map(|&(op, id)| (op.what, id)));
        for (sign, id) in signed {
            let place = self.ast.get(id).span;
            let item = self.number(id).and_then(|val| match sign {
                Additive::Plus => Ok(val),
                Additive::Minus => self.minus(val, place),
            });
            match item {
                Ok(val) => items.push(val),
                Err(Stop::Mistake) => failed = true,
                Err(Stop::Limit) => return Err(Stop::Limit),
            }
        }
        if failed { Err(Stop::Mistake) } else { self.total(&items, span) }
    }

    /// The sum of integers, their constants added up.
    pub(crate) fn total(&mut self, items: &[Val], span: Span) -> Lowered {
        let mut known = 0i128;
        let mut open = Vec::new();
        for &item in items {
            match item {
                Val::Const(value) => known += i128::from(value),
                Val::Node(id) => open.push(id),
            }
        }
        if open.is_empty() {
            return self.exact(known, span);
        }
        if known != 0 {
            let Val::Const(known) = self.exact(known, span)? else { unreachable!("exact gives constants") };
            open.push(self.build.number(known, span));
        }
        if let [only] = open[..] { Ok(Val::Node(only)) } else { self.add_over(Expr::Sum, &open, span) }
    }

    pub(super) fn product(&mut self, first: NodeId, rest: &[(Op<Multiplicative>, NodeId)], span: Span) -> Lowered {
        let mut left = self.number(first)?;
        let start = self.ast.get(first).span;
        for &(op, id) in rest {
            let right = self.number(id)?;
            let place = if rest.len() == 1 { span } else { start.to(self.ast.get(id).span) };
            left = match op.what {
                Multiplicative::Times => self.times(left, right, place)?,
                Multiplicative::Over | Multiplicative::Mod => {
                    let by = self.divisor(op, id, right)?;
                    self.divide(op.what, left, by, place)?
                }
            };
        }
        Ok(left)
    }

    fn times(&mut self, a: Val, b: Val, span: Span) -> Lowered {
        match (a, b) {
            (Val::Const(a), Val::Const(b)) => self.exact(i128::from(a) * i128::from(b), span),
            (Val::Const(0), _) | (_, Val::Const(0)) => Ok(Val::Const(0)),
            (Val::Const(1), other) | (other, Val::Const(1)) => Ok(other),
            _ => {
                let (a, b) = (self.expr(a, span), self.expr(b, span));
                self.add(Expr::Product(a, b), span)
            }
        }
    }

    fn divisor(&mut self, op: Op<Multiplicative>, id: NodeId, val: Val) -> Lowered<i64> {
        let span = self.ast.get(id).span;
        let found = match val {
            Val::Const(by) if by > 0 => return Ok(by),
            Val::Const(by) => by.to_string(),
            Val::Node(_) => "not constant".to_owned(),
        };
        let mistake = values::divisor(span, op.span, &found, &self.turn());
        self.mistake(mistake)
    }

    fn divide(&mut self, what: Multiplicative, left: Val, by: i64, span: Span) -> Lowered {
        match (left, what) {
            // The divisor is positive: Euclidean division rounds down and its remainder is never negative.
            (Val::Const(value), Multiplicative::Mod) => Ok(Val::Const(value.rem_euclid(by))),
            (Val::Const(value), _) => Ok(Val::Const(value.div_euclid(by))),
            (Val::Node(id), Multiplicative::Mod) => self.add(Expr::Remainder(id, by), span),
            (Val::Node(id), _) => self.add(Expr::Quotient(id, by), span),
        }
    }

    /// How many of the conditions hold.
    pub(crate) fn count(&mut self, conditions: &[Val], span: Span) -> Lowered {
        let known = conditions.iter().filter(|&&val| val == Val::Const(1)).count();
        let open: Vec<_> =
            conditions.iter().filter_map(|&val| if let Val::Node(id) = val { Some(id) } else { None }).collect();
        let known = Val::Const(known as i64);
        match open[..] {
            [] => Ok(known),
            [only] => {
                let one = self.as_number(Val::Node(only), Ty::YesNo, span)?;
                self.total(&[one, known], span)
            }
            _ => {
                let some = self.add_over(Expr::Count, &open, span)?;
                self.total(&[some, known], span)
            }
        }
    }
}
