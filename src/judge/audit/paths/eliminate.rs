//! Summing over path variables.
//!
//! Where no qubit depends on a path variable `y`, the sum over it is a factor. With the phase as `P + y D`:
//!
//! - `D = 0`: the factor is 2;
//! - `D = 2 + 4 Q`: it is sqrt(2) times a phase, `1 - 2 Q`; likewise `D = 6 + 4 Q`;
//! - `D = 4 Q`: only what makes `Q` even is left, so a path variable that stands in `Q` alone has a value.
//!
//! These are the rules of M. Amy, "Towards Large-scale Functional Verification of Universal Quantum Circuits", QPL 2018,
//! arXiv:1805.06908 (elimination, the rule for i, and that for two Hadamard gates; from memory). Differences: `D` is brought
//! to such a form by taking exclusive ors apart, where the paper matches polynomials; and what is put for a variable is a
//! node of the graph, however large the function.

use super::reader::Reader;
use super::sign::{Sign, sign_of_sum};
use crate::judge::audit::basis::form::Form;
use crate::judge::reading::graph::Signal;

/// As many sums that wait are tried again whenever another one is closed.
const MOST_RETRIED: usize = 16;

impl Reader<'_> {
    /// Sums over a variable on which no qubit depends, and over those that wait; what cannot be summed over waits.
    pub(super) fn sum(&mut self, path: Signal) {
        if !self.try_sum(path) {
            self.waiting.push(path);
        } else if self.waiting.len() <= MOST_RETRIED {
            self.sum_all();
        }
    }

    /// Sums over the variables that wait, until no more can be.
    pub(super) fn sum_all(&mut self) {
        let mut has_changed = true;
        while has_changed {
            has_changed = false;
            for path in std::mem::take(&mut self.waiting) {
                match self.try_sum(path) {
                    true => has_changed = true,
                    false => self.waiting.push(path),
                }
            }
        }
    }

    fn try_sum(&mut self, path: Signal) -> bool {
        let is_held = self.holders.contains_key(&path);
        if is_held || self.angles.iter().any(|(_, form)| self.space.paths(&form.terms).any(|other| other == path)) {
            return false;
        }
        let taken = self.phase.take(&self.space, path);
        let (mut rest, mut factor) = (Vec::new(), Vec::new());
        for (form, coefficient) in &taken {
            let (without, other) = self.space.cofactors(form, path);
            let mut with = without.clone();
            with.add(&other);
            factor.push((with, *coefficient));
            factor.push((without.clone(), (8 - coefficient) % 8));
            rest.push((without, *coefficient));
        }
        let sign = sign_of_sum(&mut self.space, &factor);
        self.phase.settle(&mut self.space);
        // The rest is part of the phase before another variable is given a value.
        rest.iter().for_each(|(form, coefficient)| self.phase.add(&self.space, form, *coefficient));
        let is_closed = sign.is_ok_and(|sign| self.close(path, sign));
        if !is_closed {
            rest.iter().for_each(|(form, coefficient)| self.phase.add(&self.space, form, 8 - coefficient));
            taken.iter().for_each(|(form, coefficient)| self.phase.add(&self.space, form, *coefficient));
        }
        is_closed
    }

    /// Sums where the phase is `... + y (constant + 4 form)`.
    fn close(&mut self, path: Signal, Sign { constant, mut form }: Sign) -> bool {
        match constant {
            2 | 6 => {
                self.phase.constant = (self.phase.constant + constant / 2 + if constant == 6 { 4 } else { 0 }) % 8;
                self.phase.add(&self.space, &form, 8 - constant);
                true
            }
            0 | 4 => {
                form.flip ^= constant == 4;
                self.require(path, &form)
            }
            _ => false,
        }
    }

    /// Leaves only those paths on which a form is 0.
    fn require(&mut self, path: Signal, form: &Form) -> bool {
        if let Some(solved) = self.linear_path(form, Some(path)) {
            let mut value = form.clone();
            value.add(&Form::term(solved));
            self.put(solved, &value);
            return true;
        }
        if self.space.paths(&form.terms).next().is_some() {
            return false;
        }
        // A function of outcomes alone says which outcomes occur. It must not say so of the input.
        let left = self.independent(form);
        left.as_constant() != Some(true)
    }

    /// Puts a form for a path variable, everywhere.
    pub(super) fn put(&mut self, path: Signal, value: &Form) {
        let taken = self.phase.take(&self.space, path);
        for (form, coefficient) in taken {
            let form = self.space.substitute(&form, path, value);
            self.phase.settle(&mut self.space);
            self.phase.add(&self.space, &form, coefficient);
        }
        for at in 0..self.angles.len() {
            let form = self.space.substitute(&self.angles[at].1, path, value);
            self.angles[at].1 = form;
        }
        let mut left = Vec::new();
        for qubit in self.holders.get(&path).cloned().unwrap_or_default() {
            let form = self.space.substitute(&self.values[qubit], path, value);
            left.extend(self.exchange(qubit, form));
        }
        self.phase.settle(&mut self.space);
        left.retain(|&other| other != path && !self.holders.contains_key(&other));
        left.dedup();
        self.waiting.retain(|&other| other != path);
        self.waiting.extend(left);
    }
}
