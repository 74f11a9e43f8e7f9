//! Names and what they stand for. One namespace, nothing is ever shadowed.

use std::rc::Rc;

use rustc_hash::FxHashMap;

use crate::define_id;
use crate::id::IdVec;
use crate::problem::{ExprId, KindId};
use crate::source::tally::ast::Name;
use crate::span::Span;

define_id! {
    /// A declared name.
    EntityId, "n"
}

/// What a value is. Never written down by the user: it follows from the declaration.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub enum Ty {
    /// yes or no
    YesNo,
    /// an integer
    Int,
    /// a value of this kind
    Kind(KindId),
    /// Not known because of a mistake that was reported; goes with everything, so that one mistake is one message.
    Unknown,
}

/// A value after expansion: known, or an expression of the problem. yes is 1, a kind's value its place.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub enum Val {
    /// Known.
    Const(i64),
    /// Depends on what is picked.
    Node(ExprId),
}

/// What an index of a row runs over.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub enum Dim {
    /// The integers from `lo`, this many.
    Range {
        /// The first index.
        lo: i64,
        /// How many.
        len: usize,
    },
    /// All values of a kind, this many.
    Kind(KindId, usize),
}

impl Dim {
    /// How many elements.
    pub fn size(self) -> usize {
        match self {
            Dim::Range { len, .. } | Dim::Kind(_, len) => len,
        }
    }

    /// The first index; a kind's values count from 0.
    pub fn first(self) -> i64 {
        match self {
            Dim::Range { lo, .. } => lo,
            Dim::Kind(..) => 0,
        }
    }

    /// The type of the index.
    pub fn ty(self) -> Ty {
        match self {
            Dim::Range { .. } => Ty::Int,
            Dim::Kind(kind, _) => Ty::Kind(kind),
        }
    }
}

/// The statement that declared a row.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub enum Maker {
    /// `known`
    Known,
    /// `pick`
    Pick,
    /// `let`
    Let,
}

/// A single value (no index) or a row of values.
#[derive(Clone, Debug)]
pub struct Row {
    /// Its indices.
    pub dims: Vec<Dim>,
    /// The type of its elements.
    pub ty: Ty,
    /// Its elements, the last index running fastest.
    pub cells: Rc<[Val]>,
    /// Who declared it.
    pub maker: Maker,
}

impl Row {
    /// Whether every element is known.
    pub fn is_constant(&self) -> bool {
        self.cells.iter().all(|cell| matches!(cell, Val::Const(_)))
    }
}

/// What a name stands for.
#[derive(Clone, Debug)]
pub enum What {
    /// A kind.
    Kind(KindId),
    /// A value of a kind, by its place.
    Value(KindId, i64),
    /// A value or a row of values.
    Row(Row),
    /// Something whose declaration has a mistake.
    Broken,
}

/// A declared name.
#[derive(Clone, Debug)]
pub struct Entity<'t> {
    /// The name, at its declaration.
    pub name: Name<'t>,
    /// What it stands for.
    pub what: What,
}

/// All names declared so far.
#[derive(Default)]
pub struct Scope<'t> {
    entities: IdVec<EntityId, Entity<'t>>,
    by_name: FxHashMap<&'t str, EntityId>,
    /// Every declaration of the whole text, to tell a name that comes later from one that never comes.
    all: FxHashMap<&'t str, Span>,
}

impl<'t> Scope<'t> {
    /// Notes that the name is declared somewhere in the text.
    pub fn announce(&mut self, name: Name<'t>) {
        self.all.entry(name.text).or_insert(name.span);
    }

    /// Declares a name; an earlier one of the same text stays.
    pub fn declare(&mut self, name: Name<'t>, what: What) {
        let id = self.entities.push(Entity { name, what });
        self.by_name.entry(name.text).or_insert(id);
    }

    /// The name's id.
    pub fn find(&self, name: &str) -> Option<EntityId> {
        self.by_name.get(name).copied()
    }

    /// What the id stands for.
    pub fn get(&self, id: EntityId) -> &Entity<'t> {
        &self.entities[id]
    }

    /// Where a name that is not declared yet will be.
    pub fn later(&self, name: &str) -> Option<Span> {
        self.all.get(name).copied()
    }

    /// The declared name that is most like this one, if one is alike.
    pub fn like(&self, name: &str) -> Option<&'t str> {
        let close = |other: &&'t str| {
            let distance = distance(name, other);
            (distance <= 1 + name.len().min(other.len()) / 4).then_some(distance)
        };
        let names = self.entities.values().map(|entity| entity.name.text);
        names.filter(|other| *other != name).filter_map(|other| close(&other).map(|d| (d, other))).min().map(|(_, o)| o)
    }

    /// The names that a `--set` may replace, in source order.
    pub fn knowns(&self) -> Vec<&'t str> {
        let known = |entity: &&Entity<'t>| matches!(&entity.what, What::Row(row) if row.maker == Maker::Known);
        self.entities.values().filter(known).map(|entity| entity.name.text).collect()
    }
}

/// How many letters must be put in, left out or changed to get from one word to the other (V. Levenshtein, "Binary
/// codes capable of correcting deletions, insertions, and reversals", Soviet Physics Doklady 1966).
fn distance(a: &str, b: &str) -> usize {
    // Names are short; a very long one is like none.
    if a.len().max(b.len()) > 64 {
        return usize::MAX;
    }
    let mut above: Vec<usize> = (0..=b.len()).collect();
    for (row, x) in a.bytes().enumerate() {
        let mut left = row + 1;
        let mut corner = row;
        for (column, y) in b.bytes().enumerate() {
            let change = corner + usize::from(x != y);
            corner = above[column + 1];
            above[column] = left;
            left = change.min(corner + 1).min(left + 1);
        }
        above[b.len()] = left;
    }
    above[b.len()]
}

#[cfg(test)]
mod tests {
    use super::distance;

    #[test]
    fn distances_count_letters_put_in_left_out_and_changed() {
        assert_eq!(distance("sonar", "sonar"), 0);
        assert_eq!(distance("sonar", "soner"), 1);
        assert_eq!(distance("sonar", "sona"), 1);
        assert_eq!(distance("sona", "sonar"), 1);
        assert_eq!(distance("", "abc"), 3);
        assert_eq!(distance("kitten", "sitting"), 3);
    }
}
