//! Nothing is known of the count: random numbers of iterations from growing ranges.
//!
//! Input: N. What is run: with m = 1 first, draw j uniformly from the integers `0 <= j < m`, run j iterations, measure,
//! check; after a failure m becomes `min(6/5 m, sqrt N)`. The width of a stage is `ceil(m)`: that many j are possible.
//!
//! A stage of width w succeeds with `P_w = 1/2 - sin(4 w theta) / (4 w sin(2 theta))` on average, which is at least 1/4
//! as soon as `w >= 1 / sin(2 theta)`. From `m = sqrt N` on that holds for every count from 1 to N - 1, and for N
//! every state is a solution. So after r such saturated stages without success the chance that something is marked and
//! was missed is at most `(3/4)^r` for any count: the stopping rule. It never shows that nothing is marked.
//!
//! # References
//! - M. Boyer, G. Brassard, P. Hoyer, A. Tapp: "Tight bounds on quantum searching", Fortschritte der Physik 46 (1998),
//!   section 4: schedule, Lemma 2, Theorem 3 (read in secondary notes). The stopping rule is derived here from Lemma 2.

use num_bigint::BigUint;
use num_traits::{One, Zero};
use serde::Serialize;

use super::success::{sine_squared, theta_wide};
use crate::random::SplitMix64;
use crate::search::number::{PRINTED_BITS, Wide, as_text};

/// The factor by which the range grows: any number strictly between 1 and 4/3 serves.
const GROWTH: f64 = 6.0 / 5.0;
/// Ranges of at most so many are averaged term by term.
const AVERAGED: f64 = 64.0;

/// The schedule for a start state.
#[derive(Clone, PartialEq, Debug)]
pub struct Schedule {
    space: BigUint,
    /// The widths before saturation.
    rising: Vec<Wide>,
    /// The width that is repeated afterwards.
    saturated: Wide,
}

/// What the schedule costs for one count.
#[derive(Clone, Copy, PartialEq, Debug, Serialize)]
pub struct Expected {
    /// Iterations until success, on average.
    pub iterations: Wide,
    /// Measurements until success, on average.
    pub measurements: f64,
    /// The bound `(9/2) / sin(2 theta)` on the iterations, which is proved for counts up to 3N/4; there alone it is
    /// given.
    pub bound: Option<Wide>,
}

/// When to stop without success.
#[derive(Clone, PartialEq, Debug, Serialize)]
pub struct Stop {
    /// Stages to run: the rising ones, then the saturated ones.
    pub stages: u64,
    /// How many of them are saturated.
    pub saturated_stages: u64,
    /// The chance that is left that something is marked and was missed, at most.
    pub error: f64,
    /// The most iterations that can be drawn in all stages together.
    #[serde(serialize_with = "as_text")]
    pub most_iterations: BigUint,
    /// The iterations of all stages together on average, if nothing is marked.
    pub iterations_if_none: Wide,
}

impl Schedule {
    /// The schedule for a start state of this many states, at least 1.
    pub fn new(space: &BigUint) -> Self {
        let cap = Wide::of(space).sqrt();
        let saturated = match space.sqrt() {
            root if space.bits() <= 106 && root.pow(2) < *space => Wide::of(&(root + 1u32)),
            root => Wide::of(&root),
        };
        let grown = std::iter::successors(Some(Wide::ONE), |&m| Some(m * Wide::new(GROWTH)));
        let rising = grown.take_while(|&m| m < cap).map(|m| Wide::of(&m.ceil())).collect();
        Self { space: space.clone(), rising, saturated }
    }

    /// How many stages come before saturation.
    pub fn rising_stages(&self) -> u64 {
        self.rising.len() as u64
    }

    /// The width of a stage, counted from 0.
    pub fn width(&self, stage: u64) -> Wide {
        usize::try_from(stage).ok().and_then(|at| self.rising.get(at)).copied().unwrap_or(self.saturated)
    }

