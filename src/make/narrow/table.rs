//! Truth tables over a window of few bits.

use crate::columns::column;
use crate::problem::{BitId, BitLit};

/// The most bits of a window: 1024 rows.
pub(super) const MAX_BITS: usize = 10;

/// A set of assignments of the window's bits: bit `i` of the table is the assignment in which the window's bit `j` is bit `j`
/// of `i`.
pub(super) type Rows = Vec<u64>;

/// Some bits in increasing order.
#[derive(Clone, PartialEq, Eq, Debug)]
pub(super) struct Window {
    bits: Vec<BitId>,
}

impl Window {
    /// The window of these bits, where they are few enough.
    pub(super) fn of(bits: impl Iterator<Item = BitId>) -> Option<Self> {
        let mut found: Vec<BitId> = Vec::with_capacity(MAX_BITS);
        for bit in bits {
            if let Err(at) = found.binary_search(&bit) {
                if found.len() == MAX_BITS {
                    return None;
                }
                found.insert(at, bit);
            }
        }
        Some(Self { bits: found })
    }

    pub(super) fn bits(&self) -> &[BitId] {
        &self.bits
    }

    pub(super) fn has(&self, bit: BitId) -> bool {
        self.bits.binary_search(&bit).is_ok()
    }

    fn words(&self) -> usize {
        (1usize << self.bits.len()).div_ceil(64)
    }

    /// All assignments.
    pub(super) fn all(&self) -> Rows {
        let rows = 1usize << self.bits.len();
        if rows >= 64 { vec![u64::MAX; rows / 64] } else { vec![(1 << rows) - 1] }
    }

    /// None.
    pub(super) fn none(&self) -> Rows {
        vec![0; self.words()]
    }

    /// The assignments in which a literal of the window holds.
    pub(super) fn lit(&self, lit: BitLit) -> Rows {
        let at = self.bits.binary_search(&lit.bit()).expect("a bit of the window");
        let flip = if lit.is_negated() { u64::MAX } else { 0 };
        let mut rows: Rows = (0..self.words()).map(|word| column(at, word) ^ flip).collect();
        and(&mut rows, &self.all());
        rows
    }

    /// The assignments in which one of the literals holds.
    pub(super) fn clause(&self, lits: impl Iterator<Item = BitLit>) -> Rows {
        let mut rows = self.none();
        lits.for_each(|lit| rows.iter_mut().zip(self.lit(lit)).for_each(|(word, other)| *word |= other));
        rows
    }
}

pub(super) fn and(rows: &mut Rows, other: &Rows) {
    rows.iter_mut().zip(other).for_each(|(word, other)| *word &= other);
}

pub(super) fn is_empty(rows: &Rows) -> bool {
    rows.iter().all(|&word| word == 0)
}
