//! The types of rows, lists, loops and the words over them.

use super::{Checker, Loop, Meaning};
use crate::id::Id;
use crate::source::tally::ast::{Generator, Kind, List, Name, NodeId, Source, Word};
use crate::source::tally::mistakes::{names, types};
use crate::source::tally::scope::{Ty, What};
use crate::span::Span;

/// The type and the number of indices of a value that may be a list of lists.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub(crate) struct Shape {
    /// How many lists lie in each other; 0 for a single value.
    pub(crate) depth: usize,
    /// The type of the elements.
    pub(crate) ty: Ty,
}

impl<'t> Checker<'_, 't> {
    /// The type of an index over this source.
    pub(crate) fn source(&mut self, source: Source) -> Ty {
        match source {
            Source::Range(lo, hi) => {
                let to = self.ast.get(lo).span.to(self.ast.get(hi).span);
                self.integer(lo, (to, "a range"));
                self.integer(hi, (to, "a range"));
                Ty::Int
            }
            Source::Of(node) => self.source_of(node),
        }
    }

    fn source_of(&mut self, node: NodeId) -> Ty {
        let ast = self.ast;
        let span = ast.get(node).span;
        let name = match &ast.get(node).kind {
            Kind::Name(name) if !self.loops.iter().any(|index| index.name.text == *name) => Name { text: name, span },
            Kind::List(list) => {
                let shape = self.list_shape(span, list);
                if shape.depth == 1 {
                    return shape.ty;
                }
                self.out.push(names::no_source(span, "a list of lists", None));
                return Ty::Unknown;
            }
            _ => {
                // One message: a value of any type is nothing to run over.
                self.ty(node);
                self.out.push(names::no_source(span, "a single value", None));
                return Ty::Unknown;
            }
        };
        let Some(entity) = self.find(node, name) else { return Ty::Unknown };
        let scope = self.scope;
        let declared = Some(scope.get(entity).name.span);
        let found = match &scope.get(entity).what {
            What::Broken => {
                self.broken = true;
                return Ty::Unknown;
            }
            What::Kind(kind) => return Ty::Kind(*kind),
            What::Row(row) if row.dims.len() == 1 && row.is_constant() => return row.ty,
            What::Row(row) if row.dims.is_empty() => "a single value",
            What::Row(row) if row.dims.len() > 1 => "a row with several indices",
            What::Row(_) => "a row that depends on what is picked",
            What::Value(..) => "a value of a kind",
        };
        self.out.push(names::no_source(span, found, declared));
        Ty::Unknown
    }

    /// What a pick runs over: a range or a kind.
    pub(crate) fn domain(&mut self, source: Source) -> Ty {
        let ty = self.source(source);
        if let Source::Of(node) = source {
            let kind = match self.facts.meaning(node) {
                Meaning::Entity(entity) => matches!(self.scope.get(entity).what, What::Kind(_) | What::Broken),
                _ => false,
            };
            if !kind && ty != Ty::Unknown {
                self.out.push(names::no_domain(self.ast.get(node).span, self.declared(node)));
                return Ty::Unknown;
            }
        }
        ty
    }

    /// Brings an index into force.
    pub(crate) fn enter(&mut self, name: Name<'t>, ty: Ty) {
        let other = self.loops.iter().find(|index| index.name.text == name.text).map(|index| index.name.span);
        let other = other.or_else(|| self.scope.find(name.text).map(|entity| self.scope.get(entity).name.span));
        if let Some(other) = other {
            self.out.push(names::hides(name.text, name.span, other));
        }
        self.loops.push(Loop { name, ty });
    }

    /// Puts all indices out of force for a list whose places they are.
    pub(crate) fn hide(&mut self) {
        self.hidden = std::mem::take(&mut self.loops).into_iter().map(|index| index.name).collect();
    }

    /// Puts the innermost indices out of force.
    pub(crate) fn leave(&mut self, count: usize) {
        self.loops.truncate(self.loops.len() - count);
    }

    fn enter_all(&mut self, generators: &[Generator<'t>]) {
        for generator in generators {
            let ty = self.source(generator.source);
            self.enter(generator.name, ty);
        }
    }

    /// The indices of a declaration. Their ranges do not depend on each other: rows are rectangular.
    pub(crate) fn indices(&mut self, generators: &[Generator<'t>]) {
        let types: Vec<Ty> = generators.iter().map(|generator| self.domain(generator.source)).collect();
        for (generator, ty) in generators.iter().zip(types) {
            self.enter(generator.name, ty);
        }
    }

    /// The shape of the value of a `known` or a `let`.
    pub(crate) fn shape(&mut self, id: NodeId) -> Shape {
        let ast = self.ast;
        match &ast.get(id).kind {
            Kind::List(list) => {
                let shape = self.list_shape(ast.get(id).span, list);
                self.facts.types[id.index()] = shape.ty;
                shape
            }
            _ => Shape { depth: 0, ty: self.ty(id) },
        }
    }

    fn list_shape(&mut self, span: Span, list: &List<'t>) -> Shape {
        match list {
            List::Items(items) => {
                let shapes: Vec<Shape> = items.iter().map(|&item| self.shape(item)).collect();
                let known = (0..items.len()).find(|&at| shapes[at].ty != Ty::Unknown);
                for (at, shape) in shapes.iter().enumerate() {
                    if shape.depth != shapes[0].depth {
                        let (here, first) = (self.ast.get(items[at]).span, self.ast.get(items[0]).span);
                        let (found, wanted) = (depth_words(shape.depth), depth_words(shapes[0].depth));
                        self.out.push(types::shape(here, found, wanted, first, wanted));
                    } else if let Some(known) =
                        known.filter(|&known| shape.ty != Ty::Unknown && shapes[known].ty != shape.ty)
                    {
                        let help = "all elements of a row have one type";
                        self.out.push(types::mismatch(&self.typed(items[at]), &self.typed(items[known]), help));
                    }
                }
                // Nothing says what an empty list would hold; as a row of integers it can be run over.
                let ty = if items.is_empty() { Ty::Int } else { known.map_or(Ty::Unknown, |at| shapes[at].ty) };
                Shape { depth: 1 + shapes.first().map_or(0, |shape| shape.depth), ty }
            }
            List::Each { body, generators, filter } => {
                self.enter_all(generators);
                let shape = self.shape(*body);
                self.filter(*filter, span);
                self.leave(generators.len());
                Shape { depth: 1 + shape.depth, ..shape }
            }
        }
    }

    fn filter(&mut self, filter: Option<NodeId>, span: Span) {
        if let Some(filter) = filter {
            self.yes_no(filter, (span, "`with`"));
        }
    }

    /// Checks each element of a list with `check`; the indices are in force meanwhile.
    fn elements(&mut self, list: NodeId, mut check: impl FnMut(&mut Self, NodeId)) {
        let ast = self.ast;
        let node = ast.get(list);
        match &node.kind {
            Kind::List(List::Items(items)) => items.iter().for_each(|&item| check(self, item)),
            Kind::List(List::Each { body, generators, filter }) => {
                self.enter_all(generators);
                check(self, *body);
                self.filter(*filter, node.span);
                self.leave(generators.len());
            }
            _ => unreachable!("the grammar puts a list here"),
        }
    }

    pub(super) fn over(&mut self, span: Span, word: Word, list: NodeId) -> Ty {
        let end = self.ast.get(list).span.lo.max(span.lo + 1);
        let name = format!("`{}`", word.text());
        let by = (Span { hi: end, ..span }, &*name);
        if let Some(bound) = word.bound() {
            self.number(bound, by);
        }
        match word {
            Word::Sum | Word::Smallest | Word::Largest => {
                self.elements(list, |checker, element| checker.number(element, by));
                Ty::Int
            }
            Word::Different => {
                let mut column = Column::default();
                self.elements(list, |checker, element| {
                    let ty = checker.ty(element);
                    column.add(checker, element, ty);
                });
                Ty::YesNo
            }
            _ => {
                self.elements(list, |checker, element| checker.yes_no(element, by));
                if word == Word::Number { Ty::Int } else { Ty::YesNo }
            }
        }
    }

    pub(super) fn one_of(&mut self, left: NodeId, list: NodeId) -> Ty {
        let parts = self.parts(left);
        let tuple = self.ast.get(left).span;
        let mut columns: Vec<Column> = parts.iter().map(|_| Column::default()).collect();
        for (column, &part) in columns.iter_mut().zip(&parts) {
            let ty = self.ty(part);
            column.add(self, part, ty);
        }
        self.elements(list, |checker, entry| {
            let cells = checker.parts(entry);
            for (at, &cell) in cells.iter().enumerate() {
                let ty = checker.ty(cell);
                if cells.len() == columns.len() {
                    columns[at].add(checker, cell, ty);
                }
            }
            if cells.len() != columns.len() {
                let span = checker.ast.get(entry).span;
                checker.out.push(types::tuple_width(span, cells.len(), tuple, columns.len()));
            }
        });
        Ty::YesNo
    }

    /// The parts of a tuple; a single value is its own only part.
    fn parts(&self, id: NodeId) -> Vec<NodeId> {
        match &self.ast.get(id).kind {
            Kind::Tuple(items) => items.clone(),
            _ => vec![id],
        }
    }
}

fn depth_words(depth: usize) -> &'static str {
    match depth {
        0 => "single values",
        1 => "lists",
        _ => "lists of lists",
    }
}

/// Values that are compared with each other: of one type, but yes/no beside integers counts as 1/0.
#[derive(Default)]
struct Column {
    first: Option<(NodeId, Ty)>,
}

impl Column {
    fn add(&mut self, checker: &mut Checker<'_, '_>, node: NodeId, ty: Ty) {
        if ty == Ty::Unknown {
            return;
        }
        let Some((first, other)) = self.first else {
            self.first = Some((node, ty));
            return;
        };
        let counts = |ty| matches!(ty, Ty::Int | Ty::YesNo);
        if ty != other && !(counts(ty) && counts(other)) {
            let help = "values that are compared with each other have one type";
            checker.out.push(types::mismatch(&checker.typed(node), &checker.typed(first), help));
        }
    }
}
