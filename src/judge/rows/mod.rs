//! Rows: the problem evaluated on 1024 inputs at a time, by the judge's own reading.
//!
//! [`count`] tries every bit string and counts the solutions; [`truth`] gives the whole truth table. The audit takes
//! rows block by block. All of it is one thing: a tape of row operations, swept over the blocks of inputs in order, in
//! which operations that depend on slowly changing bits run seldom, and blocks that a slow requirement empties are
//! skipped together.

pub(crate) mod lanes;
pub(crate) mod sweep;
pub(crate) mod tape;

use std::sync::Mutex;
use std::sync::atomic::{AtomicBool, AtomicU64, Ordering};

use crate::budget::Budget;
use crate::id::Id;
use crate::judge::reading::read;
use crate::problem::{BitId, Bits, Problem};
use lanes::{LANE_BITS, LANES, Row, WORDS};
use sweep::Sweep;
use tape::Tape;

/// The most bits that a sweep takes: the number of blocks must leave room in a word.
pub const MAX_BITS: usize = 62;
/// Blocks are handed to the threads in at most this many runs, each beginning at a multiple of its size.
const RUNS: u64 = 256;
/// Evaluated blocks between two looks at the budget: some milliseconds of work for large problems.
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
    let mut places = vec![0; problem.bit_count()];
    searched.iter().enumerate().for_each(|(place, bit)| places[bit.index()] = place);
    Tape::new(problem, &read(problem), &places)
}

/// Counts the solutions by trying every bit string, keeping the first `keep` of them. `None` where the budget ran out,
/// and for more than [`MAX_BITS`] bits.
pub fn count(problem: &Problem, threads: usize, keep: usize, budget: &Budget) -> Option<SweepCount> {
    let bits = problem.bit_count();
    if bits > MAX_BITS {
        return None;
    }
    let tape = tape(problem, &problem.bits().collect::<Vec<_>>());
    let blocks = 1u64 << bits.saturating_sub(LANE_BITS);
    let runs = RUNS.min(blocks);
    let counter = Counter {
        tape: &tape,
        run_len: blocks / runs,
        runs,
        lanes: Row::first_lanes(LANES.min(1 << bits)),
        next: AtomicU64::new(0),
        is_full: AtomicBool::new(keep == 0),
        found: Mutex::new(Found { keep, count: 0, numbers: Vec::new(), merged: 0, waiting: Vec::new() }),
        budget,
    };
    let threads = threads.clamp(1, runs as usize);
    std::thread::scope(|scope| {
        (1..threads).for_each(|_| drop(scope.spawn(|| counter.work())));
        counter.work();
    });
    let found = counter.found.into_inner().expect("no thread panicked");
    (found.merged == runs).then(|| SweepCount {
        count: found.count,
        complete: found.numbers.len() as u64 == found.count,
        solutions: found.numbers.iter().map(|&number| Bits::from_number(number.into(), bits)).collect(),
    })
}

struct Counter<'a> {
    tape: &'a Tape,
    run_len: u64,
    runs: u64,
    /// The lanes that are inputs.
    lanes: Row,
    next: AtomicU64,
    /// Whether enough solutions are kept already.
    is_full: AtomicBool,
    found: Mutex<Found>,
    budget: &'a Budget,
}

/// The runs merged so far, in order, and those that wait for one before them.
struct Found {
    keep: usize,
    count: u64,
    numbers: Vec<u64>,
    merged: u64,
    waiting: Vec<(u64, u64, Vec<u64>)>,
}

impl Counter<'_> {
    fn work(&self) {
        let mut sweep = Sweep::new(self.tape);
        loop {
            let run = self.next.fetch_add(1, Ordering::Relaxed);
            if run >= self.runs {
                return;
            }
            let Some((count, numbers)) = self.run(&mut sweep, run) else { return };
            let mut found = self.found.lock().expect("no thread panicked");
            found.add(run, count, numbers);
            if found.numbers.len() >= found.keep {
                self.is_full.store(true, Ordering::Relaxed);
            }
            self.budget.report("sweep", found.merged, Some(self.runs));
        }
    }

    fn run(&self, sweep: &mut Sweep, run: u64) -> Option<(u64, Vec<u64>)> {
        let keep = if self.is_full.load(Ordering::Relaxed) { 0 } else { self.found.lock().expect("no panic").keep };
        let (mut count, mut numbers) = (0, Vec::new());
        let (mut block, end) = (run * self.run_len, (run + 1) * self.run_len);
        let mut steps: u64 = 0;
        while block < end {
            if steps.is_multiple_of(BLOCKS_A_LOOK) && self.budget.spent() {
                return None;
            }
            steps += 1;
            match sweep.block(block) {
                Some(row) => {
                    let row = *row & self.lanes;
                    count += row.count();
                    if numbers.len() < keep {
                        let room = keep - numbers.len();
                        numbers.extend(row.lanes().take(room).map(|lane| block * LANES + lane));
                    }
                    block += 1;
                }
                None => block = sweep.dead_until(block),
            }
        }
        Some((count, numbers))
    }
}

impl Found {
    fn add(&mut self, run: u64, count: u64, numbers: Vec<u64>) {
        self.waiting.push((run, count, numbers));
        while let Some(at) = self.waiting.iter().position(|(run, ..)| *run == self.merged) {
            let (_, count, numbers) = self.waiting.swap_remove(at);
            self.count += count;
            let room = self.keep - self.numbers.len();
            self.numbers.extend(numbers.into_iter().take(room));
            self.merged += 1;
        }
    }
}

/// The truth table over a search register: bit `x` of the table (bit `x % 64` of word `x / 64`) says whether the value
/// `x` of the register is a solution, bit `i` of `x` being the problem's bit `searched[i]`. Every bit of the problem is
/// searched. The table has `2^n` bits: this is for up to some 24 of them.
pub fn truth(problem: &Problem, searched: &[BitId]) -> Vec<u64> {
    assert_eq!(searched.len(), problem.bit_count(), "every bit is searched");
    let tape = tape(problem, searched);
    let mut sweep = Sweep::new(&tape);
    let inputs = 1u64 << searched.len();
    let mut table = vec![0; inputs.div_ceil(64) as usize];
    let lanes = Row::first_lanes(LANES.min(inputs));
    for (block, words) in table.chunks_mut(WORDS).enumerate() {
        if let Some(row) = sweep.block(block as u64) {
            let row = *row & lanes;
            words.copy_from_slice(&row.0[..words.len()]);
        }
    }
    table
}
