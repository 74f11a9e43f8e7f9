//! Rows: one value of a Boolean for each of 2048 inputs at once.
//!
//! Input `j` of a block of inputs is lane `j`: bit `j % 64` of word `j / 64`. In block `b` it is the number
//! `2048 b + j`, so the low eleven bits of the number have the same rows in every block, and every other bit is all zeros or
//! all ones.

/// Defines a function over rows that is compiled twice, for the target's default features and for AVX2; the second one
/// is chosen when the program runs on a processor that has it. The body is plain Rust over words.
macro_rules! wide_fn {
    ($(#[$doc:meta])* $vis:vis fn $name:ident($($arg:ident: $ty:ty),* $(,)?) -> $ret:ty $body:block) => {
        $(#[$doc])*
        $vis fn $name($($arg: $ty),*) -> $ret {
            #[inline(always)]
            fn here($($arg: $ty),*) -> $ret $body

            #[cfg(any(target_arch = "x86_64", target_arch = "x86"))]
            {
                #[target_feature(enable = "avx2")]
                fn avx2($($arg: $ty),*) -> $ret {
                    here($($arg),*)
                }
                if is_x86_feature_detected!("avx2") {
                    // SAFETY: the processor has AVX2.
                    return unsafe { avx2($($arg),*) };
                }
            }
            here($($arg),*)
        }
    };
}
pub(crate) use wide_fn;

use crate::columns::column;

/// Words in a row.
pub(crate) const WORDS: usize = 32;
/// The low bits of an input that its lane gives.
pub(crate) const LANE_BITS: usize = 11;
/// Lanes in a row.
pub(crate) const LANES: u64 = 1 << LANE_BITS;

/// Words that are loaded, worked on and stored together: 256 bits.
const VECTOR: usize = 4;

/// A row of lanes.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
#[repr(C, align(64))]
pub(crate) struct Row(pub(crate) [u64; WORDS]);

impl Row {
    pub(crate) const ZEROS: Row = Row([0; WORDS]);
    pub(crate) const ONES: Row = Row([!0; WORDS]);

    /// The same value in every lane.
    pub(crate) fn splat(value: bool) -> Self {
        if value { Self::ONES } else { Self::ZEROS }
    }

    /// The row of bit `at` of the inputs in a block.
    pub(crate) fn of_bit(at: usize, block: u64) -> Self {
        if at >= LANE_BITS {
            return Self::splat(block >> (at - LANE_BITS) & 1 == 1);
        }
        Row(std::array::from_fn(|word| column(at, word)))
    }

    /// The lanes below `count`.
    pub(crate) fn first_lanes(count: u64) -> Self {
        Row(std::array::from_fn(|word| match count.saturating_sub(64 * word as u64) {
            rest @ 0..64 => (1 << rest) - 1,
            _ => !0,
        }))
    }

    pub(crate) fn is_zero(&self) -> bool {
        self.0.iter().fold(0, |all, word| all | word) == 0
    }

    pub(crate) fn count(&self) -> u64 {
        self.0.iter().map(|word| u64::from(word.count_ones())).sum()
    }

    /// The lanes that are set, in increasing order.
    pub(crate) fn lanes(&self) -> impl Iterator<Item = u64> {
        self.0.iter().enumerate().flat_map(|(at, &word)| {
            let mut rest = word;
            std::iter::from_fn(move || {
                let lane = u64::from(rest.trailing_zeros());
                rest &= rest.wrapping_sub(1);
                (lane < 64).then_some(64 * at as u64 + lane)
            })
        })
    }

    /// The value in a lane.
    #[cfg(test)]
    pub(crate) fn lane(&self, lane: usize) -> bool {
        self.0[lane / 64] >> (lane % 64) & 1 == 1
    }

    /// Sets a lane that is 0.
    pub(crate) fn set_lane(&mut self, lane: usize) {
        self.0[lane / 64] |= 1 << (lane % 64);
    }

    pub(crate) fn zip(&self, other: &Row, f: impl Fn(u64, u64) -> u64) -> Row {
        Row(std::array::from_fn(|word| f(self.0[word], other.0[word])))
    }
}

impl std::ops::BitXor for Row {
    type Output = Row;
    fn bitxor(self, other: Row) -> Row {
        self.zip(&other, |a, b| a ^ b)
    }
}

impl std::ops::BitAnd for Row {
    type Output = Row;
    fn bitand(self, other: Row) -> Row {
        self.zip(&other, |a, b| a & b)
    }
}

impl std::ops::BitOr for Row {
    type Output = Row;
    fn bitor(self, other: Row) -> Row {
        self.zip(&other, |a, b| a | b)
    }
}

impl std::ops::Not for Row {
    type Output = Row;
    fn not(self) -> Row {
        self ^ Row::ONES
    }
}

/// Makes row `to` out of what it was and of the rows `from`, which are others, vector by vector. Each vector is stored as
/// soon as it is made: so eight of them are independent, and no row is copied only because two rows might be the same.
#[inline(always)]
pub(crate) fn update<const N: usize>(rows: &mut [Row], to: usize, from: [usize; N], f: impl Fn(u64, [u64; N]) -> u64) {
    let mut is_within = to < rows.len();
    from.iter().for_each(|&row| is_within &= row < rows.len());
    assert!(is_within, "rows of the run");
    // Plain loops: what goes through closures of the library is not always inlined into the AVX2 variant.
    for vector in 0..WORDS / VECTOR {
        let start = vector * VECTOR;
        let mut made = [0; VECTOR];
        for (word, made) in made.iter_mut().enumerate() {
            let mut operands = [0; N];
            for (operand, &row) in operands.iter_mut().zip(&from) {
                *operand = rows[row].0[start + word];
            }
            *made = f(rows[to].0[start + word], operands);
        }
        rows[to].0[start..start + VECTOR].copy_from_slice(&made);
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn a_bit_row_holds_that_bit_of_each_input() {
        for (block, at) in [(0, 0), (3, 5), (3, 6), (3, 10), (2, 11), (2, 12), (5, 13)] {
            let row = Row::of_bit(at, block);
            for lane in 0..LANES {
                assert_eq!(row.lane(lane as usize), (block * LANES + lane) >> at & 1 == 1, "bit {at} of lane {lane}");
            }
        }
        assert_eq!(Row::first_lanes(70).lanes().collect::<Vec<_>>(), (0..70).collect::<Vec<_>>());
        assert_eq!((Row::first_lanes(LANES), Row::first_lanes(0)), (Row::ONES, Row::ZEROS));
    }
}
