//! The counter: one more, or one less, where a form holds.
//!
//! The carries are ANDs in clean ancillas: carry *i* is the AND of the bits up to *i* with the form. Adding computes them
//! upwards, then, from the top, flips each bit by the carry below it and erases that carry while the bit it was computed
//! from is still as it was. Taking off is the same backwards.

use std::cmp::Reverse;

use super::super::conjugation::conjugate;
use super::super::schedule::cells::Form;
use super::Writer;
use crate::circuit::{Control, Op, QubitId};

impl Writer<'_> {
    /// Counts over the lowest `bits` bits of the counter.
    pub(super) fn count(&mut self, form: &Form, bits: usize, up: bool) {
        let found = conjugate(vec![self.operand(form)]);
        if found.contradictory {
            return;
        }
        found.cnots.iter().for_each(|&(source, target)| self.pen().cx(source, target));
        match found.controls.first() {
            Some(control) => {
                (0..usize::from(control.is_negated())).for_each(|_| self.pen().push(Op::X, &[], control.qubit()));
                self.step(control.qubit(), bits, up);
                (0..usize::from(control.is_negated())).for_each(|_| self.pen().push(Op::X, &[], control.qubit()));
            }
            // A form that always holds would be no conjunct.
            None => unreachable!("a conjunct is not constant"),
        }
        found.cnots.iter().rev().for_each(|&(source, target)| self.pen().cx(source, target));
    }

    fn step(&mut self, one: QubitId, bits: usize, up: bool) {
        let bit = |writer: &Self, at: usize| writer.counter[at];
        let carries: Vec<QubitId> = (1..bits).map(|_| self.take()).collect();
        let below = |at: usize| if at == 0 { one } else { carries[at - 1] };
        let operands = |writer: &Self, at: usize| [Control::on(below(at)), Control::on(bit(writer, at))];
        if up {
            for (at, &carry) in carries.iter().enumerate() {
                let operands = operands(self, at);
                self.pen().and(&operands, carry);
            }
            for (at, &carry) in carries.iter().enumerate().rev() {
                let (target, operands) = (bit(self, at + 1), operands(self, at));
                let outcome = self.outcomes.next();
                self.pen().cx(carry, target);
                self.pen().erase(&operands, carry, outcome);
            }
            let lowest = bit(self, 0);
            self.pen().cx(one, lowest);
        } else {
            let lowest = bit(self, 0);
            self.pen().cx(one, lowest);
            for (at, &carry) in carries.iter().enumerate() {
                let (target, operands) = (bit(self, at + 1), operands(self, at));
                self.pen().and(&operands, carry);
                self.pen().cx(carry, target);
            }
            for (at, &carry) in carries.iter().enumerate().rev() {
                let operands = operands(self, at);
                let outcome = self.outcomes.next();
                self.pen().erase(&operands, carry, outcome);
            }
        }
        self.free.extend(carries.into_iter().map(Reverse));
    }
}
