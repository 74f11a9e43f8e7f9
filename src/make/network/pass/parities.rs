//! XOR constraints among the clauses, and dependent ones dropped.
//!
//! Takes the clauses of a network; gives one in which the 2^(k-1) clauses that together say that k nodes have an odd (or
//! an even) number of ones are one conjunct without ANDs, and in which a parity that follows from others is left out.
//!
//! Holds after: the parities among the conjuncts are linearly independent, as far as the elimination went
//! ([`MAX_WORK`]); where they contradict each other the root is *no*.

use rustc_hash::{FxHashMap, FxHashSet};

use super::Passed;
use super::copy::Copy;
use super::view::{self, Clause, View};
use crate::id::Id;
use crate::make::network::build::Conjuncts;
use crate::make::network::{Lit, Network, Node, NodeId};

/// The longest parity that is looked for among clauses: it has 2^(k-1) of them.
const MAX_LENGTH: usize = 12;

/// Terms added during the elimination before it stops; later parities are kept as they are.
const MAX_WORK: usize = 20_000_000;

/// An odd number of the nodes is one, or an even number; nodes are sorted.
#[derive(Clone)]
struct Parity {
    nodes: Vec<NodeId>,
    odd: bool,
}

/// The pass.
pub(super) fn parities(view: View<'_>) -> Option<Passed> {
    let (network, clauses) = (view.network, view.clauses());
    let (spelled, mut part_of) = spelled_out(clauses);
    // Where each parity stands, as the place of a clause.
    let mut list: Vec<(usize, Parity)> = spelled;
    for (at, clause) in clauses.iter().enumerate() {
        if let ([lit], false) = (clause.lits.as_slice(), part_of[at]) {
            list.push((at, parity_of(network, *lit)));
            part_of[at] = true;
        }
    }
    if list.is_empty() {
        return None;
    }
    list.sort_by_key(|(at, _)| *at);
    let mut copy = Copy::new(network);
    let mut conjuncts = Conjuncts::default();
    let mut elimination = Elimination::default();
    let mut parities = list.into_iter().peekable();
    for (at, clause) in clauses.iter().enumerate() {
        while let Some((_, parity)) = parities.next_if(|(first, _)| *first == at) {
            if elimination.follows(&parity) {
                continue;
            }
            let nodes: Vec<Lit> = parity.nodes.iter().map(|&node| copy.lit(Lit::new(node, false))).collect();
            let odd = copy.builder.odd(&nodes);
            conjuncts.add(odd.complement_if(!parity.odd), clause.constraint);
        }
        if !part_of[at] {
            view::add(&mut copy, &mut conjuncts, clause);
        }
    }
    if elimination.contradictory {
        conjuncts.add(Lit::NO, None);
    }
    Some(copy.finish(conjuncts))
}

/// The parities that groups of clauses say, each with the place of its first clause, and which clauses are part of one.
fn spelled_out(clauses: &[Clause]) -> (Vec<(usize, Parity)>, Vec<bool>) {
    let mut part_of = vec![false; clauses.len()];
    let nodes = |at: usize| clauses[at].lits.iter().map(|lit| lit.node());
    let mut order: Vec<usize> =
        (0..clauses.len()).filter(|&at| (2..=MAX_LENGTH).contains(&clauses[at].lits.len())).collect();
    keep_frequent(clauses, &mut order);
    order.sort_by(|&a, &b| nodes(a).cmp(nodes(b)).then(a.cmp(&b)));
    let mut found = Vec::new();
    for same in order.chunk_by(|&a, &b| nodes(a).eq(nodes(b))) {
        let length = clauses[same[0]].lits.len();
        if same.len() < 1 << (length - 1) {
            continue;
        }
        for odd in [false, true] {
            // A clause forbids one row: that of the literals' complements.
            let forbids = |at: usize| clauses[at].lits.iter().filter(|lit| lit.is_complemented()).count() % 2 == 1;
            let members: Vec<usize> = same.iter().copied().filter(|&at| forbids(at) != odd).collect();
            let rows: FxHashSet<&[Lit]> = members.iter().map(|&at| clauses[at].lits.as_slice()).collect();
            if rows.len() == 1 << (length - 1) {
                found.push((members[0], Parity { nodes: nodes(members[0]).collect(), odd }));
                members.iter().for_each(|&at| part_of[at] = true);
            }
        }
    }
    (found, part_of)
}

/// Leaves out, by counts under a hash of the nodes, most clauses whose nodes too few others have.
fn keep_frequent(clauses: &[Clause], order: &mut Vec<usize>) {
    let bits = order.len().next_power_of_two().ilog2().max(6) + 1;
    let place = |at: usize| {
        let mixed = |hash: u64, lit: &Lit| (hash ^ lit.node().index() as u64).wrapping_mul(0x9e37_79b9_7f4a_7c15);
        (clauses[at].lits.iter().fold(0, mixed) >> (64 - bits)) as usize
    };
    let places: Vec<usize> = order.iter().map(|&at| place(at)).collect();
    let mut counts = vec![0u16; 1 << bits];
    places.iter().for_each(|&place| counts[place] = counts[place].saturating_add(1));
    let mut places = places.into_iter();
    order.retain(|&at| {
        let count = places.next().map_or(0, |place| counts[place]);
        usize::from(count) >= 1 << (clauses[at].lits.len() - 1)
    });
}

/// A conjunct as a parity of nodes that are not XORs.
fn parity_of(network: &Network, lit: Lit) -> Parity {
    let mut nodes = Vec::new();
    let mut open = vec![lit.node()];
    while let Some(node) = open.pop() {
        match network.nodes()[node] {
            Node::Xor(a, b) if nodes.len() + open.len() < MAX_LENGTH * 8 => open.extend([a.node(), b.node()]),
            _ => nodes.push(node),
        }
    }
    nodes.sort_unstable();
    Parity { nodes: once(&nodes), odd: !lit.is_complemented() }
}

/// What occurs an odd number of times in a sorted list.
fn once(nodes: &[NodeId]) -> Vec<NodeId> {
    nodes.chunk_by(|a, b| a == b).filter(|run| run.len() % 2 == 1).map(|run| run[0]).collect()
}

/// Gaussian elimination over two elements, row by row.
#[derive(Default)]
struct Elimination {
    /// Reduced rows by their largest node.
    rows: FxHashMap<NodeId, Parity>,
    work: usize,
    contradictory: bool,
}

impl Elimination {
    /// Whether the parity follows from those before; if not it is one of them from here on.
    fn follows(&mut self, parity: &Parity) -> bool {
        if self.work > MAX_WORK {
            return false;
        }
        let mut row = parity.clone();
        while let Some(largest) = row.nodes.last() {
            let Some(other) = self.rows.get(largest) else {
                self.rows.insert(*largest, row);
                return false;
            };
            self.work += row.nodes.len() + other.nodes.len();
            let mut nodes = [row.nodes.as_slice(), &other.nodes].concat();
            nodes.sort_unstable();
            row = Parity { nodes: once(&nodes), odd: row.odd ^ other.odd };
        }
        self.contradictory |= row.odd;
        true
    }
}
