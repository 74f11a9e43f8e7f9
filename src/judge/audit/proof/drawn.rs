//! Nodes of the miter as decision diagrams, tied to them in the proof.
//!
//! For every node that is drawn the proof gets: the node holds just where its diagram does. That follows by propagation
//! from the node's definition and from what is known of its operands, because the diagram is built along the definition.

use rustc_hash::{FxHashMap, FxHashSet};

use super::diagram::{Diagrams, Edge, TooLarge};
use super::graph::{Graph, Node, Signal};
use super::miter::Miter;
use crate::sat::Lit;

/// Diagrams of nodes.
pub(super) struct Drawn<'a> {
    graph: &'a Graph,
    miter: &'a Miter,
    /// What nodes were proven equal to.
    equal: &'a FxHashMap<usize, Signal>,
    /// The diagrams.
    pub(super) diagrams: Diagrams,
    edges: FxHashMap<usize, Edge>,
}

impl<'a> Drawn<'a> {
    /// Nothing drawn yet. The leaves are nodes, in the order in which diagrams decide them.
    pub(super) fn new(
        (graph, miter): (&'a Graph, &'a Miter),
        equal: &'a FxHashMap<usize, Signal>,
        leaves: &[usize],
        next_var: usize,
        steps: usize,
    ) -> Result<Self, TooLarge> {
        let lits = leaves.iter().map(|&leaf| miter.lit(Signal::of(leaf))).collect();
        let mut drawn =
            Self { graph, miter, equal, diagrams: Diagrams::new(lits, next_var, steps), edges: FxHashMap::default() };
        drawn.edges.insert(0, Edge::NO);
        for (level, &leaf) in leaves.iter().enumerate() {
            let edge = drawn.diagrams.leaf(level)?;
            drawn.edges.insert(leaf, edge);
        }
        Ok(drawn)
    }

    /// The diagram of a signal, all of whose inputs are leaves or behind leaves.
    pub(super) fn edge(&mut self, signal: Signal) -> Result<Edge, TooLarge> {
        for node in self.missing(signal.node()) {
            let edge = self.draw(node)?;
            self.edges.insert(node, edge);
        }
        Ok(self.edges[&signal.node()] ^ signal.is_negated())
    }

    /// The nodes below one that are not drawn yet, in order.
    fn missing(&self, node: usize) -> Vec<usize> {
        let mut seen: FxHashSet<usize> = FxHashSet::default();
        let mut open = vec![node];
        while let Some(node) = open.pop() {
            if self.edges.contains_key(&node) || !seen.insert(node) {
                continue;
            }
            if self.twin(node).is_none() {
                open.extend(self.graph.operands(node).iter().map(|operand| operand.node()));
            }
        }
        let mut missing: Vec<usize> = seen.into_iter().collect();
        missing.sort_unstable();
        missing
    }

    /// What a node was proven equal to, if that is drawn. Elsewhere it may depend on inputs that are no leaves.
    fn twin(&self, node: usize) -> Option<Signal> {
        self.equal.get(&node).copied().filter(|equal| self.edges.contains_key(&equal.node()))
    }

    fn known(&self, signal: Signal) -> Edge {
        self.edges[&signal.node()] ^ signal.is_negated()
    }

    fn draw(&mut self, node: usize) -> Result<Edge, TooLarge> {
        let lit = self.miter.lit(Signal::of(node));
        if let Some(equal) = self.twin(node) {
            let edge = self.known(equal);
            self.tie(lit, edge);
            return Ok(edge);
        }
        match self.graph.node(node) {
            Node::All => {
                let mut edges: Vec<Edge> =
                    self.graph.operands(node).iter().map(|&operand| self.known(operand)).collect();
                // From the last levels up, so that each step meets only the top of what is there.
                edges.sort_by_key(|&edge| std::cmp::Reverse(self.diagrams.level(edge)));
                let all = edges.into_iter().try_fold(Edge::YES, |all, edge| self.diagrams.all(all, edge))?;
                self.tie(lit, all);
                Ok(all)
            }
            Node::Odd => self.draw_odd(node),
            Node::No | Node::Input => unreachable!("the constant and the inputs are drawn from the start"),
        }
    }

    /// Along the chain of sums that defines a parity in the miter.
    fn draw_odd(&mut self, node: usize) -> Result<Edge, TooLarge> {
        let operands = self.graph.operands(node);
        let mut sum = self.known(operands[0]);
        let sums: Vec<_> = self.miter.sums(node).collect();
        for (&operand, lit) in operands[1..].iter().zip(sums) {
            sum = self.diagrams.odd(sum, self.known(operand))?;
            let case = self.miter.lit(operand);
            for (lit, sum) in [(!lit, sum), (lit, !sum)] {
                self.diagrams.conclude(&[lit, !case], &[sum]);
                self.diagrams.conclude(&[lit], &[sum]);
            }
        }
        Ok(sum)
    }

    /// A result: a signal holds on one side of the difference. It must follow from the diagrams of what that side has.
    pub(super) fn follows(&mut self, is_problem: bool, signal: Signal) {
        let lits = [self.miter.lit(signal), !self.miter.side(is_problem)];
        self.diagrams.result(&lits);
    }

    /// A diagram holds on one side of the difference, by propagation.
    pub(super) fn holds(&mut self, is_problem: bool, edge: Edge) {
        let side = self.miter.side(is_problem);
        self.diagrams.conclude(&[!side], &[edge]);
    }

    fn tie(&mut self, lit: Lit, edge: Edge) {
        self.diagrams.conclude(&[!lit], &[edge]);
        self.diagrams.conclude(&[lit], &[!edge]);
    }
}
