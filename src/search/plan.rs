//! The plan for a known number of marked states: how many iterations, and with what success.
//!
//! Input: N, the size of the start state, and M, how many of its states are marked. Output: the smallest k that
//! maximises the success probability p_k among `k <= ceil(pi / (4 theta))`, and p_k itself.
//!
//! With `sin^2 theta = M/N`, `p_k = sin^2((2k + 1) theta)`; as an exact fraction, with `a = M/N`, `s_{-1} = -1`, `s_0 = 1`
//! and `s_{k+1} = 2 (1 - 2a) s_k - s_{k-1}`, `p_k = a s_k^2`.
//!
//! # References
//! - M. Boyer, G. Brassard, P. Hoyer, A. Tapp: "Tight bounds on quantum searching", Fortschritte der Physik 46 (1998),
//!   section 3 (read in secondary notes).
//! - G. Brassard, P. Hoyer, M. Mosca, A. Tapp: "Quantum amplitude amplification and estimation", AMS Contemporary
//!   Mathematics 305 (2002), section 2 (read in secondary notes).

use num_bigint::{BigInt, BigUint};
use num_traits::{One, ToPrimitive, Zero};
use serde::Serialize;

use crate::search::Advice;

/// What a plan makes as good as it can.
#[derive(Clone, Copy, PartialEq, Eq, Debug, Serialize)]
#[serde(rename_all = "kebab-case")]
pub enum Aim {
    /// The highest success probability at the first peak.
    HighestSuccess,
}

/// A plan.
#[derive(Clone, PartialEq, Debug)]
pub struct Plan {
    /// What it makes as good as it can.
    pub aim: Aim,
    /// N: the states of the start state.
    pub space: BigUint,
    /// M: how many of them are marked.
    pub marked: BigUint,
    /// k: how many iterations.
    pub iterations: BigUint,
    /// p_k: the probability that one run gives a marked state.
    pub success: f64,
    /// p_k as an exact fraction in lowest terms, where it is short enough to be read.
    pub success_exact: Option<(BigUint, BigUint)>,
    /// Oracle calls until a run succeeds, on average, when every result is checked and failures are repeated; `None`
    /// where no run can succeed.
    pub expected_oracle_calls: Option<f64>,
    /// When the search is pointless, and what the figures do not say.
    pub advice: Vec<Advice>,
}

/// Beyond this many bits the exact fraction is not computed.
const MAX_EXACT_BITS: u64 = 1 << 15;
/// A fraction with a denominator of more bits is computed but not shown.
const MAX_SHOWN_BITS: u64 = 96;
/// Beyond this many iterations the count is found in integers instead of floating point.
const MAX_FLOAT_ITERATIONS: f64 = (1u64 << 40) as f64;

/// The plan for `marked` states out of `space`; `marked` is at most `space` and `space` is not 0.
pub fn plan(space: &BigUint, marked: &BigUint) -> Plan {
    assert!(marked <= space && !space.is_zero(), "marked states are among those of the start state");
    let iterations = best_iterations(space, marked);
    let exact = exact_success(space, marked, &iterations);
    let success = match &exact {
        Some((numerator, denominator)) => ratio(numerator, denominator),
        None => success(space, marked, &iterations),
    };
    let calls = iterations.to_f64().unwrap_or(f64::INFINITY) / success;
    Plan {
        aim: Aim::HighestSuccess,
        space: space.clone(),
        marked: marked.clone(),
        success,
        success_exact: exact.filter(|(_, denominator)| denominator.bits() <= MAX_SHOWN_BITS),
        expected_oracle_calls: (success > 0.0).then_some(calls),
        advice: Advice::on_numbers(space, marked),
        iterations,
    }
}

/// `p_k` in floating point, to about 1e-13.
pub fn success(space: &BigUint, marked: &BigUint, iterations: &BigUint) -> f64 {
    if marked.is_zero() {
        return 0.0;
    }
    // Near the peak (2k + 1) theta is pi/2 less a small rest; for very large k the rest is taken as 0, since the
    // plan's k is within one of the real optimum and theta is below 2^-40.
    match iterations.to_f64() {
        Some(k) if k <= MAX_FLOAT_ITERATIONS => ((2.0 * k + 1.0) * theta(space, marked)).sin().powi(2),
        _ => 1.0,
    }
}

