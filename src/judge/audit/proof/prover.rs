//! Claims, each shown on a window of the miter, and the proof that grows from them.
//!
//! A claim says that some signals never hold together. A window is the clauses of the nodes nearest to them, and it
//! grows until the claim is refuted in it (the claim holds), or until it is complete and has a model. A model that
//! breaks a fact (a signal that is proven to hold) brings that fact into the window. Every window is first given to
//! batsat, which stops after a number of steps, and then to a fresh varisat for the proof.
//!
//! All proofs become one: a refutation of clauses and assumptions becomes a derivation of the negated assumptions when
//! these are added to each of its clauses. So the whole can be checked against the miter from beginning to end.

use std::collections::BinaryHeap;

use rustc_hash::{FxHashMap, FxHashSet};

use super::diagram::TooLarge;
use super::drawn::Drawn;
use super::graph::{Graph, Node, Signal};
use super::miter::Miter;
use crate::budget::Budget;
use crate::problem::Bits;
use crate::sat::drat::{Proof, Step};
use crate::sat::refute::{Refutation, refute};
use crate::sat::{Answer, Batsat, Engine, Formula, Lit};

/// How much a claim may cost.
#[derive(Clone, Copy, Debug)]
pub(super) struct Effort {
    /// Conflicts and decisions of the first engine on one window.
    pub(super) steps: u64,
    /// Nodes of the largest window.
    pub(super) nodes: usize,
    /// How often facts are brought in.
    pub(super) rounds: usize,
}

/// What became of a claim.
#[derive(Clone, PartialEq, Eq, Debug)]
pub(super) enum Shown {
    /// It holds, and the proof says so.
    Proven,
    /// It does not on this input, on which all facts hold.
    Refuted(Bits),
    /// It is not known.
    Open,
}

/// Nodes of the first window of a claim.
const FIRST_WINDOW: usize = 48;
/// By how much a window grows.
const GROWTH: usize = 8;
/// Conflicts and decisions of the first engine on the whole miter: some minutes.
const MOST_STEPS: u64 = 10_000_000;
/// Facts brought into a window at a time.
const FACTS_A_ROUND: usize = 16;
/// A fact over more inputs than this is taken to touch every window.
const MAX_SUPPORT: usize = 64;

/// Shows claims.
pub(super) struct Prover<'a> {
    graph: &'a Graph,
    /// The clauses.
    pub(super) miter: &'a Miter,
    /// The proof so far.
    pub(super) proof: Proof,
    /// Where the inputs outside a window are taken from.
    base: Bits,
    /// What a node was proven equal to: itself, or a node before it.
    equal: FxHashMap<usize, Signal>,
    /// Signals that hold, as the proof says.
    facts: Vec<Signal>,
    /// Signals that hold on one side of the difference: the problem's (true) and the circuit's.
    sides: [Vec<Signal>; 2],
    /// The first variable that neither the miter nor the proof uses.
    next_var: usize,
    budget: &'a Budget,
}

impl<'a> Prover<'a> {
    /// A prover without claims; `base` is an input on which as much as possible holds.
    pub(super) fn new(graph: &'a Graph, miter: &'a Miter, base: Bits, budget: &'a Budget) -> Self {
        let (equal, facts, sides) = (FxHashMap::default(), Vec::new(), [Vec::new(), Vec::new()]);
        let next_var = miter.formula.var_count();
        Self { graph, miter, proof: Proof::new(), base, equal, facts, sides, next_var, budget }
    }

