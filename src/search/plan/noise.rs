//! A machine that errs: fewer iterations are better, and from some error rate on a search costs more than guessing.
//!
//! Input: N, M, and the chance q that an iteration loses everything: after each iteration the whole register is
//! replaced by the evenly mixed state with probability q. Then
//! `p_k = (1 - q)^k sin^2((2k + 1) theta) + (1 - (1 - q)^k) f`, f being the share of the marked states among all
//! strings of the register: M/N for a start state over all strings, less for a restricted one.
//!
//! Real machines err in other ways as well; this model has the merit that both reflections commute with it, so that the
//! figures are exact for it.
//!
//! # References
//! - I. Cohn, A. Fonseca de Oliveira, E. Buksman, J. Garcia Lopez de Lacalle: "Grover's search with local and total
//!   depolarizing channel errors: complexity analysis" (abstract read) studies this channel; the formulas are derived.

use num_bigint::BigUint;
use num_traits::ToPrimitive;
use serde::Serialize;

use super::peak::first_peak;
use super::success::{sine_squared, theta_wide};
use crate::search::number::{Wide, seek};

/// A search on a machine that errs.
#[derive(Clone, Copy, PartialEq, Debug)]
pub struct Noisy {
    theta: Wide,
    /// q: the chance that an iteration loses everything.
    error: f64,
    /// f: the success of the evenly mixed state.
    floor: Wide,
    /// No k beyond this is better: the first peak, or where the noise has won; at most 2^62, which no machine runs.
    last: u64,
}

/// A plan for a machine that errs.
#[derive(Clone, Copy, PartialEq, Debug, Serialize)]
pub struct NoisyPlan {
    /// k: how many iterations.
    pub iterations: u64,
    /// The success with noise.
    pub success: Wide,
    /// `(k + c) / p_k`: the expected work until a run succeeds.
    pub work: Wide,
}

/// The chance that an iteration errs anywhere, from the errors of its gates: pairs of an error and how many gates have
/// it.
pub fn error_of_gates(gates: impl IntoIterator<Item = (f64, u64)>) -> f64 {
    let log: f64 =
        gates.into_iter().filter(|gate| gate.1 > 0).map(|(error, count)| count as f64 * (-error).ln_1p()).sum();
    -log.exp_m1()
}

/// The runs after which at least one has succeeded with this confidence, a number from 0 to 1; `None` where none ever
/// does, or never so surely.
pub fn runs_for(success: Wide, confidence: f64) -> Option<Wide> {
    if success.is_zero() || !(confidence < 1.0 || success >= Wide::ONE) {
        return None;
    }
    let p = success.to_f64();
    if p >= 1.0 {
        return Some(Wide::ONE);
    }
    let wanted = Wide::new(-(-confidence).ln_1p());
    let each = if p < 1e-12 { success } else { Wide::new(-(-p).ln_1p()) };
    // Rounding must not add a run where the confidence is met exactly.
    Some(Wide::of(&(wanted / each * Wide::new(1.0 - 1e-13)).ceil()).max(Wide::ONE))
}

impl Noisy {
    /// The search for `marked` of `space` states with an error of `error` per iteration; `strings` is the number of all
    /// strings of the register, which is `space` unless the start state is restricted.
    pub fn new(space: &BigUint, marked: &BigUint, strings: &BigUint, error: f64) -> Self {
        assert!((0.0..=1.0).contains(&error) && strings >= space, "an error rate, and a space within its register");
        let peak = first_peak(space, marked);
        // The logarithm of p_k falls with slope -mu and rises with at most 2/k, so nothing beyond 2/mu is better; where
        // the floor shares in the success, a little beyond.
        let mu = -(-error).ln_1p();
        let fade = if mu > 0.0 { 4.0 / mu + 2.0 } else { f64::INFINITY };
        let last = peak.to_u64().unwrap_or(u64::MAX >> 2).min(fade.min((u64::MAX >> 2) as f64) as u64);
        Self { theta: theta_wide(space, marked), error, floor: Wide::ratio(marked, strings), last }
    }

