//! How near an approximate count must come, and how surely.

use num_bigint::BigUint;
use num_traits::Zero;
use thiserror::Error;

/// A tolerance t and a confidence: the count lies between c / (1 + t) and c (1 + t) with at least that probability.
#[derive(Clone, Copy, PartialEq, Debug)]
pub struct Accuracy {
    tolerance: f64,
    confidence: f64,
}

/// Why there is no such accuracy.
#[derive(Clone, Copy, PartialEq, Debug, Error)]
pub enum NotPossible {
    /// The tolerance is too small or no number.
    #[error("a tolerance from {least} up is expected, not {wrong}", least = Accuracy::LEAST_TOLERANCE)]
    Tolerance {
        /// What was asked for.
        wrong: f64,
    },
    /// The confidence is not between 0 and 1.
    #[error("a confidence above 0 and up to {most} is expected, not {wrong}", most = Accuracy::MOST_CONFIDENCE)]
    Confidence {
        /// What was asked for.
        wrong: f64,
    },
}

impl Accuracy {
    /// The least tolerance: cells have some 10 / tolerance^2 members, each of which takes a call of the solver.
    pub const LEAST_TOLERANCE: f64 = 1e-3;
    /// The highest confidence: beyond it the machine errs more often than the coins.
    pub const MOST_CONFIDENCE: f64 = 1.0 - 1e-12;
    /// The usual one: within 0.3 with a confidence of 0.95.
    pub const USUAL: Self = Self { tolerance: 0.3, confidence: 0.95 };

    /// An accuracy that can be had.
    pub fn new(tolerance: f64, confidence: f64) -> Result<Self, NotPossible> {
        if !(tolerance >= Self::LEAST_TOLERANCE && tolerance.is_finite()) {
            return Err(NotPossible::Tolerance { wrong: tolerance });
        }
        if !(confidence > 0.0 && confidence <= Self::MOST_CONFIDENCE) {
            return Err(NotPossible::Confidence { wrong: confidence });
        }
        Ok(Self { tolerance, confidence })
    }

    /// t.
    pub fn tolerance(&self) -> f64 {
        self.tolerance
    }

    /// The confidence.
    pub fn confidence(&self) -> f64 {
        self.confidence
    }

    /// The integers between `guess / (1 + t)` and `guess (1 + t)`.
    pub(super) fn around(&self, guess: &BigUint) -> (BigUint, BigUint) {
        // 1 + t is rounded up to 32 binary places, which only widens the interval.
        let one = 1u64 << 32;
        let factor = BigUint::from(one) + BigUint::from((self.tolerance * one as f64).ceil() as u128);
        let low = (guess * one + &factor - 1u32) / &factor;
        let high = (guess * &factor) >> 32;
        debug_assert!(low <= high || guess.is_zero());
        (low, high)
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn the_interval_holds_all_integers_within_the_factor_and_no_others() {
        let accuracy = Accuracy::new(0.25, 0.9).unwrap();
        let (low, high) = accuracy.around(&BigUint::from(1000u32));
        assert_eq!((low, high), (800u32.into(), 1250u32.into()));
        let (low, high) = accuracy.around(&BigUint::from(7u32));
        assert_eq!((low, high), (6u32.into(), 8u32.into()), "5.6 to 8.75");
        assert_eq!(accuracy.around(&BigUint::zero()), (BigUint::zero(), BigUint::zero()));
    }

    #[test]
    fn impossible_wishes_are_refused() {
        for tolerance in [0.0, -1.0, f64::NAN, f64::INFINITY, 1e-9] {
            assert!(Accuracy::new(tolerance, 0.9).is_err());
        }
        for confidence in [0.0, 1.0, f64::NAN, 1.5, -0.1] {
            assert!(Accuracy::new(0.3, confidence).is_err());
        }
    }
}
