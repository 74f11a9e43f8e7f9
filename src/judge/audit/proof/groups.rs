//! Conjuncts of one side against those of the other that are about the same bits, by decision diagrams.
//!
//! A circuit rarely checks what a problem says conjunct by conjunct: it may count ones where the problem has a clause for
//! each pair, or check several clauses by one selection. Then a conjunct of one side follows from all those of the other
//! that speak of no other inputs, and each of those from it; and however differently the two compute it, as functions
//! of few inputs, or as counts of many, their diagrams are small.

use rustc_hash::{FxHashMap, FxHashSet};

use super::diagram::{Edge, TooLarge};
use super::drawn::Drawn;
use super::graph::{Graph, Node, Signal};
use super::miter::Sides;
use super::prover::Prover;

/// The most inputs of a group.
const MAX_INPUTS: usize = 512;

/// A conjunct and the inputs it depends on, in order.
struct Conjunct {
    signal: Signal,
    inputs: Vec<usize>,
}

/// Adds the conjuncts that were shown to follow from the other side to `done`; a group may take so many steps of diagrams,
/// and all together those of `pool`.
pub(super) fn follow(
    prover: &mut Prover,
    sides: &Sides,
    done: &mut FxHashSet<(bool, Signal)>,
    steps: usize,
    mut pool: usize,
) {
    let graph = prover.graph();
    let list = |signals: &[Signal]| -> Vec<Conjunct> {
        let conjunct = |&signal| inputs_of(graph, signal).map(|inputs| Conjunct { signal, inputs });
        signals.iter().filter_map(conjunct).collect()
    };
    let parts = [list(&sides.circuit), list(&sides.problem), list(prover.facts())].map(Indexed::new);
    let [circuit, problem, facts] = &parts;
    let mut heads: Vec<&[usize]> =
        circuit.conjuncts.iter().chain(&problem.conjuncts).map(|conjunct| &conjunct.inputs[..]).collect();
    heads.sort_unstable_by(|a, b| b.len().cmp(&a.len()).then(a.cmp(b)));
    heads.dedup();
    for inputs in heads {
        if prover.is_spent() || pool == 0 {
            return;
        }
        let group = Group { sides: [circuit, problem].map(|side| side.within(inputs)), facts: facts.within(inputs) };
        let is_open =
            |is_problem: usize| group.sides[is_problem].iter().any(|s| !done.contains(&(is_problem == 1, *s)));
        if group.sides.iter().any(Vec::is_empty) || !(is_open(0) || is_open(1)) {
            continue;
        }
        // A group that is too large is left to the other methods.
        let left = group.show(prover, done, steps.min(pool)).unwrap_or(0);
        pool -= steps.min(pool) - left;
    }
}

/// Conjuncts, found by their inputs.
struct Indexed {
    conjuncts: Vec<Conjunct>,
    /// The conjuncts by the first of their inputs.
    by_first: FxHashMap<usize, Vec<usize>>,
}

impl Indexed {
    fn new(conjuncts: Vec<Conjunct>) -> Self {
        let mut by_first: FxHashMap<usize, Vec<usize>> = FxHashMap::default();
        for (at, conjunct) in conjuncts.iter().enumerate() {
            by_first.entry(conjunct.inputs.first().copied().unwrap_or(0)).or_default().push(at);
        }
        Self { conjuncts, by_first }
    }

    /// Those over some of these inputs, which are in order.
    fn within(&self, inputs: &[usize]) -> Vec<Signal> {
        let is_within = |conjunct: &&Conjunct| conjunct.inputs.iter().all(|input| inputs.binary_search(input).is_ok());
        let candidates = inputs.iter().filter_map(|input| self.by_first.get(input)).flatten();
        candidates.map(|&at| &self.conjuncts[at]).filter(is_within).map(|conjunct| conjunct.signal).collect()
    }
}

/// The inputs below a signal, in order; `None` where they are too many.
fn inputs_of(graph: &Graph, signal: Signal) -> Option<Vec<usize>> {
    let order = order_of(graph, &[signal]);
    let mut inputs = order;
    inputs.sort_unstable();
    (inputs.len() <= MAX_INPUTS).then_some(inputs)
}

