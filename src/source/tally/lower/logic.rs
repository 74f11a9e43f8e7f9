//! Conditions: operators over yes/no, comparisons, `if`.

use super::{Lowered, Lowering, Stop, comparison};
use crate::problem::{Compare, Expr, ExprId};
use crate::source::tally::ast::{Comparison, Logic, NodeId, Op};
use crate::source::tally::scope::{Ty, Val};
use crate::span::Span;

const NO: Val = Val::Const(0);
const YES: Val = Val::Const(1);

/// Whether all or some of several conditions must hold.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub(crate) enum Join {
    /// All: a constant no decides.
    All,
    /// Some: a constant yes decides.
    Some,
}

/// Conditions collected one by one. Once one of them decides, the others do not matter, mistakes in them included.
pub(crate) struct Gather {
    join: Join,
    /// The number of messages before the first condition.
    messages: usize,
    decided: bool,
    failed: bool,
    open: Vec<ExprId>,
}

impl Gather {
    /// Nothing collected yet; `messages` is the number of messages so far.
    pub(crate) fn new(join: Join, messages: usize) -> Self {
        Self { join, messages, decided: false, failed: false, open: Vec::new() }
    }
}

impl Lowering<'_, '_> {
    /// Adds a condition to those collected.
    pub(crate) fn gather(&mut self, into: &mut Gather, condition: Lowered) -> Lowered<()> {
        let decides = if into.join == Join::All { NO } else { YES };
        match condition {
            Ok(Val::Node(id)) => into.open.push(id),
            Ok(val) => into.decided |= val == decides,
            Err(Stop::Mistake) => into.failed = true,
            Err(Stop::Limit) => return Err(Stop::Limit),
        }
        Ok(())
    }

    /// The value of all conditions collected.
    pub(crate) fn gathered(&mut self, all: Gather, span: Span) -> Lowered {
        let (decided, otherwise) = if all.join == Join::All { (NO, YES) } else { (YES, NO) };
        if all.decided {
            self.out.truncate(all.messages);
            return Ok(decided);
        }
        if all.failed {
            return Err(Stop::Mistake);
        }
        match all.open[..] {
            [] => Ok(otherwise),
            [only] => Ok(Val::Node(only)),
            _ => self.add_over(if all.join == Join::All { Expr::All } else { Expr::Some }, &all.open, span),
        }
    }

    pub(super) fn not(&mut self, val: Val, span: Span) -> Lowered {
        match val {
            Val::Const(value) => Ok(Val::Const(1 - value)),
            Val::Node(id) => match self.build.problem.exprs.get(id) {
                Expr::Not(inner) => Ok(Val::Node(inner)),
                _ => self.add(Expr::Not(id), span),
            },
        }
    }

    pub(super) fn logic(&mut self, first: NodeId, rest: &[(Op<Logic>, NodeId)], span: Span) -> Lowered {
        let join = if rest[0].0.what == Logic::And { Join::All } else { Join::Some };
        let mut all = Gather::new(join, self.out.len());
        for id in std::iter::once(first).chain(rest.iter().map(|&(_, id)| id)) {
            let condition = self.lower(id);
            self.gather(&mut all, condition)?;
        }
        self.gathered(all, span)
    }

    /// `a needs b needs c` is `a needs (b needs c)`: not *a*, or not *b*, or *c*.
    pub(super) fn needs(&mut self, items: &[NodeId], span: Span) -> Lowered {
        let mut all = Gather::new(Join::Some, self.out.len());
        for (at, &id) in items.iter().enumerate() {
            let mut condition = self.lower(id);
            if let (Ok(val), true) = (condition, at + 1 < items.len()) {
                condition = self.not(val, self.ast.get(id).span);
            }
            self.gather(&mut all, condition)?;
        }
        self.gathered(all, span)
    }

    pub(super) fn choice(&mut self, condition: NodeId, yes: NodeId, no: NodeId, span: Span) -> Lowered {
        let condition = match self.lower(condition)? {
            Val::Const(0) => return self.lower(no),
            Val::Const(_) => return self.lower(yes),
            Val::Node(id) => id,
        };
        // Both branches are looked at, so that both can have their message.
        let branches = (self.lower(yes), self.lower(no));
        if branches.0 == Err(Stop::Limit) || branches.1 == Err(Stop::Limit) {
            return Err(Stop::Limit);
        }
        let (a, b) = (branches.0?, branches.1?);
        if a == b {
            return Ok(a);
        }
        let a = self.build.expr(a, self.facts.ty(yes), self.ast.get(yes).span);
        let b = self.build.expr(b, self.facts.ty(no), self.ast.get(no).span);
        self.add(Expr::Choose(condition, a, b), span)
    }

    /// A chain means every neighbouring pair.
    pub(super) fn chain(&mut self, first: NodeId, rest: &[(Op<Comparison>, NodeId)], span: Span) -> Lowered {
        let mut all = Gather::new(Join::All, self.out.len());
        let mut left = (self.lower(first), first);
        for &(op, id) in rest {
            let right = (self.lower(id), id);
            let pair = match (left.0, right.0) {
                (Ok(a), Ok(b)) => {
                    let place =
                        if rest.len() == 1 { span } else { self.ast.get(left.1).span.to(self.ast.get(id).span) };
                    self.compare(op, (a, self.facts.ty(left.1)), (b, self.facts.ty(id)), place)
                }
                (Err(Stop::Limit), _) | (_, Err(Stop::Limit)) => Err(Stop::Limit),
                _ => Err(Stop::Mistake),
            };
            self.gather(&mut all, pair)?;
            left = right;
        }
        self.gathered(all, span)
    }

    fn compare(&mut self, op: Op<Comparison>, left: (Val, Ty), right: (Val, Ty), span: Span) -> Lowered {
        if left.1 == Ty::YesNo && right.1 == Ty::YesNo {
            let unequal = self.parity(&[left.0, right.0], span)?;
            return if op.what == Comparison::Ne { Ok(unequal) } else { self.not(unequal, span) };
        }
        let a = self.as_number(left.0, left.1, span)?;
        let b = self.as_number(right.0, right.1, span)?;
        let (compare, swapped) = comparison(op);
        let (a, b) = if swapped { (b, a) } else { (a, b) };
        self.compare_numbers(compare, a, b, span)
    }

    /// A comparison of two integers.
    pub(crate) fn compare_numbers(&mut self, compare: Compare, a: Val, b: Val, span: Span) -> Lowered {
        if let (Val::Const(a), Val::Const(b)) = (a, b) {
            return Ok(Val::Const(i64::from(compare.holds(a, b))));
        }
        let (a, b) = (self.expr(a, span), self.expr(b, span));
        self.add(Expr::Compare(compare, a, b), span)
    }

    /// Whether an odd number of the conditions hold.
    pub(crate) fn parity(&mut self, conditions: &[Val], span: Span) -> Lowered {
        let mut flip = false;
        let mut open = Vec::new();
        for &condition in conditions {
            match condition {
                Val::Const(value) => flip ^= value != 0,
                Val::Node(id) => open.push(id),
            }
        }
        let odd = match open[..] {
            [] => NO,
            [only] => Val::Node(only),
            _ => self.add_over(Expr::Odd, &open, span)?,
        };
        if flip { self.not(odd, span) } else { Ok(odd) }
    }
}
