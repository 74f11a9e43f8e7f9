//! The hit rate against the plan: how sure it is, whether it contradicts the plan, and what noise would explain it.
//!
//! Input: hits and shots, and what the plan predicts. Output: the exact interval for the chance of a hit, the exact
//! two-sided test of the prediction, and the error per iteration at which the model of
//! [`noise`](crate::search::plan::noise) gives the measured rate. All shots must come from runs of the same circuit.

use num_bigint::BigUint;
use num_traits::ToPrimitive;
use serde::Serialize;

use crate::search::number::Wide;
use crate::search::plan::success;
use crate::search::{Plan, binomial};

/// What a plan says about one shot.
#[derive(Clone, PartialEq, Debug)]
pub struct Predicted {
    /// The least chance of a hit; equal to `high` where the count is known.
    pub low: f64,
    /// The largest chance of a hit.
    pub high: f64,
    /// The iterations that were run.
    pub iterations: BigUint,
    /// The chance of a hit from the evenly mixed state of the whole register, where the count is known.
    pub floor: Option<f64>,
}

impl Predicted {
    /// What this plan says, for a start state over all strings of the register.
    pub fn by(plan: &Plan) -> Self {
        Self::after(&plan.space, &plan.marked, plan.iterations.clone())
    }

    /// What is to be expected after so many plain iterations, for a start state over all strings of the register.
    pub fn after(space: &BigUint, marked: &BigUint, iterations: BigUint) -> Self {
        let success = success(space, marked, &iterations);
        Self { low: success, high: success, iterations, floor: Some(Wide::ratio(marked, space).to_f64()) }
    }
}

/// How a rate compares with a prediction.
#[derive(Clone, PartialEq, Debug, Serialize)]
pub struct Comparison {
    /// Shots that gave a solution.
    pub hits: u64,
    /// All shots.
    pub shots: u64,
    /// Their quotient.
    pub rate: f64,
    /// The confidence of the interval.
    pub confidence: f64,
    /// The lower end of the exact interval.
    pub rate_low: f64,
    /// Its upper end.
    pub rate_high: f64,
    /// The chance of a result as far off as this if the plan is right: the exact two-sided test.
    pub p_value: f64,
    /// Whether that is less than the confidence leaves: the results contradict the plan.
    pub contradicts: bool,
    /// The error per iteration that explains the rate: none where the rate reaches the prediction, and no number where
    /// it does not even reach that of the evenly mixed state, or no iteration was run.
    pub error_per_iteration: Option<f64>,
    /// The least error that fits the interval.
    pub error_low: Option<f64>,
    /// The largest error that fits the interval; no number where any does.
    pub error_high: Option<f64>,
}

/// Compares so many hits in so many shots, at least one, with the prediction.
pub fn compare(hits: u64, shots: u64, predicted: &Predicted, confidence: f64) -> Comparison {
    let rate = hits as f64 / shots as f64;
    let (rate_low, rate_high) = binomial::interval(hits, shots, confidence);
    // Of all chances that the plan allows, the one nearest to the rate fits best.
    let p_value = match () {
        () if rate < predicted.low => binomial::two_sided(hits, shots, predicted.low),
        () if rate > predicted.high => binomial::two_sided(hits, shots, predicted.high),
        () => 1.0,
    };
    let error = |rate| error_for(rate, predicted);
    Comparison {
        hits,
        shots,
        rate,
        confidence,
        rate_low,
        rate_high,
        p_value,
        contradicts: p_value < 1.0 - confidence,
        error_per_iteration: error(rate),
        error_low: error(rate_high),
        error_high: error(rate_low),
    }
}

/// Solves `(1 - q)^k (p - f) + f = rate` for q.
fn error_for(rate: f64, predicted: &Predicted) -> Option<f64> {
    let (floor, success) = (predicted.floor?, predicted.high);
    let iterations = predicted.iterations.to_f64().filter(|&k| k > 0.0)?;
    if rate >= success {
        return Some(0.0);
    }
    let kept = (rate - floor) / (success - floor);
    (kept > 0.0).then(|| -(kept.ln() / iterations).exp_m1())
}

#[cfg(test)]
mod tests {
    use super::*;

    fn known(success: f64, iterations: u32, floor: f64) -> Predicted {
        Predicted { low: success, high: success, iterations: iterations.into(), floor: Some(floor) }
    }

    /// 1024 states, one marked: with 1% of error per iteration 25 iterations succeed with 0.777619275382571 (the model
    /// of `plan::noise`; computed with 40 digits outside this program).
    #[test]
    fn the_noise_that_explains_a_rate() {
        let predicted = known(0.999461244744408, 25, 1.0 / 1024.0);
        let error = error_for(0.777619275382571, &predicted).unwrap();
        assert!((error - 0.01).abs() < 1e-13, "{error}");
        let found = compare(7776, 10_000, &predicted, 0.95);
        assert!(found.contradicts && found.error_low.unwrap() < 0.01 && found.error_high.unwrap() > 0.01);
        assert_eq!(compare(10_000, 10_000, &predicted, 0.95).error_per_iteration, Some(0.0));
        assert_eq!(compare(0, 10_000, &predicted, 0.95).error_per_iteration, None);
        assert_eq!(compare(1, 10, &known(0.1, 0, 0.1), 0.95).error_per_iteration, None);
    }

    #[test]
    fn contradiction_is_leaving_the_interval() {
        for (hits, shots) in [(0u64, 20u64), (12, 20), (20, 20), (950, 1000)] {
            for percent in 1..100 {
                let success = f64::from(percent) / 100.0;
                let found = compare(hits, shots, &known(success, 3, 0.0), 0.95);
                let inside = (found.rate_low..=found.rate_high).contains(&success);
                assert_eq!(found.contradicts, !inside, "{hits} of {shots} at {success}");
            }
        }
        // A certain hit allows no miss at all.
        assert!(compare(999_999, 1_000_000, &known(1.0, 1, 0.25), 0.95).contradicts);
        assert!(!compare(1_000_000, 1_000_000, &known(1.0, 1, 0.25), 0.95).contradicts);
        let range = Predicted { low: 0.2, high: 0.8, iterations: 1u32.into(), floor: None };
        assert_eq!(compare(10, 20, &range, 0.95).p_value, 1.0);
        assert!(compare(0, 20, &range, 0.95).contradicts);
    }
}
