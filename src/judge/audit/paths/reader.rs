//! Reading a circuit as a sum over paths, gate by gate.
//!
//! Input: a circuit. Output: what its qubits hold at the end and with which phase, as [`Form`]s of the inputs and of the
//! measurement outcomes, which are free symbols: all of them at once. A Hadamard gate opens a path variable, over which
//! the sum runs; `eliminate` closes it as soon as no qubit depends on it. A gate that depends on a measured bit is
//! controlled by the outcome.
//!
//! A measurement whose outcome is a function of the input tells something about it. That is noted in [`Reader::zeros`],
//! functions that must be 0 on every input, and the reading goes on with the outcome that belongs to the zero input.

use std::collections::BTreeSet;

use rustc_hash::FxHashMap;

use super::polynomial::Polynomial;
use super::space::Space;
use crate::budget::Budget;
use crate::circuit::{Circuit, Gate, Op, QubitId};
use crate::id::Id;
use crate::judge::audit::basis::form::Form;
use crate::judge::audit::oracle::eighths;
use crate::judge::audit::state::amplitude::multiples;
use crate::judge::reading::graph::Signal;

/// Why a reading does not close. That says nothing about the circuit.
#[derive(Clone, PartialEq, Eq, Debug)]
pub(in crate::judge::audit) enum Open {
    /// The gate with this number (of those of the file) is not read.
    Gate(usize),
    /// The outcome at the gate with this number is not one free bit.
    Outcome(usize),
    /// This qubit is in a superposition at the end, or it depends on what it must not.
    Qubit(QubitId),
    /// So many sums over path variables are left.
    Sums(usize),
    /// The phase is not one that an oracle gives.
    Phase,
    /// The forms grew beyond their limit, or the budget ran out.
    Limit,
}

/// Gates between two looks at the budget.
const GATES_A_LOOK: u64 = 1 << 10;
/// The most terms that are looked at: some ten seconds.
const MAX_WORK: u64 = 1 << 31;

/// A circuit that is being read.
pub(super) struct Reader<'a> {
    circuit: &'a Circuit,
    pub(super) space: Space,
    /// What each qubit holds.
    pub(super) values: Vec<Form>,
    /// What each measured bit holds.
    bits: Vec<Form>,
    /// The phase in multiples of pi/4.
    pub(super) phase: Polynomial,
    /// Phases that are no multiples of pi/4.
    pub(super) angles: Vec<(f64, Form)>,
    /// The qubits whose values depend on a path variable.
    pub(super) holders: FxHashMap<Signal, BTreeSet<usize>>,
    /// Path variables on which no qubit depends and that could not be summed over yet.
    pub(super) waiting: Vec<Signal>,
    /// Functions of the inputs that must be 0.
    pub(super) zeros: Vec<Form>,
    /// How many free outcomes there were.
    pub(super) outcomes: usize,
    /// How many path variables were opened.
    pub(super) paths: usize,
    work: u64,
}

impl<'a> Reader<'a> {
    /// Before the first gate: these qubits hold the inputs, in order, and all others 0.
    pub(super) fn new(circuit: &'a Circuit, inputs: &[QubitId]) -> Self {
        let space = Space::over(inputs.len());
        let mut values = vec![Form::default(); circuit.qubit_count()];
        for (at, qubit) in inputs.iter().enumerate() {
            values[qubit.index()] = Form::term(space.graph.bit(at));
        }
        Self {
            circuit,
            space,
            values,
            bits: vec![Form::default(); circuit.measured_count()],
            phase: Polynomial::default(),
            angles: Vec::new(),
            holders: FxHashMap::default(),
            waiting: Vec::new(),
            zeros: Vec::new(),
            outcomes: 0,
            paths: 0,
            work: 0,
        }
    }

    /// Begins again with another circuit on the same inputs, its phase taken against that of the one that was read.
    /// What the qubits of that one hold at the end; or one that is in a superposition.
    pub(super) fn begin_again(&mut self, circuit: &'a Circuit, inputs: &[QubitId]) -> Result<Vec<Form>, Open> {
        let is_open = |value: &Form| self.space.paths(&value.terms).next().is_some();
        if let Some(at) = self.values.iter().position(is_open) {
            return Err(Open::Qubit(QubitId::new(at)));
        }
        let mut values = vec![Form::default(); circuit.qubit_count()];
        for (at, qubit) in inputs.iter().enumerate() {
            values[qubit.index()] = Form::term(self.space.graph.bit(at));
        }
        self.circuit = circuit;
        self.bits = vec![Form::default(); circuit.measured_count()];
        self.phase.negate(&self.space);
        self.angles.iter_mut().for_each(|(angle, _)| *angle = -*angle);
        Ok(std::mem::replace(&mut self.values, values))
    }

