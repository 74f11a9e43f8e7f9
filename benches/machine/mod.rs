//! What the machine does at most, measured in the same run as what is compared with it.

use std::hint::black_box;
use std::time::Instant;

/// A row of 1024 bits: four vectors of 256.
#[derive(Clone, Copy)]
#[repr(C, align(64))]
struct Row([u64; 16]);

/// Rates of one core.
pub(crate) struct Machine {
    /// AND or XOR of 256 bits, one operand from the first cache, a second.
    pub(crate) and_xor: f64,
    /// Inputs through one node a second: two rows in the first cache, each or its complement, conjoined into a third.
    pub(crate) node: f64,
}

/// Measures the rates: the best of many short runs, so that other work on the machine shows little.
pub(crate) fn measure() -> Machine {
    let mut rows = vec![Row([0x9e37_79b9_7f4a_7c15; 16]); 96];
    let nodes: Vec<[u32; 3]> =
        (0..512).map(|at| [at * 7 % 64 * 2 + at % 2, at * 5 % 64 * 2 + at / 3 % 2, 64 + at % 32]).collect();
    let (mut and_xor, mut node) = (f64::MAX, f64::MAX);
    let mut sum = Row([0; 16]);
    for _ in 0..2000 {
        and_xor = and_xor.min(wall(|| (0..20).for_each(|_| run_and_xor(black_box(&rows), &mut sum))));
        node = node.min(wall(|| (0..4).for_each(|_| run_nodes(black_box(&nodes), &mut rows))));
    }
    black_box((sum.0, rows[64].0));
    Machine { and_xor: 20.0 * 96.0 * 4.0 / and_xor, node: 4.0 * 512.0 * 1024.0 / node }
}

fn wall(work: impl FnOnce()) -> f64 {
    let start = Instant::now();
    work();
    start.elapsed().as_secs_f64()
}

/// Seconds of the best of some runs: by the clock, or this thread's own processor time where one thread works, the system
/// tells, and the run is long beside the grain of that figure.
pub(crate) fn seconds(threads: usize, runs: usize, mut work: impl FnMut()) -> f64 {
    let mut one = || {
        let start = thread_time();
        let by_clock = wall(&mut work);
        match (start, thread_time()) {
            (Some(start), Some(end)) if threads == 1 && by_clock > 0.2 => (end - start) as f64 / 1e9,
            _ => by_clock,
        }
    };
    (0..runs).map(|_| one()).fold(f64::MAX, f64::min)
}

/// Nanoseconds that this thread has run.
fn thread_time() -> Option<u64> {
    std::fs::read_to_string("/proc/thread-self/schedstat").ok()?.split(' ').next()?.parse().ok()
}

/// Defines a loop over rows that is compiled for AVX2 as well, as the judge's own loops are.
macro_rules! wide_fn {
    (fn $name:ident($($arg:ident: $ty:ty),*) $body:block) => {
        fn $name($($arg: $ty),*) {
            #[inline(always)]
            fn here($($arg: $ty),*) $body
            #[cfg(target_arch = "x86_64")]
            {
                #[target_feature(enable = "avx2")]
                fn avx2($($arg: $ty),*) {
                    here($($arg),*)
                }
                if is_x86_feature_detected!("avx2") {
                    // SAFETY: the processor has AVX2.
                    return unsafe { avx2($($arg),*) };
                }
            }
            here($($arg),*)
        }
    };
}

wide_fn! {
    fn run_and_xor(rows: &[Row], sum: &mut Row) {
        let mut all = *sum;
        for pair in rows.chunks_exact(2) {
            for word in 0..16 {
                all.0[word] = (all.0[word] & pair[0].0[word]) ^ pair[1].0[word];
            }
        }
        *sum = all;
    }
}

wide_fn! {
    fn run_nodes(nodes: &[[u32; 3]], rows: &mut [Row]) {
        for &[a, b, to] in nodes {
            let (flip_a, flip_b) = (0u64.wrapping_sub(u64::from(a & 1)), 0u64.wrapping_sub(u64::from(b & 1)));
            let (a, b) = (&rows[(a >> 1) as usize], &rows[(b >> 1) as usize]);
            let mut result = Row([0; 16]);
            for word in 0..16 {
                result.0[word] = (a.0[word] ^ flip_a) & (b.0[word] ^ flip_b);
            }
            rows[to as usize] = result;
        }
    }
}
