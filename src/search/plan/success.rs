//! The success probability after k iterations.
//!
//! With `sin^2 theta = M/N`, `p_k = sin^2((2k + 1) theta)`; as an exact fraction, with `a = M/N`, `s_{-1} = -1`,
//! `s_0 = 1` and `s_{k+1} = 2 (1 - 2a) s_k - s_{k-1}`, `p_k = a s_k^2`.
//!
//! # References
//! - M. Boyer, G. Brassard, P. Hoyer, A. Tapp: "Tight bounds on quantum searching", Fortschritte der Physik 46 (1998),
//!   section 3 (read in secondary notes).
//! - G. Brassard, P. Hoyer, M. Mosca, A. Tapp: "Quantum amplitude amplification and estimation", AMS Contemporary
//!   Mathematics 305 (2002), section 2 (read in secondary notes).

use num_bigint::{BigInt, BigUint};
use num_traits::{One, ToPrimitive, Zero};

use crate::search::number::{Wide, fixed};

/// Beyond this many bits the exact fraction is not computed.
const MAX_EXACT_BITS: u64 = 1 << 15;

/// `asin(sqrt(M/N))`; exact to rounding also where M/N is close to 1. It is 0 where the angle is below every double.
pub fn theta(space: &BigUint, marked: &BigUint) -> f64 {
    theta_wide(space, marked).to_f64()
}

/// `asin(sqrt(M/N))` at any size.
pub fn theta_wide(space: &BigUint, marked: &BigUint) -> Wide {
    theta_of(Wide::ratio(marked, space), Wide::ratio(&(space - marked), space))
}

/// The angle of a share and of the rest to 1, which is given apart so that a share close to 1 loses nothing.
pub(super) fn theta_of(share: Wide, rest: Wide) -> Wide {
    let sine = share.sqrt();
    // Below this the angle is its sine to all digits of a double.
    if sine < Wide::power_of_two(-30) { sine } else { Wide::new(sine.to_f64().atan2(rest.sqrt().to_f64())) }
}

/// `sin^2` of an angle at any size, which should be below 4 for full accuracy.
pub(super) fn sine_squared(angle: Wide) -> Wide {
    if angle < Wide::power_of_two(-30) { angle.square() } else { Wide::new(angle.to_f64().sin().powi(2)) }
}

/// `p_k`, to about 1e-13 of its value; 0 where it is below every double.
pub fn success(space: &BigUint, marked: &BigUint, iterations: &BigUint) -> f64 {
    success_wide(space, marked, iterations).to_f64()
}

/// `p_k` at any size.
pub fn success_wide(space: &BigUint, marked: &BigUint, iterations: &BigUint) -> Wide {
    let odd: BigUint = iterations * 2u32 + 1u32;
    let angle = theta_wide(space, marked) * Wide::of(&odd);
    if angle < Wide::new(4.0) {
        return sine_squared(angle);
    }
    // The turns are taken off before rounding: the product is exact to 80 digits after the point.
    let digits = odd.bits() + 80;
    let rest = odd * fixed::theta(space, marked, digits) % fixed::pi(digits);
    sine_squared(Wide::ratio(&rest, &(BigUint::one() << digits)))
}

/// `p_k` as a fraction in lowest terms, where it is short enough to be computed.
pub(super) fn short_fraction(space: &BigUint, marked: &BigUint, iterations: &BigUint) -> Option<(BigUint, BigUint)> {
    let fits = |k: &u64| k.saturating_mul(2).saturating_add(1).saturating_mul(space.bits()) <= MAX_EXACT_BITS;
    Some(exact_fraction(space, marked, iterations.to_u64().filter(fits)?))
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

#[cfg(test)]
mod tests {
    use super::*;

    fn big(number: u64) -> BigUint {
        BigUint::from(number)
    }

    /// N, M, k, numerator, denominator. Source: Boyer, Brassard, Hoyer, Tapp 1998, section 3 gives the formula; the
    /// values were computed from it as exact rationals, outside this program.
    const FRACTIONS: &[(u64, u64, u64, u64, u64)] = &[
        (4, 1, 0, 1, 4),
        (4, 1, 1, 1, 1),
        (4, 1, 2, 1, 4),
        (8, 1, 0, 1, 8),
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
        (16, 1, 0, 1, 16),
        (16, 1, 1, 121, 256),
        (16, 1, 2, 3721, 4096),
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

    /// Far beyond the first peak the angle is many turns; the exact fraction says what must come out.
    #[test]
    fn many_turns() {
        for (n, m, k) in [(16u64, 3, 200u64), (1000, 7, 900), (1024, 1, 1200)] {
            let (numerator, denominator) = exact_fraction(&big(n), &big(m), k);
            let wanted = Wide::ratio(&numerator, &denominator).to_f64();
            assert!((success(&big(n), &big(m), &big(k)) - wanted).abs() < 1e-13, "{m} in {n}, k = {k}");
        }
        // theta = pi/6 for one in four: the success has period 3 in k, whatever the size of k.
        let far = BigUint::from(3u32).pow(500);
        assert!((success(&big(4), &big(1), &far) - 0.25).abs() < 1e-14);
        assert!((success(&big(4), &big(1), &(far + 1u32)) - 1.0).abs() < 1e-14);
    }

    /// Brassard and others print "below one in a million" for four marked where one was expected; exact value computed
    /// with 40 digits, outside this program.
    #[test]
    fn a_wrong_count_costs_everything() {
        let p = success(&big(1 << 20), &big(4), &big(804));
        assert!((p / 9.75095520723366e-7 - 1.0).abs() < 1e-10, "{p}");
    }

    #[test]
    fn small_shares_of_large_spaces_do_not_vanish() {
        let space = BigUint::one() << 3000u32;
        let p = success_wide(&space, &big(1), &big(1));
        assert!((p.log2() - (9f64.log2() - 3000.0)).abs() < 1e-11);
        assert_eq!(success(&space, &big(1), &big(1)), 0.0);
    }
}
