//! Wide nodes: a reading as few large nodes, each with the level at which it has to be evaluated.
//!
//! Input: a graph, what is needed of it, and the level of each bit (see `tape`). Output: [`Nodes`]. Exclusive ors of exclusive
//! ors become one sum; a conjunction that only a sum uses is a term of that sum. A sum or conjunction whose operands change
//! at different rates is cut by rate: what changes seldom is put together once and is one operand of the rest.

use crate::judge::reading::graph::{Graph, Node, Signal};

/// Operands of one step: more are taken together in several steps.
pub(crate) const STEP_WIDTH: usize = 3;

/// A wide node or its negation: `node << 1 | negated`.
#[derive(Clone, Copy, PartialEq, Eq, PartialOrd, Ord, Debug)]
pub(crate) struct Value(u32);

impl Value {
    pub(crate) fn of(node: usize) -> Self {
        Self(u32::try_from(node << 1).expect("fewer than 2^31 nodes"))
    }

    /// The place of the node.
    pub(crate) fn node(self) -> usize {
        (self.0 >> 1) as usize
    }

    /// The place of the value among all nodes and their negations.
    pub(crate) fn index(self) -> usize {
        self.0 as usize
    }

    /// Whether this is the negation of the node.
    pub(crate) fn is_negated(self) -> bool {
        self.0 & 1 == 1
    }

    fn negated_if(self, negated: bool) -> Self {
        Self(self.0 ^ u32::from(negated))
    }
}

impl std::ops::Not for Value {
    type Output = Self;
    fn not(self) -> Self {
        self.negated_if(true)
    }
}

/// What a wide node computes.
#[derive(Clone, PartialEq, Eq, Debug)]
pub(crate) enum Wide {
    /// Never.
    No,
    /// A bit of the number of an input.
    Place(usize),
    /// All of these hold.
    All(Vec<Value>),
    /// An odd number of these conjunctions hold.
    Sum(Vec<Vec<Value>>),
    /// At least two of these hold.
    Most([Value; 3]),
}

impl Wide {
    /// All operands.
    pub(crate) fn operands(&self) -> Vec<Value> {
        match self {
            Self::No | Self::Place(_) => Vec::new(),
            Self::All(values) => values.clone(),
            Self::Sum(terms) => terms.concat(),
            Self::Most(values) => values.to_vec(),
        }
    }
}

/// Wide nodes; operands come before users, and have the same level or a higher one.
pub(crate) struct Nodes {
    nodes: Vec<Wide>,
    levels: Vec<usize>,
    top: usize,
    /// The value of each node of the graph, where it was asked for.
    images: Vec<Option<Value>>,
}

impl Nodes {
    /// What `needed` says is needed of a graph, where bit `i` is place `places[i]`, of level `level(places[i])`, and what has
    /// no bits is of level `top`. `roots` are used from outside.
    pub(crate) fn new(
        graph: &Graph,
        roots: &[Signal],
        places: &[usize],
        top: usize,
        level: impl Fn(usize) -> usize,
    ) -> Self {
        let needed = graph.needed(roots.iter().copied());
        let users = users(graph, &needed, roots);
        let mut nodes = Self { nodes: Vec::new(), levels: Vec::new(), top, images: vec![None; needed.len()] };
        for at in (0..needed.len()).filter(|&at| needed[at] && !users[at].is_absorbed()) {
            let image = match graph.nodes()[at] {
                Node::No => nodes.push(Wide::No, top),
                Node::Bit(bit) => nodes.push(Wide::Place(places[bit as usize]), level(places[bit as usize])),
                Node::All { .. } => {
                    let values = nodes.images_of(graph.operands(at));
                    nodes.all(values)
                }
                Node::Most { .. } => {
                    let values = nodes.images_of(graph.operands(at));
                    let lowest = nodes.lowest(&values);
                    nodes.push(Wide::Most([values[0], values[1], values[2]]), lowest)
                }
                Node::Odd { .. } => {
                    let (terms, flip) = nodes.terms(graph, at, &users);
                    nodes.sum(terms).negated_if(flip)
                }
            };
            nodes.images[at] = Some(image);
        }
        nodes
    }

