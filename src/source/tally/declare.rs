//! Statements, one after the other: each is checked, then expanded, and what it declares is known from then on.
//!
//! A statement with a mistake declares its names as broken: whatever uses them is checked for everything else and is not
//! expanded, so that one mistake is one message and independent mistakes are all found.

use std::rc::Rc;

use rustc_hash::{FxHashMap, FxHashSet};

use crate::diag::Diagnostic;
use crate::problem::{Kind as ProblemKind, Objective, Sense};
use crate::source::tally::ast::{Ast, Definition, Generator, Kind, Name, NodeId, Source, Statement};
use crate::source::tally::check::{Checker, Facts, Shape, words};
use crate::source::tally::lower::{Builder, Cells, Lowered, Lowering, Stop};
use crate::source::tally::mistakes::types::Typed;
use crate::source::tally::mistakes::{names, types};
use crate::source::tally::scope::{Maker, Row, Scope, Ty, Val, What};
use crate::span::Span;

/// A value given by `--set`.
#[derive(Clone, Copy, Debug)]
pub(crate) struct Setting {
    /// The value; `None` where it could not be read.
    pub(crate) value: Option<NodeId>,
    /// All of it.
    pub(crate) span: Span,
}

/// A pick, for the warning about those that no constraint mentions.
pub(crate) struct Picked<'t> {
    pub(crate) name: Name<'t>,
    pub(crate) cells: Rc<[Val]>,
}

/// What all statements share.
pub(crate) struct Reader<'t> {
    ast: Ast<'t>,
    pub(crate) scope: Scope<'t>,
    facts: Facts,
    unknown: FxHashSet<&'t str>,
    pub(crate) build: Builder,
    pub(crate) out: Vec<Diagnostic>,
    pub(crate) settings: FxHashMap<&'t str, Setting>,
    pub(crate) picks: Vec<Picked<'t>>,
    title: Option<Span>,
    objective: Option<Span>,
    /// The limit of expansion was passed: nothing more is expanded.
    pub(crate) stopped: bool,
}

impl<'t> Reader<'t> {
    pub(crate) fn new(ast: Ast<'t>, out: Vec<Diagnostic>) -> Self {
        let facts = Facts::new(ast.node_count());
        Self {
            ast,
            scope: Scope::default(),
            facts,
            unknown: FxHashSet::default(),
            build: Builder::default(),
            out,
            settings: FxHashMap::default(),
            picks: Vec::new(),
            title: None,
            objective: None,
            stopped: false,
        }
    }

    /// Checks and expands a statement.
    pub(crate) fn statement(&mut self, statement: &Statement<'t>, span: Span) {
        match statement {
            Statement::Title(text) => self.set_title(*text, span),
            Statement::Known(definition) => self.define(definition, Maker::Known),
            Statement::Let(definition) => self.define(definition, Maker::Let),
            Statement::Kind(name, values) => self.kind(*name, values),
            Statement::Pick(name, indices, domain) => self.pick(*name, indices, *domain),
            Statement::Must(node) => self.must(*node, span),
            Statement::Objective(sense, node) => self.aim(*sense, *node, span),
            Statement::Value(_) => {}
        }
    }

