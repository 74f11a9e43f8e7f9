//! From steps to the gates of a level.
//!
//! An AND into a clean ancilla is one gate at `wide` and `toffoli`; below it is the 13-gate list with 4 T gates of
//! C. Gidney, "Halving the cost of quantum addition", Quantum 2:74 (2018). Its inverse is the list backwards at
//! `clifford-t`; at `feedback` it is a measurement in the X basis and, where that gave 1, a CZ on the two operands.

use super::plan::Plan;
use super::steps::{Step, Steps};
use super::{LowerError, Options};
use crate::budget::Budget;
use crate::circuit::{Circuit, Condition, Control, Level, MARK, MeasuredId, Op, Part, QubitId, SEARCH, WORK};

/// The name of the register of measured bits that corrections depend on.
pub(super) const OUTCOME: &str = "outcome";
/// How many runs are written between two looks at the clock.
const RUNS_BETWEEN_LOOKS: usize = 1024;

/// Writes the oracle.
pub(super) fn emit(plan: &Plan<'_>, steps: &Steps, options: &Options, budget: &Budget) -> Result<Circuit, LowerError> {
    let mut circuit = Circuit::new();
    circuit.add_qubits(SEARCH, plan.search);
    if plan.mark.is_some() {
        circuit.add_qubits(MARK, 1);
    }
    if plan.work > 0 {
        let work = circuit.add_qubits(WORK, plan.work);
        work.into_iter().for_each(|qubit| circuit.push(Op::Reset, &[], qubit));
        circuit.note(0, Part::Prepare, None);
    }
    let erased = steps.compute.iter().filter(|step| matches!(step, Step::And(..))).count();
    let outcomes =
        if options.level == Level::Feedback && erased > 0 { circuit.add_measured(OUTCOME, erased) } else { Vec::new() };
    let mut writer = Writer { circuit, level: options.level, outcomes: outcomes.into_iter() };
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
    Ok(writer.circuit)
}

struct Writer {
    circuit: Circuit,
    level: Level,
    outcomes: std::vec::IntoIter<MeasuredId>,
}

impl Writer {
    fn step(&mut self, steps: &Steps, step: &Step) {
        match *step {
            Step::Flip(qubit) => self.circuit.push(Op::X, &[], qubit),
            Step::Cnot(source, target) => cx(&mut self.circuit, source, target),
            Step::And(controls, target) => and(&mut self.circuit, self.level, steps.controls(controls), target),
            Step::Toggle(controls, target) => match (self.level, steps.controls(controls)) {
                (Level::Wide | Level::Toffoli, controls) => self.circuit.push(Op::X, controls, target),
                (_, [a, b]) => {
                    self.circuit.push(Op::H, &[], target);
                    ccz(&mut self.circuit, a.qubit(), b.qubit(), target);
                    self.circuit.push(Op::H, &[], target);
                }
                (_, controls) => unreachable!("{} controls at {}", controls.len(), self.level),
            },
            Step::Sign(controls) => sign(&mut self.circuit, self.level, steps.controls(controls)),
        }
    }

    fn undo(&mut self, steps: &Steps, step: &Step) {
        if let Step::And(controls, target) = *step {
            let outcome = self.outcomes.next();
            erase(&mut self.circuit, self.level, steps.controls(controls), target, outcome);
        } else {
            self.step(steps, step);
        }
    }
}

fn cx(circuit: &mut Circuit, source: QubitId, target: QubitId) {
    circuit.push(Op::X, &[Control::on(source)], target);
}

/// -1 where all controls hold; the last of them holds on 1.
pub(super) fn sign(circuit: &mut Circuit, level: Level, controls: &[Control]) {
    let (&last, rest) = controls.split_last().expect("at least one control");
    match (level, rest) {
        (Level::CliffordT | Level::Feedback, [a, b]) => ccz(circuit, a.qubit(), b.qubit(), last.qubit()),
        _ => circuit.push(Op::Z, rest, last.qubit()),
    }
}

/// The gates of the AND with 4 T gates, in the qubits `[a, b, target]`: the operation, its control, its target.
const AND: [(Op, Option<usize>, usize); 13] = [
    (Op::H, None, 2),
    (Op::T, None, 2),
    (Op::X, Some(0), 2),
    (Op::X, Some(1), 2),
    (Op::X, Some(2), 0),
    (Op::X, Some(2), 1),
    (Op::Tdg, None, 0),
    (Op::Tdg, None, 1),
    (Op::T, None, 2),
    (Op::X, Some(2), 0),
    (Op::X, Some(2), 1),
    (Op::H, None, 2),
    (Op::S, None, 2),
];

fn inverse(op: Op) -> Op {
    match op {
        Op::T => Op::Tdg,
        Op::Tdg => Op::T,
        Op::S => Op::Sdg,
        Op::Sdg => Op::S,
        other => other,
    }
}

/// The AND of the controls into a target that is 0.
pub(super) fn and(circuit: &mut Circuit, level: Level, controls: &[Control], target: QubitId) {
    if level <= Level::Toffoli {
        circuit.push(Op::X, controls, target);
        return;
    }
    let qubits = [controls[0].qubit(), controls[1].qubit(), target];
    for (op, control, at) in AND {
        put(circuit, op, control.map(|at| qubits[at]), qubits[at]);
    }
}

fn put(circuit: &mut Circuit, op: Op, control: Option<QubitId>, target: QubitId) {
    match control {
        Some(control) => circuit.push(op, &[Control::on(control)], target),
        None => circuit.push(op, &[], target),
    }
}

/// Undoes [`and`]; the measured bit is used at `feedback` only.
pub(super) fn erase(
    circuit: &mut Circuit,
    level: Level,
    controls: &[Control],
    target: QubitId,
    outcome: Option<MeasuredId>,
) {
    match level {
        Level::Wide | Level::Toffoli => circuit.push(Op::X, controls, target),
        Level::CliffordT => {
            let qubits = [controls[0].qubit(), controls[1].qubit(), target];
            for (op, control, at) in AND.into_iter().rev() {
                put(circuit, inverse(op), control.map(|at| qubits[at]), qubits[at]);
            }
        }
        Level::Feedback => {
            let outcome = outcome.expect("one measured bit for each AND");
            circuit.push(Op::H, &[], target);
            circuit.push_measure(None, target, outcome);
            let condition = Some(Condition::new(outcome, true));
            circuit.push_if(condition, Op::Z, &controls[..1], controls[1].qubit());
            circuit.push(Op::Reset, &[], target);
        }
    }
}

/// CCZ by 7 T gates, one for each parity of the three qubits: the textbook Toffoli without its Hadamards.
fn ccz(circuit: &mut Circuit, a: QubitId, b: QubitId, c: QubitId) {
    let gates: [(Op, Option<QubitId>, QubitId); 13] = [
        (Op::X, Some(b), c),
        (Op::Tdg, None, c),
        (Op::X, Some(a), c),
        (Op::T, None, c),
        (Op::X, Some(b), c),
        (Op::Tdg, None, c),
        (Op::X, Some(a), c),
        (Op::T, None, b),
        (Op::T, None, c),
        (Op::X, Some(a), b),
        (Op::T, None, a),
        (Op::Tdg, None, b),
        (Op::X, Some(a), b),
    ];
    gates.into_iter().for_each(|(op, control, target)| put(circuit, op, control, target));
}
