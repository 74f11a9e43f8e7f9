//! The syntax tree, in an arena: nothing in it is boxed, so that dropping it never recurses, and every node knows how
//! deep it is, so that the recursive walks can refuse what is too deep before they start.

use crate::define_id;
use crate::id::IdVec;
use crate::problem::Sense;
use crate::span::{FileId, Span};

define_id! {
    /// An expression of the syntax tree.
    NodeId, "x"
}

/// A name with its place.
#[derive(Clone, Copy, Debug)]
pub struct Name<'t> {
    /// The name.
    pub text: &'t str,
    /// Where it stands.
    pub span: Span,
}

/// What a generator, an index or a pick runs over.
#[derive(Clone, Copy, Debug)]
pub enum Source {
    /// `a to b`
    Range(NodeId, NodeId),
    /// The name of a kind or a row, or a list.
    Of(NodeId),
}

/// `i in …`
#[derive(Clone, Copy, Debug)]
pub struct Generator<'t> {
    /// The index name.
    pub name: Name<'t>,
    /// What it runs over.
    pub source: Source,
}

/// What stands between `[` and `]`.
#[derive(Clone, Debug)]
pub enum List<'t> {
    /// `[a, b, c]`
    Items(Vec<NodeId>),
    /// `[body for generators with filter]`
    Each {
        /// The expression to repeat.
        body: NodeId,
        /// The loops, outermost first.
        generators: Vec<Generator<'t>>,
        /// The condition that a turn must meet.
        filter: Option<NodeId>,
    },
}

/// An operator between two operands, with its place.
#[derive(Clone, Copy, Debug)]
pub struct Op<T> {
    /// Which.
    pub what: T,
    /// Where it stands.
    pub span: Span,
}

/// `+` and `-`.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub enum Additive {
    /// `+`
    Plus,
    /// `-`
    Minus,
}

/// `*`, `/` and `mod`.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub enum Multiplicative {
    /// `*`
    Times,
    /// `/`
    Over,
    /// `mod`
    Mod,
}

/// The comparisons as they are written.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub enum Comparison {
    /// `=`
    Eq,
    /// `!=`
    Ne,
    /// `<`
    Lt,
    /// `<=`
    Le,
    /// `>`
    Gt,
    /// `>=`
    Ge,
}

/// `and` and `or`.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub enum Logic {
    /// `and`
    And,
    /// `or`
    Or,
}

/// The words over rows.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub enum Word {
    /// `all of`
    All,
    /// `some of`
    Some,
    /// `none of`
    None,
    /// `exactly K of`
    Exactly(NodeId),
    /// `at least K of`
    AtLeast(NodeId),
    /// `at most K of`
    AtMost(NodeId),
    /// `number of`
    Number,
    /// `sum`
    Sum,
    /// `smallest`
    Smallest,
    /// `largest`
    Largest,
    /// `different`
    Different,
    /// `odd`
    Odd,
    /// `even`
    Even,
}

impl Word {
    /// The word as it is written.
    pub fn text(self) -> &'static str {
        match self {
            Word::All => "all of",
            Word::Some => "some of",
            Word::None => "none of",
            Word::Exactly(_) => "exactly … of",
            Word::AtLeast(_) => "at least … of",
            Word::AtMost(_) => "at most … of",
            Word::Number => "number of",
            Word::Sum => "sum",
            Word::Smallest => "smallest",
            Word::Largest => "largest",
            Word::Different => "different",
            Word::Odd => "odd",
            Word::Even => "even",
        }
    }

    /// The number in front of `of`.
    pub fn bound(self) -> Option<NodeId> {
        match self {
            Word::Exactly(bound) | Word::AtLeast(bound) | Word::AtMost(bound) => Some(bound),
            _ => None,
        }
    }
}

