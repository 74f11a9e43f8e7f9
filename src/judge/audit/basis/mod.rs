//! Circuits whose gates keep basis states, up to phases.
//!
//! Three ways, each complete, the cheapest first: by structure, the circuit read symbolically and its function found to be
//! that of the problem, node for node; by nodes, the circuit read symbolically and the distinct nodes of its function
//! evaluated on every input; by gates, every gate run on every input. Where all inputs are too many, a stated sample is
//! run gate by gate, and what shows no difference there is proven (`super::proof`).

mod by_nodes;
mod exhaustive;
pub(in crate::judge::audit) mod findings;
pub(in crate::judge::audit) mod form;
mod kernel;
pub(in crate::judge::audit) mod normal;
mod sample;
mod smallest;
mod symbols;
mod turns;

use std::sync::Arc;

use self::by_nodes::Compared;
use self::findings::{Case, Findings, global_note};
use self::kernel::Program;
use self::normal::Meeting;
use self::symbols::{Function, Open, Products};
use super::oracle::{self, Roles};
use super::proof::{self, Proved};
use super::{How, Options, Outcome, Phases, Verdict, Way};
use crate::budget::Budget;
use crate::circuit::Circuit;
use crate::judge::reading;
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
    let case = Case { problem, places, circuit, roles, options, first: &first };
    if options.way == Way::Gates {
        return by_gates(&case, budget);
    }
    let read = |products| symbols::read(circuit, places, roles, products, budget);
    let kept = read(Products::Kept);
    if let Some(verdict) = by_structure(&case, &kept) {
        return verdict;
    }
    let multiplied_out = || match kept {
        Err(Open::Limit) => Err(Open::Limit),
        _ => read(Products::MultipliedOut),
    };
    // Not wanted by nodes alone, where the plain reading closes: it has fewer of them.
    let other = (options.way == Way::Best || kept.is_err()).then(multiplied_out);
    if let Some(verdict) = other.as_ref().and_then(|function| by_structure(&case, function)) {
        return verdict;
    }
    match (kept, other) {
        (Ok(function), _) | (Err(_), Some(Ok(function))) => by_nodes(&case, &function, budget),
        (Err(open), _) => {
            let mut verdict = by_gates(&case, budget);
            verdict.notes.push(why_open(&case, open));
            verdict
        }
    }
}

/// See [`super::distinct_nodes`].
pub(super) fn distinct_nodes(places: &Places, circuit: &Circuit, roles: &Roles) -> Option<usize> {
    let read = |products| symbols::read(circuit, places, roles, products, &Budget::unlimited());
    let function = read(Products::Kept).or_else(|_| read(Products::MultipliedOut)).ok()?;
    let reading = normal::for_evaluation(&function.graph, function.root, places.search_len());
    let is_needed = reading.graph.needed(reading.conjuncts);
    Some((0..is_needed.len()).filter(|&node| is_needed[node] && !reading.graph.operands(node).is_empty()).count())
}

fn why_open(case: &Case, open: Open) -> String {
    let what = match open {
        Open::Qubit(qubit) => format!("the structure does not show that {} is right", case.circuit.qubit_name(qubit)),
        Open::Phase => "the structure does not show that the phase is a sign of the mark".to_owned(),
        Open::Limit => "the symbolic reading ran into its limit or the budget".to_owned(),
    };
    format!("{what}, so the gates were run one by one")
}

/// The verdict, where circuit and problem are the same function node for node and that is asked for.
fn by_structure(case: &Case, function: &Result<Function, Open>) -> Option<Verdict> {
    let function = function.as_ref().ok().filter(|_| case.options.way == Way::Best)?;
    let global = global_by_structure(case, function)?;
    let mut findings = Findings::default();
    findings.agree(case.roles, global, 0, 1);
    let mut verdict = findings.verdict(case, How::Symbolic, true, input_of(case));
    let all = u32::try_from(case.places.search_len()).ok().and_then(|bits| 1u128.checked_shl(bits));
    verdict.inputs = all.unwrap_or(u128::MAX);
    Some(verdict)
}

/// Judges a circuit of which only the function that it marks is left to be compared, on every input.
fn by_nodes(case: &Case, function: &Function, budget: &Budget) -> Verdict {
    let bits = case.places.search_len();
    let compared = (bits <= MAX_EXHAUSTIVE_BITS as usize).then(|| Compared::new(case, function));
    let is_affordable = |work| bits <= case.options.exhaustive_bits as usize || work <= case.options.exhaustive_work;
    let Some(compared) = compared.filter(|compared| is_affordable(compared.work())) else {
        let why = format!(
            "more than {} qubits are searched, and the structure does not decide",
            case.options.exhaustive_bits.min(MAX_EXHAUSTIVE_BITS)
        );
        return by_function_sample(case, why, budget);
    };
    let (findings, is_complete) = compared.exhaust(case, budget);
    if is_complete || findings.differ(case.options) {
        let mut verdict = findings.verdict(case, How::Exhaustive, is_complete, input_of(case));
        verdict.notes.push("the circuit was read symbolically, and what it marks evaluated on every input".to_owned());
        return verdict;
    }
    by_function_sample(case, out_of_budget(case, &findings), budget)
}

/// Tries a sample where the symbolic reading has shown everything but the function that is marked.
fn by_function_sample(case: &Case, why: String, budget: &Budget) -> Verdict {
    let mut verdict = by_sample(case, &Program::new(case.circuit, case.first), why, budget);
    verdict.notes.push("for every input the structure shows that all qubits but what is marked are right".to_owned());
    verdict
}

/// The global phase with which circuit and problem are the same function, where their structures show that they are.
fn global_by_structure(case: &Case, function: &Function) -> Option<u8> {
    let mut meeting = Meeting::over(case.problem.bit_count());
    let predicate = meeting.problem(case.problem, &reading::read(case.problem));
    if meeting.function(&function.graph, function.root) == predicate {
        return Some(function.global);
    }
    let is_complement = case.roles.mark.is_none() && meeting.function(&function.graph, !function.root) == predicate;
    is_complement.then_some((function.global + 4) % 8)
}

/// Judges a circuit by running every gate on every input.
fn by_gates(case: &Case, budget: &Budget) -> Verdict {
    let program = Program::new(case.circuit, case.first);
    let most = case.options.exhaustive_bits.min(MAX_EXHAUSTIVE_BITS);
    if case.places.search_len() > most as usize {
        return by_sample(case, &program, format!("more than {most} qubits are searched"), budget);
    }
    let (findings, is_complete) = exhaustive::exhaust(case, &program, budget);
    if is_complete || findings.differ(case.options) {
        return findings.verdict(case, How::Exhaustive, is_complete, input_of(case));
    }
    by_sample(case, &program, out_of_budget(case, &findings), budget)
}

/// The value of the search register of an input by its number.
fn input_of(case: &Case) -> impl Fn(u64) -> Bits {
    let bits = case.places.search_len();
    move |number| Bits::from_number(number.into(), bits)
}

fn out_of_budget(case: &Case, findings: &Findings) -> String {
    let bits = case.places.search_len();
    format!("the budget ran out after the first {} of 2^{bits} inputs, which show no difference", findings.inputs)
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
