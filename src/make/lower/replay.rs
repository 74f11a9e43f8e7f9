//! From a program to a circuit.
//!
//! Input:  cells, and a program over them. Output: the oracle.
//! After:  the ancillas are clean; the gates of a move are those of its level, and no others cost a T gate.
//!
//! A cell sits in whichever ancilla is free when it is computed. The operands of a cell are collected in place by CNOTs
//! ([`conjugation`](super::conjugation)), flipped where they must be 0, used, and put back. What repairs a measured sign
//! is written once, each gate under the condition that the outcome was 1; as an outcome can only be 1 where the repair
//! that measured it was made, one bit is enough for each condition.

use std::cmp::Reverse;
use std::collections::BinaryHeap;

use super::conjugation::{Conjugation, Operand, conjugate};
use super::emit::OUTCOME;
use super::gates::Pen;
use super::plan::keep_odd;
use super::schedule::cells::{CellId, Cells, Form, Term};
use super::schedule::program::Move;
use super::{LowerError, Options, Turn};
use std::f64::consts::PI;
use crate::budget::Budget;
use crate::circuit::{Circuit, Condition, Control, Level, MARK, Mark, MeasuredId, Op, Part, QubitId, SEARCH, WORK};
use crate::id::{ConstraintId, IdVec};

/// How many moves are written between two looks at the clock.
const MOVES_BETWEEN_LOOKS: usize = 1024;

/// What is done where the root holds.
#[derive(Clone, Copy, PartialEq, Debug)]
pub(super) enum Marking {
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
    pub(super) fn of(mark: Mark) -> Self {
        if mark == Mark::Bit { Self::Toggle } else { Self::Sign }
    }

    fn register(self) -> Option<&'static str> {
        match self {
            Self::Toggle => Some(MARK),
            Self::Turn(Turn { controlled: true, .. }) => Some(CONTROL),
            _ => None,
        }
    }

    /// How many ancillas it needs besides those of the program: a turn under a control, unless it is a sign, is a turn
    /// where the AND of root and control holds.
    pub(super) fn qubits(self) -> usize {
        usize::from(matches!(self, Self::Turn(turn) if turn.controlled && turn.angle != PI))
    }
}

/// Writes the oracle of a program over so many searched qubits, with so many ancillas for the program and the marking.
pub(super) fn replay(
    cells: &Cells,
    moves: &[Move],
    (search, ancillas): (usize, usize),
    options: &Options,
    marking: Marking,
    budget: &Budget,
) -> Result<Circuit, LowerError> {
    let mut circuit = Circuit::new();
    let search = circuit.add_qubits(SEARCH, search);
    let mark = marking.register().map(|name| circuit.add_qubits(name, 1)[0]);
    let work = if ancillas > 0 { circuit.add_qubits(WORK, ancillas) } else { Vec::new() };
    work.iter().for_each(|&qubit| circuit.push(Op::Reset, &[], qubit));
    circuit.note(0, Part::Prepare, None);
    let measured = if options.level == Level::Feedback { measured(moves) + marking.qubits() } else { 0 };
    let outcomes = if measured > 0 { circuit.add_measured(OUTCOME, measured) } else { Vec::new() };
    let mut writer = Writer {
        cells,
        circuit,
        level: options.level,
        condition: None,
        search,
        marking,
        mark,
        places: vec![None; cells.list.len()].into(),
        free: work.into_iter().map(Reverse).collect(),
        outcomes: outcomes.into_iter(),
        region: None,
        region_start: ancillas,
        until_look: MOVES_BETWEEN_LOOKS,
    };
    writer.moves(moves, budget)?;
    writer.close_region();
    Ok(writer.circuit)
}

/// How many outcomes the moves measure.
fn measured(moves: &[Move]) -> usize {
    let of = |step: &Move| match step {
        Move::Erase(_) => 1,
        Move::Forget(_, repair) => 1 + measured(repair),
        _ => 0,
    };
    moves.iter().map(of).sum()
}

struct Writer<'a> {
    cells: &'a Cells,
    circuit: Circuit,
    level: Level,
    condition: Option<Condition>,
    search: Vec<QubitId>,
    marking: Marking,
    /// The qubit of the mark or of the control.
    mark: Option<QubitId>,
    /// Where each held cell is.
    places: IdVec<CellId, Option<QubitId>>,
    free: BinaryHeap<Reverse<QubitId>>,
    outcomes: std::vec::IntoIter<MeasuredId>,
    /// What the gates from `region_start` on are for.
    region: Option<(Part, Option<ConstraintId>)>,
    region_start: usize,
    until_look: usize,
}

