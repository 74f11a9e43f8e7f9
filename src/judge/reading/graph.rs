//! The judge's graph: conjunctions of any width, exclusive ors of two and majorities of three, over the bits of a problem.
//!
//! Nodes are shared (equal operands, one node) and constants are folded: no node has a constant operand, a repeated
//! operand, or an operand together with its negation. Operands have smaller places than their users.

use rustc_hash::FxHashMap;

/// A node or its negation: `node << 1 | negated`. Node 0 is the constant "no".
#[derive(Clone, Copy, PartialEq, Eq, PartialOrd, Ord, Hash, Debug)]
pub(crate) struct Signal(u32);

impl Signal {
    /// Never.
    pub(crate) const NO: Signal = Signal(0);
    /// Always.
    pub(crate) const YES: Signal = Signal(1);

    fn new(node: usize) -> Self {
        Self(u32::try_from(node).ok().filter(|&node| node < 1 << 31).expect("fewer than 2^31 nodes") << 1)
    }

    /// This constant.
    pub(crate) fn constant(value: bool) -> Self {
        Self(u32::from(value))
    }

    /// The place of the node.
    pub(crate) fn node(self) -> usize {
        (self.0 >> 1) as usize
    }

    /// Whether this is the negation of the node.
    pub(crate) fn is_negated(self) -> bool {
        self.0 & 1 == 1
    }

