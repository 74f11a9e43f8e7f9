//! The graph of a certificate: a decision-DNNF, children before their parents.
//!
//! Holds: every child of a node comes before it; the two sides of a decision state the literals of its two values, or
//! have no model. So a graph is acyclic and deterministic by its making; that its parts share no variable is tested by
//! [`VarSets::of`](super::sets::VarSets::of).
//!
//! A. Darwiche, "New advances in compiling CNF into decomposable negation normal form", ECAI 2004, and "Decomposable
//! negation normal form", Journal of the ACM 48(4), 2001 (from memory).

use crate::judge::count::engine::Trace;
use crate::problem::{BitId, BitLit};

/// One node. Children are places in the graph.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub enum Node {
    /// No model.
    Never,
    /// A literal.
    Lit(BitLit),
    /// All of the children, whose places are in the pool from `from` to `to`.
    All {
        /// The first place.
        from: u32,
        /// Behind the last place.
        to: u32,
    },
    /// A decision.
    Either {
        /// The variable.
        bit: BitId,
        /// What holds where it is 1.
        yes: u32,
        /// What holds where it is 0.
        no: u32,
    },
}

const _: () = assert!(size_of::<Node>() <= 16);

/// The graph; the last node is the whole.
#[derive(Clone, PartialEq, Eq, Debug, Default)]
pub struct Graph {
    nodes: Vec<Node>,
    pool: Vec<u32>,
}

impl Graph {
    /// The nodes, children first.
    pub fn nodes(&self) -> &[Node] {
        &self.nodes
    }

    /// The place of the whole.
    pub fn root(&self) -> usize {
        self.nodes.len() - 1
    }

    /// The children of the conjunction or decision at this place.
    pub fn children(&self, node: &Node) -> impl DoubleEndedIterator<Item = u32> + use<'_> {
        let (all, pair) = match *node {
            Node::All { from, to } => (&self.pool[from as usize..to as usize], None),
            Node::Either { yes, no, .. } => (&[][..], Some([yes, no])),
            Node::Never | Node::Lit(_) => (&[][..], None),
        };
        all.iter().copied().chain(pair.into_iter().flatten())
    }

    /// The number of edges.
    pub fn edge_count(&self) -> usize {
        self.pool.len() + 2 * self.nodes.iter().filter(|node| matches!(node, Node::Either { .. })).count()
    }

    /// Appends a node without children.
    pub(super) fn push(&mut self, node: Node) -> u32 {
        self.nodes.push(node);
        self.nodes.len() as u32 - 1
    }

    /// Appends a conjunction.
    pub(super) fn push_all(&mut self, children: &[u32]) -> u32 {
        let from = self.pool.len() as u32;
        self.pool.extend_from_slice(children);
        self.push(Node::All { from, to: self.pool.len() as u32 })
    }

    /// Whether the node at this place has no model, or states this literal by itself or as an operand.
    pub(super) fn states(&self, at: u32, lit: BitLit) -> bool {
        let node = &self.nodes[at as usize];
        match node {
            Node::Never => true,
            Node::Lit(own) => *own == lit,
            Node::All { .. } => self.children(node).any(|child| self.nodes[child as usize] == Node::Lit(lit)),
            Node::Either { .. } => false,
        }
    }

    /// The graph of what this node needs, and nothing else.
    pub(super) fn pruned(&self, root: u32) -> Self {
        let mut needed = vec![false; self.nodes.len()];
        needed[root as usize] = true;
        // Parents come last, so each node is known to be needed before its children are looked at.
        for at in (0..=root as usize).rev() {
            if needed[at] {
                self.children(&self.nodes[at]).for_each(|child| needed[child as usize] = true);
            }
        }
        let mut new = vec![0; self.nodes.len()];
        let mut pruned = Self::default();
        for at in (0..=root as usize).filter(|&at| needed[at]) {
            new[at] = match self.nodes[at] {
                Node::All { .. } => {
                    let children: Vec<u32> = self.children(&self.nodes[at]).map(|child| new[child as usize]).collect();
                    pruned.push_all(&children)
                }
                Node::Either { bit, yes, no } => {
                    pruned.push(Node::Either { bit, yes: new[yes as usize], no: new[no as usize] })
                }
                leaf => pruned.push(leaf),
            };
        }
        pruned
    }
}

/// Builds the graph while the engine counts.
#[derive(Debug)]
pub(super) struct Recorder {
    pub(super) graph: Graph,
    /// For a literal, its node.
    literals: Vec<Option<u32>>,
    never: u32,
    always: u32,
}

impl Recorder {
    pub(super) fn new(var_count: usize) -> Self {
        let mut graph = Graph::default();
        let never = graph.push(Node::Never);
        let always = graph.push_all(&[]);
        Self { graph, literals: vec![None; 2 * var_count], never, always }
    }

    fn lit(&mut self, lit: BitLit) -> u32 {
        *self.literals[lit.index()].get_or_insert_with(|| self.graph.push(Node::Lit(lit)))
    }
}

impl Trace for Recorder {
    type Node = u32;
    const LISTENS: bool = true;

    fn nothing(&mut self) -> u32 {
        self.never
    }

    fn all(&mut self, implied: &[BitLit], parts: &[u32]) -> u32 {
        if parts.contains(&self.never) {
            return self.never;
        }
        let mut children: Vec<u32> = implied.iter().map(|&lit| self.lit(lit)).collect();
        children.extend(parts.iter().copied().filter(|&part| part != self.always));
        match children[..] {
            [] => self.always,
            [one] => one,
            _ => self.graph.push_all(&children),
        }
    }

    fn either(&mut self, bit: BitId, when_true: u32, when_false: u32) -> u32 {
        // A side states its literal, so where the other has no model it says everything.
        match (when_true == self.never, when_false == self.never) {
            (true, _) => when_false,
            (_, true) => when_true,
            _ => self.graph.push(Node::Either { bit, yes: when_true, no: when_false }),
        }
    }

    fn witness(&mut self, values: &[BitLit]) -> u32 {
        self.all(values, &[])
    }
}
