//! Counts: 128 bits while they suffice, a big integer beyond. Most parts of a formula have small counts, and the search
//! adds and multiplies at every node.

use num_bigint::BigUint;
use num_traits::Zero;

/// A number of models. `Big` only holds what does not fit 128 bits, so equal numbers are equal values.
#[derive(Clone, PartialEq, Eq, Debug)]
pub(crate) enum Number {
    /// Below 2^128.
    Small(u128),
    /// From 2^128 on.
    Big(BigUint),
}

impl Number {
    /// No model.
    pub(crate) const ZERO: Self = Self::Small(0);
    /// One model.
    pub(crate) const ONE: Self = Self::Small(1);

    /// The number 2^`exponent`.
    pub(crate) fn power_of_two(exponent: usize) -> Self {
        if exponent < 128 { Self::Small(1 << exponent) } else { Self::Big(BigUint::from(1u32) << exponent) }
    }

    /// Whether there is no model.
    pub(crate) fn is_zero(&self) -> bool {
        matches!(self, Self::Small(0))
    }

    /// The sum.
    pub(crate) fn plus(&self, other: &Self) -> Self {
        if let (Self::Small(a), Self::Small(b)) = (self, other)
            && let Some(sum) = a.checked_add(*b)
        {
            return Self::Small(sum);
        }
        Self::Big(self.to_big() + other.to_big())
    }

    /// The product.
    pub(crate) fn times(&self, other: &Self) -> Self {
        if let (Self::Small(a), Self::Small(b)) = (self, other)
            && let Some(product) = a.checked_mul(*b)
        {
            return Self::Small(product);
        }
        let product = self.to_big() * other.to_big();
        if product.is_zero() { Self::ZERO } else { Self::Big(product) }
    }

    /// As a big integer.
    pub(crate) fn to_big(&self) -> BigUint {
        match self {
            Self::Small(small) => BigUint::from(*small),
            Self::Big(big) => big.clone(),
        }
    }

    /// Bytes held outside the value itself.
    pub(crate) fn heap_bytes(&self) -> usize {
        match self {
            Self::Small(_) => 0,
            Self::Big(big) => big.bits().div_ceil(8) as usize + 16,
        }
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn numbers_grow_past_128_bits_and_stay_exact() {
        let half = Number::power_of_two(127);
        assert_eq!(half.plus(&half), Number::power_of_two(128));
        assert_eq!(half.times(&half).to_big(), BigUint::from(1u32) << 254);
        assert_eq!(Number::power_of_two(300).times(&Number::ZERO), Number::ZERO);
        assert_eq!(Number::Small(6).times(&Number::Small(7)), Number::Small(42));
        assert!(Number::power_of_two(200).plus(&Number::ONE).to_big().bit(0));
    }
}
