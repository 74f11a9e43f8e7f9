//! Sweeping: nodes that look equal on all patterns are proven equal, from the inputs up.
//!
//! A. Kuehlmann, F. Krohm, "Equivalence checking using cuts and heaps", DAC 1997, and A. Mishchenko et al.,
//! "Improvements to combinational equivalence checking", ICCAD 2006 (both from memory). Each equality that is proven
//! makes the windows of those above it small. An input that tells two nodes apart becomes a pattern.

use rustc_hash::FxHashMap;

use super::graph::{Graph, Node, Signal};
use super::prover::{Effort, Prover, Shown};
use super::simulate::Patterns;

/// How often patterns are added in one sweep.
const MAX_REFINEMENTS: usize = 400;
/// How many nodes a node is compared with.
const MAX_TRIES: usize = 4;

/// Proves nodes below the roots equal.
pub(super) fn sweep(prover: &mut Prover, patterns: &mut Patterns, roots: &[Signal], effort: Effort) {
    let graph = prover.graph();
    let nodes = cone(graph, roots);
    let mut classes = Classes::new(prover, patterns);
    let mut refinements = 0;
    for (at, &node) in nodes.iter().enumerate() {
        if prover.is_spent() {
            return;
        }
        let signal = Signal::of(node);
        for _ in 0..MAX_TRIES {
            let Some(candidate) = classes.find(patterns, signal) else { break };
            if graph.node(node) == Node::Input || candidate.node() == node {
                break;
            }
            match prover.equate(signal, candidate, effort) {
                Shown::Proven | Shown::Open => break,
                Shown::Refuted(input) if refinements < MAX_REFINEMENTS => {
                    refinements += 1;
                    patterns.refine(graph, &input);
                    classes = Classes::new(prover, patterns);
                    nodes[..at].iter().for_each(|&earlier| classes.add(prover, patterns, Signal::of(earlier)));
                }
                Shown::Refuted(_) => break,
            }
        }
        classes.add(prover, patterns, signal);
    }
}

/// The nodes below the roots, in order.
fn cone(graph: &Graph, roots: &[Signal]) -> Vec<usize> {
    let mut used = vec![false; graph.len()];
    roots.iter().for_each(|root| used[root.node()] = true);
    for node in (0..graph.len()).rev().filter(|&node| graph.node(node) != Node::Input) {
        if used[node] {
            graph.operands(node).iter().for_each(|operand| used[operand.node()] = true);
        }
    }
    (1..graph.len()).filter(|&node| used[node]).collect()
}

/// Nodes by what they are on the patterns on which the facts hold.
struct Classes {
    care: Vec<u64>,
    first: FxHashMap<Vec<u64>, Signal>,
}

impl Classes {
    fn new(prover: &Prover, patterns: &Patterns) -> Self {
        let facts = |at: usize| prover.facts().iter().fold(!0, |all, &fact| all & patterns.word(at, fact));
        let care: Vec<u64> = (0..patterns.len()).map(facts).collect();
        let mut classes = Self { care, first: FxHashMap::default() };
        if prover.miter.has(0) {
            classes.add(prover, patterns, Signal::NO);
        }
        classes
    }

    /// The signature of a signal, or of its negation, and which of the two.
    fn key(&self, patterns: &Patterns, signal: Signal) -> (Vec<u64>, bool) {
        let words = |flip: bool| (0..patterns.len()).map(move |at| patterns.word(at, signal ^ flip));
        let first = self.care.iter().position(|&care| care != 0);
        let flip = first.is_some_and(|at| patterns.word(at, signal) >> self.care[at].trailing_zeros() & 1 == 1);
        (words(flip).zip(&self.care).map(|(word, care)| word & care).collect(), flip)
    }

    fn find(&self, patterns: &Patterns, signal: Signal) -> Option<Signal> {
        let (key, flip) = self.key(patterns, signal);
        self.first.get(&key).map(|&first| first ^ flip)
    }

    fn add(&mut self, prover: &Prover, patterns: &Patterns, signal: Signal) {
        if prover.equal(signal) == signal {
            let (key, flip) = self.key(patterns, signal);
            self.first.entry(key).or_insert(signal ^ flip);
        }
    }
}
