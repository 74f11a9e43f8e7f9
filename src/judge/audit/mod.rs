//! Auditing: does a circuit mark exactly the solutions of a problem, and leave everything else as it was?

pub mod verdict;

pub use verdict::{How, Outcome, Phases, Verdict, Witness};
