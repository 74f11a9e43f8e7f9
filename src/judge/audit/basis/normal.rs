//! A normal form in which graphs of a circuit and of a problem can meet.
//!
//! Input: a function in one graph. Output: in another graph over the same bits, the [`conjuncts`] that hold together exactly
//! where it does, in increasing order.
//!
//! Conjunctions of conjunctions become one, exclusive ors of exclusive ors too, so that it does not matter in which order and
//! grouping either was built. A conjunction that several others use is taken into them up to a width, given by the
//! caller: widely for finding equal nodes, not at all for evaluating each node once. For finding equal nodes, what must hold
//! in any case is also taken out of the alternatives of others: `u` and `u -> r` become `u` and `r`.

use rustc_hash::{FxHashMap, FxHashSet};

use crate::id::Id;
use crate::judge::reading::graph::{Graph, Node, Signal};
use crate::judge::reading::{Reading, take_apart};
use crate::problem::Problem;

/// The widest shared conjunction that is taken into its users to find equal nodes.
const SHARED_WIDTH: usize = 16;
/// The most rounds of taking conjuncts out of others.
const MAX_ROUNDS: usize = 64;
/// The most pairs of alternatives that are compared: a second at most.
const MAX_COMPARISONS: u64 = 1 << 24;
/// The most terms of an exclusive or with several users that is taken into another one.
const MAX_TERMS: usize = 64;

/// What a function is the conjunction of, with every node evaluated once.
pub(crate) fn for_evaluation(graph: &Graph, root: Signal, bits: usize) -> Reading {
    let mut into = Graph::over(bits);
    let conjuncts = Normal::new(graph, [root], 0).conjuncts(&[root], &mut into);
    Reading { graph: into, conjuncts }
}

/// The negation of a conjunction of several, else the root itself: a function with conjuncts to evaluate.
pub(crate) fn is_better_negated(graph: &Graph, root: Signal) -> bool {
    root.is_negated() && !graph.factors(root.node()).is_empty()
}

/// Functions with their conjuncts in one graph, where equal functions meet if their structure lets them.
pub(crate) struct Meeting {
    graph: Graph,
}

impl Meeting {
    /// Over the bits of a problem.
    pub(crate) fn over(bits: usize) -> Self {
        Self { graph: Graph::over(bits) }
    }

    /// What a function is the conjunction of.
    pub(crate) fn function(&mut self, graph: &Graph, root: Signal) -> Vec<Signal> {
        let conjuncts = Normal::new(graph, [root], SHARED_WIDTH).conjuncts(&[root], &mut self.graph);
        settled(&mut self.graph, conjuncts)
    }

    /// What the predicate of a problem is the conjunction of.
    pub(crate) fn problem(&mut self, problem: &Problem, reading: &Reading) -> Vec<Signal> {
        let roots = &reading.conjuncts;
        let normal = Normal::new(&reading.graph, roots.iter().copied(), SHARED_WIDTH);
        let mut conjuncts = normal.conjuncts(roots, &mut self.graph);
        for clause in problem.clauses.iter() {
            let none = clause.iter().map(|lit| self.graph.bit(lit.bit().index()) ^ !lit.is_negated());
            let none: Vec<Signal> = none.collect();
            let clause = !self.graph.all(none);
            take_apart(&self.graph, clause, &mut conjuncts);
        }
        settled(&mut self.graph, sorted(conjuncts))
    }
}

/// Takes conjuncts that are no alternatives out of those that are, until nothing changes.
fn settled(graph: &mut Graph, mut conjuncts: Vec<Signal>) -> Vec<Signal> {
    for _ in 0..MAX_ROUNDS {
        let is_alternative = |signal: &&Signal| signal.is_negated() && !graph.factors(signal.node()).is_empty();
        let holding: FxHashSet<Signal> = conjuncts.iter().filter(|signal| !is_alternative(signal)).copied().collect();
        let mut next = Vec::with_capacity(conjuncts.len());
        let mut has_changed = false;
        for &conjunct in &conjuncts {
            let none_of = if conjunct.is_negated() { graph.factors(conjunct.node()) } else { &[] };
            if none_of.iter().any(|&factor| holding.contains(&!factor)) {
                has_changed = true;
            } else if none_of.iter().any(|factor| holding.contains(factor)) {
                has_changed = true;
                let rest: Vec<Signal> = none_of.iter().copied().filter(|factor| !holding.contains(factor)).collect();
                let rest = !graph.all(rest);
                take_apart(graph, rest, &mut next);
            } else {
                next.push(conjunct);
            }
        }
        conjuncts = sorted(next);
        if !has_changed {
            break;
        }
    }
    unsubsumed(graph, conjuncts)
}

