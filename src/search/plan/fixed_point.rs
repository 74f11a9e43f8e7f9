//! Only a lower bound is known: a sequence of phases that does not overshoot, whatever the count really is.
//!
//! Input: the least share `lambda = M_low / N` and the failure `delta^2` that is allowed. Output: the fewest iterations
//! l and their phases, such that the success is at least `1 - delta^2` for every share from `lambda` on.
//!
//! With `L = 2l + 1` and `1 / gamma = cosh(acosh(1 / delta) / L)`, iteration j of 1 to l is
//! `-(1 - (1 - e^{-i alpha_j}) |s><s|) (1 - (1 - e^{i beta_j}) P)`, iteration 1 first,
//! `alpha_j = -beta_{l-j+1} = 2 arccot(tan(2 pi j / L) sqrt(1 - gamma^2))`; the success at share `lambda` is
//! `1 - delta^2 T_L(sqrt(1 - lambda) / gamma)^2`, T_L the Chebyshev polynomial, which is at least `1 - delta^2` from
//! `lambda = 1 - gamma^2` on and is not promised below.
//!
//! # References
//! - T. Yoder, G. Low, I. Chuang: "Fixed-point quantum search with an optimal number of queries", Physical Review
//!   Letters 113 (2014) 210501 (formulas read in secondary notes; checked by simulation). There a query is a bit oracle
//!   and an iteration takes two; here an iteration is counted as one use of the oracle in angle form.

use std::f64::consts::PI;

use num_bigint::BigUint;
use num_traits::ToPrimitive;
use serde::Serialize;

use crate::search::number::{Wide, as_text, float};

/// Longer sequences are not listed; each phase can be asked for.
const MAX_LISTED: u64 = 1 << 20;

/// A sequence of phases.
#[derive(Clone, PartialEq, Debug, Serialize)]
pub struct FixedPoint {
    /// l: how many iterations.
    #[serde(serialize_with = "as_text")]
    pub iterations: BigUint,
    /// `delta^2`: the failure allowed.
    pub failure: f64,
    /// `1 - gamma^2`: from this share on the success is promised; at most the share that was asked for.
    pub promised_from: Wide,
}

/// What cannot be promised.
#[derive(Clone, Copy, PartialEq, Eq, Debug, thiserror::Error)]
pub enum FixedPointError {
    /// The least share must be above 0.
    #[error("a lower bound of 0 marked states promises nothing")]
    NoShare,
    /// The failure must lie between 0 and 1.
    #[error("the failure allowed must be above 0 and below 1")]
    Failure,
}

/// The fewest iterations for at least `marked` out of `space` states with at most this failure.
pub fn fixed_point(space: &BigUint, marked: &BigUint, failure: f64) -> Result<FixedPoint, FixedPointError> {
    let share = Wide::ratio(marked, space);
    if share.is_zero() {
        return Err(FixedPointError::NoShare);
    }
    if !(failure > 0.0 && failure < 1.0) {
        return Err(FixedPointError::Failure);
    }
    // L >= acosh(1 / delta) / acosh(1 / sqrt(1 - lambda)), and the latter is atanh(sqrt(lambda)).
    let root = share.sqrt();
    let per_step = match () {
        () if root < Wide::power_of_two(-30) => root,
        () => Wide::ratio(&(space - marked), space).square_root_atanh(root),
    };
    let wanted = if per_step.is_zero() { Wide::ONE } else { Wide::new(log_gain(failure)) / per_step };
    // The smallest odd L that is not below: l = ceil((L - 1) / 2).
    let iterations = (wanted.less(Wide::ONE) * Wide::new(0.5)).ceil();
    Ok(FixedPoint::with(iterations, failure))
}

impl Wide {
    /// `atanh(root)` where `self = 1 - root^2`; 0 stands for infinity, at `self` 0.
    fn square_root_atanh(self, root: Wide) -> Wide {
        if self.is_zero() {
            return Wide::ZERO;
        }
        // atanh r = ln((1 + r)^2 / (1 - r^2)) / 2; ln_1p keeps the digits of a small r.
        let (root, rest) = (root.to_f64(), self);
        Wide::new(if root < 0.5 { root.atanh() } else { root.ln_1p() - 0.5 * rest.ln() })
    }
}