    /// Diagrams over some nodes, of so many steps, whose proof may become a part of this one.
    pub(super) fn drawn(&self, leaves: &[usize], steps: usize) -> Result<Drawn<'_>, TooLarge> {
        Drawn::new((self.graph, self.miter), &self.equal, leaves, self.next_var, steps)
    }

    /// Appends a proof that stands on the miter and the proof so far.
    pub(super) fn absorb(&mut self, part: &Proof, next_var: usize) {
        self.next_var = next_var;
        self.proof.append(part);
    }

    /// The graph.
    pub(super) fn graph(&self) -> &'a Graph {
        self.graph
    }

    /// Whether the budget is spent.
    pub(super) fn is_spent(&self) -> bool {
        self.budget.spent()
    }

    /// The facts.
    pub(super) fn facts(&self) -> &[Signal] {
        &self.facts
    }

    /// Notes a fact that follows from the clauses and the proof so far by propagation alone.
    pub(super) fn fact(&mut self, signal: Signal) {
        self.proof.add([self.miter.lit(signal)]);
        self.facts.push(signal);
    }

    /// Says what holds on the sides of the difference.
    pub(super) fn set_sides(&mut self, problem: Vec<Signal>, circuit: Vec<Signal>) {
        self.sides = [circuit, problem];
    }

    /// What a signal was proven equal to.
    pub(super) fn equal(&self, signal: Signal) -> Signal {
        match self.equal.get(&signal.node()) {
            Some(&equal) => equal ^ signal.is_negated(),
            None => signal,
        }
    }

    /// How many nodes were proven equal to another.
    pub(super) fn equivalences(&self) -> usize {
        self.equal.len()
    }

    /// Shows that two signals are equal wherever the facts hold, and notes that the node of the first, which is the
    /// later one, is.
    pub(super) fn equate(&mut self, a: Signal, b: Signal, effort: Effort) -> Shown {
        for claim in [[a, !b], [!a, b]] {
            match self.claim(&claim, None, effort) {
                Shown::Proven => {}
                other => return other,
            }
        }
        if a.node() > b.node() {
            self.equal.insert(a.node(), b ^ a.is_negated());
        }
        Shown::Proven
    }

    /// Shows that the signals never hold together; on one side of the difference only, if one is given.
    pub(super) fn claim(&mut self, assumed: &[Signal], side: Option<bool>, effort: Effort) -> Shown {
        let mut assumptions: Vec<Lit> = assumed.iter().map(|&signal| self.miter.lit(signal)).collect();
        if let Some(side) = side {
            let problem = self.miter.problem;
            assumptions.push(if side { problem } else { !problem });
        }
        let mut context = Vec::new();
        let mut size = FIRST_WINDOW.min(effort.nodes);
        let mut rounds = 0;
        let mut is_linked = true;
        while !self.budget.spent() {
            let window = Window::new(self, assumed, &context, side, size, is_linked);
            let mut engine = Batsat::new();
            engine.limit(effort.steps);
            window.formula.iter().for_each(|clause| engine.add_clause(clause));
            let local: Vec<Lit> = assumptions.iter().map(|&lit| window.local(lit)).collect();
            match engine.solve(&local, self.budget) {
                Answer::Unsat => return self.certify(window, &local, &assumptions),
                Answer::Stopped => return Shown::Open,
                Answer::Sat if !window.is_complete => {
                    if size >= effort.nodes {
                        return Shown::Open;
                    }
                    size = (size * GROWTH).min(effort.nodes);
                }
                Answer::Sat => {
                    let input = window.input(self, |var| engine.value(var));
                    let broken = self.broken(&input, side);
                    if broken.is_empty() {
                        return Shown::Refuted(input);
                    }
                    let before = context.len();
                    let new = |signal: &Signal| !context.contains(signal) && window.touches(self.graph, *signal);
                    let more: Vec<Signal> = broken.into_iter().filter(new).take(FACTS_A_ROUND).collect();
                    context.extend(more);
                    rounds += 1;
                    if context.len() == before {
                        // A signal of the window has another value there than on the input: nodes that are equal where
                        // the facts hold were linked, and some fact is broken.
                        if !is_linked {
                            return Shown::Open;
                        }
                        is_linked = false;
                    }
                    if rounds > effort.rounds {
                        return Shown::Open;
                    }
                }
            }
        }
        Shown::Open
    }

    /// The facts, and the signals of a side, that do not hold on an input.
    fn broken(&self, input: &Bits, side: Option<bool>) -> Vec<Signal> {
        let values = self.values(input);
        let of_side = side.map_or(&[][..], |side| &self.sides[usize::from(side)]);
        let is_broken = |signal: &&Signal| values[signal.node()] == signal.is_negated();
        self.facts.iter().chain(of_side).filter(is_broken).copied().collect()
    }

    /// The value of every node on an input.
    fn values(&self, input: &Bits) -> Vec<bool> {
        let mut values = vec![false; self.graph.len()];
        for node in 1..self.graph.len() {
            let operands = self.graph.operands(node).iter();
            let of = |operand: &Signal| values[operand.node()] != operand.is_negated();
            values[node] = match self.graph.node(node) {
                Node::No => false,
                Node::Input => input.at(node - 1),
                Node::All => operands.fold(true, |all, operand| all & of(operand)),
                Node::Odd => operands.fold(false, |odd, operand| odd ^ of(operand)),
            };
        }
        values
    }

    /// Makes the refutation of a window a part of the proof.
    fn certify(&mut self, window: Window, local: &[Lit], assumptions: &[Lit]) -> Shown {
        let Window { mut formula, globals, .. } = window;
        local.iter().for_each(|&lit| formula.push([lit]));
        let Refutation::Proof(part) = refute(&formula, self.budget) else { return Shown::Open };
        let global = |lit: Lit| Lit::new(globals[lit.var()], !lit.is_negated());
        self.append(&part, global, assumptions);
        Shown::Proven
    }

    /// Refutes the whole miter at once: the last resort.
    pub(super) fn whole(&mut self) -> Shown {
        let mut formula = self.miter.formula.clone();
        // What was proven is given to the engine as well.
        let mut lemmas: Vec<[Lit; 2]> = Vec::new();
        for (&node, &equal) in &self.equal {
            let (a, b) = (self.miter.lit(Signal::of(node)), self.miter.lit(equal));
            lemmas.extend([[a, !b], [!a, b]]);
        }
        lemmas.sort_unstable();
        lemmas.into_iter().for_each(|lemma| formula.push(lemma));
        self.facts.iter().for_each(|&fact| formula.push([self.miter.lit(fact)]));
        let mut engine = Batsat::new();
        engine.limit(MOST_STEPS);
        formula.iter().for_each(|clause| engine.add_clause(clause));
        match engine.solve(&[], self.budget) {
            Answer::Stopped => Shown::Open,
            Answer::Sat => Shown::Refuted((0..self.base.len()).map(|at| engine.value(at)).collect()),
            Answer::Unsat => match refute(&formula, self.budget) {
                Refutation::Proof(part) => {
                    self.append(&part, |lit| lit, &[]);
                    Shown::Proven
                }
                _ => Shown::Open,
            },
        }
    }

    /// Appends a proof that rests on assumptions: each of its clauses with their negations.
    fn append(&mut self, part: &Proof, global: impl Fn(Lit) -> Lit, assumptions: &[Lit]) {
        // Deletions of clauses that are not the part's own would be of clauses that the window took from the miter.
        let mut own: FxHashMap<Vec<Lit>, usize> = FxHashMap::default();
        let mut left: Vec<Vec<Lit>> = Vec::new();
        for step in part.steps() {
            let (Step::Add(clause) | Step::Delete(clause)) = step;
            let lits: Vec<Lit> =
                clause.iter().map(|&lit| global(lit)).chain(assumptions.iter().map(|&lit| !lit)).collect();
            let mut key = lits.clone();
            key.sort_unstable();
            if let Step::Add(_) = step {
                *own.entry(key).or_default() += 1;
                if !clause.is_empty() {
                    left.push(lits.clone());
                }
                self.proof.add(lits);
            } else if let Some(count) = own.get_mut(&key).filter(|count| **count > 0) {
                *count -= 1;
                self.proof.delete(lits);
            }
        }
        for lits in left {
            let mut key = lits.clone();
            key.sort_unstable();
            if let Some(count) = own.get_mut(&key).filter(|count| **count > 0) {
                *count -= 1;
                self.proof.delete(lits);
            }
        }
    }
}