    /// Draws the number of iterations of a stage; `None` where the width is beyond what a circuit can loop.
    pub fn draw(&self, stage: u64, random: &mut SplitMix64) -> Option<u64> {
        let width = self.width(stage);
        (width < Wide::power_of_two(63)).then(|| random.below(width.to_f64() as u64))
    }

    /// `P_w`: the average success of a stage, for this many marked states.
    pub fn stage_success(&self, stage: u64, marked: &BigUint) -> f64 {
        average(self.width(stage), theta_wide(&self.space, marked))
    }

    /// The chance that all rising stages and then so many saturated ones miss `marked` states.
    pub fn miss(&self, marked: &BigUint, saturated_stages: u64) -> f64 {
        let theta = theta_wide(&self.space, marked);
        let rising: f64 = self.rising.iter().map(|&width| 1.0 - average(width, theta)).product();
        rising * (1.0 - average(self.saturated, theta)).powf(saturated_stages as f64)
    }

    /// The expected cost of this schedule, the saturated stage repeated until success; `None` where nothing is marked.
    pub fn expected(&self, marked: &BigUint) -> Option<Expected> {
        if marked.is_zero() {
            return None;
        }
        let theta = theta_wide(&self.space, marked);
        let (mut missed, mut iterations, mut measurements) = (1.0, Wide::ZERO, 0.0);
        for &width in &self.rising {
            iterations = iterations + half_less_one(width) * Wide::new(missed);
            measurements += missed;
            missed *= 1.0 - average(width, theta);
        }
        let rounds = missed / average(self.saturated, theta);
        iterations = iterations + half_less_one(self.saturated) * Wide::new(rounds);
        Some(Expected { iterations, measurements: measurements + rounds, bound: self.bound(marked) })
    }

    /// `(9/2) N / (2 sqrt(M (N - M)))`, for M up to 3N/4.
    fn bound(&self, marked: &BigUint) -> Option<Wide> {
        let rest = &self.space - marked;
        (marked * 4u32 <= &self.space * 3u32 && !rest.is_zero())
            .then(|| Wide::new(2.25) * Wide::of(&self.space) / Wide::of(&(marked * rest)).sqrt())
    }

    /// The stopping rule that leaves at most this error, which must lie between 0 and 1.
    pub fn stop(&self, error: f64) -> Stop {
        assert!(error > 0.0 && error < 1.0, "an error between 0 and 1");
        // Rounding must not lose a stage where the error is a power of 3/4.
        let saturated_stages = (error.ln() / 0.75f64.ln() - 1e-12).ceil() as u64;
        let most = self.most_iterations(saturated_stages);
        Stop {
            stages: self.rising_stages() + saturated_stages,
            saturated_stages,
            error: 0.75f64.powf(saturated_stages as f64),
            iterations_if_none: Wide::of(&most) * Wide::new(0.5),
            most_iterations: most,
        }
    }

    /// The sum of all widths less one; of a long number only the leading digits.
    fn most_iterations(&self, saturated_stages: u64) -> BigUint {
        if self.space.bits() > 2 * PRINTED_BITS {
            let rising: Wide = self.rising.iter().copied().sum();
            return (rising + self.saturated * Wide::new(saturated_stages as f64)).floor();
        }
        let rising: BigUint = self.rising.iter().map(|&width| width.floor() - BigUint::one()).sum();
        rising + (self.saturated.floor() - 1u32) * saturated_stages
    }
}

/// The mean of `0..width`.
fn half_less_one(width: Wide) -> Wide {
    width.less(Wide::ONE) * Wide::new(0.5)
}

