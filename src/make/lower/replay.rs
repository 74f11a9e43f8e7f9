//! From a program to a circuit: [`marking`] and [`counting`] have their own files.
//!
//! Input:  cells, and a program over them. Output: the oracle.
//! After:  the ancillas are clean; the gates of a move are those of its level, and no others cost a T gate.
//!
//! A cell sits in whichever ancilla is free when it is computed. The operands of a cell are collected in place by CNOTs
//! ([`conjugation`](super::conjugation)), flipped where they must be 0, used, and put back. What repairs a measured sign
//! is written once, each gate under the condition that the outcome was 1; as an outcome can only be 1 where the repair
//! that measured it was made, one bit is enough for each condition.

mod counting;
mod marking;

pub(super) use marking::Marking;

use std::cmp::Reverse;
use std::collections::BinaryHeap;

use super::conjugation::{Conjugation, Operand, conjugate};
use super::emit::OUTCOME;
use super::gates::Pen;
use super::plan::keep_odd;
use super::schedule::cells::{CellId, Cells, Form};
use super::schedule::counter::Groups;
use super::schedule::program::Move;
use super::{LowerError, Options};
use crate::budget::Budget;
use crate::circuit::{Circuit, Condition, Control, Level, MeasuredId, Op, Part, QubitId, SEARCH, WORK};
use crate::id::{ConstraintId, IdVec};

/// How many moves are written between two looks at the clock.
const MOVES_BETWEEN_LOOKS: usize = 1024;

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
        counter: Vec::new(),
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
        Move::Count { group, .. } => Groups::bits(group + 1) - 1,
        _ => 0,
    };
    // A counter is marked by the AND of its bits.
    let counters = moves.iter().map(|step| if let Move::Open(bits) = step { bits - 1 } else { 0 });
    moves.iter().map(of).chain(counters).sum()
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
    /// The bits of the counter, lowest first.
    counter: Vec<QubitId>,
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
                Move::Open(bits) => self.counter = (0..*bits).map(|_| self.take()).collect(),
                Move::Close => self.free.extend(self.counter.drain(..).map(Reverse)),
                Move::Count { size, group, up } => {
                    let cells = self.cells;
                    let form = &cells.groups[*size].list[*group].form;
                    let owner = form.cells.iter().rev().find_map(|&cell| cells.list[cell].owner);
                    self.enter(if *up { Part::Compute } else { Part::Undo }, owner);
                    self.count(form, Groups::bits(group + 1), *up);
                }
                Move::MarkCount(size) => {
                    self.enter(Part::Mark, None);
                    self.mark_count(self.cells.groups[*size].list.len());
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
        let target = self.take();
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

    fn take(&mut self) -> QubitId {
        self.free.pop().expect("the program keeps to its ancillas").0
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
}

/// The target changes where the control, which is on 1, holds.
fn copy(pen: &mut Pen<'_>, control: Control, target: QubitId) {
    pen.cx(control.qubit(), target);
}
