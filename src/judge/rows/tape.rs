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
//! A step has up to three operands and takes no complements: a value and its negation have a row each, where each is used.
//! A row used at its own level only is given back after its last use; one used at a faster level is kept.

use crate::id::Id;
use crate::judge::reading::Reading;
use crate::judge::reading::graph::Signal;
use crate::judge::rows::lanes::LANE_BITS;
use crate::judge::rows::wide::{Nodes, STEP_WIDTH, Value, Wide};
use crate::problem::Clauses;

/// Requirements between two looks at whether a lane is left, at the fastest level; slower levels look after each one.
const REQUIREMENTS_A_LOOK: usize = 4;

/// What a step does with the conjunction of its operands, or with their exclusive or.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub(crate) enum Kind {
    /// The row becomes the conjunction.
    Set,
    /// The row becomes the negated conjunction.
    SetNot,
    /// The row is conjoined with it.
    Keep,
    /// The row is conjoined with the negated conjunction.
    Clear,
    /// The row changes where the conjunction holds.
    Flip,
    /// The row becomes the exclusive or.
    SetOdd,
    /// The row changes where the exclusive or holds.
    FlipOdd,
    /// The row becomes the majority of three.
    SetMost,
    /// Ends the level if the row is empty.
    Look,
}

/// One step of a tape: places of rows.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub(crate) struct Step {
    pub(crate) kind: Kind,
    /// How many operands there are, up to three.
    pub(crate) len: u8,
    pub(crate) to: u32,
    pub(crate) from: [u32; STEP_WIDTH],
}

const _: () = assert!(size_of::<Step>() <= 20, "the steps of a level should stay in the first cache beside the rows");

/// Row operations for a problem.
#[derive(Clone, Debug)]
pub(crate) struct Tape {
    /// The steps of each level, by level; the last level depends on no block bit.
    levels: Vec<Vec<Step>>,
    slots: usize,
    /// The rows that hold bits of the number of an input, or their negations, by place.
    bits: Vec<Bit>,
}

/// A row that holds a bit of the number of an input.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub(crate) struct Bit {
    pub(crate) place: usize,
    pub(crate) negated: bool,
    pub(crate) row: u32,
}

impl Tape {
    /// The tape of clauses and a reading in which bit `i` is bit `places[i]` of the number of an input.
    pub(crate) fn new(clauses: &Clauses, reading: &Reading, places: &[usize]) -> Self {
        let top = places.len().saturating_sub(LANE_BITS);
        let requirements = requirements(clauses, reading);
        let roots: Vec<Signal> = requirements.iter().flatten().copied().collect();
        let level = |place: usize| place.checked_sub(LANE_BITS).unwrap_or(top);
        let nodes = Nodes::new(&reading.graph, &roots, places, top, level);
        let plan = Planner::plan(&nodes, &requirements, top);
        Writer::write(&nodes, &plan)
    }

    /// The level that depends on no block bit.
    pub(crate) fn top(&self) -> usize {
        self.levels.len() - 1
    }

    pub(crate) fn level(&self, level: usize) -> &[Step] {
        &self.levels[level]
    }

    /// How many row operations a sweep over all blocks takes, at most: each step as often as its level changes.
    pub(crate) fn work(&self) -> u64 {
        let work = |(level, steps): (usize, &Vec<Step>)| {
            let times = 1u64.checked_shl((self.top() - level) as u32).unwrap_or(u64::MAX);
            times.saturating_mul(steps.iter().filter(|step| step.kind != Kind::Look).count() as u64)
        };
        self.levels.iter().enumerate().map(work).fold(0, u64::saturating_add)
    }

    /// How many rows a run needs. The first ones are the lanes left after each level and all slower ones, by level; the next
    /// one is all ones.
    pub(crate) fn slots(&self) -> usize {
        self.slots
    }

    /// The rows of the bits of an input, by place.
    pub(crate) fn bits(&self) -> &[Bit] {
        &self.bits
    }
}

/// What must hold: of each of these some signal.
fn requirements(clauses: &Clauses, reading: &Reading) -> Vec<Vec<Signal>> {
    let graph = &reading.graph;
    let mut requirements = Vec::new();
    for clause in clauses.iter() {
        let lits = clause.iter().map(|lit| graph.bit(lit.bit().index()) ^ lit.is_negated());
        let mut lits: Vec<Signal> = lits.collect();
        lits.sort_unstable();
        lits.dedup();
        if lits.windows(2).all(|pair| pair[0] != !pair[1]) {
            requirements.push(lits);
        }
    }
    for &conjunct in &reading.conjuncts {
        requirements.push(match graph.factors(conjunct.node()) {
            [] if conjunct == Signal::NO => Vec::new(),
            operands if !operands.is_empty() && conjunct.is_negated() => {
                operands.iter().map(|&operand| !operand).collect()
            }
            _ => vec![conjunct],
        });
    }
    requirements
}

