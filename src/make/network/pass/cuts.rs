//! Cut rewriting: small cones at the least number of ANDs.
//!
//! Takes a network; gives one in which a cone over at most five nodes that has more ANDs of its own than its function
//! needs is made from the table of [`small`](crate::make::network::small).
//!
//! Holds after: no cone that was met, over a cut of at most five nodes, has more ANDs of its own than its function needs.
//!
//! Cuts are enumerated from the inputs up, a few for each node (A. Mishchenko, S. Chatterjee, R. Brayton, "DAG-aware AIG
//! rewriting", DAC 2006; here over ANDs and XORs, and priced by ANDs alone).

use super::Passed;
use super::cone::Uses;
use super::copy::Copy;
use super::function::{Function, complement_if};
use super::view::View;
use crate::id::{Id, IdVec};
use crate::make::network::build::Conjuncts;
use crate::make::network::small::Small;
use crate::make::network::{Lit, Network, Node, NodeId};

/// Cuts kept for each node, besides the node itself: those with few leaves, and those with leaves far down.
const CUTS: usize = 6;

/// The pass.
pub(super) fn cuts(view: View<'_>) -> Option<Passed> {
    let network = view.network;
    let mut small = Small::new();
    let mut uses = Uses::new(network);
    let cuts = Cuts::enumerate(network, &uses);
    // What a node is made from, where that saves ANDs.
    let mut chosen: IdVec<NodeId, Option<Function>> = vec![None; network.nodes().len()].into();
    let mut any = false;
    for (id, node) in network.nodes().iter() {
        if !matches!(node, Node::And(..) | Node::Xor(..)) || uses.of(id) == 0 {
            continue;
        }
        let mut best = 0;
        for cut in cuts.of(id) {
            let least = small.ands(cut.function.table);
            if usize::from(cut.ands) <= least + best {
                continue;
            }
            let saving = uses.own(id, &cut.function.inputs).saturating_sub(least);
            if saving > best {
                (best, chosen[id], any) = (saving, Some(cut.function), true);
            }
        }
    }
    if !any {
        return None;
    }
    let mut copy = Copy::new(network);
    let mut conjuncts = Conjuncts::default();
    for conjunct in network.conjuncts() {
        let lit = made(&mut copy, &mut small, &chosen, conjunct.lit);
        conjuncts.add(lit, conjunct.constraint);
    }
    Some(copy.finish(conjuncts))
}

/// The literal in the new network, from the roots down, so that what lies inside a chosen cone is not made.
fn made(copy: &mut Copy<'_>, small: &mut Small, chosen: &IdVec<NodeId, Option<Function>>, lit: Lit) -> Lit {
    let mut open = vec![lit.node()];
    while let Some(&node) = open.last() {
        if copy.known(node).is_some() {
            open.pop();
            continue;
        }
        let needed: Vec<NodeId> = match (chosen[node], copy.old.nodes()[node]) {
            (Some(cut), _) => cut.inputs.to_vec(),
            (None, Node::And(a, b) | Node::Xor(a, b)) => vec![a.node(), b.node()],
            (None, Node::Const | Node::Input(_)) => unreachable!("known from the start"),
        };
        let before = open.len();
        open.extend(needed.iter().filter(|&&other| copy.known(other).is_none()));
        if open.len() > before {
            continue;
        }
        if let Some(cut) = chosen[node] {
            let inputs: Vec<Lit> = needed.iter().map(|&other| copy.known(other).expect("made before")).collect();
            let lit = small.build(&mut copy.builder, cut.table, &inputs);
            copy.replace(node, lit);
        } else {
            copy.lit(Lit::new(node, false));
        }
        open.pop();
    }
    copy.known(lit.node()).expect("just made").complement_if(lit.is_complemented())
}

/// A cone over few nodes.
#[derive(Clone, Copy)]
struct Cut {
    function: Function,
    /// At least as many as the cone has ANDs: those that two branches share are counted twice, up to the largest number.
    ands: u8,
}

/// The cuts of all nodes.
struct Cuts {
    pool: Vec<Cut>,
    /// Where the cuts of each node end.
    ends: Vec<u32>,
}

impl Cuts {
    fn of(&self, node: NodeId) -> &[Cut] {
        let start = node.index().checked_sub(1).map_or(0, |before| self.ends[before]);
        &self.pool[start as usize..self.ends[node.index()] as usize]
    }

    fn enumerate(network: &Network, uses: &Uses<'_>) -> Self {
        let mut cuts = Self { pool: Vec::new(), ends: Vec::with_capacity(network.nodes().len()) };
        let mut found = Vec::new();
        for (id, node) in network.nodes().iter() {
            found.clear();
            match *node {
                Node::Const | Node::Input(_) => {}
                _ if uses.of(id) == 0 => {}
                Node::And(a, b) => {
                    cuts.join(&mut found, [a, b], 1, |p, q| complement_if(p, a) & complement_if(q, b));
                }
                Node::Xor(a, b) => cuts.join(&mut found, [a, b], 0, |p, q| p ^ q),
            }
            cuts.pool.extend_from_slice(&found);
            cuts.ends.push(u32::try_from(cuts.pool.len()).expect("fewer than 2^32 cuts"));
        }
        cuts
    }

    fn join(&self, found: &mut Vec<Cut>, operands: [Lit; 2], ands: u8, of: impl Fn(u32, u32) -> u32) {
        let itself = operands.map(|lit| Cut { function: Function::of_node(lit.node()), ands: 0 });
        let [first, second] = [0, 1].map(|at| self.of(operands[at].node()).iter().chain([&itself[at]]));
        for p in first {
            for q in second.clone() {
                let Some(function) = p.function.join(&q.function, &of) else { continue };
                if !found.iter().any(|cut| cut.function == function) {
                    found.push(Cut { function, ands: ands.saturating_add(p.ands).saturating_add(q.ands) });
                }
            }
        }
        // Leaves far down see most of the cone; few leaves leave room above.
        let leaves = |cut: &Cut| cut.function.inputs;
        found.sort_by(|a, b| leaves(a).last().cmp(&leaves(b).last()).then(leaves(a).len().cmp(&leaves(b).len())));
        if found.len() > CUTS {
            found[CUTS / 2..].sort_by_key(|cut| leaves(cut).len());
            found.truncate(CUTS);
        }
    }
}
