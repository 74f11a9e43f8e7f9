//! Every solution of the formula is in the graph.
//!
//! From the top down, each node has a *context*: clauses that follow from the formula along the path. To be shown of a node: what satisfies its context is one of its models (projected: extends to one).
//!
//! - A conjunction: each of its literals follows from the context, by unit propagation, or else by varisat. Then the
//!   context is reduced by these literals, and each part gets the clauses that share variables with it and with no other
//!   part (a part need not speak of a variable that its own literals set free); clauses that lie across are dropped,
//!   which makes a context weaker and never wrong.
//! - A decision: each side gets the same context with the literal of its value.
//! - A node without models: the context is a contradiction.
//! - Projected, a node without shown variables: nothing, if it has a model.
//!
//! A node with several parents is shown once for each different context, known by its SHA-256. Where the counter found a
//! part in its cache the contexts are the same, so the work is about that of the counter.
//!
//! The idea of checking a compiled graph along its own paths: F. Capelli, J.-M. Lagniez, P. Marquis, "Certifying top-down
//! decision-DNNF compilers", AAAI 2021 (from memory). Differences: no proof is stored in the file; what it would say is
//! found again by propagation or a solver.

use std::rc::Rc;

use rustc_hash::FxHashSet;
use sha2::{Digest, Sha256};

use super::graph::{Graph, Node};
use super::number::Counted;
use super::subsumed::without_subsumed;
use super::unit::Unit;
use super::{Formula, Refusal, plain};
use crate::budget::Budget;
use crate::id::Id;
use crate::problem::BitLit;
use crate::sat::{Answer, Batsat, Engine, Lit, Varisat};

/// Nodes between two looks at the budget.
const CHECKED: u64 = 64;
const NONE: u32 = u32::MAX;

/// Clauses without repeated literals.
#[derive(Debug, Default)]
pub(super) struct Context {
    pub(super) lits: Vec<BitLit>,
    pub(super) ends: Vec<u32>,
}

impl Context {
    pub(super) fn push(&mut self, clause: impl IntoIterator<Item = BitLit>) {
        self.lits.extend(clause);
        self.ends.push(self.lits.len() as u32);
    }

    pub(super) fn clauses(&self) -> impl Iterator<Item = &[BitLit]> {
        let starts = std::iter::once(0).chain(self.ends.iter().copied());
        starts.zip(&self.ends).map(|(from, &to)| &self.lits[from as usize..to as usize])
    }

    fn digest(&self) -> [u8; 32] {
        let mut hasher = Sha256::new();
        for clause in self.clauses() {
            clause.iter().for_each(|lit| hasher.update((lit.index() as u32).to_le_bytes()));
            hasher.update(NONE.to_le_bytes());
        }
        hasher.finalize().into()
    }
}

/// A node that has to be shown in a context, along with the literal that a decision above it took.
struct Task {
    node: usize,
    context: Rc<Context>,
    taken: Option<BitLit>,
}

/// Checks the whole graph.
pub(super) fn check(formula: &Formula, counted: &Counted<'_>, budget: &Budget) -> Result<(), Refusal> {
    let mut context = Context::default();
    formula.clauses.iter().filter_map(plain).for_each(|clause| context.push(clause));
    let root = counted.graph.root();
    let mut checker = Checker::new(formula.var_count, counted, budget);
    checker.tasks.push(Task { node: root, context: Rc::new(without_subsumed(context)), taken: None });
    while let Some(task) = checker.tasks.pop() {
        checker.done += 1;
        if checker.done.is_multiple_of(CHECKED) && budget.spent() {
            return Err(Refusal::OutOfTime);
        }
        checker.show(&task)?;
    }
    Ok(())
}

struct Checker<'a> {
    counted: &'a Counted<'a>,
    budget: &'a Budget,
    unit: Unit,
    tasks: Vec<Task>,
    /// Nodes with several parents that were shown, with their contexts.
    shown: FxHashSet<(u32, [u8; 32])>,
    is_shared: Vec<bool>,
    /// For a variable, the part it belongs to, while a conjunction is taken apart; for a solver, its number there.
    place: Vec<u32>,
    done: u64,
}

impl<'a> Checker<'a> {
    fn new(var_count: usize, counted: &'a Counted<'a>, budget: &'a Budget) -> Self {
        Self {
            counted,
            budget,
            unit: Unit::new(var_count),
            tasks: Vec::new(),
            shown: FxHashSet::default(),
            is_shared: shared(counted.graph),
            place: vec![NONE; var_count],
            done: 0,
        }
    }

    fn show(&mut self, task: &Task) -> Result<(), Refusal> {
        let graph = self.counted.graph;
        let satisfiable = self.counted.counts[task.node].bits() > 0;
        match graph.nodes()[task.node] {
            _ if satisfiable && self.counted.sets.shown_in(task.node) == 0 => Ok(()),
            Node::Either { bit, yes, no } => {
                for (child, value) in [(no, false), (yes, true)] {
                    let context = Rc::clone(&task.context);
                    self.tasks.push(Task { node: child as usize, context, taken: Some(BitLit::new(bit, value)) });
                }
                Ok(())
            }
            Node::Never => self.show_all(task, &[]),
            Node::Lit(_) => self.show_all(task, &[task.node as u32]),
            node @ Node::All { .. } => self.show_all(task, &graph.children(&node).collect::<Vec<_>>()),
        }
    }

