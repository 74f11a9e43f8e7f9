//! Passes: the same predicate with fewer ANDs.
//!
//! Takes a network, gives one with the same root function over the same inputs. Each pass says in its file what holds
//! after it, and returns, for every node of the old network, the literal of the new one that computes the same, or none
//! where nothing does any more; a pass that finds nothing to do returns nothing. [`simplify`] runs them all and keeps a
//! result only where the ANDs do not become more.

pub mod check;
mod cone;
mod copy;
mod cuts;
mod function;
mod known;
mod lists;
mod parities;
mod pivots;
mod share;
mod subsume;
mod symmetric;
mod view;
mod weights;
mod windows;

use std::cell::OnceCell;

use super::{Lit, Network, NodeId};
use crate::budget::Budget;
use crate::id::IdVec;
use view::View;

/// For every old node what computes the same in the new network; none where nothing does.
pub type NodeMap = IdVec<NodeId, Option<Lit>>;

/// What a pass made.
#[derive(Clone, Debug)]
pub struct Passed {
    /// The new network.
    pub network: Network,
    /// What became of the old nodes.
    pub map: NodeMap,
}

/// A pass by name, and how often it may run while it removes ANDs.
type Pass = (&'static str, usize, fn(View<'_>) -> Option<Passed>);

/// The passes in the order they run. Clauses become the gates and counters they spell before what is left of them is
/// grouped on pivots; the last two work on the graph.
const PASSES: &[Pass] = &[
    ("known", 4, known::known),
    ("subsume", 2, subsume::subsume),
    ("parities", 1, parities::parities),
    ("weights", 1, weights::weights),
    ("windows", 1, windows::windows),
    ("symmetric", 1, symmetric::symmetric),
    ("pivots", 1, pivots::pivots),
    ("cuts", 3, cuts::cuts),
    ("share", 2, share::share),
];

/// A step of [`simplify`] that was kept.
#[derive(Clone, Copy, Debug)]
pub struct Step<'a> {
    /// The name of the pass.
    pub name: &'static str,
    /// The network it was given.
    pub before: &'a Network,
    /// What it made.
    pub passed: &'a Passed,
}

/// Runs the passes until the budget is spent: what was reached until then is the predicate too. `each` sees every step
/// that is kept; its first error ends the work.
pub fn simplify<E>(
    mut network: Network,
    budget: &Budget,
    mut each: impl FnMut(Step<'_>) -> Result<(), E>,
) -> Result<Network, E> {
    let mut read = OnceCell::new();
    let mut before = network.and_count();
    for &(name, rounds, pass) in PASSES {
        for _ in 0..rounds {
            if view::is_settled(&network) || budget.spent() {
                return Ok(network);
            }
            let view = View::new(&network, &read);
            let Some(passed) = pass(view).or_else(|| view.unchanged()) else { break };
            let after = passed.network.and_count();
            if after > before {
                break;
            }
            each(Step { name, before: &network, passed: &passed })?;
            network = passed.network;
            read = OnceCell::new();
            if std::mem::replace(&mut before, after) == after {
                break;
            }
        }
    }
    Ok(network)
}
