//! Circuit against circuit in superposition: the columns of the two operators, for strings of measurement outcomes.
//!
//! The good circuit is followed for one string; every string of the other must give the same operator up to one factor.
//! That the good circuit does the same for all of its strings is what an audit of it says.

use super::columns::{Column, Columns, columns, product, start};
use super::{CompareOptions, Shared, open};
use crate::budget::Budget;
use crate::circuit::Circuit;
use crate::judge::audit::superposition::run::{Draw, End};
use crate::judge::audit::{AuditError, How, Outcome, Verdict, Witness};
use crate::problem::Bits;
use crate::random::SplitMix64;

/// All inputs are followed up to so many input qubits.
const ALL_BITS: usize = 16;
/// As many strings of outcomes are followed where there are too many for all.
const STRINGS: usize = 8;

/// Compares in superposition; complete where all inputs and all strings of outcomes are covered.
pub(in crate::judge::audit) fn compare_superposed(
    good: &Circuit,
    circuit: &Circuit,
    shared: &Shared,
    options: &CompareOptions,
    budget: &Budget,
) -> Result<Verdict, AuditError> {
    let bits = shared.first.len();
    let is_all = bits <= ALL_BITS;
    compare_on(good, circuit, shared, options, (&inputs(bits, is_all, options), is_all), budget)
}

/// Compares on these inputs, which may be all there are.
pub(super) fn compare_on(
    good: &Circuit,
    circuit: &Circuit,
    shared: &Shared,
    options: &CompareOptions,
    (inputs, is_all): (&[Bits], bool),
    budget: &Budget,
) -> Result<Verdict, AuditError> {
    let mut verdict = open(if is_all { How::Superposition } else { How::Sample }, inputs.len() as u128);
    let starts = |circuit, qubits| -> Vec<Bits> { inputs.iter().map(|input| start(circuit, qubits, input)).collect() };
    let reference = columns(good, &shared.first, &starts(good, &shared.first), Draw::Zeros, budget)?;
    let reference = match reference {
        Ok(reference) => reference,
        Err(end) => return Ok(ended(verdict, &end, inputs, "the good circuit")),
    };
    let starts = starts(circuit, &shared.second);
    let (mut strings, mut at, mut free, mut even) = (1usize, 0usize, 0usize, true);
    while at < strings {
        let all = is_few(free, options.all_strings);
        let draw = match at {
            0 => Draw::Zeros,
            _ if all => Draw::Counted(at as u64),
            1 => Draw::Ones,
            _ => Draw::seeded(options.seed.wrapping_add(at as u64)),
        };
        let found = match columns(circuit, &shared.second, &starts, draw, budget)? {
            Ok(found) => found,
            Err(end) => return Ok(ended(verdict, &end, inputs, "the circuit")),
        };
        if at == 0 {
            free = found.free;
            strings = if is_few(free, options.all_strings) { 1 << free } else { STRINGS };
        }
        even &= found.free == free;
        if let Some((label, what)) = difference(&reference, &found, options.strict_phase) {
            verdict.outcome = Outcome::Differs;
            verdict.work_clean = what != What::Work;
            let (expected, got) = (said(&reference.columns[label]), said(&found.columns[label]));
            let got = if what == What::Phase { format!("{got}, with another phase") } else { got };
            verdict.witness = Some(Witness { bits: inputs[label].clone(), expected, got });
            return Ok(verdict);
        }
        at += 1;
    }
    let is_complete = is_few(free, options.all_strings) && even;
    if is_all && is_complete {
        verdict.outcome = Outcome::Equal;
    }
    if !is_complete {
        verdict.notes.push(format!("{strings} strings of {free} measurement outcomes were followed, not all"));
        verdict.outcome = if is_all { Outcome::Equal } else { Outcome::Undecided };
    }
    Ok(verdict)
}

fn is_few(free: usize, most: usize) -> bool {
    free < 48 && 1usize << free <= most
}

/// Inputs with few ones first, or drawn ones.
fn inputs(bits: usize, is_all: bool, options: &CompareOptions) -> Vec<Bits> {
    if is_all {
        let mut numbers: Vec<u64> = (0..1u64 << bits).collect();
        numbers.sort_by_key(|number| number.count_ones());
        return numbers.into_iter().map(|number| Bits::from_number(number.into(), bits)).collect();
    }
    let mut random = SplitMix64::new(options.seed);
    (0..options.sample.clamp(1, 1 << ALL_BITS)).map(|_| (0..bits).map(|_| random.coin()).collect()).collect()
}

fn ended(mut verdict: Verdict, end: &End, inputs: &[Bits], who: &str) -> Verdict {
    match end {
        End::Telling { input, bit } => {
            verdict.outcome = Outcome::Differs;
            verdict.work_clean = false;
            let got = format!("the outcome at {bit} depends on the input, in {who}");
            let expected = "the outcome of every measurement says nothing about the input".to_owned();
            verdict.witness = Some(Witness { bits: inputs[*input].clone(), expected, got });
        }
        End::TooMany(most) => verdict.notes.push(format!("not finished: more than {most} basis states at one time")),
        End::Spent | End::Reached => verdict.notes.push("not finished: the budget ran out".to_owned()),
    }
    verdict
}

/// What is different.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
enum What {
    Work,
    Value,
    Phase,
}

/// The first input on which two sets of columns differ by more than one common factor.
fn difference(good: &Columns, other: &Columns, strict: bool) -> Option<(usize, What)> {
    let pairs = || good.columns.iter().zip(&other.columns).enumerate();
    for (label, (a, b)) in pairs() {
        if a.iter().chain(b).any(|(_, is_clean, _)| !is_clean) {
            return Some((label, What::Work));
        }
        if !a.iter().map(|(value, ..)| value).eq(b.iter().map(|(value, ..)| value)) {
            return Some((label, What::Value));
        }
    }
    let wrong = |reference: usize| {
        let (a0, b0) = (good.columns[reference][0].2, other.columns[reference][0].2);
        let same = |a: &Column, b: &Column| a.iter().zip(b).all(|(a, b)| product(b.2, a0) == product(a.2, b0));
        pairs().filter(|(_, (a, b))| !same(a, b)).map(|(label, _)| label).collect::<Vec<_>>()
    };
    let against_first = wrong(0);
    if strict && !is_positive_ratio(&good.columns[0], &other.columns[0]) {
        return Some((0, What::Phase));
    }
    let first = *against_first.first()?;
    // Where most inputs differ from the first, it is the first that is odd.
    let label = if 2 * against_first.len() > good.columns.len() { wrong(first).first().copied() } else { Some(first) };
    Some((label.unwrap_or(first), What::Phase))
}

/// Whether the factor between two columns is a positive number.
fn is_positive_ratio(good: &Column, other: &Column) -> bool {
    let (a, b) = (good[0].2, other[0].2);
    // b times the conjugate of a; conj(w) = -w^3.
    let [x, y, z, t] = a.0;
    let conjugate = crate::judge::audit::state::amplitude::Exact([x, -t, -z, -y]);
    let [p, q, r, s] = product(b, conjugate);
    r == 0 && q == -s && p as f64 + q as f64 * std::f64::consts::SQRT_2 > 0.0
}

/// A column for people.
fn said(column: &Column) -> String {
    match &column[..] {
        [(value, true, _)] => value.to_string(),
        [(value, false, _)] => format!("{value}, work not clean"),
        _ if column.iter().all(|(_, is_clean, _)| *is_clean) => format!("{} basis states", column.len()),
        _ => format!("{} basis states, work not clean", column.len()),
    }
}
