//! The count lies in an interval, as an approximate tally gives it: the k whose worst case over the interval is best.
//!
//! Input: N and `1 <= low <= high <= N`. Output: k, the success at both ends, and the least over the whole interval.
//! The worst case is taken over every real number of marked states between the ends; over the integers it can only be
//! better.
//!
//! While `(2k + 1) theta_high <= pi` the success over the interval is least at one of its ends. A larger k up to the
//! first peak of `low` has a success of 0 somewhere inside. Below `2k + 1 = pi / (theta_low + theta_high)` the lower
//! end is the worse one and its success rises with k; above, the upper end is, and its success falls. So the best k is
//! one of the two integers beside that point (derived here; the test tries every k).

use num_bigint::BigUint;
use num_traits::{One, Zero};
use serde::Serialize;

use super::peak::{angle_digits, cut};
use super::success::success_wide;
use crate::search::number::{Wide, as_text, fixed};

/// A plan for an interval of counts.
#[derive(Clone, PartialEq, Debug, Serialize)]
pub struct Interval {
    /// k: how many iterations.
    #[serde(serialize_with = "as_text")]
    pub iterations: BigUint,
    /// The success if the count is the lower end.
    pub success_at_low: f64,
    /// The success if the count is the upper end.
    pub success_at_high: f64,
    /// The least success over the interval.
    pub worst: f64,
    /// The largest success over the interval.
    pub best: f64,
    /// Oracle calls until a run succeeds, on average, in the worst case; `None` where that may never be.
    pub expected_oracle_calls: Option<Wide>,
}

/// The plan for a count between `low` and `high`, both included. A lower end of 0 is taken as 1: the figures then hold
/// if there is anything to find.
pub fn interval(space: &BigUint, low: &BigUint, high: &BigUint) -> Interval {
    let low = low.max(&BigUint::one()).clone();
    assert!(low <= *high && high <= space, "an interval of counts within the space");
    let below = crossing(space, &low, high);
    let above: BigUint = &below + 1u32;
    let [below, above] = [below, above].map(|k| figures(space, &low, high, k));
    if above.1 > below.1 { above.0 } else { below.0 }
}

/// `floor((pi / (theta_low + theta_high) - 1) / 2)`.
fn crossing(space: &BigUint, low: &BigUint, high: &BigUint) -> BigUint {
    let (small, scale) = cut(space, high);
    let digits = angle_digits(&small, low);
    let both = fixed::theta(&small, low, digits) + fixed::theta(&small, high, digits);
    let pi = fixed::pi(digits);
    if pi <= both { BigUint::zero() } else { ((pi - &both) / (both * 2u32)) << scale }
}

/// The figures of this k, and its worst case.
fn figures(space: &BigUint, low: &BigUint, high: &BigUint, iterations: BigUint) -> (Interval, Wide) {
    let (at_low, at_high) = (success_wide(space, low, &iterations), success_wide(space, high, &iterations));
    let odd = Wide::of(&(&iterations * 2u32 + 1u32));
    // Beyond a half turn of the upper end there is a zero inside, unless the interval is one point.
    let turn = Wide::new(std::f64::consts::PI * (1.0 + 1e-14));
    let zero_inside = low != high && odd * super::success::theta_wide(space, high) > turn;
    let worst = if zero_inside { Wide::ZERO } else { at_low.min(at_high) };
    // The success is 1 somewhere inside where a quarter turn, or an odd number of them, lies between the two angles.
    let quarters = |theta: Wide| (odd * theta * Wide::new(std::f64::consts::FRAC_2_PI)).to_f64();
    let (from, to) =
        (quarters(super::success::theta_wide(space, low)), quarters(super::success::theta_wide(space, high)));
    let peak_inside = ((from + 1.0) / 2.0).ceil() * 2.0 - 1.0 <= to;
    let best = if peak_inside {
        Wide::ONE
    } else if at_low > at_high {
        at_low
    } else {
        at_high
    };
    let figures = Interval {
        best: best.to_f64(),
        success_at_low: at_low.to_f64(),
        success_at_high: at_high.to_f64(),
        worst: worst.to_f64(),
        expected_oracle_calls: (!worst.is_zero()).then(|| Wide::of(&iterations) / worst),
        iterations,
    };
    (figures, worst)
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::search::plan::peak::first_peak;
    use crate::search::plan::{success, theta};

    fn big(number: u64) -> BigUint {
        BigUint::from(number)
    }

    /// Every k up to the first peak of the lower end, over a fine grid of real counts.
    #[test]
    fn no_k_has_a_better_worst_case() {
        for (n, low, high) in [(16u64, 1u64, 3u64), (64, 1, 8), (64, 3, 60), (1024, 2, 9), (1024, 5, 5), (256, 1, 256)]
        {
            let found = interval(&big(n), &big(low), &big(high));
            let worst_of = |k: u64| {
                let (from, to) = (theta(&big(n), &big(low)), theta(&big(n), &big(high)));
                let at = |i: u32| ((2 * k + 1) as f64 * (from + (to - from) * f64::from(i) / 4000.0)).sin().powi(2);
                (0..=4000).map(at).fold(1.0, f64::min)
            };
            let peak = u64::try_from(first_peak(&big(n), &big(low))).unwrap();
            let best = (0..=peak).map(worst_of).fold(0.0, f64::max);
            let own = worst_of(u64::try_from(found.iterations.clone()).unwrap());
            let odd = 2.0 * u64::try_from(found.iterations.clone()).unwrap() as f64 + 1.0;
            let (from, to) = (theta(&big(n), &big(low)), theta(&big(n), &big(high)));
            let top = (0..=4000).map(|i| (odd * (from + (to - from) * f64::from(i) / 4000.0)).sin().powi(2));
            let top = top.fold(0.0, f64::max);
            assert!(
                found.best + 1e-12 > top && found.best < top + 1e-4,
                "{low} to {high} in {n}: {top}, {}",
                found.best
            );
            assert!((own - found.worst).abs() < 1e-4, "{low} to {high} in {n}: {own} and {}", found.worst);
            assert!(found.worst > best - 1e-4, "{low} to {high} in {n}: {} but {best} is possible", found.worst);
        }
    }

    #[test]
    fn one_point_is_the_plan_for_a_known_count() {
        for (n, m) in [(8u64, 1u64), (1024, 3), (1 << 20, 10), (16, 8), (16, 16)] {
            let found = interval(&big(n), &big(m), &big(m));
            let peak = first_peak(&big(n), &big(m));
            assert!((found.worst - success(&big(n), &big(m), &peak)).abs() < 1e-14, "{m} in {n}");
        }
    }

    #[test]
    fn an_interval_of_a_large_space() {
        let space = BigUint::one() << 3000u32;
        // sin^2(pi/3) = 3/4 where the ends are a factor 4 apart: theta_high = 2 theta_low.
        let found = interval(&space, &big(1), &big(4));
        assert!((found.worst - 0.75).abs() < 1e-12);
        assert_eq!(found.iterations.bits(), 1500);
        assert_eq!(interval(&space, &big(0), &big(4)), found);
    }
}
