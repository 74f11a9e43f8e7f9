//! Names and types, once for each expression of the syntax tree and before anything is expanded: a mistake in a loop is
//! one message, and what a constant condition kills is still checked for names and types.
//!
//! Input: an expression, the names declared above it. Output: [`Facts`] about each of its nodes, and messages.
//! After: where there was no message, expansion meets no name it does not know and no type that does not fit.
//!
//! A type that is not known because of an earlier mistake goes with everything.

mod operators;
mod rows;

pub(crate) use rows::Shape;
use rustc_hash::FxHashSet;

use crate::diag::Diagnostic;
use crate::id::{Id, IdVec};
use crate::problem::{Kind as ProblemKind, KindId};
use crate::source::tally::ast::{Ast, Kind, Name, NodeId};
use crate::source::tally::limits::{MAX_MESSAGES, MAX_NESTING};
use crate::source::tally::mistakes::types::Typed;
use crate::source::tally::mistakes::{names, syntax, types};
use crate::source::tally::scope::{EntityId, Scope, Ty, What};
use crate::span::Span;

/// What a name in an expression means.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub(crate) enum Meaning {
    /// Not a name, or not a sound one.
    Nothing,
    /// The index of the loop at this depth, from 0 outside.
    Loop(usize),
    /// A declared value, row or kind.
    Entity(EntityId),
}

/// What the checker found about each node.
pub(crate) struct Facts {
    types: Vec<Ty>,
    meanings: Vec<Meaning>,
}

impl Facts {
    /// Nothing known about a tree of this many nodes.
    pub(crate) fn new(nodes: usize) -> Self {
        Self { types: vec![Ty::Unknown; nodes], meanings: vec![Meaning::Nothing; nodes] }
    }

    /// The type of a node that was checked.
    pub(crate) fn ty(&self, node: NodeId) -> Ty {
        self.types[node.index()]
    }

    /// The meaning of a name that was checked.
    pub(crate) fn meaning(&self, node: NodeId) -> Meaning {
        self.meanings[node.index()]
    }
}

/// An index that is in force.
struct Loop<'t> {
    name: Name<'t>,
    ty: Ty,
}

/// The checker of one statement.
pub(crate) struct Checker<'a, 't> {
    ast: &'a Ast<'t>,
    scope: &'a Scope<'t>,
    kinds: &'a IdVec<KindId, ProblemKind>,
    facts: &'a mut Facts,
    /// Unknown names that were reported: once is enough.
    unknown: &'a mut FxHashSet<&'t str>,
    out: &'a mut Vec<Diagnostic>,
    loops: Vec<Loop<'t>>,
    /// Indices that are out of force inside the list of their row.
    hidden: Vec<Name<'t>>,
    /// Whether something without a message of its own stops the expansion: a broken name, or an unknown one again.
    broken: bool,
}

impl<'a, 't> Checker<'a, 't> {
    /// A checker that knows the names declared so far.
    pub(crate) fn new(
        ast: &'a Ast<'t>,
        scope: &'a Scope<'t>,
        kinds: &'a IdVec<KindId, ProblemKind>,
        facts: &'a mut Facts,
        unknown: &'a mut FxHashSet<&'t str>,
        out: &'a mut Vec<Diagnostic>,
    ) -> Self {
        Self { ast, scope, kinds, facts, unknown, out, loops: Vec::new(), hidden: Vec::new(), broken: false }
    }

    /// Whether an expression that was checked uses a name whose declaration is broken or missing.
    pub(crate) fn is_broken(&self) -> bool {
        self.broken
    }

    /// Whether the expression is shallow enough to be walked; says so where it is not.
    pub(crate) fn shallow(&mut self, root: NodeId) -> bool {
        let node = self.ast.get(root);
        let fits = node.depth <= MAX_NESTING;
        if !fits {
            self.out.push(syntax::too_deep(node.span, node.depth));
        }
        fits
    }

