//! Expressions, fully expanded: no rows, no loops, no names, only variables, constants and operators in an arena.
//!
//! Operands always have smaller ids than the node that uses them, so a forward pass over the arena meets every
//! operand first. Lists of operands lie in one pool; a node is 16 bytes.

use crate::define_id;
use crate::id::{Id, IdVec};
use crate::problem::{Domain, Problem, VarId};
use crate::span::Span;

define_id! {
    /// An expression.
    ExprId, "e"
}
define_id! {
    /// A table of constant rows.
    TableId, "t"
}

/// What an expression is: yes/no or an integer. A kind's value is the integer of its place.
#[derive(Clone, Copy, PartialEq, Eq, Hash, Debug)]
pub enum Type {
    /// Yes or no.
    YesNo,
    /// An integer.
    Number,
}

/// A comparison of two integers.
#[derive(Clone, Copy, PartialEq, Eq, Hash, Debug)]
pub enum Compare {
    /// Equal.
    Eq,
    /// Not equal.
    Ne,
    /// Less.
    Lt,
    /// Less or equal.
    Le,
}

/// Operands in the pool of an [`Exprs`].
#[derive(Clone, Copy, PartialEq, Eq, Hash, Debug)]
pub struct ExprList {
    start: u32,
    len: u32,
}

impl ExprList {
    /// How many operands.
    pub fn len(self) -> usize {
        self.len as usize
    }

    /// Whether there is no operand.
    pub fn is_empty(self) -> bool {
        self.len == 0
    }
}

/// One node. `YesNo` operands are marked *q*, `Number` operands *n*, in the comments.
#[derive(Clone, Copy, PartialEq, Eq, Hash, Debug)]
pub enum Expr {
    // Leaves.
    /// A yes/no constant.
    Truth(bool),
    /// An integer constant.
    Number(i64),
    /// A variable: yes/no for [`Domain::YesNo`], else the integer of its value.
    Var(VarId),

    // Yes/no results.
    /// Not *q*.
    Not(ExprId),
    /// All of the *q* hold; holds for none.
    All(ExprList),
    /// Some of the *q* holds; fails for none.
    Some(ExprList),
    /// An odd number of the *q* hold; fails for none.
    Odd(ExprList),
    /// A comparison of two *n*.
    Compare(Compare, ExprId, ExprId),
    /// The *n* are different from each other, every two of them; holds for none and for one.
    Different(ExprList),
    /// The tuple of *n* is one of the rows of the table.
    OneOf(ExprList, TableId),

    // Integer results.
    /// 1 where *q* holds, else 0.
    AsNumber(ExprId),
    /// How many of the *q* hold.
    Count(ExprList),
    /// The sum of the *n*; 0 for none.
    Sum(ExprList),
    /// The product of two *n*.
    Product(ExprId, ExprId),
    /// Minus *n*.
    Negate(ExprId),
    /// The size of *n* without its sign.
    Abs(ExprId),
    /// *n* divided by a positive constant, rounded down.
    Quotient(ExprId, i64),
    /// What [`Expr::Quotient`] leaves: from 0 to the constant less one.
    Remainder(ExprId, i64),
    /// The least of the *n*, of which there is at least one.
    Smallest(ExprList),
    /// The largest of the *n*, of which there is at least one.
    Largest(ExprList),

    // Either.
    /// The second operand where the first, a *q*, holds, else the third; both of one type.
    Choose(ExprId, ExprId, ExprId),
    /// The operand at the place given by the first, an *n* from 0 to the length less one; all of one type.
    Element(ExprId, ExprList),
}

const _: () = assert!(size_of::<Expr>() <= 16);

/// A table of constant rows, all of one width; rows are sorted and unique.
#[derive(Clone, PartialEq, Eq, Debug)]
pub struct Table {
    width: usize,
    cells: Vec<i64>,
}

impl Table {
    /// The table with these rows, sorted and without repetitions. Every row has `width` cells.
    pub fn new(width: usize, mut rows: Vec<Vec<i64>>) -> Self {
        assert!(width > 0 && rows.iter().all(|row| row.len() == width), "rows of one width");
        rows.sort();
        rows.dedup();
        Self { width, cells: rows.concat() }
    }

    /// Cells in a row.
    pub fn width(&self) -> usize {
        self.width
    }

    /// The rows in increasing order.
    pub fn rows(&self) -> std::slice::ChunksExact<'_, i64> {
        self.cells.chunks_exact(self.width)
    }
}

/// The arena.
#[derive(Clone, PartialEq, Eq, Debug, Default)]
pub struct Exprs {
    nodes: IdVec<ExprId, Expr>,
    spans: IdVec<ExprId, Option<Span>>,
    pool: Vec<ExprId>,
    tables: IdVec<TableId, Table>,
}

