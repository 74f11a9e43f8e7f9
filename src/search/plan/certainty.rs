//! A marked state for certain: as few iterations as the peak needs, tuned so that the last one ends exactly on it.
//!
//! Input: N and M, known exactly. Output: the number of iterations J and either of two tunings.
//!
//! - *Matched phases*: the sign of the oracle and of the reflection are both replaced by `e^{i phi}`,
//!   `sin(phi / 2) = sin(pi / (4J + 2)) / sin theta`; one iteration is
//!   `-(1 - (1 - e^{i phi}) |s><s|) (1 - (1 - e^{i phi}) P)`, P the marked states. Both phases have the same sign.
//! - *Weakened start*: one more qubit is prepared so that it is 1 with amplitude `sin(omega) / sin(theta)`,
//!   `omega = pi / (4J + 2)`; marked is what was marked with that qubit at 1. J plain iterations follow. The angle of
//!   the qubit's Y rotation is the same number as phi.
//!
//! Both need `J = ceil(pi / (4 theta) - 1/2)`, and any larger J serves as well.
//!
//! # References
//! - G. Long: "Grover algorithm with zero theoretical failure rate", Physical Review A 64 (2001) 022307; its J + 1 is
//!   the J here (abstract read; formula checked by simulation).
//! - G. Brassard, P. Hoyer, M. Mosca, A. Tapp: "Quantum amplitude amplification and estimation", AMS Contemporary
//!   Mathematics 305 (2002), section 2.1 (from memory; checked by simulation).

use std::f64::consts::PI;

use num_bigint::{BigInt, BigUint, Sign};
use num_traits::{One, Zero};
use serde::Serialize;

use super::peak::{angle_digits, cut};
use super::success::theta_of;
use crate::search::number::{PRINTED_BITS, Wide, as_text, fixed};

/// A search that succeeds for certain.
#[derive(Clone, PartialEq, Debug, Serialize)]
pub struct Certainty {
    /// J: how many iterations.
    #[serde(serialize_with = "as_text")]
    pub iterations: BigUint,
    /// phi: the phase of both reflections, and the angle of the Y rotation of the extra qubit; pi where nothing has to
    /// be tuned, for then J plain iterations are already certain.
    pub phase: f64,
    /// `omega = pi / (4J + 2)`: the angle of the weakened start.
    pub weakened_theta: Wide,
    /// `sin^2(omega) / sin^2(theta)`: the share of the marked probability that the weakened start keeps.
    pub kept: f64,
    /// Its root: the amplitude of the extra qubit at 1.
    pub rotation_sine: f64,
}

/// The fewest iterations that can be certain; `None` where nothing is marked.
pub fn certainty(space: &BigUint, marked: &BigUint) -> Option<Certainty> {
    if marked.is_zero() {
        return None;
    }
    Some(tuned(space, marked, fewest(space, marked)))
}

/// The same with a given number of iterations; `None` where these are too few.
pub fn certainty_with(space: &BigUint, marked: &BigUint, iterations: &BigUint) -> Option<Certainty> {
    let enough = !marked.is_zero() && *iterations >= fewest(space, marked);
    enough.then(|| tuned(space, marked, iterations.clone()))
}

/// `ceil(pi / (4 theta) - 1/2)`. It is an integer before rounding up only for M = N/4 and M = N (Niven's theorem).
fn fewest(space: &BigUint, marked: &BigUint) -> BigUint {
    if marked == space {
        return BigUint::zero();
    }
    if marked * 4u32 >= *space {
        return BigUint::one();
    }
    let (space, scale) = cut(space, marked);
    let digits = angle_digits(&space, marked);
    let theta = fixed::theta(&space, marked, digits);
    // pi / (4 theta) - 1/2 = (pi - 2 theta) / (4 theta), never an integer here.
    // Beyond the printed length it is rounded up further, since any larger number serves as well.
    ((fixed::pi(digits) - &theta * 2u32) / (theta * 4u32) + 1u32) << scale
}

