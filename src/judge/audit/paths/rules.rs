//! How phases on two functions, their exclusive or and their conjunction depend on each other.
//!
//! As numbers 0 and 1, `a xor b = a + b - 2 ab`. Of the three forms `a`, `b`, `a xor b` the largest is written by the
//! other two and the conjunction, wherever a phase stands on it; so sums of phases that are equal become equal term by
//! term, although the forms may have many terms each. Nothing is expanded into products of single inputs.

use rustc_hash::FxHashMap;

use crate::judge::audit::basis::form::Form;
use crate::judge::reading::graph::Signal;

/// `constant + sum of coefficient * form`, modulo 8.
#[derive(Clone, PartialEq, Eq, Debug, Default)]
pub(super) struct Combination {
    pub(super) constant: u8,
    pub(super) parts: Vec<(Form, u8)>,
}

/// Two literals over the smaller two of three forms, and the node of their conjunction.
#[derive(Clone, Debug)]
struct Pair {
    literals: [Form; 2],
    node: Signal,
}

/// What is known of products of two.
#[derive(Debug, Default)]
pub(super) struct Rules {
    pairs: FxHashMap<Box<[Signal]>, Pair>,
    /// Nodes that are the product of the same two with other signs.
    others: FxHashMap<Signal, Combination>,
    /// Twice a node, where the exclusive or of its factors is that of another pair too.
    twice: FxHashMap<Signal, Combination>,
    /// Forms for which a rule is new.
    fresh: Vec<Box<[Signal]>>,
}

impl Rules {
    /// Notes that a node is the conjunction of two forms, which are no constants and not the same up to sign.
    pub(super) fn note(&mut self, a: &Form, b: &Form, node: Signal) {
        let mut odd = a.clone();
        odd.add(b);
        if node.is_negated() || [&a.terms, &b.terms, &odd.terms].iter().any(|terms| terms[..] == [node]) {
            return;
        }
        let size = |form: &Form| (form.terms.len(), form.terms.clone());
        // With `c = a xor b`: `a b = b (not c) = a (not c)`.
        let literals = if size(&odd) > size(a).max(size(b)) {
            [a.clone(), b.clone()]
        } else {
            let smaller = if size(a) < size(b) { a } else { b };
            [smaller.clone(), odd.clone().negated_if(true)]
        };
        let mut largest = literals[0].clone();
        largest.add(&literals[1]);
        let mut literals = literals;
        literals.sort_by_key(size);
        match self.pairs.get(&largest.terms[..]) {
            None => {
                self.fresh.push(largest.terms.clone().into());
                self.pairs.insert(largest.terms.into(), Pair { literals, node });
            }
            Some(pair) if pair.node == node => {}
            Some(pair) if (0..2).all(|at| pair.literals[at].terms == literals[at].terms) => {
                let combination = pair.with_signs_of(&literals);
                self.others.entry(node).or_insert(combination);
            }
            Some(_) => {
                let [a, b] = literals;
                let parts = vec![(a, 1), (b, 1), (largest, 7)];
                self.twice.entry(node).or_insert(Combination { constant: 0, parts });
            }
        }
    }

    /// The forms for which rules are new since this was last asked.
    pub(super) fn take_fresh(&mut self) -> Vec<Box<[Signal]>> {
        std::mem::take(&mut self.fresh)
    }

    /// What `coefficient` times an exclusive or of several terms is by smaller ones.
    pub(super) fn of_sum(&self, terms: &[Signal], coefficient: u8) -> Option<Combination> {
        let Pair { literals: [a, b], node } = self.pairs.get(terms)?;
        // a + b - 2 ab is the form or its negation, which is one minus the form.
        let (sign, constant) = if a.flip == b.flip { (1, 0) } else { (7, 1) };
        let parts = vec![(a.clone(), sign), (b.clone(), sign), (Form::term(*node), 6 * sign % 8)];
        Some(Combination { constant, parts }.times(coefficient))
    }

    /// What `coefficient` times a single term is by other products, the coefficient being no multiple of 4.
    pub(super) fn of_term(&self, term: Signal, coefficient: u8) -> Option<Combination> {
        let halved = || self.twice.get(&term).filter(|_| coefficient % 2 == 0).map(|twice| twice.times(coefficient / 2));
        self.others.get(&term).map(|other| other.times(coefficient)).or_else(halved)
    }
}

impl Combination {
    fn times(&self, factor: u8) -> Self {
        let parts = self.parts.iter().map(|(form, times)| (form.clone(), factor * times % 8)).collect();
        Self { constant: factor * self.constant % 8, parts }
    }
}

impl Pair {
    /// The product of literals of the same two forms, by the product of these.
    fn with_signs_of(&self, literals: &[Form; 2]) -> Combination {
        let [a, b] = &self.literals;
        let ab = (Form::term(self.node), 7);
        let same = [0, 1].map(|at| self.literals[at].flip == literals[at].flip);
        match same {
            [true, true] => Combination { constant: 0, parts: vec![(Form::term(self.node), 1)] },
            [true, false] => Combination { constant: 0, parts: vec![(a.clone(), 1), ab] },
            [false, true] => Combination { constant: 0, parts: vec![(b.clone(), 1), ab] },
            [false, false] => {
                let parts = vec![(a.clone(), 7), (b.clone(), 7), (Form::term(self.node), 1)];
                Combination { constant: 1, parts }
            }
        }
    }
}