impl Exprs {
    /// No expression.
    pub fn new() -> Self {
        Self::default()
    }

    /// Adds a node; its operands are already there.
    pub fn add(&mut self, expr: Expr, span: Option<Span>) -> ExprId {
        self.spans.push(span);
        self.nodes.push(expr)
    }

    /// Adds a list of operands to the pool.
    pub fn list(&mut self, items: &[ExprId]) -> ExprList {
        let start = u32::try_from(self.pool.len()).expect("fewer than 2^32 operands");
        self.pool.extend_from_slice(items);
        ExprList { start, len: items.len() as u32 }
    }

    /// Adds a table.
    pub fn add_table(&mut self, table: Table) -> TableId {
        self.tables.push(table)
    }

    /// Puts another node in the place of one; its operands are nodes before it.
    pub fn replace(&mut self, id: ExprId, expr: Expr) {
        self.nodes[id] = expr;
    }

    /// The node.
    pub fn get(&self, id: ExprId) -> Expr {
        self.nodes[id]
    }

    /// Where the expression stands in the source.
    pub fn span(&self, id: ExprId) -> Option<Span> {
        self.spans[id]
    }

    /// The operands of a list.
    pub fn items(&self, list: ExprList) -> &[ExprId] {
        &self.pool[list.start as usize..(list.start + list.len) as usize]
    }

    /// The table.
    pub fn table(&self, id: TableId) -> &Table {
        &self.tables[id]
    }

    /// All tables.
    pub fn tables(&self) -> &IdVec<TableId, Table> {
        &self.tables
    }

    /// How many nodes.
    pub fn len(&self) -> usize {
        self.nodes.len()
    }

    /// Whether there is no node.
    pub fn is_empty(&self) -> bool {
        self.nodes.is_empty()
    }

    /// All nodes, operands before their users.
    pub fn iter(&self) -> impl DoubleEndedIterator<Item = (ExprId, &Expr)> + ExactSizeIterator {
        self.nodes.iter()
    }

    /// The operands of a node, in order.
    pub fn operands(&self, expr: Expr) -> Vec<ExprId> {
        match expr {
            Expr::Truth(_) | Expr::Number(_) | Expr::Var(_) => Vec::new(),
            Expr::Not(a) | Expr::AsNumber(a) | Expr::Negate(a) | Expr::Abs(a) => vec![a],
            Expr::Quotient(a, _) | Expr::Remainder(a, _) => vec![a],
            Expr::Compare(_, a, b) | Expr::Product(a, b) => vec![a, b],
            Expr::Choose(a, b, c) => vec![a, b, c],
            Expr::All(list) | Expr::Some(list) | Expr::Odd(list) | Expr::Count(list) => self.items(list).to_vec(),
            Expr::Different(list) | Expr::Sum(list) | Expr::Smallest(list) | Expr::Largest(list) => {
                self.items(list).to_vec()
            }
            Expr::OneOf(list, _) => self.items(list).to_vec(),
            Expr::Element(index, list) => std::iter::once(index).chain(self.items(list).iter().copied()).collect(),
        }
    }
}

impl Problem {
    /// The type of every expression, by id.
    pub fn types(&self) -> IdVec<ExprId, Type> {
        let mut types: IdVec<ExprId, Type> = IdVec::new();
        for (_, &expr) in self.exprs.iter() {
            let ty = match expr {
                Expr::Var(var) if self.vars()[var].domain == Domain::YesNo => Type::YesNo,
                Expr::Truth(_) | Expr::Not(_) | Expr::All(_) | Expr::Some(_) | Expr::Odd(_) => Type::YesNo,
                Expr::Compare(..) | Expr::Different(_) | Expr::OneOf(..) => Type::YesNo,
                Expr::Choose(_, a, _) => types[a],
                Expr::Element(_, list) => types[self.exprs.items(list)[0]],
                _ => Type::Number,
            };
            types.push(ty);
        }
        types
    }
}

/// Shorthands for building expressions without spans, as tests and generators do.
impl Exprs {
    /// A node without a span.
    pub fn node(&mut self, expr: Expr) -> ExprId {
        self.add(expr, None)
    }

    /// A node with a list of operands, without a span: `exprs.over(Expr::Sum, &[a, b])`.
    pub fn over(&mut self, make: impl FnOnce(ExprList) -> Expr, items: &[ExprId]) -> ExprId {
        let list = self.list(items);
        self.node(make(list))
    }

    /// The id a node would get if it were added now.
    pub fn next_id(&self) -> ExprId {
        ExprId::new(self.nodes.len())
    }
}
