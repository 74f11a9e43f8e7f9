//! Schedules of a conjunction: chunks of the chain, cut after a [`Table`].
//!
//! Input:  cells with a chain, the cells that are kept all the time, and a number of ancillas.
//! Output: moves that mark the root.
//! After:  the moves are right for units of any size; that they keep to the number of ancillas is for the caller to see,
//!         as the table takes all units for alike.

use super::cells::{CellId, Cells};
use super::line::Line;
use super::program::{Move, backwards, shared};
use super::table::{Choice, Game, Hold, Table, Unit};
use crate::id::IdVec;

/// A link of the chain with what has to be computed for it.
struct Step {
    /// The cells of the conjunct that are not kept, in order.
    inner: Vec<CellId>,
    /// Those of them that the link needs.
    conjunct: Vec<CellId>,
    link: CellId,
}

/// The conjunction of a network, seen as units.
pub(in crate::make::lower) struct Conjunction<'a> {
    cells: &'a Cells,
    /// Held from the beginning to the end; with a cell, all that it needs.
    kept: Vec<CellId>,
    steps: Vec<Step>,
    /// Whether the root's cell is marked by its operands.
    direct: bool,
}

impl<'a> Conjunction<'a> {
    pub(in crate::make::lower) fn new(cells: &'a Cells, kept: Vec<CellId>, direct: bool) -> Self {
        let mut stop: IdVec<CellId, bool> = vec![false; cells.list.len()].into();
        kept.iter().chain(&cells.chain).for_each(|&cell| stop[cell] = true);
        let step = |&link: &CellId| {
            let needs = &cells.list[link].needs;
            let conjunct = needs.iter().copied().filter(|&cell| !stop[cell]).collect();
            Step { inner: cells.cone(needs, |cell| stop[cell]), conjunct, link }
        };
        Self { cells, kept, steps: cells.chain.iter().map(step).collect(), direct }
    }

    /// The units that tables are made for: the average with the room of the largest or its own, and the most frequent.
    pub(in crate::make::lower) fn kinds(&self) -> Vec<Unit> {
        let mut sizes: Vec<usize> = self.steps.iter().map(|step| step.inner.len() + 1).collect();
        sizes.sort_unstable();
        let average = sizes.iter().sum::<usize>() as f64 / sizes.len() as f64;
        let largest = sizes.last().copied().unwrap_or(1);
        let runs = sizes.chunk_by(|a, b| a == b).max_by_key(|run| run.len());
        let usual = runs.map_or(1, |run| run[0]);
        let mut kinds = vec![
            Unit { cells: average, room: largest },
            Unit { cells: average, room: average.ceil() as usize },
            Unit { cells: usual as f64, room: usual },
        ];
        kinds.dedup();
        kinds
    }

    pub(in crate::make::lower) fn kept(&self) -> usize {
        self.kept.len()
    }

    pub(in crate::make::lower) fn units(&self) -> usize {
        self.steps.len()
    }

    /// The moves with `room` ancillas besides those of the kept cells; none if they do not suffice.
    pub(in crate::make::lower) fn schedule(&self, table: &Table, room: usize) -> Option<Vec<Move>> {
        let mut writer = Writer { conjunction: self, table, moves: Vec::new() };
        writer.moves.extend(self.kept.iter().map(|&cell| Move::Compute(cell)));
        writer.whole(room)?;
        writer.moves.extend(self.kept.iter().rev().map(|&cell| Move::Erase(cell)));
        Some(shared(writer.moves))
    }
}

/// How the last unit of a range ends.
#[derive(Clone, Copy, PartialEq, Eq)]
enum End {
    /// The sign of the last link.
    Sign,
    /// The mark of the root.
    Mark,
}

struct Writer<'a> {
    conjunction: &'a Conjunction<'a>,
    table: &'a Table,
    moves: Vec<Move>,
}

