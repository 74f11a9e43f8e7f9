//! Schedules of any network: its cells in one order, cut into segments.
//!
//! Input:  cells in an order in which operands come first, and the cells that are wanted in the end.
//! Output: moves that hold the wanted cells, clean or with others still held.
//! After:  a segment begins with the cells held that it needs from before, its *frontier*, and ends with the frontier of
//!         the next one.
//!
//! This is the recursion of E. Knill, "An analysis of Bennett's pebble game" (1995), on a line whose nodes may need more
//! than their predecessor: F(a..b, p) = min over m of F(a..m, p) + F(m..b, p - frontier) + F(a..m, p - frontier), where
//! the last part goes backwards and leaves what is needed beyond b. On a line of single cells the frontier is 1.

use super::cells::{CellId, Cells};
use super::program::{Move, backwards};

/// The work of one table, in splits looked at; longer orders are cut at fewer places.
const WORK: usize = 30_000_000;
/// At least so many places to cut at.
const FEWEST_CUTS: usize = 12;

/// Cells in order.
pub(in crate::make::lower) struct Line<'a> {
    order: &'a [CellId],
    /// For each place, the last place that needs it; the length for a cell that is wanted in the end.
    last_use: Vec<usize>,
    wanted: usize,
}

impl<'a> Line<'a> {
    pub(in crate::make::lower) fn new(cells: &Cells, order: &'a [CellId], wanted: &[CellId]) -> Self {
        let place: rustc_hash::FxHashMap<CellId, usize> =
            order.iter().enumerate().map(|(at, &cell)| (cell, at)).collect();
        let mut last_use = vec![0; order.len()];
        for (at, &cell) in order.iter().enumerate() {
            cells.list[cell].needs.iter().filter_map(|need| place.get(need)).for_each(|&need| last_use[need] = at);
        }
        let wanted: Vec<usize> = wanted.iter().filter_map(|cell| place.get(cell).copied()).collect();
        wanted.iter().for_each(|&at| last_use[at] = order.len());
        Self { order, last_use, wanted: wanted.len() }
    }

    /// The moves that hold the wanted cells and possibly others, with at most `room` ancillas; none if there are none.
    pub(in crate::make::lower) fn visit(&self, room: usize) -> Option<Vec<Move>> {
        self.plan(room).visit(room)
    }

    /// The moves that hold the wanted cells and no others.
    pub(in crate::make::lower) fn clean(&self, room: usize) -> Option<Vec<Move>> {
        self.plan(room).clean(room)
    }

    /// The table for up to so many ancillas.
    pub(in crate::make::lower) fn plan(&self, room: usize) -> Plan<'_> {
        Plan::new(self, room.min(self.order.len()))
    }
}

/// The cheapest splits of a line.
pub(in crate::make::lower) struct Plan<'a> {
    line: &'a Line<'a>,
    room: usize,
    cuts: Vec<usize>,
    /// For each two cuts *i* and *j*: how many of the places before cut *i* are needed at or after cut *j*.
    before: Vec<Vec<usize>>,
    /// Moves and the best middle cut (0: none) for each two cuts and each room.
    clean: Vec<(u32, u16)>,
    /// The same from each cut to the end, where others may stay held.
    visit: Vec<(u32, u16)>,
}

const NEVER: u32 = u32::MAX / 4;

impl<'a> Plan<'a> {
    fn new(line: &'a Line<'a>, room: usize) -> Self {
        let cuts = cut_places(line, room);
        let before = cuts.iter().map(|&to| {
            let mut count = 0;
            let mut at = 0;
            let upto = |&cut: &usize| {
                count += line.last_use[at..cut].iter().filter(|&&last| last >= to).count();
                at = cut;
                count
            };
            cuts.iter().map(upto).collect()
        });
        let before = before.collect();
        let k = cuts.len();
        let mut plan = Self { line, room, cuts, before, clean: vec![], visit: vec![] };
        plan.clean = vec![(NEVER, 0); k * k * (room + 1)];
        plan.visit = vec![(NEVER, 0); k * (room + 1)];
        for len in 1..k {
            (0..k - len).for_each(|i| (1..=room).for_each(|p| plan.fill_clean(i, i + len, p)));
        }
        for i in (0..k - 1).rev() {
            (1..=room).for_each(|p| plan.fill_visit(i, p));
        }
        plan
    }

    fn at(&self, i: usize, j: usize, room: usize) -> usize {
        (i * self.cuts.len() + j) * (self.room + 1) + room
    }

    /// How many places between two cuts are needed at or after the cut `from`.
    fn needed(&self, i: usize, j: usize, from: usize) -> usize {
        self.before[from][j] - self.before[from][i]
    }

    fn fill_clean(&mut self, i: usize, j: usize, p: usize) {
        let (len, out) = (self.cuts[j] - self.cuts[i], self.needed(i, j, j));
        let mut best = if len <= p { ((2 * len - out) as u32, 0) } else { (NEVER, 0) };
        for m in i + 1..j {
            let Some(cost) = self.split(i, m, j, p) else { continue };
            if cost < best.0 {
                best = (cost, m as u16);
            }
        }
        let at = self.at(i, j, p);
        self.clean[at] = best;
    }

