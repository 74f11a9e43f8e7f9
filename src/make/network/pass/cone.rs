//! Which ANDs would go away with some nodes.

use super::view;
use crate::id::IdVec;
use crate::make::network::{Lit, Network, Node, NodeId};

/// How often each node is used, to be counted down and up again.
pub(super) struct Uses<'a> {
    network: &'a Network,
    uses: IdVec<NodeId, u32>,
    open: Vec<NodeId>,
}

impl<'a> Uses<'a> {
    /// The uses by nodes and conjuncts.
    pub(super) fn new(network: &'a Network) -> Self {
        Self { network, uses: view::uses(network), open: Vec::new() }
    }

    /// How often a node is used.
    pub(super) fn of(&self, node: NodeId) -> u32 {
        self.uses[node]
    }

    /// How many ANDs nothing needs any more if each of these roots loses one use and the leaves stay.
    pub(super) fn freed(&mut self, roots: &[Lit], leaves: &[NodeId]) -> usize {
        let ands = roots.iter().map(|root| self.release(root.node(), leaves)).sum();
        roots.iter().rev().for_each(|root| self.keep(root.node(), leaves));
        ands
    }

    /// How many ANDs nothing needs any more if the node goes and the leaves stay.
    pub(super) fn own(&mut self, node: NodeId, leaves: &[NodeId]) -> usize {
        let all = std::mem::replace(&mut self.uses[node], 1);
        let ands = self.release(node, leaves);
        self.keep(node, leaves);
        self.uses[node] = all;
        ands
    }

    /// Takes one use of a node away, and those by what is not used any more.
    fn release(&mut self, node: NodeId, leaves: &[NodeId]) -> usize {
        let mut ands = 0;
        self.open.push(node);
        while let Some(node) = self.open.pop() {
            self.uses[node] = self.uses[node].saturating_sub(1);
            if self.uses[node] == 0
                && !leaves.contains(&node)
                && let Node::And(a, b) | Node::Xor(a, b) = self.network.nodes()[node]
            {
                ands += usize::from(matches!(self.network.nodes()[node], Node::And(..)));
                self.open.extend([a.node(), b.node()]);
            }
        }
        ands
    }

    /// Gives it back.
    fn keep(&mut self, node: NodeId, leaves: &[NodeId]) {
        self.open.push(node);
        while let Some(node) = self.open.pop() {
            self.uses[node] += 1;
            if self.uses[node] == 1
                && !leaves.contains(&node)
                && let Node::And(a, b) | Node::Xor(a, b) = self.network.nodes()[node]
            {
                self.open.extend([a.node(), b.node()]);
            }
        }
    }
}