impl Writer<'_> {
    /// All units. Beyond the table's room the first ones are held whole or with their conjuncts.
    fn whole(&mut self, room: usize) -> Option<()> {
        let units = self.conjunction.units();
        let (whole, partly, left) = self.spread(units, room)?;
        let held = (0..whole + partly).map(|at| (at, if at < whole { Hold::All } else { Hold::Conjunct }));
        let mut free = room;
        for (at, hold) in held.clone() {
            self.hold(at, hold, free)?;
            free -= self.table.held(hold).min(free);
        }
        self.sign(whole + partly, units, left, End::Mark)?;
        held.rev().try_for_each(|(at, hold)| self.release(at, hold, left))
    }

    /// How many units to hold whole, how many with their conjunct, and the room left for the others.
    fn spread(&self, units: usize, room: usize) -> Option<(usize, usize, usize)> {
        let table = self.table;
        let mut best = (table.sign_cost(units, room), (0, 0, room.min(table.room())));
        if room > table.room() {
            let (all, part) = (table.held(Hold::All), table.held(Hold::Conjunct));
            for whole in 0..=(room / all).min(units - 1) {
                for left in 1..=table.room().min(room - whole * all) {
                    let partly = ((room - whole * all - left) / part).min(units - 1 - whole);
                    let cost = whole as f64 * f64::from(table.hold_cost(Hold::All))
                        + partly as f64 * f64::from(table.hold_cost(Hold::Conjunct))
                        + table.sign_cost(units - whole - partly, left);
                    if cost < best.0 {
                        best = (cost, (whole, partly, left));
                    }
                }
            }
        }
        best.0.is_finite().then_some(best.1)
    }

    /// Computes the last link of a range; the link before it is held.
    fn make(&mut self, from: usize, to: usize, room: usize) -> Option<()> {
        if to - from == 1 {
            return self.hold(from, Hold::Link, room);
        }
        let Choice { units, hold } = self.table.make(to - from, room);
        let middle = from + units as usize;
        self.first(from, middle, hold, room)?;
        self.make(middle, to, room.checked_sub(self.table.held(hold))?)?;
        self.erase_first(from, middle, hold, room.checked_sub(1)?)
    }

    /// Applies the sign of the last link of a range, or marks the root; the link before the range is held.
    fn sign(&mut self, from: usize, to: usize, room: usize, end: End) -> Option<()> {
        if to - from == 1 {
            return self.sign_one(from, room, end);
        }
        let Choice { units, hold } = self.table.sign(to - from, room);
        let middle = from + units as usize;
        self.first(from, middle, hold, room)?;
        self.sign(middle, to, room.checked_sub(self.table.held(hold))?, end)?;
        self.erase_first(from, middle, hold, room)
    }

    fn first(&mut self, from: usize, to: usize, hold: Hold, room: usize) -> Option<()> {
        if to - from == 1 { self.hold(from, hold, room) } else { self.make(from, to, room) }
    }

    fn erase_first(&mut self, from: usize, to: usize, hold: Hold, room: usize) -> Option<()> {
        if to - from == 1 && hold != Hold::Link {
            return self.release(from, hold, room);
        }
        let mut inner = Writer { conjunction: self.conjunction, table: self.table, moves: Vec::new() };
        match self.table.game {
            Game::Measured(_) => {
                inner.sign(from, to, room, End::Sign)?;
                let link = self.conjunction.steps[to - 1].link;
                self.moves.push(Move::Forget(link, inner.moves.into()));
            }
            Game::Unitary => {
                inner.make(from, to, room)?;
                self.moves.extend(backwards(&inner.moves));
            }
        }
        Some(())
    }

    fn sign_one(&mut self, at: usize, room: usize, end: End) -> Option<()> {
        let Step { inner, link, .. } = &self.conjunction.steps[at];
        let held_root = end == End::Mark && !self.conjunction.direct;
        let mut order = inner.clone();
        order.extend(held_root.then_some(*link));
        let goal = if held_root { vec![*link] } else { self.conjunction.steps[at].conjunct.clone() };
        let start = self.moves.len();
        self.reach(&order, &goal, room)?;
        let moves = self.moves[start..].to_vec();
        self.moves.push(if end == End::Mark { Move::Mark } else { Move::Sign(*link) });
        self.moves.extend(backwards(&moves));
        Some(())
    }

    /// Computes cells in order, some of which may be gone in the end, but not those of `goal`.
    fn reach(&mut self, order: &[CellId], goal: &[CellId], room: usize) -> Option<()> {
        if order.len() <= room {
            self.moves.extend(order.iter().map(|&cell| Move::Compute(cell)));
            return Some(());
        }
        self.moves.extend(Line::new(self.conjunction.cells, order, goal).visit(room)?);
        Some(())
    }

    /// Computes one unit and holds this of it.
    fn hold(&mut self, at: usize, hold: Hold, room: usize) -> Option<()> {
        let Step { inner, conjunct, link } = &self.conjunction.steps[at];
        if hold == Hold::Link && inner.len() + 1 > room {
            let order: Vec<CellId> = inner.iter().copied().chain([*link]).collect();
            self.moves.extend(Line::new(self.conjunction.cells, &order, &[*link]).clean(room)?);
            return Some(());
        }
        self.moves.extend(inner.iter().chain([link]).map(|&cell| Move::Compute(cell)));
        let gone = |cell: &&CellId| match hold {
            Hold::All => false,
            Hold::Conjunct => !conjunct.contains(cell),
            Hold::Link => true,
        };
        self.moves.extend(inner.iter().rev().filter(gone).map(|&cell| Move::Erase(cell)));
        Some(())
    }

    /// Erases a unit of which this is held.
    fn release(&mut self, at: usize, hold: Hold, room: usize) -> Option<()> {
        let Step { inner, conjunct, link } = &self.conjunction.steps[at];
        self.moves.push(Move::Erase(*link));
        if hold == Hold::All {
            self.moves.extend(inner.iter().rev().map(|&cell| Move::Erase(cell)));
            return Some(());
        }
        for (place, &cell) in conjunct.iter().enumerate().rev() {
            let held = &conjunct[..place];
            let needed: Vec<CellId> = inner.iter().copied().filter(|other| *other < cell).collect();
            let cone = self.conjunction.cells.cone(&self.conjunction.cells.list[cell].needs, |other| {
                needed.binary_search(&other).is_err() || held.contains(&other)
            });
            self.erase_with(cell, &cone, room)?;
        }
        Some(())
    }

    /// Erases a cell for which these have to be computed.
    fn erase_with(&mut self, cell: CellId, cone: &[CellId], room: usize) -> Option<()> {
        if cone.is_empty() {
            self.moves.push(Move::Erase(cell));
            return Some(());
        }
        let mut inner = Writer { conjunction: self.conjunction, table: self.table, moves: Vec::new() };
        inner.reach(cone, &self.conjunction.cells.list[cell].needs, room)?;
        let back: Vec<Move> = backwards(&inner.moves).collect();
        if matches!(self.table.game, Game::Measured(_)) {
            inner.moves.push(Move::Sign(cell));
            inner.moves.extend(back);
            self.moves.push(Move::Forget(cell, inner.moves.into()));
        } else {
            self.moves.append(&mut inner.moves);
            self.moves.push(Move::Erase(cell));
            self.moves.extend(back);
        }
        Some(())
    }
}
