//! From a tally and an oracle to a search: how many iterations, with what success, the whole circuit, and the reading
//! of what a run of it gave.

pub mod advice;
pub mod binomial;
pub mod course;
pub mod number;
pub mod plan;
pub mod price;
pub mod shots;
pub mod simulate;
pub mod whole;

pub use advice::Advice;
pub use plan::{Aim, Plan, plan};
