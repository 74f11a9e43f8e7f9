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
    /// What forms are by smaller ones.
    sums: FxHashMap<Box<[Signal]>, Combination>,
    pairs: FxHashMap<Box<[Signal]>, Pair>,
    /// Nodes that are the product of the same two with other signs.
    others: FxHashMap<Signal, Combination>,
    /// Twice a node, where the exclusive or of its factors is that of another pair too.
    twice: FxHashMap<Signal, Combination>,
    /// Forms for which a rule is new.
    fresh: Vec<Box<[Signal]>>,
}

fn size(form: &Form) -> (usize, &[Signal]) {
    (form.terms.len(), &form.terms)
}

impl Rules {
    /// Notes the conjunction of two forms, which are no constants.
    pub(super) fn note(&mut self, a: &Form, b: &Form, product: &Form) {
        let mut odd = a.clone();
        odd.add(b);
        if odd.terms.is_empty() || a.terms.is_empty() || b.terms.is_empty() {
            return;
        }
        match product {
            _ if product.as_constant() == Some(false) => self.note_linear(odd, (a, 1), (b, 1)),
            // One implies the other.
            _ if product == a => self.note_linear(odd, (a, 7), (b, 1)),
            _ if product == b => self.note_linear(odd, (a, 1), (b, 7)),
            Form { terms, flip: false } if terms.len() == 1 => self.note_node(odd, a, b, terms[0]),
            _ => {}
        }
    }

    /// Notes that as a number `odd` is the sum of two forms with these signs, 1 or 7 for minus 1.
    fn note_linear(&mut self, odd: Form, (a, of_a): (&Form, u8), (b, of_b): (&Form, u8)) {
        let largest = size(a).max(size(b)).max(size(&odd));
        let (form, parts) = match largest {
            _ if largest == size(&odd) => (odd.clone(), vec![(a.clone(), of_a), (b.clone(), of_b)]),
            // a = s (odd - t b), for the signs s and t
            _ if largest == size(a) => (a.clone(), vec![(odd.clone(), of_a), (b.clone(), 8 - of_a * of_b % 8)]),
            _ => (b.clone(), vec![(odd.clone(), of_b), (a.clone(), 8 - of_a * of_b % 8)]),
        };
        self.insert(form, parts);
    }

    fn note_node(&mut self, odd: Form, a: &Form, b: &Form, node: Signal) {
        // With `c = a xor b`: `a b = b (not c) = a (not c)`.
        let mut literals = if size(&odd) > size(a).max(size(b)) {
            [a.clone(), b.clone()]
        } else {
            let smaller = if size(a) < size(b) { a } else { b };
            [smaller.clone(), odd.negated_if(true)]
        };
        literals.sort_by(|one, other| size(one).cmp(&size(other)));
        let mut largest = literals[0].clone();
        largest.add(&literals[1]);
        let [first, second] = &literals;
        match self.pairs.get(&largest.terms[..]) {
            None if !self.sums.contains_key(&largest.terms[..]) => {
                let parts = vec![(first.clone(), 1), (second.clone(), 1), (Form::term(node), 6)];
                self.pairs.insert(largest.terms.clone().into(), Pair { literals, node });
                self.insert(largest, parts);
            }
            Some(pair) if pair.node == node => {}
            Some(pair) if pair.literals.iter().zip(&literals).all(|(one, other)| one.terms == other.terms) => {
                let combination = pair.with_signs_of(&literals);
                self.others.entry(node).or_insert(combination);
            }
            _ => {
                let parts = vec![(first.clone(), 1), (second.clone(), 1), (largest, 7)];
                self.twice.entry(node).or_insert(Combination { constant: 0, parts });
            }
        }
    }

    /// Notes what a form is, unless something is known of it.
    fn insert(&mut self, form: Form, mut parts: Vec<(Form, u8)>) {
        let key: Box<[Signal]> = form.terms.into();
        if self.sums.contains_key(&key) {
            return;
        }
        if form.flip {
            // The form without its sign is one minus this.
            parts.iter_mut().for_each(|(_, times)| *times = (8 - *times) % 8);
        }
        self.fresh.push(key.clone());
        self.sums.insert(key, Combination { constant: u8::from(form.flip), parts });
    }

    /// The forms for which rules are new since this was last asked.
    pub(super) fn take_fresh(&mut self) -> Vec<Box<[Signal]>> {
        std::mem::take(&mut self.fresh)
    }

    /// What `coefficient` times an exclusive or of several terms is by smaller ones.
    pub(super) fn of_sum(&self, terms: &[Signal], coefficient: u8) -> Option<Combination> {
        self.sums.get(terms).map(|sum| sum.times(coefficient))
    }

    /// What `coefficient` times a single term is by other products, the coefficient being no multiple of 4.
    pub(super) fn of_term(&self, term: Signal, coefficient: u8) -> Option<Combination> {
        let halved = || {
            self.twice.get(&term).filter(|_| coefficient.is_multiple_of(2)).map(|twice| twice.times(coefficient / 2))
        };
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