/// Lemma 2: the average of `sin^2((2j + 1) theta)` over `0 <= j < width`.
fn average(width: Wide, theta: Wide) -> f64 {
    if theta.is_zero() {
        return 0.0;
    }
    let w = width.to_f64();
    if w <= AVERAGED {
        let sum: f64 = (0..w as u32).map(|j| sine_squared(theta * Wide::new(f64::from(2 * j + 1))).to_f64()).sum();
        return sum / w;
    }
    let turn = (width * theta).to_f64();
    if turn < 1e-3 {
        // The formula cancels here; its series is (4 w^2 - 1) theta^2 / 3 less a part in a million.
        let full = turn * turn * 4.0 / 3.0;
        return full * (1.0 - 0.8 * turn * turn);
    }
    // Where theta is so small that its sine is itself, the width carries the size.
    let narrow = theta < Wide::power_of_two(-30);
    let double_sine = if narrow { 2.0 * turn } else { w * (2.0 * theta.to_f64()).sin() };
    if double_sine.is_infinite() || turn > 1e15 {
        return 0.5;
    }
    0.5 - (4.0 * turn).sin() / (4.0 * double_sine)
}

#[cfg(test)]
mod tests {
    use super::*;

    fn big(number: u64) -> BigUint {
        BigUint::from(number)
    }

    fn widths(space: u64, stages: u64) -> Vec<u64> {
        let schedule = Schedule::new(&big(space));
        (0..stages).map(|stage| schedule.width(stage).to_f64() as u64).collect()
    }

    /// Source: Boyer, Brassard, Hoyer, Tapp 1998, section 4; widths computed from the rule outside this program.
    #[test]
    fn widths_of_known_cases() {
        let long = [1, 2, 2, 2, 3, 3, 3, 4, 5, 6, 7, 8, 9, 11, 13, 16, 19, 23, 27, 32];
        assert_eq!(widths(1024, 22), [&long[..], &[32, 32]].concat());
        assert_eq!(widths(16, 10), [1, 2, 2, 2, 3, 3, 3, 4, 4, 4]);
        assert_eq!(widths(8, 8), [1, 2, 2, 2, 3, 3, 3, 3]);
        let rising = [(8, 6), (16, 8), (1024, 20), (1, 0)];
        assert!(rising.iter().all(|&(space, stages)| Schedule::new(&big(space)).rising_stages() == stages));
    }

    /// Lemma 2; values computed with 40 digits outside this program.
    #[test]
    fn averages_of_known_cases() {
        let near = |n: u64, m: u64, width: f64, wanted: f64| {
            let found = average(Wide::new(width), theta_wide(&big(n), &big(m)));
            assert!((found - wanted).abs() < 1e-14, "P_{width} of {m} in {n}: {found} not {wanted}");
        };
        for (width, wanted) in [
            (1.0, 0.0625),
            (2.0, 0.267578125),
            (3.0, 0.481201171875),
            (4.0, 0.601230621337891),
            (8.0, 0.437176495121093),
        ] {
            near(16, 1, width, wanted);
        }
        for (width, wanted) in [(2.0, 0.0336214825510979), (4.0, 0.132192770190877), (8.0, 0.410283413911615)] {
            near(1024, 7, width, wanted);
        }
        // The limit for one in many at the saturated width: 1/2 - sin(4) / 8.
        near(1 << 60, 1, (1u64 << 30) as f64, 0.594600311913491);
        let huge = BigUint::one() << 3000u32;
        let found = Schedule::new(&huge).stage_success(1 << 20, &big(1));
        assert!((found - 0.594600311913491).abs() < 1e-12, "{found}");
    }

    /// The formula, the sum and the series agree where they meet.
    #[test]
    fn three_ways_to_average() {
        for theta in [1e-9f64, 1e-6, 3e-6, 1e-5, 0.01, 0.3, 1.2] {
            for w in [65u32, 100, 300] {
                let sum: f64 = (0..w).map(|j| (f64::from(2 * j + 1) * theta).sin().powi(2)).sum();
                let (found, wanted) = (average(Wide::new(f64::from(w)), Wide::new(theta)), sum / f64::from(w));
                assert!((found / wanted - 1.0).abs() < 1e-4 && (found - wanted).abs() < 1e-10, "{theta} {w}");
            }
        }
    }

