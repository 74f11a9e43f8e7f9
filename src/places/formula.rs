//! What a computed bit is of the others: a small formula, as plain data.
//!
//! A digit of a whole number is a formula too, so that a variable can be computed from an equation without spelling its
//! carries out.

use std::fmt::{self, Display as _};

use serde::{Deserialize, Serialize};

use crate::id::Id;
use crate::problem::{BitId, Bits};

/// A formula over the bits of a problem. JSON: `{"constant": true}`, `{"bit": 3}`, `{"not": …}`, `{"and": […]}`,
/// `{"or": […]}`, `{"xor": […]}`, `{"digit": {"at": 0, "constant": 2, "terms": [[3, …], …]}}`.
#[derive(Clone, PartialEq, Eq, Hash, Debug, Serialize, Deserialize)]
#[serde(rename_all = "kebab-case")]
pub enum Formula {
    /// Always, or never.
    Constant(bool),
    /// This bit.
    #[serde(with = "bit")]
    Bit(BitId),
    /// The formula fails.
    Not(Box<Formula>),
    /// All hold; of none: always.
    And(Vec<Formula>),
    /// Some hold; of none: never.
    Or(Vec<Formula>),
    /// An odd number holds.
    Xor(Vec<Formula>),
    /// A binary digit of a number is 1.
    Digit(Digit),
}

/// The digit of weight `2^at` of the number `constant` plus the weights of the terms that hold; of a negative number, of its
/// two's complement.
#[derive(Clone, PartialEq, Eq, Hash, Debug, Serialize, Deserialize)]
pub struct Digit {
    /// Which digit; 0 is the lowest.
    pub at: u8,
    /// The number where no term holds.
    pub constant: i64,
    /// Weights and what they are for.
    pub terms: Vec<(i64, Formula)>,
}

impl Digit {
    /// The highest digit, and how far from 0 no number of [`is_small`](Digit::is_small) terms is.
    const MAX_AT: u8 = 61;
    const LIMIT: u128 = 1 << 62;

    /// Whether every number on the way fits 64 bits with room to spare.
    pub fn is_small(&self) -> bool {
        let size = self.terms.iter().map(|(weight, _)| u128::from(weight.unsigned_abs())).sum::<u128>();
        self.at <= Self::MAX_AT && size + u128::from(self.constant.unsigned_abs()) < Self::LIMIT
    }

    /// The number for these bits.
    fn number(&self, bits: &Bits) -> i128 {
        let held = self.terms.iter().filter(|(_, term)| term.holds(bits));
        i128::from(self.constant) + held.map(|&(weight, _)| i128::from(weight)).sum::<i128>()
    }
}

impl Formula {
    /// The bit, or its complement.
    pub fn literal(bit: BitId, negated: bool) -> Self {
        if negated { Self::Not(Box::new(Self::Bit(bit))) } else { Self::Bit(bit) }
    }

    /// Whether the formula holds for these bits; bits that it does not mention do not matter.
    pub fn holds(&self, bits: &Bits) -> bool {
        match self {
            Self::Constant(value) => *value,
            Self::Bit(bit) => bits.get(*bit),
            Self::Not(inner) => !inner.holds(bits),
            Self::And(list) => list.iter().all(|part| part.holds(bits)),
            Self::Or(list) => list.iter().any(|part| part.holds(bits)),
            Self::Xor(list) => list.iter().filter(|part| part.holds(bits)).count() % 2 == 1,
            Self::Digit(digit) => digit.number(bits) >> digit.at.min(127) & 1 == 1,
        }
    }

    /// Calls `each` with every bit that the formula mentions, as often as it does.
    pub fn for_each_bit(&self, each: &mut impl FnMut(BitId)) {
        match self {
            Self::Constant(_) => {}
            Self::Bit(bit) => each(*bit),
            Self::Not(inner) => inner.for_each_bit(each),
            Self::And(list) | Self::Or(list) | Self::Xor(list) => list.iter().for_each(|part| part.for_each_bit(each)),
            Self::Digit(digit) => digit.terms.iter().for_each(|(_, term)| term.for_each_bit(each)),
        }
    }

    /// Whether all numbers in it are small enough for everyone who works with them.
    pub fn is_small(&self) -> bool {
        match self {
            Self::Constant(_) | Self::Bit(_) => true,
            Self::Not(inner) => inner.is_small(),
            Self::And(list) | Self::Or(list) | Self::Xor(list) => list.iter().all(Self::is_small),
            Self::Digit(digit) => digit.is_small() && digit.terms.iter().all(|(_, term)| term.is_small()),
        }
    }
}