/// Leaves out the alternatives that others imply: those with all the factors of another one.
fn unsubsumed(graph: &Graph, conjuncts: Vec<Signal>) -> Vec<Signal> {
    let factors = |signal: Signal| if signal.is_negated() { graph.factors(signal.node()) } else { &[] };
    // Each alternative stands at its first factor; one that it implies has this factor too.
    let mut at_first: FxHashMap<Signal, Vec<&[Signal]>> = FxHashMap::default();
    for &conjunct in &conjuncts {
        if let [first, ..] = factors(conjunct) {
            at_first.entry(*first).or_default().push(factors(conjunct));
        }
    }
    let mut comparisons = 0;
    let mut is_implied = |conjunct: Signal| {
        let own = factors(conjunct);
        own.iter().filter_map(|factor| at_first.get(factor)).flatten().any(|other| {
            comparisons += 1;
            let is_part = || other.iter().all(|factor| own.binary_search(factor).is_ok());
            comparisons < MAX_COMPARISONS && other.len() < own.len() && is_part()
        })
    };
    conjuncts.iter().copied().filter(|&conjunct| !is_implied(conjunct)).collect()
}

/// In order, each once; "never" alone where it is one of them, or where one negates another.
fn sorted(mut conjuncts: Vec<Signal>) -> Vec<Signal> {
    conjuncts.sort_unstable();
    conjuncts.dedup();
    if conjuncts.contains(&Signal::NO) || conjuncts.windows(2).any(|pair| pair[0] == !pair[1]) {
        return vec![Signal::NO];
    }
    conjuncts
}

/// The nodes of a graph that some roots need, to be rebuilt in another graph.
struct Normal<'a> {
    from: &'a Graph,
    needed: Vec<bool>,
    /// How many needed nodes use each node.
    users: Vec<u32>,
    /// Exclusive ors that only another one uses: their terms are that one's, however many there are.
    absorbed: Vec<bool>,
    shared_width: usize,
}

impl<'a> Normal<'a> {
    fn new(from: &'a Graph, roots: impl IntoIterator<Item = Signal>, shared_width: usize) -> Self {
        let roots: Vec<Signal> = roots.into_iter().collect();
        let needed = from.needed(roots.iter().copied());
        let mut users = vec![0; needed.len()];
        for node in (0..needed.len()).filter(|&node| needed[node]) {
            from.operands(node).iter().for_each(|operand| users[operand.node()] += 1);
        }
        let mut absorbed = vec![false; needed.len()];
        let is_odd = |node: usize| matches!(from.nodes()[node], Node::Odd { .. });
        for node in (0..needed.len()).filter(|&node| needed[node] && is_odd(node)) {
            let operands = from.operands(node).iter().map(|operand| operand.node());
            operands
                .filter(|&operand| is_odd(operand) && users[operand] == 1)
                .for_each(|operand| absorbed[operand] = true);
        }
        roots.iter().for_each(|root| absorbed[root.node()] = false);
        Self { from, needed, users, absorbed, shared_width }
    }

    fn conjuncts(&self, roots: &[Signal], into: &mut Graph) -> Vec<Signal> {
        let mut images = vec![Signal::NO; self.needed.len()];
        for node in (0..self.needed.len()).filter(|&node| self.needed[node] && !self.absorbed[node]) {
            images[node] = self.rebuild(node, &images, into);
        }
        let mut conjuncts = Vec::new();
        for root in roots {
            take_apart(into, images[root.node()] ^ root.is_negated(), &mut conjuncts);
        }
        sorted(conjuncts)
    }

    fn rebuild(&self, node: usize, images: &[Signal], into: &mut Graph) -> Signal {
        let operands = self.from.operands(node);
        let image = |operand: &Signal| images[operand.node()] ^ operand.is_negated();
        match self.from.nodes()[node] {
            Node::No => Signal::NO,
            Node::Bit(bit) => into.bit(bit as usize),
            Node::Most { .. } => into.most(image(&operands[0]), image(&operands[1]), image(&operands[2])),
            Node::Odd { .. } => {
                let (mut terms, mut flip) = (Vec::new(), false);
                let mut open = operands.to_vec();
                while let Some(operand) = open.pop() {
                    if self.absorbed[operand.node()] {
                        flip ^= operand.is_negated();
                        open.extend_from_slice(self.from.operands(operand.node()));
                    } else {
                        push_terms(into, image(&operand), &mut terms);
                    }
                }
                odd_of(terms, into) ^ flip
            }
            Node::All { .. } => {
                let mut factors = Vec::with_capacity(operands.len());
                for operand in operands {
                    let signal = image(operand);
                    let is_own = self.users[operand.node()] == 1;
                    match is_own || into.factors(signal.node()).len() <= self.shared_width {
                        true => into.push_factors(signal, &mut factors),
                        false => factors.push(signal),
                    }
                }
                into.all(factors)
            }
        }
    }
}

