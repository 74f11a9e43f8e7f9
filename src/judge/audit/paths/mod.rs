//! Circuits with Hadamard gates, measurements and corrections, exactly and for all inputs and outcomes at once.
//!
//! Input: a circuit and what its qubits are for. Output: the function that it marks, with what must be 0 for that
//! ([`Read`]), or why the reading does not close ([`Open`]), which says nothing about the circuit.
//!
//! The operator of a circuit is a sum over paths: each Hadamard gate opens a variable that takes both values, and each
//! path has a phase that is a polynomial over the inputs and these variables, with coefficients modulo 8 in multiples of
//! pi/4 (C. Dawson, A. Hines, D. Mortimer, H. Haselgrove, M. Nielsen, T. Osborne, "Quantum computing and polynomial
//! equations over the finite field Z_2", 2005, from memory). The sums are closed one by one as the gates are read
//! (`eliminate`), so an AND and its undoing stay small wherever they stand. Outcomes of measurements are symbols.
//! A measurement that halves every path gives the factor 1/sqrt(2) for either outcome; so once no sum is left, the size
//! of the factor of a string of outcomes does not depend on the input.
//!
//! What was read is written as a circuit that keeps basis states (`plain`), and judged as one.

mod eliminate;
mod end;
mod plain;
mod polynomial;
mod reader;
mod rules;
mod sign;
mod space;

pub(super) use self::end::{Functions, Read};
pub(super) use self::plain::plain_circuit;
pub(super) use self::reader::Open;

use self::reader::Reader;
use super::basis;
use super::oracle::{self, Roles};
use super::superposition;
use super::{AuditError, Options, Outcome, Verdict};
use crate::budget::Budget;
use crate::circuit::{Circuit, QubitId};
use crate::places::Places;
use crate::problem::Problem;

/// Reads a circuit that marks by the sign, by this angle, or by flipping `mark`.
pub(super) fn read(circuit: &Circuit, roles: &Roles, angle: Option<f64>, budget: &Budget) -> Result<Read, Open> {
    let inputs: Vec<_> = roles.search.iter().chain(&roles.mark).copied().collect();
    let mut reader = Reader::new(circuit, &inputs);
    reader.follow(budget)?;
    end::end(reader, roles, angle)
}

/// Reads two circuits with the same inputs; what must be 0 for them to be the same operator.
pub(super) fn read_both(
    good: &Circuit,
    circuit: &Circuit,
    pairs: &[(QubitId, QubitId)],
    budget: &Budget,
) -> Result<Read, Open> {
    let (first, second): (Vec<QubitId>, Vec<QubitId>) = pairs.iter().copied().unzip();
    let mut reader = Reader::new(good, &first);
    reader.follow(budget)?;
    let ours = reader.begin_again(circuit, &second)?;
    reader.follow(budget)?;
    end::difference(reader, &ours, pairs)
}

/// Judges a circuit against a problem; or says why the reading does not close.
pub(super) fn audit_paths(
    problem: &Problem,
    places: &Places,
    circuit: &Circuit,
    roles: &Roles,
    options: &Options,
    budget: &Budget,
) -> Result<Result<Verdict, String>, AuditError> {
    let read = match read(circuit, roles, options.angle, budget) {
        Ok(read) => read,
        Err(open) => return Ok(Err(open.in_words(circuit))),
    };
    if options.strict_phase && read.global.is_none() {
        return Ok(Err("the global phase depends on outcomes, or is no multiple of pi/4".to_owned()));
    }
    let is_sign = options.angle.is_none();
    let plain = plain_circuit(&read, roles.search.len(), roles.mark.is_some());
    let plain_roles = oracle::roles(problem, places, &plain)?;
    // What marks the complement by another angle than pi is no oracle.
    let judged = Options { strict_phase: options.strict_phase || !is_sign, ..options.clone() };
    let mut verdict = basis::audit_basis(problem, places, &plain, &plain_roles, &judged, budget);
    if verdict.outcome == Outcome::Differs {
        let Some(confirmed) = confirm(problem, places, circuit, &verdict, options, budget)? else {
            return Ok(Err("an input that showed a difference did not show it when it was run".to_owned()));
        };
        verdict.witness = confirmed.witness;
        verdict.work_clean = confirmed.work_clean;
    }
    let outcomes = match read.outcomes {
        0 => String::new(),
        1 => ", for both outcomes of its measurement".to_owned(),
        count => format!(", for all strings of its {count} free measurement outcomes"),
    };
    verdict
        .notes
        .push(format!("the circuit was read as a sum over paths, {} variables summed over{outcomes}", read.paths));
    Ok(Ok(verdict))
}

/// Runs the input of a witness in superposition with others; nothing where it shows no difference.
fn confirm(
    problem: &Problem,
    places: &Places,
    circuit: &Circuit,
    verdict: &Verdict,
    options: &Options,
    budget: &Budget,
) -> Result<Option<Verdict>, AuditError> {
    let Some(witness) = &verdict.witness else { return Ok(None) };
    let run = superposition::audit_near(problem, places, circuit, &witness.bits, options, budget);
    match run {
        Ok(run) if run.outcome == Outcome::Differs => Ok(Some(run)),
        Ok(_) => Ok(None),
        Err(error) => Err(error),
    }
}

impl Open {
    /// For people.
    pub(super) fn in_words(&self, circuit: &Circuit) -> String {
        let gate = |at: usize| superposition::run::in_words(circuit, &circuit.gates()[at]);
        let name = |at: usize| circuit.qubit_name(circuit.gates()[at].target());
        match *self {
            Self::Gate(at) => format!("gate {at} `{}` is not read as a sum over paths", gate(at)),
            Self::Outcome(at) => format!("the outcome of {} at gate {at} is not one free bit", name(at)),
            Self::Qubit(qubit) => {
                format!("the sums over paths do not show that {} is right", circuit.qubit_name(qubit))
            }
            Self::Sums(left) => format!("{left} sums over paths are left"),
            Self::Phase => "the sums over paths do not show that the phase is one of a marked input".to_owned(),
            Self::Limit => "the sums over paths ran into their limit or the budget".to_owned(),
        }
    }
}
