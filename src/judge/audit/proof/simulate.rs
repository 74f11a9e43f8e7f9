//! Patterns: the graph on some inputs, 64 at a time, so that nodes which may be equal show.

use super::graph::{Graph, Node, Signal};
use crate::id::Id;
use crate::judge::audit::oracle::register_value;
use crate::places::Places;
use crate::problem::{BitId, Bits, Problem};
use crate::random::SplitMix64;

/// Words of patterns at the start, for a graph of common size.
const WORDS: usize = 16;
/// The most words that all nodes take together at the start.
const MOST_WORDS: usize = 1 << 25;

/// The values of every node on the patterns.
pub(super) struct Patterns {
    /// For each word of patterns, a word for every node.
    words: Vec<Vec<u64>>,
    random: SplitMix64,
    inputs: usize,
}

impl Patterns {
    /// Draws patterns: values inside the domains, and near the known solutions where there are some. The first pattern
    /// is all zeros.
    pub(super) fn new(
        graph: &Graph,
        problem: &Problem,
        places: &Places,
        known: &[Bits],
        inputs: usize,
        seed: u64,
    ) -> Self {
        let mut patterns = Self { words: Vec::new(), random: SplitMix64::new(seed), inputs };
        let known: Vec<&Bits> = known.iter().filter(|solution| solution.len() == problem.bit_count()).collect();
        for word in 0..WORDS.min(MOST_WORDS / graph.len()).max(1) {
            let lanes = (0..64).map(|lane| match (word, lane) {
                (0, 0) => Bits::zeros(inputs),
                _ => patterns.draw(problem, places, &known),
            });
            let lanes: Vec<Bits> = lanes.collect();
            patterns.add(graph, &lanes);
        }
        patterns
    }

    fn draw(&mut self, problem: &Problem, places: &Places, known: &[&Bits]) -> Bits {
        let from_known = !known.is_empty() && self.random.coin();
        let mut bits = match from_known {
            true => known[self.random.below(known.len() as u64) as usize].clone(),
            false => Bits::zeros(problem.bit_count()),
        };
        let changed = if from_known { self.random.below(4) } else { u64::MAX };
        let vars = problem.vars().len() as u64;
        if from_known {
            for _ in 0..changed.min(vars) {
                let at = self.random.below(vars) as usize;
                self.redraw(problem, at, &mut bits);
            }
        } else {
            (0..vars as usize).for_each(|at| self.redraw(problem, at, &mut bits));
        }
        let register = register_value(places, &bits);
        // A mark beyond the register is drawn too.
        let mark = self.random.coin();
        register.iter().chain([mark]).take(self.inputs).collect()
    }

    /// Gives a variable another value of its domain.
    fn redraw(&mut self, problem: &Problem, at: usize, bits: &mut Bits) {
        let var = &problem.vars().as_slice()[at];
        let size = problem.size(var.domain);
        let value = if size == u64::MAX { self.random.next_u64() } else { self.random.below(size + 1) };
        for bit in 0..usize::from(var.width) {
            bits.set(BitId::new(var.first_bit.index() + bit), value >> bit & 1 == 1);
        }
    }

    /// Adds an input that tells two nodes apart, and inputs near it.
    pub(super) fn refine(&mut self, graph: &Graph, input: &Bits) {
        let mut lanes = vec![input.clone()];
        for _ in 1..64 {
            let mut near = input.clone();
            for _ in 0..1 + self.random.below(2) {
                let at = self.random.below(self.inputs as u64) as usize;
                near.set_at(at, !near.at(at));
            }
            lanes.push(near);
        }
        self.add(graph, &lanes);
    }

    fn add(&mut self, graph: &Graph, lanes: &[Bits]) {
        let mut values = vec![0_u64; graph.len()];
        for (lane, bits) in lanes.iter().enumerate() {
            for (at, value) in bits.iter().enumerate() {
                values[at + 1] |= u64::from(value) << lane;
            }
        }
        for node in 0..graph.len() {
            let operands = graph.operands(node).iter();
            let of = |operand: &Signal| values[operand.node()] ^ if operand.is_negated() { !0 } else { 0 };
            values[node] = match graph.node(node) {
                Node::No | Node::Input => continue,
                Node::All => operands.fold(!0, |all, operand| all & of(operand)),
                Node::Odd => operands.fold(0, |odd, operand| odd ^ of(operand)),
            };
        }
        self.words.push(values);
    }

    /// The number of words of patterns.
    pub(super) fn len(&self) -> usize {
        self.words.len()
    }

    /// The values of a signal on one word of patterns.
    pub(super) fn word(&self, at: usize, signal: Signal) -> u64 {
        self.words[at][signal.node()] ^ if signal.is_negated() { !0 } else { 0 }
    }

    /// The values of a signal, or of its negation where the first of them is 1; and which of the two.
    pub(super) fn signature(&self, signal: Signal) -> (Vec<u64>, bool) {
        let flip = self.word(0, signal) & 1 == 1;
        ((0..self.len()).map(|at| self.word(at, signal ^ flip)).collect(), flip)
    }

    /// On how many patterns the first signal and the conjunction of the others are equal, and on how many there are.
    pub(super) fn agreement(&self, signal: Signal, conjuncts: &[Signal]) -> (u32, u32) {
        let agree = |at: usize| {
            let all = conjuncts.iter().fold(!0, |all, &conjunct| all & self.word(at, conjunct));
            (!(self.word(at, signal) ^ all)).count_ones()
        };
        ((0..self.len()).map(agree).sum(), 64 * self.len() as u32)
    }
}
