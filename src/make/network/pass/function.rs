//! Functions of up to five nodes: sorted leaves and a truth table, small enough to be copied.
//!
//! Takes nodes and functions of them; gives their ANDs and XORs as functions of the united leaves, or none where these
//! are more than [`INPUTS`]. Holds: a table does not depend on inputs beyond the last leaf.

use crate::id::{Id, IdVec};
use crate::make::network::small::{INPUT_TABLES, INPUTS};
use crate::make::network::{Lit, Network, Node, NodeId};

/// Up to five nodes, sorted.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub(super) struct Leaves {
    /// Beyond `len` node 0, the constant, so that equal leaves are equal records.
    nodes: [NodeId; INPUTS],
    len: u8,
}

impl Leaves {
    /// No node.
    pub(super) fn none() -> Self {
        Self { nodes: [NodeId::new(0); INPUTS], len: 0 }
    }

    /// One node.
    pub(super) fn one(node: NodeId) -> Self {
        let mut leaves = Self::none();
        leaves.push(node);
        leaves
    }

    /// Appends a node beyond the others; there is room.
    fn push(&mut self, node: NodeId) {
        self.nodes[usize::from(self.len)] = node;
        self.len += 1;
    }

    /// Both together, where there is room.
    pub(super) fn union(&self, other: &Self) -> Option<Self> {
        let (mut a, mut b) = (self.iter().peekable(), other.iter().peekable());
        let mut all = Self::none();
        loop {
            let next = match (a.peek(), b.peek()) {
                (Some(&x), Some(&y)) => *x.min(y),
                (Some(&x), None) | (None, Some(&x)) => *x,
                (None, None) => return Some(all),
            };
            if all.len() == INPUTS {
                return None;
            }
            a.next_if(|&&node| node == next);
            b.next_if(|&&node| node == next);
            all.push(next);
        }
    }
}

impl std::ops::Deref for Leaves {
    type Target = [NodeId];
    fn deref(&self) -> &[NodeId] {
        &self.nodes[..usize::from(self.len)]
    }
}

/// A function of its leaves: leaf *j* is input *j* of the table.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub(super) struct Function {
    pub(super) inputs: Leaves,
    pub(super) table: u32,
}

const _: () = assert!(size_of::<Function>() <= 28);

impl Function {
    /// *no*, of no nodes.
    pub(super) fn no() -> Self {
        Self { inputs: Leaves::none(), table: 0 }
    }

    /// A node itself.
    pub(super) fn of_node(node: NodeId) -> Self {
        match node.index() {
            0 => Self::no(),
            _ => Self { inputs: Leaves::one(node), table: INPUT_TABLES[0] },
        }
    }

    /// The same function as one of more inputs, a superset.
    pub(super) fn table_over(&self, inputs: &Leaves) -> u32 {
        // The places of the leaves only grow, so from the last to the first each moves to a place that is free.
        let mut table = self.table;
        let mut to = inputs.len();
        for (from, leaf) in self.inputs.iter().enumerate().rev() {
            to = inputs[..to].iter().rposition(|node| node == leaf).expect("a superset");
            if to > from {
                table = exchanged(table, from, to);
            }
        }
        table
    }

    /// The AND or the XOR of two; none where they have too many inputs together.
    pub(super) fn join(&self, other: &Function, of: impl Fn(u32, u32) -> u32) -> Option<Function> {
        let inputs = self.inputs.union(&other.inputs)?;
        let table = of(self.table_over(&inputs), other.table_over(&inputs));
        Some(Function { inputs, table })
    }
}

/// The table with two inputs exchanged, the first before the second.
fn exchanged(table: u32, first: usize, second: usize) -> u32 {
    let rows = INPUT_TABLES[first] & !INPUT_TABLES[second];
    let distance = (1 << second) - (1 << first);
    let differ = (table >> distance ^ table) & rows;
    table ^ differ ^ differ << distance
}

/// The truth table of a literal of a function.
pub(super) fn complement_if(table: u32, lit: Lit) -> u32 {
    if lit.is_complemented() { !table } else { table }
}

/// For each node that these literals depend on its function of the searched bits, where these are few; none for others.
pub(super) fn functions(network: &Network, lits: &[Lit]) -> IdVec<NodeId, Option<Function>> {
    let needed = network.live(lits);
    let mut functions: IdVec<NodeId, Option<Function>> = IdVec::new();
    functions.reserve(network.nodes().len());
    for (id, node) in network.nodes().iter() {
        if !needed[id] {
            functions.push(None);
            continue;
        }
        let of = |lit: Lit| functions[lit.node()].as_ref();
        let function = match *node {
            Node::Const | Node::Input(_) => Some(Function::of_node(id)),
            Node::And(a, b) => {
                of(a).zip(of(b)).and_then(|(p, q)| p.join(q, |p, q| complement_if(p, a) & complement_if(q, b)))
            }
            Node::Xor(a, b) => of(a).zip(of(b)).and_then(|(p, q)| p.join(q, |p, q| p ^ q)),
        };
        functions.push(function);
    }
    functions
}

#[cfg(test)]
mod tests {
    use super::*;

    fn leaves(nodes: &[usize]) -> Leaves {
        let mut leaves = Leaves::none();
        nodes.iter().for_each(|&node| leaves.push(NodeId::new(node)));
        leaves
    }

    #[test]
    fn leaves_unite_while_there_is_room() {
        assert_eq!(leaves(&[1, 4]).union(&leaves(&[2, 4, 7])), Some(leaves(&[1, 2, 4, 7])));
        assert_eq!(leaves(&[]).union(&leaves(&[3])), Some(leaves(&[3])));
        assert_eq!(leaves(&[1, 2, 3]).union(&leaves(&[4, 5, 6])), None);
    }

    /// Row by row against the definition: bit *j* of a row is leaf *j*.
    #[test]
    fn a_table_over_more_inputs_is_the_same_function() {
        let all = leaves(&[1, 2, 3, 4, 5]);
        for subset in 0..32usize {
            let places: Vec<usize> = (0..5).filter(|at| subset >> at & 1 == 1).collect();
            let inputs = leaves(&places.iter().map(|at| at + 1).collect::<Vec<_>>());
            // A table of so many inputs, the same whatever the others are.
            let table = (0..32).fold(0u32, |table, row| {
                let own = row & ((1 << places.len()) - 1);
                table | (0x9e37_79b9_u32 >> own & 1) << row
            });
            let wider = Function { inputs, table }.table_over(&all);
            for row in 0..32usize {
                let own = places.iter().enumerate().fold(0, |own, (at, place)| own | (row >> place & 1) << at);
                assert_eq!(wider >> row & 1, table >> own & 1, "{subset:05b} {row}");
            }
        }
    }
}
