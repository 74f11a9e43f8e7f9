//! Schedules with a counter: the fewest ancillas for a long conjunction.
//!
//! Input:  cells with a chain, and a number of ancillas.
//! Output: moves that count the groups of conjuncts that hold in a binary counter, mark where all do, and count back.
//!
//! A group is computed, added, and erased before the next one begins, so nothing but the counter is held between groups.
//! After j groups the counter is at most j, so adding the next one moves as many bits as j + 1 has: one AND for each but
//! the first (a chain of carries, erased on the way back).

use super::cells::{CellId, Cells, Form};
use super::line::Line;
use super::program::{Move, backwards};

/// How many conjuncts may form a group.
const SIZES: [usize; 10] = [1, 2, 3, 4, 5, 6, 8, 10, 12, 16];

/// Groups of more cells are not tried with fewer ancillas than cells: smaller groups do better.
const RECOMPUTED: usize = 12;

/// Conjuncts that are counted as one.
pub(in crate::make::lower) struct Group {
    /// What must hold.
    pub(in crate::make::lower) form: Form,
}

/// The groups of one size.
pub(in crate::make::lower) struct Groups {
    pub(in crate::make::lower) list: Vec<Group>,
}

impl Groups {
    /// The bits of a counter that holds so many.
    pub(in crate::make::lower) fn bits(count: usize) -> usize {
        (usize::BITS - count.leading_zeros()) as usize
    }
}

/// Appends to the cells those that gather groups of each size.
pub(in crate::make::lower) fn group(cells: &mut Cells) {
    // The counter marks where all hold, not where one fails.
    if cells.items.len() < 4 || cells.root_complemented {
        return;
    }
    let conjuncts = cells.items.len();
    for size in SIZES.into_iter().filter(|&size| size * 2 <= conjuncts) {
        let mut list = Vec::new();
        for start in (0..cells.items.len()).step_by(size) {
            let end = (start + size).min(cells.items.len());
            let mut form = cells.items[start].clone();
            for at in start + 1..end {
                let item = cells.items[at].clone();
                form = cells.push_and([form, item]);
            }
            list.push(Group { form });
        }
        cells.groups.push(Groups { list });
    }
}

/// The moves for the groups of one size with this many ancillas; none if they do not suffice.
pub(in crate::make::lower) fn schedule(cells: &Cells, size: usize, room: usize) -> Option<Vec<Move>> {
    let groups = &cells.groups[size].list;
    let bits = Groups::bits(groups.len());
    // While a group is added the carries are held too.
    let left = room.checked_sub(2 * bits - 1)?;
    // Marking gathers the bits.
    room.checked_sub(bits + bits.saturating_sub(1))?;
    let mut moves = vec![Move::Open(bits)];
    let mut back = Vec::new();
    for (at, group) in groups.iter().enumerate() {
        let needed = &group.form.cells;
        let order: Vec<CellId> = cells.cone(needed, |_| false);
        let there = if order.len() <= left {
            order.iter().map(|&cell| Move::Compute(cell)).collect()
        } else if order.len() <= RECOMPUTED {
            Line::new(cells, &order, needed).visit(left)?
        } else {
            return None;
        };
        let away: Vec<Move> = backwards(&there).collect();
        let whole = |up| {
            let count = Move::Count { size, group: at, up };
            there.iter().cloned().chain([count]).chain(away.iter().cloned()).collect::<Vec<Move>>()
        };
        moves.extend(whole(true));
        back.push(whole(false));
    }
    moves.push(Move::MarkCount(size));
    moves.extend(back.into_iter().rev().flatten());
    moves.push(Move::Close);
    Some(moves)
}
