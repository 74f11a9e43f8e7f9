//! Clauses over few nodes, at the least number of ANDs.
//!
//! Takes the clauses of a network; gives a network in which clauses over the same few nodes are one conjunct, made from
//! their common truth table (see [`small`](crate::make::network::small)). So gates, adders and small choices that were
//! spelled out as clauses become what they were.
//!
//! Holds after: no clause and the clauses within its nodes together cost more than their function needs.
//!
//! From every clause a window of nodes grows, one node at a time, towards most clauses within; the best of its sizes is
//! taken where it saves enough for each clause. Clauses that a pivot would serve as well are left to that pass.

use super::Passed;
use super::cone::Uses;
use super::copy::Copy;
use super::function::{self, Function, Leaves};
use super::lists::Lists;
use super::view::{self, Clause, View};
use crate::id::{Id, IdVec};
use crate::make::network::build::Conjuncts;
use crate::make::network::small::{INPUTS, Small};
use crate::make::network::{Lit, Network, Node, NodeId};

/// A node with more clauses than this leads to no others: windows around it would be looked for again and again.
const MAX_CLAUSES: usize = 256;

/// ANDs that a window must save for each of its clauses, in tenths: grouping on a pivot saves one.
const LEAST_SAVING: usize = 13;

/// Bits that hold a number of nodes.
const COUNT_BITS: u32 = 3;

/// The pass.
pub(super) fn windows(view: View<'_>) -> Option<Passed> {
    let (network, clauses) = (view.network, view.clauses());
    let mut finder = Finder::new(network, clauses);
    let mut order: Vec<usize> = (0..clauses.len()).filter(|&at| finder.functions[at].is_some()).collect();
    order.sort_by_key(|&at| std::cmp::Reverse(finder.functions[at].as_ref().map_or(0, |f| f.inputs.len())));
    let mut window_of: Vec<Option<usize>> = vec![None; clauses.len()];
    let mut windows: Vec<Function> = Vec::new();
    for at in order {
        if let Some((function, members)) = finder.window(at) {
            members.iter().for_each(|&member| window_of[member] = Some(windows.len()));
            windows.push(function);
        }
    }
    if windows.is_empty() {
        return None;
    }
    let mut copy = Copy::new(network);
    let mut conjuncts = Conjuncts::default();
    let mut built = vec![false; windows.len()];
    for (clause, window) in clauses.iter().zip(window_of) {
        let Some(window) = window else {
            view::add(&mut copy, &mut conjuncts, clause);
            continue;
        };
        if !std::mem::replace(&mut built[window], true) {
            let Function { inputs, table } = &windows[window];
            let inputs: Vec<Lit> = inputs.iter().map(|&node| copy.lit(Lit::new(node, false))).collect();
            let lit = finder.small.build(&mut copy.builder, *table, &inputs);
            conjuncts.add(lit, clause.constraint);
        }
    }
    Some(copy.finish(conjuncts))
}

struct Finder<'a> {
    clauses: &'a [Clause],
    /// What each clause says about few nodes; none where it is about many.
    functions: Vec<Option<Function>>,
    network: &'a Network,
    /// The clauses of each node, each with how many nodes it is about in the lowest [`COUNT_BITS`] bits.
    at_node: Lists,
    taken: Vec<bool>,
    uses: Uses<'a>,
    small: Small,
    /// The clauses met around the window at hand.
    met: Vec<u32>,
}

impl<'a> Finder<'a> {
    fn new(network: &'a Network, clauses: &'a [Clause]) -> Self {
        let lits: Vec<Lit> = clauses.iter().flat_map(|clause| &clause.lits).copied().collect();
        let of_nodes = function::functions(network, &lits);
        let functions: Vec<Option<Function>> = clauses.iter().map(|clause| function_of(clause, &of_nodes)).collect();
        let entries = functions.iter().enumerate().filter_map(|(at, function)| Some((at, function.as_ref()?)));
        let entries = entries.flat_map(|(at, Function { inputs, .. })| {
            inputs.iter().map(move |&node| (node.index(), at << COUNT_BITS | inputs.len()))
        });
        let at_node = Lists::new(network.nodes().len(), entries);
        let taken = vec![false; clauses.len()];
        let met = Vec::new();
        Self { clauses, functions, network, at_node, taken, uses: Uses::new(network), small: Small::new(), met }
    }

