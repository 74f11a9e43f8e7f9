//! The tape: a problem's reading as a straight line of row operations, ordered so that slow ones run seldom.
//!
//! Input: a [`Reading`], the problem's clauses, and the place of each bit in the number of an input. Output: a [`Tape`].
//!
//! Going through blocks of inputs in order, bit 0 of the block's number changes at every step, bit 1 at every second,
//! and so on. The *level* of an operation is the lowest block bit that it depends on; an operation needs to run again
//! only when a bit at its level or above has changed. The tape has the operations of the highest level first, so after
//! a step that changed bits up to `h` its tail from level `h` on runs. Requirements are conjoined as they come: once no
//! lane of a level is left, all blocks that share the bits from that level up are done.
//!
//! A value used at its own level only gives its row back after its last use; one used at a faster level keeps it.

use crate::id::Id;
use crate::judge::reading::Reading;
use crate::judge::reading::graph::{Graph, Node, Signal};
use crate::judge::rows::lanes::LANE_BITS;
use crate::problem::Clauses;

/// Requirements between two looks at whether a lane is left, at the fastest level; slower levels look after each one.
const REQUIREMENTS_A_LOOK: usize = 4;

/// A row, or its complement: `slot << 1 | negated`.
pub(crate) type Operand = u32;

/// What one step of a tape does.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub(crate) enum Step {
    /// `to` becomes the conjunction of two operands.
    And { to: u32, a: Operand, b: Operand },
    /// `to` becomes the conjunction of the operands in this range of the pool.
    All { to: u32, start: u32, end: u32 },
    /// `to` becomes the exclusive or of two operands.
    Odd { to: u32, a: Operand, b: Operand },
    /// `to` becomes the majority of the three operands from this place of the pool on.
    Most { to: u32, start: u32 },
    /// Lanes stay only where some operand in this range of the pool holds.
    Require { start: u32, end: u32 },
    /// Ends the level if no lane is left.
    Look,
}

/// Row operations for a problem.
#[derive(Clone, Debug)]
pub(crate) struct Tape {
    /// The steps of each level, by level; the last level depends on no block bit.
    levels: Vec<Vec<Step>>,
    pool: Vec<Operand>,
    slots: usize,
    /// For each place in the number of an input, whether a row is needed; place `i` has slot `i`.
    places: usize,
}

impl Tape {
    /// The tape of clauses and a reading in which bit `i` is bit `places[i]` of the number of an input.
    pub(crate) fn new(clauses: &Clauses, reading: &Reading, places: &[usize]) -> Self {
        let mut builder = Builder::new(reading, places);
        builder.plan(clauses);
        builder.allocate()
    }

    /// The level that depends on no block bit.
    pub(crate) fn top(&self) -> usize {
        self.levels.len() - 1
    }

    pub(crate) fn level(&self, level: usize) -> &[Step] {
        &self.levels[level]
    }

    pub(crate) fn pool(&self) -> &[Operand] {
        &self.pool
    }

    /// How many row operations a sweep over all blocks takes, at most: each step as often as its level changes.
    pub(crate) fn work(&self) -> u64 {
        let work = |(level, steps): (usize, &Vec<Step>)| {
            let times = 1u64.checked_shl((self.top() - level) as u32).unwrap_or(u64::MAX);
            times.saturating_mul(steps.iter().filter(|step| **step != Step::Look).count() as u64)
        };
        self.levels.iter().enumerate().map(work).fold(0, u64::saturating_add)
    }

    /// How many rows a run needs; those of the places come first.
    pub(crate) fn slots(&self) -> usize {
        self.slots
    }

    /// How many bits the number of an input has.
    pub(crate) fn places(&self) -> usize {
        self.places
    }
}

/// A step in the order of the tape, before rows are given out.
enum Planned {
    /// Compute a node.
    Node(usize),
    /// Require one of these.
    Require(Vec<Signal>),
    Look,
}

struct Builder<'a> {
    graph: &'a Graph,
    conjuncts: &'a [Signal],
    places: &'a [usize],
    /// The level of each node.
    level_of: Vec<usize>,
    /// The plan of each level.
    plan: Vec<Vec<Planned>>,
    planned: Vec<bool>,
}

impl<'a> Builder<'a> {
    fn new(reading: &'a Reading, places: &'a [usize]) -> Self {
        let top = places.len().saturating_sub(LANE_BITS);
        let graph = &reading.graph;
        let mut builder = Self {
            graph,
            conjuncts: &reading.conjuncts,
            places,
            level_of: Vec::with_capacity(graph.nodes().len()),
            plan: (0..=top).map(|_| Vec::new()).collect(),
            planned: vec![false; graph.nodes().len()],
        };
        for (at, &node) in graph.nodes().iter().enumerate() {
            let level = match node {
                Node::No => top,
                Node::Bit(bit) => places[bit as usize].checked_sub(LANE_BITS).unwrap_or(top),
                _ => builder.lowest(graph.operands(at)),
            };
            builder.level_of.push(level);
        }
        builder
    }

    fn top(&self) -> usize {
        self.plan.len() - 1
    }

    fn lowest(&self, signals: &[Signal]) -> usize {
        signals.iter().map(|signal| self.level_of[signal.node()]).min().unwrap_or(self.top())
    }