impl Writer<'_> {
    fn moves(&mut self, moves: &[Move], budget: &Budget) -> Result<(), LowerError> {
        for step in moves {
            self.until_look -= 1;
            if self.until_look == 0 {
                self.until_look = MOVES_BETWEEN_LOOKS;
                if budget.spent() {
                    return Err(LowerError::OutOfTime);
                }
            }
            match step {
                Move::Compute(cell) => self.compute(*cell),
                Move::Erase(cell) => self.erase(*cell),
                Move::Forget(cell, repair) => self.forget(*cell, repair, budget)?,
                Move::Sign(cell) => {
                    self.enter(Part::Undo, self.cells.list[*cell].owner);
                    self.sign(*cell);
                }
                Move::Mark => {
                    self.enter(Part::Mark, None);
                    self.mark()?;
                }
            }
        }
        Ok(())
    }

    fn enter(&mut self, part: Part, owner: Option<ConstraintId>) {
        let part = if self.condition.is_some() { Part::Undo } else { part };
        if self.region != Some((part, owner)) {
            self.close_region();
            self.region = Some((part, owner));
        }
    }

    fn close_region(&mut self) {
        if let Some((part, owner)) = self.region.take() {
            self.circuit.note(self.region_start, part, owner);
        }
        self.region_start = self.circuit.gates().len();
    }

    fn pen(&mut self) -> Pen<'_> {
        Pen { circuit: &mut self.circuit, level: self.level, condition: self.condition }
    }

    fn compute(&mut self, cell: CellId) {
        self.enter(Part::Compute, self.cells.list[cell].owner);
        let Reverse(target) = self.free.pop().expect("the program keeps to its ancillas");
        self.places[cell] = Some(target);
        self.on_operands(cell, |pen, controls| match controls {
            &[one] => copy(pen, one, target),
            controls => pen.and(controls, target),
        });
    }

    fn erase(&mut self, cell: CellId) {
        self.enter(Part::Undo, self.cells.list[cell].owner);
        let target = self.leave(cell);
        let outcome = self.outcomes.next();
        self.on_operands(cell, |pen, controls| match controls {
            &[one] => copy(pen, one, target),
            controls => pen.erase(controls, target, outcome),
        });
    }

    fn forget(&mut self, cell: CellId, repair: &[Move], budget: &Budget) -> Result<(), LowerError> {
        self.enter(Part::Undo, self.cells.list[cell].owner);
        let target = self.leave(cell);
        let outcome = self.outcomes.next().expect("outcomes are counted");
        self.pen().measure_away(target, outcome);
        self.circuit.push(Op::Reset, &[], target);
        let outer = self.condition.replace(Condition::new(outcome, true));
        self.moves(repair, budget)?;
        self.condition = outer;
        Ok(())
    }

    fn leave(&mut self, cell: CellId) -> QubitId {
        let target = self.places[cell].take().expect("the cell is held");
        self.free.push(Reverse(target));
        target
    }

    fn sign(&mut self, cell: CellId) {
        self.on_operands(cell, |pen, controls| pen.sign(controls));
    }

    /// Applies `act` to controls that hold where the cell does; nothing where it never does.
    fn on_operands(&mut self, cell: CellId, act: impl FnOnce(&mut Pen<'_>, &[Control])) {
        let cells = self.cells;
        let operands = cells.list[cell].operands.iter().map(|form| self.operand(form)).collect();
        let Conjugation { cnots, controls, contradictory } = conjugate(operands);
        if contradictory {
            return;
        }
        let flips: Vec<QubitId> = controls.iter().filter(|c| c.is_negated()).map(|c| c.qubit()).collect();
        let controls: Vec<Control> = controls.iter().map(|control| Control::on(control.qubit())).collect();
        // What surrounds the act undoes itself, so it needs no condition.
        let condition = self.condition.take();
        cnots.iter().for_each(|&(source, target)| self.pen().cx(source, target));
        flips.iter().for_each(|&qubit| self.pen().push(Op::X, &[], qubit));
        act(&mut Pen { circuit: &mut self.circuit, level: self.level, condition }, &controls);
        flips.iter().for_each(|&qubit| self.pen().push(Op::X, &[], qubit));
        cnots.iter().rev().for_each(|&(source, target)| self.pen().cx(source, target));
        self.condition = condition;
    }

    fn operand(&self, form: &Form) -> Operand {
        Operand { qubits: self.qubits(form), value: !form.complemented }
    }

    fn qubits(&self, form: &Form) -> Vec<QubitId> {
        let mut qubits: Vec<QubitId> = form.inputs.iter().map(|&at| self.search[at as usize]).collect();
        qubits.extend(form.cells.iter().map(|&cell| self.places[cell].expect("what is needed is held")));
        keep_odd(&mut qubits);
        qubits
    }

    /// Marks: the sign or the mark is flipped once for each term of the root that holds, and once more if the root is
    /// complemented.
    fn mark(&mut self) -> Result<(), LowerError> {
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

/// The target changes where the control, which is on 1, holds.
fn copy(pen: &mut Pen<'_>, control: Control, target: QubitId) {
    pen.cx(control.qubit(), target);
}
