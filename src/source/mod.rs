//! Reading: bytes in, a [`Problem`](crate::problem::Problem) or diagnostics with places out.

pub mod dimacs;
pub mod open;
pub mod tally;
