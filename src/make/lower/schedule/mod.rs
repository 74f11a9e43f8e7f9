//! Schedules: which cell is computed and erased when, within a number of ancillas.
//!
//! Input:  the [`cells`] of a network and the level that pays for them.
//! Output: the [`front`]: programs of which none is better than another in both ancillas and cost.
//!
//! 1. [`cells`] reads the ANDs off the network and gathers the conjuncts of the root in a chain.
//! 2. [`chunks`] schedules that chain by the splits of a [`table`]; [`line`] schedules any order of cells;
//!    [`counter`] counts the conjuncts that hold.
//!    [`fixed`] cuts it into equal chunks.
//! 3. [`exact`] finds the fewest moves of a small network.
//! 4. [`program`] counts what a program costs; [`front`] tries them for every number of ancillas and keeps the best.

pub(super) mod cells;
mod chunks;
pub(super) mod counter;
mod exact;
mod fixed;
pub(super) mod front;
mod line;
pub(super) mod program;
mod table;

#[cfg(test)]
mod tests;
