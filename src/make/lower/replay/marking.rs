//! Marking: the sign, the mark, or a turn of the phase, where the root holds.

use std::cmp::Reverse;
use std::f64::consts::PI;

use super::super::plan::keep_odd;
use super::super::schedule::cells::{Form, Term};
use super::super::{LowerError, Turn};
use super::{Writer, copy};
use crate::circuit::{Control, Level, MARK, Mark, Op, QubitId};

/// What is done where the root holds.
#[derive(Clone, Copy, PartialEq, Debug)]
pub(in crate::make::lower) enum Marking {
    /// The sign is flipped.
    Sign,
    /// The mark is flipped.
    Toggle,
    /// The phase is turned; the root is held.
    Turn(Turn),
}

/// The name of the register of the control.
const CONTROL: &str = "control";

impl Marking {
    pub(in crate::make::lower) fn of(mark: Mark) -> Self {
        if mark == Mark::Bit { Self::Toggle } else { Self::Sign }
    }

    pub(super) fn register(self) -> Option<&'static str> {
        match self {
            Self::Toggle => Some(MARK),
            Self::Turn(Turn { controlled: true, .. }) => Some(CONTROL),
            _ => None,
        }
    }

    /// How many ancillas it needs besides those of the program: a turn under a control, unless it is a sign, is a turn
    /// where the AND of root and control holds.
    pub(in crate::make::lower) fn qubits(self) -> usize {
        usize::from(matches!(self, Self::Turn(turn) if turn.controlled && turn.angle != PI))
    }
}

impl Writer<'_> {
    /// Marks: the sign or the mark is flipped once for each term of the root that holds, and once more if the root is
    /// complemented.
    pub(super) fn mark(&mut self) -> Result<(), LowerError> {
        let cells = self.cells;
        if let Marking::Turn(turn) = self.marking {
            self.turn(turn);
            return Ok(());
        }
        let mut complemented = cells.root_complemented;
        for term in &cells.terms {
            match (term, self.mark) {
                (Term::Direct(cell), None) => self.sign(*cell),
                (Term::Direct(cell), Some(mark)) => self.on_operands(*cell, |pen, controls| match controls {
                    &[one] => copy(pen, one, mark),
                    controls => pen.toggle(controls, mark),
                }),
                (Term::Held(form), mark) => {
                    complemented ^= form.complemented;
                    for qubit in self.qubits(form) {
                        match mark {
                            Some(mark) => self.pen().cx(qubit, mark),
                            None => self.pen().sign(&[Control::on(qubit)]),
                        }
                    }
                }
            }
        }
        match (complemented, self.mark) {
            (false, _) => {}
            (true, Some(mark)) => self.pen().push(Op::X, &[], mark),
            (true, None) => {
                // Z X Z X = -1, on any qubit.
                let qubit = self.search[0];
                for op in [Op::Z, Op::X, Op::Z, Op::X] {
                    self.pen().push(op, &[], qubit);
                }
            }
        }
        Ok(())
    }

    /// Marks where the counter, whose bits all count, has reached `total`.
    pub(super) fn mark_count(&mut self, total: usize) {
        let bits = self.counter.clone();
        let zeros: Vec<QubitId> =
            bits.iter().enumerate().filter(|(at, _)| total >> at & 1 == 0).map(|(_, &bit)| bit).collect();
        zeros.iter().for_each(|&bit| self.pen().push(Op::X, &[], bit));
        let direct = match self.marking {
            Marking::Sign => true,
            Marking::Toggle => self.level != Level::Feedback,
            Marking::Turn(_) => false,
        };
        let last = bits.len() - usize::from(direct && bits.len() > 1);
        let mut steps: Vec<([Control; 2], QubitId)> = Vec::new();
        let mut gathered = bits[0];
        for &bit in &bits[1..last] {
            let (controls, target) = ([Control::on(gathered), Control::on(bit)], self.take());
            self.pen().and(&controls, target);
            steps.push((controls, target));
            gathered = target;
        }
        let mut controls = vec![Control::on(gathered)];
        controls.extend(bits[last..].iter().map(|&bit| Control::on(bit)));
        match (self.marking, self.mark) {
            (Marking::Turn(turn), _) => self.turn_on(turn, gathered),
            (_, Some(mark)) if controls.len() == 1 => self.pen().cx(gathered, mark),
            (_, Some(mark)) => self.pen().toggle(&controls, mark),
            (_, None) => self.pen().sign(&controls),
        }
        for (controls, target) in steps.into_iter().rev() {
            let outcome = self.outcomes.next();
            self.pen().erase(&controls, target, outcome);
            self.free.push(Reverse(target));
        }
        zeros.iter().for_each(|&bit| self.pen().push(Op::X, &[], bit));
    }
}

/// The turn of a root that is held.
impl Writer<'_> {
    fn turn(&mut self, turn: Turn) {
        let terms: Vec<&Form> = self.cells.terms.iter().filter_map(Term::held).collect();
        let mut qubits: Vec<QubitId> = terms.iter().flat_map(|form| self.qubits(form)).collect();
        keep_odd(&mut qubits);
        let complemented = terms.iter().fold(self.cells.root_complemented, |sum, form| sum ^ form.complemented);
        let Some((&root, others)) = qubits.split_last() else {
            return self.turn_everywhere(turn, complemented);
        };
        others.iter().for_each(|&other| self.pen().cx(other, root));
        (0..usize::from(complemented)).for_each(|_| self.pen().push(Op::X, &[], root));
        self.turn_on(turn, root);
        (0..usize::from(complemented)).for_each(|_| self.pen().push(Op::X, &[], root));
        others.iter().rev().for_each(|&other| self.pen().cx(other, root));
    }

    /// The phase where `root` is 1.
    fn turn_on(&mut self, turn: Turn, root: QubitId) {
        match self.mark {
            None if turn.angle == PI => self.pen().push(Op::Z, &[], root),
            None => self.circuit.push_angle(None, Op::P, turn.angle, &[], root),
            Some(control) if turn.angle == PI => self.pen().push(Op::Z, &[Control::on(control)], root),
            Some(control) => {
                let Reverse(both) = self.free.pop().expect("counted by the marking");
                let controls = [Control::on(control), Control::on(root)];
                let outcome = self.outcomes.next();
                self.pen().and(&controls, both);
                self.circuit.push_angle(None, Op::P, turn.angle, &[], both);
                self.pen().erase(&controls, both, outcome);
                self.free.push(Reverse(both));
            }
        }
    }

    /// A root whose parts cancel is constant: the phase is turned everywhere, or nowhere.
    fn turn_everywhere(&mut self, turn: Turn, holds: bool) {
        if holds {
            let qubit = self.mark.unwrap_or(self.search[0]);
            let times = if self.mark.is_some() { 1 } else { 2 };
            for _ in 0..times {
                self.circuit.push_angle(None, Op::P, turn.angle, &[], qubit);
                (0..times - 1).for_each(|_| self.circuit.push(Op::X, &[], qubit));
            }
        }
    }
}