    /// The type of an expression; finds and reports what is wrong in it.
    pub(crate) fn ty(&mut self, id: NodeId) -> Ty {
        let ast = self.ast;
        let node = ast.get(id);
        let ty = match &node.kind {
            Kind::Int(_) => Ty::Int,
            Kind::Truth(_) => Ty::YesNo,
            Kind::Name(name) => self.name(id, Name { text: name, span: node.span }),
            Kind::Index(name, indices) => self.index(id, *name, indices),
            Kind::Tuple(items) => {
                for &item in items {
                    self.ty(item);
                }
                self.out.push(syntax::tuple(node.span));
                Ty::Unknown
            }
            Kind::List(_) => {
                self.out.push(syntax::list(node.span));
                Ty::Unknown
            }
            Kind::Not(inner) => {
                self.yes_no(*inner, (self.word(node.span, 3), "`not`"));
                Ty::YesNo
            }
            Kind::Negate(inner) => {
                self.number(*inner, (self.word(node.span, 1), "`-`"));
                Ty::Int
            }
            Kind::Abs(inner) => {
                self.number(*inner, (self.word(node.span, 3), "`abs`"));
                Ty::Int
            }
            Kind::Sum(first, rest) => self.sum(*first, rest),
            Kind::Product(first, rest) => self.product(*first, rest),
            Kind::Chain(first, rest) => self.chain(*first, rest),
            Kind::Logic(first, rest) => self.logic(*first, rest),
            Kind::Needs(items) => {
                items.iter().for_each(|&item| self.yes_no(item, (node.span, "`needs`")));
                Ty::YesNo
            }
            Kind::If(condition, yes, no) => self.choice(node.span, *condition, *yes, *no),
            Kind::OneOf(left, list) => self.one_of(*left, *list),
            Kind::Over(word, list) => self.over(node.span, *word, *list),
        };
        self.facts.types[id.index()] = ty;
        ty
    }

    /// The first letters of a place: the word that an expression begins with.
    fn word(&self, span: Span, len: u32) -> Span {
        Span { hi: span.lo + len, ..span }
    }

    /// Wants yes/no.
    pub(crate) fn yes_no(&mut self, id: NodeId, by: (Span, &str)) {
        let ty = self.ty(id);
        if matches!(ty, Ty::Int | Ty::Kind(_)) {
            let help = match ty {
                Ty::Int => "compare it, as in `load != 0`: an integer is never a yes/no",
                _ => "compare it, as in `sonar = bow`",
            };
            self.wrong(id, "yes/no", by, help);
        }
    }

    /// Wants an integer, or yes/no to count as 1/0.
    pub(crate) fn number(&mut self, id: NodeId, by: (Span, &str)) {
        if matches!(self.ty(id), Ty::Kind(_)) {
            self.wrong(id, "an integer", by, "values of a kind can only be compared with `=` and `!=`");
        }
    }

    /// Wants an integer and nothing else.
    pub(crate) fn integer(&mut self, id: NodeId, by: (Span, &str)) {
        if matches!(self.ty(id), Ty::Kind(_) | Ty::YesNo) {
            self.wrong(id, "an integer", by, "write an integer here");
        }
    }

    fn wrong(&mut self, id: NodeId, wanted: &str, by: (Span, &str), help: &str) {
        let declared = self.declared(id);
        self.out.push(types::wrong(&self.typed(id), wanted, by, declared, help));
    }

    /// A node that was checked, with its type in words.
    fn typed(&self, id: NodeId) -> Typed {
        Typed { span: self.ast.get(id).span, ty: self.words(self.facts.ty(id)) }
    }

    /// A type in words.
    pub(crate) fn words(&self, ty: Ty) -> String {
        words(self.kinds, ty)
    }

    /// Where the name got its type, if the node is one.
    fn declared(&self, id: NodeId) -> Option<Span> {
        match self.facts.meaning(id) {
            Meaning::Nothing => None,
            Meaning::Loop(slot) => self.loops.get(slot).map(|index| index.name.span),
            Meaning::Entity(entity) => Some(self.scope.get(entity).name.span),
        }
    }

