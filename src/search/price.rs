//! What a whole search from a start state costs: plain data, filled in by whoever compiles it.

use num_bigint::BigUint;
use serde::Serialize;

use crate::search::number::{Wide, as_text};

/// A start state with what a search from it costs, rotations included.
#[derive(Clone, PartialEq, Debug, Serialize)]
pub struct StartPrice {
    /// Its name: `strings`, `domains` or `groups`.
    pub start: &'static str,
    /// How many bits are searched.
    pub searched_bits: usize,
    /// N.
    #[serde(serialize_with = "as_text")]
    pub space: BigUint,
    /// T gates of one iteration, rotations included.
    pub t_gates_of_iteration: f64,
    /// Rotations of one iteration that have to be approximated.
    pub rotations_of_iteration: u64,
    /// The error that all rotations of a search may make together; their T gates keep to it.
    pub precision: f64,
    /// T gates of all iterations, for one marked state.
    pub t_gates: Wide,
}
