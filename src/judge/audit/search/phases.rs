//! Searches with phases of their own: success for certain, fixed-point, or any other angles in oracle and reflection.
//!
//! The file is followed gate by gate from |0...0>. Between marks and reflections the state must be one of the plane ([`Plane`]);
//! each such state is looked for after every gate, and what leads from one to the next must be a phase on the
//! marked strings or a phase on the start state, in turns. So the audit tells the angle of every mark and of every
//! reflection, and holds them against the published schedules ([`schedule`]).

use super::machine::Machine;
use super::plane::{Looker, Plane, Step};
use super::profile::Profile;
use super::schedule::{self, Schedule};
use super::{End, Readout, SearchVerdict, follow_gate, open};
use crate::budget::Budget;
use crate::circuit::{Circuit, GIVEN, Gate, QubitId};

/// Turns that are followed of a loop that the input of the file ends.
const GIVEN_TURNS: u64 = 2;

/// Follows a search with phases of its own.
pub(super) fn audit_phases(
    circuit: &Circuit,
    search: &[QubitId],
    profile: &Profile,
    work_limit: u64,
    budget: &Budget,
) -> SearchVerdict {
    let looker = Looker { profile, search };
    let machine = Machine::sparse(circuit, search);
    let mut follower =
        Follower { circuit, looker, machine, work_limit, budget, last: None, steps: Vec::new(), at_last: false };
    let mut verdict = open();
    let end = follower.follow().and_then(|()| follower.judge(&mut verdict));
    verdict.iterations = follower.steps.iter().filter(|step| matches!(step, Step::Reflect(_))).count() as u64;
    verdict.iterations_checked = verdict.iterations;
    if let Some(plane) = follower.last {
        verdict.success = profile.marked() as f64 * plane.marked.norm();
    }
    match end {
        Ok(()) => verdict.notes.extend(follower.machine.notes()),
        Err(end) => end.tell(&mut verdict),
    }
    verdict
}

struct Follower<'c> {
    circuit: &'c Circuit,
    looker: Looker<'c, 'c>,
    machine: Machine<'c>,
    work_limit: u64,
    budget: &'c Budget,
    /// The last state of the plane that was explained.
    last: Option<Plane>,
    steps: Vec<Step>,
    /// Whether the state is that one.
    at_last: bool,
}

impl Follower<'_> {
    fn follow(&mut self) -> Result<(), End> {
        let circuit = self.circuit;
        let tail = Readout::found(circuit, self.looker.search)?;
        for block in circuit.blocks() {
            let end = (block.gates.end as usize).min(tail);
            let gates = circuit.gates().get(block.gates.start as usize..end).unwrap_or(&[]);
            let turns = if block.repeat == GIVEN { GIVEN_TURNS } else { block.repeat };
            for turn in 0..turns {
                if self.machine.updates() > self.work_limit {
                    return Err(End::Undecided(format!(
                        "{turn} of {turns} turns of a loop were followed within the work limit"
                    )));
                }
                gates.iter().enumerate().try_for_each(|(at, gate)| self.gate(at, gate))?;
            }
        }
        Ok(())
    }

    fn gate(&mut self, at: usize, gate: &Gate) -> Result<(), End> {
        follow_gate(self.circuit, &mut self.machine, self.budget, at, gate)?;
        let tolerance = self.machine.tolerance();
        let Some(plane) = self.machine.state().and_then(|state| self.looker.look(state, tolerance)) else {
            self.at_last = false;
            return Ok(());
        };
        let Some(last) = self.last else {
            // Before the start state there is nothing to explain.
            self.last = Some(plane).filter(|plane| plane.is_start(tolerance));
            self.at_last = self.last.is_some();
            return Ok(());
        };
        let (angle, profile) = (self.angle(), self.looker.profile);
        self.at_last = last.is_same(&plane, profile, angle);
        let step = if self.at_last { None } else { last.step_to(&plane, profile, angle) };
        if let Some(step) = step {
            (self.last, self.at_last) = (Some(plane), true);
            self.take(step);
        }
        Ok(())
    }

    /// Two marks in a row are one, and so are two reflections.
    fn take(&mut self, step: Step) {
        let joined = match (self.steps.last(), step) {
            (Some(&Step::Mark(before)), Step::Mark(angle)) => Step::Mark(super::plane::wrapped(before + angle)),
            (Some(&Step::Reflect(before)), Step::Reflect(angle)) => {
                Step::Reflect(super::plane::wrapped(before + angle))
            }
            _ => return self.steps.push(step),
        };
        *self.steps.last_mut().expect("there is one") = joined;
    }

    /// How far an angle may be off: what the amplitudes may, beside the smallest of them.
    fn angle(&self) -> f64 {
        let strings = (self.looker.profile.marked() + self.looker.profile.others()) as f64;
        (1e-7 + 4.0 * self.machine.tolerance() * strings.sqrt()).min(MOST_ANGLE)
    }

    fn judge(&self, verdict: &mut SearchVerdict) -> Result<(), End> {
        let profile = self.looker.profile;
        if profile.marked() == 0 || profile.others() == 0 {
            return Err(End::Undecided("everything or nothing is marked, so no phase shows".to_owned()));
        }
        let Some(last) = self.last else {
            return Err(End::Differs("the start state is never prepared".to_owned()));
        };
        if !self.at_last {
            let steps = self.steps.len();
            return Err(End::Differs(format!(
                "after {steps} marks and reflections the file goes on with something else than those"
            )));
        }
        let Some(phases) = schedule::iterations(&self.steps) else {
            return Err(End::Differs("marks and reflections do not take turns, a mark first".to_owned()));
        };
        let success = profile.marked() as f64 * last.marked.norm();
        let given = self.circuit.blocks().iter().any(|block| block.repeat == GIVEN);
        if phases.is_empty() {
            verdict.notes.push("the start state is measured".to_owned());
        } else {
            let schedule = schedule::recognise(&phases, success, self.angle()).map_err(End::Differs)?;
            verdict.notes.push(in_words(schedule, phases.len()));
            if given && schedule != Schedule::Plain {
                return Err(End::Differs("the loop of the file's input is no plain iteration".to_owned()));
            }
        }
        verdict.outcome = super::Outcome::Equal;
        Ok(())
    }
}

/// No angle may be further off than this, whatever the amplitudes are.
const MOST_ANGLE: f64 = 1e-4;

fn in_words(schedule: Schedule, iterations: usize) -> String {
    match schedule {
        Schedule::Plain => format!("{iterations} iterations, each with a sign on what is marked and a reflection"),
        Schedule::Certain { phase } => {
            format!("{iterations} iterations with the phase {phase:.9} in marks and reflections: success for certain")
        }
        Schedule::FixedPoint { failure } => {
            format!(
                "{iterations} iterations with the phases of a fixed-point search that fails with at most {failure:.3e}"
            )
        }
    }
}
