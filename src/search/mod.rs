//! From a tally and an oracle to a search: how many iterations, with what success, and the whole circuit.

pub mod advice;
pub mod plan;
pub mod whole;

pub use advice::Advice;
pub use plan::{Aim, Plan, plan};
