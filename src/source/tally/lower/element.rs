//! Elements of rows. Constant indices are looked up; the others become one `Element` over the part of the row that they
//! can reach, several of them flattened into one index.

use super::{Lowered, Lowering};
use crate::problem::{Expr, ExprId};
use crate::source::tally::ast::{Name, NodeId};
use crate::source::tally::check::Meaning;
use crate::source::tally::mistakes::values;
use crate::source::tally::scope::{Dim, Row, Val, What};
use crate::span::Span;

/// What an index can reach in its dimension: places from 0, and the expression that chooses between several.
struct Reach {
    first: usize,
    len: usize,
    chooser: Option<(ExprId, i64)>,
}

impl<'t> Lowering<'_, 't> {
    pub(super) fn element(&mut self, id: NodeId, name: Name<'t>, indices: &[NodeId]) -> Lowered {
        let scope = self.scope;
        let Meaning::Entity(entity) = self.facts.meaning(id) else { unreachable!("the checker refused it") };
        let What::Row(row) = &scope.get(entity).what else { unreachable!("the checker refused it") };
        let declared = scope.get(entity).name.span;
        let mut reaches = Vec::with_capacity(indices.len());
        for (&index, &dim) in indices.iter().zip(&row.dims) {
            let val = self.lower(index)?;
            reaches.push(self.reach(val, dim, self.ast.get(index).span, name.text, declared)?);
        }
        self.choose(row, &reaches, self.ast.get(id).span)
    }

    fn reach(&mut self, val: Val, dim: Dim, span: Span, name: &str, declared: Span) -> Lowered<Reach> {
        let (lo, hi, chooser) = match val {
            Val::Const(value) => (i128::from(value), i128::from(value), None),
            Val::Node(id) => {
                let range = self.build.range(id);
                (range.lo, range.hi, Some(id))
            }
        };
        let first = i128::from(dim.first());
        if lo < first || hi >= first + dim.size() as i128 {
            let found = match chooser {
                None => format!("is {lo}"),
                Some(id) => format!("reaches from {lo} to {hi}{}", self.causes(vec![id])),
            };
            let row = match dim {
                _ if dim.size() == 0 => "an empty row".to_owned(),
                Dim::Range { .. } => format!("{} to {}", first, first + dim.size() as i128 - 1),
                Dim::Kind(kind, _) => format!("the values of {}", self.build.problem.kinds[kind].name),
            };
            let mistake = values::outside(span, name, &found, &row, declared, &self.turn());
            return self.mistake(mistake);
        }
        let chooser = chooser.filter(|_| lo != hi).map(|id| (id, lo as i64));
        Ok(Reach { first: (lo - first) as usize, len: (hi - lo + 1) as usize, chooser })
    }

    fn choose(&mut self, row: &Row, reaches: &[Reach], span: Span) -> Lowered {
        let count: usize = reaches.iter().map(|reach| reach.len).product();
        self.step(count, span)?;
        let mut cells = Vec::with_capacity(count);
        reached(row, reaches, 0, 0, &mut cells);
        if reaches.iter().all(|reach| reach.chooser.is_none()) {
            return Ok(cells[0]);
        }
        let index = self.flat_index(reaches, span)?;
        let cells: Vec<ExprId> = cells.into_iter().map(|cell| self.build.expr(cell, row.ty, span)).collect();
        let list = self.build.problem.exprs.list(&cells);
        self.add(Expr::Element(index, list), span)
    }

    /// The place in the reached part: the last index runs fastest, each counts from its smallest value.
    fn flat_index(&mut self, reaches: &[Reach], span: Span) -> Lowered<ExprId> {
        let mut items = Vec::new();
        let mut stride = 1i128;
        let mut offset = 0i128;
        for reach in reaches.iter().rev() {
            if let Some((id, lo)) = reach.chooser {
                offset -= stride * i128::from(lo);
                let Val::Const(factor) = self.exact(stride, span)? else { unreachable!("exact gives constants") };
                items.push(if factor == 1 {
                    Val::Node(id)
                } else {
                    let factor = self.build.number(factor, span);
                    self.add(Expr::Product(id, factor), span)?
                });
                stride *= reach.len as i128;
            }
        }
        items.push(self.exact(offset, span)?);
        let index = self.total(&items, span)?;
        Ok(self.expr(index, span))
    }
}

/// The elements that the indices can reach, the last index running fastest.
fn reached(row: &Row, reaches: &[Reach], at: usize, base: usize, cells: &mut Vec<Val>) {
    let Some(reach) = reaches.get(at) else {
        cells.push(row.cells[base]);
        return;
    };
    for place in reach.first..reach.first + reach.len {
        reached(row, reaches, at + 1, base * row.dims[at].size() + place, cells);
    }
}
