//! Solutions of the whole problem from those of its parts: one of each part, with any values of the free bits.

use super::list::Listing;
use super::parts::Split;
use crate::problem::Bits;

/// Up to `keep` solutions over all bits, in increasing order, and whether they are all. Bits that are neither counted
/// nor in a clause are 0.
pub(super) fn solutions(bit_count: usize, split: &Split, listings: &[Listing], keep: usize) -> (Vec<Bits>, bool) {
    let whole = listings.iter().all(|list| list.high() == list.kept.len().into());
    // The wheels of a counter: the kept solutions of each part, and two values of each free bit.
    let sizes: Vec<usize> = listings.iter().map(|list| list.kept.len()).chain(split.free.iter().map(|_| 2)).collect();
    if sizes.contains(&0) {
        return (Vec::new(), false);
    }
    let mut wheels = vec![0; sizes.len()];
    let mut solutions = Vec::new();
    let mut turned_over = false;
    while !turned_over && solutions.len() < keep {
        solutions.push(assemble(bit_count, split, listings, &wheels));
        turned_over = true;
        for (wheel, &size) in wheels.iter_mut().zip(&sizes) {
            *wheel = (*wheel + 1) % size;
            if *wheel != 0 {
                turned_over = false;
                break;
            }
        }
    }
    solutions.sort_unstable();
    (solutions, whole && turned_over)
}

fn assemble(bit_count: usize, split: &Split, listings: &[Listing], wheels: &[usize]) -> Bits {
    let mut bits = Bits::zeros(bit_count);
    let (of_parts, of_free) = wheels.split_at(listings.len());
    for ((part, listing), &wheel) in split.parts.iter().zip(listings).zip(of_parts) {
        for (&var, value) in part.vars.iter().zip(listing.kept[wheel].iter()) {
            bits.set_at(var, value);
        }
    }
    for (&bit, &wheel) in split.free.iter().zip(of_free) {
        bits.set(bit, wheel == 1);
    }
    bits
}
