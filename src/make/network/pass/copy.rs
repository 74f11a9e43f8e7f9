//! Rebuilding a network: what most passes share.
//!
//! Takes a network, gives literals of a new one for those of the old on demand, and at the end the new network with the
//! map from old nodes to new literals. Copied nodes are folded and hashed by the [`Builder`].

use super::{NodeMap, Passed};
use crate::id::{Id, IdVec};
use crate::make::network::build::Conjuncts;
use crate::make::network::builder::Builder;
use crate::make::network::{Lit, Network, Node, NodeId};

/// A network being rebuilt.
pub(super) struct Copy<'a> {
    pub(super) old: &'a Network,
    pub(super) builder: Builder,
    /// What stands for an old node, where it was asked for.
    map: NodeMap,
    /// Whether something assumed is in what stands for the node.
    assumed: IdVec<NodeId, bool>,
    open: Vec<NodeId>,
}

impl<'a> Copy<'a> {
    /// Nothing copied yet but the constant and the inputs.
    pub(super) fn new(old: &'a Network) -> Self {
        let mut map: NodeMap = vec![None; old.nodes().len()].into();
        for id in 0..=old.searched().len() {
            map[NodeId::new(id)] = Some(Lit::new(NodeId::new(id), false));
        }
        Self {
            old,
            builder: Builder::with_capacity(old.searched(), old.nodes().len()),
            map,
            assumed: vec![false; old.nodes().len()].into(),
            open: Vec::new(),
        }
    }

    /// What an old node shall become from here on, wherever it is used: a literal that computes the same.
    pub(super) fn replace(&mut self, node: NodeId, by: Lit) {
        self.map[node] = Some(by);
    }

    /// What an old node shall become from here on, though it is the same only where the root holds.
    pub(super) fn assume(&mut self, node: NodeId, by: Lit) {
        self.map[node] = Some(by);
        self.assumed[node] = true;
    }

    /// What an old node has become, if it was copied.
    pub(super) fn known(&self, node: NodeId) -> Option<Lit> {
        self.map[node]
    }

    /// The literal in the new network.
    pub(super) fn lit(&mut self, lit: Lit) -> Lit {
        self.open.push(lit.node());
        while let Some(&node) = self.open.last() {
            if self.map[node].is_none() {
                let (a, b) = self.operands(node);
                let missing: Vec<NodeId> =
                    [a, b].map(Lit::node).into_iter().filter(|&n| self.map[n].is_none()).collect();
                if !missing.is_empty() {
                    self.open.extend(missing);
                    continue;
                }
                self.map[node] = Some(self.of_operands(node));
                self.assumed[node] = self.assumed[a.node()] || self.assumed[b.node()];
            }
            self.open.pop();
        }
        self.map[lit.node()].expect("just copied").complement_if(lit.is_complemented())
    }

    /// The node made anew from its operands, whatever stands for it elsewhere.
    pub(super) fn anew(&mut self, node: NodeId) -> Lit {
        if node.index() <= self.old.searched().len() {
            return Lit::new(node, false);
        }
        let (a, b) = self.operands(node);
        self.lit(a);
        self.lit(b);
        self.of_operands(node)
    }

    fn operands(&self, node: NodeId) -> (Lit, Lit) {
        match self.old.nodes()[node] {
            Node::And(a, b) | Node::Xor(a, b) => (a, b),
            Node::Const | Node::Input(_) => unreachable!("mapped from the start"),
        }
    }

    fn of_operands(&mut self, node: NodeId) -> Lit {
        let new = |lit: Lit| self.map[lit.node()].expect("copied before").complement_if(lit.is_complemented());
        match self.old.nodes()[node] {
            Node::And(a, b) => {
                let (a, b) = (new(a), new(b));
                self.builder.and(a, b)
            }
            Node::Xor(a, b) => {
                let (a, b) = (new(a), new(b));
                self.builder.xor(a, b)
            }
            Node::Const | Node::Input(_) => unreachable!("mapped from the start"),
        }
    }

    /// The network whose root is the conjunction of these, a balanced tree.
    pub(super) fn finish(self, conjuncts: Conjuncts) -> Passed {
        self.finish_by(conjuncts, |builder, lits| builder.all(&lits))
    }

    /// The same with another tree over the conjuncts.
    pub(super) fn finish_by(mut self, conjuncts: Conjuncts, all: impl FnOnce(&mut Builder, Vec<Lit>) -> Lit) -> Passed {
        for node in self.assumed.ids().filter(|&node| self.assumed[node]) {
            self.map[node] = None;
        }
        let (network, moved) = conjuncts.finish_by(self.builder, self.old.searched().to_vec(), all);
        Passed { network, map: through(&self.map, &moved) }
    }
}

/// The map from old nodes to what is left of the new ones after unused nodes went away.
fn through(map: &NodeMap, moved: &NodeMap) -> NodeMap {
    let follow = |lit: Lit| Some(moved[lit.node()]?.complement_if(lit.is_complemented()));
    IdVec::from(map.values().map(|lit| lit.and_then(follow)).collect::<Vec<_>>())
}
