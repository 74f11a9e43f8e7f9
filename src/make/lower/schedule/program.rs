//! Programs: the order in which cells are computed and erased, and what that costs.
//!
//! A program leaves every ancilla as it found it. It is a play of the reversible pebble game (C. H. Bennett, "Time/space
//! trade-offs for reversible computation", SIAM J. Comput. 18:766, 1989) with one more move: at `feedback` a cell whose
//! operands are gone may be measured away in the X basis; where that gave 1, which happens in half of all cases, its sign
//! is applied by computing what it needs once more.

use super::cells::{CellId, Cells};
use super::counter::Groups;
use crate::circuit::Level;
use crate::id::IdVec;
use rustc_hash::FxHashMap;

/// A move.
#[derive(Clone, PartialEq, Eq, Debug)]
pub(in crate::make::lower) enum Move {
    /// Computes a cell into a clean ancilla; what it needs is held.
    Compute(CellId),
    /// Erases a cell; what it needs is held.
    Erase(CellId),
    /// Measures a cell away and, where the outcome was 1, makes these moves, which apply the cell's sign.
    Forget(CellId, Box<[Move]>),
    /// Applies the sign of a cell that is not held; what it needs is.
    Sign(CellId),
    /// Marks the root.
    Mark,
    /// Takes so many clean ancillas for a counter.
    Open(usize),
    /// Adds 1 to the counter, or takes it off, where the group of this size index and place holds.
    Count { size: usize, group: usize, up: bool },
    /// Marks where the counter has counted all groups of this size index.
    MarkCount(usize),
    /// Gives the counter's ancillas back, which are clean.
    Close,
}

/// What a program costs, counted move by move.
#[derive(Clone, Copy, PartialEq, Debug, Default)]
pub(in crate::make::lower) struct Cost {
    /// Ancillas held at once, at most.
    pub(in crate::make::lower) ancillas: usize,
    /// ANDs computed if every measured sign has to be repaired.
    pub(in crate::make::lower) worst: u64,
    /// ANDs computed on average: each measured sign has to be repaired in half of all cases.
    pub(in crate::make::lower) expected: f64,
    /// ANDs erased with their operands at hand.
    pub(in crate::make::lower) erased: u64,
}

/// Which ANDs are paid for.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub(in crate::make::lower) enum Pay {
    /// Erasing is free, and signs are repaired in half of all cases.
    Expected,
    /// Erasing is free, and all signs are repaired.
    Worst,
    /// Erasing costs what computing does; there is no measurement.
    Unitary,
}

impl Pay {
    pub(in crate::make::lower) fn at(level: Level) -> Self {
        if level == Level::Feedback { Self::Expected } else { Self::Unitary }
    }
}

impl Cost {
    /// What is paid, in ANDs.
    pub(in crate::make::lower) fn paid(&self, pay: Pay) -> f64 {
        match pay {
            Pay::Expected => self.expected,
            Pay::Worst => self.worst as f64,
            Pay::Unitary => (self.worst + self.erased) as f64,
        }
    }
}

/// Appends the moves backwards: it undoes what they did. There is no measurement among them.
pub(in crate::make::lower) fn backwards(moves: &[Move]) -> impl Iterator<Item = Move> + '_ {
    moves.iter().rev().map(|step| match step {
        Move::Compute(cell) => Move::Erase(*cell),
        Move::Erase(cell) => Move::Compute(*cell),
        other => unreachable!("{other:?} is not undone"),
    })
}

/// The program for cells that several parts of it compute: what is held already is not computed once more, and it is
/// erased when the last part that asked for it lets it go. It holds all that the given one would hold, and no more.
pub(in crate::make::lower) fn shared(moves: Vec<Move>) -> Vec<Move> {
    let mut asked: FxHashMap<CellId, usize> = FxHashMap::default();
    share(moves, &mut asked)
}

