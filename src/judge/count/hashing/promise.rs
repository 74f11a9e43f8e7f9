//! What a tolerance and a confidence cost: how large the cells must be, and how often the whole is repeated.
//!
//! Let M be the count, e = t / (1 + t) for the tolerance t, and P = k / e^2 the *pivot*. A cell is *small* if it has
//! less than `1 + P (1 + e)` members. One round takes the smallest m for which the cell under the first m equations is
//! small, and guesses M as 2^m times its size. With m* the number for which E = M / 2^m* lies in `[P / 2, P)`, a round
//! is wrong (off by more than the factor 1 + t) only if one of these happens; X(m) is the size of the cell, whose mean
//! is `M / 2^m` and whose variance is at most that, because the equations are pairwise independent:
//!
//! - the cell at m* - 3 (mean 8 E) is small already, or an earlier one, which contains it;
//! - at m* - 2 (mean 4 E), m* - 1 (mean 2 E) or m* the cell is below its mean by the factor 1 + t;
//! - at m* the cell is above its mean by the factor 1 + t, or not small.
//!
//! The cells at m* - 1 and m* - 2 cannot be too large if small: P (1 + e) is not above (1 + e) times their means.
//! Each is bounded by the one-sided inequality of F. P. Cantelli (1928, from memory): with variance v a value is below
//! (or above) its mean by d with a probability of at most v / (v + d^2); the two at m* together also by Chebyshev's.
//! This is the argument of S. Chakraborty, K. S. Meel, M. Y. Vardi, "Algorithmic improvements in approximate counting
//! for probabilistic inference: from linear to logarithmic SAT calls", IJCAI 2016, section 4 (there k = 9.84 and at most
//! 0.36 for a round; the sum is computed here for every k, and the k with the least work is taken).
//!
//! The median of r rounds is wrong only if half of them are: a tail of the binomial distribution, summed exactly.

/// How to keep a promise.
#[derive(Clone, Copy, PartialEq, Debug)]
pub(super) struct Promise {
    /// Members from which on a cell is not small.
    pub(super) threshold: u64,
    /// Rounds, an odd number.
    pub(super) rounds: u32,
}

/// Values of k that are tried, as a geometric sequence.
const KAPPAS: i32 = 60;
const FIRST_KAPPA: f64 = 6.0;
const KAPPA_STEP: f64 = 1.06;
/// Rounds above which a k is out of the question.
const MAX_ROUNDS: u32 = 301;
/// Parts of `[P / 2, P)`, in each of which every bound is taken at its worst end.
const PARTS: u32 = 64;

impl Promise {
    /// The cheapest way to come within a factor of `1 + tolerance` with at least this confidence. Both are above 0, the
    /// confidence below 1; a tolerance above 1 costs as much as 1.
    pub(super) fn of(tolerance: f64, confidence: f64) -> Self {
        let tolerance = tolerance.min(1.0);
        let made = (0..KAPPAS).filter_map(|at| Self::with(tolerance, confidence, FIRST_KAPPA * KAPPA_STEP.powi(at)));
        // The largest k is right for every confidence that a float can hold.
        made.min_by_key(|promise| promise.threshold * u64::from(promise.rounds)).expect("a large k serves")
    }

    fn with(tolerance: f64, confidence: f64, kappa: f64) -> Option<Self> {
        let wrong = wrong_round(tolerance, kappa);
        let failing = |&rounds: &u32| wrong_median(rounds, wrong) <= 1.0 - confidence;
        let rounds = (1..=MAX_ROUNDS).step_by(2).find(failing)?;
        let e = tolerance / (1.0 + tolerance);
        Some(Self { threshold: (1.0 + kappa / (e * e) * (1.0 + e)).ceil() as u64, rounds })
    }
}

/// A bound on the probability that one round is wrong.
fn wrong_round(tolerance: f64, kappa: f64) -> f64 {
    let e = tolerance / (1.0 + tolerance);
    let pivot = kappa / (e * e);
    let small = pivot * (1.0 + e) + 1.0;
    let cantelli = |mean: f64, distance: f64| mean / (mean + distance * distance);
    let below = |mean: f64| cantelli(mean, mean * e);
    let part = |at: u32| {
        // Everything but "not small" is likeliest at the lower end of a part.
        let low = pivot * (0.5 + 0.5 * f64::from(at) / f64::from(PARTS));
        let high = pivot * (0.5 + 0.5 * f64::from(at + 1) / f64::from(PARTS));
        let earlier = cantelli(8.0 * low, 8.0 * low - small) + below(4.0 * low) + below(2.0 * low);
        let above = cantelli(low, low * tolerance).max(cantelli(high, (pivot * (1.0 + e) - high).max(0.0)));
        // Not small means above E by the factor 1 + e at least, since E is below the pivot.
        let chebyshev = 1.0 / (low * e * e);
        earlier + chebyshev.min(below(low) + above)
    };
    (0..PARTS).map(part).fold(0.0, f64::max).min(1.0)
}

/// The probability that at least half of an odd number of rounds are wrong.
fn wrong_median(rounds: u32, wrong: f64) -> f64 {
    let mut term = (1.0 - wrong).powi(rounds as i32);
    let mut sum = 0.0;
    for hits in 0..=rounds {
        if 2 * hits > rounds {
            sum += term;
        }
        term *= f64::from(rounds - hits) / f64::from(hits + 1) * wrong / (1.0 - wrong);
    }
    sum
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn the_published_constants_are_within_the_bounds() {
        // IJCAI 2016, section 4: threshold 1 + 9.84 (1 + t / (1 + t)) (1 + 1 / t)^2; a round fails with 0.36 (rounded).
        for tolerance in [0.1, 0.3, 0.8, 1.0] {
            let wrong = wrong_round(tolerance, 9.84);
            assert!(wrong < 0.3605 && wrong > 0.2, "{tolerance}: {wrong}");
        }
        let promise = Promise::with(0.8, 0.8, 9.84).unwrap();
        assert_eq!(promise.threshold, 73);
        // Binomial tails, summed in exact arithmetic outside this program.
        assert!((wrong_median(9, 0.36) - 0.189036).abs() < 1e-6);
        assert!((wrong_median(7, 0.36) - 0.216652).abs() < 1e-6);
    }

    #[test]
    fn more_is_asked_more_is_paid() {
        let work = |tolerance, confidence| {
            let promise = Promise::of(tolerance, confidence);
            assert!(promise.rounds % 2 == 1);
            promise.threshold * u64::from(promise.rounds)
        };
        assert!(work(0.1, 0.9) > work(0.3, 0.9) && work(0.3, 0.99) > work(0.3, 0.9));
        assert!(work(0.3, 0.9) <= 9 * 228, "no worse than the published constants");
        assert_eq!(Promise::of(5.0, 0.9), Promise::of(1.0, 0.9));
        Promise::of(1e-3, 1.0 - 1e-12);
    }
}
