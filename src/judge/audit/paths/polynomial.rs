//! The phase of a sum over paths: a polynomial with coefficients modulo 8, in multiples of pi/4, over forms.
//!
//! It is a constant and a sum of `coefficient * form`, a form being 0 or 1. As `4 (a xor b) = 4 a + 4 b`, a coefficient
//! of 4 stands on single terms only; other forms of several terms are kept whole unless a rule takes them apart. This is
//! the phase polynomial of M. Amy, "Towards Large-scale Functional Verification of Universal Quantum Circuits", QPL 2018,
//! arXiv:1805.06908 (from memory), with functions of the inputs among its variables.

use std::collections::BTreeSet;

use rustc_hash::FxHashMap;

use super::rules::Combination;
use super::space::Space;
use crate::judge::audit::basis::form::Form;
use crate::judge::reading::graph::Signal;

/// So often rules are applied to what is added at one time: they might go in circles.
const MAX_STEPS: usize = 1 << 10;

/// A form without its sign.
pub(super) type Key = Box<[Signal]>;

/// The polynomial.
#[derive(Clone, Debug, Default)]
pub(super) struct Polynomial {
    /// What is added everywhere.
    pub(super) constant: u8,
    terms: FxHashMap<Key, u8>,
    /// For each path variable the forms in which it stands.
    by_path: FxHashMap<Signal, BTreeSet<Key>>,
}

impl Polynomial {
    /// Adds `coefficient * form`.
    pub(super) fn add(&mut self, space: &Space, form: &Form, coefficient: u8) {
        let mut open = vec![(form.clone(), coefficient % 8)];
        let mut steps = 0;
        while let Some((form, mut coefficient)) = open.pop() {
            if form.flip {
                // c (1 - f) = c - c f
                self.constant = (self.constant + coefficient) % 8;
                coefficient = (8 - coefficient) % 8;
            }
            let apart = match (&form.terms[..], coefficient) {
                ([], _) | (_, 0) => continue,
                (&[term], 4) => {
                    self.put(space, &[term], 4);
                    continue;
                }
                (terms, 4) => {
                    terms.iter().for_each(|&term| self.put(space, &[term], 4));
                    continue;
                }
                (&[term], _) => space.rules.of_term(term, coefficient),
                (terms, _) => space.rules.of_sum(terms, coefficient),
            };
            steps += 1;
            match apart.filter(|_| steps < MAX_STEPS) {
                Some(Combination { constant, parts }) => {
                    self.constant = (self.constant + constant) % 8;
                    open.extend(parts);
                }
                None => self.put(space, &form.terms, coefficient),
            }
        }
    }

    /// Adds to the coefficient of a form as it stands.
    fn put(&mut self, space: &Space, terms: &[Signal], coefficient: u8) {
        let before = self.terms.get(terms).copied().unwrap_or(0);
        let now = (before + coefficient) % 8;
        if now == 0 || now == 4 && terms.len() > 1 {
            self.remove(space, terms);
            if now == 4 {
                terms.iter().for_each(|&term| self.put(space, &[term], 4));
            }
            return;
        }
        self.terms.insert(terms.into(), now);
        if before == 0 {
            for path in space.paths(terms) {
                self.by_path.entry(path).or_default().insert(terms.into());
            }
        }
    }

    fn remove(&mut self, space: &Space, terms: &[Signal]) -> Option<u8> {
        let coefficient = self.terms.remove(terms)?;
        for path in space.paths(terms) {
            if let Some(keys) = self.by_path.get_mut(&path) {
                keys.remove(terms);
                if keys.is_empty() {
                    self.by_path.remove(&path);
                }
            }
        }
        Some(coefficient)
    }

    /// Takes out every form in which a path variable stands, in their order.
    pub(super) fn take(&mut self, space: &Space, path: Signal) -> Vec<(Form, u8)> {
        let keys: Vec<Key> = self.by_path.get(&path).into_iter().flatten().cloned().collect();
        let taken = keys.into_iter().filter_map(|key| {
            let coefficient = self.remove(space, &key)?;
            Some((Form { terms: key.into_vec(), flip: false }, coefficient))
        });
        taken.collect()
    }