    /// Reads every gate.
    pub(super) fn follow(&mut self, budget: &Budget) -> Result<(), Open> {
        let mut done = 0;
        for block in self.circuit.blocks() {
            for _ in 0..block.repeat {
                for at in block.gates.start as usize..block.gates.end as usize {
                    if done % GATES_A_LOOK == 0 && budget.spent() {
                        return Err(Open::Limit);
                    }
                    done += 1;
                    self.gate(at)?;
                    if self.work > MAX_WORK || self.space.is_too_large() {
                        return Err(Open::Limit);
                    }
                }
            }
        }
        self.sum_all();
        match self.waiting.len() {
            0 => Ok(()),
            left => Err(Open::Sums(left)),
        }
    }

    fn gate(&mut self, at: usize) -> Result<(), Open> {
        let circuit = self.circuit;
        let gate = &circuit.gates()[at];
        let condition = gate.condition().map(|condition| {
            let bit = self.bits[condition.bit().index()].clone();
            bit.negated_if(!condition.value())
        });
        if condition.as_ref().and_then(Form::as_constant) == Some(false) {
            return Ok(());
        }
        let condition = condition.filter(|condition| condition.as_constant().is_none());
        let is_plain = condition.is_none() && gate.control_count() == 0;
        let target = gate.target().index();
        let angle = self.circuit.angle(gate).unwrap_or(0.0);
        match gate.op() {
            Op::X => self.flip(gate, condition),
            Op::H if is_plain => self.mix(target),
            Op::H => self.mix_if(gate, condition),
            Op::Ry => {
                let quarters = multiples(angle, std::f64::consts::FRAC_PI_2).ok_or(Open::Gate(at))?;
                // A half turn is X Z, a quarter turn H Z.
                for _ in 0..quarters / 2 {
                    self.turn(gate, condition.clone(), true, 4);
                    self.flip(gate, condition.clone());
                }
                if quarters % 2 == 1 {
                    self.turn(gate, condition.clone(), true, 4);
                    if is_plain { self.mix(target) } else { self.mix_if(gate, condition) }
                }
            }
            Op::P => self.rotate(gate, condition, true, angle),
            Op::Rz => {
                self.rotate(gate, condition.clone(), true, angle);
                self.rotate(gate, condition, false, -angle / 2.0);
            }
            Op::Measure if condition.is_none() => {
                let bit = gate.measured().expect("a measurement writes a bit").index();
                self.bits[bit] = self.measure(target).ok_or(Open::Outcome(at))?;
            }
            Op::Reset if is_plain => {
                self.measure(target).ok_or(Open::Outcome(at))?;
                self.set(target, Form::default());
            }
            Op::Measure | Op::Reset => return Err(Open::Gate(at)),
            op => self.turn(gate, condition, true, eighths(op).expect("a diagonal gate")),
        }
        Ok(())
    }

    /// The conjunction of what a gate depends on.
    fn controls(&mut self, gate: &Gate, condition: Option<Form>, target: bool) -> Form {
        let circuit = self.circuit;
        let value = |control: &crate::circuit::Control| {
            self.values[control.qubit().index()].clone().negated_if(control.is_negated())
        };
        let mut factors: Vec<Form> = circuit.controls(gate).iter().map(value).chain(condition).collect();
        if target {
            factors.push(self.values[gate.target().index()].clone());
        }
        self.work += factors.iter().map(|factor| factor.terms.len() as u64 + 1).sum::<u64>();
        let product = self.space.product(&factors);
        self.phase.settle(&mut self.space);
        product
    }

    fn flip(&mut self, gate: &Gate, condition: Option<Form>) {
        let flips = self.controls(gate, condition, false);
        let target = gate.target().index();
        let mut value = self.values[target].clone();
        self.work += value.terms.len() as u64;
        value.add(&flips);
        self.set(target, value);
    }

    /// A phase of a multiple of pi/4 where the controls and, if it is one of them, the target hold.
    fn turn(&mut self, gate: &Gate, condition: Option<Form>, target: bool, eighths: u8) {
        let place = self.controls(gate, condition, target);
        self.phase.add(&self.space, &place, eighths);
    }

