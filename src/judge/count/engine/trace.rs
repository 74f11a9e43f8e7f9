//! What the search tells a listener that wants to keep the way it counted.
//!
//! The search is a decision-DNNF being built bottom up: each finished part of the formula is a conjunction of implied
//! literals and independent parts, or a decision on one variable. Seen from the top, the trace of a counter *is* such a
//! circuit: J. Huang, A. Darwiche, "The language of search", Journal of Artificial Intelligence Research 29, 2007,
//! section 4.
//!
//! A listener gets each node once, children first, and answers with a handle; the cache keeps the handles, so that a
//! part met again is the same node. What counts as one node for the search is one event here, in the literals of the
//! formula as it was given (a variable that was merged into another one speaks through its representative).

use crate::problem::{BitId, BitLit};

/// Hears of every finished node of a search.
pub trait Trace {
    /// The handle of a node.
    type Node: Clone;
    /// Whether anybody listens: if so, the search spells out what it would otherwise look up in a truth table.
    const LISTENS: bool;

    /// No model.
    fn nothing(&mut self) -> Self::Node;
    /// All of these literals and all of these parts, which share no variable.
    fn all(&mut self, implied: &[BitLit], parts: &[Self::Node]) -> Self::Node;
    /// Either side of a decision; each side contains the literal of its value.
    fn either(&mut self, bit: BitId, when_true: Self::Node, when_false: Self::Node) -> Self::Node;
    /// A part without shown variables that these literals satisfy.
    fn witness(&mut self, values: &[BitLit]) -> Self::Node;
}

/// Nobody listens.
#[derive(Clone, Copy, Debug, Default)]
pub struct Silent;

impl Trace for Silent {
    type Node = ();
    const LISTENS: bool = false;

    fn nothing(&mut self) {}
    fn all(&mut self, _: &[BitLit], _: &[()]) {}
    fn either(&mut self, _: BitId, (): (), (): ()) {}
    fn witness(&mut self, _: &[BitLit]) {}
}
