//! Numbers of any size: what a plan computes with, so that a space of 2^3000 states neither overflows nor divides by 0.
//!
//! [`Wide`] has the digits of a double and an exponent of its own; [`fixed`] has as many digits as are asked for.

pub mod fixed;
pub mod seek;
pub mod wide;

pub use wide::Wide;

use num_bigint::BigUint;
use num_traits::ToPrimitive;
use serde::Serializer;

/// A number of more bits is not computed to its last digit, and is shown by its logarithm.
pub const PRINTED_BITS: u64 = 4096;

/// The number itself while it can be printed, `2^5000.25` beyond.
pub fn in_words(number: &BigUint) -> String {
    match number.bits() <= PRINTED_BITS {
        true => number.to_string(),
        false => format!("2^{:.2}", Wide::of(number).log2()),
    }
}

/// Writes a number into JSON as a string, since it may be beyond 2^53.
pub(super) fn as_text<T: std::fmt::Display, S: Serializer>(number: &T, serializer: S) -> Result<S::Ok, S::Error> {
    serializer.collect_str(number)
}

/// The number as a double; infinite where it is larger than any.
pub(super) fn float(number: &BigUint) -> f64 {
    number.to_f64().unwrap_or(f64::INFINITY)
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn long_numbers_are_shown_by_their_logarithm() {
        let two = |power: u32| BigUint::from(1u32) << power;
        assert_eq!(in_words(&BigUint::from(804u32)), "804");
        assert_eq!(in_words(&two(4095)), two(4095).to_string());
        assert_eq!(in_words(&(two(4999) + two(4998))), "2^4999.58");
        assert_eq!(float(&two(4999)), f64::INFINITY);
    }
}
