//! The table of chunk sizes: how to split a conjunction of alike units when so many ancillas are free.
//!
//! A chain gathers units (a conjunct with its link). Computing the last link of *n* units from the link before them with
//! *p* free ancillas splits into a chunk whose link is held and the rest, which has one ancilla less; the held link is
//! erased at last. This is the recursion of E. Knill, "An analysis of Bennett's pebble game" (1995), with two additions:
//! at `feedback` a held link is measured away and repaired in half of all cases, and a single unit may keep its conjunct
//! or all of its cells beside the link, which makes erasing it cheaper.
//!
//! Chunk sizes are tried up to [`DENSE`] and then on a geometric grid.

use super::program::Pay;

/// Every chunk size up to this one is tried; beyond it sizes grow by a tenth.
const DENSE: usize = 64;

/// How a held chunk is erased.
#[derive(Clone, Copy, PartialEq, Debug)]
pub(in crate::make::lower) enum Game {
    /// By measurement; with this chance the sign has to be repaired.
    Measured(f64),
    /// By computing it backwards.
    Unitary,
}

impl Game {
    pub(in crate::make::lower) fn of(pay: Pay) -> Self {
        match pay {
            Pay::Expected => Self::Measured(0.5),
            Pay::Worst => Self::Measured(1.0),
            Pay::Unitary => Self::Unitary,
        }
    }
}

/// A unit: how many cells it has on average, its link included, and how many ancillas it takes at most.
#[derive(Clone, Copy, PartialEq, Debug)]
pub(in crate::make::lower) struct Unit {
    pub(in crate::make::lower) cells: f64,
    pub(in crate::make::lower) room: usize,
}

/// What is held of a chunk besides what was held before it.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub(in crate::make::lower) enum Hold {
    /// The last link.
    Link,
    /// The link and the conjunct; the chunk is one unit.
    Conjunct,
    /// All cells; the chunk is one unit.
    All,
}

/// The first chunk of a range.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub(in crate::make::lower) struct Choice {
    pub(in crate::make::lower) units: u32,
    pub(in crate::make::lower) hold: Hold,
}

/// Costs and choices for up to `units` units and `room` ancillas.
pub(in crate::make::lower) struct Table {
    pub(in crate::make::lower) game: Game,
    unit: Unit,
    room: usize,
    /// To compute the last link, with the result in one of the ancillas.
    make: Vec<(f32, Choice)>,
    /// To apply the sign of the last link.
    sign: Vec<(f32, Choice)>,
}

const ONE: Choice = Choice { units: 1, hold: Hold::Link };

impl Table {
    pub(in crate::make::lower) fn new(units: usize, room: usize, unit: Unit, game: Game) -> Self {
        let empty = vec![(f32::INFINITY, ONE); (units + 1) * (room + 1)];
        let mut table = Self { game, unit, room, make: empty.clone(), sign: empty };
        let sizes = sizes(units);
        for n in 1..=units {
            for p in 1..=room {
                let at = table.at(n, p);
                table.make[at] = table.best(n, p, &sizes, true);
                // The sign of a chunk is used by the next larger one only, so it may use the links just computed.
                table.sign[at] = table.best(n, p, &sizes, false);
            }
        }
        table
    }

    fn at(&self, units: usize, room: usize) -> usize {
        units * (self.room + 1) + room
    }

    pub(in crate::make::lower) fn make(&self, units: usize, room: usize) -> Choice {
        self.make[self.at(units, room.min(self.room))].1
    }

    pub(in crate::make::lower) fn sign(&self, units: usize, room: usize) -> Choice {
        self.sign[self.at(units, room.min(self.room))].1
    }

    /// What the sign of so many units costs.
    pub(in crate::make::lower) fn sign_cost(&self, units: usize, room: usize) -> f64 {
        f64::from(self.sign[self.at(units, room.min(self.room))].0)
    }

    /// The largest room there are entries for.
    pub(in crate::make::lower) fn room(&self) -> usize {
        self.room
    }

    fn best(&self, n: usize, p: usize, sizes: &[usize], make: bool) -> (f32, Choice) {
        if n == 1 {
            return (self.single(p, make), ONE);
        }
        let table = if make { &self.make } else { &self.sign };
        let rest = |units: usize, held: usize| match p.checked_sub(held) {
            Some(left) => table[self.at(n - units, left)].0,
            None => f32::INFINITY,
        };
        // While the chunk is erased, the result of the rest may be held.
        let left = if make { p - 1 } else { p };
        let mut best = (f32::INFINITY, ONE);
        let mut offer = |cost: f32, choice: Choice| {
            if cost < best.0 {
                best = (cost, choice);
            }
        };
        for &units in sizes.iter().take_while(|&&units| units < n) {
            let cost = self.make[self.at(units, p)].0 + rest(units, 1) + self.erase(units, left);
            offer(cost, Choice { units: units as u32, hold: Hold::Link });
        }
        for hold in [Hold::Conjunct, Hold::All] {
            if p >= self.unit.room {
                offer(self.hold_cost(hold) + rest(1, self.held(hold)), Choice { units: 1, hold });
            }
        }
        best
    }

    fn single(&self, p: usize, make: bool) -> f32 {
        let cells = self.unit.cells - if make { 0.0 } else { 1.0 };
        let room = self.unit.room - usize::from(!make);
        if p < room {
            return f32::INFINITY;
        }
        match (self.game, make) {
            (Game::Measured(_), _) => cells as f32,
            (Game::Unitary, true) => 2.0 * cells as f32 - 1.0,
            (Game::Unitary, false) => 2.0 * cells as f32,
        }
    }

    fn erase(&self, units: usize, p: usize) -> f32 {
        match self.game {
            Game::Measured(chance) => chance as f32 * self.sign[self.at(units, p)].0,
            Game::Unitary => self.make[self.at(units, p)].0,
        }
    }

    /// How many ancillas a held unit takes.
    pub(in crate::make::lower) fn held(&self, hold: Hold) -> usize {
        match hold {
            Hold::Link => 1,
            Hold::Conjunct => 2,
            Hold::All => (self.unit.cells.ceil() as usize).max(1),
        }
    }

    /// What computing and erasing a held unit costs.
    pub(in crate::make::lower) fn hold_cost(&self, hold: Hold) -> f32 {
        let cells = self.unit.cells;
        let inner = (cells - 2.0).max(0.0);
        let cost = match (self.game, hold) {
            (Game::Measured(_), Hold::All) => cells,
            (Game::Measured(chance), Hold::Conjunct) => cells + chance * inner,
            (Game::Measured(chance), Hold::Link) => cells + chance * (cells - 1.0),
            (Game::Unitary, Hold::All) => 2.0 * cells,
            (Game::Unitary, Hold::Conjunct) => 2.0 * (cells + inner),
            (Game::Unitary, Hold::Link) => 2.0 * (2.0 * cells - 1.0),
        };
        cost as f32
    }
}

/// The chunk sizes to try.
fn sizes(units: usize) -> Vec<usize> {
    let mut sizes: Vec<usize> = (1..units.min(DENSE)).collect();
    let mut size = DENSE;
    while size < units {
        sizes.push(size);
        size += size / 10;
    }
    sizes
}