    /// The value of a signal that is needed.
    pub(crate) fn image(&self, signal: Signal) -> Value {
        self.images[signal.node()].expect("the signal is needed").negated_if(signal.is_negated())
    }

    /// The nodes.
    pub(crate) fn nodes(&self) -> &[Wide] {
        &self.nodes
    }

    /// The level of a node.
    pub(crate) fn level(&self, node: usize) -> usize {
        self.levels[node]
    }

    /// The level at which these values are all known.
    pub(crate) fn lowest(&self, values: &[Value]) -> usize {
        values.iter().map(|value| self.levels[value.node()]).min().unwrap_or(self.top)
    }

    fn push(&mut self, node: Wide, level: usize) -> Value {
        self.nodes.push(node);
        self.levels.push(level);
        Value::of(self.nodes.len() - 1)
    }

    fn images_of(&self, signals: &[Signal]) -> Vec<Value> {
        signals.iter().map(|&signal| self.image(signal)).collect()
    }

    /// A conjunction; what would be a step of its own is put together at its own level.
    fn all(&mut self, mut values: Vec<Value>) -> Value {
        values.sort_by_key(|value| std::cmp::Reverse(self.levels[value.node()]));
        let mut open: Vec<Value> = Vec::new();
        for value in values {
            if open.len() >= STEP_WIDTH && self.lowest(&open) > self.levels[value.node()] {
                let lowest = self.lowest(&open);
                open = vec![self.push(Wide::All(open), lowest)];
            }
            open.push(value);
        }
        let lowest = self.lowest(&open);
        self.push(Wide::All(open), lowest)
    }

    /// A sum; the terms of a level are put together at that level.
    fn sum(&mut self, mut terms: Vec<Vec<Value>>) -> Value {
        terms.sort_by_key(|term| std::cmp::Reverse(self.lowest(term)));
        let mut open: Vec<Vec<Value>> = Vec::new();
        let mut lowest = self.top;
        for term in terms {
            let level = self.lowest(&term);
            if open.len() >= 2 && lowest > level {
                open = vec![vec![self.push(Wide::Sum(open), lowest)]];
            }
            open.push(term);
            lowest = level;
        }
        self.push(Wide::Sum(open), lowest)
    }

    /// The terms of an exclusive or, and whether it is to be negated.
    fn terms(&self, graph: &Graph, root: usize, users: &[Users]) -> (Vec<Vec<Value>>, bool) {
        let (mut terms, mut flip) = (Vec::new(), false);
        let mut open: Vec<Signal> = graph.operands(root).to_vec();
        while let Some(signal) = open.pop() {
            let node = signal.node();
            if !users[node].is_absorbed() {
                let value = self.image(signal);
                flip ^= value.is_negated();
                terms.push(vec![value.negated_if(value.is_negated())]);
                continue;
            }
            flip ^= signal.is_negated();
            match graph.factors(node) {
                [] => open.extend(graph.operands(node)),
                factors => terms.push(self.images_of(factors)),
            }
        }
        (terms, flip)
    }
}

/// Who uses a node.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
enum Users {
    /// Nobody so far.
    None,
    /// One sum, in which it disappears.
    OneSum,
    /// Others.
    Others,
}

impl Users {
    fn is_absorbed(self) -> bool {
        self == Self::OneSum
    }
}

fn users(graph: &Graph, needed: &[bool], roots: &[Signal]) -> Vec<Users> {
    let mut users = vec![Users::None; needed.len()];
    for node in (0..needed.len()).filter(|&node| needed[node]) {
        let is_sum = matches!(graph.nodes()[node], Node::Odd { .. });
        for operand in graph.operands(node) {
            let is_term = match graph.nodes()[operand.node()] {
                Node::Odd { .. } => true,
                Node::All { len, .. } => len as usize <= STEP_WIDTH,
                _ => false,
            };
            let of_operand = &mut users[operand.node()];
            let first = *of_operand == Users::None;
            *of_operand = if first && is_sum && is_term { Users::OneSum } else { Users::Others };
        }
    }
    roots.iter().for_each(|root| users[root.node()] = Users::Others);
    users
}