/// `acosh(1 / delta)`.
fn log_gain(failure: f64) -> f64 {
    (1.0 - failure).sqrt().ln_1p() - 0.5 * failure.ln()
}

impl FixedPoint {
    /// The sequence of this many iterations.
    pub fn with(iterations: BigUint, failure: f64) -> Self {
        let mut sequence = Self { iterations, failure, promised_from: Wide::ONE };
        sequence.promised_from = sequence.width().square();
        sequence
    }

    /// L.
    fn length(&self) -> Wide {
        Wide::of(&(&self.iterations * 2u32 + 1u32))
    }

    /// `sqrt(1 - gamma^2) = tanh(acosh(1 / delta) / L)`.
    fn width(&self) -> Wide {
        let step = Wide::new(log_gain(self.failure)) / self.length();
        if step < Wide::power_of_two(-30) { step } else { Wide::new(step.to_f64().tanh()) }
    }

    /// `alpha_j` for j from 1 to l: the phase of the reflection about the start state.
    pub fn start_phase(&self, j: u64) -> f64 {
        let length = 2.0 * float(&self.iterations) + 1.0;
        let (sine, cosine) = (2.0 * PI * j as f64 / length).sin_cos();
        // arccot is odd here: between -pi/2 and pi/2.
        2.0 * (cosine / (sine * self.width().to_f64())).atan()
    }

    /// `beta_j` for j from 1 to l: the phase of the oracle.
    pub fn oracle_phase(&self, j: u64) -> f64 {
        let iterations = self.iterations.to_u64().expect("a phase of a sequence that can be run");
        -self.start_phase(iterations - j + 1)
    }

    /// All pairs `(alpha_j, beta_j)`; `None` where there are too many to list.
    pub fn phases(&self) -> Option<Vec<(f64, f64)>> {
        let iterations = self.iterations.to_u64().filter(|&iterations| iterations <= MAX_LISTED)?;
        Some((1..=iterations).map(|j| (self.start_phase(j), self.oracle_phase(j))).collect())
    }

    /// The success for this count, promised or not.
    pub fn success(&self, space: &BigUint, marked: &BigUint) -> f64 {
        let (share, rest) = (Wide::ratio(marked, space), Wide::ratio(&(space - marked), space));
        let (promised, length) = (self.promised_from, self.length());
        if rest.is_zero() {
            return 1.0;
        }
        // The argument of T_L is the cosine of an angle, or above 1 the hyperbolic cosine of one.
        let chebyshev = if share >= promised {
            let tangent = (share.less(promised) / rest).sqrt();
            let angle = if tangent < Wide::power_of_two(-30) { tangent } else { Wide::new(tangent.to_f64().atan()) };
            (angle * length).to_f64().cos()
        } else {
            let tangent = (promised.less(share) / rest).sqrt();
            let angle = if tangent < Wide::power_of_two(-30) { tangent } else { Wide::new(tangent.to_f64().atanh()) };
            (angle * length).to_f64().cosh()
        };
        (1.0 - self.failure * chebyshev * chebyshev).clamp(0.0, 1.0)
    }
}

#[cfg(test)]
mod tests {
    use num_traits::One;

    use super::*;

    fn big(number: u64) -> BigUint {
        BigUint::from(number)
    }

    fn near(found: f64, wanted: f64) {
        assert!((found - wanted).abs() < 1.1e-14 * wanted.abs().max(1.0), "{found} not {wanted}");
    }

