//! The network: the predicate "all constraints hold" as a graph of two-input ANDs and XORs.
//!
//! Input:  a [`Problem`](crate::problem::Problem) and its [`Places`].
//! Output: a [`Network`] over the searched bits, with one root and the list of conjuncts the root is the AND of.
//! After:  N1 operands have smaller ids than their users; N2 node 0 is the constant *no*, nodes 1 to n are the inputs
//!         in the order of the search register; N3 no other node is constant, has a constant operand or has equal or
//!         opposite operands; N4 two nodes with the same operands are one node; N5 the operands of a XOR are not
//!         complemented; N6 every AND and XOR is used by the root or by a conjunct.
//!
//! [`build`] makes it from the problem; the passes of [`pass`] make the ANDs fewer.
//!
//! A [`Lit`] is a node or its complement, so negation is free. What counts is the number of ANDs: a XOR costs no T gate
//! and no ancilla (see [`lower`](super::lower)).
//!
//! For codes outside the domain of their variable the constraints compute whatever is cheapest: the conjunct that says
//! "the code lies in its domain" fails there.

mod arith;
mod build;
mod builder;
mod columns;
mod expr;
mod linear;
mod lookup;
pub mod pass;
mod small;
mod table;
mod text;

use crate::define_id;
use crate::id::{ConstraintId, Id, IdVec};
use crate::problem::{BitId, Bits};

pub use crate::places::Places;
pub use build::build;
pub use text::TextError;

define_id! {
    /// A node of the network.
    NodeId, "n"
}

/// A node or its complement: `node << 1 | complemented`.
#[derive(Clone, Copy, PartialEq, Eq, PartialOrd, Ord, Hash)]
pub struct Lit(u32);

impl Lit {
    /// The constant *no*.
    pub const NO: Lit = Lit(0);
    /// The constant *yes*.
    pub const YES: Lit = Lit(1);

    /// The node, or its complement.
    pub fn new(node: NodeId, complemented: bool) -> Self {
        assert!(node.index() < 1 << 31, "fewer than 2^31 nodes");
        Self((node.index() as u32) << 1 | u32::from(complemented))
    }

    /// The constant.
    pub fn constant(value: bool) -> Self {
        Self(u32::from(value))
    }

    /// The node.
    pub fn node(self) -> NodeId {
        NodeId::new((self.0 >> 1) as usize)
    }

    /// Whether the node is complemented.
    pub fn is_complemented(self) -> bool {
        self.0 & 1 == 1
    }

    /// Whether this is one of the two constants.
    pub fn is_constant(self) -> bool {
        self.0 < 2
    }

    /// The literal, complemented where `flip` is set.
    #[must_use]
    pub fn complement_if(self, flip: bool) -> Self {
        Self(self.0 ^ u32::from(flip))
    }
}

impl std::ops::Not for Lit {
    type Output = Self;
    fn not(self) -> Self {
        Self(self.0 ^ 1)
    }
}

impl std::fmt::Display for Lit {
    fn fmt(&self, f: &mut std::fmt::Formatter<'_>) -> std::fmt::Result {
        write!(f, "{}{}", if self.is_complemented() { "!" } else { "" }, self.node())
    }
}

impl std::fmt::Debug for Lit {
    fn fmt(&self, f: &mut std::fmt::Formatter<'_>) -> std::fmt::Result {
        std::fmt::Display::fmt(self, f)
    }
}

/// What a node computes.
#[derive(Clone, Copy, PartialEq, Eq, Hash, Debug)]
pub enum Node {
    /// *no*.
    Const,
    /// A searched bit.
    Input(BitId),
    /// Both hold.
    And(Lit, Lit),
    /// Exactly one holds; neither literal is complemented.
    Xor(Lit, Lit),
}

const _: () = assert!(size_of::<Node>() <= 12);

/// A part of the root: the root holds where all conjuncts hold.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub struct Conjunct {
    /// What must hold.
    pub lit: Lit,
    /// The constraint it says, or part of it; none for "the code lies in its domain".
    pub constraint: Option<ConstraintId>,
}

/// A XOR-AND graph with one root.
#[derive(Clone, PartialEq, Eq, Debug)]
pub struct Network {
    nodes: IdVec<NodeId, Node>,
    searched: Vec<BitId>,
    conjuncts: Vec<Conjunct>,
    root: Lit,
}

impl Network {
    /// The nodes, operands before their users.
    pub fn nodes(&self) -> &IdVec<NodeId, Node> {
        &self.nodes
    }

    /// The bits of the search register in order: node `i + 1` is bit `searched()[i]`.
    pub fn searched(&self) -> &[BitId] {
        &self.searched
    }

    /// The parts of the root, in the order they were built.
    pub fn conjuncts(&self) -> &[Conjunct] {
        &self.conjuncts
    }

    /// The predicate.
    pub fn root(&self) -> Lit {
        self.root
    }

    /// How many ANDs the root depends on.
    pub fn and_count(&self) -> usize {
        let live = self.live(&[self.root]);
        self.nodes.iter().filter(|&(id, node)| live[id] && matches!(node, Node::And(..))).count()
    }

    /// Which nodes these literals depend on.
    pub(crate) fn live(&self, roots: &[Lit]) -> IdVec<NodeId, bool> {
        mark_live(&self.nodes, roots)
    }

    /// Whether the predicate holds for these bits of the problem.
    pub fn holds(&self, bits: &Bits) -> bool {
        self.evaluate(bits)[self.root.node()] ^ self.root.is_complemented()
    }

    /// The value of every node for these bits of the problem.
    pub fn evaluate(&self, bits: &Bits) -> IdVec<NodeId, bool> {
        let mut values: IdVec<NodeId, bool> = IdVec::new();
        for node in self.nodes.values() {
            let of = |lit: Lit| values[lit.node()] ^ lit.is_complemented();
            let value = match *node {
                Node::Const => false,
                Node::Input(bit) => bits.get(bit),
                Node::And(a, b) => of(a) && of(b),
                Node::Xor(a, b) => of(a) ^ of(b),
            };
            values.push(value);
        }
        values
    }
}

fn mark_live(nodes: &IdVec<NodeId, Node>, roots: &[Lit]) -> IdVec<NodeId, bool> {
    let mut live: IdVec<NodeId, bool> = vec![false; nodes.len()].into();
    for root in roots {
        live[root.node()] = true;
    }
    for (id, node) in nodes.iter().rev() {
        if let Node::And(a, b) | Node::Xor(a, b) = *node
            && live[id]
        {
            live[a.node()] = true;
            live[b.node()] = true;
        }
    }
    live
}