    /// Shows the literals among these children, and leaves the others as tasks.
    fn show_all(&mut self, task: &Task, children: &[u32]) -> Result<(), Refusal> {
        let graph = self.counted.graph;
        let nodes = graph.nodes();
        self.unit.clear();
        let given = task.context.clauses().all(|clause| self.unit.add(clause));
        if !given || !task.taken.is_none_or(|lit| self.unit.set(lit)) || !self.unit.draw() {
            // Nothing satisfies the context, so there is nothing to show.
            return Ok(());
        }
        if nodes[task.node] == Node::Never {
            return self.entails(task, &[], None);
        }
        let stated = children.iter().filter_map(|&child| match nodes[child as usize] {
            Node::Lit(lit) => Some(lit),
            _ => None,
        });
        let stated: Vec<BitLit> = stated.collect();
        for (at, &lit) in stated.iter().enumerate() {
            if self.unit.is_true(lit) {
                continue;
            }
            if !self.unit.refutes([!lit]) {
                self.entails(task, &stated[..at], Some(lit))?;
            }
            if !self.unit.set(lit) || !self.unit.draw() {
                return Ok(());
            }
        }
        let parts: Vec<u32> =
            children.iter().copied().filter(|&child| !matches!(nodes[child as usize], Node::Lit(_))).collect();
        self.hand_down(task, &stated, &parts);
        Ok(())
    }

    /// Gives each part its share of the context.
    fn hand_down(&mut self, task: &Task, stated: &[BitLit], parts: &[u32]) {
        for (at, &part) in parts.iter().enumerate() {
            self.counted.sets.vars(part as usize).for_each(|bit| self.place[bit.index()] = at as u32);
        }
        self.unit.clear();
        // Only what the graph itself states is put in: a part may have to state what follows from it.
        stated.iter().for_each(|&lit| _ = self.unit.set(lit));
        let mut contexts: Vec<Context> = parts.iter().map(|_| Context::default()).collect();
        let mut clause = Vec::new();
        for given in task.context.clauses().filter(|given| !given.iter().any(|&lit| self.unit.is_true(lit))) {
            clause.clear();
            clause.extend(given.iter().copied().filter(|&lit| !self.unit.is_true(!lit)));
            if clause.is_empty() {
                // The context is a contradiction: it is for every part.
                contexts.iter_mut().for_each(|context| context.push([]));
            }
            let mut places = clause.iter().map(|lit| self.place[lit.bit().index()]).filter(|&place| place != NONE);
            if let Some(part) = places.next()
                && places.all(|place| place == part)
            {
                contexts[part as usize].push(clause.iter().copied());
            }
        }
        self.unit.clear();
        for &part in parts {
            self.counted.sets.vars(part as usize).for_each(|bit| self.place[bit.index()] = NONE);
        }
        for (&part, context) in parts.iter().zip(contexts) {
            let context = if self.done == 1 { without_subsumed(context) } else { context };
            if self.is_shared[part as usize] && !self.shown.insert((part, context.digest())) {
                continue;
            }
            self.tasks.push(Task { node: part as usize, context: Rc::new(context), taken: None });
        }
    }

    /// Whether the context with what is known entails a literal (or a contradiction), by a solver.
    fn entails(&mut self, task: &Task, known: &[BitLit], lit: Option<BitLit>) -> Result<(), Refusal> {
        let facts: Vec<BitLit> = known.iter().copied().chain(task.taken).chain(lit.map(|lit| !lit)).collect();
        let answer = match self.budget.time_left() {
            None => self.solve::<Varisat>(&task.context, &facts),
            Some(_) => self.solve::<Batsat>(&task.context, &facts),
        };
        match (answer, lit) {
            (Answer::Unsat, _) => Ok(()),
            (Answer::Stopped, _) => Err(Refusal::OutOfTime),
            (Answer::Sat, Some(lit)) => Err(Refusal::NotImplied { node: task.node, literal: lit.to_dimacs() }),
            (Answer::Sat, None) => Err(Refusal::Lost { node: task.node }),
        }
    }

    fn solve<E: Engine>(&mut self, context: &Context, facts: &[BitLit]) -> Answer {
        let mut engine = E::new();
        let mut used = Vec::new();
        let mut theirs = |lit: BitLit, place: &mut Vec<u32>| {
            let slot = &mut place[lit.bit().index()];
            if *slot == NONE {
                *slot = used.len() as u32;
                used.push(lit.bit().index());
            }
            Lit::new(*slot as usize, !lit.is_negated())
        };
        let mut clause = Vec::new();
        for given in context.clauses().chain(facts.chunks(1)) {
            clause.clear();
            clause.extend(given.iter().map(|&lit| theirs(lit, &mut self.place)));
            engine.add_clause(&clause);
        }
        used.into_iter().for_each(|var| self.place[var] = NONE);
        engine.solve(&[], self.budget)
    }
}

/// Which nodes have several parents.
fn shared(graph: &Graph) -> Vec<bool> {
    let mut parents = vec![0u8; graph.nodes().len()];
    for node in graph.nodes() {
        graph.children(node).for_each(|child| {
            let parents = &mut parents[child as usize];
            *parents = parents.saturating_add(1);
        });
    }
    parents.into_iter().map(|parents| parents > 1).collect()
}
