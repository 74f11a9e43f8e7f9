//! The value of a qubit as an exclusive or of terms.
//!
//! A term is a bit of the input or a conjunction, as a node of the judge's graph; no term stands twice, and the order is
//! that of the nodes. So equal exclusive ors are equal lists, and adding a value twice takes it away again, in whatever
//! order the gates of the circuit do it.

use crate::judge::reading::graph::{Graph, Signal};

/// An exclusive or of terms, or its negation. No terms: a constant.
#[derive(Clone, PartialEq, Eq, PartialOrd, Ord, Hash, Debug, Default)]
pub(crate) struct Form {
    /// Bits and conjunctions, not negated, in increasing order.
    pub(crate) terms: Vec<Signal>,
    /// Whether the whole is negated.
    pub(crate) flip: bool,
}

impl Form {
    /// A constant.
    pub(crate) fn constant(value: bool) -> Self {
        Self { terms: Vec::new(), flip: value }
    }

    /// One term, a bit or a conjunction, or a constant; perhaps negated.
    pub(crate) fn term(signal: Signal) -> Self {
        match signal.as_constant() {
            Some(value) => Self::constant(value),
            None => Self { terms: vec![signal ^ signal.is_negated()], flip: signal.is_negated() },
        }
    }

    /// The constant that this is, if it is one.
    pub(crate) fn as_constant(&self) -> Option<bool> {
        self.terms.is_empty().then_some(self.flip)
    }

    /// This or its negation.
    pub(crate) fn negated_if(mut self, flip: bool) -> Self {
        self.flip ^= flip;
        self
    }

    /// Adds another value, modulo 2.
    pub(crate) fn add(&mut self, other: &Form) {
        self.flip ^= other.flip;
        match other.terms[..] {
            [] => {}
            [term] => match self.terms.binary_search(&term) {
                Ok(at) => drop(self.terms.remove(at)),
                Err(at) => self.terms.insert(at, term),
            },
            _ => self.terms = sum(&self.terms, &other.terms),
        }
    }

    /// The value as a signal of the graph.
    pub(crate) fn signal(&self, graph: &mut Graph) -> Signal {
        self.terms.iter().fold(Signal::constant(self.flip), |sum, &term| graph.odd(sum, term))
    }
}

/// The terms that stand in one of two lists and not in the other.
fn sum(a: &[Signal], b: &[Signal]) -> Vec<Signal> {
    let mut terms = Vec::with_capacity(a.len() + b.len());
    let (mut left, mut right) = (a.iter().peekable(), b.iter().peekable());
    while let (Some(&&one), Some(&&other)) = (left.peek(), right.peek()) {
        match one.cmp(&other) {
            std::cmp::Ordering::Less => terms.extend(left.next()),
            std::cmp::Ordering::Greater => terms.extend(right.next()),
            std::cmp::Ordering::Equal => drop((left.next(), right.next())),
        }
    }
    terms.extend(left);
    terms.extend(right);
    terms
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn what_is_added_twice_is_gone() {
        let graph = Graph::over(4);
        let [a, b, c, d] = [0, 1, 2, 3].map(|bit| graph.bit(bit));
        let mut form = Form::term(!b);
        form.add(&Form { terms: vec![a, b, d], flip: false });
        assert_eq!(form, Form { terms: vec![a, d], flip: true });
        form.add(&Form::term(c));
        form.add(&Form { terms: vec![a, d], flip: true });
        assert_eq!(form, Form::term(c));
        form.add(&Form::term(c));
        assert_eq!(form.as_constant(), Some(false));
        assert_eq!((Form::term(Signal::YES).as_constant(), Form::term(a).as_constant()), (Some(true), None));
    }
}