/// An expression.
#[derive(Clone, Debug)]
pub enum Kind<'t> {
    /// A number without sign.
    Int(u64),
    /// `yes` or `no`
    Truth(bool),
    /// A name.
    Name(&'t str),
    /// `row[i, j]`
    Index(Name<'t>, Vec<NodeId>),
    /// `(a, b)`
    Tuple(Vec<NodeId>),
    /// `[ … ]`
    List(List<'t>),
    /// `not a`
    Not(NodeId),
    /// `-a`
    Negate(NodeId),
    /// `a + b - c`
    Sum(NodeId, Vec<(Op<Additive>, NodeId)>),
    /// `a * b / c mod d`
    Product(NodeId, Vec<(Op<Multiplicative>, NodeId)>),
    /// `a < b <= c`
    Chain(NodeId, Vec<(Op<Comparison>, NodeId)>),
    /// `a one of [ … ]`
    OneOf(NodeId, NodeId),
    /// `a and b`
    Logic(NodeId, Vec<(Op<Logic>, NodeId)>),
    /// `a needs b needs c`
    Needs(Vec<NodeId>),
    /// `if a then b else c`
    If(NodeId, NodeId, NodeId),
    /// `abs(a)`
    Abs(NodeId),
    /// WORD `[ … ]`
    Over(Word, NodeId),
}

/// An expression with its place and its depth.
#[derive(Clone, Debug)]
pub struct Node<'t> {
    /// What it is.
    pub kind: Kind<'t>,
    /// Where it stands.
    pub span: Span,
    /// 1 for a leaf.
    pub depth: u32,
}

/// A statement.
#[derive(Clone, Debug)]
pub enum Statement<'t> {
    /// `title "…"`, with the quotes.
    Title(Name<'t>),
    /// `known name[…] = value`
    Known(Definition<'t>),
    /// `kind name = a | b`
    Kind(Name<'t>, Vec<Name<'t>>),
    /// `pick name[…] in domain`
    Pick(Name<'t>, Vec<Generator<'t>>, Option<Source>),
    /// `let name[…] = value`
    Let(Definition<'t>),
    /// `must expression`
    Must(NodeId),
    /// `least expression` or `most expression`
    Objective(Sense, NodeId),
    /// A lone expression: the value of a `--set`.
    Value(NodeId),
}

/// The body of a `known` or a `let`.
#[derive(Clone, Debug)]
pub struct Definition<'t> {
    /// The name.
    pub name: Name<'t>,
    /// Its indices; none for a single value or a plain list.
    pub indices: Vec<Generator<'t>>,
    /// The value.
    pub value: NodeId,
}

/// All expressions of a run.
#[derive(Clone, Debug)]
pub struct Ast<'t> {
    /// The file being parsed; places are in it.
    pub file: FileId,
    nodes: IdVec<NodeId, Node<'t>>,
}

impl<'t> Ast<'t> {
    /// No expression yet.
    pub fn new(file: FileId) -> Self {
        Self { file, nodes: IdVec::new() }
    }

    /// Adds a node that stands at these bytes of the file.
    pub fn node(&mut self, kind: Kind<'t>, lo: usize, hi: usize) -> NodeId {
        let depth = 1 + children(&kind).into_iter().map(|child| self.nodes[child].depth).max().unwrap_or(0);
        self.nodes.push(Node { kind, span: self.span(lo, hi), depth })
    }

    /// The place of these bytes of the file.
    pub fn span(&self, lo: usize, hi: usize) -> Span {
        Span::new(self.file, lo, hi)
    }

    /// A name at these bytes of the file.
    pub fn name(&self, text: &'t str, lo: usize, hi: usize) -> Name<'t> {
        Name { text, span: self.span(lo, hi) }
    }

    /// The node.
    pub fn get(&self, id: NodeId) -> &Node<'t> {
        &self.nodes[id]
    }

    /// How many nodes.
    pub fn node_count(&self) -> usize {
        self.nodes.len()
    }
}

/// The expressions that a source is made of.
pub fn of_source(source: Source) -> Vec<NodeId> {
    match source {
        Source::Range(lo, hi) => vec![lo, hi],
        Source::Of(node) => vec![node],
    }
}

/// The direct parts of an expression, in source order.
pub fn children(kind: &Kind<'_>) -> Vec<NodeId> {
    match kind {
        Kind::Int(_) | Kind::Truth(_) | Kind::Name(_) => Vec::new(),
        Kind::Index(_, items) | Kind::Tuple(items) | Kind::Needs(items) => items.clone(),
        Kind::List(List::Items(items)) => items.clone(),
        Kind::List(List::Each { body, generators, filter }) => {
            let sources = generators.iter().flat_map(|generator| of_source(generator.source));
            std::iter::once(*body).chain(sources).chain(*filter).collect()
        }
        Kind::Not(a) | Kind::Negate(a) | Kind::Abs(a) => vec![*a],
        Kind::Sum(first, rest) => chained(*first, rest),
        Kind::Product(first, rest) => chained(*first, rest),
        Kind::Chain(first, rest) => chained(*first, rest),
        Kind::Logic(first, rest) => chained(*first, rest),
        Kind::OneOf(a, b) => vec![*a, *b],
        Kind::If(a, b, c) => vec![*a, *b, *c],
        Kind::Over(word, list) => word.bound().into_iter().chain([*list]).collect(),
    }
}

fn chained<T>(first: NodeId, rest: &[(Op<T>, NodeId)]) -> Vec<NodeId> {
    std::iter::once(first).chain(rest.iter().map(|&(_, node)| node)).collect()
}
