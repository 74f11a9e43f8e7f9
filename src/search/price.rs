//! What a whole search from a start state costs, and what its rotations cost in T gates.

use num_bigint::BigUint;
use serde::Serialize;

use crate::search::number::{Wide, as_text};

/// The error that all rotations of a circuit may make together, where nothing else is said.
pub const PRECISION: f64 = 1e-3;

/// T gates of one rotation among so many that together may err by `precision`: `3 log2(1 / e)` with `e` the precision of one
/// (N. Ross, P. Selinger, "Optimal ancilla-free Clifford+T approximation of z-rotations", Quantum Information and
/// Computation 16:901, 2016: typical).
pub fn t_gates_of_rotation(rotations: Wide, precision: f64) -> f64 {
    match rotations.is_zero() {
        true => 0.0,
        false => 3.0 * (rotations.log2() - precision.log2()).max(0.0),
    }
}

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
