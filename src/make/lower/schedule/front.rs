//! The front: for each number of ancillas the cheapest program found.
//!
//! Programs are made for every number of ancillas up to [`DENSE`] and then for numbers that grow by a thirty-second (fewer for
//! large networks), and counted move by move. The list does not depend on what was asked for, so a larger budget never costs more.

use super::cells::{CellId, Cells};
use super::chunks::Conjunction;
use super::counter;
use super::exact;
use super::fixed;
use super::line::Line;
use super::program::{Cost, Move, Pay, backwards, cost};
use super::table::{Game, Table};
use crate::budget::Budget;
use crate::make::lower::LowerError;

/// A counter is tried with at most so many ancillas: it is for the lowest budgets.
const COUNTED: usize = 64;
/// Every number of ancillas up to this one is tried.
const DENSE: usize = 128;
/// With more cells than this has room for, fewer numbers of ancillas are tried.
const MOVES: usize = 2_000_000;
/// In larger networks equal chunks are not tried: there are some eighty sizes, each as long a program as the network.
const MOST_FIXED: usize = 100_000;
/// At most so many places of a line have a table of their own.
const LINE_ROOM: usize = 512;
/// Cells that so many conjuncts share are kept all the time, in one of the trials each.
const SHARED_BY: [u32; 4] = [u32::MAX, 2, 4, 8];

/// A program with its cost.
pub(in crate::make::lower) struct Point {
    pub(in crate::make::lower) cost: Cost,
    pub(in crate::make::lower) moves: Vec<Move>,
}

/// The front, from few ancillas to many; each point costs less than those before it.
pub(in crate::make::lower) fn front(cells: &Cells, pay: Pay, budget: &Budget) -> Result<Vec<Point>, LowerError> {
    let mut found = Front { cells, pay, points: Vec::new() };
    let order = order(cells);
    let rooms = rooms(order.len() + 1);
    let wanted = cells.marked_from();
    let line = Line::new(cells, &order, &wanted);
    let plan = line.plan(LINE_ROOM);
    for &room in rooms.iter().filter(|&&room| room <= LINE_ROOM.min(order.len())) {
        found.time(budget)?;
        let moves = plan.visit(room);
        if order.len() <= exact::MOST_CELLS && room < order.len() {
            let enough = moves.as_ref().map_or(4 * order.len(), Vec::len);
            found.offer(exact::visit(cells, &order, &wanted, room, enough).map(there_and_back));
        }
        found.offer(moves.map(there_and_back));
    }
    for size in 0..cells.groups.len() {
        for &room in rooms.iter().filter(|&&room| room <= COUNTED) {
            found.time(budget)?;
            found.offer(counter::schedule(cells, size, room));
        }
    }
    if cells.chain.len() > 1 {
        for shared_by in SHARED_BY {
            let kept = shared(cells, shared_by);
            if shared_by == u32::MAX || !kept.is_empty() {
                let direct = matches!(cells.terms[0], super::cells::Term::Direct(_));
                found.chunks(&Conjunction::new(cells, kept, direct), &rooms, budget)?;
            }
        }
    }
    found.offer(Some(keep_all(cells).moves));
    let sizes = if cells.list.len() <= MOST_FIXED { fixed::sizes(cells.chain.len()) } else { Vec::new() };
    for size in sizes {
        found.time(budget)?;
        found.offer(Some(fixed::two_levels(cells, size, Game::of(pay))));
    }
    Ok(found.finish())
}

struct Front<'a> {
    cells: &'a Cells,
    pay: Pay,
    points: Vec<Point>,
}

