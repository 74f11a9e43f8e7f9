//! Proofs that a fault does no harm, by another way than the audit that did not catch it.
//!
//! The audit holds a circuit against the problem. Where the changed gates alone are the same operator, nothing more is
//! asked (`local`). Else the changed circuit is held against the good one: in superposition, over all strings of
//! measurement outcomes where they are few, or both as sums over paths, which covers all strings. A changed
//! problem, or a changed register map, is held against the good one by the reference evaluator on every input; a
//! changed search is followed from its first gate to its last measurement, and so is the good one.

use crate::budget::Budget;
use crate::circuit::{Circuit, FOUND, Gate, Op};
use crate::id::Id;
use crate::judge::audit::compare::{CompareOptions, Shared, compare, compare_by_paths, compare_superposed};
use crate::judge::audit::oracle::problem_bits;
use crate::judge::audit::state::State;
use crate::judge::audit::state::amplitude::Complex;
use crate::judge::audit::{AuditError, Outcome};
use crate::places::Places;
use crate::problem::{Bits, Problem};
use crate::random::SplitMix64;

/// What a proof found.
#[derive(Clone, PartialEq, Eq, Debug)]
pub enum Proof {
    /// The fault does no harm.
    Harmless,
    /// It does; why, in words.
    Harmful(String),
    /// Not decided; why, in words.
    Open(String),
}

/// Up to so many strings of measurement outcomes are followed.
const STRINGS: usize = 1 << 12;
/// Every input is tried up to so many bits.
const ALL_BITS: usize = 20;
/// A comparison in superposition is tried up to so many inputs.
const SUPERPOSED_BITS: usize = 12;
/// A whole search is followed up to so many gates times amplitudes.
const SEARCH_WORK: u64 = 1 << 32;
/// The largest distance of two amplitudes that count as the same.
const TOLERANCE: f64 = 1e-9;

/// Whether two oracle circuits apply the same operator, up to a global phase.
pub fn same_operator(good: &Circuit, changed: &Circuit, budget: &Budget) -> Result<Proof, AuditError> {
    let options = CompareOptions { all_strings: STRINGS, ..CompareOptions::default() };
    let shared = Shared::of(good, changed)?;
    let mut verdict = match shared.first.len() <= SUPERPOSED_BITS {
        true => compare_superposed(good, changed, &shared, &options, budget)?,
        false => compare(good, changed, &options, budget)?,
    };
    // Where not every string of outcomes was followed, the sums over paths may cover them all.
    if verdict.outcome != Outcome::Differs && !verdict.notes.is_empty() {
        let exact = compare_by_paths(good, changed, &shared, &options, budget)?;
        verdict = exact.ok().filter(|exact| exact.outcome != Outcome::Undecided).unwrap_or(verdict);
    }
    Ok(match verdict.outcome {
        Outcome::Equal => Proof::Harmless,
        Outcome::Undecided => Proof::Open(verdict.notes.join("; ")),
        Outcome::Differs => {
            let witness = verdict.witness.map_or_else(String::new, |witness| {
                format!("on input {} it gives {}, the good one {}", witness.bits, witness.got, witness.expected)
            });
            Proof::Harmful(witness)
        }
    })
}

/// Whether two readings of the search register, by problem and places, mark the same values.
pub fn same_meaning(good: (&Problem, &Places), changed: (&Problem, &Places), budget: &Budget) -> Proof {
    let bits = good.1.search_len();
    if bits > ALL_BITS {
        return Proof::Open(format!("more than {ALL_BITS} bits"));
    }
    for number in 0..1u128 << bits {
        if number % 1024 == 0 && budget.spent() {
            return Proof::Open("the budget ran out".to_owned());
        }
        let value = Bits::from_number(number, bits);
        let holds = |(problem, places): (&Problem, &Places)| problem.holds(&problem_bits(places, &value));
        if holds(good) != holds(changed) {
            return Proof::Harmful(format!("on input {value} one holds and the other does not"));
        }
    }
    Proof::Harmless
}

