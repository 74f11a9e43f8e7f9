//! Numbers from 0 up with the digits of a double and an exponent that cannot overflow.
//!
//! Every operation is right to about one part in 2^52.

use std::cmp::Ordering;
use std::fmt;
use std::ops::{Add, Div, Mul};

use num_bigint::BigUint;
use num_traits::{One, ToPrimitive, Zero};
use serde::{Serialize, Serializer};

/// A number that is not negative.
///
/// The derived order is the order of the numbers: the exponent is compared first, and 0 has the least one.
#[derive(Clone, Copy, PartialEq, PartialOrd, Debug)]
pub struct Wide {
    exponent: i64,
    /// In `[1, 2)`, or 0 for the number 0.
    digits: f64,
}

impl Wide {
    /// 0.
    pub const ZERO: Wide = Wide { exponent: i64::MIN, digits: 0.0 };
    /// 1.
    pub const ONE: Wide = Wide { exponent: 0, digits: 1.0 };

    /// This number, which must be finite and not negative.
    pub fn new(value: f64) -> Self {
        assert!(value.is_finite() && value >= 0.0, "{value} is no number from 0 up");
        Self::scaled(value, 0)
    }

    /// `digits * 2^exponent`.
    fn scaled(digits: f64, exponent: i64) -> Self {
        if digits == 0.0 {
            return Self::ZERO;
        }
        // A subnormal is brought into range first.
        let (digits, exponent) =
            if digits < f64::MIN_POSITIVE { (digits * 2f64.powi(64), exponent - 64) } else { (digits, exponent) };
        let bits = digits.to_bits();
        let own = (bits >> 52 & 0x7ff) as i64 - 1023;
        let mantissa = f64::from_bits(bits & !(0x7ff << 52) | 1023 << 52);
        Self { exponent: exponent + own, digits: mantissa }
    }

    /// 2 to this power.
    pub fn power_of_two(exponent: i64) -> Self {
        Self { exponent, digits: 1.0 }
    }

    /// A large integer.
    pub fn of(number: &BigUint) -> Self {
        Self::ratio(number, &BigUint::one())
    }

    /// The quotient of two integers, of which the second is not 0.
    pub fn ratio(numerator: &BigUint, denominator: &BigUint) -> Self {
        assert!(!denominator.is_zero(), "a quotient by 0");
        if numerator.is_zero() {
            return Self::ZERO;
        }
        // The integer quotient gets at least 64 digits, which are then rounded once.
        let shift = denominator.bits() as i64 - numerator.bits() as i64 + 65;
        let quotient = match shift {
            0.. => (numerator << shift as u64) / denominator,
            _ => (numerator >> shift.unsigned_abs()) / denominator,
        };
        Self::scaled(quotient.to_f64().expect("at most 66 bits"), -shift)
    }

    /// As a double: 0 below the least one, infinite above the largest.
    pub fn to_f64(self) -> f64 {
        match self.exponent {
            1024.. => f64::INFINITY,
            -1022..1024 => self.digits * 2f64.powi(self.exponent as i32),
            -1100..-1022 => self.digits * 2f64.powi(-1000) * 2f64.powi((self.exponent + 1000) as i32),
            _ => 0.0,
        }
    }

    /// The logarithm to base 2; of 0, minus infinity.
    pub fn log2(self) -> f64 {
        if self.is_zero() { f64::NEG_INFINITY } else { self.exponent as f64 + self.digits.log2() }
    }

    /// The natural logarithm; of 0, minus infinity.
    pub fn ln(self) -> f64 {
        self.log2() * std::f64::consts::LN_2
    }

    /// Whether it is 0.
    pub fn is_zero(self) -> bool {
        self.digits == 0.0
    }

    /// The square root.
    pub fn sqrt(self) -> Self {
        if self.is_zero() {
            return self;
        }
        let odd = self.exponent.rem_euclid(2);
        Self::scaled((self.digits * (1 << odd) as f64).sqrt(), (self.exponent - odd) / 2)
    }

    /// The square.
    pub fn square(self) -> Self {
        self * self
    }

    /// The difference, or 0 where `other` is larger.
    pub fn less(self, other: Self) -> Self {
        if other >= self {
            return Self::ZERO;
        }
        let apart = other.exponent.saturating_sub(self.exponent).max(-200);
        Self::scaled(self.digits - other.digits * 2f64.powi(apart as i32), self.exponent)
    }

    /// The smaller of two.
    pub fn min(self, other: Self) -> Self {
        if other < self { other } else { self }
    }

    /// The larger of two.
    pub fn max(self, other: Self) -> Self {
        if other > self { other } else { self }
    }

    /// The largest integer that is not above; digits beyond the 53 known ones are 0.
    pub fn floor(self) -> BigUint {
        match self.exponent {
            ..0 => BigUint::zero(),
            0..=62 => BigUint::from(self.to_f64().floor() as u64),
            _ => BigUint::from((self.digits * 2f64.powi(52)) as u64) << (self.exponent - 52) as u64,
        }
    }

    /// The smallest integer that is not below; digits beyond the 53 known ones are 0.
    pub fn ceil(self) -> BigUint {
        match self.exponent {
            ..0 => BigUint::from(u32::from(!self.is_zero())),
            0..=52 => BigUint::from(self.to_f64().ceil() as u64),
            _ => self.floor(),
        }
    }

    /// The order of two numbers.
    pub fn order(self, other: Self) -> Ordering {
        self.partial_cmp(&other).expect("no number is undefined")
    }
}