impl Front<'_> {
    fn time(&self, budget: &Budget) -> Result<(), LowerError> {
        if budget.spent() { Err(LowerError::OutOfTime) } else { Ok(()) }
    }

    fn chunks(&mut self, conjunction: &Conjunction<'_>, rooms: &[usize], budget: &Budget) -> Result<(), LowerError> {
        for unit in conjunction.kinds() {
            let largest = rooms.last().copied().unwrap_or(1).min(DENSE);
            let table = Table::new(conjunction.units(), largest, unit, Game::of(self.pay));
            for &room in rooms {
                self.time(budget)?;
                let Some(left) = room.checked_sub(conjunction.kept()) else { continue };
                self.offer(conjunction.schedule(&table, left));
            }
        }
        Ok(())
    }

    fn offer(&mut self, moves: Option<Vec<Move>>) {
        let Some(moves) = moves else { return };
        let cost = match cost(self.cells, &moves) {
            Ok(cost) => cost,
            // A program that breaks a rule is not offered.
            Err(fault) => return debug_assert!(false, "a schedule is wrong: {fault}"),
        };
        let better =
            |point: &Point| point.cost.ancillas <= cost.ancillas && point.cost.paid(self.pay) <= cost.paid(self.pay);
        if !self.points.iter().any(better) {
            let pay = self.pay;
            let worse = |point: &Point| point.cost.ancillas >= cost.ancillas && point.cost.paid(pay) >= cost.paid(pay);
            self.points.retain(|point| !worse(point));
            self.points.push(Point { cost, moves });
        }
    }

    fn finish(mut self) -> Vec<Point> {
        let pay = self.pay;
        let key = |point: &Point| (point.cost.ancillas, point.cost.paid(pay));
        self.points.sort_by(|a, b| key(a).partial_cmp(&key(b)).expect("costs are numbers"));
        let mut least = f64::INFINITY;
        self.points.retain(|point| {
            let better = point.cost.paid(pay) < least;
            least = least.min(point.cost.paid(pay));
            better
        });
        self.points
    }
}

/// The program that computes every cell once and keeps it.
pub(in crate::make::lower) fn keep_all(cells: &Cells) -> Point {
    let moves = there_and_back(order(cells).into_iter().map(Move::Compute).collect());
    let cost = cost(cells, &moves).unwrap_or_else(|fault| unreachable!("a schedule is wrong: {fault}"));
    Point { cost, moves }
}

fn there_and_back(mut moves: Vec<Move>) -> Vec<Move> {
    let back: Vec<Move> = backwards(&moves).collect();
    moves.push(Move::Mark);
    moves.extend(back);
    moves
}

/// The numbers of ancillas to try for so many cells.
fn rooms(cells: usize) -> Vec<usize> {
    // Programs of large networks are long: fewer of them are tried.
    let dense = (MOVES / cells.max(1)).clamp(DENSE / 8, DENSE);
    let growth = (MOVES / 4 / cells.max(1)).clamp(4, 32);
    let mut rooms: Vec<usize> = (0..=cells.min(dense)).collect();
    let mut room = dense + dense / growth;
    while room < cells {
        rooms.push(room);
        room += room / growth;
    }
    rooms.extend((cells > dense).then_some(cells));
    rooms
}

/// The cells in the order they are gathered: each link after its conjunct. The root is not among them where it is marked
/// directly.
fn order(cells: &Cells) -> Vec<CellId> {
    let wanted = cells.marked_from();
    let mut done = rustc_hash::FxHashSet::default();
    let mut order = Vec::new();
    for goal in cells.chain.iter().filter(|link| wanted.last() >= Some(link)).chain(&wanted) {
        for cell in cells.cone(&[*goal], |cell| done.contains(&cell)) {
            done.insert(cell);
            order.push(cell);
        }
    }
    order
}

/// The cells that at least so many conjuncts need; with a cell, all that it needs.
fn shared(cells: &Cells, by: u32) -> Vec<CellId> {
    if by == u32::MAX {
        return Vec::new();
    }
    let mut users = vec![0u32; cells.list.len()];
    for &link in &cells.chain {
        use crate::id::Id;
        let is_link = |cell: CellId| cells.chain.binary_search(&cell).is_ok();
        cells.cone(&cells.list[link].needs, is_link).iter().for_each(|cell| users[cell.index()] += 1);
    }
    let shared = cells.list.ids().filter(|&cell| users[crate::id::Id::index(cell)] >= by);
    shared.collect()
}
