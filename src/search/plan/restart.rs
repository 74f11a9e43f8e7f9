//! The least expected work: stop early, check, and start again after a failure.
//!
//! Input: N, M and the cost c of a try besides its k iterations (preparing, measuring, checking), in units of one
//! iteration. Output: the k that minimises `(k + c) / p_k`. For large N and small c that is about `0.583 sqrt(N/M)`, at
//! 88% of the work of the first peak.
//!
//! Where c is 0, a try without iterations would be free, so at least one is asked for; else k = 0, which is plain
//! guessing, competes as well.
//!
//! With `y = (2k + 1) theta` the derivative vanishes where `tan y = 2 y + 2 theta (2c - 1)`. Left of the last root the
//! work falls, right of it it rises, up to the first peak.
//!
//! # References
//! - M. Boyer, G. Brassard, P. Hoyer, A. Tapp: "Tight bounds on quantum searching", Fortschritte der Physik 46 (1998),
//!   section 3, for c = 0 (read in secondary notes).

use num_bigint::{BigInt, BigUint};
use num_traits::{ToPrimitive, Zero};

use super::peak::{angle_digits, cut, first_peak};
use super::success::{sine_squared, success_wide, theta_wide};
use crate::search::number::{Wide, fixed, seek};

/// Up to this peak every k is tried.
const TRIED: u64 = 1 << 10;

/// The k with the least `(k + try_cost) / p_k` up to the first peak; `try_cost` is finite and not negative.
///
/// Beyond a peak of 1024 it is the integer nearest to the real optimum.
pub fn least_work(space: &BigUint, marked: &BigUint, try_cost: f64) -> BigUint {
    assert!(try_cost.is_finite() && try_cost >= 0.0, "a cost");
    let peak = first_peak(space, marked);
    if marked.is_zero() {
        return BigUint::zero();
    }
    // The first iteration is asked for where guessing would be free.
    let least = u64::from(try_cost == 0.0);
    let theta = theta_wide(space, marked);
    if let Some(peak) = peak.to_u64().filter(|&peak| peak <= TRIED) {
        let work = |k: u64| Wide::new(k as f64 + try_cost) / sine_squared(theta * Wide::new((2 * k + 1) as f64));
        return seek::least(least, peak.max(least), work).into();
    }
    let (small, scale) = cut(space, marked);
    let root = root(&small, marked, try_cost * 0.5f64.powi(scale.min(1 << 12) as i32)) << scale;
    let work = |k: &BigUint| (Wide::of(k) + Wide::new(try_cost)) / success_wide(space, marked, k);
    let least = BigUint::from(least);
    if work(&least) < work(&root) { least } else { root.min(peak) }
}

/// The least work alone, in floating point; `None` where nothing is marked. Right to about a part in 2^40.
pub(super) fn least_work_figure(space: &BigUint, marked: &BigUint, try_cost: f64) -> Option<Wide> {
    if marked.is_zero() {
        return None;
    }
    let (theta, cost) = (theta_wide(space, marked), Wide::new(try_cost));
    if theta > Wide::new(std::f64::consts::FRAC_PI_4 / TRIED as f64) {
        let k = least_work(space, marked, try_cost);
        return Some((Wide::of(&k) + cost) / success_wide(space, marked, &k));
    }
    let y = float_root(theta, try_cost);
    let k = (Wide::new(0.5 * y) / theta).less(Wide::new(0.5));
    let search = (k + cost) / Wide::new(y.sin().powi(2));
    Some(if cost.is_zero() { search } else { search.min(cost / theta.square()) })
}

/// The last root of `h(y) = sin y - 2 (y + offset) cos y`, `offset = theta (2c - 1)`, for a small angle; by bisection.
fn float_root(theta: Wide, try_cost: f64) -> f64 {
    let offset = (theta * Wide::new(2.0 * try_cost)).to_f64().min(1e300) - theta.to_f64();
    let (mut low, mut high) = (std::f64::consts::FRAC_PI_4, std::f64::consts::FRAC_PI_2);
    for _ in 0..54 {
        let middle = 0.5 * (low + high);
        if middle.sin() < 2.0 * (middle + offset) * middle.cos() { low = middle } else { high = middle }
    }
    high
}

