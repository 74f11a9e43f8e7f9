//! The ladder of thresholds of an objective: plain data that a stage fills and a report shows.

use num_bigint::BigUint;

use super::minimum::Minimum;
use crate::problem::Sense;

/// A threshold, and how many solutions are at least as good.
#[derive(Clone, PartialEq, Eq, Debug)]
pub struct Rung {
    /// The value of the objective.
    pub value: i64,
    /// Solutions with this value or a better one.
    pub as_good: BigUint,
}

/// Why nothing is better than the optimum.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub enum Optimal {
    /// The objective never takes a better value: its range ends here.
    Range,
    /// A refutation of the next better threshold, written and checked step by step.
    Refuted {
        /// Steps of the refutation.
        steps: usize,
    },
}

/// What is known of an objective.
#[derive(Clone, PartialEq, Debug)]
pub struct Ladder {
    /// The direction.
    pub sense: Sense,
    /// All solutions, whatever their value.
    pub solutions: BigUint,
    /// From the best value on, one for each value that some solution has.
    pub rungs: Vec<Rung>,
    /// Whether worse values were left out.
    pub is_cut: bool,
    /// The proof that the first rung is the best; `None` where there is no solution.
    pub optimal: Option<Optimal>,
    /// The search for the best value: expected iterations in all, and the bounds.
    pub search: Option<Minimum>,
}
