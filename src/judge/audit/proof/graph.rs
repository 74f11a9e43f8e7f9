//! The graph in which a problem and a circuit meet: conjunctions and parities of any width, over the inputs.
//!
//! Equal nodes are one node. Conjunctions of conjunctions are taken apart (up to [`MAX_WIDTH`] operands) and parities of
//! parities always (up to [`MAX_PARITY`]), and operands are sorted; so what a circuit computes and then undoes cancels,
//! however its gates group the operands. Operands have smaller places than their users.

use rustc_hash::FxHashMap;

/// A node or its negation: `node << 1 | negated`. Node 0 is the constant "no".
#[derive(Clone, Copy, PartialEq, Eq, PartialOrd, Ord, Hash, Debug)]
pub(super) struct Signal(u32);

impl Signal {
    /// Never.
    pub(super) const NO: Signal = Signal(0);
    /// Always.
    pub(super) const YES: Signal = Signal(1);

    /// The node itself.
    pub(super) fn of(node: usize) -> Self {
        Self((node as u32) << 1)
    }

    /// The place of the node.
    pub(super) fn node(self) -> usize {
        (self.0 >> 1) as usize
    }

    /// Whether this is the negation of the node.
    pub(super) fn is_negated(self) -> bool {
        self.0 & 1 == 1
    }
}

impl std::ops::Not for Signal {
    type Output = Self;
    fn not(self) -> Self {
        Self(self.0 ^ 1)
    }
}

impl std::ops::BitXor<bool> for Signal {
    type Output = Self;
    fn bitxor(self, flip: bool) -> Self {
        Self(self.0 ^ u32::from(flip))
    }
}

/// What a node computes.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub(super) enum Node {
    /// The constant "no"; only node 0.
    No,
    /// An input.
    Input,
    /// All operands hold: at least two, sorted.
    All,
    /// An odd number of operands hold: at least two, sorted, none negated.
    Odd,
}

/// Conjunctions are taken apart up to this many operands: long chains would need the square of their length.
const MAX_WIDTH: usize = 64;
/// Parities are taken apart up to this many operands.
const MAX_PARITY: usize = 1 << 12;
/// The most nodes, and a sixteenth of the most operands: about a gigabyte of memory.
const MAX_NODES: usize = 1 << 23;

/// The graph.
#[derive(Debug)]
pub(super) struct Graph {
    nodes: Vec<(Node, u32)>,
    pool: Vec<Signal>,
    alls: FxHashMap<Box<[Signal]>, Signal>,
    odds: FxHashMap<Box<[Signal]>, Signal>,
}

impl Graph {
    /// The graph that has only the inputs; input `i` is node `i + 1`.
    pub(super) fn over(inputs: usize) -> Self {
        let mut nodes = vec![(Node::Input, 0); inputs + 1];
        nodes[0] = (Node::No, 0);
        Self { nodes, pool: Vec::new(), alls: FxHashMap::default(), odds: FxHashMap::default() }
    }

    /// How many nodes.
    pub(super) fn len(&self) -> usize {
        self.nodes.len()
    }

    /// Whether the graph has grown beyond what is held in memory.
    pub(super) fn is_too_large(&self) -> bool {
        self.nodes.len() > MAX_NODES || self.pool.len() > 16 * MAX_NODES
    }

    /// What a node computes.
    pub(super) fn node(&self, node: usize) -> Node {
        self.nodes[node].0
    }

    /// The operands of a node.
    pub(super) fn operands(&self, node: usize) -> &[Signal] {
        let start = if node == 0 { 0 } else { self.nodes[node - 1].1 };
        &self.pool[start as usize..self.nodes[node].1 as usize]
    }

    /// The operands of a conjunction that is not negated.
    fn factors(&self, signal: Signal) -> Option<&[Signal]> {
        let is_conjunction = !signal.is_negated() && self.node(signal.node()) == Node::All;
        is_conjunction.then(|| self.operands(signal.node()))
    }

    fn push(&mut self, node: Node, operands: &[Signal]) -> Signal {
        assert!(self.nodes.len() < 1 << 31, "fewer than 2^31 nodes");
        self.pool.extend_from_slice(operands);
        self.nodes.push((node, u32::try_from(self.pool.len()).expect("fewer than 2^32 operands")));
        Signal::of(self.nodes.len() - 1)
    }

    /// All of them hold.
    pub(super) fn all(&mut self, items: &[Signal]) -> Signal {
        let width: usize = items.iter().map(|&item| self.factors(item).map_or(1, <[Signal]>::len)).sum();
        let mut operands = Vec::with_capacity(width.min(2 * MAX_WIDTH));
        for &item in items {
            match self.factors(item) {
                Some(factors) if width <= MAX_WIDTH => operands.extend_from_slice(factors),
                _ => operands.push(item),
            }
        }
        self.all_of(operands)
    }

    /// A conjunction whose operands are not taken apart.
    fn all_of(&mut self, mut operands: Vec<Signal>) -> Signal {
        operands.sort_unstable();
        operands.dedup();
        if operands.first() == Some(&Signal::NO) || operands.windows(2).any(|pair| pair[0] == !pair[1]) {
            return Signal::NO;
        }
        operands.retain(|&operand| operand != Signal::YES);
        match operands[..] {
            [] => return Signal::YES,
            [one] => return one,
            _ => {}
        }
        if let Some(&known) = self.alls.get(&operands[..]) {
            return known;
        }
        let node = self.push(Node::All, &operands);
        self.alls.insert(operands.into(), node);
        node
    }

