//! The root as clauses over nodes.
//!
//! Takes a network, gives its root as a list of [`Clause`]s, each an OR of literals, whose conjunction is the root. An
//! AND among the conjuncts becomes several clauses; a conjunct that is no OR is a clause of one literal. So passes that
//! know clauses work on CNF files and on conditions of the language alike.
//!
//! Holds: literals of a clause are sorted, none occurs twice and none with its complement; a clause that always holds is
//! left out. A clause without literals never holds.

use std::cell::OnceCell;

use super::Passed;
use super::copy::Copy;
use crate::id::{ConstraintId, Id, IdVec};
use crate::make::network::build::Conjuncts;
use crate::make::network::{Lit, Network, Node, NodeId};

/// A shared AND is taken apart again only in clauses that stay below this length, so that a clause is never read from a
/// graph much smaller than itself.
const MAX_SHARED: usize = 64;

/// Networks of more nodes are not numbered anew where nothing changes: for these it takes longer than most passes.
const MAX_RENUMBERED: usize = 100_000;

/// At least one of the literals holds.
#[derive(Clone, PartialEq, Eq, Debug)]
pub(super) struct Clause {
    pub(super) lits: Vec<Lit>,
    /// The OR as the network has it.
    pub(super) root: Lit,
    pub(super) constraint: Option<ConstraintId>,
}

/// A network with its root as clauses, which are read when a pass first asks for them and serve until one changes it.
#[derive(Clone, Copy)]
pub(super) struct View<'a> {
    pub(super) network: &'a Network,
    read: &'a OnceCell<Vec<Clause>>,
}

impl<'a> View<'a> {
    /// The network, and where its clauses are kept once they are read.
    pub(super) fn new(network: &'a Network, read: &'a OnceCell<Vec<Clause>>) -> Self {
        Self { network, read }
    }

    /// The clauses whose conjunction is the root.
    pub(super) fn clauses(&self) -> &'a [Clause] {
        self.read.get_or_init(|| clauses(self.network))
    }

    /// What is taken where a pass found nothing. A small network is numbered anew in the order of its clauses:
    /// where two cuts save as much, a later pass takes the one that comes first, and this order is the better one.
    pub(super) fn unchanged(&self) -> Option<Passed> {
        if self.network.nodes().len() > MAX_RENUMBERED {
            return None;
        }
        let mut copy = Copy::new(self.network);
        let mut conjuncts = Conjuncts::default();
        self.clauses().iter().for_each(|clause| add(&mut copy, &mut conjuncts, clause));
        Some(copy.finish(conjuncts))
    }
}

fn clauses(network: &Network) -> Vec<Clause> {
    let uses = uses(network);
    let mut clauses = Vec::with_capacity(network.conjuncts().len());
    for conjunct in network.conjuncts() {
        let mut open = vec![conjunct.lit];
        while let Some(lit) = open.pop() {
            match network.nodes()[lit.node()] {
                Node::And(a, b) if !lit.is_complemented() && uses[lit.node()] <= 1 => open.extend([b, a]),
                _ => {
                    let mut lits = leaves(network, &uses, lit);
                    if tidy(&mut lits) {
                        clauses.push(Clause { lits, root: lit, constraint: conjunct.constraint });
                    }
                }
            }
        }
    }
    clauses
}

/// Sorts the literals, keeps each once; false where the clause always holds.
pub(super) fn tidy(lits: &mut Vec<Lit>) -> bool {
    lits.retain(|&lit| lit != Lit::NO);
    lits.sort_unstable();
    lits.dedup();
    // The two literals of a node are neighbours now.
    !lits.contains(&Lit::YES) && lits.windows(2).all(|pair| pair[0] != !pair[1])
}

/// How many nodes and conjuncts use each node, of those that a conjunct needs.
pub(super) fn uses(network: &Network) -> IdVec<NodeId, u32> {
    let mut uses: IdVec<NodeId, u32> = vec![0; network.nodes().len()].into();
    network.conjuncts().iter().for_each(|conjunct| uses[conjunct.lit.node()] += 1);
    for (id, &node) in network.nodes().iter().rev() {
        if let Node::And(a, b) | Node::Xor(a, b) = node
            && uses[id] > 0
        {
            uses[a.node()] += 1;
            uses[b.node()] += 1;
        }
    }
    uses
}

fn leaves(network: &Network, uses: &IdVec<NodeId, u32>, lit: Lit) -> Vec<Lit> {
    let mut lits = Vec::new();
    let mut open = vec![lit];
    while let Some(lit) = open.pop() {
        match network.nodes()[lit.node()] {
            Node::And(a, b)
                if lit.is_complemented() && (uses[lit.node()] <= 1 || lits.len() + open.len() < MAX_SHARED) =>
            {
                open.extend([!b, !a]);
            }
            _ => lits.push(lit),
        }
    }
    lits
}

/// Whether there is nothing to do: the root is a constant or a bit, or is not said to be a conjunction.
pub(super) fn is_settled(network: &Network) -> bool {
    network.root().node().index() <= network.searched().len() || network.conjuncts().is_empty()
}

/// The clause as a conjunct of the new network, an OR.
pub(super) fn add(copy: &mut Copy<'_>, conjuncts: &mut Conjuncts, clause: &Clause) {
    let fails: Vec<Lit> = clause.lits.iter().map(|&lit| !copy.lit(lit)).collect();
    let fails = copy.builder.all(&fails);
    conjuncts.add(!fails, clause.constraint);
}
