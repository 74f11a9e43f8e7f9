//! How near a count must be known for a plan: the tolerance that a margin of success allows, and what an interval costs.
//!
//! Input: what a plan aims at and a margin, or N and an interval of counts. Output: the tolerance t for which every
//! count in `[c / (1 + t), c (1 + t)]` has a success within the margin of the best; or, for a given interval, the
//! iteration count that would be reported and how far its worst case lies below the best.
//!
//! Derived for small M/N, where theta goes with the root of M, so that theta at the ends of the interval is theta(c)
//! times `(1 + t)^(-1/2)` and `(1 + t)^(1/2)`:
//!
//! - **At a peak** the best k for an interval makes both ends equally far from a right angle, `(2k + 1) = pi / (theta_low
//!   + theta_high)`; with `r = theta_high / theta_low = 1 + t` that is a distance of `(pi / 2) (r - 1) / (r + 1)`, and
//!   the loss is `sin^2((pi / 2) t / (2 + t))`: `(pi t / 4)^2` for small t, quadratic in the tolerance.
//! - **At the least work** `(2k + 1) theta(c) = y` with `tan y = 2 y`, on the slope of the sine. The low end has
//!   `sin^2(y / (1 + t)^(1/2))`, and the loss is `t y sin(2 y) / 2`, about 0.42 t, for small t: linear.
//!
//! Both are solved for t exactly. An iteration count is whole, and M/N need not be small, so [`reported`] has the last
//! word.

use num_bigint::BigUint;

use super::interval::interval;
use super::success::success_wide;
use super::{plan, plan_for_least_work};

/// What the iteration count is chosen for.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub enum Slope {
    /// The best worst case over the interval: near a peak.
    Peak,
    /// The least expected work for the middle of the interval: before the peak. A try costs as much as an iteration.
    LeastWork,
}

/// The y with `tan y = 2 y` between 0 and a right angle: where `(2k + 1) theta` lies at the least work. Computed to all
/// digits of a double; M. Boyer, G. Brassard, P. Hoyer, A. Tapp 1998, section 3 have the equation.
const LEAST_WORK_ANGLE: f64 = 1.165_561_185_207_211_4;

impl Slope {
    /// The tolerance that loses no more than this margin, which is above 0. It is infinite where any count will do.
    pub fn tolerance(self, margin: f64) -> f64 {
        match self {
            Slope::Peak if margin >= 1.0 => f64::INFINITY,
            Slope::Peak => {
                let share = margin.sqrt().asin() / std::f64::consts::FRAC_PI_2;
                2.0 * share / (1.0 - share)
            }
            Slope::LeastWork => {
                let worst = LEAST_WORK_ANGLE.sin().powi(2) - margin;
                if worst <= 0.0 { f64::INFINITY } else { (LEAST_WORK_ANGLE / worst.sqrt().asin()).powi(2) - 1.0 }
            }
        }
    }
}

/// How near the count was brought for a plan.
#[derive(Clone, PartialEq, Debug)]
pub struct ForPlan {
    /// The margin that was asked for.
    pub margin: f64,
    /// The tolerance of the interval, `(high / low)^(1/2) - 1`; 0 where the number is known.
    pub tolerance: f64,
    /// The iteration count and its success.
    pub reported: Reported,
}

impl ForPlan {
    /// Whether the worst case is within the margin.
    pub fn is_reached(&self) -> bool {
        self.reported.loss() <= self.margin
    }
}

/// The iteration count for an interval, and what not knowing better costs.
#[derive(Clone, PartialEq, Debug)]
pub struct Reported {
    /// k.
    pub iterations: BigUint,
    /// The least success over the interval.
    pub worst: f64,
    /// The success that a plan for a known count would have: the higher one of both ends.
    pub best: f64,
}

impl Reported {
    /// How far the worst case lies below the best; never below 0.
    pub fn loss(&self) -> f64 {
        (self.best - self.worst).max(0.0)
    }
}

