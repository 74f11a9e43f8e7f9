//! What was tried: a way, how long it took, what it gave.

use std::time::Duration;

use num_bigint::BigUint;

use super::{Method, Tally};

/// A way that ran.
#[derive(Clone, PartialEq, Debug)]
pub struct Run {
    /// The way.
    pub method: Method,
    /// What it gave, alone: a number if equal.
    pub low: BigUint,
    /// See `low`.
    pub high: BigUint,
    /// 1 where `low` and `high` are proven.
    pub confidence: f64,
    /// How long it took. The only thing here that differs from run to run.
    pub time: Duration,
}

impl Run {
    pub(super) fn of(tally: &Tally, time: Duration) -> Self {
        let (low, high) = (tally.low.clone(), tally.high.clone());
        Self { method: tally.method, low, high, confidence: tally.confidence, time }
    }
}
