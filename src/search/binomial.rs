//! The binomial distribution, exactly: single terms, tails, the interval and the test for a rate.
//!
//! A term is taken apart so that nothing cancels (Loader); a tail is its first term times a continued fraction. That
//! keeps about 13 digits for billions of trials and for tails of any smallness, which a quotient of gamma functions
//! does not; it is why there is no crate for it here.
//!
//! # References
//! - C. Loader: "Fast and accurate computation of binomial probabilities" (2000) (from memory): the deviance form.
//! - NIST Digital Library of Mathematical Functions, 8.17.22 (from memory): the continued fraction of the incomplete
//!   beta function; 8.17.5: the tail of the binomial distribution in terms of it.
//! - C. Clopper, E. Pearson: "The use of confidence or fiducial limits illustrated in the case of the binomial",
//!   Biometrika 26 (1934) (from memory): the exact interval.

use std::f64::consts::PI;

/// The probability of exactly `hits` in `trials`.
pub fn exactly(hits: u64, trials: u64, chance: f64) -> f64 {
    if hits > trials { 0.0 } else { term(hits, trials, chance, 1.0 - chance) }
}

/// The same with the chance of a miss given apart, so that neither loses digits beside the other.
fn term(hits: u64, trials: u64, p: f64, q: f64) -> f64 {
    let (x, n) = (hits as f64, trials as f64);
    match () {
        () if p <= 0.0 => f64::from(hits == 0),
        () if q <= 0.0 => f64::from(hits == trials),
        () if hits == 0 => (n * log(q, p)).exp(),
        () if hits == trials => (n * log(p, q)).exp(),
        () => {
            let exponent = stirling_rest(trials)
                - stirling_rest(hits)
                - stirling_rest(trials - hits)
                - deviance(x, n * p)
                - deviance(n - x, n * q);
            (n / (2.0 * PI * x * (n - x))).sqrt() * exponent.exp()
        }
    }
}

/// The logarithm of `p = 1 - q`.
fn log(p: f64, q: f64) -> f64 {
    if q < 0.5 { (-q).ln_1p() } else { p.ln() }
}

/// `ln n!` less Stirling's formula `n ln n - n + ln(2 pi n) / 2`.
fn stirling_rest(n: u64) -> f64 {
    let x = n as f64;
    if n < 16 {
        let factorial: f64 = (1..=n).map(|i| i as f64).product();
        return factorial.ln() - ((x + 0.5) * x.ln() - x + 0.5 * (2.0 * PI).ln());
    }
    let square = x * x;
    (1.0 / 12.0 - (1.0 / 360.0 - (1.0 / 1260.0 - (1.0 / 1680.0 - 1.0 / 1188.0 / square) / square) / square) / square)
        / x
}

/// `x ln(x / m) + m - x`, without cancellation where both are close.
fn deviance(x: f64, m: f64) -> f64 {
    if (x - m).abs() > 0.1 * (x + m) {
        return x * (x / m).ln() + m - x;
    }
    // With v = (x - m) / (x + m) it is (x - m) v + 2 x (v^3 / 3 + v^5 / 5 + ...).
    let v = (x - m) / (x + m);
    let (mut sum, mut power, mut odd) = ((x - m) * v, 2.0 * x * v, 3.0);
    loop {
        power *= v * v;
        let next = sum + power / odd;
        if next == sum {
            return sum;
        }
        (sum, odd) = (next, odd + 2.0);
    }
}

/// The probability of at least `hits` in `trials`.
pub fn at_least(hits: u64, trials: u64, chance: f64) -> f64 {
    tail(hits, trials, chance, 1.0 - chance)
}

/// The probability of at most `hits` in `trials`.
pub fn at_most(hits: u64, trials: u64, chance: f64) -> f64 {
    if hits >= trials { 1.0 } else { tail(trials - hits, trials, 1.0 - chance, chance) }
}

fn tail(hits: u64, trials: u64, p: f64, q: f64) -> f64 {
    match () {
        () if hits == 0 => 1.0,
        () if hits > trials || p <= 0.0 => 0.0,
        () if q <= 0.0 => 1.0,
        // The fraction converges quickly on the far side of the mean; on the near side the other tail is the small one.
        () if hits as f64 >= trials as f64 * p => far_tail(hits, trials, p, q),
        () => 1.0 - far_tail(trials - hits + 1, trials, q, p),
    }
}

/// The tail from `hits` on, above the mean: its first term times `q` times the continued fraction of the incomplete
/// beta function with a = hits and b = trials - hits + 1, by Lentz's method.
fn far_tail(hits: u64, trials: u64, p: f64, q: f64) -> f64 {
    const TINY: f64 = 1e-300;
    let (a, b) = (hits as f64, (trials - hits + 1) as f64);
    let coefficient = |at: u64| {
        let m = (at / 2) as f64;
        let low = a + 2.0 * m;
        match at % 2 {
            0 => m * (b - m) * p / ((low - 1.0) * low),
            _ => -(a + m) * (a + b + m) * p / (low * (low + 1.0)),
        }
    };
    let (mut value, mut c, mut d) = (1.0f64, 1.0f64, 0.0f64);
    for at in 1.. {
        let next = coefficient(at);
        let away = |x: f64| if x.abs() < TINY { TINY } else { x };
        d = 1.0 / away(1.0 + next * d);
        c = away(1.0 + next / c);
        value *= c * d;
        if (c * d - 1.0).abs() < 1e-16 {
            break;
        }
    }
    (term(hits, trials, p, q) * q / value).min(1.0)
}

