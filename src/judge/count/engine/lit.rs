//! The engine's own literal: `variable << 1 | negated`, over the compact variables that preparation leaves.

use std::fmt;
use std::ops::Not;

/// A variable of the prepared formula or its negation. Even indices are the variables themselves.
#[derive(Clone, Copy, PartialEq, Eq, PartialOrd, Ord, Hash)]
pub(crate) struct Lit(u32);

impl Lit {
    /// The literal of this variable, negated or not.
    pub(crate) fn new(var: u32, negated: bool) -> Self {
        Self(var << 1 | u32::from(negated))
    }

    /// The literal at this place of a table with one entry a literal.
    pub(crate) fn from_index(index: usize) -> Self {
        Self(index as u32)
    }

    /// The variable.
    pub(crate) fn var(self) -> usize {
        (self.0 >> 1) as usize
    }

    /// The place in a table with one entry a literal.
    pub(crate) fn index(self) -> usize {
        self.0 as usize
    }

    /// Whether it holds where the variable is 0.
    pub(crate) fn is_negated(self) -> bool {
        self.0 & 1 == 1
    }

    /// The same literal, negated if `flip`.
    pub(crate) fn flipped(self, flip: bool) -> Self {
        Self(self.0 ^ u32::from(flip))
    }
}

impl Not for Lit {
    type Output = Self;
    fn not(self) -> Self {
        Self(self.0 ^ 1)
    }
}

impl fmt::Debug for Lit {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        let number = i64::from(self.0 >> 1) + 1;
        write!(f, "{}", if self.is_negated() { -number } else { number })
    }
}