    /// N, M, E[iterations], E[measurements], bound. Source: the rule of Boyer and others 1998, section 4; exact
    /// expected cost of it computed with 40 digits outside this program.
    const COSTS: &[(u64, u64, f64, f64, f64)] = &[
        (4, 1, 0.6, 2.2, 5.19615242270663),
        (8, 1, 1.03947757769235, 2.84707950640328, 6.80336051416609),
        (8, 2, 0.6474609375, 2.2158203125, 5.19615242270663),
        (16, 1, 1.85043566831931, 3.87119139883045, 9.29516003089780),
        (16, 4, 0.654523577008929, 2.21723284040179, 5.19615242270663),
        (64, 1, 5.79568651784585, 6.88457993233277, 18.1422947044429),
        (256, 1, 15.5231203025638, 10.5992719538112, 36.0705191665046),
        (1024, 1, 37.0912215965617, 14.5853566651001, 72.0351820201792),
        (1024, 10, 8.28655625812111, 8.09117327844432, 22.8803939222100),
        (1024, 512, 0.578439712524414, 2.0, 4.5),
        (1 << 16, 1, 354.531438749786, 26.3111384225924, 576.004394581542),
    ];

    #[test]
    fn expected_costs_of_known_cases() {
        let near = |found: f64, wanted: f64| assert!((found / wanted - 1.0).abs() < 1e-13, "{found} not {wanted}");
        for &(n, m, iterations, measurements, bound) in COSTS {
            let found = Schedule::new(&big(n)).expected(&big(m)).unwrap();
            near(found.iterations.to_f64(), iterations);
            near(found.measurements, measurements);
            near(found.bound.unwrap().to_f64(), bound);
        }
        for (n, missed) in
            [(8, 0.0209722238651011), (16, 0.0205103918459029), (64, 0.0193606425353711), (1024, 0.0224885637833254)]
        {
            let schedule = Schedule::new(&big(n));
            near(schedule.miss(&big(1), 0), missed);
            assert!(schedule.miss(&big(1), 4) < 1e-3, "four more rounds bring it below a thousandth");
        }
    }

    /// The bound of the stopping rule against the exact chance, for every count.
    #[test]
    fn the_stopping_rule_keeps_its_word() {
        for n in [1u64, 2, 3, 4, 5, 16, 33, 64] {
            let schedule = Schedule::new(&big(n));
            for error in [0.75, 0.5, 0.1, 1e-3] {
                let stop = schedule.stop(error);
                assert!(stop.error <= error * (1.0 + 1e-9));
                for m in 1..=n {
                    let miss = schedule.miss(&big(m), stop.saturated_stages);
                    assert!(miss <= stop.error + 1e-15, "{m} in {n}: {miss}");
                }
            }
        }
        let stop = Schedule::new(&big(16)).stop(0.75);
        // The widths less one: 0 1 1 1 2 2 2 3, and once more 3.
        assert_eq!((stop.stages, stop.saturated_stages, stop.most_iterations), (9, 1, big(15)));
    }

    #[test]
    fn nothing_marked_everything_marked_and_large_spaces() {
        let schedule = Schedule::new(&big(16));
        assert_eq!(schedule.expected(&big(0)), None);
        let all = schedule.expected(&big(16)).unwrap();
        assert_eq!((all.iterations, all.bound), (Wide::ZERO, None));
        assert!((all.measurements - 1.0).abs() < 1e-12);
        let huge = Schedule::new(&(BigUint::one() << 3000u32));
        for marked in [BigUint::one(), BigUint::one() << 500u32, BigUint::one() << 2999u32] {
            let expected = huge.expected(&marked).unwrap();
            assert!(expected.iterations <= expected.bound.unwrap());
        }
        assert_eq!(huge.draw(1 << 20, &mut SplitMix64::new(1)), None);
        let mut random = SplitMix64::new(1);
        assert!((0..200).all(|stage| schedule.draw(stage, &mut random).unwrap() < 4));
    }
}
