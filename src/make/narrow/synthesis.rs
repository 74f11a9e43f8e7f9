//! Functions of up to five bits that need no AND, or one.
//!
//! A function needs no AND if it is a parity, and one if it is a parity plus the product of two parities (J. Boyar, R. Peralta,
//! D. Pochuev, "On the multiplicative complexity of Boolean functions over the basis (and, xor, 1)", 2000). Over five bits
//! these are few enough to try.

use rustc_hash::FxHashMap;

use crate::places::Formula;
use crate::problem::BitId;

/// The most bits of a function that is tried.
pub(super) const MAX_BITS: usize = 5;

/// A parity of some of the bits, by a mask, and whether it is negated.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
struct Parity {
    mask: u32,
    odd: bool,
}

/// `sum xor (one and other)`, where there is a product.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub(super) struct Shape {
    sum: Parity,
    product: Option<(u32, u32)>,
}

impl Shape {
    /// How many ANDs it needs.
    pub(super) fn ands(self) -> usize {
        usize::from(self.product.is_some())
    }

    /// As a formula over these bits.
    pub(super) fn formula(self, bits: &[BitId]) -> Formula {
        let parity = |mask: u32| {
            let list: Vec<Formula> = bits
                .iter()
                .enumerate()
                .filter(|(at, _)| mask >> at & 1 == 1)
                .map(|(_, &bit)| Formula::Bit(bit))
                .collect();
            list
        };
        let of = |mut list: Vec<Formula>| if list.len() == 1 { list.remove(0) } else { Formula::Xor(list) };
        let mut terms = parity(self.sum.mask);
        if let Some((one, other)) = self.product {
            terms.push(Formula::And(vec![of(parity(one)), of(parity(other))]));
        }
        match (terms.is_empty(), self.sum.odd) {
            (true, odd) => Formula::Constant(odd),
            (false, true) => Formula::Not(Box::new(of(terms))),
            (false, false) => of(terms),
        }
    }
}

/// Shapes that were found, by number of bits and table.
#[derive(Default)]
pub(super) struct Shapes {
    known: FxHashMap<(usize, u32), Option<Shape>>,
}

impl Shapes {
    /// The cheapest shape of a function: bit `i` of the table is its value where the bits spell `i`, the first the lowest.
    pub(super) fn of(&mut self, bits: usize, table: u32) -> Option<Shape> {
        *self.known.entry((bits, table)).or_insert_with(|| find(bits, table))
    }
}

fn find(bits: usize, table: u32) -> Option<Shape> {
    let all = if bits == MAX_BITS { u32::MAX } else { (1 << (1 << bits)) - 1 };
    let parities: Vec<u32> = (0..1u32 << bits).map(|mask| parity_table(bits, mask)).collect();
    let as_parity = |table: u32| {
        let at = |flip: u32| parities.iter().position(|&parity| parity ^ flip == table);
        at(0).map(|mask| (mask, false)).or_else(|| at(all).map(|mask| (mask, true)))
    };
    let shape = |(mask, odd): (usize, bool), product| Shape { sum: Parity { mask: mask as u32, odd }, product };
    if let Some(sum) = as_parity(table) {
        return Some(shape(sum, None));
    }
    for one in 1..parities.len() {
        for other in one + 1..parities.len() {
            if let Some(sum) = as_parity(table ^ (parities[one] & parities[other])) {
                return Some(shape(sum, Some((one as u32, other as u32))));
            }
        }
    }
    None
}

fn parity_table(bits: usize, mask: u32) -> u32 {
    (0..1u32 << bits).filter(|row| (row & mask).count_ones() % 2 == 1).fold(0, |table, row| table | 1 << row)
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::id::Id;
    use crate::problem::Bits;

    #[test]
    fn shapes_are_the_functions_and_as_many_as_there_are() {
        // Functions of three bits with multiplicative complexity 0 and 1: 16 and 112 of 256 (from memory: of 3-bit
        // functions, those of degree 2 and less are 128, all of them with one AND or none).
        let bits: Vec<BitId> = (0..3).map(BitId::new).collect();
        let mut shapes = Shapes::default();
        let mut counts = [0; 3];
        for table in 0..256u32 {
            let Some(shape) = shapes.of(3, table) else {
                counts[2] += 1;
                continue;
            };
            counts[shape.ands()] += 1;
            let formula = shape.formula(&bits);
            for row in 0..8u32 {
                let assignment = Bits::from_number(row.into(), 3);
                assert_eq!(formula.holds(&assignment), table >> row & 1 == 1, "{table:08b} {formula}");
            }
        }
        assert_eq!(counts, [16, 112, 128]);
    }
}
