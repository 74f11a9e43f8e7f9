//! Expansion: an expression of the syntax tree, checked for names and types, becomes a constant or an expression of the
//! problem. Loops are unrolled, rows are looked up, constants are folded on the way.
//!
//! Before: the expression was checked (`check`) without a message.
//! After: every expression that was built fits 64 bits and no index falls outside its row (P4 and P5 of
//! [`problem::check`](crate::problem::check)).
//!
//! What a constant condition kills is not judged: the branch not taken of an `if`, the other operands beside a constant
//! `no` of `and` and `all of`, a constant `yes` of `or` and `some of` (and of `needs` accordingly), on either side of
//! it, and the turns that a `with` leaves out. Constant means known after folding; ranges alone kill nothing.

mod build;
mod definition;
mod element;
mod logic;
mod numbers;
mod one_of;
mod rows;

use std::fmt::Write as _;

pub(crate) use build::Builder;
pub(crate) use definition::Cells;
pub(crate) use rows::Run;

use crate::diag::Diagnostic;
use crate::problem::check::Interval;
use crate::problem::{Compare, Domain, Expr, ExprId, VarId};
use crate::source::tally::ast::{Ast, Comparison, Kind, NodeId, Op, children};
use crate::source::tally::check::{Facts, Meaning};
use crate::source::tally::mistakes::values;
use crate::source::tally::scope::{Scope, Ty, Val, What};
use crate::span::Span;

/// Why an expansion has no value.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub(crate) enum Stop {
    /// A mistake, reported; a constant condition may still kill it and its message.
    Mistake,
    /// The limit of expansion, reported; nothing goes on.
    Limit,
}

/// The value of an expansion.
pub(crate) type Lowered<T = Val> = Result<T, Stop>;

/// One turn of a loop that is in force.
#[derive(Clone, Copy, Debug)]
pub(crate) struct Turn<'t> {
    /// The index name.
    pub(crate) name: &'t str,
    /// The type of the index.
    pub(crate) ty: Ty,
    /// Its value in this turn.
    pub(crate) value: i64,
}

/// The expansion of one statement.
pub(crate) struct Lowering<'a, 't> {
    pub(crate) ast: &'a Ast<'t>,
    pub(crate) scope: &'a Scope<'t>,
    pub(crate) facts: &'a Facts,
    pub(crate) build: &'a mut Builder,
    pub(crate) out: &'a mut Vec<Diagnostic>,
    pub(crate) turns: Vec<Turn<'t>>,
}

