//! Parities: exclusive ors spelt out as clauses, and adders, which are a parity and a carry over the same inputs.
//!
//! A parity of k bits is 2^(k-1) clauses over the same bits, in which the number of negated literals has the same parity.
//! Each of them excludes one assignment of the wrong parity, so together they are the parity and no less.

use rustc_hash::FxHashMap;

use super::{Fact, Finding, Tidy};
use crate::problem::{BitId, BitLit};

/// The widest parity that is looked for: 2^11 clauses. Wider ones are cut by every encoder.
const MAX_WIDTH: usize = 12;

pub(super) fn find(tidy: &Tidy) -> Vec<Finding> {
    let mut groups: FxHashMap<Vec<BitId>, usize> = FxHashMap::default();
    // For each set of bits: the clauses by whether their number of negated literals is odd, and the signs seen.
    let mut members: Vec<(Vec<BitId>, [Vec<u32>; 2])> = Vec::new();
    for at in 0..tidy.len() {
        let clause = tidy.get(at);
        if !(2..=MAX_WIDTH).contains(&clause.len()) {
            continue;
        }
        let bits: Vec<BitId> = clause.iter().map(|lit| lit.bit()).collect();
        let group = *groups.entry(bits.clone()).or_insert_with(|| {
            members.push((bits, [Vec::new(), Vec::new()]));
            members.len() - 1
        });
        let negated = clause.iter().filter(|lit| lit.is_negated()).count();
        members[group].1[negated % 2].push(at as u32);
    }
    let mut findings = Vec::new();
    for (bits, by_sign) in members {
        for (negated_odd, mut clauses) in by_sign.into_iter().enumerate() {
            if clauses.len() < 1 << (bits.len() - 1) {
                continue;
            }
            clauses.sort_unstable_by_key(|&at| signs(tidy.get(at as usize)));
            clauses.dedup_by_key(|at| signs(tidy.get(*at as usize)));
            if clauses.len() == 1 << (bits.len() - 1) {
                // A clause excludes the assignment in which exactly its negated bits are 1, so that parity is excluded.
                let fact = Fact::Parity { bits: bits.clone(), odd: negated_odd == 0 };
                findings.push(Finding::new(fact, clauses.iter().map(|&at| tidy.origin(at as usize)).collect()));
            }
        }
    }
    findings
}

fn signs(clause: &[BitLit]) -> u32 {
    clause.iter().enumerate().map(|(at, lit)| u32::from(lit.is_negated()) << at).sum()
}

/// Adders among these parities and gates: a majority or a conjunction, and a parity of its inputs and one bit more.
pub(super) fn adders(parities: &[Finding], gates: &[Finding]) -> Vec<Finding> {
    let mut by_inputs: FxHashMap<Vec<BitId>, Vec<usize>> = FxHashMap::default();
    for (at, finding) in parities.iter().enumerate() {
        let Fact::Parity { bits, .. } = &finding.fact else { continue };
        if !(3..=4).contains(&bits.len()) {
            continue;
        }
        for left_out in bits {
            let inputs = bits.iter().copied().filter(|bit| bit != left_out).collect();
            by_inputs.entry(inputs).or_default().push(at);
        }
    }
    let mut findings = Vec::new();
    for gate in gates {
        let (carry, inputs): (BitLit, &[BitLit]) = match &gate.fact {
            Fact::Majority { output, inputs } => (*output, inputs),
            Fact::And { output, inputs } if inputs.len() == 2 => (*output, inputs),
            _ => continue,
        };
        let mut bits: Vec<BitId> = inputs.iter().map(|lit| lit.bit()).collect();
        bits.sort_unstable();
        for &at in by_inputs.get(&bits).into_iter().flatten() {
            let Fact::Parity { bits: all, odd } = &parities[at].fact else { continue };
            let Some(&sum) = all.iter().find(|bit| !bits.contains(bit)) else { continue };
            if sum == carry.bit() {
                continue;
            }
            // sum xor (xor of the input bits) = odd, and each negated input literal turns the parity of the literals.
            let negated = inputs.iter().filter(|lit| lit.is_negated()).count() % 2 == 1;
            let sum = BitLit::new(sum, *odd == negated);
            let clauses = gate.clauses.iter().chain(&parities[at].clauses).copied().collect();
            findings.push(Finding::new(Fact::Adder { sum, carry, inputs: inputs.to_vec() }, clauses));
        }
    }
    findings
}