    /// No k beyond this is better.
    pub(super) fn last(&self) -> u64 {
        self.last
    }

    /// The success after k iterations.
    pub fn success(&self, iterations: u64) -> Wide {
        let k = iterations as f64;
        let kept = (k * (-self.error).ln_1p()).exp();
        let kept = if iterations == 0 { 1.0 } else { kept };
        let lost = if iterations == 0 { 0.0 } else { -(k * (-self.error).ln_1p()).exp_m1() };
        sine_squared(self.theta * Wide::new(2.0 * k + 1.0)) * Wide::new(kept) + self.floor * Wide::new(lost)
    }

    /// The k with the highest success up to the first peak.
    pub fn best(&self) -> NoisyPlan {
        let miss = |k| Wide::ONE / self.success(k);
        let k = if self.theta.is_zero() { 0 } else { seek::least(0, self.last, miss) };
        self.plan(k, 0.0)
    }

    /// The k with the least expected work, where a try costs `try_cost` besides its iterations; at least one iteration
    /// where a try is free.
    pub fn least_work(&self, try_cost: f64) -> NoisyPlan {
        self.least_work_from(u64::from(try_cost == 0.0), try_cost)
    }

    fn least_work_from(&self, first: u64, try_cost: f64) -> NoisyPlan {
        if self.theta.is_zero() {
            return self.plan(first, try_cost);
        }
        let work = |k: u64| Wide::new(k as f64 + try_cost) / self.success(k);
        self.plan(seek::least(first, self.last.max(first), work), try_cost)
    }

    fn plan(&self, iterations: u64, try_cost: f64) -> NoisyPlan {
        let success = self.success(iterations);
        let cost = Wide::new(iterations as f64 + try_cost);
        let work = if success.is_zero() { Wide::ZERO } else { cost / success };
        NoisyPlan { iterations, success, work }
    }
}

/// The error per iteration from which on every search of at least one iteration costs more than guessing: than
/// `guess_cost * N / M`, both costs in units of one iteration. `Some(0)` where it does even without error, `None` where
/// it never does, or where nothing is marked.
pub fn break_even(space: &BigUint, marked: &BigUint, strings: &BigUint, try_cost: f64, guess_cost: f64) -> Option<f64> {
    let share = Wide::ratio(marked, space);
    if share.is_zero() {
        return None;
    }
    let guessing = Wide::new(guess_cost) / share;
    let dearer = |error| {
        let noisy = Noisy::new(space, marked, strings, error);
        noisy.least_work_from(1, try_cost).work > guessing
    };
    if dearer(0.0) {
        return Some(0.0);
    }
    if !dearer(1.0) {
        return None;
    }
    // Bisection of the logarithm: the answer may be far below 1.
    let (mut low, mut high) = (1e-300f64.ln(), 0.0f64);
    for _ in 0..60 {
        let middle = 0.5 * (low + high);
        if dearer(middle.exp()) { high = middle } else { low = middle }
    }
    Some((0.5 * (low + high)).exp())
}

#[cfg(test)]
mod tests {
    use num_traits::One;

    use super::*;

    fn big(number: u64) -> BigUint {
        BigUint::from(number)
    }

    fn noisy(space: u64, error: f64) -> Noisy {
        Noisy::new(&big(space), &big(1), &big(space), error)
    }

    fn near(found: f64, wanted: f64) {
        assert!((found / wanted - 1.0).abs() < 1e-12, "{found} not {wanted}");
    }