    /// Declares the names of a statement that could not be read.
    pub(crate) fn broken(&mut self, names: &[(&'t str, Span)]) {
        for &(text, span) in names {
            if self.scope.find(text).is_none() {
                self.scope.declare(Name { text, span }, What::Broken);
            }
        }
    }

    fn set_title(&mut self, text: Name<'t>, span: Span) {
        if let Some(first) = self.title {
            self.out.push(names::second("title", span, first));
            return;
        }
        self.title = Some(span);
        self.build.problem.title = Some(unquote(text.text));
    }

    /// Declares a name unless it is taken.
    fn declare(&mut self, name: Name<'t>, what: What) {
        if let Some(first) = self.scope.find(name.text) {
            let first = self.scope.get(first);
            // The first declaration stays, so that what uses it is still checked.
            if first.name.span != name.span {
                self.out.push(names::twice(name.text, name.span, first.name.span));
            }
            return;
        }
        self.scope.declare(name, what);
    }

    fn kind(&mut self, name: Name<'t>, values: &[Name<'t>]) {
        if let Some(first) = self.scope.find(name.text) {
            self.out.push(names::twice(name.text, name.span, self.scope.get(first).name.span));
        }
        let boxed = |name: &Name<'t>| Box::from(name.text);
        let record = ProblemKind { name: boxed(&name), values: values.iter().map(boxed).collect() };
        let kind = self.build.problem.kinds.push(record);
        if self.scope.find(name.text).is_none() {
            self.scope.declare(name, What::Kind(kind));
        }
        for (place, value) in values.iter().enumerate() {
            self.declare(*value, What::Value(kind, place as i64));
        }
    }

    fn pick(&mut self, name: Name<'t>, indices: &[Generator<'t>], domain: Option<Source>) {
        let before = self.out.len();
        let ty = self.checked(|checker| {
            let ty = domain.map_or(Ty::YesNo, |domain| checker.domain(domain));
            checker.indices(indices);
            ty
        });
        let Some(ty) = ty.filter(|_| self.out.len() == before) else { return self.declare(name, What::Broken) };
        let expanded = self.expanded(|lowering| {
            let dims = lowering.dims(indices)?;
            let domain = lowering.pick_domain(domain, ty)?;
            let len = dims.iter().map(|dim| dim.size()).product::<usize>();
            lowering.room(len, name.span)?;
            let mut cells = Vec::with_capacity(len);
            lowering.each_index(&dims, indices, &mut |lowering| {
                let places: Vec<String> =
                    lowering.turns.iter().map(|turn| lowering.value_text(turn.ty, turn.value)).collect();
                let full = if places.is_empty() {
                    name.text.to_owned()
                } else {
                    format!("{}[{}]", name.text, places.join(", "))
                };
                cells.push(lowering.build.variable(full, domain, name.span));
                Ok(())
            })?;
            Ok((dims, cells))
        });
        if let Some((_, cells)) = &expanded {
            self.picks.push(Picked { name, cells: cells.as_slice().into() });
        }
        self.row(name, expanded, ty, Maker::Pick);
    }

    fn define(&mut self, definition: &Definition<'t>, maker: Maker) {
        let before = self.out.len();
        let shape = self.definition_shape(definition, definition.value);
        let mut definition = definition.clone();
        let mut shape = shape.filter(|_| self.out.len() == before);
        if maker == Maker::Known
            && let Some(setting) = self.settings.get(definition.name.text).copied()
        {
            shape = self.set(&mut definition, shape, setting);
        }
        let Some(shape) = shape else { return self.declare(definition.name, What::Broken) };
        let expanded = self.expanded(|lowering| lowering.cells(&definition, shape, maker));
        self.row(definition.name, expanded, shape.ty, maker);
    }

    /// Replaces the value of a known by the one given; the shape and the type stay.
    fn set(&mut self, definition: &mut Definition<'t>, shape: Option<Shape>, setting: Setting) -> Option<Shape> {
        let value = setting.value?;
        let before = self.out.len();
        let new = self.definition_shape(definition, value)?;
        let shape = shape?;
        if self.out.len() > before {
            return None;
        }
        let place = self.ast.get(definition.value).span;
        let depth = |shape: Shape| if shape.depth == 0 { definition.indices.len() } else { shape.depth };
        let row = |depth: usize, ty: Ty| match depth {
            0 => words(&self.build.problem.kinds, ty),
            depth => format!(
                "a row with {} of {}",
                crate::diag::plural(depth, "index", "indices"),
                words(&self.build.problem.kinds, ty)
            ),
        };
        if new.ty != shape.ty || depth(new) != depth(shape) {
            let found = Typed { span: setting.span, ty: row(depth(new), new.ty) };
            let other = Typed { span: place, ty: row(depth(shape), shape.ty) };
            self.out.push(types::mismatch(&found, &other, "give a value of the same type as in the file"));
            return None;
        }
        definition.value = value;
        Some(new)
    }

