//! The phase of a circuit as a sum of terms.
//!
//! Input: the diagonal gates one by one, each a multiple of pi/4 where some value is 1. Output: a sign that is an
//! exclusive or of terms, and a constant multiple of pi/4; or nothing, where the sum does not come out as that.
//!
//! The sum is taken modulo 8 over values that are 0 or 1, so `4 (a xor b) = 4 a + 4 b`, and generally
//! `a xor b = a + b - 2 ab`: an exclusive or of many terms is the sum of all of them, less twice all pairs, plus four times
//! all triples, and the rest is a multiple of 8. That takes phases of S and T gates on exclusive ors apart into conjunctions.
//! It is the phase polynomial of M. Amy, D. Maslov and M. Mosca, "Polynomial-Time T-Depth Optimization of Clifford+T
//! Circuits via Matroid Partitioning", 2014 (from memory), with conjunctions among the terms.

use rustc_hash::FxHashMap;

use crate::judge::audit::basis::form::Form;
use crate::judge::reading::graph::{Graph, Signal};

/// The most products of terms that a sum is taken apart into.
const MAX_PRODUCTS: usize = 1 << 18;

/// A phase in multiples of pi/4, as a sum. Coefficients are modulo 8.
#[derive(Clone, Debug, Default)]
pub(crate) struct Turns {
    constant: u8,
    /// The coefficients of single terms.
    terms: FxHashMap<Signal, u8>,
    /// The coefficients of exclusive ors of several terms.
    sums: FxHashMap<Box<[Signal]>, u8>,
}

impl Turns {
    /// Adds a multiple of pi/4 where a value is 1.
    pub(crate) fn add(&mut self, value: &Form, eighths: u8) {
        let mut eighths = eighths;
        if value.flip {
            // e (1 - v) = e - e v
            self.constant = (self.constant + eighths) % 8;
            eighths = 8 - eighths;
        }
        match &value.terms[..] {
            &[term] => self.add_term(term, eighths),
            terms if eighths == 4 => terms.iter().for_each(|&term| self.add_term(term, 4)),
            [] => {}
            terms => {
                let sum = self.sums.entry(terms.into()).or_insert(0);
                *sum = (*sum + eighths) % 8;
            }
        }
    }

    fn add_term(&mut self, term: Signal, eighths: u8) {
        let sum = self.terms.entry(term).or_insert(0);
        *sum = (*sum + eighths) % 8;
    }

    /// The sum as a sign that is not negated, and a constant multiple of pi/4. `None` where other multiples are left.
    pub(crate) fn sign(mut self, graph: &mut Graph) -> Option<(Form, u8)> {
        let mut sums: Vec<(Box<[Signal]>, u8)> =
            std::mem::take(&mut self.sums).into_iter().filter(|(_, eighths)| *eighths != 0).collect();
        sums.sort_unstable();
        let mut products = 0;
        for (terms, eighths) in sums {
            products += products_of(terms.len(), eighths);
            if products > MAX_PRODUCTS {
                return None;
            }
            self.take_apart(&terms, eighths, graph);
        }
        self.terms.retain(|_, eighths| *eighths != 0);
        if self.terms.values().any(|&eighths| eighths != 4) {
            return None;
        }
        let mut terms: Vec<Signal> = self.terms.into_keys().collect();
        terms.sort_unstable();
        Some((Form { terms, flip: false }, self.constant))
    }

    /// Adds `eighths` times the exclusive or of the terms, as products.
    fn take_apart(&mut self, terms: &[Signal], eighths: u8, graph: &mut Graph) {
        for (at, &one) in terms.iter().enumerate() {
            self.add_term(one, eighths);
            if eighths == 4 {
                continue;
            }
            for (after, &other) in terms.iter().enumerate().skip(at + 1) {
                self.add_product(&[one, other], (8 - 2 * eighths % 8) % 8, graph);
                if eighths % 2 == 1 {
                    terms[after + 1..].iter().for_each(|&third| self.add_product(&[one, other, third], 4, graph));
                }
            }
        }
    }

    fn add_product(&mut self, terms: &[Signal], eighths: u8, graph: &mut Graph) {
        let mut factors = Vec::new();
        for term in terms {
            match graph.factors(term.node()) {
                [] => factors.push(*term),
                of_term => factors.extend_from_slice(of_term),
            }
        }
        let product = graph.all(factors);
        if product != Signal::NO {
            self.add_term(product, eighths);
        }
    }
}

/// How many products of two and three a sum of `terms` terms has.
fn products_of(terms: usize, eighths: u8) -> usize {
    let pairs = terms.saturating_mul(terms) / 2;
    match eighths {
        4 => 0,
        even if even % 2 == 0 => pairs,
        _ => pairs.saturating_mul(terms) / 3 + pairs,
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    /// The seven phases of the textbook construction of a doubly controlled sign: `4abc = a + b + c - (a xor b) - ...`.
    #[test]
    fn seven_eighth_turns_are_a_doubly_controlled_sign() {
        let mut graph = Graph::over(3);
        let [a, b, c] = [0, 1, 2].map(|bit| graph.bit(bit));
        let sum = |terms: &[Signal]| Form { terms: terms.to_vec(), flip: false };
        let mut turns = Turns::default();
        for (terms, eighths) in
            [(&[a][..], 1), (&[b], 1), (&[c], 1), (&[a, b], 7), (&[a, c], 7), (&[b, c], 7), (&[a, b, c], 1)]
        {
            turns.add(&sum(terms), eighths);
        }
        let abc = graph.all([a, b, c]);
        assert_eq!(turns.clone().sign(&mut graph), Some((sum(&[abc]), 0)));
        turns.add(&sum(&[a, b]).negated_if(true), 2);
        assert_eq!(turns.sign(&mut graph), None, "a quarter turn is left");
    }

    /// Every sum of up to five terms, against the values.
    #[test]
    fn sums_are_taken_apart_rightly() {
        for len in 1..=5 {
            for eighths in 1..8 {
                let mut graph = Graph::over(len);
                let terms: Vec<Signal> = (0..len).map(|bit| graph.bit(bit)).collect();
                let mut turns = Turns::default();
                turns.take_apart(&terms, eighths, &mut graph);
                for x in 0u32..1 << len {
                    let holds = |term: &Signal| match graph.factors(term.node()) {
                        [] => x >> (term.node() - 1) & 1 == 1,
                        factors => factors.iter().all(|factor| x >> (factor.node() - 1) & 1 == 1),
                    };
                    let found =
                        turns.terms.iter().filter(|(term, _)| holds(term)).map(|(_, e)| u32::from(*e)).sum::<u32>();
                    assert_eq!(found % 8, x.count_ones() % 2 * u32::from(eighths), "{len} terms, {eighths}, {x:b}");
                }
            }
        }
    }
}
