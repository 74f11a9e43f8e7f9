//! Which ANDs would go away with some nodes, and what small cones compute.

use super::view;
use crate::id::{Id, IdVec};
use crate::make::network::small::{INPUT_TABLES, INPUTS};
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
        let mut ands = 0;
        for &root in roots {
            self.open.push(root.node());
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
        }
        for &root in roots.iter().rev() {
            self.open.push(root.node());
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
        ands
    }
}

/// Up to five nodes, sorted, and a function of them.
#[derive(Clone, PartialEq, Eq, Debug)]
pub(super) struct Function {
    pub(super) inputs: Vec<NodeId>,
    pub(super) table: u32,
}

impl Function {
    /// A node itself.
    pub(super) fn of_node(node: NodeId) -> Self {
        match node.index() {
            0 => Self { inputs: Vec::new(), table: 0 },
            _ => Self { inputs: vec![node], table: INPUT_TABLES[0] },
        }
    }

    /// The same function as one of more inputs, a sorted superset.
    pub(super) fn table_over(&self, inputs: &[NodeId]) -> u32 {
        if self.inputs == inputs {
            return self.table;
        }
        let places: Vec<usize> =
            self.inputs.iter().map(|node| inputs.binary_search(node).expect("a superset")).collect();
        (0..32u32).fold(0, |table, row| {
            let old = places.iter().enumerate().fold(0, |old, (at, place)| old | (row >> place & 1) << at);
            table | (self.table >> old & 1) << row
        })
    }

    /// The AND or the XOR of two; none where they have too many inputs together.
    pub(super) fn join(&self, other: &Function, of: impl Fn(u32, u32) -> u32) -> Option<Function> {
        let inputs = union(&self.inputs, &other.inputs)?;
        let table = of(self.table_over(&inputs), other.table_over(&inputs));
        Some(Function { inputs, table })
    }
}

/// The sorted union, where it has at most [`INPUTS`] members.
pub(super) fn union(a: &[NodeId], b: &[NodeId]) -> Option<Vec<NodeId>> {
    let mut all: Vec<NodeId> = a.iter().chain(b).copied().collect();
    all.sort_unstable();
    all.dedup();
    (all.len() <= INPUTS).then_some(all)
}

/// The truth table of a literal of a function.
pub(super) fn complement_if(table: u32, lit: Lit) -> u32 {
    if lit.is_complemented() { !table } else { table }
}

/// For each node its function of the searched bits, where these are few.
pub(super) fn functions(network: &Network) -> IdVec<NodeId, Option<Function>> {
    let mut functions: IdVec<NodeId, Option<Function>> = IdVec::new();
    for (id, node) in network.nodes().iter() {
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
