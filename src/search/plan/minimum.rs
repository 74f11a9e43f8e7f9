//! Finding the least value: the random schedule, threshold by threshold.
//!
//! Input: N and how many states have each value, the best value first. Output: the expected iterations in all. What is
//! run: from a drawn state, search with the schedule for a state that is strictly better than the best so far, until
//! none is.
//!
//! Let `c_i` states have the i-th best value and `S_i` at most that. The first of these `S_i` that is drawn is equally
//! likely to be any of them, so the i-th value is ever the threshold with probability `c_i / S_i`; the search from it
//! looks for `S_{i-1}` states. (With N different values that is Lemma 1 of the source: 1/r for rank r.) States without
//! a value, those that break a constraint, are left by a search for all `S` valid ones.
//!
//! # References
//! - C. Durr, P. Hoyer: "A quantum algorithm for finding the minimum" (1996), arXiv:quant-ph/9607014: Lemmas 1 and 2
//!   and the cut-off (read in secondary notes).

use num_bigint::BigUint;
use num_traits::Zero;
use serde::Serialize;

use super::schedule::Schedule;
use crate::search::number::Wide;

/// What finding the least value costs.
#[derive(Clone, Copy, PartialEq, Debug, Serialize)]
pub struct Minimum {
    /// Iterations until a state with the best value is found, on average.
    pub iterations: Wide,
    /// Measurements until then, on average, the first drawn state not counted.
    pub measurements: f64,
    /// How many thresholds there are on the way, on average, the best value included.
    pub thresholds: f64,
    /// `(45/4) sqrt N`: the published bound on the iterations for N different values.
    pub bound: Wide,
    /// `22.5 sqrt N + 1.4 log2(N)^2`: after so many steps the least value has been found with a chance of 1/2.
    pub cut_off: Wide,
}

/// The expected cost for a start state of `space` states of which `classes[i]` have the i-th best value; `None` where
/// there is no valid state.
pub fn minimum(space: &BigUint, classes: &[BigUint]) -> Option<Minimum> {
    let valid: BigUint = classes.iter().sum();
    assert!(valid <= *space, "classes of the states of the start state");
    if valid.is_zero() {
        return None;
    }
    let schedule = Schedule::new(space);
    let (mut iterations, mut measurements, mut thresholds) = (Wide::ZERO, 0.0, 0.0);
    let mut add = |chance: Wide, targets: &BigUint| {
        if let Some(cost) = schedule.expected(targets) {
            iterations = iterations + chance * cost.iterations;
            measurements += chance.to_f64() * cost.measurements;
        }
    };
    // The first state drawn may break a constraint.
    add(Wide::ratio(&(space - &valid), space), &valid);
    let mut better = BigUint::zero();
    for class in classes {
        let all = &better + class;
        if !all.is_zero() {
            let chance = Wide::ratio(class, &all);
            add(chance, &better);
            thresholds += chance.to_f64();
        }
        better = all;
    }
    let root = Wide::of(space).sqrt();
    let log = Wide::of(space).log2();
    Some(Minimum {
        iterations,
        measurements,
        thresholds,
        bound: Wide::new(11.25) * root,
        cut_off: Wide::new(22.5) * root + Wide::new(1.4 * log * log),
    })
}

#[cfg(test)]
mod tests {
    use num_traits::One;

    use super::*;

    /// N, expected iterations, bound, for N different values. Source of the sum: Durr, Hoyer 1996, Lemma 2, with the
    /// exact cost of the schedule in place of its bound; computed with 40 digits outside this program.
    #[test]
    fn sums_of_known_cases() {
        for (n, sum, bound) in [
            (8u64, 1.14733512118911, 31.8198051533946),
            (16, 2.11851079886640, 45.0),
            (64, 6.83838619504916, 90.0),
            (256, 19.8785282574155, 180.0),
        ] {
            let classes = vec![BigUint::one(); n as usize];
            let found = minimum(&BigUint::from(n), &classes).unwrap();
            assert!((found.iterations.to_f64() / sum - 1.0).abs() < 1e-13, "{n}: {}", found.iterations);
            assert!((found.bound.to_f64() - bound).abs() < 1e-12);
            let harmonic: f64 = (1..=n).map(|r| 1.0 / r as f64).sum();
            assert!((found.thresholds - harmonic).abs() < 1e-12);
        }
    }

    #[test]
    fn classes_edges_and_large_spaces() {
        let big = |n: u64| BigUint::from(n);
        assert_eq!(minimum(&big(8), &[]), None);
        assert_eq!(minimum(&big(8), &[big(8)]).unwrap().iterations, Wide::ZERO);
        // One valid state among eight: the search for it, unless it was drawn first.
        let one = minimum(&big(8), &[big(1)]).unwrap();
        assert!((one.iterations.to_f64() - 7.0 / 8.0 * 1.03947757769235).abs() < 1e-13);
        let space = BigUint::one() << 2000u32;
        let classes: Vec<BigUint> = (0..50).map(|i| BigUint::one() << (10 * i) as u32).collect();
        let found = minimum(&space, &classes).unwrap();
        assert!(found.iterations < found.bound && !found.iterations.is_zero());
    }
}
