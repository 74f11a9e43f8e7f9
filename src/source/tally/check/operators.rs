//! The types of operators.

use super::Checker;
use crate::source::tally::ast::{Additive, Comparison, Logic, Multiplicative, NodeId, Op};
use crate::source::tally::mistakes::{syntax, types};
use crate::source::tally::scope::Ty;
use crate::span::Span;

/// What to do about two values that cannot be compared.
const COMPARE: &str = "compare values of one type; yes/no counts as 1/0 beside an integer";

impl Checker<'_, '_> {
    pub(super) fn sum(&mut self, first: NodeId, rest: &[(Op<Additive>, NodeId)]) -> Ty {
        let sign = |op: Op<Additive>| if op.what == Additive::Plus { "`+`" } else { "`-`" };
        self.number(first, (rest[0].0.span, sign(rest[0].0)));
        for &(op, item) in rest {
            self.number(item, (op.span, sign(op)));
        }
        Ty::Int
    }

    pub(super) fn product(&mut self, first: NodeId, rest: &[(Op<Multiplicative>, NodeId)]) -> Ty {
        let sign = |op: Op<Multiplicative>| match op.what {
            Multiplicative::Times => "`*`",
            Multiplicative::Over => "`/`",
            Multiplicative::Mod => "`mod`",
        };
        self.number(first, (rest[0].0.span, sign(rest[0].0)));
        for &(op, item) in rest {
            self.number(item, (op.span, sign(op)));
        }
        Ty::Int
    }

    pub(super) fn logic(&mut self, first: NodeId, rest: &[(Op<Logic>, NodeId)]) -> Ty {
        let word = |op: Op<Logic>| if op.what == Logic::And { "`and`" } else { "`or`" };
        self.yes_no(first, (rest[0].0.span, word(rest[0].0)));
        for &(op, item) in rest {
            self.yes_no(item, (op.span, word(op)));
        }
        if let Some(&(other, _)) = rest.iter().find(|(op, _)| op.what != rest[0].0.what) {
            self.out.push(syntax::mixed_logic(rest[0].0, other));
        }
        Ty::YesNo
    }

    pub(super) fn chain(&mut self, first: NodeId, rest: &[(Op<Comparison>, NodeId)]) -> Ty {
        let mut types = vec![self.ty(first)];
        types.extend(rest.iter().map(|&(_, item)| self.ty(item)));
        let mut left = first;
        for (at, &(op, right)) in rest.iter().enumerate() {
            self.pair(op, (left, types[at]), (right, types[at + 1]));
            left = right;
        }
        let direction = |op: Op<Comparison>| match op.what {
            Comparison::Eq => 0,
            Comparison::Lt | Comparison::Le => 1,
            Comparison::Gt | Comparison::Ge => 2,
            // Not equal to a neighbour says nothing about the others: never a chain.
            Comparison::Ne => 3,
        };
        let turns = rest.iter().skip(1).find(|(op, _)| direction(*op) != direction(rest[0].0));
        let unequal = rest.get(1).filter(|_| rest[0].0.what == Comparison::Ne);
        if let Some(&(other, _)) = turns.or(unequal) {
            self.out.push(syntax::mixed_chain(rest[0].0, other));
        }
        Ty::YesNo
    }

    /// One comparison.
    fn pair(&mut self, op: Op<Comparison>, left: (NodeId, Ty), right: (NodeId, Ty)) {
        let ordered = !matches!(op.what, Comparison::Eq | Comparison::Ne);
        let by = (op.span, "an order");
        match (left.1, right.1) {
            (Ty::Unknown, _) | (_, Ty::Unknown) | (Ty::Int, Ty::Int) => {}
            (Ty::YesNo, Ty::Int) | (Ty::Int, Ty::YesNo) => {}
            (Ty::YesNo, Ty::YesNo) if ordered => {
                self.wrong(left.0, "integers", by, "for `a <= b` over yes/no write `a needs b`");
            }
            (Ty::Kind(a), Ty::Kind(b)) if a == b && ordered => {
                self.wrong(left.0, "integers", by, "values of a kind know only `=` and `!=`");
            }
            (a, b) if a == b => {}
            _ => self.out.push(types::mismatch(&self.typed(right.0), &self.typed(left.0), COMPARE)),
        }
    }

    pub(super) fn choice(&mut self, span: Span, condition: NodeId, yes: NodeId, no: NodeId) -> Ty {
        self.yes_no(condition, (self.word(span, 2), "`if`"));
        let (a, b) = (self.ty(yes), self.ty(no));
        match (a, b) {
            (Ty::Unknown, ty) | (ty, Ty::Unknown) => ty,
            (a, b) if a == b => a,
            _ => {
                let help =
                    "both branches have one type: write `no` and not 0 beside a yes/no, or add 0 to make it an integer";
                self.out.push(types::mismatch(&self.typed(no), &self.typed(yes), help));
                Ty::Unknown
            }
        }
    }
}
