//! Runs of work on several threads, merged in the order of the runs, so that the result does not depend on the threads.

use std::collections::BTreeMap;
use std::sync::Mutex;
use std::sync::atomic::{AtomicBool, AtomicU64, Ordering};

/// Whether to go on after a run was merged.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub(crate) enum Then {
    GoOn,
    Stop,
}

/// Does runs `0..runs`, handed out in order, on `threads` threads, and merges their results in order. A run that gives
/// `None` ends its thread: what lies behind it is never merged. Returns how many runs were merged.
pub(crate) fn in_order<S, T: Send>(
    threads: usize,
    runs: u64,
    state: impl Fn() -> S + Sync,
    work: impl Fn(&mut S, u64) -> Option<T> + Sync,
    merge: impl FnMut(u64, T) -> Then + Send,
) -> u64 {
    let next = AtomicU64::new(0);
    let stopped = AtomicBool::new(false);
    let merger = Mutex::new(Merger { merge, merged: 0, waiting: BTreeMap::new(), stopped: false });
    let one_thread = || {
        let mut state = state();
        while !stopped.load(Ordering::Relaxed) {
            let run = next.fetch_add(1, Ordering::Relaxed);
            if run >= runs {
                return;
            }
            let Some(result) = work(&mut state, run) else {
                return stopped.store(true, Ordering::Relaxed);
            };
            if merger.lock().expect("no thread panicked").add(run, result) == Then::Stop {
                stopped.store(true, Ordering::Relaxed);
            }
        }
    };
    let helpers = (threads.max(1) as u64).min(runs).saturating_sub(1);
    std::thread::scope(|scope| {
        (0..helpers).for_each(|_| drop(scope.spawn(one_thread)));
        one_thread();
    });
    merger.into_inner().expect("no thread panicked").merged
}

/// Results that came before one of an earlier run wait here.
struct Merger<T, M> {
    merge: M,
    merged: u64,
    waiting: BTreeMap<u64, T>,
    /// Whether nothing more may be merged.
    stopped: bool,
}

impl<T, M: FnMut(u64, T) -> Then> Merger<T, M> {
    fn add(&mut self, run: u64, result: T) -> Then {
        if self.stopped {
            return Then::Stop;
        }
        self.waiting.insert(run, result);
        while let Some(result) = self.waiting.remove(&self.merged) {
            let then = (self.merge)(self.merged, result);
            self.merged += 1;
            if then == Then::Stop {
                self.stopped = true;
                return Then::Stop;
            }
        }
        Then::GoOn
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn results_come_in_order_and_stop_where_asked() {
        for threads in [1, 2, 5] {
            let mut seen = Vec::new();
            let merge = |run, square| {
                seen.push((run, square));
                if run == 20 { Then::Stop } else { Then::GoOn }
            };
            let merged = in_order(threads, 1000, || (), |(), run| Some(run * run), merge);
            assert_eq!(merged, 21);
            assert_eq!(seen, (0..=20).map(|run| (run, run * run)).collect::<Vec<_>>());
        }
    }

    #[test]
    fn nothing_behind_a_run_that_gave_up_is_merged() {
        for threads in [1, 2] {
            let mut last = None;
            let work = |(): &mut (), run| (run != 7).then_some(run);
            let merged = in_order(
                threads,
                100,
                || (),
                work,
                |run, _| {
                    last = Some(run);
                    Then::GoOn
                },
            );
            assert!(merged <= 7 && last.is_none_or(|last| last < 7));
        }
    }
}
