//! Counting on the machine: amplitude estimation.
//!
//! Input: the precision wanted of the share `a = M/N`. Output: the number m of evaluation points (m - 1 controlled
//! iterations), the bound on the error, and the exact distribution of what is measured.
//!
//! The measured y of 0 to m - 1 gives the estimate `sin^2(pi y / m)`. With probability at least `8/pi^2` it is within
//! `2 pi sqrt(a (1 - a)) / m + pi^2 / m^2` of a; the middle one of several runs is within it with a probability as near
//! to 1 as wanted. With `w = theta / pi` and `F(d) = (sin(m pi d) / (m sin(pi d)))^2`, y is measured with probability
//! `(F(y/m - w) + F(y/m + w)) / 2`.
//!
//! # References
//! - G. Brassard, P. Hoyer, M. Mosca, A. Tapp: "Quantum amplitude amplification and estimation", AMS Contemporary
//!   Mathematics 305 (2002), Theorem 12 (statement from memory; checked against the exact distribution).

use std::f64::consts::PI;

use num_bigint::BigUint;
use num_traits::One;
use serde::Serialize;

use super::success::theta;
use crate::search::binomial;
use crate::search::number::{Wide, as_text};

/// The probability that one run is within the bound, at least: `8 / pi^2`.
pub const CONFIDENCE: f64 = 8.0 / (PI * PI);

/// The exact distribution is computed up to so many evaluation points.
pub const MAX_POINTS: u64 = 1 << 22;

/// What an estimation of a given precision takes.
#[derive(Clone, PartialEq, Debug, Serialize)]
pub struct Estimation {
    /// m: the evaluation points.
    #[serde(serialize_with = "as_text")]
    pub points: BigUint,
    /// The qubits of the register that controls the iterations.
    pub register: u64,
    /// Controlled iterations of one run: m - 1.
    #[serde(serialize_with = "as_text")]
    pub iterations: BigUint,
    /// Runs, of which the middle estimate is taken; an odd number.
    pub runs: u64,
    /// The chance that the middle estimate lies outside the precision, at most.
    pub error: f64,
    /// Controlled iterations of all runs together.
    #[serde(serialize_with = "as_text")]
    pub all_iterations: BigUint,
}

/// The fewest evaluation points, a power of two, for an estimate of the share within `precision` with at most this
/// error; `share` is what is known of the share, where something is: without it the worst case, 1/2, is taken.
pub fn estimation(precision: Wide, share: Option<Wide>, error: f64) -> Estimation {
    assert!(!precision.is_zero() && error > 0.0 && error < 1.0, "a precision and an error between 0 and 1");
    let half = Wide::new(0.5);
    let spread = share.map_or(half, |a| if a < half { (a * Wide::ONE.less(a)).sqrt() } else { half });
    // pi^2 t^2 + 2 pi s t = precision for t = 1/m, so 1/t = pi (s + sqrt(s^2 + precision)) / precision.
    let wanted = Wide::new(PI) * (spread + (spread.square() + precision).sqrt()) / precision;
    let register = wanted.ceil().bits() - u64::from(is_power_of_two(&wanted.ceil()));
    let points = BigUint::one() << register;
    let iterations = &points - 1u32;
    let runs = runs_for(error);
    Estimation { register, runs, error: middle_error(runs), all_iterations: &iterations * runs, points, iterations }
}

/// The precision to which the share must be known so that rounding gives the count itself: half a state.
pub fn precision_of_exact_count(space: &BigUint) -> Wide {
    Wide::ratio(&BigUint::one(), &(space * 2u32))
}

fn is_power_of_two(number: &BigUint) -> bool {
    number.trailing_zeros().is_some_and(|zeros| zeros + 1 == number.bits())
}

/// The fewest runs, an odd number, whose middle estimate is outside the bound with at most this chance.
fn runs_for(error: f64) -> u64 {
    (0..).map(|half| 2 * half + 1).find(|&runs| middle_error(runs) <= error).expect("the error falls without end")
}

/// The middle one is outside only if more than half of the runs are.
fn middle_error(runs: u64) -> f64 {
    binomial::at_least(runs.div_ceil(2), runs, 1.0 - CONFIDENCE)
}

/// The bound on the error that one run keeps with a chance of [`CONFIDENCE`] at least (`k = 1`), or of
/// `1 - 1 / (2 (k - 1))` for larger k.
pub fn bound(share: f64, points: u64, k: u32) -> f64 {
    let (m, k) = (points as f64, f64::from(k));
    2.0 * PI * k * (share * (1.0 - share)).sqrt() / m + (k * PI / m).powi(2)
}

/// The estimate that a measured y stands for.
pub fn estimate_of(y: u64, points: u64) -> f64 {
    (PI * y as f64 / points as f64).sin().powi(2)
}