impl From<f64> for Wide {
    fn from(value: f64) -> Self {
        Self::new(value)
    }
}

impl Mul for Wide {
    type Output = Self;
    fn mul(self, other: Self) -> Self {
        if self.is_zero() || other.is_zero() {
            return Self::ZERO;
        }
        Self::scaled(self.digits * other.digits, self.exponent + other.exponent)
    }
}

impl Div for Wide {
    type Output = Self;
    fn div(self, other: Self) -> Self {
        assert!(!other.is_zero(), "a quotient by 0");
        if self.is_zero() {
            return Self::ZERO;
        }
        Self::scaled(self.digits / other.digits, self.exponent - other.exponent)
    }
}

impl Add for Wide {
    type Output = Self;
    fn add(self, other: Self) -> Self {
        let (large, small) = if self < other { (other, self) } else { (self, other) };
        let apart = small.exponent.saturating_sub(large.exponent).max(-200);
        Self::scaled(large.digits + small.digits * 2f64.powi(apart as i32), large.exponent)
    }
}

impl std::iter::Sum for Wide {
    fn sum<I: Iterator<Item = Self>>(iter: I) -> Self {
        iter.fold(Self::ZERO, Add::add)
    }
}

/// Beyond these the number is shown with a power of ten.
const PLAIN: std::ops::Range<f64> = 1e-6..1e15;
/// The digits shown with a power of ten, when no precision is asked for.
const SHOWN_DIGITS: usize = 6;

/// Like a double while it is of common size, else as `1.234568e451`.
impl fmt::Display for Wide {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        let value = self.to_f64();
        if self.is_zero() || PLAIN.contains(&value) {
            return fmt::Display::fmt(&value, f);
        }
        let log10 = self.exponent as f64 * std::f64::consts::LOG10_2 + self.digits.log10();
        let precision = f.precision().unwrap_or(SHOWN_DIGITS);
        let mut exponent = log10.floor();
        let mut digits = format!("{:.precision$}", 10f64.powf(log10 - exponent));
        if digits.starts_with("10") {
            exponent += 1.0;
            digits = format!("{:.precision$}", 1.0);
        }
        write!(f, "{digits}e{exponent}")
    }
}

/// As a string, since it may be beyond what a JSON reader holds.
impl Serialize for Wide {
    fn serialize<S: Serializer>(&self, serializer: S) -> Result<S::Ok, S::Error> {
        serializer.collect_str(self)
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn quotients_of_large_numbers() {
        let two = |power: u32| BigUint::one() << power;
        assert_eq!(Wide::ratio(&two(2999), &two(3000)).to_f64(), 0.5);
        assert_eq!(Wide::ratio(&(BigUint::from(3u32) << 1990u32), &two(2000)).to_f64(), 3.0 / 1024.0);
        assert_eq!(Wide::ratio(&BigUint::one(), &two(1020)).to_f64(), 2f64.powi(-1020));
        assert_eq!(Wide::ratio(&BigUint::one(), &two(1070)).to_f64(), 2f64.powi(-1070));
        assert_eq!(Wide::ratio(&BigUint::one(), &two(3000)).log2(), -3000.0);
        assert_eq!(Wide::ratio(&BigUint::from(1u32), &BigUint::from(3u32)).to_f64(), 1.0 / 3.0);
        assert_eq!(Wide::ratio(&two(5000), &BigUint::from(3u32)).floor().bits(), 4999);
        let ends = |wide: Wide| (wide.floor(), wide.ceil());
        let pair = |low: u32, high: u32| (BigUint::from(low), BigUint::from(high));
        assert_eq!(ends(Wide::power_of_two(-3000)), pair(0, 1));
        assert_eq!(ends(Wide::ZERO), pair(0, 0));
        assert_eq!(ends(Wide::new(7.0)), pair(7, 7));
        assert_eq!(ends(Wide::new(7.5)), pair(7, 8));
    }

    #[test]
    fn arithmetic_is_that_of_doubles_where_doubles_suffice() {
        let numbers = [0.0, 1e-300, 0.1, 1.0, 1.5, 3.0, 7e20];
        for a in numbers {
            let (wide, root) = (Wide::new(a), Wide::new(a).sqrt().to_f64());
            assert_eq!(wide.to_f64(), a);
            assert!((root - a.sqrt()).abs() <= 1e-15 * root);
            for b in numbers {
                let other = Wide::new(b);
                assert_eq!((wide + other).to_f64(), a + b);
                assert_eq!(wide.less(other).to_f64(), (a - b).max(0.0));
                assert_eq!(wide.partial_cmp(&other), a.partial_cmp(&b));
                if b > 1e-10 {
                    assert_eq!((wide / other).to_f64(), a / b);
                    assert_eq!((wide * other).to_f64(), a * b);
                }
            }
        }
    }

    #[test]
    fn shown_as_a_double_or_with_a_power_of_ten() {
        assert_eq!(Wide::new(21.5).to_string(), "21.5");
        assert_eq!(format!("{:.3}", Wide::new(804.0)), "804.000");
        assert_eq!(Wide::ZERO.to_string(), "0");
        // 2^3000 = 1.2302...e903 and 2^-3000 = 8.1286...e-904, since 3000 log10(2) = 903.08998...
        assert_eq!(format!("{:.3}", Wide::power_of_two(3000)), "1.230e903");
        assert_eq!(format!("{:.3}", Wide::power_of_two(-3000)), "8.129e-904");
        assert_eq!(Wide::new(9.9999999e20).to_string(), "1.000000e21");
    }
}