/// The integer nearest to that root's `k = (y / theta - 1) / 2`, to the last digit.
fn root(space: &BigUint, marked: &BigUint, try_cost: f64) -> BigUint {
    let digits = angle_digits(space, marked);
    let theta = BigInt::from(fixed::theta(space, marked, digits));
    // 2c in 64 binary digits after the point.
    let cost = BigInt::from((Wide::new(2.0 * try_cost) * Wide::power_of_two(64)).floor());
    let offset: BigInt = ((&theta * cost) >> 64u32) - &theta;
    // Newton's method, h' = 2 (y + offset) sin y - cos y: each step doubles the right digits, and works with no more.
    let mut known = 50;
    let mut y =
        BigInt::from((Wide::new(float_root(theta_wide(space, marked), try_cost)) * Wide::power_of_two(50)).floor());
    while known < digits {
        let wanted = (2 * known - 10).min(digits);
        y <<= wanted - known;
        let (sine, cosine) = fixed::sin_cos(y.magnitude(), wanted);
        let twice: BigInt = (&y + (&offset >> (digits - wanted))) * 2;
        let value: BigInt = &sine - ((&twice * &cosine) >> wanted);
        let slope: BigInt = ((&twice * &sine) >> wanted) - &cosine;
        y -= fixed::divide(&value, &slope, wanted);
        known = wanted;
    }
    y.magnitude() / (theta.magnitude() * 2u32)
}

#[cfg(test)]
mod tests {
    use num_traits::One;

    use super::*;
    use crate::search::plan::plan_for_least_work;

    fn big(number: u64) -> BigUint {
        BigUint::from(number)
    }

    /// N, k, k / p_k; formula as above, values computed with 40 digits outside this program.
    #[test]
    fn the_least_work_of_known_cases() {
        for (n, k, work) in [(1024, 18, 21.4819870253869), (1 << 20, 596, 705.993439914548), (16, 1, 2.11570247933884)]
        {
            let plan = plan_for_least_work(&big(n), &big(1), 0.0);
            assert_eq!(plan.iterations, big(k), "N = {n}");
            let found = plan.expected_oracle_calls.unwrap().to_f64();
            assert!((found / work - 1.0).abs() < 1e-13, "{found} and {work}");
        }
        assert!((plan_for_least_work(&big(1024), &big(1), 0.0).success - 0.837911315127789).abs() < 1e-14);
        assert_eq!(least_work(&big(16), &big(1), 1.0), big(2));
    }

    /// The constants that Boyer, Brassard, Hoyer, Tapp 1998 print as 0.583, 0.845 and 0.690; more digits from solving
    /// tan y = 2y with 40 digits outside this program.
    #[test]
    fn the_constants_of_the_large_limit() {
        let plan = plan_for_least_work(&(BigUint::one() << 200u32), &big(1), 0.0);
        let root = Wide::power_of_two(100);
        let near = |value: f64, wanted: f64| assert!((value / wanted - 1.0).abs() < 1e-14, "{value} and {wanted}");
        near((Wide::of(&plan.iterations) / root).to_f64(), 0.58278059260360565);
        near(plan.success, 0.84457886832258222);
        near((plan.expected_oracle_calls.unwrap() / root).to_f64(), 0.69002506984465047);
        let huge = plan_for_least_work(&(BigUint::one() << 20000u32), &big(1), 0.0);
        near((Wide::of(&huge.iterations) / Wide::power_of_two(10000)).to_f64(), 0.58278059260360565);
    }

    #[test]
    fn dear_tries_are_worth_the_peak_and_cheap_problems_a_guess() {
        let space = BigUint::one() << 100u32;
        let dear = least_work(&space, &big(1), 1e30);
        let peak = first_peak(&space, &big(1));
        assert!(dear <= peak && (&peak - &dear).bits() < 50);
        assert_eq!(least_work(&big(16), &big(12), 1.0), big(0));
        assert_eq!(least_work(&big(16), &big(12), 0.0), big(1));
        assert_eq!(least_work(&big(16), &big(0), 0.0), big(0));
    }

    /// The root against every k, where both can serve.
    #[test]
    fn both_ways_agree() {
        for (n, m, c) in [(1u64 << 20, 1, 0.0), (1 << 20, 3, 3.5), (1 << 16, 1, 20.0), (1 << 18, 5, 1.0)] {
            let (space, marked) = (big(n), big(m));
            let exact = least_work(&space, &marked, c);
            assert_eq!(root(&space, &marked, c), exact, "{m} in {n}, c = {c}");
            let work = (Wide::of(&exact) + Wide::new(c)) / success_wide(&space, &marked, &exact);
            let figure = least_work_figure(&space, &marked, c).unwrap();
            assert_eq!(work, figure, "this small, the figure is that of the exact k");
        }
        for (n, c) in [(1u64 << 30, 0.0), (1 << 34, 100.0), (1 << 44, 1e-9), (1 << 44, 1e9)] {
            let plan = plan_for_least_work(&big(n), &big(3), c);
            let ratio = (plan.expected_work(c).unwrap() / least_work_figure(&big(n), &big(3), c).unwrap()).to_f64();
            assert!((ratio - 1.0).abs() < 1e-6, "{n}, c = {c}: {ratio}");
        }
    }
}
