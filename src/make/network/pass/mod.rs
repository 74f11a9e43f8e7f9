//! Passes: the same predicate with fewer ANDs.
//!
//! Takes a network, gives one with the same root function over the same inputs. Each pass says in its file what holds
//! after it, and returns, for every node of the old network, the literal of the new one that computes the same, or none
//! where nothing does any more. [`simplify`] runs them all and keeps a result only where the ANDs do not become more.

mod cone;
mod copy;
mod cuts;
mod known;
mod parities;
mod pivots;
mod share;
mod subsume;
mod view;
mod weights;
mod windows;

use super::{Lit, Network, NodeId};
use crate::id::IdVec;

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

/// A pass by name.
type Pass = (&'static str, fn(&Network) -> Passed);

/// The passes in the order they run.
const PASSES: &[Pass] = &[
    ("known", known::known),
    ("subsume", subsume::subsume),
    ("known again", known::known),
    ("parities", parities::parities),
    ("weights", weights::weights),
    ("windows", windows::windows),
    ("pivots", pivots::pivots),
    ("cuts", cuts::cuts),
    ("share", share::share),
];

/// Runs the passes. `each` sees every step that was kept: the name of the pass, the network before and what it made.
pub fn simplify(network: Network, mut each: impl FnMut(&'static str, &Network, &Passed)) -> Network {
    let mut network = network;
    for (name, pass) in PASSES {
        if view::is_settled(&network) {
            break;
        }
        let passed = pass(&network);
        if passed.network.and_count() <= network.and_count() {
            each(name, &network, &passed);
            network = passed.network;
        }
    }
    network
}
