//! The step-by-step simulation against the memory of this machine: each iteration reads and writes every amplitude once.
//!
//! `cargo bench --bench simulating` prints, for each size, the rate of an in-place update `a = k - a` and the rate of an
//! iteration in the same run, both in bytes read and written a second, and their ratio, of which at least 0.6 is the goal.

#![allow(clippy::print_stdout, reason = "a bench reports on standard output")]

use std::hint::black_box;
use std::time::Instant;

use tallymark::search::simulate::steps::{Axis, Stepped};

const RUNS: usize = 7;

fn best(mut work: impl FnMut()) -> f64 {
    let one = |work: &mut dyn FnMut()| {
        let start = Instant::now();
        work();
        start.elapsed().as_secs_f64()
    };
    (0..RUNS).map(|_| one(&mut work)).fold(f64::MAX, f64::min)
}

fn in_place(amplitudes: &mut [f64], threads: usize) {
    let share = amplitudes.len().div_ceil(threads);
    std::thread::scope(|scope| {
        for part in amplitudes.chunks_mut(share) {
            scope.spawn(move || part.iter_mut().for_each(|a| *a = 0.25 - *a));
        }
    });
}

fn main() {
    let most: usize = std::env::args().filter_map(|argument| argument.parse().ok()).next().unwrap_or(26);
    println!("bits  threads  in place GB/s  iteration GB/s  ratio");
    for bits in [20, 24, 26, 28].into_iter().filter(|&bits| bits <= most) {
        for threads in [1, 2] {
            let len = 1usize << bits;
            let bytes = 16.0 * len as f64 / 1e9;
            let mut amplitudes = vec![0.5f64; len];
            let memory = best(|| in_place(black_box(&mut amplitudes), threads));
            let level = (len as f64).sqrt().recip();
            amplitudes.fill(level);
            let mut marked = vec![0u64; len / 64];
            (0..16).for_each(|at| marked[(at * 0x9e37_79b9) % (len / 64)] |= 1 << at);
            let mut search = Stepped::new(amplitudes, marked, Axis::Level(level), threads);
            let iteration = best(|| {
                black_box(search.step());
            });
            let ratio = memory / iteration;
            println!("{bits:>4}  {threads:>7}  {:>13.1}  {:>14.1}  {ratio:.2}", bytes / memory, bytes / iteration);
        }
    }
}
