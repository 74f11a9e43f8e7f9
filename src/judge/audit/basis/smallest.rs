//! The smallest witness: among the inputs on which a circuit is wrong, one with few ones.
//!
//! Input: an input that is wrong. Output: one that is wrong too, with no more ones. First the inputs with few ones are
//! tried, then ones are taken out of the one given as long as it stays wrong. Each try runs the gates once, so the
//! search ends after a fixed amount of work.

use crate::judge::audit::basis::findings::Case;
use crate::problem::Bits;

/// Gates that are run to make a witness smaller: some tenths of a second.
const WORK: usize = 1 << 22;

/// An input with few ones that is wrong under the same global phase as the one given.
pub(super) fn smallest(case: &Case, found: Bits, global: u8) -> Bits {
    let gates: usize = case.circuit.blocks().iter().map(|block| block.repeat as usize * block.gates.len()).sum();
    let mut tries = WORK / gates.max(1);
    let mut is_wrong = |input: &Bits| {
        tries = tries.saturating_sub(1);
        tries > 0 && case.explain(input, global).is_some()
    };
    let (bits, ones) = (found.len(), found.iter().filter(|&bit| bit).count());
    for few in 0..ones.min(3) {
        if let Some(input) = with_ones(bits, few).find(|input| is_wrong(input)) {
            return input;
        }
    }
    let mut smaller = found;
    for at in 0..bits {
        if smaller.at(at) {
            smaller.set_at(at, false);
            if !is_wrong(&smaller) {
                smaller.set_at(at, true);
            }
        }
    }
    smaller
}

/// The strings with so many ones, at most two.
fn with_ones(bits: usize, ones: usize) -> impl Iterator<Item = Bits> {
    let string = move |places: &[usize]| {
        let mut string = Bits::zeros(bits);
        places.iter().for_each(|&at| string.set_at(at, true));
        string
    };
    let pairs = (0..bits).flat_map(move |a| (0..bits).map(move |b| (a, b)));
    pairs
        .filter(move |&(a, b)| match ones {
            0 => (a, b) == (0, 0),
            1 => a == b,
            _ => a < b,
        })
        .map(move |(a, b)| if ones == 0 { string(&[]) } else { string(&[a, b]) })
}