/// The inputs below signals, in the order in which a walk that goes deepest first meets them: inputs that are combined
/// early stand together (S. Malik et al., "Logic verification using binary decision diagrams in a logic synthesis
/// environment", ICCAD 1988, from memory).
fn order_of(graph: &Graph, signals: &[Signal]) -> Vec<usize> {
    let mut depth: FxHashMap<usize, usize> = FxHashMap::default();
    let mut open: Vec<(usize, bool)> = signals.iter().map(|signal| (signal.node(), false)).collect();
    while let Some((node, is_ready)) = open.pop() {
        if depth.contains_key(&node) {
            continue;
        }
        let operands = graph.operands(node);
        if is_ready || operands.is_empty() {
            let below = operands.iter().filter_map(|operand| depth.get(&operand.node())).max();
            depth.insert(node, below.map_or(0, |below| below + 1));
        } else {
            open.push((node, true));
            open.extend(operands.iter().map(|operand| (operand.node(), false)));
        }
    }
    let (mut order, mut seen) = (Vec::new(), FxHashSet::default());
    let mut open: Vec<usize> = signals.iter().rev().map(|signal| signal.node()).collect();
    while let Some(node) = open.pop() {
        if !seen.insert(node) {
            continue;
        }
        if graph.node(node) == Node::Input {
            order.push(node);
        }
        let mut operands: Vec<usize> = graph.operands(node).iter().map(|operand| operand.node()).collect();
        operands.sort_by_key(|operand| depth[operand]);
        open.extend(operands);
    }
    order
}

/// Conjuncts over the same inputs.
struct Group {
    /// Those of the circuit and those of the problem.
    sides: [Vec<Signal>; 2],
    /// What holds on both sides.
    facts: Vec<Signal>,
}

impl Group {
    /// Shows what follows from the other side; gives the steps that are left.
    fn show(&self, prover: &mut Prover, done: &mut FxHashSet<(bool, Signal)>, steps: usize) -> Result<usize, TooLarge> {
        let roots: Vec<Signal> = self.sides.iter().chain([&self.facts]).flatten().copied().collect();
        let mut drawn = prover.drawn(&order_of(prover.graph(), &roots), steps)?;
        let mut draw =
            |signals: &[Signal]| signals.iter().map(|&signal| drawn.edge(signal)).collect::<Result<Vec<_>, _>>();
        let sides = [draw(&self.sides[0])?, draw(&self.sides[1])?];
        let facts = draw(&self.facts)?;
        let facts = conjoin(&mut drawn, &facts)?;
        let mut shown = Vec::new();
        for from in [0, 1] {
            let to = 1 - from;
            let is_open = |signal: &Signal| !done.contains(&(to == 1, *signal));
            if !self.sides[to].iter().any(is_open) {
                continue;
            }
            let all = conjoin(&mut drawn, &sides[from])?;
            for (signal, &edge) in self.sides[to].iter().zip(&sides[to]).filter(|(signal, _)| is_open(signal)) {
                if drawn.diagrams.never([all, facts, !edge])? {
                    shown.push((to == 1, *signal));
                }
            }
        }
        let left = drawn.diagrams.left();
        if !shown.is_empty() {
            for &(is_problem, signal) in &shown {
                drawn.follows(!is_problem, signal);
            }
            let (proof, next_var) = drawn.diagrams.finish();
            prover.absorb(&proof, next_var);
            done.extend(shown);
        }
        Ok(left)
    }
}

/// All of them, from those that begin with the last levels up.
fn conjoin(drawn: &mut Drawn, edges: &[Edge]) -> Result<Edge, TooLarge> {
    let mut edges = edges.to_vec();
    edges.sort_by_key(|&edge| std::cmp::Reverse(drawn.diagrams.level(edge)));
    edges.into_iter().try_fold(Edge::YES, |all, edge| drawn.diagrams.all(all, edge))
}
