//! Constraints: what a `must` says, one constraint for each turn of the loops at its top.
//!
//! `must all of [ … for … ]` is as many constraints as the loop has turns (and so on inside), each with the values of
//! the indices, so that circuits and explanations can name them. Turns that always hold leave nothing. Everything else
//! is one constraint, one that always holds included.

use crate::problem::{Constraint, Origin};
use crate::source::tally::ast::{Kind, List, NodeId, Word};
use crate::source::tally::lower::{Lowered, Lowering};
use crate::source::tally::mistakes::values;
use crate::source::tally::scope::{Ty, Val};
use crate::span::Span;

impl Lowering<'_, '_> {
    /// Adds the constraints of a `must`.
    pub(crate) fn constrain(&mut self, node: NodeId, statement: Span) -> Lowered<()> {
        let ast = self.ast;
        if let Kind::Over(Word::All, list) = ast.get(node).kind
            && matches!(ast.get(list).kind, Kind::List(List::Each { .. }))
        {
            return self.elements(list, &mut |lowering, body| lowering.constrain(body, statement));
        }
        let val = self.lower(node)?;
        if val == Val::Const(1) && !self.turns.is_empty() {
            return Ok(());
        }
        if val == Val::Const(0) {
            let warning = values::never_holds(ast.get(node).span, &self.turn());
            self.out.push(warning);
        }
        let expr = self.build.expr(val, Ty::YesNo, ast.get(node).span);
        let bindings = self.turns.iter().map(|turn| {
            let value = self.value_text(turn.ty, turn.value);
            (Box::from(turn.name), value.into_boxed_str())
        });
        let origin = Origin { span: Some(statement), bindings: bindings.collect() };
        self.build.problem.constraints.push(Constraint { expr, origin });
        Ok(())
    }
}