fn share(moves: Vec<Move>, asked: &mut FxHashMap<CellId, usize>) -> Vec<Move> {
    let mut kept = Vec::with_capacity(moves.len());
    for step in moves {
        match step {
            Move::Compute(cell) => {
                let count = asked.entry(cell).or_insert(0);
                *count += 1;
                kept.extend((*count == 1).then_some(Move::Compute(cell)));
            }
            Move::Erase(cell) | Move::Forget(cell, _) => {
                let count = asked.entry(cell).or_insert(1);
                *count -= 1;
                if *count == 0 {
                    kept.push(match step {
                        Move::Forget(_, repair) => Move::Forget(cell, share(repair.into_vec(), asked).into()),
                        other => other,
                    });
                }
            }
            other => kept.push(other),
        }
    }
    kept
}

/// Counts the moves, and checks that each is allowed where it stands and that nothing is held in the end.
pub(in crate::make::lower) fn cost(cells: &Cells, moves: &[Move]) -> Result<Cost, String> {
    let mut player =
        Player { cells, held: vec![false; cells.list.len()].into(), now: 0, counter: 0, cost: Cost::default() };
    player.play(moves, 1.0)?;
    match player.now {
        0 => Ok(player.cost),
        left => Err(format!("{left} cells are left")),
    }
}

struct Player<'a> {
    cells: &'a Cells,
    held: IdVec<CellId, bool>,
    now: usize,
    /// The bits of the counter.
    counter: usize,
    cost: Cost,
}

impl Player<'_> {
    fn play(&mut self, moves: &[Move], chance: f64) -> Result<(), String> {
        for step in moves {
            match step {
                Move::Compute(cell) => {
                    self.needs_held(*cell)?;
                    if std::mem::replace(&mut self.held[*cell], true) {
                        return Err(format!("{cell} is computed twice"));
                    }
                    self.hold(1);
                    self.cost.worst += 1;
                    self.cost.expected += chance;
                }
                Move::Erase(cell) => {
                    self.needs_held(*cell)?;
                    self.drop(*cell)?;
                    self.cost.erased += 1;
                }
                Move::Forget(cell, repair) => {
                    self.drop(*cell)?;
                    let before = self.now;
                    self.play(repair, chance / 2.0)?;
                    if self.now != before {
                        return Err(format!("the repair of {cell} holds another number of cells"));
                    }
                }
                Move::Sign(cell) => self.needs_held(*cell)?,
                Move::Open(bits) => {
                    self.counter = *bits;
                    self.hold(*bits);
                }
                Move::Close => self.now -= std::mem::take(&mut self.counter),
                Move::Count { size, group, .. } => {
                    let form = &self.cells.groups[*size].list[*group].form;
                    let missing = form.cells.iter().find(|&&cell| !self.held[cell]);
                    missing.map_or(Ok(()), |cell| Err(format!("{cell} is counted and not held")))?;
                    self.gather(Groups::bits(group + 1) - 1, chance);
                }
                Move::MarkCount(_) => {
                    let direct = self.cells.direct().count();
                    self.gather(self.counter - 1 - direct, chance);
                }
                Move::Mark => {
                    let missing = self.cells.marked_from().into_iter().find(|&cell| !self.held[cell]);
                    missing.map_or(Ok(()), |cell| Err(format!("{cell} is not held for marking")))?;
                }
            }
        }
        Ok(())
    }

    fn hold(&mut self, more: usize) {
        self.now += more;
        self.cost.ancillas = self.cost.ancillas.max(self.now);
    }

    /// So many ANDs in a row, erased again.
    fn gather(&mut self, ands: usize, chance: f64) {
        self.hold(ands);
        self.now -= ands;
        self.cost.worst += ands as u64;
        self.cost.expected += chance * ands as f64;
        self.cost.erased += ands as u64;
    }

    fn needs_held(&self, cell: CellId) -> Result<(), String> {
        let missing = self.cells.list[cell].needs.iter().find(|&&needed| !self.held[needed]);
        missing.map_or(Ok(()), |needed| Err(format!("{cell} needs {needed}, which is not held")))
    }

    fn drop(&mut self, cell: CellId) -> Result<(), String> {
        if !std::mem::replace(&mut self.held[cell], false) {
            return Err(format!("{cell} is not held"));
        }
        self.now -= 1;
        Ok(())
    }
}