/// Pushes what a signal is the exclusive or of, as long as that is not much.
fn push_terms(graph: &Graph, signal: Signal, terms: &mut Vec<Signal>) {
    let start = terms.len();
    let mut open = vec![signal];
    while let Some(term) = open.pop() {
        match (graph.nodes()[term.node()], graph.operands(term.node())) {
            (Node::Odd { .. }, &[a, b]) => open.extend([a ^ term.is_negated(), b]),
            _ => terms.push(term),
        }
        if terms.len() - start + open.len() > MAX_TERMS {
            terms.truncate(start);
            return terms.push(signal);
        }
    }
}

/// The exclusive or of terms, in their order, so that equal ones are one node.
fn odd_of(mut terms: Vec<Signal>, into: &mut Graph) -> Signal {
    let flip = terms.iter().filter(|term| term.is_negated()).count() % 2 == 1;
    terms.iter_mut().for_each(|term| *term = *term ^ term.is_negated());
    terms.sort_unstable();
    terms.into_iter().fold(Signal::constant(flip), |sum, term| into.odd(sum, term))
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn grouping_and_order_do_not_matter() {
        let mut graph = Graph::over(5);
        let [a, b, c, d, e] = [0, 1, 2, 3, 4].map(|bit| graph.bit(bit));
        let ab = graph.and(a, b);
        let abc = graph.and(ab, !c);
        let abd = graph.and(ab, d);
        let left = graph.odd(abd, e);
        let left = graph.odd(left, a);
        let one = graph.and(!abc, left);
        let other = {
            let bc = graph.and(!c, b);
            let bca = graph.and(bc, a);
            let abd = graph.all([d, b, a]);
            let right = graph.odd(a, abd);
            let right = graph.odd(!right, e);
            graph.and(!right, !bca)
        };
        assert_ne!(one, other);
        let mut meeting = Meeting::over(5);
        let found = meeting.function(&graph, one);
        assert_eq!(found.len(), 2);
        assert_eq!(meeting.function(&graph, other), found);
        assert_ne!(meeting.function(&graph, !other), found);
        assert_eq!(for_evaluation(&graph, one, 5).conjuncts.len(), 2);
        assert!(is_better_negated(&graph, !one) && !is_better_negated(&graph, one));
    }

    #[test]
    fn what_must_hold_is_taken_out_of_alternatives() {
        let mut graph = Graph::over(4);
        let [a, b, c, d] = [0, 1, 2, 3].map(|bit| graph.bit(bit));
        let implies_b = graph.or(!a, b);
        let some = graph.any([!b, c, d]);
        let held = graph.or(b, c);
        let one = graph.all([a, implies_b, some, held]);
        let either = graph.or(c, d);
        let other = graph.all([a, b, either]);
        let mut meeting = Meeting::over(4);
        assert_eq!(meeting.function(&graph, one), meeting.function(&graph, other));
        let never = graph.all([a, implies_b, !b]);
        assert_eq!(meeting.function(&graph, never), [Signal::NO]);
    }

    #[test]
    fn implied_alternatives_are_left_out() {
        let mut graph = Graph::over(4);
        let [a, b, c, d] = [0, 1, 2, 3].map(|bit| graph.bit(bit));
        let (short, long, other) = (graph.any([a, !b]), graph.any([a, !b, c]), graph.any([a, b, d]));
        let one = graph.all([short, long, other]);
        let two = graph.all([short, other]);
        let mut meeting = Meeting::over(4);
        let found = meeting.function(&graph, one);
        assert_eq!(found.len(), 2);
        assert_eq!(found, meeting.function(&graph, two));
        assert_ne!(found, meeting.function(&graph, long));
    }

    #[test]
    fn long_exclusive_ors_meet_in_any_order() {
        let bits = 3 * MAX_TERMS;
        let mut graph = Graph::over(bits);
        let all: Vec<Signal> = (0..bits).map(|bit| graph.bit(bit)).collect();
        let up = all.iter().fold(Signal::NO, |sum, &bit| graph.odd(sum, bit));
        let down = all.iter().rev().fold(Signal::YES, |sum, &bit| graph.odd(sum, bit));
        let mut meeting = Meeting::over(bits);
        assert_ne!(up, !down);
        assert_eq!(meeting.function(&graph, up), meeting.function(&graph, !down));
        assert_ne!(meeting.function(&graph, up), meeting.function(&graph, down));
    }

    #[test]
    fn contradictions_are_never() {
        let mut graph = Graph::over(2);
        let [a, b] = [0, 1].map(|bit| graph.bit(bit));
        let ab = graph.and(a, b);
        let mut meeting = Meeting::over(2);
        let none = graph.and(ab, !a);
        assert_eq!(meeting.function(&graph, none), [Signal::NO]);
        assert_eq!(meeting.function(&graph, Signal::YES), []);
    }
}