/// What would be reported for a count between `low` and `high`, both included; `low` is at least 1, `high` at most
/// `space`.
pub fn reported(slope: Slope, space: &BigUint, low: &BigUint, high: &BigUint) -> Reported {
    match slope {
        Slope::Peak => {
            let found = interval(space, low, high);
            let best = plan(space, low).success.max(plan(space, high).success);
            Reported { iterations: found.iterations, worst: found.worst, best }
        }
        Slope::LeastWork => {
            let middle = (low * high).sqrt();
            let known = plan_for_least_work(space, &middle, 1.0);
            // Up to the peak of the high end the success rises with the count.
            let at = |marked: &BigUint| success_wide(space, marked, &known.iterations).to_f64();
            let worst = at(low).min(at(high));
            Reported { iterations: known.iterations, worst, best: known.success }
        }
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    /// The ends of the interval around c with this tolerance.
    fn ends(c: &BigUint, tolerance: f64) -> (BigUint, BigUint) {
        let one = 1u64 << 40;
        let factor = BigUint::from(((1.0 + tolerance) * one as f64) as u128);
        (c * one / &factor, c * &factor / one)
    }

    #[test]
    fn the_angle_of_the_least_work() {
        assert!((LEAST_WORK_ANGLE.tan() - 2.0 * LEAST_WORK_ANGLE).abs() < 1e-12);
    }

    /// The tolerance of a margin loses the margin, to what whole iteration counts and short angles change.
    #[test]
    fn a_tolerance_loses_its_margin_and_no_more() {
        let space = BigUint::from(1u32) << 120u32;
        for c in [BigUint::from(1u32) << 40u32, BigUint::from(3u32) << 60u32] {
            for slope in [Slope::Peak, Slope::LeastWork] {
                for margin in [1e-4, 1e-3, 0.01, 0.1, 0.3] {
                    let (low, high) = ends(&c, slope.tolerance(margin));
                    let loss = reported(slope, &space, &low, &high).loss();
                    assert!((loss / margin - 1.0).abs() < 1e-3, "{slope:?} {margin}: {loss}");
                }
            }
        }
    }

    #[test]
    fn quadratic_at_a_peak_and_linear_at_the_least_work() {
        let space = BigUint::from(1u32) << 200u32;
        let c = BigUint::from(1u32) << 100u32;
        let loss = |slope, tolerance| {
            let (low, high) = ends(&c, tolerance);
            reported(slope, &space, &low, &high).loss()
        };
        let pi = std::f64::consts::PI;
        let slope = 0.5 * LEAST_WORK_ANGLE * (2.0 * LEAST_WORK_ANGLE).sin();
        for tolerance in [0.02, 0.01, 0.005] {
            let (peak, least) = (loss(Slope::Peak, tolerance), loss(Slope::LeastWork, tolerance));
            assert!((peak / (pi * tolerance / 4.0).powi(2) - 1.0).abs() < 0.03, "{tolerance}: {peak}");
            assert!((least / (slope * tolerance) - 1.0).abs() < 0.03, "{tolerance}: {least}");
        }
        assert!((slope - 0.4222).abs() < 1e-3);
    }

    /// On small spaces, against every count in the interval.
    #[test]
    fn the_worst_case_is_the_worst_of_all_counts() {
        let big = |number: u64| BigUint::from(number);
        for (n, low, high) in [(4096u64, 3u64, 5u64), (4096, 40, 60), (65536, 9, 9), (1024, 100, 300)] {
            for slope in [Slope::Peak, Slope::LeastWork] {
                let found = reported(slope, &big(n), &big(low), &big(high));
                let at = |m: u64| success_wide(&big(n), &big(m), &found.iterations).to_f64();
                let least = (low..=high).map(at).fold(1.0, f64::min);
                assert!(found.worst <= least + 1e-12, "{n} {low} {high} {slope:?}: {} but {least}", found.worst);
            }
        }
    }
}
