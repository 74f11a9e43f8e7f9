//! Budgets: how long a job may take, how much memory it may use, who may stop it, and who hears of its progress.
//!
//! Long work takes a `&Budget`, asks [`Budget::spent`] at a cheap interval and, once that is true, returns what it
//! has, marked as partial. Nothing here prints.

use std::sync::Arc;
use std::sync::atomic::{AtomicBool, Ordering};
use std::time::{Duration, Instant};

/// How far a job is.
#[derive(Clone, Copy, PartialEq, Debug)]
pub struct Progress<'a> {
    /// The step, in words.
    pub stage: &'a str,
    /// Units of work done.
    pub done: u64,
    /// Units of work in all, where known.
    pub total: Option<u64>,
}

type Listener = Arc<dyn Fn(Progress<'_>) + Send + Sync>;

/// What a job may spend.
#[derive(Clone, Default)]
pub struct Budget {
    deadline: Option<Instant>,
    memory: Option<u64>,
    cancel: Arc<AtomicBool>,
    listener: Option<Listener>,
}

impl Budget {
    /// No limit, no listener.
    pub fn unlimited() -> Self {
        Self::default()
    }

    /// The same budget with a deadline this far from now, or the earlier one it already had.
    #[must_use]
    pub fn within(mut self, time: Duration) -> Self {
        let end = Instant::now().checked_add(time);
        self.deadline = match (self.deadline, end) {
            (Some(a), Some(b)) => Some(a.min(b)),
            (a, b) => a.or(b),
        };
        self
    }

    /// The same budget with a limit on the bytes that one job may allocate for its tables.
    #[must_use]
    pub fn with_memory(mut self, bytes: u64) -> Self {
        self.memory = Some(bytes);
        self
    }

    /// The same budget with someone who hears of progress.
    #[must_use]
    pub fn with_listener(mut self, listener: impl Fn(Progress<'_>) + Send + Sync + 'static) -> Self {
        self.listener = Some(Arc::new(listener));
        self
    }

    /// Stops every job that holds this budget or a clone of it.
    pub fn cancel(&self) {
        self.cancel.store(true, Ordering::Relaxed);
    }

    /// The flag behind [`Budget::cancel`].
    pub fn cancel_flag(&self) -> Arc<AtomicBool> {
        Arc::clone(&self.cancel)
    }

    /// Whether the job must stop now.
    pub fn spent(&self) -> bool {
        self.cancel.load(Ordering::Relaxed) || self.deadline.is_some_and(|end| Instant::now() >= end)
    }

    /// The time left, or `None` where time is not limited.
    pub fn time_left(&self) -> Option<Duration> {
        self.deadline.map(|end| end.saturating_duration_since(Instant::now()))
    }

    /// The limit on memory in bytes.
    pub fn memory(&self) -> Option<u64> {
        self.memory
    }

    /// Tells the listener, if there is one.
    pub fn report(&self, stage: &str, done: u64, total: Option<u64>) {
        if let Some(listener) = &self.listener {
            listener(Progress { stage, done, total });
        }
    }
}

impl std::fmt::Debug for Budget {
    fn fmt(&self, f: &mut std::fmt::Formatter<'_>) -> std::fmt::Result {
        f.debug_struct("Budget").field("deadline", &self.deadline).field("memory", &self.memory).finish_non_exhaustive()
    }
}
