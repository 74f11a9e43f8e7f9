//! Angles to any number of digits, as integers over a power of two.
//!
//! A search over 2^1000 states takes about 2^500 iterations; its last digit is known only when the angle of one
//! iteration is known to a thousand digits. Each function takes the number of binary digits after the point and is
//! right to a few units of the last one.
//!
//! # References
//! - J. Machin 1706: pi = 16 atan(1/5) - 4 atan(1/239).
//! - The power series of atan, asin, sin and cos.

use num_bigint::{BigInt, BigUint};
use num_traits::{One, Signed, Zero};

/// Digits carried beyond those asked for, against rounding: every series here has fewer than 2^24 terms.
const GUARD: u64 = 32;

/// pi.
pub fn pi(digits: u64) -> BigUint {
    let inner = digits + GUARD;
    let pi: BigUint = atan_of_inverse(5, inner) * 16u32 - atan_of_inverse(239, inner) * 4u32;
    pi >> GUARD
}

/// `atan(1/x)`.
fn atan_of_inverse(x: u32, digits: u64) -> BigUint {
    let mut power = (BigUint::one() << digits) / x;
    let (mut plus, mut minus, mut odd) = (BigUint::zero(), BigUint::zero(), 1u32);
    while !power.is_zero() {
        let sum = if odd % 4 == 1 { &mut plus } else { &mut minus };
        *sum += &power / odd;
        power /= x * x;
        odd += 2;
    }
    plus - minus
}

/// The angle theta with `sin^2 theta = marked / space`; `marked` is at most `space`.
pub fn theta(space: &BigUint, marked: &BigUint, digits: u64) -> BigUint {
    if marked * 2u32 > *space {
        return (pi(digits + 1) >> 2u32) - theta(space, &(space - marked), digits);
    }
    let inner = digits + GUARD;
    let share = (marked << inner) / space;
    // asin(s) = sum of t_j / (2j + 1) with t_0 = s and t_{j+1} = t_j s^2 (2j + 1) / (2j + 2).
    let mut term = ((marked << (2 * inner)) / space).sqrt();
    let (mut sum, mut j) = (BigUint::zero(), 0u32);
    while !term.is_zero() {
        sum += &term / (2 * j + 1);
        term = ((term * &share) >> inner) * (2 * j + 1) / (2 * j + 2);
        j += 1;
    }
    sum >> GUARD
}

/// The sine and the cosine of an angle, best below 4.
pub fn sin_cos(angle: &BigUint, digits: u64) -> (BigInt, BigInt) {
    let inner = digits + GUARD;
    let angle = BigInt::from(angle << GUARD);
    let mut term = BigInt::one() << inner;
    let (mut sine, mut cosine, mut j) = (BigInt::zero(), BigInt::zero(), 0u32);
    while !term.is_zero() {
        match j % 4 {
            0 => cosine += &term,
            1 => sine += &term,
            2 => cosine -= &term,
            _ => sine -= &term,
        }
        j += 1;
        term = ((term * &angle) >> inner) / j;
    }
    (sine >> GUARD, cosine >> GUARD)
}

/// `numerator / denominator` of two numbers with this many digits each, the denominator above 0.
pub fn divide(numerator: &BigInt, denominator: &BigInt, digits: u64) -> BigInt {
    debug_assert!(denominator.is_positive());
    (numerator << digits) / denominator
}

#[cfg(test)]
mod tests {
    use super::*;

    /// pi with 100 decimals, from memory; Machin's formula must give the same.
    const PI_DIGITS: &str =
        "31415926535897932384626433832795028841971693993751058209749445923078164062862089986280348253421170679";

    #[test]
    fn pi_has_its_known_digits() {
        let digits = (pi(400) * BigUint::from(10u32).pow(100)) >> 400u32;
        assert_eq!(digits.to_string(), PI_DIGITS);
    }

    #[test]
    fn angles_of_known_shares() {
        let digits = 300u64;
        let near = |a: BigUint, b: BigUint| assert!(a.abs_diff_bits(&b) <= 4, "{a} and {b}");
        let big = |n: u32| BigUint::from(n);
        // sin^2 = 1/4, 1/2, 3/4, 1 at pi/6, pi/4, pi/3, pi/2.
        for (marked, divisor) in [(1, 12u32), (2, 8), (3, 6), (4, 4)] {
            near(theta(&big(4), &big(marked), digits), pi(digits + 1) / divisor);
        }
        let (sine, cosine) = sin_cos(&(pi(digits) / 6u32), digits);
        near(sine.magnitude().clone(), BigUint::one() << (digits - 1));
        near(cosine.magnitude().pow(2) >> digits, (big(3) << digits) / 4u32);
    }

    trait AbsDiffBits {
        fn abs_diff_bits(&self, other: &Self) -> u64;
    }

    impl AbsDiffBits for BigUint {
        fn abs_diff_bits(&self, other: &Self) -> u64 {
            if self > other { (self - other).bits() } else { (other - self).bits() }
        }
    }

    #[test]
    fn sine_undoes_theta() {
        let (space, marked) = (BigUint::one() << 200u32, BigUint::from(12345u32));
        let digits = 400;
        let (sine, _) = sin_cos(&theta(&space, &marked, digits), digits);
        let square = sine.magnitude().pow(2);
        let wanted = marked << (2 * digits - 200);
        assert!(square.abs_diff_bits(&wanted) < 2 * digits - 200 - 180);
    }
}