    fn name(&mut self, id: NodeId, name: Name<'t>) -> Ty {
        if let Some(slot) = self.loops.iter().rposition(|index| index.name.text == name.text) {
            self.facts.meanings[id.index()] = Meaning::Loop(slot);
            return self.loops[slot].ty;
        }
        let Some(entity) = self.find(id, name) else { return Ty::Unknown };
        let declared = self.scope.get(entity).name.span;
        match &self.scope.get(entity).what {
            What::Broken => {
                self.broken = true;
                Ty::Unknown
            }
            What::Value(kind, _) => Ty::Kind(*kind),
            What::Row(row) if row.dims.is_empty() => row.ty,
            What::Row(row) => {
                self.out.push(names::row_as_value(name.span, name.text, declared, row.dims.len()));
                Ty::Unknown
            }
            What::Kind(_) => {
                self.out.push(names::kind_as_value(name.span, name.text, declared));
                Ty::Unknown
            }
        }
    }

    fn index(&mut self, id: NodeId, name: Name<'t>, indices: &[NodeId]) -> Ty {
        let found: Vec<Ty> = indices.iter().map(|&index| self.ty(index)).collect();
        if let Some(index) = self.loops.iter().rfind(|index| index.name.text == name.text) {
            self.out.push(names::value_as_row(name.span, name.text, Some(index.name.span)));
            return Ty::Unknown;
        }
        let Some(entity) = self.find(id, name) else { return Ty::Unknown };
        let scope = self.scope;
        let declared = scope.get(entity).name.span;
        match &scope.get(entity).what {
            What::Broken => {
                self.broken = true;
                Ty::Unknown
            }
            What::Row(row) if !row.dims.is_empty() => {
                if row.dims.len() != indices.len() {
                    let span = self.ast.get(indices[0]).span.to(self.ast.get(indices[indices.len() - 1]).span);
                    self.out.push(names::index_count(span, name.text, indices.len(), row.dims.len(), declared));
                    return row.ty;
                }
                for ((&index, &ty), dim) in indices.iter().zip(&found).zip(&row.dims) {
                    if ty != Ty::Unknown && ty != dim.ty() {
                        let wanted = self.words(dim.ty());
                        let help = "a row is indexed by what it was declared over";
                        self.wrong(index, &wanted, (declared, &format!("the row `{}`", name.text)), help);
                    }
                }
                row.ty
            }
            What::Kind(_) => {
                self.out.push(names::kind_as_value(name.span, name.text, declared));
                Ty::Unknown
            }
            What::Row(_) | What::Value(..) => {
                self.out.push(names::value_as_row(name.span, name.text, Some(declared)));
                Ty::Unknown
            }
        }
    }

    /// The declared name, noted at the node; reports an unknown one.
    fn find(&mut self, id: NodeId, name: Name<'t>) -> Option<EntityId> {
        let found = self.scope.find(name.text);
        match found {
            Some(entity) => self.facts.meanings[id.index()] = Meaning::Entity(entity),
            None => {
                // Once for each name; the later places are broken all the same.
                let hidden = self.hidden.iter().find(|index| index.text == name.text);
                if let Some(index) = hidden {
                    self.out.push(names::index_in_list(name.span, name.text, index.span));
                } else if self.unknown.insert(name.text) {
                    let later = self.scope.later(name.text);
                    // Looking for a name that is alike takes time; after many messages nobody reads it.
                    let like = (self.out.len() < MAX_MESSAGES).then(|| self.scope.like(name.text)).flatten();
                    self.out.push(names::unknown(name.span, name.text, later, like));
                }
                self.broken = true;
            }
        }
        found
    }
}

/// A type in words.
pub(crate) fn words(kinds: &IdVec<KindId, ProblemKind>, ty: Ty) -> String {
    match ty {
        Ty::YesNo => "yes/no".to_owned(),
        Ty::Int => "an integer".to_owned(),
        Ty::Kind(kind) => format!("a value of {}", kinds[kind].name),
        Ty::Unknown => "something unknown".to_owned(),
    }
}
