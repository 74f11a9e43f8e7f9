//! The miter: clauses that have a model just where the circuit and the problem differ.
//!
//! Input: the graph, the conjuncts of the problem and of the circuit's function, and the signals that must never hold.
//! Output: a [`Miter`]. Every node in use is a variable that is defined both ways by its operands (G. Tseitin, "On the
//! complexity of derivation in propositional calculus", 1968, from memory). Beside the nodes there are two variables:
//!
//! - `differ`: a signal that must never hold does, or this: the two conjunctions differ;
//! - `problem`: where they differ, the problem holds and the circuit does not (else the other way round).
//!
//! Conjuncts that both sides have must hold wherever the conjunctions differ, on either side.

use super::graph::{Graph, Node, Signal};
use crate::sat::{Formula, Lit};

/// The two sides and what else must be shown.
#[derive(Clone, Debug)]
pub(super) struct Sides {
    /// Signals that must never hold.
    pub(super) zeros: Vec<Signal>,
    /// Conjuncts that both sides have.
    pub(super) common: Vec<Signal>,
    /// Conjuncts of the problem only.
    pub(super) problem: Vec<Signal>,
    /// Conjuncts of the circuit only.
    pub(super) circuit: Vec<Signal>,
}

impl Sides {
    /// Takes what both sides have apart; the conjuncts are sorted.
    pub(super) fn new(zeros: Vec<Signal>, problem: &[Signal], circuit: &[Signal]) -> Self {
        let only = |these: &[Signal], those: &[Signal], both: bool| {
            let wanted = |signal: &&Signal| those.binary_search(signal).is_ok() == both;
            these.iter().filter(wanted).copied().collect::<Vec<_>>()
        };
        Self {
            zeros,
            common: only(problem, circuit, true),
            problem: only(problem, circuit, false),
            circuit: only(circuit, problem, false),
        }
    }

    fn roots(&self) -> impl Iterator<Item = Signal> {
        [&self.zeros, &self.common, &self.problem, &self.circuit].into_iter().flatten().copied()
    }
}

/// The clauses, and where in them everything is.
#[derive(Debug)]
pub(super) struct Miter {
    /// The clauses.
    pub(super) formula: Formula,
    /// The variable of each node in use, plus one.
    vars: Vec<u32>,
    /// The clauses that define a node: from, to.
    definitions: Vec<(u32, u32)>,
    /// The variable `differ`, where it holds.
    pub(super) differ: Lit,
    /// The variable `problem`, where it holds.
    pub(super) problem: Lit,
}

impl Miter {
    /// Writes the clauses.
    pub(super) fn new(graph: &Graph, sides: &Sides, inputs: usize) -> Self {
        let mut used = vec![false; graph.len()];
        sides.roots().for_each(|root| used[root.node()] = true);
        for node in (0..graph.len()).rev() {
            if used[node] {
                graph.operands(node).iter().for_each(|operand| used[operand.node()] = true);
            }
        }
        (0..=inputs).for_each(|node| used[node] = true);
        let mut miter = Self {
            formula: Formula::new(0),
            vars: vec![0; graph.len()],
            definitions: vec![(0, 0); graph.len()],
            differ: Lit::new(0, true),
            problem: Lit::new(0, true),
        };
        // The inputs first, so that variable `i` of the file is input `i`; the constant after them.
        let after = std::iter::once(0).chain(inputs + 1..graph.len());
        for node in (1..=inputs).chain(after).filter(|&node| used[node]) {
            miter.vars[node] = miter.formula.new_var() as u32 + 1;
            let from = miter.formula.len() as u32;
            miter.define(graph, node);
            miter.definitions[node] = (from, miter.formula.len() as u32);
        }
        miter.differ = Lit::new(miter.formula.new_var(), true);
        miter.problem = Lit::new(miter.formula.new_var(), true);
        miter.require(sides);
        miter
    }

    /// The literal of a signal in use.
    pub(super) fn lit(&self, signal: Signal) -> Lit {
        let var = self.vars[signal.node()].checked_sub(1).expect("a signal in use");
        Lit::new(var as usize, !signal.is_negated())
    }

    /// Whether a node has a variable.
    pub(super) fn has(&self, node: usize) -> bool {
        self.vars[node] != 0
    }

    /// The clauses that define a node.
    pub(super) fn definition(&self, node: usize) -> std::ops::Range<usize> {
        let (from, to) = self.definitions[node];
        from as usize..to as usize
    }

    /// The literals that a parity in use has on the way, one for each operand after the first; the last is its own.
    pub(super) fn sums(&self, node: usize) -> impl Iterator<Item = Lit> {
        self.definition(node).step_by(4).map(|at| !self.formula.clause(at)[0])
    }

    /// The literal that says which side holds where the two differ: the problem's (`true`) or the circuit's.
    pub(super) fn side(&self, is_problem: bool) -> Lit {
        if is_problem { self.problem } else { !self.problem }
    }

    fn define(&mut self, graph: &Graph, node: usize) {
        let defined = self.lit(Signal::of(node));
        let operands: Vec<Lit> = graph.operands(node).iter().map(|&operand| self.lit(operand)).collect();
        match graph.node(node) {
            Node::No => self.formula.push([!defined]),
            Node::Input => {}
            Node::All => {
                operands.iter().for_each(|&operand| self.formula.push([!defined, operand]));
                self.formula.push(std::iter::once(defined).chain(operands.iter().map(|&operand| !operand)));
            }
            Node::Odd => {
                let mut sum = operands[0];
                for (at, &operand) in operands.iter().enumerate().skip(1) {
                    let is_last = at + 1 == operands.len();
                    let next = if is_last { defined } else { Lit::new(self.formula.new_var(), true) };
                    for (a, b) in [(sum, operand), (!sum, !operand)] {
                        self.formula.push([!next, a, b]);
                        self.formula.push([next, !a, b]);
                    }
                    sum = next;
                }
            }
        }
    }

    fn require(&mut self, sides: &Sides) {
        let (differ, problem) = (self.differ, self.problem);
        let lits = |signals: &[Signal]| signals.iter().map(|&signal| self.lit(signal)).collect::<Vec<_>>();
        let [zeros, common, ours, theirs] =
            [lits(&sides.zeros), lits(&sides.common), lits(&sides.problem), lits(&sides.circuit)];
        self.formula.push(zeros.into_iter().chain([differ]));
        common.into_iter().for_each(|lit| self.formula.push([!differ, lit]));
        for (side, this, that) in [(problem, &ours, &theirs), (!problem, &theirs, &ours)] {
            this.iter().for_each(|&lit| self.formula.push([!differ, !side, lit]));
            self.formula.push([!differ, !side].into_iter().chain(that.iter().map(|&lit| !lit)));
        }
    }
}
