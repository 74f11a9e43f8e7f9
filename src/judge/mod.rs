//! The judge: what the problem means, how many solutions it has, and whether a circuit marks exactly those.
//!
//! Nothing here names the maker. The judge reads the problem's constraints by a route of its own ([`clauses`] for the
//! solvers, [`rows`] for exhaustive sweeps), and interprets circuits gate by gate; it recognises no construction.

pub mod audit;
pub mod clauses;
pub mod count;
mod reading;
pub mod restate;
pub mod rows;
