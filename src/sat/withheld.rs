//! Answers withheld: how a test shows that some work does not lean on solvers.
//!
//! While [`withholding`] runs, every question on its thread is left unanswered, as if the budget had run out, but for those
//! that are bounded from the start: with a limit of steps ([`Batsat::limit`](super::Batsat::limit)), or small and about no
//! assignment of a problem ([`Varisat::local`](super::Varisat::local)).

use std::cell::Cell;

thread_local! {
    /// How many questions were left unanswered, while answers are withheld.
    static UNANSWERED: Cell<Option<u64>> = const { Cell::new(None) };
}

/// Does some work without the answers. Gives what it made, and how many questions it asked in vain.
pub fn withholding<T>(work: impl FnOnce() -> T) -> (T, u64) {
    let before = UNANSWERED.replace(Some(0));
    let made = work();
    (made, UNANSWERED.replace(before).unwrap_or(0))
}

/// Whether this question is to be left unanswered.
pub(super) fn is_withheld() -> bool {
    let asked = UNANSWERED.get();
    UNANSWERED.set(asked.map(|asked| asked + 1));
    asked.is_some()
}
