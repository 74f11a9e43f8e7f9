//! Lower bounds: what no exact oracle can go below.
//!
//! Input:  a degree that the predicate has at least, as a polynomial over two elements in the searched bits; or what it
//!         follows from, a truth table or the number of marked strings.
//! Output: the fewest ANDs and T gates that it leaves possible.
//!
//! - ANDs: with k of them every value has a degree of at most k + 1, so the AND count is at least the degree less one
//!   (C. P. Schnorr, "The multiplicative complexity of Boolean functions", AAECC-6, 1988, from memory); a phase oracle
//!   marks the last AND without computing it.
//! - T gates: the sign of a predicate of degree d > 2, applied to the even superposition, gives a state of stabilizer nullity
//!   at least d: the directions in which its derivative is affine are a space, and the predicate is quadratic along it.
//!   Each T gate adds one at most, also with measurements (M. Beverland, E. Campbell, M. Howard, V. Kliuchnikov, "Lower
//!   bounds on the non-Clifford resources for quantum computations", Quantum Science and Technology 5, 2020). A bit
//!   oracle is the sign of one degree more, between Hadamard gates.
//! - The degree, from the number of marked strings of n bits: a polynomial of degree d has a number of ones that
//!   2^(ceil(n/d) - 1) divides (J. Ax, "Zeroes of polynomials over finite fields", American Journal of Mathematics 86,
//!   1964, from memory).
//!
//! They hold for exact oracles: with an error that is allowed, fewer T gates may do.

use num_bigint::BigUint;
use serde::Serialize;

use super::Mark;

/// The fewest of each that an exact oracle has.
#[derive(Clone, Copy, PartialEq, Eq, Debug, Serialize)]
pub struct Bounds {
    /// The degree that the others rest on.
    pub degree: u64,
    /// ANDs, counted as [`Product::and_count`](super::Product::and_count) counts them.
    pub and_count: u64,
    /// T gates, with or without measurements.
    pub t_count: u64,
}

impl Bounds {
    /// What a degree leaves possible.
    pub fn of_degree(degree: u64, mark: Mark) -> Self {
        // The degree of the sign: a bit oracle flips it where the predicate and one more bit hold.
        let sign = degree + u64::from(mark == Mark::Bit);
        Self { degree, and_count: sign.saturating_sub(2), t_count: if sign > 2 { sign } else { 0 } }
    }
}

/// The degree of a predicate over `bits` bits: its truth table has bit *x* at bit *x* mod 64 of word *x* / 64.
pub fn degree(mut table: Vec<u64>, bits: usize) -> u64 {
    // From values to coefficients, bit by bit: what a bit set adds to the same string without it.
    const LOW: [u64; 6] = [
        0x5555_5555_5555_5555,
        0x3333_3333_3333_3333,
        0x0f0f_0f0f_0f0f_0f0f,
        0x00ff_00ff_00ff_00ff,
        0x0000_ffff_0000_ffff,
        0x0000_0000_ffff_ffff,
    ];
    for bit in 0..bits {
        match LOW.get(bit) {
            Some(low) => table.iter_mut().for_each(|word| *word ^= (*word & low) << (1 << bit)),
            None => {
                let half = 1 << (bit - LOW.len());
                for pair in table.chunks_mut(2 * half) {
                    let (without, with) = pair.split_at_mut(half);
                    without.iter().zip(with).for_each(|(without, with)| *with ^= without);
                }
            }
        }
    }
    let monomials = (0..1u64 << bits).filter(|&x| table[(x / 64) as usize] >> (x % 64) & 1 == 1);
    monomials.map(|x| u64::from(x.count_ones())).max().unwrap_or(0)
}

/// The least degree that goes with so many marked strings of so many bits; 0 where none or every one is marked.
pub fn degree_from_marked(bits: u64, marked: &BigUint) -> u64 {
    marked.trailing_zeros().filter(|&twos| twos < bits).map_or(0, |twos| bits.div_ceil(twos + 1))
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::random::SplitMix64;

    fn table(bits: usize, holds: impl Fn(u64) -> bool) -> Vec<u64> {
        let mut table = vec![0; (1usize << bits).div_ceil(64)];
        (0..1u64 << bits).filter(|&x| holds(x)).for_each(|x| table[(x / 64) as usize] |= 1 << (x % 64));
        table
    }

    /// The exact n-qubit Toffoli needs n T gates (Beverland and others, 2020); the sign of n bits n - 2 ANDs.
    #[test]
    fn an_and_of_all_bits() {
        for bits in 3..=9usize {
            let degree = degree(table(bits, |x| x == (1 << bits) - 1), bits);
            assert_eq!(degree, bits as u64);
            let (phase, bit) = (Bounds::of_degree(degree, Mark::Phase), Bounds::of_degree(degree, Mark::Bit));
            assert_eq!((phase.and_count, phase.t_count), (degree - 2, degree));
            assert_eq!((bit.and_count, bit.t_count), (degree - 1, degree + 1));
        }
        assert_eq!(Bounds::of_degree(2, Mark::Phase), Bounds { degree: 2, and_count: 0, t_count: 0 });
    }

    #[test]
    fn parities_and_majorities_have_their_degrees() {
        assert_eq!(degree(table(8, |x| x.count_ones() % 2 == 1), 8), 1);
        assert_eq!(degree(table(7, |x| x & 3 == 3 || x & 0x70 == 0x70), 7), 5);
        assert_eq!(degree(table(3, |x| x.count_ones() > 1), 3), 2);
        assert_eq!(degree(table(6, |_| true), 6), 0);
    }

    /// The bound from the number of ones never exceeds the degree, and is met where the number is odd.
    #[test]
    fn the_number_of_ones_bounds_the_degree() {
        let mut random = SplitMix64::new(5);
        for round in 0..400u64 {
            let bits = 3 + (round % 6) as usize;
            // A random polynomial of few variables at a time.
            let most = 1 + round as u32 % 4;
            let monomials: Vec<u64> =
                (0..5).map(|_| random.next_u64() % (1 << bits)).filter(|m| m.count_ones() <= most).collect();
            let table = table(bits, |x| monomials.iter().filter(|&&m| x & m == m).count() % 2 == 1);
            let marked: u64 = table.iter().map(|word| u64::from(word.count_ones())).sum();
            let (found, bound) = (degree(table, bits), degree_from_marked(bits as u64, &marked.into()));
            assert!(bound <= found, "{monomials:?}: {bound} {found}");
            if marked % 2 == 1 {
                assert_eq!(bound, bits as u64);
            }
        }
    }
}
