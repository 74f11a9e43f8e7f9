//! The iteration count with the highest success: at the first peak, or anywhere within a bound.
//!
//! The success `sin^2((2k + 1) theta)` is highest where `(2k + 1) theta / pi` is nearest to an odd half. At the first
//! peak that is `k = floor(pi / (4 theta))`. Among all `k <= bound` it is a question of how near the multiples of one
//! number come to another modulo 1; `walk` answers it by the steps of the continued fraction, without trying every k.
//!
//! # References
//! - M. Boyer, G. Brassard, P. Hoyer, A. Tapp: "Tight bounds on quantum searching", Fortschritte der Physik 46 (1998),
//!   section 3 (read in secondary notes).
//! - The three-distance theorem: V. Sos, "On the distribution mod 1 of the sequence n alpha", Ann. Univ. Sci. Budapest
//!   Eotvos Sect. Math. 1 (1958) (from memory): each new least remainder comes by the last step of one of two kinds.

use num_bigint::BigUint;
use num_traits::{One, Zero};

use super::success::theta;
use crate::search::number::{PRINTED_BITS, fixed};

/// Beyond this many iterations the count is found in fixed point instead of floating point.
const MAX_FLOAT_ITERATIONS: f64 = (1u64 << 40) as f64;

/// The smallest k with the highest success among `k <= ceil(pi / (4 theta))`.
///
/// It is exact while it has at most [`PRINTED_BITS`] bits; beyond, only as many leading bits are.
pub fn first_peak(space: &BigUint, marked: &BigUint) -> BigUint {
    // At M >= N/2 the start state is best: p_1 = a (3 - 4a)^2 <= a there (equal at M = N/2 and M = N: the smallest k).
    if marked.is_zero() || marked * 2u32 >= *space {
        return BigUint::zero();
    }
    let peak = std::f64::consts::FRAC_PI_4 / theta(space, marked);
    if peak <= MAX_FLOAT_ITERATIONS {
        // p_k is largest at the integer nearest to peak - 1/2, which is floor(peak); that is never a tie below N/2,
        // since pi / (4 theta) is an integer for rational M/N only at M = N/2 (Niven).
        return BigUint::from(peak.floor() as u64);
    }
    let (space, scale) = cut(space, marked);
    let digits = angle_digits(&space, marked);
    (fixed::pi(digits) / (fixed::theta(&space, marked, digits) * 4u32)) << scale
}

/// Digits for an angle theta, such that `pi / theta` is right to 60 digits after the point.
pub(super) fn angle_digits(space: &BigUint, marked: &BigUint) -> u64 {
    space.bits() - marked.bits() + 66
}

/// A smaller space in which a count of iterations is `2^scale` times smaller, to all the digits that are kept. For
/// tiny angles the count goes with the root of N.
pub(super) fn cut(space: &BigUint, marked: &BigUint) -> (BigUint, u64) {
    let scale = (space.bits() - marked.bits()).saturating_sub(2 * PRINTED_BITS) / 2;
    (space >> (2 * scale), scale)
}

/// The smallest k with the highest success among `k <= bound`, whichever peak it lies at.
///
/// Places that differ by less than 2^-100 of a turn count as equal.
pub fn best_within(space: &BigUint, marked: &BigUint, bound: &BigUint) -> BigUint {
    if marked.is_zero() || marked == space {
        return BigUint::zero();
    }
    let peak = first_peak(space, marked);
    if peak >= *bound {
        return bound.clone();
    }
    // Everything below is in turns of pi, as integers modulo 2^digits.
    let digits = 2 * (bound.bits() + space.bits() - marked.bits()) + 128;
    let turn = BigUint::one() << digits;
    let theta = (fixed::theta(space, marked, digits) << digits) / fixed::pi(digits);
    let step = &theta * 2u32 % &turn;
    let rounding: BigUint = bound * 8u32 + 8u32;
    // How far (2k + 1) theta is beyond an odd half, and how far it is short of one.
    let beyond = (&theta + &turn - (&turn >> 1u32)) % &turn;
    let short = (&turn - &beyond) % &turn;
    let back = (&turn - &step) % &turn;
    let (_, above) = walk(&step, &beyond, &turn, bound, &BigUint::zero());
    let (_, below) = walk(&back, &short, &turn, bound, &BigUint::zero());
    let good = above.min(below) + rounding;
    let candidates = [walk(&step, &beyond, &turn, bound, &good), walk(&back, &short, &turn, bound, &good)];
    candidates.into_iter().filter(|(_, rest)| *rest <= good).map(|(k, _)| k).min().expect("one of them is the best")
}