/// A step in the order of the tape, before rows are given out.
enum Planned {
    /// Compute a node.
    Node(usize),
    /// Require that not all of these hold.
    NotAll(Vec<Value>),
    Look,
}

impl Planned {
    fn operands(&self, nodes: &Nodes) -> Vec<Value> {
        match self {
            Self::Look => Vec::new(),
            Self::NotAll(values) => values.clone(),
            Self::Node(node) => nodes.nodes()[*node].operands(),
        }
    }
}

/// Orders the steps of every level.
struct Planner<'a> {
    nodes: &'a Nodes,
    /// The plan of each level.
    plan: Vec<Vec<Planned>>,
    planned: Vec<bool>,
}

impl<'a> Planner<'a> {
    fn plan(nodes: &'a Nodes, requirements: &[Vec<Signal>], top: usize) -> Vec<Vec<Planned>> {
        let mut of_level: Vec<Vec<Vec<Value>>> = (0..=top).map(|_| Vec::new()).collect();
        for some in requirements {
            let none: Vec<Value> = some.iter().map(|&signal| !nodes.image(signal)).collect();
            of_level[nodes.lowest(&none)].push(none);
        }
        let plan = (0..=top).map(|_| Vec::new()).collect();
        let mut planner = Self { nodes, plan, planned: vec![false; nodes.nodes().len()] };
        for level in (0..=top).rev() {
            let a_look = if level == 0 { REQUIREMENTS_A_LOOK } else { 1 };
            let count = of_level[level].len();
            for (at, none) in std::mem::take(&mut of_level[level]).into_iter().enumerate() {
                none.iter().for_each(|value| planner.node(value.node(), level));
                planner.plan[level].push(Planned::NotAll(none));
                if (at + 1) % a_look == 0 || at + 1 == count {
                    planner.plan[level].push(Planned::Look);
                }
            }
            // What faster levels need of this one.
            (0..nodes.nodes().len())
                .filter(|&node| nodes.level(node) == level)
                .for_each(|node| planner.node(node, level));
        }
        planner.plan
    }

    /// Plans a node and what it needs of its level; slower levels are planned already.
    fn node(&mut self, root: usize, level: usize) {
        let mut open = vec![(root, false)];
        while let Some((node, ready)) = open.pop() {
            let of_node = &self.nodes.nodes()[node];
            if matches!(of_node, Wide::No | Wide::Place(_)) || self.planned[node] {
                continue;
            }
            debug_assert_eq!(self.nodes.level(node), level, "slower levels are planned already");
            if ready {
                self.planned[node] = true;
                self.plan[level].push(Planned::Node(node));
                continue;
            }
            open.push((node, true));
            open.extend(of_node.operands().iter().rev().map(|operand| (operand.node(), false)));
        }
    }
}

/// Gives every value a row and writes the steps down.
struct Writer<'a> {
    nodes: &'a Nodes,
    rows: Rows,
    /// The row of each value that is used.
    row_of: Vec<Option<u32>>,
    /// Which values are used.
    is_used: Vec<bool>,
    steps: Vec<Step>,
    ones: u32,
}

impl<'a> Writer<'a> {
    fn write(nodes: &'a Nodes, plan: &[Vec<Planned>]) -> Tape {
        // The last use of a value at its own level; `KEPT` where a faster level uses it, or it is no node to compute.
        const KEPT: usize = usize::MAX;
        let values = 2 * nodes.nodes().len();
        let (mut last_use, mut is_used) = (vec![0; values], vec![false; values]);
        for (level, plan) in plan.iter().enumerate() {
            for (at, planned) in plan.iter().enumerate() {
                for value in planned.operands(nodes) {
                    is_used[value.index()] = true;
                    let last = &mut last_use[value.index()];
                    let here = if nodes.level(value.node()) == level { at } else { KEPT };
                    *last = here.max(*last);
                }
            }
        }
        let ones = plan.len() as u32;
        let rows = Rows { next: ones + 1, free: Vec::new() };
        let mut writer = Self { nodes, rows, row_of: vec![None; values], is_used, steps: Vec::new(), ones };
        let bits = writer.bits(&mut last_use, KEPT);
        let mut levels = vec![Vec::new(); plan.len()];
        for level in (0..plan.len()).rev() {
            let left = level as u32;
            writer.step(Kind::Set, left, &[left + 1]);
            for (at, planned) in plan[level].iter().enumerate() {
                match planned {
                    Planned::Look => writer.step(Kind::Look, left, &[]),
                    Planned::NotAll(values) => writer.clear(left, values),
                    Planned::Node(node) => writer.node(*node),
                }
                for value in planned.operands(nodes) {
                    let ends = last_use[value.index()] == at && nodes.level(value.node()) == level;
                    if let Some(row) = writer.row_of[value.index()].take_if(|_| ends) {
                        writer.rows.free.push(row);
                    }
                }
            }
            levels[level] = std::mem::take(&mut writer.steps);
        }
        Tape { levels, slots: writer.rows.next as usize, bits }
    }