/// Whether two whole searches end in the same state, up to a global phase, and measure the same qubits.
pub fn same_search(good: &Circuit, changed: &Circuit, budget: &Budget) -> Proof {
    let finals = |circuit: &Circuit| -> Vec<_> {
        let found = circuit.measured.iter().find(|register| register.name == FOUND);
        let from = found.map_or(0, |register| register.start as usize);
        let is_final = |gate: &&Gate| gate.measured().is_some_and(|bit| bit.index() >= from);
        circuit.gates().iter().filter(is_final).map(|gate| (gate.measured(), gate.target())).collect()
    };
    if finals(good) != finals(changed) {
        return Proof::Harmful("other qubits are measured".to_owned());
    }
    let (a, b) = match (end_state(good, budget), end_state(changed, budget)) {
        (Ok(a), Ok(b)) => (a, b),
        (Err(why), _) | (_, Err(why)) => return Proof::Open(why),
    };
    // The overlap of two states of norm 1 has size 1 where they are the same up to a phase.
    let (mut re, mut im, mut at) = (0.0, 0.0, 0);
    for (state, x) in &a {
        while at < b.len() && b[at].0 < *state {
            at += 1;
        }
        if at < b.len() && b[at].0 == *state {
            let y = b[at].1;
            re += x.re * y.re + x.im * y.im;
            im += x.re * y.im - x.im * y.re;
        }
    }
    let size = (re * re + im * im).sqrt();
    match (size - 1.0).abs() < TOLERANCE {
        true => Proof::Harmless,
        false => Proof::Harmful(format!("the two states before the measurement overlap by {size:.9} only")),
    }
}

/// The state before the final measurement, of norm 1, in the order of its basis states.
fn end_state(circuit: &Circuit, budget: &Budget) -> Result<Vec<(Bits, Complex)>, String> {
    let qubits = circuit.qubit_count();
    let mut state: State<Complex> = State::new(qubits, &[Bits::zeros(qubits)], 1 << 22);
    let found = circuit.measured.iter().find(|register| register.name == FOUND);
    let from = found.map_or(usize::MAX, |register| register.start as usize);
    let (mut outcomes, mut random, mut work) = (vec![false; circuit.measured_count()], SplitMix64::new(1), 0u64);
    for block in circuit.blocks() {
        for _ in 0..block.repeat {
            for gate in &circuit.gates()[block.gates.start as usize..block.gates.end as usize] {
                work += state.len() as u64;
                if work > SEARCH_WORK || budget.spent() {
                    return Err("the search is too long to be followed".to_owned());
                }
                if gate.condition().is_some_and(|condition| outcomes[condition.bit().index()] != condition.value()) {
                    continue;
                }
                let measured = gate.measured().map(Id::index);
                if measured.is_some_and(|bit| bit >= from) {
                    continue;
                }
                match gate.op() {
                    Op::Measure | Op::Reset => {
                        let target = gate.target();
                        let (zero, one) = (state.occurs(target, false), state.occurs(target, true));
                        let outcome = if zero && one { random.coin() } else { one };
                        if zero && one {
                            state.project(target, outcome);
                        }
                        match measured {
                            Some(bit) => outcomes[bit] = outcome,
                            None if outcome => state.flip_all(target),
                            None => {}
                        }
                    }
                    _ => state.apply(circuit, gate).map_err(|stop| format!("a gate is not followed: {stop:?}"))?,
                }
            }
        }
    }
    let entry = |entry: crate::judge::audit::state::Entry<'_, Complex>| {
        let value: Bits = (0..qubits).map(|qubit| entry.qubit(Id::new(qubit))).collect();
        (value, entry.amplitude)
    };
    let mut entries: Vec<(Bits, Complex)> = state.entries(0).map(entry).collect();
    entries.sort_by(|a, b| a.0.cmp(&b.0));
    let norm = entries.iter().map(|(_, amplitude)| amplitude.norm()).sum::<f64>().sqrt();
    entries.iter_mut().for_each(|(_, amplitude)| *amplitude = amplitude.scaled(1.0 / norm));
    Ok(entries)
}
