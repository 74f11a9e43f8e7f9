//! Finding every solution: by repeating one search until all have been seen, or by excluding the answers already found.
//!
//! Input: N, M and the cost c of a try. Output: the expected work of both ways, in units of one iteration.
//!
//! - *Repeating*: each success gives one of the M solutions, all equally likely, so that all are seen after `M H_M`
//!   successes on average (the coupon collector; H_M the harmonic number).
//! - *Excluding*: the oracle is compiled again without the i answers already found, and searched with a plan for M - i.
//!
//! Both take M as known: without it, no number of answers shows that there is no other.
//!
//! # References
//! - W. Feller: "An introduction to probability theory and its applications" I (1950), IX.3 (from memory).

use num_bigint::BigUint;
use num_traits::{ToPrimitive, Zero};
use serde::Serialize;

use super::restart::least_work_figure;
use crate::search::number::Wide;

/// Up to so many solutions the sums are taken term by term.
const SUMMED: u64 = 1 << 7;

/// What it takes to see every solution.
#[derive(Clone, PartialEq, Debug, Serialize)]
pub struct FindAll {
    /// Successful runs until every solution has been seen, on average, when one search is repeated.
    pub successes: Wide,
    /// The work of that.
    pub work_repeating: Wide,
    /// Successful runs after which all have been seen with a chance of 99%, at most.
    pub successes_for_99_percent: Wide,
    /// The work when the answers found are excluded, each search with its own plan.
    pub work_excluding: Wide,
}

/// The expected work to see all `marked` solutions in `space`, where a try costs `try_cost` besides its iterations;
/// `None` where there is none.
pub fn find_all(space: &BigUint, marked: &BigUint, try_cost: f64) -> Option<FindAll> {
    if marked.is_zero() {
        return None;
    }
    let work = |left: &BigUint| least_work_figure(space, left, try_cost).expect("something is marked");
    let successes = Wide::of(marked) * harmonic(marked);
    // Each of M solutions is missed by n successes with a chance of (1 - 1/M)^n <= e^{-n/M}; together at most 1%.
    let sure = Wide::of(marked) * Wide::new(Wide::of(marked).ln() + 100f64.ln());
    Some(FindAll {
        work_repeating: successes * work(marked),
        successes,
        successes_for_99_percent: Wide::of(&sure.ceil()),
        work_excluding: sum_to(marked, work),
    })
}

/// `H_M`.
fn harmonic(count: &BigUint) -> Wide {
    /// Euler's constant (from memory).
    const EULER: f64 = 0.577_215_664_901_532_9;
    match count.to_u64().filter(|&count| count <= SUMMED) {
        Some(count) => Wide::new((1..=count).rev().map(|i| 1.0 / i as f64).sum()),
        None => {
            let inverse = (Wide::ONE / Wide::of(count)).to_f64();
            Wide::new(Wide::of(count).ln() + EULER + inverse / 2.0 - inverse * inverse / 12.0)
        }
    }
}

/// The sum of a smooth function over 1 to `count`: term by term while that is short, else by stretches that grow by an
/// eighth, each its length times the mean of its ends. The work falls as the root, for which that is right to a part in
/// a thousand.
fn sum_to(count: &BigUint, f: impl Fn(&BigUint) -> Wide) -> Wide {
    let short = count.to_u64().unwrap_or(u64::MAX).min(SUMMED);
    let mut sum: Wide = (1..=short).map(|i| f(&BigUint::from(i))).sum();
    let mut from = BigUint::from(short);
    while from < *count {
        let to = (&from + (&from >> 3u32)).min(count.clone());
        sum = sum + Wide::of(&(&to - &from)) * (f(&from) + f(&to)) * Wide::new(0.5);
        from = to;
    }
    sum
}

#[cfg(test)]
mod tests {
    use num_traits::One;

    use super::*;

    fn big(number: u64) -> BigUint {
        BigUint::from(number)
    }

    #[test]
    fn coupons_by_hand() {
        // 1 + 2/1 = 3 for two, 3 (1 + 1/2 + 1/3) = 5.5 for three.
        for (marked, successes) in [(1, 1.0), (2, 3.0), (3, 5.5), (4, 25.0 / 3.0)] {
            let found = find_all(&big(1024), &big(marked), 1.0).unwrap();
            assert!((found.successes.to_f64() - successes).abs() < 1e-14);
        }
        assert_eq!(find_all(&big(8), &big(0), 1.0), None);
        let both = [SUMMED, SUMMED + 1].map(|count| harmonic(&big(count)).to_f64());
        assert!((both[1] - both[0] - 1.0 / (SUMMED + 1) as f64).abs() < 1e-9);
    }

    #[test]
    fn excluding_is_cheaper_and_goes_with_the_root() {
        let one = find_all(&big(1 << 30), &big(1), 0.0).unwrap();
        assert_eq!(one.work_repeating, one.work_excluding);
        let many = find_all(&big(1 << 30), &big(100), 0.0).unwrap();
        assert!(many.work_excluding < many.work_repeating);
        // The sum of 0.690 sqrt(N / i) over i is about 1.380 sqrt(N M) less 0.690 * 1.46 sqrt(N) for many solutions.
        let (space, marked) = (BigUint::one() << 400u32, BigUint::one() << 100u32);
        let found = find_all(&space, &marked, 0.0).unwrap().work_excluding / Wide::power_of_two(250);
        assert!((found.to_f64() / 1.38005 - 1.0).abs() < 2e-3, "{found}");
    }
}