    /// Takes out everything but the constant, in order.
    pub(super) fn take_all(&mut self) -> Vec<(Form, u8)> {
        self.by_path.clear();
        let taken = std::mem::take(&mut self.terms).into_iter();
        let mut taken: Vec<(Form, u8)> =
            taken.map(|(key, coefficient)| (Form { terms: key.into_vec(), flip: false }, coefficient)).collect();
        taken.sort_unstable_by(|(a, _), (b, _)| (a.terms.len(), a).cmp(&(b.terms.len(), b)));
        taken
    }

    /// The opposite phase; no path variable stands in it.
    pub(super) fn negate(&mut self, space: &Space) {
        self.constant = (8 - self.constant) % 8;
        for (form, coefficient) in self.take_all() {
            self.add(space, &form, 8 - coefficient);
        }
    }

    /// Applies the rules that are new.
    pub(super) fn settle(&mut self, space: &mut Space) {
        for key in space.rules.take_fresh() {
            if let Some(coefficient) = self.remove(space, &key) {
                self.add(space, &Form { terms: key.into_vec(), flip: false }, coefficient);
            }
        }
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    fn odd(forms: &[&Form]) -> Form {
        let mut sum = Form::default();
        forms.iter().for_each(|form| sum.add(form));
        sum
    }

    /// Phases by each of the rules against the numbers, over all values of four inputs.
    #[test]
    fn rules_keep_the_sum() {
        let mut random = crate::random::SplitMix64::new(7);
        for _ in 0..200 {
            let mut space = Space::over(4);
            let mut forms: Vec<(Form, u16)> = (0..4)
                .map(|bit| {
                    let values = (0..16u16).filter(|x| x >> bit & 1 == 1).fold(0, |values, x| values | 1 << x);
                    (Form::term(space.graph.bit(bit)), values)
                })
                .collect();
            let (mut sum, mut expected) = (Polynomial::default(), [0u8; 16]);
            for _ in 0..12 {
                let pick = |random: &mut crate::random::SplitMix64| {
                    let (form, values) = forms[random.below(forms.len() as u64) as usize].clone();
                    if random.coin() { (form.negated_if(true), !values) } else { (form, values) }
                };
                let (a, b) = (pick(&mut random), pick(&mut random));
                let made = match random.coin() {
                    true => (odd(&[&a.0, &b.0]), a.1 ^ b.1),
                    false => (space.product(&[a.0, b.0]), a.1 & b.1),
                };
                let coefficient = random.below(8) as u8;
                sum.add(&space, &made.0, coefficient);
                sum.settle(&mut space);
                (0..16).for_each(|x| expected[x] = (expected[x] + coefficient * (made.1 >> x & 1) as u8) % 8);
                forms.push(made);
            }
            let holds = |form: &Form, x: usize| {
                form.terms.iter().fold(form.flip, |value, term| value ^ evaluate(&space, *term, x))
            };
            let mut parts = sum.clone();
            let parts = parts.take_all();
            for (x, expected) in expected.iter().enumerate() {
                let of = parts.iter().filter(|(form, _)| holds(form, x)).map(|(_, coefficient)| *coefficient);
                assert_eq!((sum.constant + of.sum::<u8>() % 8) % 8, *expected);
            }
        }
    }

    fn evaluate(space: &Space, signal: Signal, x: usize) -> bool {
        use crate::judge::reading::graph::Node;
        let operands = space.graph.operands(signal.node());
        let mut of = operands.iter().map(|&operand| evaluate(space, operand, x));
        let value = match space.graph.nodes()[signal.node()] {
            Node::No => false,
            Node::Bit(bit) => x >> bit & 1 == 1,
            Node::All { .. } => of.all(|value| value),
            _ => of.fold(false, |sum, value| sum ^ value),
        };
        value ^ signal.is_negated()
    }
}
