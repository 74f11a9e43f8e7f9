//! Running a tape over blocks of inputs.

use crate::judge::rows::lanes::{LANE_BITS, Row, update, wide_fn};
use crate::judge::rows::tape::{Bit, Kind, Step, Tape};

/// A run of a tape: the rows as they are after the last block.
#[derive(Clone, Debug)]
pub(crate) struct Sweep<'a> {
    tape: &'a Tape,
    /// The rows of the tape; the first are the lanes left after each level and all slower ones, by level.
    rows: Vec<Row>,
    /// The block that the rows are for.
    block: Option<u64>,
    /// Blocks known to hold no solution: all those that share the slow bits of the last one.
    dead: std::ops::Range<u64>,
}

impl<'a> Sweep<'a> {
    /// A run that has not begun.
    pub(crate) fn new(tape: &'a Tape) -> Self {
        let mut rows = vec![Row::ZEROS; tape.slots()];
        rows[tape.top() + 1] = Row::ONES;
        tape.bits().iter().for_each(|bit| rows[bit.row as usize] = row_of(bit, 0));
        Self { tape, rows, block: None, dead: 0..0 }
    }

    /// The solutions among the inputs of a block; `None` where there is none. Cheap for blocks in increasing order.
    ///
    /// A problem over fewer bits than a block has lanes repeats in the lanes beyond its inputs, and blocks beyond its
    /// inputs repeat the others.
    pub(crate) fn block(&mut self, block: u64) -> Option<&Row> {
        if self.dead.contains(&block) {
            return None;
        }
        if self.block != Some(block) {
            let highest = self.enter(block);
            self.run(block, highest);
        }
        if self.dead.contains(&block) { None } else { Some(&self.rows[0]) }
    }

    /// The block after the last one that is known to hold no solution, given that `block` holds none.
    pub(crate) fn dead_until(&self, block: u64) -> u64 {
        if self.dead.contains(&block) { self.dead.end } else { block + 1 }
    }

    /// Sets the rows of the block's bits and returns the highest level that has to run.
    fn enter(&mut self, block: u64) -> usize {
        let top = self.tape.top();
        let highest = match self.block {
            None => top,
            Some(before) => (63 - (before ^ block).leading_zeros() as usize).min(top),
        };
        // In the order of their places, so those of the lanes, which never change, come first.
        let bits = self.tape.bits();
        let slow = &bits[bits.partition_point(|bit| bit.place < LANE_BITS)..];
        let changed = slow.partition_point(|bit| bit.place <= LANE_BITS + highest);
        slow[..changed].iter().for_each(|bit| self.rows[bit.row as usize] = row_of(bit, block));
        self.block = Some(block);
        highest
    }

    fn run(&mut self, block: u64, highest: usize) {
        self.dead = 0..0;
        for level in (0..=highest).rev() {
            let some_left = run_level(self.tape.level(level), &mut self.rows);
            if !some_left {
                let start = block >> level << level;
                // The top level depends on no bit of the block, so nothing holds anywhere.
                let end = if level == self.tape.top() { u64::MAX } else { start + (1 << level) };
                self.dead = if level == self.tape.top() { 0..end } else { start..end };
                return;
            }
        }
    }
}

/// The row of a bit, or of its negation, in a block.
fn row_of(bit: &Bit, block: u64) -> Row {
    let row = Row::of_bit(bit.place, block);
    if bit.negated { !row } else { row }
}

wide_fn! {
    /// Runs the steps of one level; false as soon as no lane is left.
    fn run_level(steps: &[Step], rows: &mut [Row]) -> bool {
        for step in steps {
            match (step.kind, step.len) {
                (Kind::Look, _) if rows[step.to as usize].is_zero() => return false,
                (Kind::Look, _) => {}
                (Kind::SetMost, _) => apply(rows, step, |_, [a, b, c]| (a & b) | (c & (a | b))),
                (_, 1) => of_kind::<1>(rows, step),
                (_, 2) => of_kind::<2>(rows, step),
                (_, _) => of_kind::<3>(rows, step),
            }
        }
        true
    }
}

#[inline(always)]
fn of_kind<const N: usize>(rows: &mut [Row], step: &Step) {
    match step.kind {
        Kind::Set => apply::<N>(rows, step, |_, operands| all(operands)),
        Kind::SetNot => apply::<N>(rows, step, |_, operands| !all(operands)),
        Kind::Keep => apply::<N>(rows, step, |row, operands| row & all(operands)),
        Kind::Clear => apply::<N>(rows, step, |row, operands| row & !all(operands)),
        Kind::Flip => apply::<N>(rows, step, |row, operands| row ^ all(operands)),
        Kind::SetOdd => apply::<N>(rows, step, |_, operands| odd(operands)),
        Kind::FlipOdd => apply::<N>(rows, step, |row, operands| row ^ odd(operands)),
        Kind::SetMost | Kind::Look => unreachable!("handled by the caller"),
    }
}

#[inline(always)]
fn all<const N: usize>(operands: [u64; N]) -> u64 {
    let mut all = u64::MAX;
    for operand in operands {
        all &= operand;
    }
    all
}

#[inline(always)]
fn odd<const N: usize>(operands: [u64; N]) -> u64 {
    let mut odd = 0;
    for operand in operands {
        odd ^= operand;
    }
    odd
}

/// Makes a row out of what it was and of operands.
#[inline(always)]
fn apply<const N: usize>(rows: &mut [Row], step: &Step, f: impl Fn(u64, [u64; N]) -> u64) {
    let mut from = [0; N];
    for (row, &operand) in from.iter_mut().zip(&step.from) {
        *row = operand as usize;
    }
    update(rows, step.to as usize, from, f);
}