/// `asin(sqrt(M/N))`; exact to rounding also where M/N is close to 1.
pub fn theta(space: &BigUint, marked: &BigUint) -> f64 {
    let unmarked = ratio(&(space - marked), space);
    ratio(marked, space).sqrt().atan2(unmarked.sqrt())
}

fn best_iterations(space: &BigUint, marked: &BigUint) -> BigUint {
    // At M >= N/2 the start state is best: p_1 = a (3 - 4a)^2 <= a there (equal at M = N/2 and M = N: the smallest k).
    if marked.is_zero() || marked * 2u32 >= *space {
        return BigUint::zero();
    }
    let peak = std::f64::consts::FRAC_PI_4 / theta(space, marked);
    if peak > MAX_FLOAT_ITERATIONS {
        return large_iterations(space, marked);
    }
    // p_k is largest at the integer nearest to peak - 1/2, which is floor(peak); that is never a tie below N/2, since
    // pi / (4 theta) is an integer for rational M/N only at M = N/2 (Niven).
    BigUint::from(peak.floor() as u64)
}

/// `floor(pi/4 sqrt(N/M))`, in integers. It differs from `floor(pi / (4 theta))` by at most one and only where both
/// neighbours have a success within `theta^2 < 2^-80` of each other.
fn large_iterations(space: &BigUint, marked: &BigUint) -> BigUint {
    // pi^2 = 9.8696..., as pi with 100 decimals (from memory; the test recomputes it by Machin's formula).
    let pi: BigUint = PI_DIGITS.parse().expect("digits");
    let scale = BigUint::from(10u32).pow(100u32);
    (pi.pow(2) * space / (scale.pow(2) * 16u32 * marked)).sqrt()
}

const PI_DIGITS: &str =
    "31415926535897932384626433832795028841971693993751058209749445923078164062862089986280348253421170679";

fn exact_success(space: &BigUint, marked: &BigUint, iterations: &BigUint) -> Option<(BigUint, BigUint)> {
    let k = iterations.to_u64().filter(|k| (2 * k + 1).saturating_mul(space.bits()) <= MAX_EXACT_BITS)?;
    Some(exact_fraction(space, marked, k))
}

/// `p_k` as a fraction in lowest terms.
pub fn exact_fraction(space: &BigUint, marked: &BigUint, iterations: u64) -> (BigUint, BigUint) {
    let n = BigInt::from(space.clone());
    let step: BigInt = (&n - BigInt::from(marked.clone()) * 2) * 2;
    // The numerators of s_k over N^k, so that all is in integers: t_{k+1} = 2 (N - 2M) t_k - N^2 t_{k-1}.
    let (mut before, mut now) = (-BigInt::one(), BigInt::one());
    for k in 0..iterations {
        // s_{-1} = -1 is over N^0 here, so the first step multiplies it by N only.
        let square: BigInt = if k == 0 { n.clone() } else { &n * &n };
        let next: BigInt = (&step * &now) - (&square * &before);
        (before, now) = (now, next);
    }
    let square = (&now * &now).magnitude().clone();
    lowest_terms(square * marked, space.pow(2 * iterations as u32 + 1))
}

fn lowest_terms(numerator: BigUint, denominator: BigUint) -> (BigUint, BigUint) {
    let (mut a, mut b) = (numerator.clone(), denominator.clone());
    while !b.is_zero() {
        (a, b) = (b.clone(), a % b);
    }
    (numerator / &a, denominator / a)
}

/// The quotient of two large integers, to about one part in 2^53.
fn ratio(numerator: &BigUint, denominator: &BigUint) -> f64 {
    if numerator.is_zero() {
        return 0.0;
    }
    // Both are cut to 1000 bits at the most, so that neither overflows; what is cut is far below rounding.
    let cut = denominator.bits().saturating_sub(1000);
    let small = |number: &BigUint| (number >> cut).to_f64().unwrap_or(f64::MAX);
    if cut == 0 || (numerator >> cut).bits() > 64 {
        return small(numerator) / small(denominator);
    }
    // The numerator is so much smaller that it needs digits of its own.
    let shift = denominator.bits() - numerator.bits();
    let digits = ((numerator << (shift + 64)) / denominator).to_f64().unwrap_or(0.0);
    digits * 2f64.powi(-64) * 2f64.powi(-(shift.min(1 << 20) as i32))
}

