//! Measured bit strings: read, turned into answers, checked against the problem, and compared with the plan.
//!
//! ```text
//! text ─► Shots ─► Checked ─► Comparison
//!  read     check      compare
//! ```

mod cells;
pub mod check;
pub mod compare;
mod fault;
mod map;
pub mod read;

pub use check::{Answer, Checked, check};
pub use compare::{Comparison, Predicted, compare};
pub use read::{Format, Options, Order, read};

use crate::problem::Bits;

/// Measured strings of the search register, each with how often it was measured.
#[derive(Clone, PartialEq, Eq, Debug, Default)]
pub struct Shots {
    /// How many bits each string has.
    pub width: usize,
    /// The strings, bit i from `search[i]`, in increasing order, each once, with counts above 0.
    pub counts: Vec<(Bits, u64)>,
    /// The sum of the counts.
    pub total: u64,
}
