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
use super::cone::{Function, Uses, complement_if};
use super::copy::Copy;
use crate::id::IdVec;
use crate::make::network::build::Conjuncts;
use crate::make::network::small::Small;
use crate::make::network::{Lit, Network, Node, NodeId};

/// Cuts kept for each node, besides the node itself: those with few leaves, and those with leaves far down.
const CUTS: usize = 6;

/// The pass.
pub(super) fn cuts(network: &Network) -> Passed {
    let mut small = Small::new();
    let mut uses = Uses::new(network);
    let cuts = enumerate(network, &uses);
    // What a node is made from, where that saves ANDs.
    let mut chosen: IdVec<NodeId, Option<&Function>> = vec![None; network.nodes().len()].into();
    for (id, node) in network.nodes().iter() {
        if !matches!(node, Node::And(..) | Node::Xor(..)) || uses.of(id) == 0 {
            continue;
        }
        let mut best = 0;
        for cut in &cuts[id] {
            let own = uses.freed(&vec![Lit::new(id, false); uses.of(id) as usize], &cut.inputs);
            let saving = own.saturating_sub(small.ands(cut.table));
            if saving > best {
                (best, chosen[id]) = (saving, Some(cut));
            }
        }
    }
    let mut copy = Copy::new(network);
    let mut conjuncts = Conjuncts::default();
    for conjunct in network.conjuncts() {
        let lit = made(&mut copy, &mut small, &chosen, conjunct.lit);
        conjuncts.add(lit, conjunct.constraint);
    }
    copy.finish(conjuncts)
}

/// The literal in the new network, from the roots down, so that what lies inside a chosen cone is not made.
fn made(copy: &mut Copy<'_>, small: &mut Small, chosen: &IdVec<NodeId, Option<&Function>>, lit: Lit) -> Lit {
    let mut open = vec![lit.node()];
    while let Some(&node) = open.last() {
        if copy.known(node).is_some() {
            open.pop();
            continue;
        }
        let needed: Vec<NodeId> = match (chosen[node], copy.old.nodes()[node]) {
            (Some(cut), _) => cut.inputs.clone(),
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

fn enumerate(network: &Network, uses: &Uses<'_>) -> IdVec<NodeId, Vec<Function>> {
    let mut cuts: IdVec<NodeId, Vec<Function>> = IdVec::new();
    for (id, node) in network.nodes().iter() {
        let found = match *node {
            Node::Const | Node::Input(_) => Vec::new(),
            _ if uses.of(id) == 0 => Vec::new(),
            Node::And(a, b) => joined(&cuts, [a, b], |p, q| complement_if(p, a) & complement_if(q, b)),
            Node::Xor(a, b) => joined(&cuts, [a, b], |p, q| p ^ q),
        };
        cuts.push(found);
    }
    cuts
}

fn joined(
    cuts: &IdVec<NodeId, Vec<Function>>,
    operands: [Lit; 2],
    of: impl Fn(u32, u32) -> u32 + std::marker::Copy,
) -> Vec<Function> {
    let [first, second] = operands.map(|lit| {
        let node = lit.node();
        cuts[node].iter().cloned().chain([Function::of_node(node)]).collect::<Vec<_>>()
    });
    let mut found: Vec<Function> = Vec::new();
    for p in &first {
        for q in &second {
            let Some(cut) = p.join(q, of) else { continue };
            if !found.contains(&cut) {
                found.push(cut);
            }
        }
    }
    // Leaves far down see most of the cone; few leaves leave room above.
    found.sort_by(|a, b| a.inputs.last().cmp(&b.inputs.last()).then(a.inputs.len().cmp(&b.inputs.len())));
    if found.len() > CUTS {
        let mut rest = found.split_off(CUTS / 2);
        rest.sort_by_key(|cut| cut.inputs.len());
        rest.truncate(CUTS - CUTS / 2);
        found.extend(rest);
    }
    found
}
