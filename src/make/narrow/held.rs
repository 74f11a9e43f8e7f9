//! Which clauses hold by construction once bits are computed.
//!
//! A clause is looked at with the formula of that one of its bits that became known last. In a window of few bits the
//! truth table decides; else a clause of the side that the formula is made of holds, and one of the other side where the
//! negation of its rest meets every clause of that side. Clauses of parities hold where the parity is a sum of rows that
//! computed a bit.

use super::closure::{How, Step};
use super::function::{Made, Ranks, Rests};
use super::ground::Ground;
use super::table::{Rows, Window, is_empty};
use crate::id::Id;
use crate::places::Formula;
use crate::problem::{BitId, BitLit};
use crate::structure::linear::{Row, are_sums};

/// For each clause of the problem, whether it holds whatever is searched. Clauses that always hold are among them.
pub(super) fn held(ground: &Ground, steps: &[Step], ranks: &Ranks, made: &[Made], clause_count: usize) -> Vec<bool> {
    let mut held = vec![true; clause_count];
    (0..ground.tidy.len()).for_each(|at| held[ground.tidy.origin(at) as usize] = false);
    for (step, made) in steps.iter().filter(|step| step.how != How::Searched).zip(made) {
        let clauses = ranks.rests(ground, step.bit, false);
        let made_of = ranks.rests_of(ground, step);
        for &at in clauses.with.iter().chain(&clauses.without) {
            if holds(ground, &made_of, made, at) {
                held[ground.tidy.origin(at as usize) as usize] = true;
            }
        }
    }
    by_rows(ground, steps, &mut held);
    held
}

fn by_rows(ground: &Ground, steps: &[Step], held: &mut [bool]) {
    let used: Vec<Row> = steps
        .iter()
        .filter_map(|step| match step.how {
            How::Row(row) => Some(ground.rows[row as usize].clone()),
            _ => None,
        })
        .collect();
    if used.is_empty() {
        return;
    }
    let asked: Vec<Row> = ground.read.iter().map(|(row, _)| row.clone()).collect();
    for ((_, clauses), is_sum) in ground.read.iter().zip(are_sums(&used, &asked, ground.bit_count())) {
        if is_sum {
            clauses.iter().for_each(|&at| held[at as usize] = true);
        }
    }
}

/// Whether a clause holds where its bit is the formula.
fn holds(ground: &Ground, rests: &Rests, made: &Made, at: u32) -> bool {
    let clause = ground.tidy.get(at as usize);
    let own = *clause.iter().find(|lit| lit.bit() == rests.own).expect("a clause of the bit");
    let mut bits: Vec<BitId> = Vec::new();
    made.formula.for_each_bit(&mut |of| bits.push(of));
    let others = clause.iter().map(|lit| lit.bit()).filter(|&other| other != rests.own);
    if let Some(window) = Window::of(bits.into_iter().chain(others)) {
        let mut fails = rows(&made.formula, &window);
        if !own.is_negated() {
            flip(&mut fails, &window);
        }
        let rest = window.clause(clause.iter().copied().filter(|lit| lit.bit() != rests.own));
        fails.iter_mut().zip(rest).for_each(|(word, rest)| *word &= !rest);
        return is_empty(&fails);
    }
    match (made.side, &made.formula) {
        (Some(is_conjunction), _) => {
            let side = if is_conjunction { &rests.without } else { &rests.with };
            side.contains(&at) || side.iter().all(|&other| meets(ground.tidy.get(other as usize), clause, rests.own))
        }
        (None, Formula::Constant(value)) => *value != own.is_negated(),
        (None, _) => false,
    }
}

/// Whether the negation of one clause's rest makes the other clause hold.
fn meets(clause: &[BitLit], negated: &[BitLit], own: BitId) -> bool {
    clause.iter().any(|&lit| lit.bit() != own && negated.binary_search(&!lit).is_ok())
}

/// The table of a formula.
fn rows(formula: &Formula, window: &Window) -> Rows {
    let join = |list: &[Formula], start: Rows, op: fn(u64, u64) -> u64| {
        list.iter().fold(start, |mut so_far, part| {
            so_far.iter_mut().zip(rows(part, window)).for_each(|(word, other)| *word = op(*word, other));
            so_far
        })
    };
    match formula {
        Formula::Constant(value) => if *value { window.all() } else { window.none() },
        Formula::Bit(of) => window.lit(BitLit::new(*of, true)),
        Formula::Not(inner) => {
            let mut rows = rows(inner, window);
            flip(&mut rows, window);
            rows
        }
        Formula::And(list) => join(list, window.all(), |a, b| a & b),
        Formula::Or(list) => join(list, window.none(), |a, b| a | b),
        Formula::Xor(list) => join(list, window.none(), |a, b| a ^ b),
    }
}

fn flip(rows: &mut Rows, window: &Window) {
    rows.iter_mut().zip(window.all()).for_each(|(word, all)| *word ^= all);
}
