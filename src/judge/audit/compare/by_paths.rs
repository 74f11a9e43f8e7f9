//! Circuit against circuit as sums over paths: exactly, for all inputs and all measurement outcomes.
//!
//! Both are read over the same inputs, with their phases taken against each other. What must be 0 for them to be the same
//! is then judged like the ancillas of an oracle that marks nothing.

use super::superposed::compare_on;
use super::{CompareOptions, Shared};
use crate::budget::Budget;
use crate::circuit::Circuit;
use crate::judge::audit::basis::audit_basis;
use crate::judge::audit::{AuditError, Options, Outcome, Verdict, oracle, paths};
use crate::places::Places;
use crate::problem::{Bits, Problem};
use crate::random::SplitMix64;

/// So many drawn inputs stand beside one that is to be confirmed.
const BESIDE: usize = 32;

/// Compares two circuits; or says why the reading does not close.
pub(in crate::judge::audit) fn compare_by_paths(
    good: &Circuit,
    circuit: &Circuit,
    shared: &Shared,
    options: &CompareOptions,
    budget: &Budget,
) -> Result<Result<Verdict, String>, AuditError> {
    let pairs: Vec<_> = shared.first.iter().copied().zip(shared.second.iter().copied()).collect();
    let read = match paths::read_both(good, circuit, &pairs, budget) {
        Ok(read) => read,
        Err(open) => return Ok(Err(open.in_words(circuit))),
    };
    if options.strict_phase && read.global() != Some(0) {
        return Ok(Err("the global phases are not shown to be the same".to_owned()));
    }
    let nothing = marks_nothing(pairs.len());
    let places = Places::as_given(&nothing);
    let plain = paths::plain_circuit(&read.without_global(), pairs.len(), false);
    let roles = oracle::roles(&nothing, &places, &plain)?;
    let judged = Options { seed: options.seed, sample: options.sample, strict_phase: true, ..Options::default() };
    let mut verdict = audit_basis(&nothing, &places, &plain, &roles, &judged, budget);
    if verdict.outcome == Outcome::Differs {
        let witness = verdict.witness.as_ref().expect("a difference has a witness");
        let mut random = SplitMix64::new(options.seed);
        let mut inputs = vec![witness.bits.clone()];
        inputs.extend((0..BESIDE).map(|_| (0..pairs.len()).map(|_| random.coin()).collect::<Bits>()));
        inputs.dedup();
        let run = compare_on(good, circuit, shared, options, (&inputs, false), budget)?;
        if run.outcome != Outcome::Differs {
            return Ok(Err("an input that showed a difference did not show it when it was run".to_owned()));
        }
        (verdict.witness, verdict.work_clean) = (run.witness, run.work_clean);
    }
    if let (Outcome::Equal, Some(eighths @ 1..)) = (verdict.outcome, read.global()) {
        verdict.notes.push(format!("the global phases differ by e^({eighths} i pi/4)"));
    }
    verdict
        .notes
        .push("both circuits were read as sums over paths, for all strings of measurement outcomes".to_owned());
    Ok(Ok(verdict))
}

/// A problem over so many bits that has no solution.
fn marks_nothing(bits: usize) -> Problem {
    let mut problem = Problem::new();
    problem.add_numbered_vars(bits);
    problem.clauses.end_clause();
    problem
}
