//! The hot loop: literals and closing zeros, one eight-byte load for each.
//!
//! Input:  a window whose words are whole before `limit`, with eight readable bytes after any of them.
//! Output: literals in `clauses`, and the place of the first thing that is not a plain number in range.
//!
//! A number of up to seven bytes, its sign among them, is found and read without a loop, all digits in one 64-bit word:
//! the first byte that is no digit gives the length, a shift aligns the digits, and three multiplications add them up. The method is
//! widely published (D. Lemire, "Quickly parsing eight digits", 2018, from memory).

use super::blocks::is_blank;
use crate::id::Id;
use crate::problem::{BitId, BitLit, Clauses};

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
        let word = load(bytes, pos);
        let digits = word ^ ZEROS;
        let others = (digits.wrapping_add(ABOVE_NINE) | digits) & HIGH;
        let negative = word as u8 == b'-';
        // The sign is the lowest byte that is no digit. Only the length waits for the load: it is what the next
        // number has to wait for.
        let others = if negative { others & others.wrapping_sub(1) } else { others };
        let total = others.trailing_zeros() as usize / 8;
        let sign = usize::from(negative);
        if total == sign {
            if is_blank(word as u8) {
                pos += 1;
                continue;
            }
            break;
        }
        let (value, total) = match total {
            8 => long(&bytes[pos..], sign),
            _ => (add_up(digits >> (8 * sign) << (64 - 8 * (total - sign))), total),
        };
        if !is_blank(bytes[pos + total]) || value > vars || (value == 0 && negative) {
            break;
        }
        if value == 0 {
            clauses.end_clause();
        } else {
            clauses.push_lit(BitLit::new(BitId::new(value as usize - 1), !negative));
        }
        pos += total + 1;
    }
    pos
}

/// A number that fills eight bytes, with its sign: its size, saturating, and its length.
#[cold]
fn long(bytes: &[u8], sign: usize) -> (u64, usize) {
    let digits = bytes[sign..].iter().take_while(|byte| byte.is_ascii_digit());
    let add = |size: u64, digit: &u8| size.saturating_mul(10).saturating_add(u64::from(digit - b'0'));
    let (size, count) = digits.fold((0, 0), |(size, count), digit| (add(size, digit), count + 1));
    (size, sign + count)
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
            ("1 2 x", 4),
            ("-0 ", 0),
            ("1 +2", 2),
            ("4 ", 0),
            ("12345678 ", 0),
            ("-1234567 ", 0),
            ("00000000000000003 1 -00000003 4 ", 30),
            ("99999999999999999999999 ", 0),
            ("1- ", 0),
            ("-", 0),
            ("--1 ", 0),
            ("- ", 0),
            ("1\u{b2} ", 0),
            ("1\0 ", 0),
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