/// `b3 and not (b1 xor b2)`: for people, not read back.
impl std::fmt::Display for Formula {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        match self {
            Self::Constant(value) => f.write_str(if *value { "yes" } else { "no" }),
            Self::Bit(bit) => write!(f, "b{}", bit.index()),
            Self::Not(inner) => write!(f, "not {}", Bracketed(inner)),
            Self::And(list) => joined(f, list, " and ", "yes"),
            Self::Or(list) => joined(f, list, " or ", "no"),
            Self::Xor(list) => joined(f, list, " xor ", "no"),
            Self::Digit(digit) => digit.fmt(f),
        }
    }
}

/// `digit 2 of (3 + b1 - 2 b4)`.
impl std::fmt::Display for Digit {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        write!(f, "digit {} of ({}", self.at, self.constant)?;
        for (weight, term) in &self.terms {
            let sign = if *weight < 0 { '-' } else { '+' };
            match weight.unsigned_abs() {
                1 => write!(f, " {sign} {}", Bracketed(term))?,
                size => write!(f, " {sign} {size} {}", Bracketed(term))?,
            }
        }
        f.write_str(")")
    }
}

fn joined(f: &mut fmt::Formatter<'_>, list: &[Formula], word: &str, of_none: &str) -> fmt::Result {
    if list.is_empty() {
        return f.write_str(of_none);
    }
    for (at, part) in list.iter().enumerate() {
        f.write_str(if at > 0 { word } else { "" })?;
        Bracketed(part).fmt(f)?;
    }
    Ok(())
}

/// A part of a formula, in brackets where it has parts itself.
struct Bracketed<'a>(&'a Formula);

impl std::fmt::Display for Bracketed<'_> {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        match self.0 {
            Formula::And(list) | Formula::Or(list) | Formula::Xor(list) if list.len() > 1 => write!(f, "({})", self.0),
            plain => plain.fmt(f),
        }
    }
}

/// A bit as its index.
mod bit {
    use serde::{Deserialize, Deserializer, Serialize, Serializer, de::Error};

    use crate::id::Id;
    use crate::problem::BitId;

    pub(super) fn serialize<S: Serializer>(bit: &BitId, serializer: S) -> Result<S::Ok, S::Error> {
        (bit.index() as u32).serialize(serializer)
    }

    pub(super) fn deserialize<'de, D: Deserializer<'de>>(deserializer: D) -> Result<BitId, D::Error> {
        match u32::deserialize(deserializer)? {
            u32::MAX => Err(D::Error::custom("this is no bit")),
            index => Ok(BitId::new(index as usize)),
        }
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn holds_reads_back_and_prints() {
        let bit = |at: usize| Formula::Bit(BitId::new(at));
        let formula = Formula::Or(vec![
            Formula::And(vec![bit(0), Formula::literal(BitId::new(1), true)]),
            Formula::Xor(vec![bit(1), bit(2), Formula::Constant(true)]),
        ]);
        assert_eq!(formula.to_string(), "(b0 and not b1) or (b1 xor b2 xor yes)");
        let json = serde_json::to_string(&formula).expect("plain data");
        assert_eq!(serde_json::from_str::<Formula>(&json).expect("just written"), formula);
        for value in 0..8u32 {
            let mut bits = Bits::zeros(3);
            (0..3).for_each(|at| bits.set(BitId::new(at), value >> at & 1 == 1));
            let [a, b, c] = [value & 1 == 1, value & 2 == 2, value & 4 == 4];
            assert_eq!(formula.holds(&bits), (a && !b) || !(b ^ c), "{value:03b}");
        }
    }

    #[test]
    fn digits_are_those_of_the_number() {
        let bit = |at: usize| Formula::Bit(BitId::new(at));
        let terms = vec![(1, bit(0)), (-3, bit(1)), (6, Formula::And(vec![bit(0), bit(2)]))];
        let digit = |at| Formula::Digit(Digit { at, constant: -2, terms: terms.clone() });
        assert_eq!(digit(1).to_string(), "digit 1 of (-2 + b0 - 3 b1 + 6 (b0 and b2))");
        let json = serde_json::to_string(&digit(2)).expect("plain data");
        assert_eq!(serde_json::from_str::<Formula>(&json).expect("just written"), digit(2));
        for value in 0..8i64 {
            let bits = Bits::from_number(value as u128, 3);
            let [a, b, c] = [value & 1, value >> 1 & 1, value >> 2 & 1];
            let number = -2 + a - 3 * b + 6 * (a & c);
            for at in 0..6 {
                assert_eq!(digit(at).holds(&bits), number.rem_euclid(64) >> at & 1 == 1, "digit {at} of {number}");
            }
        }
        let large = |weight, at| {
            Formula::Not(Box::new(Formula::Digit(Digit { at, constant: 0, terms: vec![(weight, bit(0))] })))
        };
        assert!(large(1 << 61, 61).is_small() && !large(1 << 62, 0).is_small() && !large(1, 62).is_small());
    }
}
