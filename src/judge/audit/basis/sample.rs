//! Some inputs: all known solutions, their one-bit neighbours, and drawn ones.
//!
//! A marking circuit that is wrong is most often wrong near a solution: one constraint dropped, one polarity turned. So
//! the sample begins there. What must be marked is decided by the reference evaluator, one input at a time.

use std::collections::HashSet;

use crate::budget::Budget;
use crate::id::Id;
use crate::judge::audit::basis::findings::{Batch, Case, Findings};
use crate::judge::audit::basis::kernel::{Machine, Program};
use crate::judge::audit::oracle::{problem_bits, register_value};
use crate::judge::audit::support;
use crate::judge::rows::lanes::{LANES, Row};
use crate::problem::{BitId, Bits};
use crate::random::SplitMix64;

/// The most memory that the inputs of a sample take, in bits.
const MAX_BITS: usize = 1 << 29;

/// A sample and what it has.
pub(crate) struct Sample {
    /// Values of the search register, each once: known solutions, neighbours, drawn ones.
    pub(crate) inputs: Vec<Bits>,
    /// How many of them are known solutions.
    pub(crate) known: usize,
    /// How many of them are neighbours.
    pub(crate) neighbours: usize,
    /// How many solutions and neighbours there was no room for.
    pub(crate) left_out: usize,
}

/// Draws a sample.
pub(crate) fn draw(case: &Case) -> Sample {
    let bits = case.places.search_len();
    let room = (MAX_BITS / bits.max(64)).max(LANES as usize);
    let mut sampler = Sampler { inputs: Vec::new(), seen: HashSet::new(), room, left_out: 0 };
    let known = || case.options.known.iter().filter(|solution| solution.len() == bits);
    known().for_each(|solution| sampler.add(register_value(case.places, solution)));
    let known_count = sampler.inputs.len();
    for solution in known() {
        if sampler.is_full() {
            sampler.left_out += bits;
            continue;
        }
        for bit in (0..bits).map(BitId::new) {
            let mut neighbour = solution.clone();
            neighbour.set(bit, !solution.get(bit));
            sampler.add(register_value(case.places, &neighbour));
        }
    }
    let neighbours = sampler.inputs.len() - known_count;
    let left_out = sampler.left_out;
    let mut random = SplitMix64::new(case.options.seed);
    for _ in 0..case.options.sample {
        sampler.add((0..bits).map(|_| random.coin()).collect());
    }
    Sample { inputs: sampler.inputs, known: known_count, neighbours, left_out }
}

struct Sampler {
    inputs: Vec<Bits>,
    seen: HashSet<Bits>,
    room: usize,
    left_out: usize,
}

impl Sampler {
    fn is_full(&self) -> bool {
        self.inputs.len() >= self.room
    }

    fn add(&mut self, input: Bits) {
        if self.is_full() {
            self.left_out += 1;
        } else if self.seen.insert(input.clone()) {
            self.inputs.push(input);
        }
    }
}

/// Tries the inputs of a sample in order, at least the first batch, until one differs or the budget is spent.
pub(crate) fn try_sample(case: &Case, program: &Program, sample: &Sample, budget: &Budget) -> Findings {
    let mut machine = Machine::new(program);
    machine.clear();
    let mut findings = Findings::default();
    for inputs in sample.inputs.chunks(LANES as usize) {
        let search = rows_of(inputs, case.places.search_len());
        let mut solutions = Row::ZEROS;
        for (lane, input) in inputs.iter().enumerate() {
            if case.problem.holds(&problem_bits(case.places, input)) {
                solutions.set_lane(lane);
            }
        }
        let support = support::row(&case.places.start, |qubit| search[qubit]);
        let (lanes, first) = (inputs.len() as u64, findings.inputs);
        let batch = Batch { search: &search, solutions, support, lanes, first };
        findings.run(&mut machine, case.roles, &batch);
        budget.report("audit a sample", findings.inputs, Some(sample.inputs.len() as u64));
        if findings.differ(case.options) || budget.spent() {
            break;
        }
    }
    findings
}

/// The rows of the search register for inputs, one lane each.
fn rows_of(inputs: &[Bits], bits: usize) -> Vec<Row> {
    let mut rows = vec![Row::ZEROS; bits];
    for (lane, input) in inputs.iter().enumerate() {
        for (row, value) in rows.iter_mut().zip(input.iter()) {
            if value {
                row.set_lane(lane);
            }
        }
    }
    rows
}
