//! Lowering within limits: every budget has its circuit, each is right by the audit, and the costs are those of the
//! gates.

mod budgets;
mod command;
mod conjunction;
mod forms;
mod multi;

use tallymark::budget::Budget;
use tallymark::circuit::{Circuit, Level, Mark};
use tallymark::judge::audit::{Options as AuditOptions, Outcome, Phases, audit};
use tallymark::make::lower::{Limits, Options};
use tallymark::make::network::{Network, build};
use tallymark::places::Places;
use tallymark::problem::Problem;

const MARKS: [Mark; 2] = [Mark::Phase, Mark::Bit];

fn network_of(problem: &Problem) -> Network {
    build(problem, &Places::as_given(problem))
}

fn within(qubits: u64) -> Limits {
    Limits { qubits: Some(qubits), ..Limits::default() }
}

/// The judge finds the circuit equal to the problem, on all inputs, with the sign it should have.
fn check(problem: &Problem, circuit: &Circuit, what: &str) {
    let options = AuditOptions { strict_phase: true, threads: 1, ..AuditOptions::default() };
    let verdict = audit(problem, &Places::as_given(problem), circuit, &options, &Budget::unlimited()).unwrap();
    assert_eq!((verdict.outcome, verdict.phases), (Outcome::Equal, Phases::Equal), "{what}: {verdict:?}");
}

/// Every gate is of the level, and every gate has one region.
fn check_level(circuit: &Circuit, level: Level) {
    assert!(circuit.gates().iter().all(|gate| level.has(circuit, gate)), "a gate is not of level {level}");
    let covered: usize = circuit.regions.iter().map(|region| region.gates.len()).sum();
    assert_eq!(covered, circuit.gates().len(), "every gate has one region");
}

fn options(level: Level, mark: Mark) -> Options {
    Options { level, mark }
}
