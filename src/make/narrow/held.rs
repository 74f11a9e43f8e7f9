//! Which clauses hold by construction once bits are computed.
//!
//! Input: a problem and its places. Output: for each clause, whether it holds whatever is searched, so that the oracle need
//! not check it. Only the places are looked at, not how they were found.
//!
//! A clause is looked at with the formula of that one of its bits that is computed last. In a window of few bits the truth
//! table decides. A wider formula is a conjunction or a disjunction of rests of clauses, and a clause holds where the
//! formula has its rest among them, or where the negation of its rest decides the formula part by part. Clauses of
//! parities hold where the parity is a sum of parities that computed a bit.

use super::ground::{bit, read_parities};
use super::table::{Rows, Window, is_empty};
use crate::id::Id;
use crate::places::{Formula, Places};
use crate::problem::{BitId, BitLit, Problem};
use crate::structure::Tidy;
use crate::structure::linear::{Row, are_sums};

/// For each clause of the problem, whether it holds by construction.
pub fn held(problem: &Problem, places: &Places) -> Vec<bool> {
    let mut held = vec![false; problem.clauses.len()];
    if places.computed.is_empty() {
        return held;
    }
    let tidy = Tidy::new(&problem.clauses, problem.bit_count());
    let mut rank = vec![0; problem.bit_count()];
    for (at, computed) in places.computed.iter().enumerate() {
        rank[computed.bit as usize] = at + 1;
    }
    for at in 0..tidy.len() {
        let clause = tidy.get(at);
        let Some(&last) = clause.iter().max_by_key(|lit| rank[lit.bit().index()]) else { continue };
        if let Some(computed) = rank[last.bit().index()].checked_sub(1).map(|at| &places.computed[at]) {
            held[tidy.origin(at) as usize] = holds(clause, last, &computed.formula);
        }
    }
    let used: Vec<Row> = places.computed.iter().filter_map(|of| parity(of.bit, &of.formula)).collect();
    if !used.is_empty() {
        let read = read_parities(&tidy);
        let asked: Vec<Row> = read.iter().map(|(row, _)| row.clone()).collect();
        for ((_, clauses), is_sum) in read.iter().zip(are_sums(&used, &asked, problem.bit_count())) {
            clauses.iter().filter(|_| is_sum).for_each(|&at| held[at as usize] = true);
        }
    }
    held
}

/// The parity that a formula makes of a bit, where it is one of single bits.
fn parity(own: u32, formula: &Formula) -> Option<Row> {
    let (inner, odd) = match formula {
        Formula::Not(inner) => (&**inner, true),
        plain => (plain, false),
    };
    let parts = match inner {
        Formula::Xor(parts) => parts.as_slice(),
        Formula::Bit(_) => std::slice::from_ref(inner),
        _ => return None,
    };
    let mut bits = vec![bit(own)];
    for part in parts {
        let Formula::Bit(of) = part else { return None };
        bits.push(*of);
    }
    bits.sort_unstable();
    let is_plain = bits.windows(2).all(|pair| pair[0] != pair[1]);
    is_plain.then_some(Row { bits, odd })
}

/// Whether a clause holds where the bit of its literal `own` is the formula.
fn holds(clause: &[BitLit], own: BitLit, formula: &Formula) -> bool {
    let rest = || clause.iter().copied().filter(|&lit| lit != own);
    let mut bits: Vec<BitId> = Vec::new();
    formula.for_each_bit(&mut |of| bits.push(of));
    let Some(window) = Window::of(bits.into_iter().chain(rest().map(|lit| lit.bit()))) else {
        return is_value(formula, !own.is_negated(), clause, own);
    };
    let mut fails = rows(formula, &window);
    if !own.is_negated() {
        flip(&mut fails, &window);
    }
    fails.iter_mut().zip(window.clause(rest())).for_each(|(word, rest)| *word &= !rest);
    is_empty(&fails)
}

/// Whether a formula too wide for a table shows part by part that it has this value where all other literals of the clause
/// fail: then their negations hold.
fn is_value(part: &Formula, value: bool, clause: &[BitLit], own: BitLit) -> bool {
    let is_literal = |of: BitId, value: bool| {
        let lit = BitLit::new(of, !value);
        lit != own && clause.binary_search(&lit).is_ok()
    };
    match part {
        Formula::Constant(constant) => *constant == value,
        Formula::Bit(of) => is_literal(*of, value),
        Formula::Not(inner) => is_value(inner, !value, clause, own),
        Formula::And(list) if value => list.iter().all(|part| is_value(part, true, clause, own)),
        Formula::And(list) => list.iter().any(|part| is_value(part, false, clause, own)),
        Formula::Or(list) if value => list.iter().any(|part| is_value(part, true, clause, own)),
        Formula::Or(list) => list.iter().all(|part| is_value(part, false, clause, own)),
        Formula::Xor(_) | Formula::Digit(_) => false,
    }
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
        Formula::Constant(value) => {
            if *value {
                window.all()
            } else {
                window.none()
            }
        }
        Formula::Bit(of) => window.lit(BitLit::new(*of, true)),
        Formula::Not(inner) => {
            let mut rows = rows(inner, window);
            flip(&mut rows, window);
            rows
        }
        Formula::And(list) => join(list, window.all(), |a, b| a & b),
        Formula::Or(list) => join(list, window.none(), |a, b| a | b),
        Formula::Xor(list) => join(list, window.none(), |a, b| a ^ b),
        Formula::Digit(digit) => {
            let terms: Vec<(i64, Rows)> =
                digit.terms.iter().map(|(weight, term)| (*weight, rows(term, window))).collect();
            let mut set = window.none();
            for row in 0..1usize << window.bits().len() {
                let held = terms.iter().filter(|(_, rows)| rows[row / 64] >> (row % 64) & 1 == 1);
                let number = i128::from(digit.constant) + held.map(|&(weight, _)| i128::from(weight)).sum::<i128>();
                set[row / 64] |= ((number >> digit.at & 1) as u64) << (row % 64);
            }
            set
        }
    }
}

fn flip(rows: &mut Rows, window: &Window) {
    rows.iter_mut().zip(window.all()).for_each(|(word, all)| *word ^= all);
}
