//! Exact schedules of small networks, by satisfiability.
//!
//! Input:  cells in an order in which operands come first, the wanted ones, a number of ancillas, and how many moves are
//!         known to be enough.
//! Output: a shorter way to hold the wanted cells, of the fewest moves; none if there is no shorter one.
//!
//! A variable says whether a cell is held after so many moves; a move changes one cell, whose operands are held. This is
//! the encoding of G. Meuli, M. Soeken, M. Roetteler, N. Bjorner, G. De Micheli, "Reversible pebbling game for quantum
//! memory management", DATE 2019, with one change a step, because each change is paid for. The only question asked is
//! about the order of moves: nothing is asked about the values that cells take.

use super::cells::{CellId, Cells};
use super::program::Move;
use crate::budget::Budget;
use crate::sat::{Answer, Engine, Lit, Varisat};

/// Networks of more cells are left to the other schedules: the engine cannot be stopped, and answers for these at once.
pub(in crate::make::lower) const MOST_CELLS: usize = 7;

/// The fewest moves that hold the wanted cells and possibly others, if they are fewer than `enough`.
pub(in crate::make::lower) fn visit(
    cells: &Cells,
    order: &[CellId],
    wanted: &[CellId],
    room: usize,
    enough: usize,
) -> Option<Vec<Move>> {
    assert!(order.len() <= MOST_CELLS);
    let game = Game::new(cells, order, wanted, room);
    let mut best: Option<Vec<Move>> = None;
    loop {
        let fewer = best.as_ref().map_or(enough, Vec::len).checked_sub(1)?;
        match game.play(fewer) {
            Some(moves) => best = Some(moves),
            None => return best,
        }
    }
}

struct Game<'a> {
    order: &'a [CellId],
    /// For each place the places that it needs.
    needs: Vec<Vec<usize>>,
    wanted: Vec<usize>,
    room: usize,
}

impl<'a> Game<'a> {
    fn new(cells: &Cells, order: &'a [CellId], wanted: &[CellId], room: usize) -> Self {
        let place = |cell: &CellId| order.iter().position(|other| other == cell);
        let needs = order.iter().map(|&cell| cells.list[cell].needs.iter().filter_map(place).collect()).collect();
        Self { order, needs, wanted: wanted.iter().filter_map(place).collect(), room }
    }

    /// A play of at most so many moves.
    fn play(&self, moves: usize) -> Option<Vec<Move>> {
        let n = self.order.len();
        let held = |at: usize, cell: usize| at * n + cell;
        let changed = |at: usize, cell: usize| (moves + 1) * n + at * n + cell;
        let mut engine = Varisat::local();
        for cell in 0..n {
            engine.add_clause(&[Lit::new(held(0, cell), false)]);
        }
        for &cell in &self.wanted {
            engine.add_clause(&[Lit::new(held(moves, cell), true)]);
        }
        for at in 0..moves {
            for cell in 0..n {
                let (before, after) = (held(at, cell), held(at + 1, cell));
                for value in [false, true] {
                    let change = Lit::new(changed(at, cell), true);
                    engine.add_clause(&[Lit::new(before, value), Lit::new(after, !value), change]);
                    engine.add_clause(&[Lit::new(before, value), Lit::new(after, value), !change]);
                }
                let not_changed = Lit::new(changed(at, cell), false);
                for &need in &self.needs[cell] {
                    engine.add_clause(&[not_changed, Lit::new(held(at, need), true)]);
                }
                for other in 0..cell {
                    engine.add_clause(&[not_changed, Lit::new(changed(at, other), false)]);
                }
                if at + 1 < moves {
                    // Who rests has finished.
                    let earlier = (0..n).map(|other| Lit::new(changed(at, other), true));
                    let clause: Vec<Lit> = earlier.chain([Lit::new(changed(at + 1, cell), false)]).collect();
                    engine.add_clause(&clause);
                }
            }
            for too_many in subsets(n, self.room + 1) {
                let clause: Vec<Lit> = too_many.into_iter().map(|cell| Lit::new(held(at + 1, cell), false)).collect();
                engine.add_clause(&clause);
            }
        }
        if engine.solve(&[], &Budget::unlimited()) != Answer::Sat {
            return None;
        }
        let moved = |at: usize| (0..n).find(|&cell| engine.value(changed(at, cell)));
        let step = |(at, cell): (usize, usize)| match engine.value(held(at, cell)) {
            false => Move::Compute(self.order[cell]),
            true => Move::Erase(self.order[cell]),
        };
        Some((0..moves).filter_map(|at| moved(at).map(|cell| (at, cell))).map(step).collect())
    }
}

/// All subsets of so many of `n` places.
fn subsets(n: usize, size: usize) -> Vec<Vec<usize>> {
    let all = (0u32..1 << n).filter(|set| set.count_ones() as usize == size);
    all.map(|set| (0..n).filter(|at| set >> at & 1 == 1).collect()).collect()
}
