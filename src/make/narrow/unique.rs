//! Whether some clauses leave a bit no choice.
//!
//! The rests of the clauses with *y* and of those with *not y* are clauses over known bits. If no assignment satisfies all of
//! them, then each assignment fails one and *y* is forced by that one. This is the theorem of Padoa on definability, asked
//! of a window: A. Padoa, "Essai d'une théorie algébrique des nombres entiers", 1900 (from memory).

use rustc_hash::FxHashMap;

use super::table::{Window, and, is_empty};
use crate::problem::{BitId, BitLit};
use crate::structure::Tidy;

/// How far the test goes.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub(super) enum Depth {
    /// The clauses of the bit.
    Clauses,
    /// Also the clauses over the same bits that the bit does not stand in.
    Window,
}

/// The most literals of the rests that are followed.
const MAX_LITS: usize = 1 << 12;
/// Passes over the rests in which single literals are followed.
const MAX_PASSES: usize = 64;

/// Whether the rests of these clauses, with the bit and with its negation, cannot all hold.
pub(super) fn is_forced(tidy: &Tidy, own: BitId, with: &[u32], without: &[u32], depth: Depth, work: &mut u64) -> bool {
    if with.is_empty() && without.is_empty() {
        return false;
    }
    let rests = || with.iter().chain(without).map(|&at| tidy.get(at as usize));
    // A rest of k literals excludes one assignment in 2^k; together they must exclude all.
    let excluded: f64 = rests().map(|clause| 0.5f64.powi(clause.len() as i32 - 1)).sum();
    let is_covering = depth == Depth::Window || excluded >= 1.0;
    let lits: usize = rests().map(<[BitLit]>::len).sum();
    *work += lits as u64;
    if rests().any(|clause| clause.len() == 1) {
        return true;
    }
    if !is_covering || with.is_empty() || without.is_empty() || lits > MAX_LITS {
        return false;
    }
    if excluded >= 1.0 && follows(rests, own, work) {
        return true;
    }
    let Some(window) = Window::of(rests().flatten().map(|lit| lit.bit()).filter(|&bit| bit != own)) else {
        return false;
    };
    let mut left = window.all();
    for clause in rests() {
        and(&mut left, &window.clause(clause.iter().copied().filter(|lit| lit.bit() != own)));
        *work += 8;
    }
    if depth == Depth::Window && !is_empty(&left) {
        inside(tidy, &window, |clause| and(&mut left, &window.clause(clause.iter().copied())), work);
    }
    is_empty(&left)
}

/// The clauses all of whose bits are in a window.
fn inside<'t>(tidy: &'t Tidy, window: &Window, mut each: impl FnMut(&'t [BitLit]), work: &mut u64) {
    for &bit in window.bits() {
        for value in [true, false] {
            let lit = BitLit::new(bit, value);
            for &at in tidy.with(lit) {
                let clause = tidy.get(at as usize);
                *work += 1;
                // Each clause is met at its first literal.
                if clause[0] == lit && clause.iter().all(|lit| window.has(lit.bit())) {
                    each(clause);
                }
            }
        }
    }
}

/// Whether single literals among the rests lead to a contradiction.
fn follows<'t, I: Iterator<Item = &'t [BitLit]>>(rests: impl Fn() -> I, own: BitId, work: &mut u64) -> bool {
    let mut values: FxHashMap<BitId, bool> = FxHashMap::default();
    for _ in 0..MAX_PASSES {
        let mut has_grown = false;
        for clause in rests() {
            *work += clause.len() as u64;
            let mut free = None;
            let mut free_count = 0;
            let mut is_met = false;
            for lit in clause.iter().filter(|lit| lit.bit() != own) {
                match values.get(&lit.bit()) {
                    Some(value) if *value != lit.is_negated() => is_met = true,
                    Some(_) => {}
                    None => (free, free_count) = (Some(*lit), free_count + 1),
                }
            }
            match (is_met, free_count, free) {
                (false, 0, _) => return true,
                (false, 1, Some(lit)) => {
                    values.insert(lit.bit(), !lit.is_negated());
                    has_grown = true;
                }
                _ => {}
            }
        }
        if !has_grown {
            return false;
        }
    }
    false
}
