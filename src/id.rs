//! Ids: `u32` newtypes that index arenas, and the vectors they index.
//!
//! Every arena of the crate is an [`IdVec`]; every edge between records is an id. An id prints with a prefix of its
//! own (`n17`, `b3`), and the same text is what the text forms of the representations use.

use std::marker::PhantomData;
use std::ops::{Index, IndexMut};

/// A typed index into an [`IdVec`].
pub trait Id: Copy + Eq + Ord {
    /// The id with this index. The index must be below `u32::MAX`.
    fn new(index: usize) -> Self;
    /// The position in the arena.
    fn index(self) -> usize;
}

/// Defines an id type: its documentation, its name and the prefix it prints with.
#[macro_export]
macro_rules! define_id {
    ($(#[$doc:meta])* $name:ident, $prefix:literal) => {
        $(#[$doc])*
        #[derive(Clone, Copy, PartialEq, Eq, PartialOrd, Ord, Hash)]
        pub struct $name(u32);

        impl $crate::id::Id for $name {
            fn new(index: usize) -> Self {
                assert!(index < u32::MAX as usize, concat!("too many of ", stringify!($name)));
                Self(index as u32)
            }
            fn index(self) -> usize {
                self.0 as usize
            }
        }

        impl std::fmt::Display for $name {
            fn fmt(&self, f: &mut std::fmt::Formatter<'_>) -> std::fmt::Result {
                write!(f, concat!($prefix, "{}"), self.0)
            }
        }

        impl std::fmt::Debug for $name {
            fn fmt(&self, f: &mut std::fmt::Formatter<'_>) -> std::fmt::Result {
                std::fmt::Display::fmt(self, f)
            }
        }
    };
}

define_id! {
    /// A constraint of a problem: first the expression constraints in source order, then the clauses in file order.
    /// It lives on the floor because circuits carry it without knowing problems.
    ConstraintId, "c"
}

/// A vector indexed by one id type.
#[derive(Clone, PartialEq, Eq)]
pub struct IdVec<I, T> {
    items: Vec<T>,
    ids: PhantomData<fn(I) -> I>,
}

impl<I: Id, T> IdVec<I, T> {
    /// An empty arena.
    pub fn new() -> Self {
        Self::from(Vec::new())
    }

    /// Appends an item and returns its id.
    pub fn push(&mut self, item: T) -> I {
        let id = I::new(self.items.len());
        self.items.push(item);
        id
    }

    /// Makes room for this many more items.
    pub fn reserve(&mut self, more: usize) {
        self.items.reserve(more);
    }

    /// The number of items.
    pub fn len(&self) -> usize {
        self.items.len()
    }

    /// Whether there is no item.
    pub fn is_empty(&self) -> bool {
        self.items.is_empty()
    }

    /// The item, or `None` for an id of another arena.
    pub fn get(&self, id: I) -> Option<&T> {
        self.items.get(id.index())
    }

    /// All ids in order.
    pub fn ids(&self) -> impl DoubleEndedIterator<Item = I> + ExactSizeIterator + use<I, T> {
        (0..self.items.len()).map(I::new)
    }

    /// All ids with their items, in order.
    pub fn iter(&self) -> impl DoubleEndedIterator<Item = (I, &T)> + ExactSizeIterator {
        self.items.iter().enumerate().map(|(index, item)| (I::new(index), item))
    }

    /// All items in order.
    pub fn values(&self) -> std::slice::Iter<'_, T> {
        self.items.iter()
    }

    /// The items as a slice.
    pub fn as_slice(&self) -> &[T] {
        &self.items
    }
}

impl<I: Id, T> Default for IdVec<I, T> {
    fn default() -> Self {
        Self::new()
    }
}

impl<I, T> From<Vec<T>> for IdVec<I, T> {
    fn from(items: Vec<T>) -> Self {
        Self { items, ids: PhantomData }
    }
}

impl<I: Id, T> Index<I> for IdVec<I, T> {
    type Output = T;
    fn index(&self, id: I) -> &T {
        &self.items[id.index()]
    }
}

impl<I: Id, T> IndexMut<I> for IdVec<I, T> {
    fn index_mut(&mut self, id: I) -> &mut T {
        &mut self.items[id.index()]
    }
}

impl<I, T: std::fmt::Debug> std::fmt::Debug for IdVec<I, T> {
    fn fmt(&self, f: &mut std::fmt::Formatter<'_>) -> std::fmt::Result {
        self.items.fmt(f)
    }
}
