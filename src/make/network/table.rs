//! Structural hashing: which node has these operands.
//!
//! Takes the nodes of a network under construction; gives the one that is equal to a new one, if there is one. It holds
//! ids only, so that large networks stay in the cache: open addressing with linear probing (D. E. Knuth, "The Art of
//! Computer Programming", volume 3, 6.4, from memory).
//!
//! Holds: nodes are added in order of their ids, so the last ones can be forgotten by emptying their slots: nothing was
//! put behind them.

use std::hash::{Hash, Hasher};

use rustc_hash::FxHasher;

use super::{Node, NodeId};
use crate::id::Id;

/// An empty slot. Node 0 is the constant, which is never looked for.
const EMPTY: u32 = 0;

/// The ids of nodes by what these are.
pub(super) struct Table {
    slots: Vec<u32>,
    len: usize,
}

impl Table {
    /// A table with room for so many nodes.
    pub(super) fn with_capacity(nodes: usize) -> Self {
        Self { slots: vec![EMPTY; (nodes * 2).next_power_of_two().max(64)], len: 0 }
    }

    fn first_slot(&self, node: &Node) -> usize {
        let mut hasher = FxHasher::default();
        node.hash(&mut hasher);
        // The highest bits are mixed best.
        (hasher.finish().wrapping_mul(0x9e37_79b9_7f4a_7c15) >> (64 - self.slots.len().ilog2())) as usize
    }

    fn slot(&self, nodes: &[Node], node: &Node) -> usize {
        let mut slot = self.first_slot(node);
        while self.slots[slot] != EMPTY && nodes[self.slots[slot] as usize] != *node {
            slot = (slot + 1) & (self.slots.len() - 1);
        }
        slot
    }

    /// The node that is equal to this one; if there is none, it is the next of `nodes` from now on.
    pub(super) fn find_or_add(&mut self, nodes: &[Node], node: &Node) -> Option<NodeId> {
        if self.len * 4 > self.slots.len() * 3 {
            self.grow(nodes);
        }
        let slot = self.slot(nodes, node);
        if self.slots[slot] != EMPTY {
            return Some(NodeId::new(self.slots[slot] as usize));
        }
        self.slots[slot] = u32::try_from(nodes.len()).expect("fewer than 2^32 nodes");
        self.len += 1;
        None
    }

    fn grow(&mut self, nodes: &[Node]) {
        let mut ids: Vec<u32> = self.slots.iter().copied().filter(|&id| id != EMPTY).collect();
        ids.sort_unstable();
        self.slots = vec![EMPTY; self.slots.len() * 2];
        for id in ids {
            let slot = self.slot(nodes, &nodes[id as usize]);
            self.slots[slot] = id;
        }
    }

    /// Forgets the last of the nodes, which was added last of those that are left.
    pub(super) fn forget_last(&mut self, nodes: &[Node]) {
        let slot = self.slot(nodes, nodes.last().expect("a node to forget"));
        self.slots[slot] = EMPTY;
        self.len -= 1;
    }
}
