//! What single conjuncts fix is used everywhere else.
//!
//! Takes a network; gives one in which a node that must hold (or must fail) is a constant in all other conjuncts, and a
//! bit that must equal another is that other bit there: only the conjunction matters, and it fails anyway where they do
//! not.
//!
//! Holds after: a node that is a conjunct is used by no other conjunct.
//!
//! A conjunct is made anew from its own operands. Those stand for smaller nodes, so by induction over the conjuncts in
//! the order of their nodes, all of them hold in the new network exactly where all hold in the old.

use super::Passed;
use super::copy::Copy;
use super::view::{self, Clause, View};
use crate::id::Id;
use crate::make::network::build::Conjuncts;
use crate::make::network::{Lit, Network, Node, NodeId};

/// The pass.
pub(super) fn known(view: View<'_>) -> Option<Passed> {
    let (network, clauses) = (view.network, view.clauses());
    let single = |clause: &Clause| if let [lit] = clause.lits[..] { Some(lit) } else { None };
    let mut fixed: Vec<Lit> = clauses.iter().filter_map(single).filter(|lit| !lit.is_constant()).collect();
    fixed.sort_unstable();
    fixed.dedup();
    if fixed.is_empty() {
        return None;
    }
    let mut copy = Copy::new(network);
    if fixed.windows(2).any(|pair| pair[0] == !pair[1]) {
        let mut conjuncts = Conjuncts::default();
        conjuncts.add(Lit::NO, None);
        return Some(copy.finish(conjuncts));
    }
    // Smaller nodes first: what a conjunct is made of is settled before it.
    let mut made: Vec<(Lit, Lit)> = Vec::with_capacity(fixed.len());
    for &lit in &fixed {
        let anew = copy.anew(lit.node()).complement_if(lit.is_complemented());
        made.push((lit, anew));
        equal_bits(network, &mut copy, lit);
        copy.assume(lit.node(), Lit::constant(!lit.is_complemented()));
    }
    let mut conjuncts = Conjuncts::default();
    for clause in clauses {
        match single(clause) {
            Some(lit) if !lit.is_constant() => {
                let place = made.binary_search_by_key(&lit, |&(old, _)| old).expect("it was fixed");
                conjuncts.add(made[place].1, clause.constraint);
            }
            _ => view::add(&mut copy, &mut conjuncts, clause),
        }
    }
    Some(copy.finish(conjuncts))
}

/// Where a conjunct says that two bits are equal or opposite, the later one becomes the other from here on.
fn equal_bits(network: &Network, copy: &mut Copy<'_>, lit: Lit) {
    let is_free = |copy: &Copy<'_>, node: NodeId| {
        matches!(network.nodes()[node], Node::Input(_)) && copy.known(node) == Some(Lit::new(node, false))
    };
    if let Node::Xor(a, b) = network.nodes()[lit.node()]
        && is_free(copy, a.node())
        && is_free(copy, b.node())
        && a.node().index() > 0
    {
        copy.assume(b.node(), Lit::new(a.node(), !lit.is_complemented()));
    }
}