#[cfg(test)]
mod tests {
    use super::*;

    fn big(number: u64) -> BigUint {
        BigUint::from(number)
    }

    /// N, M, theta, first-peak k, p there. Source: Boyer, Brassard, Hoyer, Tapp 1998, section 3 gives the formula;
    /// the values were computed from it with 40-digit arithmetic, outside this program.
    const TABLE: &[(u64, u64, f64, u64, f64)] = &[
        (4, 1, 0.523598775598299, 1, 1.0),
        (8, 1, 0.361367123906708, 2, 0.9453125),
        (8, 2, 0.523598775598299, 1, 1.0),
        (8, 3, 0.659058035826409, 1, 0.84375),
        (8, 5, 0.911738290968488, 0, 0.625),
        (8, 7, 1.20942920288819, 0, 0.875),
        (16, 1, 0.252680255142079, 3, 0.961318969726563),
        (16, 2, 0.361367123906708, 2, 0.9453125),
        (16, 3, 0.447832396928932, 1, 0.94921875),
        (64, 1, 0.125327831168065, 6, 0.996585680786799),
        (64, 5, 0.283282165310539, 2, 0.976353883743286),
        (256, 1, 0.0625407617964914, 12, 0.999947042103274),
        (1024, 1, 0.0312550884994952, 25, 0.999461244744408),
        (1024, 2, 0.0442085726072247, 17, 0.999448026154011),
        (1024, 3, 0.0541530516382455, 14, 0.999999871958208),
        (1024, 10, 0.0989827295998270, 7, 0.992612733670239),
        (1 << 16, 1, 0.00390625993417568, 201, 0.999988259646167),
        (1 << 20, 1, 9.76562655220496e-4, 804, 0.999999756965361),
        (1 << 20, 4, 1.95312624176556e-3, 402, 0.999997838225859),
        (1 << 20, 10, 3.08816668603020e-3, 254, 0.999998832484776),
        (1 << 20, 1000, 0.0308865283837320, 25, 0.999980493587761),
        (1 << 20, 1 << 18, 0.523598775598299, 1, 1.0),
        (1 << 30, 1, 3.05175781297370e-5, 25735, 0.999999999320726),
    ];

    #[test]
    fn the_published_formula_at_the_first_peak() {
        for &(n, m, theta_wanted, k, p) in TABLE {
            let plan = plan(&big(n), &big(m));
            assert!((theta(&big(n), &big(m)) / theta_wanted - 1.0).abs() < 1e-14, "theta of {m} in {n}");
            assert_eq!(plan.iterations, big(k), "iterations for {m} in {n}");
            assert!((plan.success - p).abs() < 1e-14, "success for {m} in {n}: {} not {p}", plan.success);
        }
    }

    /// N, M, k, numerator, denominator; same source, as exact rationals.
    const FRACTIONS: &[(u64, u64, u64, u64, u64)] = &[
        (4, 1, 0, 1, 4),
        (4, 1, 1, 1, 1),
        (4, 1, 2, 1, 4),
        (8, 1, 1, 25, 32),
        (8, 1, 2, 121, 128),
        (8, 1, 3, 169, 512),
        (8, 1, 4, 25, 2048),
        (8, 1, 6, 32761, 32768),
        (8, 2, 1, 1, 1),
        (8, 3, 0, 3, 8),
        (8, 3, 1, 27, 32),
        (8, 6, 0, 3, 4),
        (8, 6, 1, 0, 1),
        (16, 1, 1, 121, 256),
        (16, 1, 3, 63001, 65536),
        (16, 1, 4, 609961, 1048576),
        (16, 3, 1, 243, 256),
        (16, 3, 2, 2523, 4096),
        (1024, 1, 1, 588289, 67108864),
        (1024, 1, 2, 106537612801, 4398046511104),
    ];