    /// The constant this is, if it is one.
    pub(crate) fn as_constant(self) -> Option<bool> {
        (self.node() == 0).then_some(self.is_negated())
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
pub(crate) enum Node {
    /// The constant "no"; only node 0.
    No,
    /// A bit of the problem.
    Bit(u32),
    /// All operands hold; at least two, sorted.
    All {
        /// Place of the first operand in the pool.
        start: u32,
        /// Number of operands.
        len: u32,
    },
    /// One of two holds and not the other; sorted, neither operand is negated.
    Odd {
        /// Place of the first operand in the pool.
        start: u32,
    },
    /// At least two of three hold; sorted, the first operand is not negated.
    Most {
        /// Place of the first operand in the pool.
        start: u32,
    },
}

/// The graph.
#[derive(Clone, Debug)]
pub(crate) struct Graph {
    nodes: Vec<Node>,
    pool: Vec<Signal>,
    pairs: FxHashMap<(Signal, Signal), Signal>,
    lists: FxHashMap<Box<[Signal]>, Signal>,
    odds: FxHashMap<(Signal, Signal), Signal>,
    mosts: FxHashMap<[Signal; 3], Signal>,
}

impl Graph {
    /// The graph that has only the bits; bit `i` is node `i + 1`.
    pub(crate) fn over(bit_count: usize) -> Self {
        let bits = (0..bit_count as u32).map(Node::Bit);
        Self {
            nodes: std::iter::once(Node::No).chain(bits).collect(),
            pool: Vec::new(),
            pairs: FxHashMap::default(),
            lists: FxHashMap::default(),
            odds: FxHashMap::default(),
            mosts: FxHashMap::default(),
        }
    }

    /// A bit of the problem.
    pub(crate) fn bit(&self, bit: usize) -> Signal {
        debug_assert!(matches!(self.nodes[bit + 1], Node::Bit(_)), "a bit of the problem");
        Signal::new(bit + 1)
    }

    /// One more bit, of something else than the problem; its node comes after all others so far.
    pub(crate) fn new_bit(&mut self) -> Signal {
        self.nodes.push(Node::Bit(self.nodes.len() as u32 - 1));
        Signal::new(self.nodes.len() - 1)
    }

    /// The nodes; operands come before users.
    pub(crate) fn nodes(&self) -> &[Node] {
        &self.nodes
    }

    /// The operands of a node.
    pub(crate) fn operands(&self, node: usize) -> &[Signal] {
        let (start, len) = match self.nodes[node] {
            Node::No | Node::Bit(_) => (0, 0),
            Node::All { start, len } => (start, len),
            Node::Odd { start } => (start, 2),
            Node::Most { start } => (start, 3),
        };
        &self.pool[start as usize..(start + len) as usize]
    }

    /// The operands of a conjunction, none for any other node.
    pub(crate) fn factors(&self, node: usize) -> &[Signal] {
        if matches!(self.nodes[node], Node::All { .. }) { self.operands(node) } else { &[] }
    }

    /// How many operands all nodes have together.
    pub(crate) fn operand_count(&self) -> usize {
        self.pool.len()
    }

    /// Pushes what a signal is the conjunction of: the operands of a conjunction that is not negated, else itself.
    pub(crate) fn push_factors(&self, signal: Signal, into: &mut Vec<Signal>) {
        match self.factors(signal.node()) {
            factors if !factors.is_empty() && !signal.is_negated() => into.extend_from_slice(factors),
            _ => into.push(signal),
        }
    }

    fn add(&mut self, node: impl FnOnce(u32) -> Node, operands: &[Signal]) -> Signal {
        let start = u32::try_from(self.pool.len()).expect("fewer than 2^32 operands");
        self.pool.extend_from_slice(operands);
        self.nodes.push(node(start));
        Signal::new(self.nodes.len() - 1)
    }

    /// Both hold.
    pub(crate) fn and(&mut self, a: Signal, b: Signal) -> Signal {
        let (a, b) = (a.min(b), a.max(b));
        // Constants are the smallest signals.
        match a.as_constant() {
            Some(false) => return Signal::NO,
            Some(true) => return b,
            None if a == b => return a,
            None if a == !b => return Signal::NO,
            None => {}
        }
        if let Some(&known) = self.pairs.get(&(a, b)) {
            return known;
        }
        let node = self.add_all(&[a, b]);
        self.pairs.insert((a, b), node);
        node
    }

    /// All of them hold.
    pub(crate) fn all(&mut self, items: impl IntoIterator<Item = Signal>) -> Signal {
        let mut items: Vec<Signal> = items.into_iter().filter(|&item| item != Signal::YES).collect();
        items.sort_unstable();
        items.dedup();
        if items.first() == Some(&Signal::NO) || items.windows(2).any(|pair| pair[0] == !pair[1]) {
            return Signal::NO;
        }
        match items[..] {
            [] => Signal::YES,
            [one] => one,
            [a, b] => self.and(a, b),
            _ => match self.lists.get(&items[..]) {
                Some(&known) => known,
                None => {
                    let node = self.add_all(&items);
                    self.lists.insert(items.into(), node);
                    node
                }
            },
        }
    }

    fn add_all(&mut self, items: &[Signal]) -> Signal {
        let len = items.len() as u32;
        self.add(|start| Node::All { start, len }, items)
    }

    /// One of the two holds.
    pub(crate) fn or(&mut self, a: Signal, b: Signal) -> Signal {
        !self.and(!a, !b)
    }

    /// One of them holds.
    pub(crate) fn any(&mut self, items: impl IntoIterator<Item = Signal>) -> Signal {
        !self.all(items.into_iter().map(|item| !item))
    }

    /// One of the two holds and not the other.
    pub(crate) fn odd(&mut self, a: Signal, b: Signal) -> Signal {
        let flip = a.is_negated() != b.is_negated();
        let (a, b) = (a ^ a.is_negated(), b ^ b.is_negated());
        let (a, b) = (a.min(b), a.max(b));
        if a == b {
            return Signal::NO ^ flip;
        }
        if a == Signal::NO {
            return b ^ flip;
        }
        if let Some(&known) = self.odds.get(&(a, b)) {
            return known ^ flip;
        }
        let node = self.add(|start| Node::Odd { start }, &[a, b]);
        self.odds.insert((a, b), node);
        node ^ flip
    }

    /// `yes` where the condition holds, else `no`.
    pub(crate) fn choose(&mut self, condition: Signal, yes: Signal, no: Signal) -> Signal {
        if yes == no {
            return yes;
        }
        let first = self.and(condition, yes);
        let second = self.and(!condition, no);
        self.or(first, second)
    }

    /// At least two of the three hold.
    pub(crate) fn most(&mut self, a: Signal, b: Signal, c: Signal) -> Signal {
        let mut items = [a, b, c];
        items.sort_unstable();
        let [a, b, c] = items;
        // Equal, opposite and constant operands stand side by side, the constants first.
        match (a.as_constant(), a.node() == b.node(), b.node() == c.node()) {
            (_, true, _) => return if a == b { a } else { c },
            (_, _, true) => return if b == c { b } else { a },
            (Some(true), ..) => return self.or(b, c),
            (Some(false), ..) => return self.and(b, c),
            (None, ..) => {}
        }
        // Negating all operands negates the result.
        let flip = a.is_negated();
        let items = items.map(|item| item ^ flip);
        if let Some(&known) = self.mosts.get(&items) {
            return known ^ flip;
        }
        let node = self.add(|start| Node::Most { start }, &items);
        self.mosts.insert(items, node);
        node ^ flip
    }

    /// Which nodes the roots need, by place.
    pub(crate) fn needed(&self, roots: impl IntoIterator<Item = Signal>) -> Vec<bool> {
        let mut needed = vec![false; self.nodes.len()];
        roots.into_iter().for_each(|root| needed[root.node()] = true);
        for at in (0..self.nodes.len()).rev() {
            if needed[at] {
                self.operands(at).iter().for_each(|operand| needed[operand.node()] = true);
            }
        }
        needed
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn constants_fold_and_equal_nodes_are_one() {
        let mut graph = Graph::over(3);
        let [a, b, c] = [0, 1, 2].map(|bit| graph.bit(bit));
        assert_eq!(graph.and(a, Signal::YES), a);
        assert_eq!(graph.and(a, !a), Signal::NO);
        assert_eq!(graph.or(a, !a), Signal::YES);
        assert_eq!(graph.odd(a, !a), Signal::YES);
        assert_eq!(graph.odd(!a, b), !graph.odd(b, a));
        assert_eq!(graph.odd(Signal::YES, !a), a);
        assert_eq!(graph.all([c, a, b, a]), graph.all([a, b, c]));
        assert_eq!(graph.all([c, a, b, !c]), Signal::NO);
        assert_eq!(graph.all([]), Signal::YES);
        assert_eq!(graph.choose(c, a, a), a);
        assert_eq!(graph.choose(Signal::NO, a, b), b);
        assert_eq!(graph.most(a, b, Signal::NO), graph.and(a, b));
        assert_eq!(graph.most(a, b, Signal::YES), graph.or(a, b));
        assert_eq!((graph.most(b, a, !b), graph.most(c, b, c)), (a, c));
        assert_eq!(graph.most(!c, !a, !b), !graph.most(a, b, c));
    }
}