    /// Orders the steps of every level, the slowest level first.
    fn plan(&mut self, clauses: &Clauses) {
        let mut requirements: Vec<Vec<Vec<Signal>>> = (0..=self.top()).map(|_| Vec::new()).collect();
        for clause in clauses.iter() {
            let lits = clause.iter().map(|lit| self.graph.bit(lit.bit().index()) ^ lit.is_negated());
            let mut lits: Vec<Signal> = lits.collect();
            lits.sort_unstable();
            lits.dedup();
            if lits.windows(2).all(|pair| pair[0] != !pair[1]) {
                requirements[self.lowest(&lits)].push(lits);
            }
        }
        for &conjunct in self.conjuncts {
            let some = match self.graph.factors(conjunct.node()) {
                [] if conjunct == Signal::NO => Vec::new(),
                [] => vec![conjunct],
                operands => operands.iter().map(|&operand| !operand).collect(),
            };
            requirements[self.lowest(&some)].push(some);
        }
        let needed = self.graph.needed(requirements.iter().flatten().flatten().copied());
        for level in (0..=self.top()).rev() {
            let a_look = if level == 0 { REQUIREMENTS_A_LOOK } else { 1 };
            let count = requirements[level].len();
            for (at, some) in std::mem::take(&mut requirements[level]).into_iter().enumerate() {
                some.iter().for_each(|signal| self.plan_node(signal.node(), level));
                self.plan[level].push(Planned::Require(some));
                if (at + 1) % a_look == 0 || at + 1 == count {
                    self.plan[level].push(Planned::Look);
                }
            }
            // What faster levels need of this one.
            for (node, _) in needed.iter().enumerate().filter(|(_, needed)| **needed) {
                if self.level_of[node] == level {
                    self.plan_node(node, level);
                }
            }
        }
    }

    /// Plans a node and what it needs of its level; slower levels are planned already.
    fn plan_node(&mut self, root: usize, level: usize) {
        let mut open = vec![(root, false)];
        while let Some((node, ready)) = open.pop() {
            let is_leaf = matches!(self.graph.nodes()[node], Node::No | Node::Bit(_));
            if is_leaf || self.planned[node] {
                continue;
            }
            debug_assert_eq!(self.level_of[node], level, "slower levels are planned already");
            if ready {
                self.planned[node] = true;
                self.plan[level].push(Planned::Node(node));
                continue;
            }
            open.push((node, true));
            open.extend(self.graph.operands(node).iter().rev().map(|operand| (operand.node(), false)));
        }
    }

    fn operands_of(&self, planned: &Planned) -> Vec<Signal> {
        match planned {
            Planned::Look => Vec::new(),
            Planned::Require(some) => some.clone(),
            Planned::Node(node) => self.graph.operands(*node).to_vec(),
        }
    }

    /// Gives every value a row and writes the steps down.
    fn allocate(&self) -> Tape {
        // The last use of a node at its own level; `KEPT` where a faster level uses it.
        const KEPT: usize = usize::MAX;
        let mut last_use = vec![0; self.graph.nodes().len()];
        for (level, plan) in self.plan.iter().enumerate() {
            for (at, planned) in plan.iter().enumerate() {
                for signal in self.operands_of(planned) {
                    let last = &mut last_use[signal.node()];
                    let here = if self.level_of[signal.node()] == level { at } else { KEPT };
                    *last = here.max(*last);
                }
            }
        }
        let mut slots = Slots { next: self.places.len() as u32, free: Vec::new() };
        let mut slot_of = vec![u32::MAX; self.graph.nodes().len()];
        let mut tape =
            Tape { levels: vec![Vec::new(); self.plan.len()], pool: Vec::new(), slots: 0, places: self.places.len() };
        for (at, node) in self.graph.nodes().iter().enumerate() {
            if let Node::Bit(bit) = *node {
                (slot_of[at], last_use[at]) = (self.places[bit as usize] as u32, KEPT);
            }
        }
        for level in (0..self.plan.len()).rev() {
            for (at, planned) in self.plan[level].iter().enumerate() {
                let used = self.operands_of(planned);
                let operand = |signal: Signal| slot_of[signal.node()] << 1 | u32::from(signal.is_negated());
                let operands: Vec<Operand> = used.iter().map(|&signal| operand(signal)).collect();
                // A result may take the row of an operand that ends here: every step reads before it writes.
                for signal in used {
                    let node = signal.node();
                    if last_use[node] == at && self.level_of[node] == level && slot_of[node] != u32::MAX {
                        slots.free.push(slot_of[node]);
                        slot_of[node] = u32::MAX;
                    }
                }
                let step = match planned {
                    Planned::Look => Step::Look,
                    Planned::Require(_) => {
                        let (start, end) = pool(&mut tape.pool, &operands);
                        Step::Require { start, end }
                    }
                    Planned::Node(node) => {
                        let to = slots.take();
                        slot_of[*node] = to;
                        match (self.graph.nodes()[*node], &operands[..]) {
                            (Node::Odd { .. }, &[a, b]) => Step::Odd { to, a, b },
                            (Node::Most { .. }, _) => Step::Most { to, start: pool(&mut tape.pool, &operands).0 },
                            (_, &[a, b]) => Step::And { to, a, b },
                            _ => {
                                let (start, end) = pool(&mut tape.pool, &operands);
                                Step::All { to, start, end }
                            }
                        }
                    }
                };
                tape.levels[level].push(step);
            }
        }
        tape.slots = slots.next as usize;
        tape
    }
}

fn pool(pool: &mut Vec<Operand>, operands: &[Operand]) -> (u32, u32) {
    let start = pool.len() as u32;
    pool.extend_from_slice(operands);
    (start, pool.len() as u32)
}

/// Rows that are given out and given back.
struct Slots {
    next: u32,
    free: Vec<u32>,
}

impl Slots {
    fn take(&mut self) -> u32 {
        self.free.pop().unwrap_or_else(|| {
            self.next += 1;
            self.next - 1
        })
    }
}
