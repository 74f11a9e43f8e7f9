//! A finished circuit with what it is and what it costs.

use crate::circuit::{Bounds, Circuit, FOUND, Figures, Level, Mark, figures};

/// An oracle or a whole search, ready to be written.
#[derive(Clone, PartialEq, Debug)]
pub struct Product {
    /// The circuit.
    pub circuit: Circuit,
    /// The gate set it is written in.
    pub level: Level,
    /// How its oracle marks.
    pub mark: Mark,
    /// Two-input ANDs that one application of the oracle computes, counted at the `toffoli` level before the gates were
    /// expanded: what is computed or marked, not what is undone.
    pub and_count: u64,
    /// Costs counted from the gates.
    pub figures: Figures,
    /// What no oracle of the same predicate can go below, where that is known.
    pub bounds: Option<Bounds>,
}

impl Product {
    /// The product with its figures counted.
    pub fn new(circuit: Circuit, level: Level, mark: Mark, and_count: u64) -> Self {
        let figures = figures::figures(&circuit);
        Self { circuit, level, mark, and_count, figures, bounds: None }
    }

    /// Whether this is a whole search: it measures into `found`.
    pub fn is_search(&self) -> bool {
        self.circuit.measured.iter().any(|register| register.name == FOUND)
    }
}