    /// The best window around a clause, where one is worth it; its clauses are taken.
    fn window(&mut self, seed: usize) -> Option<(Function, Vec<usize>)> {
        if self.taken[seed] {
            return None;
        }
        let mut nodes = self.functions[seed].as_ref()?.inputs;
        let mut best: Option<(usize, Function, Vec<usize>)> = None;
        loop {
            let (members, next) = self.members(&nodes, seed);
            if members.len() == 1 && self.is_plain(seed) {
                // As few ANDs as the function needs: nothing to save yet.
                let Some(next) = next.filter(|_| nodes.len() < INPUTS) else { break };
                nodes = nodes.union(&Leaves::one(next)).expect("there is room");
                continue;
            }
            let table = members.iter().fold(!0, |table, &at| {
                table & self.functions[at].as_ref().expect("a member has few nodes").table_over(&nodes)
            });
            let roots: Vec<Lit> = members.iter().map(|&at| self.clauses[at].root).collect();
            let before = self.uses.freed(&roots, &[]) + members.len();
            let saving = before.saturating_sub(self.small.ands(table) + 1);
            let enough = if members.len() == 1 { saving > 0 } else { saving * 10 >= members.len() * LEAST_SAVING };
            if enough && best.as_ref().is_none_or(|best| saving > best.0) {
                best = Some((saving, Function { inputs: nodes, table }, members));
            }
            let Some(next) = next.filter(|_| nodes.len() < INPUTS) else { break };
            nodes = nodes.union(&Leaves::one(next)).expect("there is room");
        }
        let (_, function, members) = best?;
        members.iter().for_each(|&at| self.taken[at] = true);
        Some((function, members))
    }

    /// Whether the clause is an OR of searched bits.
    fn is_plain(&self, at: usize) -> bool {
        let is_bit = |lit: &Lit| matches!(self.network.nodes()[lit.node()], Node::Input(_));
        self.clauses[at].lits.iter().all(is_bit)
    }

    /// The free clauses within the nodes, and the node with which most others would be.
    fn members(&mut self, nodes: &[NodeId], seed: usize) -> (Vec<usize>, Option<NodeId>) {
        self.met.clear();
        let mut busy = 0;
        for &node in nodes {
            let at_node = self.at_node.of(node.index());
            if at_node.len() <= MAX_CLAUSES { self.met.extend_from_slice(at_node) } else { busy += 1 }
        }
        self.met.sort_unstable();
        let mut members = vec![seed];
        let mut outside: Vec<NodeId> = Vec::new();
        for run in self.met.chunk_by(|a, b| a == b) {
            let (at, count) = ((run[0] >> COUNT_BITS) as usize, (run[0] & ((1 << COUNT_BITS) - 1)) as usize);
            // Two of its nodes or more are outside, or it is in another window.
            if count > run.len() + busy + 1 || self.taken[at] {
                continue;
            }
            let inputs = &self.functions[at].as_ref().expect("it has few nodes").inputs;
            let mut others = inputs.iter().filter(|input| nodes.binary_search(input).is_err());
            match (others.next(), others.next()) {
                (None, _) => members.push(at),
                // A clause that shares more nodes with the window is met, and so counts, more often.
                (Some(&other), None) => outside.extend(run.iter().map(|_| other)),
                _ => {}
            }
        }
        members.sort_unstable();
        members.dedup();
        outside.sort_unstable();
        let runs = outside.chunk_by(|a, b| a == b).map(|run| (run.len(), std::cmp::Reverse(run[0])));
        (members, runs.max().map(|(_, node)| node.0))
    }
}

/// What a clause says about the searched bits, or else about its own literals' nodes, where these are few.
fn function_of(clause: &Clause, of_nodes: &IdVec<NodeId, Option<Function>>) -> Option<Function> {
    let or = |of: &dyn Fn(NodeId) -> Option<Function>| {
        clause.lits.iter().try_fold(Function::no(), |sum, &lit| {
            sum.join(&of(lit.node())?, |sum, table| sum | function::complement_if(table, lit))
        })
    };
    or(&|node| of_nodes[node]).or_else(|| or(&|node| Some(Function::of_node(node))))
}