    /// l, delta^2, w, alphas. Source: Yoder, Low, Chuang 2014; values computed with 40 digits outside this program.
    type Row = (u64, f64, f64, &'static [f64]);
    const PHASES: &[Row] = &[
        (1, 0.1, 0.293125302173400, &[-1.63502353368358]),
        (2, 0.1, 0.121424033489167, &[1.50090929625804, -2.64567149905925]),
        (3, 0.1, 0.0645606803267161, &[2.52469830041997, -1.46373395487046, -2.89807857572858]),
        (4, 0.1, 0.0397381423529675, &[2.81012191878609, 1.44840973467449, -2.47667512586610, -2.99673571779518]),
        (2, 0.01, 0.287386452393333, &[1.08978261274278, -2.39876930869416]),
    ];

    #[test]
    fn phases_of_known_cases() {
        for &(l, failure, width, alphas) in PHASES {
            let sequence = FixedPoint::with(big(l), failure);
            near(sequence.promised_from.to_f64(), width);
            let phases = sequence.phases().unwrap();
            for (j, &alpha) in alphas.iter().enumerate() {
                near(phases[j].0, alpha);
                near(phases[alphas.len() - 1 - j].1, -alpha);
            }
        }
    }

    /// l, delta^2, M, N, success; same source.
    #[test]
    fn success_of_known_cases() {
        let cases: &[(u64, f64, u64, u64, f64)] = &[
            (1, 0.1, 1, 8, 0.528647282781760),
            (1, 0.1, 1, 4, 0.835796247199530),
            (1, 0.1, 1, 2, 0.997940267510078),
            (1, 0.1, 3, 4, 0.911114154065586),
            (1, 0.1, 1, 1, 1.0),
            (2, 0.1, 1, 8, 0.909847892274488),
            (2, 0.1, 1, 4, 0.985405678709158),
            (2, 0.1, 1, 2, 0.918048116300670),
            (3, 0.1, 1, 8, 0.994880177624203),
            (2, 0.01, 1, 4, 0.970520956151144),
        ];
        for &(l, failure, marked, space, success) in cases {
            near(FixedPoint::with(big(l), failure).success(&big(space), &big(marked)), success);
        }
        // At the edge of the promise the success is the promise.
        let space = BigUint::one() << 60u32;
        let sequence = FixedPoint::with(big(1), 0.1);
        let edge = (Wide::of(&space) * sequence.promised_from).floor();
        assert!((sequence.success(&space, &edge) - 0.9).abs() < 1e-7);
    }

    /// N, failure, L; same source.
    #[test]
    fn the_fewest_iterations_of_known_cases() {
        for (space, failure, length) in
            [(8, 0.1, 5), (16, 0.1, 9), (1024, 0.1, 59), (1024, 0.01, 97), (1 << 20, 0.01, 3067)]
        {
            let sequence = fixed_point(&big(space), &big(1), failure).unwrap();
            assert_eq!(sequence.iterations, big((length - 1) / 2), "one in {space}, {failure}");
            assert!(sequence.promised_from <= Wide::ratio(&big(1), &big(space)));
            let shorter = FixedPoint::with(big((length - 3) / 2), failure);
            assert!(shorter.promised_from > Wide::ratio(&big(1), &big(space)));
        }
    }

    #[test]
    fn the_promise_holds_from_the_bound_on() {
        let sequence = fixed_point(&big(1024), &big(3), 0.05).unwrap();
        for marked in 3..=1024 {
            assert!(sequence.success(&big(1024), &big(marked)) >= 0.95 - 1e-12, "{marked}");
        }
    }

    #[test]
    fn edges_and_large_spaces() {
        assert_eq!(fixed_point(&big(8), &big(0), 0.1), Err(FixedPointError::NoShare));
        assert_eq!(fixed_point(&big(8), &big(1), 0.0), Err(FixedPointError::Failure));
        assert_eq!(fixed_point(&big(8), &big(1), f64::NAN), Err(FixedPointError::Failure));
        assert_eq!(fixed_point(&big(8), &big(8), 0.1).unwrap().iterations, big(0));
        let space = BigUint::one() << 3000u32;
        let sequence = fixed_point(&space, &big(1), 0.01).unwrap();
        // L is about ln(2 / delta) sqrt(N / M).
        let length = sequence.length() / Wide::power_of_two(1500);
        assert!((length.to_f64() - 20f64.ln()).abs() < 0.01);
        assert!((sequence.success(&space, &big(1)) - 0.99).abs() < 1e-6);
        assert!(sequence.success(&space, &big(1000)) >= 0.99);
        assert_eq!(sequence.phases(), None);
    }
}
