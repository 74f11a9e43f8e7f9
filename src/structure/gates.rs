//! Gates: conjunctions, if-then-else, majorities, each by the clauses of its definition.

use super::table::Table;
use super::{Fact, Finding, Tidy};
use crate::problem::BitLit;

/// Pairs of clauses that are looked at for an output with three inputs; a literal in more of them is passed by.
const MAX_PAIRS: usize = 1 << 12;

pub(super) fn find(tidy: &Tidy, table: &Table) -> Vec<Finding> {
    let mut findings = Vec::new();
    for at in 0..tidy.len() {
        conjunctions(tidy, table, at, &mut findings);
    }
    for output in tidy.all_lits() {
        three_inputs(tidy, table, output, &mut findings);
    }
    findings
}

/// `output or not a or not b ...` with `not output or a`, `not output or b`, ...
fn conjunctions(tidy: &Tidy, table: &Table, at: usize, findings: &mut Vec<Finding>) {
    let clause = tidy.get(at);
    if clause.len() < 3 {
        return;
    }
    for &output in clause {
        // Each input needs a clause of its own, so few clauses with the negation settle it.
        if tidy.with(!output).len() < clause.len() - 1 {
            continue;
        }
        let others = || clause.iter().copied().filter(|&lit| lit != output);
        let shown: Option<Vec<u32>> = others().map(|lit| table.pair(!output, !lit)).collect();
        if let Some(shown) = shown {
            let clauses = shown.into_iter().chain([at as u32]).map(|at| tidy.origin(at as usize)).collect();
            let inputs = others().map(|lit| !lit).collect();
            findings.push(Finding::new(Fact::And { output, inputs }, clauses));
        }
    }
}

/// If-then-else and majority with this output.
fn three_inputs(tidy: &Tidy, table: &Table, output: BitLit, findings: &mut Vec<Finding>) {
    let rests: Vec<[BitLit; 2]> =
        tidy.with(!output).iter().filter_map(|&at| rest(tidy.get(at as usize), !output)).collect();
    if rests.len() * rests.len() > MAX_PAIRS {
        return;
    }
    for (at, &one) in rests.iter().enumerate() {
        for &other in &rests[at + 1..] {
            // An if-then-else is its own dual, so it is told once, with the output that is not negated.
            if !output.is_negated() {
                findings.extend(choice(tidy, table, output, one, other));
                findings.extend(majority(tidy, table, output, one, other));
            }
        }
    }
}

/// The other two literals of a ternary clause.
fn rest(clause: &[BitLit], lit: BitLit) -> Option<[BitLit; 2]> {
    match *clause {
        [a, b, c] if a == lit => Some([b, c]),
        [a, b, c] if b == lit => Some([a, c]),
        [a, b, c] if c == lit => Some([a, b]),
        _ => None,
    }
}

fn origins<const N: usize>(tidy: &Tidy, clauses: [Option<u32>; N]) -> Option<Vec<u32>> {
    clauses.into_iter().map(|clause| clause.map(|at| tidy.origin(at as usize))).collect()
}

/// `output -> (not c or yes)`, `output -> (c or no)`, and the same for the negations.
fn choice(tidy: &Tidy, table: &Table, output: BitLit, one: [BitLit; 2], other: [BitLit; 2]) -> Option<Finding> {
    for (c, yes) in [(one[0], one[1]), (one[1], one[0])] {
        for (d, no) in [(other[0], other[1]), (other[1], other[0])] {
            if c != !d || yes.bit() == no.bit() {
                continue;
            }
            let condition = !c;
            let clauses = origins(
                tidy,
                [
                    table.triple(!output, !condition, yes),
                    table.triple(!output, condition, no),
                    table.triple(output, !condition, !yes),
                    table.triple(output, condition, !no),
                ],
            )?;
            // The condition that is not negated names the gate.
            let (condition, yes, no) =
                if condition.is_negated() { (!condition, no, yes) } else { (condition, yes, no) };
            return Some(Finding::new(Fact::Choose { output, condition, yes, no }, clauses));
        }
    }
    None
}

/// `output -> (a or b)`, `output -> (a or c)`, `output -> (b or c)`, and the same for the negations.
fn majority(tidy: &Tidy, table: &Table, output: BitLit, one: [BitLit; 2], other: [BitLit; 2]) -> Option<Finding> {
    let a = one.into_iter().find(|lit| other.contains(lit))?;
    let b = if one[0] == a { one[1] } else { one[0] };
    let c = if other[0] == a { other[1] } else { other[0] };
    // Of the three pairs of clauses that show it, the one around the smallest input tells it.
    if a > b || a > c || b.bit() == c.bit() {
        return None;
    }
    let clauses = origins(
        tidy,
        [
            table.triple(!output, a, b),
            table.triple(!output, a, c),
            table.triple(!output, b, c),
            table.triple(output, !a, !b),
            table.triple(output, !a, !c),
            table.triple(output, !b, !c),
        ],
    )?;
    Some(Finding::new(Fact::Majority { output, inputs: [a, b, c] }, clauses))
}
