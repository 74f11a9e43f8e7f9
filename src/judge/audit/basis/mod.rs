//! Circuits whose gates keep basis states, up to phases: every input on bit rows, or a stated sample.

mod exhaustive;
pub(in crate::judge::audit) mod findings;
mod kernel;
mod sample;

use std::sync::Arc;

use self::findings::{Case, global_note};
use self::kernel::Program;
use super::oracle::{self, Roles};
use super::proof::{self, Proved};
use super::{How, Options, Outcome, Phases, Verdict};
use crate::budget::Budget;
use crate::circuit::Circuit;
use crate::places::Places;
use crate::problem::{Bits, Problem};

/// Judges a circuit whose gates keep basis states.
pub(super) fn audit_basis(
    problem: &Problem,
    places: &Places,
    circuit: &Circuit,
    roles: &Roles,
    options: &Options,
    budget: &Budget,
) -> Verdict {
    let first = oracle::trace(circuit, roles, &Bits::zeros(places.search_len()), false);
    let program = Program::new(circuit, &first);
    let case = Case { problem, places, circuit, roles, options, first: &first };
    let bits = places.search_len();
    if bits > options.exhaustive_bits.min(MAX_EXHAUSTIVE_BITS) as usize {
        let why = format!("more than {} qubits are searched", options.exhaustive_bits.min(MAX_EXHAUSTIVE_BITS));
        return by_sample(&case, &program, why, budget);
    }
    let (findings, is_complete) = exhaustive::exhaust(&case, &program, budget);
    if is_complete || findings.differ(options) {
        let input = |number: u64| Bits::from_number(number.into(), bits);
        return findings.verdict(&case, How::Exhaustive, is_complete, input);
    }
    let why =
        format!("the budget ran out after the first {} of 2^{bits} inputs, which show no difference", findings.inputs);
    by_sample(&case, &program, why, budget)
}

/// The most bits for which every input is tried, whatever the options say: beyond, the work is in the years.
const MAX_EXHAUSTIVE_BITS: u32 = 48;

fn by_sample(case: &Case, program: &Program, why: String, budget: &Budget) -> Verdict {
    let sample = sample::draw(case);
    // With a deadline, most of the time is left to the proof.
    let share = budget.time_left().filter(|_| case.options.proof).map(|left| left / 4);
    let sampling = share.map_or_else(|| budget.clone(), |share| budget.clone().within(share));
    let findings = sample::try_sample(case, program, &sample, &sampling);
    let mut verdict = findings.verdict(case, How::Sample, false, |at| sample.inputs[at as usize].clone());
    verdict.notes.push(why);
    let (tried, seed) = (findings.inputs, case.options.seed);
    let drawn = sample.inputs.len() - sample.known - sample.neighbours;
    verdict.notes.push(format!(
        "the sample: {} known solutions, {} of their neighbours, {drawn} drawn with seed {seed}; {tried} were tried",
        sample.known, sample.neighbours
    ));
    if sample.left_out > 0 {
        verdict.notes.push(format!("{} solutions and neighbours are beyond the size of a sample", sample.left_out));
    }
    if verdict.outcome == Outcome::Undecided && case.options.proof && !budget.spent() {
        by_proof(case, &mut verdict, budget);
    }
    verdict
}

/// Decides by proof what a sample left undecided.
fn by_proof(case: &Case, verdict: &mut Verdict, budget: &Budget) {
    match proof::prove(case, budget) {
        Proved::Equal { global, certificate } => {
            let checked = certificate.checked;
            verdict.outcome = Outcome::Equal;
            verdict.how = How::Proof;
            verdict.inputs = 1_u128.checked_shl(case.places.search_len() as u32).unwrap_or(u128::MAX);
            let is_complement = global == 4 && case.roles.mark.is_none();
            verdict.phases = if is_complement { Phases::Complement } else { Phases::Equal };
            verdict.notes = global_note(global).into_iter().collect();
            verdict.notes.push(format!(
                "the proof: {} clauses, {} signals proven equal on the way, {} steps, each followed by the checker of \
                 this program",
                certificate.formula.len(),
                certificate.equivalences,
                checked.additions
            ));
            verdict.certificate = Some(Arc::new(certificate));
        }
        Proved::Differs(witness) => {
            verdict.outcome = Outcome::Differs;
            verdict.how = How::Proof;
            verdict.work_clean = !witness.got.contains("left at 1");
            verdict.notes.push("the input was found by a solver, then run gate by gate".to_owned());
            verdict.witness = Some(witness);
        }
        Proved::Open(why) => verdict.notes.push(format!("a proof was tried: {why}")),
    }
}
