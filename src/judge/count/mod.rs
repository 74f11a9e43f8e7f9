//! Counting: the tally of a problem.

pub mod tally;

pub use tally::{Method, Tally};