/// Walks k through the record lows of `(start + k step) mod turn`, up to `bound`; stops at the first that is at most
/// `enough`, else at the least of all. Returns k and the remainder there.
///
/// Kept throughout: `down` is a step count that lowers the remainder by `fall`, `up` one that raises it by `rise`, each
/// the best of its kind with so few steps; a record is followed by one that is `down` steps later as soon as `fall` is
/// not more than the remainder.
fn walk(step: &BigUint, start: &BigUint, turn: &BigUint, bound: &BigUint, enough: &BigUint) -> (BigUint, BigUint) {
    let (mut k, mut rest) = (BigUint::zero(), start.clone());
    let (mut up, mut rise) = (BigUint::one(), step.clone());
    let (mut down, mut fall) = (BigUint::one(), turn - step);
    if step.is_zero() {
        return (k, rest);
    }
    while rest > *enough && &k + &down <= *bound {
        if fall <= rest {
            let wanted = (&rest - enough + &fall - 1u32) / &fall;
            let times = wanted.min(&rest / &fall).min((bound - &k) / &down);
            k += &down * &times;
            rest -= &fall * &times;
        } else if rise < fall {
            // Falls get smaller by rises; no further than needed, and never to 0.
            let wanted = (&fall - &rest + &rise - 1u32) / &rise;
            let times = wanted.min((&fall - 1u32) / &rise);
            down += &up * &times;
            fall -= &rise * &times;
        } else {
            let times = (&rise - 1u32) / &fall;
            if times.is_zero() {
                break;
            }
            up += &down * &times;
            rise -= &fall * &times;
        }
    }
    (k, rest)
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::search::plan::success::{exact_fraction, success};

    fn big(number: u64) -> BigUint {
        BigUint::from(number)
    }

    fn less(a: &(BigUint, BigUint), b: &(BigUint, BigUint)) -> bool {
        &a.0 * &b.1 < &b.0 * &a.1
    }

    fn exact_best(n: u64, m: u64, bound: u64) -> u64 {
        let all: Vec<_> = (0..=bound).map(|k| exact_fraction(&big(n), &big(m), k)).collect();
        (0..all.len()).fold(0, |best, k| if less(&all[best], &all[k]) { k } else { best }) as u64
    }

    /// The first peak against every k up to the bound, in exact fractions.
    #[test]
    fn no_smaller_or_better_k_at_the_first_peak() {
        for n in 1..=24u64 {
            for m in 1..=n {
                let bound = (std::f64::consts::FRAC_PI_4 / theta(&big(n), &big(m)) - 1e-9).ceil() as u64;
                assert_eq!(first_peak(&big(n), &big(m)), big(exact_best(n, m, bound)), "{m} in {n}");
            }
        }
    }

    /// Every bound up to 40, in exact fractions; the peaks of one in eight and three in eight are in the tables that
    /// the issue of this room names: 6 and 3.
    #[test]
    fn no_smaller_or_better_k_within_a_bound() {
        assert_eq!(best_within(&big(8), &big(1), &big(6)), big(6));
        assert_eq!(best_within(&big(8), &big(3), &big(3)), big(3));
        for n in [4u64, 7, 8, 12, 16, 23] {
            for m in 1..=n {
                let all: Vec<_> = (0..40).map(|k| exact_fraction(&big(n), &big(m), k)).collect();
                let mut wanted = 0;
                for bound in 0..40usize {
                    wanted = if less(&all[wanted], &all[bound]) { bound } else { wanted };
                    let best = best_within(&big(n), &big(m), &big(bound as u64));
                    assert_eq!(best, big(wanted as u64), "{m} in {n} within {bound}");
                }
            }
        }
    }

    #[test]
    fn bounds_far_beyond_a_scan() {
        let (n, m) = (big(1 << 20), big(3));
        let (small, large) = (big(1 << 20), BigUint::one() << 60u32);
        let theta = theta(&n, &m);
        let scanned = (0..1u64 << 20).map(|k| ((2 * k + 1) as f64 * theta).sin().powi(2));
        let best_scanned = scanned.fold(0.0, f64::max);
        let p = success(&n, &m, &best_within(&n, &m, &small));
        assert!(p >= best_scanned - 1e-12, "{p} and {best_scanned}");
        let far = best_within(&n, &m, &large);
        assert!(far > small && far <= large);
        assert_eq!(success(&n, &m, &far), 1.0);
    }

    #[test]
    fn the_last_digit_of_a_long_count() {
        // pi/4 * 2^60 = 905502432259640355.298... (pi from the standard decimal expansion, from memory).
        assert_eq!(first_peak(&(BigUint::one() << 120u32), &big(1)).to_string(), "905502432259640355");
        // Both neighbours are worse, which needs all 450 digits.
        let (space, marked) = (BigUint::one() << 3000u32, big(5));
        let k = first_peak(&space, &marked);
        let digits = 2 * angle_digits(&space, &marked);
        let distance = |k: &BigUint| {
            let angle = (k * 2u32 + 1u32) * fixed::theta(&space, &marked, digits);
            let half = fixed::pi(digits) >> 1u32;
            if angle > half { angle - half } else { half - angle }
        };
        assert!(distance(&k) < distance(&(&k - 1u32)) && distance(&k) < distance(&(&k + 1u32)));
        // Beyond the printed length the leading bits stay right.
        let long = first_peak(&(BigUint::one() << 20000u32), &big(1));
        assert_eq!(long.bits(), 10000);
        assert_eq!(&long >> 9800u32, first_peak(&(BigUint::one() << 400u32), &big(1)));
    }
}
