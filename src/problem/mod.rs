//! The one meaning: what is to be chosen, and what must hold.
//!
//! A [`Problem`] has variables with finite domains and constraints over them. Constraints come in two shapes, and a
//! problem may have both: expressions in an arena ([`Exprs`]), which the tally language is expanded to, and flat
//! [`Clauses`] over the problem's bits, which a DIMACS file is. Nothing here knows an encoding beyond the one between
//! values and bits ([`code`]), and nothing here knows another room.
//!
//! [`Problem::holds`] is the reference: a direct reading of the constraints over integers. Every other reading in the
//! crate (the judge's clauses and rows, the maker's network, the circuits) is tested against it.

pub mod bits;
pub mod check;
pub mod clauses;
pub mod code;
pub mod eval;
pub mod expr;
pub mod restrict;
pub mod text;

pub use bits::Bits;
pub use clauses::{BitLit, Clauses};
pub use expr::{Compare, Expr, ExprId, ExprList, Exprs, Table, TableId, Type};

use crate::define_id;
pub use crate::id::ConstraintId;
use crate::id::{Id, IdVec};
use crate::span::Span;

define_id! {
    /// A variable: one `pick` of the language, one element of a picked row, one DIMACS variable.
    VarId, "v"
}
define_id! {
    /// A bit: one Boolean of the problem once its variables are encoded. A DIMACS variable *v* is bit *v* - 1.
    BitId, "b"
}
define_id! {
    /// A kind: a named list of values.
    KindId, "k"
}

/// The values a variable can take.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub enum Domain {
    /// No or yes, as 0 or 1; one bit.
    YesNo,
    /// The integers `lo..=hi`.
    Range {
        /// The least value.
        lo: i64,
        /// The largest value, at least `lo`.
        hi: i64,
    },
    /// The values of a kind, as their places in its declaration from 0.
    Kind(KindId),
}

/// A variable.
#[derive(Clone, PartialEq, Eq, Debug)]
pub struct Var {
    /// The name as the user would write it (`on[2]`); empty for a DIMACS variable, which is named by its number.
    pub name: Box<str>,
    /// Its values.
    pub domain: Domain,
    /// Its lowest bit.
    pub first_bit: BitId,
    /// How many bits it has; 0 where the domain has one value.
    pub width: u8,
    /// Where it was declared.
    pub span: Option<Span>,
}

/// A named list of values.
#[derive(Clone, PartialEq, Eq, Debug)]
pub struct Kind {
    /// Its name.
    pub name: Box<str>,
    /// The names of its values; a value's number is its place here.
    pub values: Vec<Box<str>>,
}

/// Where a constraint came from.
#[derive(Clone, PartialEq, Eq, Debug, Default)]
pub struct Origin {
    /// The statement.
    pub span: Option<Span>,
    /// The loop names and their values, outermost first, where a statement was expanded into several constraints.
    pub bindings: Vec<(Box<str>, Box<str>)>,
}

/// An expression that must hold.
#[derive(Clone, PartialEq, Eq, Debug)]
pub struct Constraint {
    /// A yes/no expression.
    pub expr: ExprId,
    /// Where it came from.
    pub origin: Origin,
}

/// Which way an objective points.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub enum Sense {
    /// As small as possible.
    Least,
    /// As large as possible.
    Most,
}

/// What to make small or large.
#[derive(Clone, PartialEq, Eq, Debug)]
pub struct Objective {
    /// The direction.
    pub sense: Sense,
    /// An integer expression.
    pub expr: ExprId,
    /// Where it stands.
    pub span: Option<Span>,
}