    /// Rows for bits, which are set from outside, and for the constant.
    fn bits(&mut self, last_use: &mut [usize], kept: usize) -> Vec<Bit> {
        let mut bits = Vec::new();
        for (node, wide) in self.nodes.nodes().iter().enumerate() {
            for value in [Value::of(node), !Value::of(node)].into_iter().filter(|value| self.is_used[value.index()]) {
                let row = match wide {
                    Wide::No if value.is_negated() => self.ones,
                    // Never set: rows begin as zeros.
                    Wide::No => self.rows.take(),
                    Wide::Place(place) => {
                        let row = self.rows.take();
                        bits.push(Bit { place: *place, negated: value.is_negated(), row });
                        row
                    }
                    _ => continue,
                };
                (self.row_of[value.index()], last_use[value.index()]) = (Some(row), kept);
            }
        }
        bits.sort_unstable_by_key(|bit| (bit.place, bit.negated));
        bits
    }

    fn step(&mut self, kind: Kind, to: u32, operands: &[u32]) {
        let mut from = [self.ones; STEP_WIDTH];
        from[..operands.len()].copy_from_slice(operands);
        self.steps.push(Step { kind, len: operands.len() as u8, to, from });
    }

    fn row(&self, value: Value) -> u32 {
        self.row_of[value.index()].expect("operands are computed before their users")
    }

    fn rows(&self, values: &[Value]) -> Vec<u32> {
        values.iter().map(|&value| self.row(value)).collect()
    }

    /// Does something with a conjunction of any width: what is too much for one step is first put together in a row.
    fn conjoin(&mut self, rows: &[u32], kind: Kind, to: u32) {
        match rows {
            [] => self.step(kind, to, &[self.ones]),
            rows if rows.len() <= STEP_WIDTH => self.step(kind, to, rows),
            [a, b, rest @ ..] => {
                let scratch = self.rows.take();
                for (at, rows) in rest.chunks(STEP_WIDTH).enumerate() {
                    self.step(if at == 0 { Kind::Set } else { Kind::Keep }, scratch, rows);
                }
                self.step(kind, to, &[*a, *b, scratch]);
                self.rows.free.push(scratch);
            }
            [_] => unreachable!("one row is one step"),
        }
    }

    /// Lanes stay only where not all of these hold.
    fn clear(&mut self, left: u32, values: &[Value]) {
        let rows = self.rows(values);
        self.conjoin(&rows, Kind::Clear, left);
    }

    /// Writes a node, its negation or both.
    fn node(&mut self, node: usize) {
        let (yes, no) = (Value::of(node), !Value::of(node));
        let wanted = (self.is_used[yes.index()], self.is_used[no.index()]);
        let to = self.rows.take();
        let negated = wanted == (false, true);
        let nodes = self.nodes;
        match &nodes.nodes()[node] {
            Wide::No | Wide::Place(_) => unreachable!("only nodes to compute are planned"),
            Wide::All(values) => {
                let rows = self.rows(values);
                self.conjoin(&rows, if negated { Kind::SetNot } else { Kind::Set }, to);
            }
            Wide::Most(values) => {
                let rows = self.rows(values);
                self.step(Kind::SetMost, to, &rows);
                if negated {
                    self.step(Kind::Flip, to, &[self.ones]);
                }
            }
            Wide::Sum(terms) => self.sum(terms, negated, to),
        }
        self.row_of[if negated { no } else { yes }.index()] = Some(to);
        if wanted == (true, true) {
            let other = self.rows.take();
            self.step(Kind::SetNot, other, &[to]);
            self.row_of[no.index()] = Some(other);
        }
    }

    /// Writes a sum: values that stand alone several a step, each other term in a step.
    fn sum(&mut self, terms: &[Vec<Value>], negated: bool, to: u32) {
        let mut alone: Vec<u32> = terms.iter().filter(|term| term.len() == 1).map(|term| self.row(term[0])).collect();
        alone.extend(negated.then_some(self.ones));
        let mut is_set = false;
        for rows in alone.chunks(STEP_WIDTH) {
            self.step(if is_set { Kind::FlipOdd } else { Kind::SetOdd }, to, rows);
            is_set = true;
        }
        for term in terms.iter().filter(|term| term.len() != 1) {
            let rows = self.rows(term);
            self.conjoin(&rows, if is_set { Kind::Flip } else { Kind::Set }, to);
            is_set = true;
        }
    }
}

/// Rows that are given out and given back.
struct Rows {
    next: u32,
    free: Vec<u32>,
}

impl Rows {
    fn take(&mut self) -> u32 {
        self.free.pop().unwrap_or_else(|| {
            self.next += 1;
            self.next - 1
        })
    }
}
