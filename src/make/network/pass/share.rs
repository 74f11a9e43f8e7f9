//! Common divisors: pairs of literals that several conjunctions have in common are ANDed once.
//!
//! Takes a network; gives one in which the trees of ANDs are taken apart into their operands, the pair that most of them
//! share is made one node, and so on until no pair is shared; what is left of each tree is joined by depth.
//!
//! Holds after: no two trees of ANDs share two operands, and no tree is deeper than its operands force it to be
//! (D. A. Huffman, 1952, with depths for weights, from memory).

use std::cmp::Reverse;
use std::collections::BinaryHeap;

use rustc_hash::FxHashMap;

use super::Passed;
use super::copy::Copy;
use super::view::{self, View};
use crate::id::{Id, IdVec};
use crate::make::network::build::Conjuncts;
use crate::make::network::builder::Builder;
use crate::make::network::{Lit, Network, Node, NodeId};

/// Pairs of a tree with more operands than this are not looked at: the tree over all conjuncts has too many.
const MAX_OPERANDS: usize = 24;

/// The pass.
pub(super) fn share(view: View<'_>) -> Option<Passed> {
    let network = view.network;
    let uses = view::uses(network);
    let inner = inner_nodes(network, &uses);
    let mut trees: Vec<(NodeId, Vec<Lit>)> = Vec::new();
    for (id, node) in network.nodes().iter() {
        if matches!(node, Node::And(..)) && uses[id] > 0 && !inner[id] {
            trees.push((id, operands(network, &inner, id)));
        }
    }
    let divisors = divide(&mut trees);
    let mut copy = Copy::new(network);
    let mut depths = Depths::default();
    let tree_of: FxHashMap<NodeId, usize> = trees.iter().enumerate().map(|(at, tree)| (tree.0, at)).collect();
    for (id, _) in network.nodes().iter() {
        let Some(&at) = tree_of.get(&id) else { continue };
        let lits: Vec<Lit> = trees[at].1.iter().map(|&lit| divisor_or_node(&mut copy, &divisors, lit)).collect();
        let lit = depths.join(&mut copy.builder, lits);
        copy.replace(id, lit);
    }
    let mut conjuncts = Conjuncts::default();
    for conjunct in network.conjuncts() {
        let lit = copy.lit(conjunct.lit);
        conjuncts.add(lit, conjunct.constraint);
    }
    Some(copy.finish_by(conjuncts, |builder, lits| depths.join(builder, lits)))
}

/// ANDs that are part of the one AND that uses them.
fn inner_nodes(network: &Network, uses: &IdVec<NodeId, u32>) -> IdVec<NodeId, bool> {
    let mut inner: IdVec<NodeId, bool> = vec![false; network.nodes().len()].into();
    for (id, node) in network.nodes().iter().filter(|&(id, _)| uses[id] > 0) {
        let Node::And(a, b) = *node else { continue };
        debug_assert!(a.node() < id && b.node() < id);
        for lit in [a, b] {
            let is_and = matches!(network.nodes()[lit.node()], Node::And(..));
            inner[lit.node()] = is_and && !lit.is_complemented() && uses[lit.node()] == 1;
        }
    }
    // A conjunct is a use of its own, and stays a node.
    network.conjuncts().iter().for_each(|conjunct| inner[conjunct.lit.node()] = false);
    inner
}

fn operands(network: &Network, inner: &IdVec<NodeId, bool>, root: NodeId) -> Vec<Lit> {
    let mut operands = Vec::new();
    let mut open = vec![root];
    while let Some(node) = open.pop() {
        let Node::And(a, b) = network.nodes()[node] else { unreachable!("only ANDs are inner nodes") };
        for lit in [a, b] {
            if inner[lit.node()] { open.push(lit.node()) } else { operands.push(lit) }
        }
    }
    operands.sort_unstable();
    operands.dedup();
    operands
}

/// The first literal of a divisor: those of the old network lie below, since 2^30 nodes do not fit into memory here.
const FIRST_DIVISOR: u32 = 1 << 31;

