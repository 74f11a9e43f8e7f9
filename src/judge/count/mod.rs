//! Counting: the tally of a problem.

pub mod counted;
pub mod engine;
pub mod tally;

pub use counted::Counted;
pub use tally::{Method, Tally};