    fn rotate(&mut self, gate: &Gate, condition: Option<Form>, target: bool, angle: f64) {
        match multiples(angle, std::f64::consts::FRAC_PI_4) {
            Some(eighths) => self.turn(gate, condition, target, eighths),
            None => {
                let place = self.controls(gate, condition, target);
                self.angles.push((angle, place));
            }
        }
    }

    /// A Hadamard gate: the value becomes a path variable, and the sign is that of both values together.
    fn mix(&mut self, target: usize) {
        let path = self.space.new_path();
        self.paths += 1;
        let value = self.values[target].clone();
        let both = self.space.product(&[Form::term(path), value]);
        self.work += both.terms.len() as u64;
        self.phase.add(&self.space, &both, 4);
        self.set(target, Form::term(path));
    }

    /// A Hadamard gate where controls and condition hold: H = V X V* with V = S H T, so only the X depends on them.
    fn mix_if(&mut self, gate: &Gate, condition: Option<Form>) {
        let target = gate.target().index();
        self.turn_alone(target, 6);
        self.mix(target);
        self.turn_alone(target, 7);
        self.flip(gate, condition);
        self.turn_alone(target, 1);
        self.mix(target);
        self.turn_alone(target, 2);
    }

    /// A phase of a multiple of pi/4 where a qubit is 1.
    fn turn_alone(&mut self, target: usize, eighths: u8) {
        let value = self.values[target].clone();
        self.phase.add(&self.space, &value, eighths);
    }

    /// The outcome of a measurement, `None` where it is not one free bit or a function of what is known.
    fn measure(&mut self, target: usize) -> Option<Form> {
        let value = self.values[target].clone();
        if self.space.paths(&value.terms).next().is_none() {
            return Some(self.independent(&value));
        }
        let path = self.linear_path(&value, None)?;
        // The outcome is the value, so the sum over this variable has one term.
        let outcome = Form::term(self.space.new_outcome());
        self.outcomes += 1;
        let mut solved = outcome.clone();
        solved.add(&value);
        solved.add(&Form::term(path));
        self.put(path, &solved);
        self.sum_all();
        Some(outcome)
    }

    /// The newest path variable that is a term of its own in a form and stands nowhere else in it.
    pub(super) fn linear_path(&self, form: &Form, except: Option<Signal>) -> Option<Signal> {
        let mut times: FxHashMap<Signal, u32> = FxHashMap::default();
        self.space.paths(&form.terms).for_each(|path| *times.entry(path).or_default() += 1);
        let fits = |path: &&Signal| times.get(path) == Some(&1) && Some(**path) != except;
        form.terms.iter().rev().find(fits).copied()
    }

    /// What a form is on the zero input, as a function of outcomes; that it is so on all others is noted as a claim.
    pub(super) fn independent(&mut self, form: &Form) -> Form {
        let mut kept = Form::default();
        for (symbols, coefficient) in self.space.coefficients(form) {
            let value = self.space.at_zero(&coefficient);
            if coefficient.as_constant().is_none() {
                self.zeros.push(coefficient.negated_if(value));
            }
            if value {
                let factors: Vec<Form> = symbols.into_iter().map(Form::term).collect();
                kept.add(&self.space.product(&factors));
            }
        }
        kept
    }

    /// Gives a qubit another value, and closes the sums that this leaves behind.
    pub(super) fn set(&mut self, qubit: usize, value: Form) {
        for path in self.exchange(qubit, value) {
            self.sum(path);
        }
    }

    /// Gives a qubit another value; the path variables on which no qubit depends any more.
    pub(super) fn exchange(&mut self, qubit: usize, value: Form) -> Vec<Signal> {
        let old = std::mem::replace(&mut self.values[qubit], value);
        let paths = |space: &Space, form: &Form| space.paths(&form.terms).collect::<BTreeSet<Signal>>();
        let (before, after) = (paths(&self.space, &old), paths(&self.space, &self.values[qubit]));
        for &path in after.difference(&before) {
            self.holders.entry(path).or_default().insert(qubit);
        }
        let mut left = Vec::new();
        for &path in before.difference(&after) {
            let holders = self.holders.get_mut(&path).expect("it was held");
            holders.remove(&qubit);
            if holders.is_empty() {
                self.holders.remove(&path);
                left.push(path);
            }
        }
        left
    }
}
