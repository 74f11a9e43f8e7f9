//! The audit of an amplitude estimation: a register `count` controls iterations, and is transformed and measured.
//!
//! With Y = 2^t values of `count`, after y iterations each marked string has the amplitude sin((2y+1) theta) / sqrt(M) and each
//! other one cos((2y+1) theta) / sqrt(N-M); the inverse Fourier transform over y gives what every value c of `counted` and
//! every string must have at the end. The file is followed gate by gate from |0...0>, and each amplitude is compared, up
//! to one global phase. Which qubit gives which digit is read off the measurements.
//!
//! # References
//! - G. Brassard, P. Hoyer, M. Mosca, A. Tapp: _Quantum amplitude amplification and estimation_, 2002, algorithm Est_Amp.

use std::f64::consts::PI;

use super::machine::Machine;
use super::profile::Profile;
use super::{End, Outcome, Readout, SearchVerdict, follow_gate, open};
use crate::budget::Budget;
use crate::circuit::{Circuit, QubitId};
use crate::judge::audit::state::amplitude::Complex;

/// The most digits: the amplitudes that must be are a sum over all pairs of values.
const MOST_DIGITS: usize = 12;

/// Follows an estimation.
pub(super) fn audit_counting(
    circuit: &Circuit,
    search: &[QubitId],
    profile: &Profile,
    work_limit: u64,
    budget: &Budget,
) -> SearchVerdict {
    let mut verdict = open();
    if let Err(end) = follow(circuit, search, profile, work_limit, budget, &mut verdict) {
        end.tell(&mut verdict);
    }
    verdict
}

fn follow(
    circuit: &Circuit,
    search: &[QubitId],
    profile: &Profile,
    work_limit: u64,
    budget: &Budget,
    verdict: &mut SearchVerdict,
) -> Result<(), End> {
    let Readout { tail, digits } = Readout::counted(circuit)?;
    if digits.len() > MOST_DIGITS {
        return Err(End::Undecided(format!("more than {MOST_DIGITS} digits are not followed")));
    }
    let mut machine = Machine::sparse(circuit, search);
    for block in circuit.blocks() {
        let end = (block.gates.end as usize).min(tail);
        let gates = circuit.gates().get(block.gates.start as usize..end).unwrap_or(&[]);
        for turn in 0..block.repeat {
            if machine.updates() > work_limit {
                let turns = block.repeat;
                return Err(End::Undecided(format!(
                    "{turn} of {turns} turns of a loop were followed within the work limit"
                )));
            }
            gates.iter().enumerate().try_for_each(|(at, gate)| follow_gate(circuit, &mut machine, budget, at, gate))?;
        }
    }
    verdict.iterations = (1 << digits.len()) - 1;
    verdict.iterations_checked = verdict.iterations;
    compare(&machine, search, &digits, profile, verdict)
}

/// The amplitude of a marked string and of another one for every value of `counted`.
fn wanted(profile: &Profile, digits: usize) -> Vec<[Complex; 2]> {
    let values = 1u64 << digits;
    let of_value = |value: u64| {
        let mut sums = [Complex { re: 0.0, im: 0.0 }; 2];
        for y in 0..values {
            let (marked, other) = profile.amplitudes(y);
            let (sin, cos) = (-2.0 * PI * (value * y % values) as f64 / values as f64).sin_cos();
            for (sum, size) in sums.iter_mut().zip([other, marked]) {
                *sum = sum.plus(Complex { re: cos, im: sin }.scaled(size / values as f64));
            }
        }
        sums
    };
    (0..values).map(of_value).collect()
}

fn compare(
    machine: &Machine,
    search: &[QubitId],
    digits: &[QubitId],
    profile: &Profile,
    verdict: &mut SearchVerdict,
) -> Result<(), End> {
    let wanted = wanted(profile, digits.len());
    let state = machine.state().expect("a sparse machine");
    let number = |qubits: &[QubitId], is_one: &dyn Fn(QubitId) -> bool| -> usize {
        qubits.iter().enumerate().map(|(at, &qubit)| usize::from(is_one(qubit)) << at).sum()
    };
    let tolerance = machine.tolerance();
    let mut found = Vec::with_capacity(state.len());
    let mut there = vec![[0u64; 2]; wanted.len()];
    let mut overlap = Complex { re: 0.0, im: 0.0 };
    for entry in state.entries(0).filter(|entry| entry.amplitude.norm() > tolerance * tolerance) {
        let is_one = |qubit: QubitId| entry.qubit(qubit);
        let (value, count) = (number(search, &is_one), number(digits, &is_one));
        let ones: u32 = entry.row.iter().map(|word| word.count_ones()).sum();
        if ones != value.count_ones() + count.count_ones() {
            return Err(End::Differs(format!(
                "a qubit outside `search` and the digits is 1 at the end where `search` is {value}"
            )));
        }
        if !profile.is_held(value) {
            return Err(End::Differs(format!(
                "`search` can be {value} at the end, which the start state does not hold"
            )));
        }
        let must = wanted[count][usize::from(profile.is_marked(value))];
        there[count][usize::from(profile.is_marked(value))] += 1;
        overlap = overlap.plus(entry.amplitude.times(Complex { re: must.re, im: -must.im }));
        found.push((value, count, entry.amplitude));
    }
    let size = overlap.norm().sqrt();
    let phase = if size > 0.5 { overlap.scaled(1.0 / size) } else { Complex { re: 1.0, im: 0.0 } };
    // What is not there is as far off as it should be large.
    let sizes = [profile.others(), profile.marked()];
    let is_missing = |count: usize, class: usize| there[count][class] < sizes[class];
    let missing = wanted.iter().enumerate().flat_map(|(count, of_count)| {
        let classes = of_count.iter().enumerate().filter(move |&(class, _)| is_missing(count, class));
        classes.map(|(_, must)| must.norm().sqrt()).collect::<Vec<_>>()
    });
    let mut worst = missing.fold(0.0, f64::max);
    for &(value, count, amplitude) in &found {
        let must = wanted[count][usize::from(profile.is_marked(value))].times(phase);
        worst = worst.max(amplitude.minus(must).norm().sqrt());
        verdict.success += if profile.is_marked(value) { amplitude.norm() } else { 0.0 };
    }
    verdict.deviation = worst;
    if worst > tolerance {
        return Err(End::Differs(format!(
            "the state before the measurement is not that of an estimation with {} digits: it is off by {worst:.3e}",
            digits.len()
        )));
    }
    verdict.outcome = Outcome::Equal;
    verdict
        .notes
        .push(format!("an estimation with {} digits; every amplitude before the measurement is right", digits.len()));
    verdict.notes.extend(machine.notes());
    Ok(())
}