/// A part of the miter in variables of its own.
struct Window {
    formula: Formula,
    /// The miter's variable of each of the window's.
    globals: Vec<usize>,
    locals: FxHashMap<usize, usize>,
    /// The inputs of the miter that are in the window.
    inputs: FxHashSet<usize>,
    /// Whether every node in the window has its definition there.
    is_complete: bool,
}

impl Window {
    fn new(
        prover: &Prover,
        roots: &[Signal],
        context: &[Signal],
        side: Option<bool>,
        size: usize,
        is_linked: bool,
    ) -> Self {
        let mut window = Self {
            formula: Formula::new(0),
            globals: Vec::new(),
            locals: FxHashMap::default(),
            inputs: FxHashSet::default(),
            is_complete: true,
        };
        let miter = prover.miter;
        let mut open: BinaryHeap<usize> = BinaryHeap::new();
        let mut seen: FxHashSet<usize> = FxHashSet::default();
        let mut visit = |open: &mut BinaryHeap<usize>, node: usize| {
            if seen.insert(node) {
                open.push(node);
            }
        };
        roots.iter().chain(context).for_each(|root| visit(&mut open, root.node()));
        let mut left = size + context.len() * FIRST_WINDOW;
        while let Some(node) = open.pop() {
            if prover.graph.node(node) == Node::Input {
                window.inputs.insert(node - 1);
                continue;
            }
            if left == 0 {
                window.is_complete = false;
                break;
            }
            left -= 1;
            match prover.equal.get(&node).filter(|_| is_linked) {
                Some(&equal) => {
                    let (a, b) = (miter.lit(Signal::of(node)), miter.lit(equal));
                    [[a, !b], [!a, b]].iter().for_each(|clause| window.push(clause));
                    visit(&mut open, equal.node());
                }
                None => {
                    miter.definition(node).for_each(|at| window.push(miter.formula.clause(at)));
                    prover.graph.operands(node).iter().for_each(|operand| visit(&mut open, operand.node()));
                }
            }
        }
        for &signal in context {
            let lit = miter.lit(signal);
            match side.filter(|&side| prover.sides[usize::from(side)].contains(&signal)) {
                Some(true) => window.push(&[!miter.problem, lit]),
                Some(false) => window.push(&[miter.problem, lit]),
                None => window.push(&[lit]),
            }
        }
        let assumed = roots.iter().map(|&root| miter.lit(root)).chain([miter.problem]);
        assumed.for_each(|lit| {
            window.make(lit);
        });
        window
    }

