//! Bit strings over the bits of a problem (or the qubits of a register): bit 0 first in memory, last in print.

use std::cmp::Ordering;

use crate::id::Id;
use crate::problem::BitId;

/// A string of bits. Bits above the length are zero, so equal strings are equal words.
#[derive(Clone, PartialEq, Eq, Hash, Default)]
pub struct Bits {
    words: Vec<u64>,
    len: usize,
}

impl Bits {
    /// `len` zeros.
    pub fn zeros(len: usize) -> Self {
        Self { words: vec![0; len.div_ceil(64)], len }
    }

    /// The low `len` bits of a number, bit 0 its lowest; `len` is at most 128.
    pub fn from_number(number: u128, len: usize) -> Self {
        let mut bits = Self::zeros(len);
        for at in 0..len.min(128) {
            bits.set_at(at, number >> at & 1 == 1);
        }
        bits
    }

    /// The bits as a number, bit 0 its lowest; `None` beyond 128 bits.
    pub fn to_number(&self) -> Option<u128> {
        (self.len <= 128).then(|| self.words.iter().rev().fold(0, |number, &word| number << 64 | u128::from(word)))
    }

    /// How many bits.
    pub fn len(&self) -> usize {
        self.len
    }

    /// Whether there is no bit.
    pub fn is_empty(&self) -> bool {
        self.len == 0
    }

    /// The bit at this place.
    pub fn at(&self, at: usize) -> bool {
        assert!(at < self.len, "bit {at} of a string of {}", self.len);
        self.words[at / 64] >> (at % 64) & 1 == 1
    }

    /// Sets the bit at this place.
    pub fn set_at(&mut self, at: usize, value: bool) {
        assert!(at < self.len, "bit {at} of a string of {}", self.len);
        let mask = 1 << (at % 64);
        if value {
            self.words[at / 64] |= mask;
        } else {
            self.words[at / 64] &= !mask;
        }
    }

    /// The value of a problem's bit.
    pub fn get(&self, bit: BitId) -> bool {
        self.at(bit.index())
    }

    /// Sets a problem's bit.
    pub fn set(&mut self, bit: BitId, value: bool) {
        self.set_at(bit.index(), value);
    }

    /// The bits in order, bit 0 first.
    pub fn iter(&self) -> impl ExactSizeIterator<Item = bool> {
        (0..self.len).map(|at| self.at(at))
    }

    /// The words, 64 bits each, lowest first.
    pub fn words(&self) -> &[u64] {
        &self.words
    }

    /// Reads a string as it is printed: bit 0 is the rightmost character.
    pub fn parse(text: &str) -> Option<Self> {
        let mut bits = Self::zeros(text.len());
        for (at, byte) in text.bytes().rev().enumerate() {
            match byte {
                b'0' => {}
                b'1' => bits.set_at(at, true),
                _ => return None,
            }
        }
        Some(bits)
    }
}

/// Shorter strings first, then as numbers.
impl Ord for Bits {
    fn cmp(&self, other: &Self) -> Ordering {
        self.len.cmp(&other.len).then_with(|| self.words.iter().rev().cmp(other.words.iter().rev()))
    }
}

impl PartialOrd for Bits {
    fn partial_cmp(&self, other: &Self) -> Option<Ordering> {
        Some(self.cmp(other))
    }
}

impl FromIterator<bool> for Bits {
    fn from_iter<I: IntoIterator<Item = bool>>(iter: I) -> Self {
        let mut bits = Self::default();
        for value in iter {
            if bits.len % 64 == 0 {
                bits.words.push(0);
            }
            bits.len += 1;
            bits.set_at(bits.len - 1, value);
        }
        bits
    }
}

/// Bit 0 is the rightmost character, as in an OpenQASM bit string.
impl std::fmt::Display for Bits {
    fn fmt(&self, f: &mut std::fmt::Formatter<'_>) -> std::fmt::Result {
        let text: String = (0..self.len).rev().map(|at| if self.at(at) { '1' } else { '0' }).collect();
        f.write_str(&text)
    }
}

impl std::fmt::Debug for Bits {
    fn fmt(&self, f: &mut std::fmt::Formatter<'_>) -> std::fmt::Result {
        std::fmt::Display::fmt(self, f)
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn prints_and_reads_back_with_bit_zero_last() {
        let mut bits = Bits::zeros(70);
        bits.set_at(0, true);
        bits.set_at(69, true);
        let text = bits.to_string();
        assert!(text.starts_with('1') && text.ends_with('1'));
        assert_eq!(Bits::parse(&text), Some(bits.clone()));
        assert_eq!(bits.to_number(), Some(1 | 1 << 69));
        assert_eq!(bits.iter().collect::<Bits>(), bits);
        assert_eq!(Bits::parse("01x"), None);
    }
}
