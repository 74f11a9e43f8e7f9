//! Rows as they are declared: their indices, and the elements of `known` and `let`.

use super::{Lowered, Lowering, Run, Stop, Turn};
use crate::problem::Domain;
use crate::source::tally::ast::{Definition, Generator, Kind, List, NodeId, Source};
use crate::source::tally::check::Shape;
use crate::source::tally::limits::MAX_ROW;
use crate::source::tally::mistakes::{types, values};
use crate::source::tally::scope::{Dim, Maker, Ty, Val};
use crate::span::Span;

/// A row as it is expanded: its indices and its elements.
pub(crate) type Cells = (Vec<Dim>, Vec<Val>);

impl<'t> Lowering<'_, 't> {
    /// The indices of a declaration.
    pub(crate) fn dims(&mut self, indices: &[Generator<'t>]) -> Lowered<Vec<Dim>> {
        let mut dims = Vec::with_capacity(indices.len());
        for index in indices {
            let (run, ty) = self.run(index.source)?;
            let Run::Range(lo, hi) = run else { unreachable!("the checker refused it") };
            let len = (i128::from(hi) - i128::from(lo) + 1).max(0);
            self.room(usize::try_from(len).unwrap_or(usize::MAX), index.name.span)?;
            dims.push(match ty {
                Ty::Kind(kind) => Dim::Kind(kind, len as usize),
                _ => Dim::Range { lo, len: len as usize },
            });
            let all = dims.iter().fold(1usize, |all, dim| all.saturating_mul(dim.size()));
            self.room(all, index.name.span)?;
        }
        Ok(dims)
    }

    /// Refuses a row, or a problem, of too many elements.
    pub(crate) fn room(&mut self, len: usize, span: Span) -> Lowered<()> {
        let all = len.saturating_add(self.build.problem.vars().len());
        if all <= MAX_ROW {
            return self.step(len, span);
        }
        self.mistake(values::too_long(span, &len.to_string()))
    }

    pub(crate) fn pick_domain(&mut self, domain: Option<Source>, ty: Ty) -> Lowered<Domain> {
        let Some(source) = domain else { return Ok(Domain::YesNo) };
        let (Run::Range(lo, hi), _) = self.run(source)? else { unreachable!("the checker refused it") };
        if let Ty::Kind(kind) = ty {
            return Ok(Domain::Kind(kind));
        }
        if let (Source::Range(a, b), true) = (source, lo > hi) {
            let mistake = values::empty_pick(self.ast.get(a).span.to(self.ast.get(b).span), lo, hi);
            return self.mistake(mistake);
        }
        Ok(Domain::Range { lo, hi })
    }

    /// Runs over all elements of a row with the indices in force, the last one fastest.
    pub(crate) fn each_index(
        &mut self,
        dims: &[Dim],
        names: &[Generator<'t>],
        visit: &mut dyn FnMut(&mut Self) -> Lowered<()>,
    ) -> Lowered<()> {
        let Some((&dim, inner)) = dims.split_first() else { return visit(self) };
        for place in 0..dim.size() {
            self.turns.push(Turn { name: names[0].name.text, ty: dim.ty(), value: dim.first() + place as i64 });
            let done = self.each_index(inner, &names[1..], visit);
            self.turns.pop();
            done?;
        }
        Ok(())
    }

    /// The elements of a `known` or a `let`.
    pub(crate) fn cells(&mut self, definition: &Definition<'t>, shape: Shape, maker: Maker) -> Lowered<Cells> {
        let (mut dims, mut cells) = (self.dims(&definition.indices)?, Vec::new());
        if shape.depth == 0 {
            let value = definition.value;
            let indexed = dims.clone();
            self.each_index(&indexed, &definition.indices, &mut |lowering| {
                cells.push(lowering.cell(value, maker)?);
                Ok(())
            })?;
            return Ok((dims, cells));
        }
        let mut lens = vec![None; shape.depth];
        self.flatten(definition.value, maker, 0, &mut lens, &mut cells)?;
        if dims.is_empty() {
            dims.extend(lens.iter().map(|len| Dim::Range { lo: 1, len: len.map_or(0, |(len, _)| len) }));
            return Ok((dims, cells));
        }
        for ((dim, len), index) in dims.iter().zip(&lens).zip(&definition.indices) {
            // A level without any list (inside an empty one) has no length that could be wrong.
            if let Some((len, span)) = len.filter(|&(len, _)| len != dim.size()) {
                let element = |number| crate::diag::plural(number, "element", "elements");
                let mistake =
                    types::shape(span, &element(len), &element(dim.size()), index.name.span, "the index has as many");
                return self.mistake(mistake);
            }
        }
        Ok((dims, cells))
    }

    fn cell(&mut self, node: NodeId, maker: Maker) -> Lowered {
        match maker {
            Maker::Known => self.constant(node, "the value of a `known`").map(Val::Const),
            Maker::Pick | Maker::Let => self.lower(node),
        }
    }

    /// The elements of a list of lists; all lists of one level are of one length.
    fn flatten(
        &mut self,
        node: NodeId,
        maker: Maker,
        level: usize,
        lens: &mut Vec<Option<(usize, Span)>>,
        cells: &mut Vec<Val>,
    ) -> Lowered<()> {
        let ast = self.ast;
        let Kind::List(list) = &ast.get(node).kind else {
            if cells.len() == MAX_ROW {
                return self.mistake(values::too_long(ast.get(node).span, &format!("more than {MAX_ROW}")));
            }
            cells.push(self.cell(node, maker)?);
            return Ok(());
        };
        let mut len = 0;
        // The items of a plain list are all looked at, so that each can have its message.
        let plain = matches!(list, List::Items(_));
        let mut failed = false;
        self.elements(node, &mut |lowering, item| {
            len += 1;
            match lowering.flatten(item, maker, level + 1, lens, cells) {
                Err(Stop::Mistake) if plain => failed = true,
                done => return done,
            }
            Ok(())
        })?;
        if failed {
            return Err(Stop::Mistake);
        }
        let span = ast.get(node).span;
        match lens[level] {
            Some((first, place)) if first != len => {
                let element = |number| crate::diag::plural(number, "element", "elements");
                let mistake =
                    types::shape(span, &element(len), &element(first), place, "another list of the same level");
                self.mistake(mistake)
            }
            Some(_) => Ok(()),
            None => {
                lens[level] = Some((len, span));
                Ok(())
            }
        }
    }
}
