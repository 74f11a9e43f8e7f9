//! The hot loop: literals and closing zeros, one eight-byte load for each.
//!
//! Input:  a window whose words are whole before `limit`, with eight readable bytes after any of them.
//! Output: literals in `clauses`, and the place of the first thing that is not a plain number in range.
//!
//! A number of up to seven digits is found and read without a loop, all digits in one 64-bit word: the first byte that
//! is no digit gives the length, a shift aligns the digits, and three multiplications add them up. The method is
//! widely published (D. Lemire, "Quickly parsing eight digits", 2018, from memory).

use super::blocks::is_blank;
use crate::problem::{BitLit, Clauses};

const ZEROS: u64 = u64::from_ne_bytes([b'0'; 8]);
const HIGH: u64 = u64::from_ne_bytes([0x80; 8]);
/// Added to a byte, it reaches `HIGH` where the byte is above 9.
const ABOVE_NINE: u64 = u64::from_ne_bytes([0x76; 8]);

fn load(bytes: &[u8], at: usize) -> u64 {
    u64::from_le_bytes(bytes[at..at + 8].try_into().expect("eight bytes"))
}

/// The number in eight digit values, the most significant in the lowest byte.
fn add_up(digits: u64) -> u64 {
    let pairs = digits.wrapping_mul(10).wrapping_add(digits >> 8);
    let even = (pairs & 0x0000_00ff_0000_00ff).wrapping_mul(0x000f_4240_0000_0064);
    let odd = (pairs >> 16 & 0x0000_00ff_0000_00ff).wrapping_mul(0x0000_2710_0000_0001);
    even.wrapping_add(odd) >> 32
}

/// Takes numbers from `pos` on and returns where it stopped: at or beyond `limit`, or at a word that needs care.
pub(super) fn take(bytes: &[u8], mut pos: usize, limit: usize, vars: u64, clauses: &mut Clauses) -> usize {
    while pos < limit {
        let first = bytes[pos];
        let negative = first == b'-';
        let start = pos + usize::from(negative);
        let digits = load(bytes, start) ^ ZEROS;
        let others = (digits.wrapping_add(ABOVE_NINE) | digits) & HIGH;
        let length = others.trailing_zeros() as usize / 8;
        if length == 0 {
            if is_blank(first) {
                pos += 1;
                continue;
            }
            break;
        }
        if length == 8 || !is_blank(bytes[start + length]) {
            break;
        }
        let value = add_up(digits << (64 - 8 * length));
        if value == 0 {
            if negative {
                break;
            }
            clauses.end_clause();
        } else {
            if value > vars {
                break;
            }
            let number = if negative { -(value as i64) } else { value as i64 };
            let Some(lit) = BitLit::from_dimacs(number) else { break };
            clauses.push_lit(lit);
        }
        pos = start + length + 1;
    }
    pos
}

/// A word as a whole number, saturating; `None` where it is not digits with at most one `-` before them.
pub(super) fn parse(word: &[u8]) -> Option<i64> {
    let (negative, digits) = match word.strip_prefix(b"-") {
        Some(rest) => (true, rest),
        None => (false, word),
    };
    if digits.is_empty() || !digits.iter().all(u8::is_ascii_digit) {
        return None;
    }
    let size = digits.iter().fold(0_i64, |size, &digit| size.saturating_mul(10).saturating_add((digit - b'0').into()));
    Some(if negative { -size } else { size })
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn digits_add_up() {
        for number in [0_u64, 7, 42, 999, 1000, 65_535, 123_456, 9_999_999] {
            let mut bytes = number.to_string().into_bytes();
            let length = bytes.len();
            bytes.resize(16, b'\n');
            let digits = load(&bytes, 0) ^ ZEROS;
            assert_eq!(add_up(digits << (64 - 8 * length)), number);
        }
        assert_eq!(add_up(load(b"12345678", 0) ^ ZEROS), 12_345_678);
    }

    #[test]
    fn stops_where_care_is_needed() {
        for (text, at) in [
            ("1 2 x", 4), ("-0 ", 0), ("1 +2", 2), ("4 ", 0), ("12345678 ", 0), ("1- ", 0), ("- ", 0), ("1\u{b2} ", 0), ("1\0 ", 0),
        ] {
            let mut bytes = text.as_bytes().to_vec();
            let limit = bytes.len();
            bytes.resize(limit + 16, b'\n');
            let mut clauses = Clauses::new();
            assert_eq!(take(&bytes, 0, limit, 3, &mut clauses), at, "{text:?}");
        }
    }

    #[test]
    fn words_are_numbers_or_not() {
        assert_eq!(parse(b"-17"), Some(-17));
        assert_eq!(parse(b"007"), Some(7));
        assert_eq!(parse(b"-2147483648"), Some(i64::from(i32::MIN)));
        assert_eq!(parse(b"99999999999999999999"), Some(i64::MAX));
        for word in [&b"+3"[..], b"2.5", b"", b"-", b"--1", b"1e3", b"0x1", b"1\0"] {
            assert_eq!(parse(word), None, "{word:?}");
        }
    }
}