impl<'t> Lowering<'_, 't> {
    /// Expands an expression.
    pub(crate) fn lower(&mut self, id: NodeId) -> Lowered {
        let ast = self.ast;
        let node = ast.get(id);
        self.step(1, node.span)?;
        match &node.kind {
            Kind::Int(value) => match i64::try_from(*value) {
                Ok(value) => Ok(Val::Const(value)),
                Err(_) => self.exact(i128::from(*value), node.span),
            },
            Kind::Truth(value) => Ok(Val::Const(i64::from(*value))),
            Kind::Name(_) => Ok(self.name(id)),
            Kind::Index(name, indices) => self.element(id, *name, indices),
            Kind::Not(inner) => {
                let inner = self.lower(*inner)?;
                self.not(inner, node.span)
            }
            Kind::Negate(inner) => self.negate(*inner, node.span),
            Kind::Sum(first, rest) => self.sum(*first, rest, node.span),
            Kind::Product(first, rest) => self.product(*first, rest, node.span),
            Kind::Abs(inner) => self.abs(*inner, node.span),
            Kind::Chain(first, rest) => self.chain(*first, rest, node.span),
            Kind::Logic(first, rest) => self.logic(*first, rest, node.span),
            Kind::Needs(items) => self.needs(items, node.span),
            Kind::If(condition, yes, no) => self.choice(*condition, *yes, *no, node.span),
            Kind::OneOf(left, list) => self.one_of(*left, *list, node.span),
            Kind::Over(word, list) => self.over(*word, *list, node.span),
            Kind::Tuple(_) | Kind::List(_) => unreachable!("the checker refused it"),
        }
    }

    /// Expands to an integer: yes/no counts as 1/0.
    pub(crate) fn number(&mut self, id: NodeId) -> Lowered {
        let val = self.lower(id)?;
        self.as_number(val, self.facts.ty(id), self.ast.get(id).span)
    }

    /// A value as an integer.
    pub(crate) fn as_number(&mut self, val: Val, ty: Ty, span: Span) -> Lowered {
        match val {
            Val::Node(node) if ty == Ty::YesNo => self.add(Expr::AsNumber(node), span),
            val => Ok(val),
        }
    }

    /// Expands to a constant; `what` names the place that needs one.
    pub(crate) fn constant(&mut self, id: NodeId, what: &str) -> Lowered<i64> {
        match self.lower(id)? {
            Val::Const(value) => Ok(value),
            Val::Node(_) => {
                let mistake = values::not_constant(self.ast.get(id).span, what, self.culprit(id));
                self.mistake(mistake)
            }
        }
    }

    /// Adds a node, or reports that its values do not fit.
    pub(crate) fn add(&mut self, expr: Expr, span: Span) -> Lowered {
        match self.build.add(expr, span) {
            Ok(id) => Ok(Val::Node(id)),
            Err(range) => {
                let causes = self.causes(self.build.problem.exprs.operands(expr));
                let mistake = values::too_wide(span, range, &format!("{causes}{}", self.turn()));
                self.mistake(mistake)
            }
        }
    }

    /// Adds a node over a list of operands.
    pub(crate) fn add_over(
        &mut self,
        make: fn(crate::problem::ExprList) -> Expr,
        items: &[ExprId],
        span: Span,
    ) -> Lowered {
        self.step(items.len(), span)?;
        let list = self.build.problem.exprs.list(items);
        self.add(make(list), span)
    }

    /// A constant that was computed exactly, if it fits.
    pub(crate) fn exact(&mut self, value: i128, span: Span) -> Lowered {
        match i64::try_from(value) {
            Ok(value) => Ok(Val::Const(value)),
            Err(_) => {
                let mistake = values::too_wide(span, Interval { lo: value, hi: value }, &self.turn());
                self.mistake(mistake)
            }
        }
    }

    /// The expression of an integer value.
    pub(crate) fn expr(&mut self, val: Val, span: Span) -> ExprId {
        self.build.expr(val, Ty::Int, span)
    }

    /// Reports a mistake and stops.
    pub(crate) fn mistake<T>(&mut self, mistake: Diagnostic) -> Lowered<T> {
        // A message takes as long as many steps; loops of mistakes that may still be killed must end too.
        self.build.step(50);
        self.out.push(mistake);
        Err(Stop::Mistake)
    }

    /// Counts steps and stops at the limit.
    pub(crate) fn step(&mut self, count: usize, span: Span) -> Lowered<()> {
        if self.build.step(count) {
            return Ok(());
        }
        self.out.push(values::too_many_steps(span));
        Err(Stop::Limit)
    }

    /// The turn of the loops in words, such as ` for i = 3, c = basil`; empty outside loops.
    pub(crate) fn turn(&self) -> String {
        let mut text = String::new();
        for (at, turn) in self.turns.iter().enumerate() {
            let before = if at == 0 { " for" } else { "," };
            let _ = write!(text, "{before} {} = {}", turn.name, self.value_text(turn.ty, turn.value));
        }
        text
    }

    /// A value in words.
    pub(crate) fn value_text(&self, ty: Ty, value: i64) -> String {
        let domain = match ty {
            Ty::YesNo => Domain::YesNo,
            Ty::Kind(kind) => Domain::Kind(kind),
            Ty::Int | Ty::Unknown => return value.to_string(),
        };
        self.build.problem.value_name(domain, value)
    }

    /// The picks that expressions depend on, with their ranges: ` (x in 0 to 4)`; empty for many.
    pub(crate) fn causes(&self, mut open: Vec<ExprId>) -> String {
        const MANY: usize = 4;
        let problem = &self.build.problem;
        let mut vars = Vec::new();
        // A large expression would not be listed anyway.
        for _ in 0..1000 {
            let Some(id) = open.pop() else { break };
            match problem.exprs.get(id) {
                Expr::Var(var) if !vars.contains(&var) => vars.push(var),
                expr => open.extend(problem.exprs.operands(expr)),
            }
        }
        vars.sort();
        let range = |&var: &VarId| match problem.vars()[var].domain {
            Domain::Range { lo, hi } => format!("{} in {lo} to {hi}", problem.vars()[var].name),
            _ => problem.vars()[var].name.to_string(),
        };
        if vars.is_empty() || vars.len() > MANY || !open.is_empty() {
            return String::new();
        }
        format!(" ({})", vars.iter().map(range).collect::<Vec<_>>().join(", "))
    }

    fn name(&self, id: NodeId) -> Val {
        match self.facts.meaning(id) {
            Meaning::Loop(slot) => Val::Const(self.turns[slot].value),
            Meaning::Entity(entity) => match &self.scope.get(entity).what {
                What::Value(_, place) => Val::Const(*place),
                What::Row(row) => row.cells[0],
                What::Kind(_) | What::Broken => unreachable!("the checker refused it"),
            },
            Meaning::Nothing => unreachable!("the checker refused it"),
        }
    }

    /// A name inside an expression that is not constant, with its use and its declaration.
    fn culprit(&self, id: NodeId) -> Option<(&'t str, Span, Span)> {
        let mut open = vec![id];
        while let Some(id) = open.pop() {
            let node = self.ast.get(id);
            if let (Kind::Name(name), Meaning::Entity(entity)) = (&node.kind, self.facts.meaning(id))
                && let Some(declared) = self.picked(entity)
            {
                return Some((*name, node.span, declared));
            }
            if let (Kind::Index(name, _), Meaning::Entity(entity)) = (&node.kind, self.facts.meaning(id))
                && let Some(declared) = self.picked(entity)
            {
                return Some((name.text, node.span, declared));
            }
            open.extend(children(&node.kind).into_iter().rev());
        }
        None
    }

    fn picked(&self, entity: crate::source::tally::scope::EntityId) -> Option<Span> {
        let entity = self.scope.get(entity);
        matches!(&entity.what, What::Row(row) if !row.is_constant()).then_some(entity.name.span)
    }
}

/// The comparison of the problem and whether its operands change places.
pub(crate) fn comparison(op: Op<Comparison>) -> (Compare, bool) {
    match op.what {
        Comparison::Eq => (Compare::Eq, false),
        Comparison::Ne => (Compare::Ne, false),
        Comparison::Lt => (Compare::Lt, false),
        Comparison::Le => (Compare::Le, false),
        Comparison::Gt => (Compare::Lt, true),
        Comparison::Ge => (Compare::Le, true),
    }
}
