//! Running a tape over blocks of inputs.

use crate::judge::rows::lanes::{LANE_BITS, Row, WORDS, wide_fn};
use crate::judge::rows::tape::{Operand, Step, Tape};

/// A run of a tape: the rows as they are after the last block.
#[derive(Clone, Debug)]
pub(crate) struct Sweep<'a> {
    tape: &'a Tape,
    rows: Vec<Row>,
    /// The lanes left after each level and all slower ones, by level; the entry after the last is all ones.
    left: Vec<Row>,
    /// The block that the rows are for.
    block: Option<u64>,
    /// Blocks known to hold no solution: all those that share the slow bits of the last one.
    dead: std::ops::Range<u64>,
}

impl<'a> Sweep<'a> {
    /// A run that has not begun.
    pub(crate) fn new(tape: &'a Tape) -> Self {
        let mut rows = vec![Row::ZEROS; tape.slots()];
        for (at, row) in rows.iter_mut().enumerate().take(tape.places()) {
            *row = Row::of_bit(at, 0);
        }
        Self { tape, rows, left: vec![Row::ONES; tape.top() + 2], block: None, dead: 0..0 }
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
        if self.dead.contains(&block) { None } else { Some(&self.left[0]) }
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
        for bit in 0..=highest.min(top.saturating_sub(1)) {
            if LANE_BITS + bit < self.tape.places() {
                self.rows[LANE_BITS + bit] = Row::of_bit(LANE_BITS + bit, block);
            }
        }
        self.block = Some(block);
        highest
    }

    fn run(&mut self, block: u64, highest: usize) {
        self.dead = 0..0;
        for level in (0..=highest).rev() {
            let mut left = self.left[level + 1];
            let some_left = run_level(self.tape.level(level), self.tape.pool(), &mut self.rows, &mut left);
            self.left[level] = left;
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

wide_fn! {
    /// Runs the steps of one level; false as soon as no lane is left.
    fn run_level(steps: &[Step], pool: &[Operand], rows: &mut [Row], left: &mut Row) -> bool {
        for &step in steps {
            match step {
                Step::And { to, a, b } => {
                    let mut result = Row::ZEROS;
                    let ((a, flip_a), (b, flip_b)) = (operand(rows, a), operand(rows, b));
                    for word in 0..WORDS {
                        result.0[word] = (a.0[word] ^ flip_a) & (b.0[word] ^ flip_b);
                    }
                    rows[to as usize] = result;
                }
                Step::Odd { to, a, b } => {
                    let mut result = Row::ZEROS;
                    let ((a, flip_a), (b, flip_b)) = (operand(rows, a), operand(rows, b));
                    for word in 0..WORDS {
                        result.0[word] = a.0[word] ^ b.0[word] ^ (flip_a ^ flip_b);
                    }
                    rows[to as usize] = result;
                }
                Step::All { to, start, end } => {
                    let mut result = Row::ONES;
                    for &signal in &pool[start as usize..end as usize] {
                        let (row, flip) = operand(rows, signal);
                        for word in 0..WORDS {
                            result.0[word] &= row.0[word] ^ flip;
                        }
                    }
                    rows[to as usize] = result;
                }
                Step::Most { to, start } => {
                    let mut result = Row::ZEROS;
                    let [(a, flip_a), (b, flip_b), (c, flip_c)] =
                        [0, 1, 2].map(|at| operand(rows, pool[start as usize + at]));
                    for word in 0..WORDS {
                        let (a, b, c) = (a.0[word] ^ flip_a, b.0[word] ^ flip_b, c.0[word] ^ flip_c);
                        result.0[word] = (a & b) | (c & (a | b));
                    }
                    rows[to as usize] = result;
                }
                Step::Require { start, end } => {
                    let mut some = Row::ZEROS;
                    for &signal in &pool[start as usize..end as usize] {
                        let (row, flip) = operand(rows, signal);
                        for word in 0..WORDS {
                            some.0[word] |= row.0[word] ^ flip;
                        }
                    }
                    for word in 0..WORDS {
                        left.0[word] &= some.0[word];
                    }
                }
                Step::Look => {
                    if left.is_zero() {
                        return false;
                    }
                }
            }
        }
        true
    }
}

#[inline(always)]
fn operand(rows: &[Row], operand: Operand) -> (&Row, u64) {
    (&rows[(operand >> 1) as usize], 0u64.wrapping_sub(u64::from(operand & 1)))
}