    /// N, q, noiseless k and success there, best k and success, closed form, cheapest k and its work. The model's
    /// formula derived; values computed with 40 digits outside this program.
    type Row = (u64, f64, u64, f64, u64, f64, f64, u64, f64);
    const TABLE: &[Row] = &[
        (16, 0.05, 3, 0.833124914169312, 3, 0.833124914169312, 2.50793312003556, 1, 2.21166306695464),
        (1024, 0.001, 25, 0.974796389156160, 25, 0.974796389156160, 24.5006298667152, 18, 21.8718976023695),
        (1024, 0.01, 25, 0.777619275382571, 23, 0.785618638058332, 23.3453849498369, 16, 25.5183951928211),
        (1024, 0.05, 25, 0.277945802276466, 18, 0.333419029859045, 18.4002792343927, 11, 44.5182276117230),
        (1 << 20, 1e-4, 804, 0.922743313422997, 791, 0.923371315473990, 790.642602864005, 580, 748.756185368658),
        (1 << 20, 1e-3, 804, 0.447355663434668, 675, 0.477473408905033, 675.369824154649, 451, 1188.53097328280),
        (1 << 20, 1e-2, 804, 3.10478820019976e-4, 189, 0.0195806090423783, 189.298360142510, 96, 7176.40913856439),
    ];

    #[test]
    fn known_cases() {
        for &(space, error, plain, plain_success, k, success, closed, cheap, work) in TABLE {
            let machine = noisy(space, error);
            near(machine.success(plain).to_f64(), plain_success);
            let best = machine.best();
            assert_eq!(best.iterations, k, "{space} at {error}");
            near(best.success.to_f64(), success);
            let cheapest = machine.least_work(0.0);
            assert_eq!(cheapest.iterations, cheap, "{space} at {error}");
            near(cheapest.work.to_f64(), work);
            // For M far below N the best k is near (atan(4 theta / mu) / theta - 1) / 2.
            let (theta, mu) = (machine.theta.to_f64(), -(-error).ln_1p());
            near(((4.0 * theta / mu).atan() / theta - 1.0) / 2.0, closed);
            assert!((closed - k as f64).abs() < 1.0);
        }
    }

    #[test]
    fn gates_runs_and_break_even() {
        near(error_of_gates([(1e-3, 100), (0.5, 0), (1e-4, 2000)]), 1.0 - 0.999f64.powi(100) * 0.9999f64.powi(2000));
        assert_eq!(error_of_gates([(1.0, 1)]), 1.0);
        let runs = |p: f64, confidence| runs_for(Wide::new(p), confidence).map(Wide::to_f64);
        assert_eq!(runs(0.5, 0.99), Some(7.0));
        assert_eq!(runs(0.9, 0.99), Some(2.0));
        assert_eq!(runs(1.0, 1.0), Some(1.0));
        assert_eq!(runs(0.9, 1.0), None);
        assert_eq!(runs(0.0, 0.5), None);
        let space = big(1 << 20);
        let turn = break_even(&space, &big(1), &space, 1.0, 1.0).unwrap();
        let work = |error| noisy(1 << 20, error).least_work_from(1, 1.0).work.to_f64();
        assert!(work(turn * 0.999) < f64::from(1 << 20) && work(turn * 1.001) > f64::from(1 << 20), "{turn}");
        assert_eq!(break_even(&space, &big(1 << 19), &space, 1.0, 1.0), Some(0.0));
        assert_eq!(break_even(&space, &big(1), &space, 1.0, 1e9), None);
        assert_eq!(break_even(&space, &big(0), &space, 1.0, 1.0), None);
    }

    #[test]
    fn edges_and_large_spaces() {
        assert_eq!(noisy(16, 0.0).best().iterations, 3);
        let lost = noisy(16, 1.0);
        assert_eq!((lost.best().iterations, lost.success(5).to_f64()), (0, 1.0 / 16.0));
        // A restricted start falls to the share among all strings.
        let restricted = Noisy::new(&big(5), &big(1), &big(8), 0.5);
        near(restricted.success(1000).to_f64(), 0.125);
        let none = Noisy::new(&big(8), &big(0), &big(8), 0.1);
        assert!(none.best().success.is_zero() && none.least_work(1.0).work.is_zero());
        let space = BigUint::one() << 3000u32;
        let machine = Noisy::new(&space, &big(1), &space, 1e-3);
        let best = machine.best();
        // sin^2 is (2k + 1)^2 a here, and 2 / mu is the best k.
        assert!(best.iterations.abs_diff(1999) < 3 && best.success.log2() < -2970.0);
        assert!(!machine.least_work(1.0).work.is_zero());
    }
}
