//! Building the problem: nodes with their ranges, leaves shared, steps counted.

use rustc_hash::FxHashMap;

use crate::id::{Id, IdVec};
use crate::problem::check::{Interval, interval};
use crate::problem::{Domain, Expr, ExprId, Exprs, Problem};
use crate::source::tally::limits::MAX_STEPS;
use crate::source::tally::scope::{Ty, Val};
use crate::span::Span;

/// A problem under construction.
#[derive(Default)]
pub(crate) struct Builder {
    /// What is built so far.
    pub(crate) problem: Problem,
    ranges: IdVec<ExprId, Interval>,
    numbers: FxHashMap<i64, ExprId>,
    truths: [Option<ExprId>; 2],
    steps: u64,
}

impl Builder {
    /// Counts steps of expansion; `false` where the limit is passed.
    pub(crate) fn step(&mut self, count: usize) -> bool {
        self.steps = self.steps.saturating_add(count as u64);
        self.steps <= MAX_STEPS
    }

    /// Adds a node; its range where that does not fit 64 bits.
    pub(crate) fn add(&mut self, expr: Expr, span: Span) -> Result<ExprId, Interval> {
        let range = interval(&self.problem, expr, &self.ranges);
        if range.lo < i64::MIN.into() || range.hi > i64::MAX.into() {
            return Err(range);
        }
        self.ranges.push(range);
        Ok(self.problem.exprs.add(expr, Some(span)))
    }

    /// Adds a variable and the expression that is its value.
    pub(crate) fn variable(&mut self, name: String, domain: Domain, span: Span) -> Val {
        let var = self.problem.add_var(name, domain, Some(span));
        Val::Node(self.add(Expr::Var(var), span).expect("a domain fits 64 bits"))
    }

    /// The expression of a value, where an operand must be an expression.
    pub(crate) fn expr(&mut self, val: Val, ty: Ty, span: Span) -> ExprId {
        match val {
            Val::Node(id) => id,
            Val::Const(value) if ty == Ty::YesNo => self.truth(value != 0, span),
            Val::Const(value) => self.number(value, span),
        }
    }

    /// The expression of an integer; constants are shared.
    pub(crate) fn number(&mut self, value: i64, span: Span) -> ExprId {
        if let Some(&id) = self.numbers.get(&value) {
            return id;
        }
        let id = self.add(Expr::Number(value), span).expect("fits 64 bits");
        self.numbers.insert(value, id);
        id
    }

    fn truth(&mut self, value: bool, span: Span) -> ExprId {
        if let Some(id) = self.truths[usize::from(value)] {
            return id;
        }
        let id = self.add(Expr::Truth(value), span).expect("fits 64 bits");
        self.truths[usize::from(value)] = Some(id);
        id
    }

    /// The values that interval arithmetic allows.
    pub(crate) fn range(&self, id: ExprId) -> Interval {
        self.ranges[id]
    }

    /// The problem, without the expressions that nothing uses: operands of killed conditions, `let`s without a reader.
    pub(crate) fn finish(self) -> Problem {
        let mut problem = self.problem;
        let old = std::mem::take(&mut problem.exprs);
        let roots = problem.constraints.iter_mut().map(|constraint| &mut constraint.expr);
        let mut roots: Vec<&mut ExprId> = roots.chain(problem.objective.as_mut().map(|o| &mut o.expr)).collect();
        let mut used = vec![false; old.len()];
        roots.iter().for_each(|root| used[root.index()] = true);
        for (id, &expr) in old.iter().rev() {
            if used[id.index()] {
                old.operands(expr).iter().for_each(|operand| used[operand.index()] = true);
            }
        }
        let mut new = Exprs::new();
        let mut map: Vec<Option<ExprId>> = vec![None; old.len()];
        for (id, &expr) in old.iter() {
            if used[id.index()] {
                let copied = copy(&old, &mut new, expr, &map);
                map[id.index()] = Some(new.add(copied, old.span(id)));
            }
        }
        roots.iter_mut().for_each(|root| **root = map[root.index()].expect("used, so copied"));
        problem.exprs = new;
        problem
    }
}

/// The node with its operands in the new arena.
fn copy(old: &Exprs, new: &mut Exprs, expr: Expr, map: &[Option<ExprId>]) -> Expr {
    let of = |id: ExprId| map[id.index()].expect("operands come first");
    let mut list = |list| {
        let items: Vec<ExprId> = old.items(list).iter().map(|&id| of(id)).collect();
        new.list(&items)
    };
    match expr {
        Expr::Truth(_) | Expr::Number(_) | Expr::Var(_) => expr,
        Expr::Not(a) => Expr::Not(of(a)),
        Expr::All(items) => Expr::All(list(items)),
        Expr::Some(items) => Expr::Some(list(items)),
        Expr::Odd(items) => Expr::Odd(list(items)),
        Expr::Compare(compare, a, b) => Expr::Compare(compare, of(a), of(b)),
        Expr::Different(items) => Expr::Different(list(items)),
        Expr::OneOf(items, table) => {
            let items = list(items);
            Expr::OneOf(items, new.add_table(old.table(table).clone()))
        }
        Expr::AsNumber(a) => Expr::AsNumber(of(a)),
        Expr::Count(items) => Expr::Count(list(items)),
        Expr::Sum(items) => Expr::Sum(list(items)),
        Expr::Product(a, b) => Expr::Product(of(a), of(b)),
        Expr::Negate(a) => Expr::Negate(of(a)),
        Expr::Abs(a) => Expr::Abs(of(a)),
        Expr::Quotient(a, by) => Expr::Quotient(of(a), by),
        Expr::Remainder(a, by) => Expr::Remainder(of(a), by),
        Expr::Smallest(items) => Expr::Smallest(list(items)),
        Expr::Largest(items) => Expr::Largest(list(items)),
        Expr::Choose(a, b, c) => Expr::Choose(of(a), of(b), of(c)),
        Expr::Element(index, items) => Expr::Element(of(index), list(items)),
    }
}