fn tuned(space: &BigUint, marked: &BigUint, iterations: BigUint) -> Certainty {
    let turns: BigUint = &iterations * 4u32 + 2u32;
    let ratio = space.bits() - marked.bits();
    if ratio > 2 * PRINTED_BITS {
        // What is to be tuned is far below the digits of a double.
        let weakened_theta = Wide::new(PI) / Wide::of(&turns);
        return Certainty { iterations, phase: PI, weakened_theta, kept: 1.0, rotation_sine: 1.0 };
    }
    // theta - omega may be as small as the square of either; it gets 60 digits and more.
    let digits = ratio.max(2 * turns.bits()) + 128;
    let (theta, half_turn) = (fixed::theta(space, marked, digits), fixed::pi(digits));
    let omega = half_turn / &turns;
    // sin^2 theta - sin^2 omega = sin(theta - omega) sin(theta + omega): what is left of 1 after the kept share, free
    // of cancellation. Where J fits without tuning the difference is 0 up to rounding.
    let unit = BigUint::one() << digits;
    let rest = match BigInt::from(theta.clone()) - BigInt::from(omega.clone()) {
        rest if rest.sign() == Sign::Minus || rest.bits() < 16 => BigUint::zero(),
        rest => rest.magnitude().clone(),
    };
    let sine = |angle: &BigUint| sine(Wide::ratio(angle, &unit));
    let (marked_sine, kept_sine) = (sine(&theta), sine(&omega));
    let lost = sine(&rest) * sine(&(&theta + &omega)) / marked_sine.square();
    let kept = (kept_sine / marked_sine).square().to_f64().min(1.0);
    Certainty {
        phase: 2.0 * theta_of(Wide::new(kept), lost).to_f64(),
        weakened_theta: Wide::ratio(&omega, &unit),
        kept,
        rotation_sine: kept.sqrt(),
        iterations,
    }
}

fn sine(angle: Wide) -> Wide {
    if angle < Wide::power_of_two(-30) { angle } else { Wide::new(angle.to_f64().sin().max(0.0)) }
}

#[cfg(test)]
mod tests {
    use super::*;

    fn big(number: u64) -> BigUint {
        BigUint::from(number)
    }

    /// N, M, J, omega, kept, rotation sine. Source of the formula: Brassard and others 2002, section 2.1 (from memory);
    /// values computed with 40 digits outside this program.
    const WEAKENED: &[(u64, u64, u64, f64, f64, f64)] = &[
        (4, 1, 1, 0.523598775598299, 1.0, 1.0),
        (8, 1, 2, 0.314159265358979, 0.763932022500210, 0.874032048897642),
        (16, 1, 3, 0.224399475256414, 0.792249056780647, 0.890083735825258),
        (16, 3, 2, 0.314159265358979, 0.509288015000140, 0.713644179546180),
        (1024, 1, 25, 0.0307999279763705, 0.971095686633432, 0.985441873797451),
        (1024, 3, 15, 0.0506708492514483, 0.875635474449895, 0.935753960424371),
        (1 << 20, 1, 804, 9.76256262768736e-4, 0.999372606994292, 0.999686254278959),
    ];

    #[test]
    fn the_weakened_start_of_known_cases() {
        let near =
            |found: f64, wanted: f64| assert!((found / wanted - 1.0).abs() < 2e-15 * 10.0, "{found} not {wanted}");
        for &(n, m, iterations, omega, kept, sine) in WEAKENED {
            let found = certainty(&big(n), &big(m)).unwrap();
            assert_eq!(found.iterations, big(iterations), "{m} in {n}");
            near(found.weakened_theta.to_f64(), omega);
            near(found.kept, kept);
            near(found.rotation_sine, sine);
        }
    }

    /// N, M, J, phi. Source: Long 2001; values computed with 40 digits outside this program.
    const MATCHED: &[(u64, u64, u64, f64)] = &[
        (4, 1, 1, 3.14159265358979),
        (4, 1, 2, 1.33247886498503),
        (8, 1, 2, 2.12688004715550),
        (16, 1, 3, 2.19505769909012),
        (16, 3, 2, 1.58937342529611),
        (1024, 1, 25, 2.79990756873977),
        (1 << 20, 1, 804, 3.09149178505612),
    ];

    #[test]
    fn the_matched_phases_of_known_cases() {
        for &(n, m, iterations, phase) in MATCHED {
            let found = certainty_with(&big(n), &big(m), &big(iterations)).unwrap();
            assert!((found.phase - phase).abs() < 1e-14, "{m} in {n}: {} not {phase}", found.phase);
            let fewer = big(iterations - 1);
            assert_eq!(certainty_with(&big(n), &big(m), &fewer).is_some(), (n, iterations) == (4, 2));
        }
    }

    #[test]
    fn edges_and_large_spaces() {
        assert_eq!(certainty(&big(8), &big(0)), None);
        let all = certainty(&big(8), &big(8)).unwrap();
        assert_eq!((all.iterations, all.kept), (big(0), 1.0));
        assert_eq!(certainty(&big(8), &big(7)).unwrap().iterations, big(1));
        for bits in [100u32, 3000, 20000] {
            let found = certainty(&(BigUint::one() << bits), &big(1)).unwrap();
            assert_eq!(found.iterations.bits(), u64::from(bits / 2));
            assert!(found.phase > 3.14 && found.phase <= PI);
        }
    }
}
