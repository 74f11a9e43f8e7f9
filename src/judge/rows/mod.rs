//! Rows: the problem evaluated on 2048 inputs at a time, by the judge's own reading.
//!
//! [`count`] tries every bit string and counts the solutions; [`truth`] gives the whole truth table. The audit takes
//! rows block by block. All of it is one thing: a tape of row operations, swept over the blocks of inputs in order, in
//! which operations that depend on slowly changing bits run seldom, and blocks that a slow requirement empties are
//! skipped together.

pub(crate) mod in_order;
pub(crate) mod lanes;
pub(crate) mod sweep;
pub(crate) mod tape;
pub(crate) mod wide;

use std::ops::Range;
use std::sync::atomic::{AtomicBool, Ordering};

use crate::budget::Budget;
use crate::id::Id;
use crate::judge::reading::{Reading, read};
use crate::problem::{BitId, Bits, Clauses, Problem};
use in_order::{Then, in_order};
use lanes::{LANE_BITS, LANES, Row, WORDS};
use sweep::Sweep;
use tape::Tape;

/// The most bits that a sweep takes: the number of blocks must leave room in a word.
pub const MAX_BITS: usize = 62;
/// Blocks are handed to the threads in at most this many runs, each beginning at a multiple of its size.
const RUNS: u64 = 256;
/// Evaluated blocks between two looks at the budget: some ten milliseconds of work for large problems.
const BLOCKS_A_LOOK: u64 = 1 << 12;

/// What a sweep over all bit strings found.
#[derive(Clone, PartialEq, Eq, Debug)]
pub struct SweepCount {
    /// How many solutions there are.
    pub count: u64,
    /// The first of them as numbers, bit 0 of the problem the lowest, in increasing order.
    pub solutions: Vec<Bits>,
    /// Whether `solutions` has all of them.
    pub complete: bool,
}

/// The tape of a problem in which bit `searched[i]` is bit `i` of the number of an input.
pub(crate) fn tape(problem: &Problem, searched: &[BitId]) -> Tape {
    Tape::new(&problem.clauses, &read(problem), &places_of(searched))
}

/// The tape of conjuncts alone.
pub(crate) fn tape_of(reading: &Reading, searched: &[BitId]) -> Tape {
    Tape::new(&Clauses::default(), reading, &places_of(searched))
}

/// The place of each bit in the number of an input.
fn places_of(searched: &[BitId]) -> Vec<usize> {
    let mut places = vec![0; searched.len()];
    searched.iter().enumerate().for_each(|(place, bit)| places[bit.index()] = place);
    places
}

/// Counts the solutions by trying every bit string, keeping the first `keep` of them. `None` where the budget ran out,
/// and for more than [`MAX_BITS`] bits.
pub fn count(problem: &Problem, threads: usize, keep: usize, budget: &Budget) -> Option<SweepCount> {
    let bits = problem.bit_count();
    if bits > MAX_BITS {
        return None;
    }
    let tape = tape(problem, &problem.bits().collect::<Vec<_>>());
    count_tape(&tape, bits, threads, keep, budget)
}

/// Counts the inputs of so many bits, at most [`MAX_BITS`], that meet the requirements of a tape.
pub(crate) fn count_tape(tape: &Tape, bits: usize, threads: usize, keep: usize, budget: &Budget) -> Option<SweepCount> {
    let blocks = 1u64 << bits.saturating_sub(LANE_BITS);
    let runs = RUNS.min(blocks);
    let lanes = Row::first_lanes(LANES.min(1 << bits));
    let (mut count, mut numbers) = (0, Vec::new());
    let is_full = AtomicBool::new(keep == 0);
    let work = |sweep: &mut Sweep, run| {
        let keep = if is_full.load(Ordering::Relaxed) { 0 } else { keep };
        let len = blocks / runs;
        count_run(sweep, run * len..(run + 1) * len, &lanes, keep, budget)
    };
    let merge = |run, (solutions, found): (u64, Vec<u64>)| {
        count += solutions;
        numbers.extend(found.into_iter().take(keep - numbers.len()));
        is_full.store(numbers.len() == keep, Ordering::Relaxed);
        budget.report("sweep", run + 1, Some(runs));
        Then::GoOn
    };
    let merged = in_order(threads, runs, || Sweep::new(tape), work, merge);
    (merged == runs).then(|| SweepCount {
        count,
        complete: numbers.len() as u64 == count,
        solutions: numbers.iter().map(|&number| Bits::from_number(number.into(), bits)).collect(),
    })
}

