//! Reading: bytes in, a [`Problem`](crate::problem::Problem) or diagnostics with places out.
//!
//! [`open`] finds the file, its packing and its format; [`dimacs`] and [`tally`] read the two formats.

pub mod dimacs;
pub mod open;
pub mod tally;

pub use open::{Format, Loaded, load};
