//! The judge's own reading of a problem: from expressions over integers to signals over bits.
//!
//! Input: a checked [`Problem`]. Output: a [`Reading`], whose conjuncts together with the problem's clauses hold exactly
//! where [`Problem::holds`] does. Clauses are not read here: their users take them as they are, so that a million
//! clauses cost nothing.
//!
//! The methods are not those of the maker's network, on purpose: integers are two's complement, carries are
//! majorities, comparisons are signs of differences, counts are sorted, "all different" goes value by value and a
//! table row by row. A mistake must be made twice, in two different ways, to go unseen.

mod exprs;
pub(crate) mod graph;
mod number;
mod unary;

use exprs::Reader;
use graph::{Graph, Signal};

use crate::problem::Problem;

/// A problem's expressions and domains over its bits.
#[derive(Clone, Debug)]
pub(crate) struct Reading {
    /// The graph over the bits of the problem.
    pub(crate) graph: Graph,
    /// What must hold besides the clauses: domains and expressions, conjunctions taken apart.
    pub(crate) conjuncts: Vec<Signal>,
}

/// Reads a problem.
pub(crate) fn read(problem: &Problem) -> Reading {
    let mut graph = Graph::over(problem.bit_count());
    let mut reader = Reader::new(problem, &mut graph);
    let mut roots: Vec<Signal> = problem.vars().ids().map(|var| reader.in_domain(var)).collect();
    roots.extend(reader.constraints());
    let mut conjuncts = Vec::new();
    roots.into_iter().for_each(|root| take_apart(&graph, root, &mut conjuncts));
    if conjuncts.contains(&Signal::NO) {
        conjuncts = vec![Signal::NO];
    }
    conjuncts.sort_unstable();
    conjuncts.dedup();
    Reading { graph, conjuncts }
}

/// Pushes the operands of nested conjunctions; "always" is left out.
pub(crate) fn take_apart(graph: &Graph, root: Signal, into: &mut Vec<Signal>) {
    let mut open = vec![root];
    while let Some(signal) = open.pop() {
        match graph.factors(signal.node()) {
            [] if signal == Signal::YES => {}
            factors if !factors.is_empty() && !signal.is_negated() => open.extend(factors),
            _ => into.push(signal),
        }
    }
}