/// Takes out pairs, the most frequent first. A divisor stands in the trees as a literal of a number beyond all nodes.
fn divide(trees: &mut [(NodeId, Vec<Lit>)]) -> Vec<(Lit, Lit)> {
    let mut pairs: Vec<((Lit, Lit), u32)> = Vec::new();
    for (at, (_, lits)) in trees.iter().enumerate().filter(|(_, (_, lits))| lits.len() <= MAX_OPERANDS) {
        for (place, &a) in lits.iter().enumerate() {
            lits[place + 1..].iter().for_each(|&b| pairs.push(((a, b), at as u32)));
        }
    }
    pairs.sort_unstable();
    let mut users: FxHashMap<(Lit, Lit), Vec<usize>> = FxHashMap::default();
    let mut heap: BinaryHeap<(usize, Reverse<(Lit, Lit)>)> = BinaryHeap::new();
    for run in pairs.chunk_by(|a, b| a.0 == b.0).filter(|run| run.len() > 1) {
        users.insert(run[0].0, run.iter().map(|&(_, at)| at as usize).collect());
        heap.push((run.len(), Reverse(run[0].0)));
    }
    drop(pairs);
    let mut divisors = Vec::new();
    while let Some((claimed, Reverse(pair))) = heap.pop() {
        let has = |lits: &[Lit]| lits.binary_search(&pair.0).is_ok() && lits.binary_search(&pair.1).is_ok();
        let mut now: Vec<usize> = users[&pair].iter().copied().filter(|&at| has(&trees[at].1)).collect();
        now.sort_unstable();
        now.dedup();
        if now.len() < 2 {
            continue;
        }
        if now.len() < claimed {
            heap.push((now.len(), Reverse(pair)));
            users.insert(pair, now);
            continue;
        }
        let divisor = Lit(FIRST_DIVISOR + divisors.len() as u32);
        divisors.push(pair);
        let mut fresh: FxHashMap<Lit, Vec<usize>> = FxHashMap::default();
        for &at in &now {
            let lits = &mut trees[at].1;
            lits.retain(|&lit| lit != pair.0 && lit != pair.1);
            lits.iter().for_each(|&lit| fresh.entry(lit).or_default().push(at));
            // Divisors have the largest numbers, so the list stays sorted.
            lits.push(divisor);
        }
        for (lit, at) in fresh {
            if at.len() > 1 {
                heap.push((at.len(), Reverse((lit, divisor))));
                users.insert((lit, divisor), at);
            }
        }
    }
    divisors
}

/// The new literal of an operand.
fn divisor_or_node(copy: &mut Copy<'_>, divisors: &[(Lit, Lit)], lit: Lit) -> Lit {
    if lit.0 < FIRST_DIVISOR {
        return copy.lit(lit);
    }
    let (a, b) = divisors[(lit.0 - FIRST_DIVISOR) as usize];
    let a = divisor_or_node(copy, divisors, a);
    let b = divisor_or_node(copy, divisors, b);
    copy.builder.and(a, b)
}

/// The AND-depth of the nodes of a builder, as far as it was asked for.
#[derive(Default)]
struct Depths(Vec<u32>);

impl Depths {
    fn of(&mut self, builder: &Builder, lit: Lit) -> u32 {
        for at in self.0.len()..=lit.node().index() {
            let depth = |lit: Lit| self.0[lit.node().index()];
            let depth = match builder.node_at(NodeId::new(at)) {
                Node::And(a, b) => depth(a).max(depth(b)) + 1,
                Node::Xor(a, b) => depth(a).max(depth(b)),
                Node::Const | Node::Input(_) => 0,
            };
            self.0.push(depth);
        }
        self.0[lit.node().index()]
    }

    /// The AND of all, the shallow ones first.
    fn join(&mut self, builder: &mut Builder, lits: Vec<Lit>) -> Lit {
        let mut heap: BinaryHeap<Reverse<(u32, Lit)>> =
            lits.into_iter().map(|lit| Reverse((self.of(builder, lit), lit))).collect();
        while let Some(Reverse((_, a))) = heap.pop() {
            let Some(Reverse((_, b))) = heap.pop() else { return a };
            let both = builder.and(a, b);
            heap.push(Reverse((self.of(builder, both), both)));
        }
        Lit::YES
    }
}
