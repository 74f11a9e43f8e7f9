//! From steps to gates: compute, mark, and undo in reverse order.

use super::gates::Pen;
use super::plan::Plan;
use super::steps::{Step, Steps};
use super::{LowerError, Options};
use crate::budget::Budget;
use crate::circuit::{Circuit, Level, MARK, MeasuredId, Op, Part, QubitId, SEARCH, WORK};

/// The name of the register of measured bits that corrections depend on.
pub(super) const OUTCOME: &str = "outcome";
/// How many runs are written between two looks at the clock.
const RUNS_BETWEEN_LOOKS: usize = 1024;

/// Writes the oracle. Before all else `spread` copies the first of each pair into the second, an ancilla beyond those of
/// the plan.
pub(super) fn emit(
    plan: &Plan<'_>,
    steps: &Steps,
    spread: &[(QubitId, QubitId)],
    options: &Options,
    budget: &Budget,
) -> Result<Circuit, LowerError> {
    let mut circuit = Circuit::new();
    circuit.add_qubits(SEARCH, plan.search);
    if plan.mark.is_some() {
        circuit.add_qubits(MARK, 1);
    }
    if plan.work + spread.len() > 0 {
        let work = circuit.add_qubits(WORK, plan.work + spread.len());
        work.into_iter().for_each(|qubit| circuit.push(Op::Reset, &[], qubit));
        circuit.note(0, Part::Prepare, None);
    }
    let erased = steps.compute.iter().filter(|step| matches!(step, Step::And(..))).count();
    let outcomes =
        if options.level == Level::Feedback && erased > 0 { circuit.add_measured(OUTCOME, erased) } else { Vec::new() };
    let mut writer = Writer { circuit, level: options.level, outcomes: outcomes.into_iter() };
    let from = writer.circuit.gates().len();
    spread.iter().for_each(|&(source, copy)| Pen::new(&mut writer.circuit, options.level).cx(source, copy));
    writer.circuit.note(from, Part::Compute, None);
    let ends = steps.runs.iter().skip(1).map(|run| run.start).chain([steps.compute.len()]);
    let runs: Vec<(std::ops::Range<usize>, _)> =
        steps.runs.iter().zip(ends).map(|(run, end)| (run.start..end, run.constraint)).collect();
    for (at, (range, constraint)) in runs.iter().enumerate() {
        if at % RUNS_BETWEEN_LOOKS == 0 && budget.spent() {
            return Err(LowerError::OutOfTime);
        }
        let from = writer.circuit.gates().len();
        steps.compute[range.clone()].iter().for_each(|step| writer.step(steps, step));
        writer.circuit.note(from, Part::Compute, *constraint);
    }
    let from = writer.circuit.gates().len();
    steps.mark.iter().for_each(|step| writer.step(steps, step));
    writer.circuit.note(from, Part::Mark, None);
    for (range, constraint) in runs.iter().rev() {
        let from = writer.circuit.gates().len();
        steps.compute[range.clone()].iter().rev().for_each(|step| writer.undo(steps, step));
        writer.circuit.note(from, Part::Undo, *constraint);
    }
    let from = writer.circuit.gates().len();
    spread.iter().rev().for_each(|&(source, copy)| Pen::new(&mut writer.circuit, options.level).cx(source, copy));
    writer.circuit.note(from, Part::Undo, None);
    Ok(writer.circuit)
}

struct Writer {
    circuit: Circuit,
    level: Level,
    outcomes: std::vec::IntoIter<MeasuredId>,
}

impl Writer {
    fn step(&mut self, steps: &Steps, step: &Step) {
        let mut pen = Pen::new(&mut self.circuit, self.level);
        match *step {
            Step::Flip(qubit) => pen.push(Op::X, &[], qubit),
            Step::Cnot(source, target) => pen.cx(source, target),
            Step::And(controls, target) => pen.and(steps.controls(controls), target),
            Step::Toggle(controls, target) => pen.toggle(steps.controls(controls), target),
            Step::Sign(controls) => pen.sign(steps.controls(controls)),
        }
    }

    fn undo(&mut self, steps: &Steps, step: &Step) {
        if let Step::And(controls, target) = *step {
            let outcome = self.outcomes.next();
            Pen::new(&mut self.circuit, self.level).erase(steps.controls(controls), target, outcome);
        } else {
            self.step(steps, step);
        }
    }
}