    /// The window's literal for one of the miter's, made if need be.
    fn make(&mut self, lit: Lit) -> Lit {
        let next = self.globals.len();
        let var = *self.locals.entry(lit.var()).or_insert(next);
        if var == next {
            self.globals.push(lit.var());
        }
        Lit::new(var, !lit.is_negated())
    }

    fn local(&self, lit: Lit) -> Lit {
        Lit::new(self.locals[&lit.var()], !lit.is_negated())
    }

    fn push(&mut self, clause: &[Lit]) {
        let lits: Vec<Lit> = clause.iter().map(|&lit| self.make(lit)).collect();
        self.formula.push(lits);
    }

    /// The input of a model.
    fn input(&self, prover: &Prover, value: impl Fn(usize) -> bool) -> Bits {
        let mut input = prover.base.clone();
        for &at in &self.inputs {
            if let Some(&var) = self.locals.get(&at) {
                input.set_at(at, value(var));
            }
        }
        input
    }

    /// Whether a signal depends on an input of the window.
    fn touches(&self, graph: &Graph, signal: Signal) -> bool {
        let mut seen: FxHashSet<usize> = FxHashSet::default();
        let mut open = vec![signal.node()];
        while let Some(node) = open.pop() {
            if !seen.insert(node) {
                continue;
            }
            if seen.len() > 16 * MAX_SUPPORT {
                return true;
            }
            if graph.node(node) == Node::Input && self.inputs.contains(&(node - 1)) {
                return true;
            }
            open.extend(graph.operands(node).iter().map(|operand| operand.node()));
        }
        false
    }
}
