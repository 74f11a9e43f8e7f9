//! What a computed bit is of the others: a small formula, as plain data.

use std::fmt::{self, Display as _};

use serde::{Deserialize, Serialize};

use crate::id::Id;
use crate::problem::{BitId, Bits};

/// A formula over the bits of a problem. JSON: `{"constant": true}`, `{"bit": 3}`, `{"not": …}`, `{"and": […]}`, `{"or": […]}`, `{"xor": […]}`.
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
        }
    }

    /// Calls `each` with every bit that the formula mentions, as often as it does.
    pub fn for_each_bit(&self, each: &mut impl FnMut(BitId)) {
        match self {
            Self::Constant(_) => {}
            Self::Bit(bit) => each(*bit),
            Self::Not(inner) => inner.for_each_bit(each),
            Self::And(list) | Self::Or(list) | Self::Xor(list) => list.iter().for_each(|part| part.for_each_bit(each)),
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
        }
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
}
