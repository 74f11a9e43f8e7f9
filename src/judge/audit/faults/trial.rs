//! The self-test: random single faults in a correct circuit; each must be caught, or proven to do no harm.

use crate::budget::Budget;
use crate::circuit::{Circuit, FOUND};
use crate::judge::audit::faults::proof::{self, Proof};
use crate::judge::audit::faults::{Drawer, Fault, Kind, apply, local};
use crate::judge::audit::{AuditError, Options, Outcome, audit, audit_search};
use crate::judge::restate::restate;
use crate::places::Places;
use crate::problem::Problem;

/// What became of a fault.
#[derive(Clone, PartialEq, Eq, Debug)]
pub enum Found {
    /// The audit said that the circuit differs.
    Caught,
    /// The audit refused to judge the circuit, which no user could overlook; why, in words.
    Refused(String),
    /// Not caught, and proven to do no harm.
    Harmless,
    /// Not caught, and it does harm: the audit failed. How, in words.
    Missed(String),
    /// Not caught, and not known to do no harm. Why, in words.
    Unproven(String),
}

/// One fault and what became of it.
#[derive(Clone, PartialEq, Eq, Debug)]
pub struct Trial {
    /// What kind of fault.
    pub kind: Kind,
    /// The fault.
    pub fault: Fault,
    /// What became of it.
    pub found: Found,
}

/// The trials, in the order in which they were drawn.
#[derive(Clone, PartialEq, Eq, Debug, Default)]
pub struct SelfTest {
    /// The trials.
    pub trials: Vec<Trial>,
    /// Whether as many were made as were asked for.
    pub is_complete: bool,
}

impl SelfTest {
    /// Whether every fault was caught or proven to do no harm.
    pub fn passed(&self) -> bool {
        !self.trials.iter().any(|trial| matches!(trial.found, Found::Missed(_) | Found::Unproven(_)))
    }

    /// How many trials ended so.
    pub fn count(&self, holds: impl Fn(&Found) -> bool) -> usize {
        self.trials.iter().filter(|trial| holds(&trial.found)).count()
    }
}

/// Makes `count` faults in a circuit that the audit found equal, drawn with the seed of the options. Where bits are computed,
/// faults of the problem are those of the problem over the searched bits.
pub fn self_test(
    problem: &Problem,
    places: &Places,
    circuit: &Circuit,
    count: usize,
    options: &Options,
    budget: &Budget,
) -> Result<SelfTest, AuditError> {
    if !places.computed.is_empty() {
        places.check(problem)?;
        let restated = restate(problem, places);
        return self_test(&restated.problem, &restated.places, circuit, count, options, budget);
    }
    let tester = Tester::new(problem, places, circuit, options, budget)?;
    let mut drawer = Drawer::new(problem, places, circuit, options.seed);
    let mut test = SelfTest::default();
    while test.trials.len() < count && !budget.spent() {
        budget.report("self-test", test.trials.len() as u64, Some(count as u64));
        let Some((kind, fault)) = drawer.draw() else { break };
        let found = tester.try_fault(&fault)?;
        if matches!(found, Found::Unproven(_)) && budget.spent() {
            // Not finished, which says nothing about the audit.
            break;
        }
        test.trials.push(Trial { kind, fault, found });
    }
    test.is_complete = test.trials.len() == count;
    Ok(test)
}

/// Tries faults of one circuit.
pub struct Tester<'c> {
    problem: &'c Problem,
    places: &'c Places,
    circuit: &'c Circuit,
    options: &'c Options,
    budget: &'c Budget,
    /// The iterations of a search file.
    iterations: Option<u64>,
}

/// Amplitude updates that the audit of one search with a fault may spend.
const SEARCH_WORK: u64 = 1 << 27;

impl<'c> Tester<'c> {
    /// A tester for a circuit that the audit found equal.
    pub fn new(
        problem: &'c Problem,
        places: &'c Places,
        circuit: &'c Circuit,
        options: &'c Options,
        budget: &'c Budget,
    ) -> Result<Self, AuditError> {
        let is_search = circuit.measured.iter().any(|register| register.name == FOUND);
        let mut tester = Self { problem, places, circuit, options, budget, iterations: None };
        if is_search {
            tester.iterations = Some(audit_search(problem, places, circuit, SEARCH_WORK, budget)?.iterations);
        }
        Ok(tester)
    }

    /// Makes the fault, audits, and looks for a proof where it was not caught.
    pub fn try_fault(&self, fault: &Fault) -> Result<Found, AuditError> {
        let (problem, places) = (apply::to_problem(fault, self.problem), apply::to_places(fault, self.places));
        let circuit = apply::to_circuit(fault, self.circuit);
        let judged = (
            problem.as_ref().unwrap_or(self.problem),
            places.as_ref().unwrap_or(self.places),
            circuit.as_ref().unwrap_or(self.circuit),
        );
        match self.outcome(judged.0, judged.1, judged.2) {
            Ok(Outcome::Differs) => return Ok(Found::Caught),
            Ok(Outcome::Equal | Outcome::Undecided) => {}
            Err(refusal) => return Ok(Found::Refused(refusal.to_string())),
        }
        let proof = match &circuit {
            Some(circuit) if local::is_same(fault, self.circuit, circuit, self.budget) => Proof::Harmless,
            Some(circuit) if self.iterations.is_some() => proof::same_search(self.circuit, circuit, self.budget),
            Some(circuit) => proof::same_operator(self.circuit, circuit, self.budget)?,
            None => proof::same_meaning((self.problem, self.places), (judged.0, judged.1), self.budget),
        };
        Ok(match proof {
            Proof::Harmless => Found::Harmless,
            Proof::Harmful(why) => Found::Missed(why),
            Proof::Open(why) => Found::Unproven(why),
        })
    }

    /// What the audit says; a search with another number of iterations differs from the one that was asked for.
    fn outcome(&self, problem: &Problem, places: &Places, circuit: &Circuit) -> Result<Outcome, AuditError> {
        let Some(iterations) = self.iterations else {
            return Ok(audit(problem, places, circuit, self.options, self.budget)?.outcome);
        };
        let verdict = audit_search(problem, places, circuit, SEARCH_WORK, self.budget)?;
        Ok(if verdict.iterations != iterations { Outcome::Differs } else { verdict.outcome })
    }
}