    /// The shape of a definition's value. The index names are known to a value that is one expression for all elements
    /// and not to a list, whose places are the indices.
    fn definition_shape(&mut self, definition: &Definition<'t>, value: NodeId) -> Option<Shape> {
        let ast = &self.ast;
        let is_list = matches!(ast.get(value).kind, Kind::List(_));
        let wanted = definition.indices.len();
        let span = ast.get(value).span;
        let shape = self.checked(|checker| {
            if !checker.shallow(value) {
                return None;
            }
            checker.indices(&definition.indices);
            if is_list {
                checker.hide();
            }
            Some(checker.shape(value))
        })??;
        if is_list && wanted > 0 && shape.depth != wanted {
            let lists = |depth| crate::diag::plural(depth, "level of lists", "levels of lists");
            let (found, expected) = (lists(shape.depth), lists(wanted));
            self.out.push(types::shape(span, &found, &expected, definition.name.span, "one level for each index"));
        }
        Some(shape)
    }

    fn row(&mut self, name: Name<'t>, expanded: Option<Cells>, ty: Ty, maker: Maker) {
        let what = match expanded {
            Some((dims, cells)) => What::Row(Row { dims, ty, cells: cells.into(), maker }),
            None => What::Broken,
        };
        self.declare(name, what);
    }

    fn must(&mut self, node: NodeId, span: Span) {
        let before = self.out.len();
        let word = Span { hi: span.lo + 4, ..span };
        let sound = self.checked(|checker| {
            if checker.shallow(node) {
                checker.yes_no(node, (word, "`must`"));
            }
        });
        if sound.is_none() || self.out.len() > before {
            return;
        }
        self.expanded(|lowering| lowering.constrain(node, span));
    }

    fn aim(&mut self, sense: Sense, node: NodeId, span: Span) {
        if let Some(first) = self.objective {
            self.out.push(names::second("objective", span, first));
        }
        let before = self.out.len();
        let first = self.objective.is_none();
        self.objective.get_or_insert(span);
        let (word, len) = if sense == Sense::Least { ("`least`", 5) } else { ("`most`", 4) };
        let word = (Span { hi: span.lo + len, ..span }, word);
        let sound = self.checked(|checker| {
            if checker.shallow(node) {
                checker.number(node, word);
            }
        });
        if sound.is_none() || self.out.len() > before || !first {
            return;
        }
        self.expanded(|lowering| {
            let val = lowering.number(node)?;
            let expr = lowering.expr(val, span);
            lowering.build.problem.objective = Some(Objective { sense, expr, span: Some(span) });
            Ok(())
        });
    }

    /// Runs a checker; `None` where a broken name stops the expansion.
    fn checked<T>(&mut self, check: impl FnOnce(&mut Checker<'_, 't>) -> T) -> Option<T> {
        let kinds = &self.build.problem.kinds;
        let mut checker =
            Checker::new(&self.ast, &self.scope, kinds, &mut self.facts, &mut self.unknown, &mut self.out);
        let found = check(&mut checker);
        (!checker.is_broken()).then_some(found)
    }

    /// Runs an expansion; `None` after a mistake.
    fn expanded<T>(&mut self, expand: impl FnOnce(&mut Lowering<'_, 't>) -> Lowered<T>) -> Option<T> {
        if self.stopped {
            return None;
        }
        let mut lowering = Lowering {
            ast: &self.ast,
            scope: &self.scope,
            facts: &self.facts,
            build: &mut self.build,
            out: &mut self.out,
            turns: Vec::new(),
        };
        let done = expand(&mut lowering);
        self.stopped |= matches!(done, Err(Stop::Limit));
        done.ok()
    }
}

/// The text between the quotes.
fn unquote(text: &str) -> String {
    let mut plain = String::new();
    let mut signs = text.get(1..text.len().saturating_sub(1)).unwrap_or("").chars();
    while let Some(sign) = signs.next() {
        plain.extend(if sign == '\\' { signs.next() } else { Some(sign) });
    }
    plain
}