    #[test]
    fn exact_fractions() {
        for &(n, m, k, numerator, denominator) in FRACTIONS {
            assert_eq!(exact_fraction(&big(n), &big(m), k), (big(numerator), big(denominator)), "{m} in {n}, k = {k}");
            let float = success(&big(n), &big(m), &big(k));
            assert!((float - numerator as f64 / denominator as f64).abs() < 1e-14);
        }
    }

    #[test]
    fn edges() {
        let codes = |n, m| plan(&big(n), &big(m)).advice.iter().map(|a| a.code).collect::<Vec<_>>();
        let none = plan(&big(16), &big(0));
        assert_eq!((none.iterations, none.success, none.expected_oracle_calls), (big(0), 0.0, None));
        assert_eq!(codes(16, 0), ["no-solution"]);
        let all = plan(&big(16), &big(16));
        assert_eq!((all.iterations, all.success), (big(0), 1.0));
        assert_eq!(codes(16, 16), ["everything-marked"]);
        let half = plan(&big(16), &big(8));
        assert_eq!((half.iterations, half.success), (big(0), 0.5));
        let most = plan(&big(8), &big(6));
        assert_eq!((most.iterations, most.success), (big(0), 0.75));
        assert_eq!(codes(8, 6), ["guess-instead"]);
        assert_eq!(plan(&big(1), &big(1)).iterations, big(0));
    }

    /// The plan's k against every k up to the bound, in exact fractions.
    #[test]
    fn no_smaller_or_better_k_within_the_bound() {
        for n in 1..=24u64 {
            for m in 1..=n {
                let plan = plan(&big(n), &big(m));
                let bound = (std::f64::consts::FRAC_PI_4 / theta(&big(n), &big(m)) - 1e-9).ceil() as u64;
                let all: Vec<_> = (0..=bound).map(|k| exact_fraction(&big(n), &big(m), k)).collect();
                let less = |a: &(BigUint, BigUint), b: &(BigUint, BigUint)| &a.0 * &b.1 < &b.0 * &a.1;
                let best = (0..all.len()).fold(0, |best, k| if less(&all[best], &all[k]) { k } else { best });
                assert_eq!(plan.iterations, big(best as u64), "{m} in {n}");
            }
        }
    }

    #[test]
    fn pi_by_machins_formula() {
        // J. Machin 1706: pi = 16 atan(1/5) - 4 atan(1/239). Ten guard digits.
        let one = BigInt::from(10u32).pow(110u32);
        let atan = |x: u32| {
            let (mut sum, mut power, mut k) = (BigInt::zero(), &one / x, 0u32);
            while !power.is_zero() {
                let term = &power / (2 * k + 1);
                if k % 2 == 0 {
                    sum += term
                } else {
                    sum -= term
                }
                power /= x * x;
                k += 1;
            }
            sum
        };
        let pi: BigInt = atan(5) * 16 - atan(239) * 4;
        let guard = BigInt::from(10u32).pow(10u32);
        assert_eq!((pi / guard).to_string(), PI_DIGITS);
    }

    #[test]
    fn searches_beyond_floating_point() {
        // pi/4 * 2^60 = 905502432259640355.298... (pi from the standard decimal expansion, from memory).
        let plan = plan(&(BigUint::one() << 120u32), &BigUint::one());
        assert_eq!(plan.iterations.to_string(), "905502432259640355");
        assert_eq!(plan.success, 1.0);
        let wide = super::plan(&(BigUint::one() << 3000u32), &BigUint::one());
        assert_eq!(wide.iterations.bits(), 1500);
    }

    #[test]
    fn ratios_of_large_numbers() {
        let wide = BigUint::one() << 3000u32;
        assert_eq!(ratio(&(BigUint::one() << 2999u32), &wide), 0.5);
        assert_eq!(ratio(&(BigUint::from(3u32) << 1990u32), &(BigUint::one() << 2000u32)), 3.0 / 1024.0);
        assert_eq!(ratio(&BigUint::one(), &(BigUint::one() << 1020u32)), 2f64.powi(-1020));
    }
}
