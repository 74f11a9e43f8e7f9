//! Step by step: every amplitude after every iteration, one fused pass an iteration.
//!
//! One pass flips the signs of the marked amplitudes, takes the part along the axis away, and adds up what the next
//! reflection needs; it reads and writes every amplitude once. All numbers are real: factors are 1 or -1.
//!
//! Sums are taken run by run and then added: one long sum of nearly equal numbers would lose digits.

use crate::budget::Budget;

/// The amplitudes of a search whose marks are signs.
pub struct Stepped {
    amplitudes: Vec<f64>,
    /// One bit for each string: whether its sign is flipped.
    marked: Vec<u64>,
    axis: Axis,
    /// The overlap of the axis with the state after its signs are flipped.
    along: f64,
    threads: usize,
}

/// The axis of the reflection.
pub enum Axis {
    /// The same amplitude for every string.
    Level(f64),
    /// One for each string.
    Each(Vec<f64>),
}

/// What one pass adds up.
#[derive(Clone, Copy, Default)]
struct Sums {
    along: f64,
    success: f64,
}

impl Sums {
    fn plus(self, other: Self) -> Self {
        Self { along: self.along + other.along, success: self.success + other.success }
    }
}

/// Words of marks in a run: with its amplitudes, what the second cache holds.
const WORDS_A_RUN: usize = 256;

impl Stepped {
    /// The search before its first iteration; the numbers of amplitudes and of bits agree.
    pub fn new(amplitudes: Vec<f64>, marked: Vec<u64>, axis: Axis, threads: usize) -> Self {
        let mut search = Self { amplitudes, marked, axis, along: 0.0, threads: threads.max(1) };
        search.along = search.pass(0.0, true).along;
        search
    }

    /// One iteration with the reflection `1 - 2|s><s|`; gives the probability of the marked strings.
    pub fn step(&mut self) -> f64 {
        let sums = self.pass(2.0 * self.along, false);
        self.along = sums.along;
        sums.success
    }

    /// Iterations until the budget runs out; the probability after each.
    pub fn run(&mut self, iterations: u64, budget: &Budget) -> Vec<f64> {
        (0..iterations).map_while(|_| (!budget.spent()).then(|| self.step())).collect()
    }

    /// The amplitudes.
    pub fn amplitudes(&self) -> &[f64] {
        &self.amplitudes
    }

    /// Flips signs and takes `part` times the axis away, or only looks.
    fn pass(&mut self, part: f64, only_look: bool) -> Sums {
        let words = self.marked.len();
        let share = words.div_ceil(self.threads);
        let axis = &self.axis;
        let run = |amplitudes: &mut [f64], marked: &[u64], from: usize| match (axis, only_look) {
            (Axis::Level(level), true) => level_pass::<true>(amplitudes, marked, *level, part),
            (Axis::Level(level), false) => level_pass::<false>(amplitudes, marked, *level, part),
            (Axis::Each(axis), _) => each_pass(amplitudes, marked, &axis[from * 64..], part, only_look),
        };
        let work = |amplitudes: &mut [f64], marked: &[u64], from: usize| {
            let runs = amplitudes.chunks_mut(WORDS_A_RUN * 64).zip(marked.chunks(WORDS_A_RUN)).enumerate();
            runs.map(|(at, (amplitudes, marked))| run(amplitudes, marked, from + at * WORDS_A_RUN))
                .fold(Sums::default(), Sums::plus)
        };
        let chunks = self.amplitudes.chunks_mut(share * 64).zip(self.marked.chunks(share)).enumerate();
        let all: Vec<Sums> = if self.threads == 1 {
            chunks.map(|(at, (amplitudes, marked))| work(amplitudes, marked, at * share)).collect()
        } else {
            std::thread::scope(|scope| {
                let work = &work;
                let threads: Vec<_> = chunks
                    .map(|(at, (amplitudes, marked))| scope.spawn(move || work(amplitudes, marked, at * share)))
                    .collect();
                threads.into_iter().map(|thread| thread.join().expect("no panic in a thread")).collect()
            })
        };
        all.into_iter().fold(Sums::default(), Sums::plus)
    }
}

const LANES: usize = 16;

/// The pass for a level axis: words without a marked string, which are nearly all, have no branch within.
fn level_pass<const LOOK: bool>(amplitudes: &mut [f64], marked: &[u64], level: f64, part: f64) -> Sums {
    let taken = part * level;
    let mut lanes = [0.0f64; LANES];
    let (mut flipped, mut success) = (0.0, 0.0);
    for (chunk, &word) in amplitudes.chunks_mut(64).zip(marked) {
        if word == 0 && chunk.len() == 64 {
            for row in chunk.chunks_exact_mut(LANES) {
                for (a, sum) in row.iter_mut().zip(&mut lanes) {
                    if !LOOK {
                        *a -= taken;
                    }
                    *sum += *a;
                }
            }
            continue;
        }
        for (at, a) in chunk.iter_mut().enumerate() {
            let is_marked = word >> at & 1 == 1;
            let sign = if is_marked { -1.0 } else { 1.0 };
            if !LOOK {
                *a = sign * *a - taken;
            }
            flipped += sign * *a;
            success += if is_marked { *a * *a } else { 0.0 };
        }
    }
    Sums { along: (lanes.iter().sum::<f64>() + flipped) * level, success }
}

/// The pass for any axis.
fn each_pass(amplitudes: &mut [f64], marked: &[u64], axis: &[f64], part: f64, only_look: bool) -> Sums {
    let mut sums = Sums::default();
    for ((chunk, axis), &word) in amplitudes.chunks_mut(64).zip(axis.chunks(64)).zip(marked) {
        for (at, (a, &s)) in chunk.iter_mut().zip(axis).enumerate() {
            let is_marked = word >> at & 1 == 1;
            let sign = if is_marked { -1.0 } else { 1.0 };
            if !only_look {
                *a = sign * *a - part * s;
            }
            sums.along += sign * *a * s;
            sums.success += if is_marked { *a * *a } else { 0.0 };
        }
    }
    sums
}