/// The solutions in some blocks: their number, and the first `keep` of them.
fn count_run(
    sweep: &mut Sweep,
    blocks: Range<u64>,
    lanes: &Row,
    keep: usize,
    budget: &Budget,
) -> Option<(u64, Vec<u64>)> {
    let (mut count, mut numbers) = (0, Vec::new());
    each_block(sweep, blocks, budget, |block, row| {
        let row = *row & *lanes;
        count += row.count();
        let room = keep - numbers.len();
        numbers.extend(row.lanes().take(room).map(|lane| block * LANES + lane));
    })?;
    Some((count, numbers))
}

/// Visits the blocks that are not passed over. `None` where the budget ran out.
fn each_block(sweep: &mut Sweep, blocks: Range<u64>, budget: &Budget, mut visit: impl FnMut(u64, &Row)) -> Option<()> {
    let mut block = blocks.start;
    let mut steps: u64 = 0;
    while block < blocks.end {
        if steps.is_multiple_of(BLOCKS_A_LOOK) && budget.spent() {
            return None;
        }
        steps += 1;
        let Some(row) = sweep.block(block) else {
            block = sweep.dead_until(block);
            continue;
        };
        visit(block, row);
        block += 1;
    }
    Some(())
}

/// The truth table over a search register: bit `x` of the table (bit `x % 64` of word `x / 64`) says whether the value
/// `x` of the register is a solution, bit `i` of `x` being the problem's bit `searched[i]`. Every bit of the problem is
/// searched. The table has `2^n` bits: this is for up to some 24 of them.
pub fn truth(problem: &Problem, searched: &[BitId]) -> Vec<u64> {
    assert_eq!(searched.len(), problem.bit_count(), "every bit is searched");
    let table = table(&tape(problem, searched), searched.len(), 1, &Budget::unlimited());
    table.expect("the budget has no end")
}

/// The same for the requirements of a tape over so many bits; `None` where the budget ran out.
pub(crate) fn table(tape: &Tape, bits: usize, threads: usize, budget: &Budget) -> Option<Vec<u64>> {
    let blocks = 1u64 << bits.saturating_sub(LANE_BITS);
    let runs = RUNS.min(blocks);
    let len = blocks / runs;
    let words = (1usize << bits).div_ceil(64);
    let mut table = Vec::with_capacity(words);
    let work = |sweep: &mut Sweep, run| table_run(sweep, run * len..(run + 1) * len, bits, budget);
    let merge = |_, part: Vec<u64>| {
        table.extend(part);
        Then::GoOn
    };
    let merged = in_order(threads, runs, || Sweep::new(tape), work, merge);
    (merged == runs).then_some(table)
}

/// The part of the table for some blocks.
fn table_run(sweep: &mut Sweep, blocks: Range<u64>, bits: usize, budget: &Budget) -> Option<Vec<u64>> {
    let lanes = Row::first_lanes(LANES.min(1 << bits));
    let words = WORDS.min((1usize << bits).div_ceil(64));
    let mut part = vec![0; words * (blocks.end - blocks.start) as usize];
    let first = blocks.start;
    each_block(sweep, blocks, budget, |block, row| {
        let at = (block - first) as usize * words;
        part[at..at + words].copy_from_slice(&(*row & lanes).0[..words]);
    })?;
    Some(part)
}
