//! Reading: bytes in, a [`Problem`](crate::problem::Problem) or diagnostics with places out.
//!
//! [`open`] finds the file, its packing and its format; [`tally`], [`dimacs`], [`opb`] and [`aiger`] read the formats.

pub mod aiger;
pub mod dimacs;
pub mod opb;
pub mod open;
pub mod tally;

pub use open::{Format, Loaded, load};
