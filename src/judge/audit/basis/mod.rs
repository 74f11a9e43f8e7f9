//! Circuits whose gates keep basis states, up to phases: every input on bit rows, or a stated sample.

mod exhaustive;
mod findings;
mod kernel;
mod sample;
mod smallest;

use self::findings::Case;
use self::kernel::Program;
use super::oracle::{self, Roles};
use super::{How, Options, Verdict};
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
    let findings = sample::try_sample(case, program, &sample, budget);
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
    verdict
}
