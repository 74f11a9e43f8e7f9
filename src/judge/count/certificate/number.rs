//! The count of a graph, in big integers: sums over decisions, products over parts, a factor of two for each shown
//! variable that one side of a decision does not speak of.
//!
//! Projected: decisions are on shown variables wherever any is left, so different shown assignments never meet; a part
//! without shown variables counts once if it has a model.

use num_bigint::BigUint;
use num_traits::{One, Zero};

use super::Refusal;
use super::graph::{Graph, Node};
use super::sets::VarSets;
use crate::problem::{BitId, BitLit};

/// A graph with the count of each of its nodes.
#[derive(Debug)]
pub(super) struct Counted<'a> {
    pub(super) graph: &'a Graph,
    pub(super) sets: &'a VarSets,
    /// For each node, the number of assignments of its shown variables that it allows.
    pub(super) counts: Vec<BigUint>,
}

/// A decision on a variable that is not shown must not have shown variables below it: it could count one twice.
pub(super) fn check_decisions(graph: &Graph, sets: &VarSets) -> Result<(), Refusal> {
    for (at, node) in graph.nodes().iter().enumerate() {
        if let Node::Either { bit, .. } = *node
            && !sets.is_shown(bit)
            && sets.shown_in(at) > 0
        {
            return Err(Refusal::HiddenDecision { node: at, var: BitLit::new(bit, true).to_dimacs() as usize });
        }
    }
    Ok(())
}

impl<'a> Counted<'a> {
    /// Counts.
    pub(super) fn new(graph: &'a Graph, sets: &'a VarSets) -> Self {
        Self { graph, sets, counts: counts_given(graph, sets, &[]) }
    }

    /// The count of the whole.
    pub(super) fn total(&self) -> BigUint {
        &self.counts[self.graph.root()] << free_bits(self.graph, self.sets, &[])
    }

    /// The count of the whole with these shown literals true.
    pub(super) fn total_given(&self, given: &[BitLit]) -> BigUint {
        let counts = counts_given(self.graph, self.sets, given);
        &counts[self.graph.root()] << free_bits(self.graph, self.sets, given)
    }
}

fn free_bits(graph: &Graph, sets: &VarSets, given: &[BitLit]) -> u32 {
    let root = graph.root();
    let fixed = given.iter().filter(|lit| !sets.contains(root, lit.bit())).count() as u32;
    sets.shown_in_all() - sets.shown_in(root) - fixed
}

fn counts_given(graph: &Graph, sets: &VarSets, given: &[BitLit]) -> Vec<BigUint> {
    let mut counts: Vec<BigUint> = Vec::with_capacity(graph.nodes().len());
    for (at, node) in graph.nodes().iter().enumerate() {
        let count = match *node {
            Node::Never => BigUint::zero(),
            Node::Lit(lit) if given.contains(&!lit) => BigUint::zero(),
            Node::Lit(_) => BigUint::one(),
            Node::All { .. } => {
                let children = graph.children(node).map(|child| &counts[child as usize]);
                let mut product = BigUint::one();
                children.filter(|count| !count.is_one()).for_each(|count| product *= count);
                product
            }
            Node::Either { yes, no, .. } if sets.shown_in(at) == 0 => {
                counts[yes as usize].clone().max(counts[no as usize].clone())
            }
            Node::Either { yes, no, .. } => {
                let side = |child: u32| {
                    let (child, missing) = (child as usize, |bit: BitId| !sets.contains(child as usize, bit));
                    let gap = sets.shown_in(at) - sets.shown_in(child);
                    let fixed =
                        given.iter().filter(|lit| sets.contains(at, lit.bit()) && missing(lit.bit())).count() as u32;
                    &counts[child] << (gap - fixed)
                };
                side(yes) + side(no)
            }
        };
        counts.push(count);
    }
    counts
}