/// The probability of every y, for up to [`MAX_POINTS`] points.
pub fn distribution(space: &BigUint, marked: &BigUint, points: u64) -> Vec<f64> {
    assert!((1..=MAX_POINTS).contains(&points), "a distribution that can be listed");
    let turn = theta(space, marked) / PI * points as f64;
    let peak = |distance: f64| {
        let (inner, outer) = ((PI * distance).sin(), (PI * distance / points as f64).sin());
        // At a whole turn the quotient is its limit.
        if outer.abs() < 1e-12 { 1.0 } else { (inner / (points as f64 * outer)).powi(2) }
    };
    (0..points).map(|y| 0.5 * (peak(y as f64 - turn) + peak(y as f64 + turn))).collect()
}

/// The probability that the estimate of one run is within `precision` of the share.
pub fn chance_within(space: &BigUint, marked: &BigUint, points: u64, precision: f64) -> f64 {
    let share = Wide::ratio(marked, space).to_f64();
    let all = distribution(space, marked, points);
    let near = |y: &usize| (estimate_of(*y as u64, points) - share).abs() <= precision;
    (0..all.len()).filter(near).map(|y| all[y]).sum()
}

#[cfg(test)]
mod tests {
    use super::*;

    fn big(number: u64) -> BigUint {
        BigUint::from(number)
    }

    fn near(found: f64, wanted: f64) {
        assert!((found / wanted - 1.0).abs() < 1e-13, "{found} not {wanted}");
    }

    /// M, N, m, bound, chance within it. Source: Brassard and others 2002, Theorem 12 (from memory); the distribution
    /// derived and computed with 40 digits outside this program.
    #[test]
    fn bounds_and_chances_of_known_cases() {
        for (marked, space, points, limit, chance) in [
            (1u64, 4u64, 16u64, 0.208596832588713, 0.865151630499269),
            (1, 8, 16, 0.168426155974038, 0.965082435078162),
            (1, 1024, 64, 0.00547603456873461, 0.872652991252573),
        ] {
            let found = bound(marked as f64 / space as f64, points, 1);
            near(found, limit);
            near(chance_within(&big(space), &big(marked), points, found), chance);
            assert!(chance >= CONFIDENCE);
        }
        near(CONFIDENCE, 0.810569469138702);
    }

    #[test]
    fn distributions_of_known_cases() {
        let half = distribution(&big(2), &big(1), 8);
        for (y, p) in half.iter().enumerate() {
            assert!((p - if y == 2 || y == 6 { 0.5 } else { 0.0 }).abs() < 1e-15, "{y}: {p}");
        }
        near(estimate_of(2, 8), 0.5);
        let quarter = distribution(&big(4), &big(1), 16);
        near(quarter[3] + quarter[13], 0.688537554578971);
        near(estimate_of(3, 16), 0.308658283817455);
        assert!(quarter.iter().all(|&p| p <= quarter[3]));
        // Nothing marked gives 0 for certain; everything marked gives 1 for certain where m is even.
        near(distribution(&big(8), &big(0), 16)[0], 1.0);
        near(distribution(&big(8), &big(8), 16)[8], 1.0);
        for (space, marked, points) in [(1000, 7, 64), (5, 2, 7), (1 << 20, 3, 1000)] {
            near(distribution(&big(space), &big(marked), points).iter().sum(), 1.0);
        }
    }

    #[test]
    fn points_for_a_precision_keep_it() {
        for (space, marked, precision) in
            [(1024u64, 1u64, 1e-3), (1024, 512, 0.01), (64, 5, 0.02), (64, 5, 1.0 / 128.0)]
        {
            let known = estimation(Wide::new(precision), Some(Wide::ratio(&big(marked), &big(space))), 0.05);
            let unknown = estimation(Wide::new(precision), None, 0.05);
            assert!(known.points <= unknown.points);
            for plan in [known, unknown] {
                let points = u64::try_from(plan.points).unwrap();
                assert!(bound(marked as f64 / space as f64, points, 1) <= precision);
                assert!(chance_within(&big(space), &big(marked), points, precision) >= CONFIDENCE);
                assert_eq!(1 << plan.register, points);
            }
        }
        // One run is outside with a chance of 0.1894...; of three, two or three: 3 p^2 - 2 p^3 = 0.0941; of five
        // 0.0503...
        let runs = [0.19, 0.1, 0.06, 0.05].map(|error| estimation(Wide::new(0.1), None, error).runs);
        assert_eq!(runs, [1, 3, 5, 7]);
        let exact =
            estimation(precision_of_exact_count(&(BigUint::one() << 3000u32)), Some(Wide::power_of_two(-3000)), 0.1);
        assert!(exact.register.abs_diff(1503) <= 1, "{}", exact.register);
    }
}