/// A constraint problem.
///
/// Build one with [`Problem::new`] and the `add_*` methods; [`check::check`] lists the invariants that readers must
/// establish and that every room relies on.
#[derive(Clone, PartialEq, Eq, Debug, Default)]
pub struct Problem {
    /// The title, where the source gives one.
    pub title: Option<String>,
    /// The kinds.
    pub kinds: IdVec<KindId, Kind>,
    /// The arena of expressions.
    pub exprs: Exprs,
    /// Expressions that must hold.
    pub constraints: Vec<Constraint>,
    /// Clauses that must hold.
    pub clauses: Clauses,
    /// The bits a solution is projected on, in increasing order; `None` where every bit counts.
    pub shown: Option<Vec<BitId>>,
    /// What to make small or large; counting ignores it.
    pub objective: Option<Objective>,
    vars: IdVec<VarId, Var>,
    bit_count: usize,
}

impl Problem {
    /// A problem without variables and constraints: one solution, the empty one.
    pub fn new() -> Self {
        Self::default()
    }

    /// Adds a variable; its bits follow those of the variables before it.
    pub fn add_var(&mut self, name: impl Into<Box<str>>, domain: Domain, span: Option<Span>) -> VarId {
        let width = code::width(self.size(domain));
        let first_bit = BitId::new(self.bit_count);
        self.bit_count += usize::from(width);
        self.vars.push(Var { name: name.into(), domain, first_bit, width, span })
    }

    /// Adds `count` yes/no variables that are named by their number, as a DIMACS header declares them.
    pub fn add_numbered_vars(&mut self, count: usize) {
        self.vars.reserve(count);
        for _ in 0..count {
            self.add_var("", Domain::YesNo, None);
        }
    }

    /// Adds a constraint.
    pub fn must(&mut self, expr: ExprId, origin: Origin) {
        self.constraints.push(Constraint { expr, origin });
    }

    /// The variables, in source order.
    pub fn vars(&self) -> &IdVec<VarId, Var> {
        &self.vars
    }

    /// How many bits the variables have together.
    pub fn bit_count(&self) -> usize {
        self.bit_count
    }

    /// All bits in order.
    pub fn bits(&self) -> impl DoubleEndedIterator<Item = BitId> + ExactSizeIterator + use<> {
        (0..self.bit_count).map(BitId::new)
    }

    /// The number of constraints: expressions and clauses together.
    pub fn constraint_count(&self) -> usize {
        self.constraints.len() + self.clauses.len()
    }

    /// The variable that a bit belongs to, and the place of the bit in it (0 is the lowest).
    pub fn var_of(&self, bit: BitId) -> (VarId, usize) {
        // The variable is the last one that begins at or before the bit and has bits at all.
        let after = self.vars.as_slice().partition_point(|var| var.first_bit <= bit);
        let at = self.vars.as_slice()[..after]
            .iter()
            .rposition(|var| var.width > 0)
            .expect("every bit belongs to a variable");
        (VarId::new(at), bit.index() - self.vars.as_slice()[at].first_bit.index())
    }

    /// The number of values in a domain, less one: this fits where the number itself might not.
    pub fn size(&self, domain: Domain) -> u64 {
        match domain {
            Domain::YesNo => 1,
            Domain::Range { lo, hi } => hi.wrapping_sub(lo) as u64,
            Domain::Kind(kind) => self.kinds[kind].values.len() as u64 - 1,
        }
    }

    /// The name of a variable as a message would print it.
    pub fn var_name(&self, var: VarId) -> String {
        match &*self.vars[var].name {
            "" => (var.index() + 1).to_string(),
            name => name.to_owned(),
        }
    }

    /// A value of a domain as a message would print it: `yes`, `stern`, `17`.
    pub fn value_name(&self, domain: Domain, value: i64) -> String {
        match domain {
            Domain::YesNo => if value == 0 { "no" } else { "yes" }.to_owned(),
            Domain::Range { .. } => value.to_string(),
            Domain::Kind(kind) => {
                let place = usize::try_from(value).ok();
                place
                    .and_then(|at| self.kinds[kind].values.get(at))
                    .map_or_else(|| value.to_string(), |v| v.to_string())
            }
        }
    }
}
