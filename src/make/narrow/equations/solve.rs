//! An equation solved for one of its variables.

use super::Settled;
use super::form::{Equation, Sum};
use crate::id::Id;
use crate::places::{Digit, Formula};
use crate::problem::{BitId, Domain, Problem, Var, VarId};

/// The most terms in the lowest digit of a sum. The judge proves the digits with a solver, to which the parity of a number of
/// bits that are counted elsewhere in another order is hard: of 20 it takes a second, of 24 more than ten.
const MAX_ODD_TERMS: usize = 20;

/// The bits of a variable, each with its formula, and what then is left of the equation; nothing is said about that where it
/// has to be checked as it is.
#[derive(Clone, PartialEq, Eq, Debug)]
pub(super) struct Solved {
    pub(super) bits: Vec<(u32, Formula)>,
    pub(super) settled: Option<Settled>,
}

/// Solves for a variable; none where it stands in more than one place, or where its digits would cost products.
pub(super) fn solve(problem: &Problem, equation: &Equation, var: VarId) -> Option<Solved> {
    let var = &problem.vars()[var];
    match equation {
        Equation::Sum(sum) => from_sum(var, sum),
        Equation::Parity(parts, odd) if var.domain == Domain::YesNo => from_parity(var.first_bit, parts, *odd),
        Equation::Parity(..) => None,
    }
}

fn from_parity(own: BitId, parts: &[Formula], odd: bool) -> Option<Solved> {
    let rest: Vec<Formula> = parts.iter().filter(|&part| *part != Formula::Bit(own)).cloned().collect();
    if rest.len() + 1 != parts.len() || rest.iter().any(|part| mentions(part, own, 1)) {
        return None;
    }
    let rest = if rest.len() == 1 { rest.into_iter().next()? } else { Formula::Xor(rest) };
    let formula = match rest {
        rest if !odd => rest,
        Formula::Not(inner) => *inner,
        rest => Formula::Not(Box::new(rest)),
    };
    Some(Solved { bits: vec![(own.index() as u32, formula)], settled: Some(Settled::Always) })
}

/// `coefficient * code + rest = 0`, so the code is the rest divided by the negated coefficient.
fn from_sum(var: &Var, sum: &Sum) -> Option<Solved> {
    let (first, width) = (var.first_bit.index(), usize::from(var.width));
    let place = |formula: &Formula| match formula {
        Formula::Bit(bit) => bit.index().checked_sub(first).filter(|&at| at < width),
        _ => None,
    };
    let mut weights = vec![0; width];
    sum.terms.iter().for_each(|(weight, formula)| {
        weights[..].iter_mut().enumerate().for_each(|(at, own)| {
            if place(formula) == Some(at) {
                *own = *weight;
            }
        })
    });
    let coefficient = *weights.first()?;
    let is_code = weights.iter().enumerate().all(|(at, &weight)| weight == coefficient << at);
    let rest: Vec<&(i128, Formula)> = sum.terms.iter().filter(|(_, formula)| place(formula).is_none()).collect();
    if coefficient == 0 || !is_code || rest.iter().any(|(_, formula)| mentions(formula, var.first_bit, width)) {
        return None;
    }
    if rest.iter().filter(|(weight, _)| weight % 2 != 0).count() > MAX_ODD_TERMS {
        return None;
    }
    let low = coefficient.trailing_zeros() as usize;
    let odd_part = coefficient >> low;
    if let (1 | -1, 0) = (odd_part, low) {
        let number = digit(0, -odd_part * sum.constant, rest.iter().map(|(weight, of)| (-odd_part * weight, of)))?;
        let settled = Some(Settled::Within { number: number.clone(), width });
        return Some(Solved { bits: digits(first, width, 0, &number), settled });
    }
    // Of the other coefficients the inverse makes long products of longer numbers, which one bit does not need.
    let count = low + width;
    if odd_part.abs() != 1 && width > 1 || count > 48 {
        return None;
    }
    let by = -inverse(odd_part, count);
    let of = |number: i128| centred(number * by, count);
    let terms = rest.iter().map(|(weight, formula)| (of(*weight), formula)).filter(|&(weight, _)| weight != 0);
    let number = digit(0, of(sum.constant), terms)?;
    Some(Solved { bits: digits(first, width, low, &number), settled: None })
}

/// Whether a formula mentions one of the bits.
fn mentions(formula: &Formula, first: BitId, width: usize) -> bool {
    let mut found = false;
    formula.for_each_bit(&mut |bit| found |= (first.index()..first.index() + width).contains(&bit.index()));
    found
}

fn digit<'a>(at: u8, constant: i128, terms: impl Iterator<Item = (i128, &'a Formula)>) -> Option<Digit> {
    let term = |(weight, formula): (i128, &Formula)| Some((i64::try_from(weight).ok()?, formula.clone()));
    let digit = Digit { at, constant: i64::try_from(constant).ok()?, terms: terms.map(term).collect::<Option<_>>()? };
    digit.is_small().then_some(digit)
}

/// The bits as digits of the number from the digit `low` on. The lowest is a parity.
fn digits(first: usize, width: usize, low: usize, number: &Digit) -> Vec<(u32, Formula)> {
    let formula = |at: usize| match low + at {
        0 => parity(number),
        digit => Formula::Digit(Digit { at: digit as u8, ..number.clone() }),
    };
    (0..width).map(|at| ((first + at) as u32, formula(at))).collect()
}

fn parity(number: &Digit) -> Formula {
    let mut odd: Vec<Formula> =
        number.terms.iter().filter(|(weight, _)| weight % 2 != 0).map(|(_, term)| term.clone()).collect();
    let sum = if odd.len() == 1 { odd.remove(0) } else { Formula::Xor(odd) };
    match sum {
        Formula::Xor(parts) if parts.is_empty() => Formula::Constant(number.constant % 2 != 0),
        sum if number.constant % 2 == 0 => sum,
        sum => Formula::Not(Box::new(sum)),
    }
}

/// The inverse of an odd number modulo `2^count`: each step doubles the digits that are right (K. Hensel's lifting).
fn inverse(odd: i128, count: usize) -> i128 {
    let mut inverse = odd;
    for _ in 0..6 {
        inverse = centred(inverse * centred(2 - odd * inverse, count), count);
    }
    centred(inverse, count)
}

/// The number modulo `2^count` that is nearest to 0.
fn centred(number: i128, count: usize) -> i128 {
    let whole = 1i128 << count;
    let number = number.rem_euclid(whole);
    if number > whole / 2 { number - whole } else { number }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn inverses_are_inverses() {
        for odd in (-99..100).step_by(2) {
            for count in [1, 2, 5, 20, 48] {
                let product = odd * inverse(odd, count);
                assert_eq!((product - 1).rem_euclid(1 << count), 0, "{odd} modulo 2^{count}");
            }
        }
    }
}