    fn split(&self, i: usize, m: usize, j: usize, p: usize) -> Option<u32> {
        let left = p.checked_sub(self.needed(i, m, m))?;
        let there = self.clean[self.at(i, m, p)].0;
        let onward = self.clean[self.at(m, j, left)].0;
        let (gone, room) = self.undo(i, m, j, p)?;
        let back = if gone == 0 { 0 } else { self.clean[self.at(i, m, room)].0 - self.needed(i, m, j) as u32 };
        Some(there.saturating_add(onward).saturating_add(back)).filter(|&cost| cost < NEVER)
    }

    /// How many cells of `i..m` go after the segment `m..j`, and the room for undoing them.
    fn undo(&self, i: usize, m: usize, j: usize, p: usize) -> Option<(usize, usize)> {
        let kept = self.needed(i, m, j);
        let gone = self.needed(i, m, m) - kept;
        p.checked_sub(self.needed(m, j, j) + kept).map(|room| (gone, room))
    }

    fn fill_visit(&mut self, i: usize, p: usize) {
        let end = self.cuts.len() - 1;
        let len = self.cuts[end] - self.cuts[i];
        let mut best = if len <= p { (len as u32, 0) } else { (NEVER, 0) };
        for m in i + 1..end {
            let Some(left) = p.checked_sub(self.needed(i, m, m)) else { continue };
            let cost = self.clean[self.at(i, m, p)].0.saturating_add(self.visit[m * (self.room + 1) + left].0);
            if cost < best.0 {
                best = (cost, m as u16);
            }
        }
        self.visit[i * (self.room + 1) + p] = best;
    }

    /// The moves to the end of the line.
    pub(in crate::make::lower) fn visit(&self, room: usize) -> Option<Vec<Move>> {
        let room = room.min(self.room);
        let mut moves = Vec::new();
        if self.line.order.is_empty() {
            return Some(moves);
        }
        (self.visit[room].0 < NEVER).then(|| self.write_visit(0, room, &mut moves))?;
        Some(moves)
    }

    /// The moves to the end of the line, with nothing else held.
    pub(in crate::make::lower) fn clean(&self, room: usize) -> Option<Vec<Move>> {
        let (room, end) = (room.min(self.room), self.cuts.len() - 1);
        let mut moves = Vec::new();
        if self.line.order.is_empty() || self.line.wanted == 0 {
            return Some(moves);
        }
        (self.clean[self.at(0, end, room)].0 < NEVER).then(|| self.write_clean(0, end, room, &mut moves))?;
        Some(moves)
    }

    fn write_visit(&self, i: usize, p: usize, moves: &mut Vec<Move>) {
        let end = self.cuts.len() - 1;
        match self.visit[i * (self.room + 1) + p].1 as usize {
            0 => moves.extend(self.line.order[self.cuts[i]..self.cuts[end]].iter().map(|&cell| Move::Compute(cell))),
            m => {
                self.write_clean(i, m, p, moves);
                self.write_visit(m, p - self.needed(i, m, m), moves);
            }
        }
    }

    fn write_clean(&self, i: usize, j: usize, p: usize, moves: &mut Vec<Move>) {
        let places = self.cuts[i]..self.cuts[j];
        match self.clean[self.at(i, j, p)].1 as usize {
            0 => {
                moves.extend(self.line.order[places.clone()].iter().map(|&cell| Move::Compute(cell)));
                let gone = places.rev().filter(|&at| self.line.last_use[at] < self.cuts[j]);
                moves.extend(gone.map(|at| Move::Erase(self.line.order[at])));
            }
            m => {
                self.write_clean(i, m, p, moves);
                self.write_clean(m, j, p - self.needed(i, m, m), moves);
                let (gone, room) = self.undo(i, m, j, p).expect("looked at when the table was filled");
                if gone > 0 {
                    let mut there = Vec::new();
                    self.write_clean(i, m, room, &mut there);
                    let kept: rustc_hash::FxHashSet<CellId> = (self.cuts[i]..self.cuts[m])
                        .filter(|&at| self.line.last_use[at] >= self.cuts[j])
                        .map(|at| self.line.order[at])
                        .collect();
                    let stays = |step: &Move| match step {
                        Move::Compute(cell) | Move::Erase(cell) => !kept.contains(cell),
                        _ => true,
                    };
                    moves.extend(backwards(&there).filter(stays));
                }
            }
        }
    }
}

/// The places to cut at: all, or for each stretch of the order the one with the narrowest frontier.
fn cut_places(line: &Line<'_>, room: usize) -> Vec<usize> {
    let n = line.order.len();
    let affordable = ((6 * WORK / room.max(1)) as f64).cbrt() as usize;
    let inner = affordable.max(FEWEST_CUTS).min(n.saturating_sub(1));
    let mut width = vec![0i64; n + 2];
    for (at, &last) in line.last_use.iter().enumerate() {
        width[at + 1] += 1;
        width[last.max(at) + 1] -= 1;
    }
    for at in 1..width.len() {
        width[at] += width[at - 1];
    }
    let mut cuts = vec![0];
    for stretch in 0..inner {
        let from = 1 + stretch * (n - 1) / inner;
        let to = 1 + (stretch + 1) * (n - 1) / inner;
        cuts.extend((from..to).min_by_key(|&at| width[at]));
    }
    cuts.push(n);
    cuts
}