    /// One of them holds.
    pub(super) fn any(&mut self, items: &[Signal]) -> Signal {
        let negated: Vec<Signal> = items.iter().map(|&item| !item).collect();
        !self.all(&negated)
    }

    /// An odd number of them hold.
    pub(super) fn odd(&mut self, items: &[Signal]) -> Signal {
        let mut sum = Sum::default();
        items.iter().for_each(|&item| sum.add(self, item));
        sum.signal(self)
    }

    /// At least two of the three hold.
    pub(super) fn most(&mut self, a: Signal, b: Signal, c: Signal) -> Signal {
        for (one, others) in [(a, [b, c]), (b, [a, c]), (c, [a, b])] {
            match one {
                Signal::NO => return self.all(&others),
                Signal::YES => return self.any(&others),
                _ => {}
            }
        }
        let (x, y) = (self.odd(&[a, c]), self.odd(&[b, c]));
        let both = self.all(&[x, y]);
        self.odd(&[both, c])
    }

    /// The conjuncts of a signal, those of nested conjunctions too; sorted. "Always" has none.
    pub(super) fn conjuncts(&self, root: Signal) -> Vec<Signal> {
        let mut found = Vec::new();
        let mut seen = rustc_hash::FxHashSet::default();
        let mut open = vec![root];
        while let Some(signal) = open.pop() {
            if signal == Signal::YES || !seen.insert(signal) {
                continue;
            }
            match self.factors(signal) {
                Some(factors) => open.extend_from_slice(factors),
                None => found.push(signal),
            }
        }
        found.sort_unstable();
        found
    }
}

/// A parity that grows: what a qubit holds while gates flip it.
#[derive(Clone, Debug, Default)]
pub(super) struct Sum {
    /// Nodes in increasing order.
    terms: std::collections::BTreeSet<u32>,
    flip: bool,
    /// What the sum is, while it is not changed.
    known: Option<Signal>,
}

impl Sum {
    /// The sum of one term.
    pub(super) fn of(graph: &Graph, signal: Signal) -> Self {
        let mut sum = Self::default();
        sum.add(graph, signal);
        sum.known = Some(signal);
        sum
    }

    /// Adds a term; one that is there already goes away.
    pub(super) fn add(&mut self, graph: &Graph, term: Signal) {
        self.known = None;
        self.flip ^= term.is_negated();
        match graph.node(term.node()) {
            Node::No => {}
            Node::Odd if graph.operands(term.node()).len() <= MAX_PARITY => {
                graph.operands(term.node()).iter().for_each(|operand| self.toggle(operand.node() as u32));
            }
            _ => self.toggle(term.node() as u32),
        }
    }

    fn toggle(&mut self, node: u32) {
        if !self.terms.remove(&node) {
            self.terms.insert(node);
        }
    }

    /// The sum as a signal.
    pub(super) fn signal(&mut self, graph: &mut Graph) -> Signal {
        if let Some(known) = self.known {
            return known;
        }
        let operands: Vec<Signal> = self.terms.iter().map(|&node| Signal::of(node as usize)).collect();
        let sum = match operands[..] {
            [] => Signal::NO,
            [one] => one,
            _ => match graph.odds.get(&operands[..]) {
                Some(&known) => known,
                None => {
                    let node = graph.push(Node::Odd, &operands);
                    graph.odds.insert(operands.into(), node);
                    node
                }
            },
        };
        let signal = sum ^ self.flip;
        self.known = Some(signal);
        signal
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn equal_functions_of_one_shape_are_one_node() {
        let mut graph = Graph::over(4);
        let [a, b, c, d] = [1, 2, 3, 4].map(Signal::of);
        let (ab, cd) = (graph.all(&[a, b]), graph.all(&[c, d]));
        let abc = graph.all(&[ab, c]);
        assert_eq!(graph.all(&[ab, cd]), graph.all(&[abc, d, a]));
        assert_eq!((graph.all(&[abc, !b]), graph.all(&[ab, Signal::YES])), (Signal::NO, ab));
        let sum = graph.odd(&[a, !b, ab]);
        assert_eq!(graph.odd(&[sum, ab]), !graph.odd(&[b, a]));
        assert_eq!(graph.odd(&[sum, ab, b, a]), Signal::YES);
        assert_eq!(graph.most(a, Signal::NO, b), ab);
        assert_eq!(graph.any(&[a, b]), !graph.all(&[!b, !a]));
        let nested = graph.all(&[!abc, d, ab]);
        assert_eq!(graph.conjuncts(nested), {
            let mut c = vec![a, b, d, !abc];
            c.sort_unstable();
            c
        });
    }

    /// Long chains are not taken apart, and their conjuncts are found all the same.
    #[test]
    fn long_chains_have_all_their_conjuncts() {
        let mut graph = Graph::over(300);
        let inputs: Vec<Signal> = (1..=300).map(Signal::of).collect();
        let chain = inputs.iter().fold(Signal::YES, |chain, &input| graph.all(&[chain, input]));
        assert_eq!(graph.conjuncts(chain), inputs);
    }
}