/// The exact interval for the chance behind `hits` in `trials`, at least one, with this confidence: the chances that
/// neither tail rejects at half of what is left to 1.
pub fn interval(hits: u64, trials: u64, confidence: f64) -> (f64, f64) {
    assert!(hits <= trials && trials > 0 && confidence > 0.0 && confidence < 1.0, "a rate and a confidence");
    let side = (1.0 - confidence) / 2.0;
    let low = if hits == 0 { 0.0 } else { rising_root(|p| at_least(hits, trials, p) - side) };
    let high = if hits == trials { 1.0 } else { rising_root(|p| side - at_most(hits, trials, p)) };
    (low, high)
}

/// Where a rising function of a chance crosses 0, to the last digit of a double.
fn rising_root(f: impl Fn(f64) -> f64) -> f64 {
    let (mut low, mut high) = (0.0, 1.0);
    loop {
        let middle = 0.5 * (low + high);
        if middle <= low || middle >= high || middle < 1e-300 {
            return middle;
        }
        if f(middle) < 0.0 { low = middle } else { high = middle }
    }
}

/// The exact two-sided test: the chance of a result at least as far out on its side, doubled, and at most 1. It is
/// below `1 - confidence` exactly where [`interval`] does not contain the chance.
pub fn two_sided(hits: u64, trials: u64, chance: f64) -> f64 {
    (2.0 * at_least(hits, trials, chance).min(at_most(hits, trials, chance))).min(1.0)
}

#[cfg(test)]
mod tests {
    use super::*;

    fn near(found: f64, wanted: f64, part: f64) {
        assert!((found - wanted).abs() <= part * wanted.abs(), "{found} not {wanted}");
    }

    /// Small cases against the sum of products, term by term.
    #[test]
    fn terms_and_tails_of_small_cases() {
        for trials in 1..=30u64 {
            for p in [0.01, 0.25, 0.5, 0.9, 0.999] {
                let mut term = f64::powi(1.0 - p, trials as i32);
                let mut terms = vec![term];
                for x in 0..trials {
                    term *= (trials - x) as f64 / (x + 1) as f64 * p / (1.0 - p);
                    terms.push(term);
                }
                for x in 0..=trials {
                    near(exactly(x, trials, p), terms[x as usize], 1e-12);
                    near(at_least(x, trials, p), terms[x as usize..].iter().sum(), 1e-11);
                    near(at_most(x, trials, p), terms[..=x as usize].iter().sum(), 1e-11);
                }
            }
        }
    }

    #[test]
    fn large_cases_against_what_can_be_computed_by_hand() {
        // The middle term for 2n tosses is C(2n, n) / 4^n = (1 - 1/8n + 1/128n^2 + 5/1024n^3 ...) / sqrt(pi n).
        let n = 1e6f64;
        let middle = (1.0 - 1.0 / (8.0 * n) + 1.0 / (128.0 * n * n)) / (PI * n).sqrt();
        near(exactly(1_000_000, 2_000_000, 0.5), middle, 1e-13);
        // By symmetry the tail from the middle is half of 1 and of the middle term.
        near(at_least(1_000_000, 2_000_000, 0.5), 0.5 + middle / 2.0, 1e-12);
        // No failure in a billion trials.
        near(exactly(0, 1_000_000_000, 1e-9), (-1.0f64 - 5e-10).exp(), 1e-12);
        near(at_least(1, 1_000_000_000, 1e-9), 1.0 - (-1.0f64 - 5e-10).exp(), 1e-12);
        assert!(at_least(900_000_000, 1_000_000_000, 0.5) < 1e-300);
    }

    #[test]
    fn intervals_computed_by_hand() {
        // 0 of n: (0, 1 - (alpha/2)^(1/n)); n of n: the mirror image. 1 of 1 at 95%: from 0.025 to 1.
        for trials in [1u64, 3, 10, 1000, 1_000_000] {
            let edge = 0.025f64.powf(1.0 / trials as f64);
            let (low, high) = interval(trials, trials, 0.95);
            assert_eq!(high, 1.0);
            near(low, edge, 1e-12);
            let (low, high) = interval(0, trials, 0.95);
            assert_eq!(low, 0.0);
            near(high, -(0.025f64.ln() / trials as f64).exp_m1(), 1e-9);
        }
        // 1 of 2: the lower end solves 1 - (1 - p)^2 = 0.025, the upper one is its mirror image.
        let (low, high) = interval(1, 2, 0.95);
        near(low, 1.0 - 0.975f64.sqrt(), 1e-12);
        near(high, 0.975f64.sqrt(), 1e-12);
    }

    /// The four-digit table of exact 95% intervals for 10 trials, as printed in textbooks of statistics (from memory).
    #[test]
    fn intervals_of_the_common_table() {
        for (hits, low, high) in [(1, 0.0025, 0.4450), (2, 0.0252, 0.5561), (3, 0.0667, 0.6525), (5, 0.1871, 0.8129)] {
            let found = interval(hits, 10, 0.95);
            assert!((found.0 - low).abs() < 5.1e-5 && (found.1 - high).abs() < 5.1e-5, "{hits} of 10: {found:?}");
        }
    }

    #[test]
    fn interval_and_test_agree() {
        for (hits, trials) in [(3u64, 17u64), (900, 1000), (1, 1_000_000), (0, 5), (5, 5)] {
            let (low, high) = interval(hits, trials, 0.99);
            for (end, outward) in [(low, 1.0 - 1e-6), (high, 1.0 + 1e-6)] {
                if end > 0.0 && end < 1.0 {
                    near(two_sided(hits, trials, end), 0.01, 1e-6);
                    assert!(two_sided(hits, trials, end * outward) < 0.01);
                }
            }
        }
        assert_eq!(two_sided(99, 100, 1.0), 0.0);
        assert_eq!(two_sided(100, 100, 1.0), 1.0);
        assert_eq!(two_sided(0, 100, 0.0), 1.0);
    }
}
