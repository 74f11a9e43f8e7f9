//! One run of a circuit over labelled inputs, with one string of measurement outcomes.

use std::f64::consts::FRAC_PI_2;

use crate::budget::Budget;
use crate::circuit::{Circuit, Gate, Op, QubitId};
use crate::id::Id;
use crate::judge::audit::state::amplitude::{Exact, multiples};
use crate::judge::audit::state::{State, Stop};
use crate::judge::audit::{AuditError, Options};
use crate::problem::Bits;
use crate::random::SplitMix64;

/// At most so many bytes for the entries of a state, unless the budget says otherwise.
const MEMORY: u64 = 2 << 30;

/// How free outcomes are chosen. An outcome is free where both values occur.
pub(in crate::judge::audit) enum Draw {
    Zeros,
    Ones,
    /// The bits of a number, lowest first.
    Counted(u64),
    Drawn(SplitMix64),
}

impl Draw {
    pub(in crate::judge::audit) fn seeded(seed: u64) -> Self {
        Self::Drawn(SplitMix64::new(seed))
    }

    pub(super) fn next(&mut self, at: usize) -> bool {
        match self {
            Self::Zeros => false,
            Self::Ones => true,
            Self::Counted(number) => at < 64 && *number >> at & 1 == 1,
            Self::Drawn(random) => random.coin(),
        }
    }
}

/// How a run ended.
pub(in crate::judge::audit) enum End {
    /// At the end of the circuit.
    Reached,
    /// The budget ran out.
    Spent,
    /// There were more basis states than this.
    TooMany(usize),
    /// A measurement outcome depends on the input: this one is affected.
    Telling { input: usize, bit: String },
}

/// A run.
pub(in crate::judge::audit) struct Run<'c> {
    circuit: &'c Circuit,
    state: State<Exact>,
    most: usize,
    draw: Draw,
    free: usize,
    outcomes: Vec<bool>,
    strict: bool,
    labels: usize,
    budget: &'c Budget,
}

impl<'c> Run<'c> {
    pub(in crate::judge::audit) fn new(
        circuit: &'c Circuit,
        starts: &[Bits],
        draw: Draw,
        options: &Options,
        budget: &'c Budget,
    ) -> Self {
        let words = circuit.qubit_count().div_ceil(64) as u64;
        // Twice, as a mixing gate writes a second copy.
        let bytes = 2 * (8 * words + size_of::<Exact>() as u64 + 9);
        let most = (budget.memory().unwrap_or(MEMORY) / bytes).clamp(starts.len() as u64, 1 << 31) as usize;
        Self {
            circuit,
            state: State::new(circuit.qubit_count(), starts, most),
            most,
            draw,
            free: 0,
            outcomes: vec![false; circuit.measured_count()],
            strict: options.strict_phase,
            labels: starts.len(),
            budget,
        }
    }

    /// The state now.
    pub(in crate::judge::audit) fn state(&self) -> &State<Exact> {
        &self.state
    }

    /// How many outcomes were free so far.
    pub(in crate::judge::audit) fn free(&self) -> usize {
        self.free
    }

    /// Follows the circuit to its end.
    pub(in crate::judge::audit) fn follow(&mut self) -> Result<End, AuditError> {
        let circuit = self.circuit;
        let mut done = 0u64;
        for block in circuit.blocks() {
            let gates = &circuit.gates()[block.gates.start as usize..block.gates.end as usize];
            for _ in 0..block.repeat {
                for gate in gates {
                    if done.is_multiple_of(64) {
                        self.budget.report("audit in superposition", done, None);
                        if self.budget.spent() {
                            return Ok(End::Spent);
                        }
                    }
                    done += 1;
                    if let Some(end) = self.step(gate)? {
                        return Ok(end);
                    }
                }
            }
        }
        Ok(End::Reached)
    }

    /// Applies one gate; says so where the run cannot go on.
    pub(in crate::judge::audit) fn step(&mut self, gate: &Gate) -> Result<Option<End>, AuditError> {
        if gate.condition().is_some_and(|condition| self.outcomes[condition.bit().index()] != condition.value()) {
            return Ok(None);
        }
        match gate.op() {
            Op::Measure => {
                let bit = gate.measured().expect("a measurement writes a bit");
                let (outcome, end) = self.measure(gate.target(), || self.circuit.measured_name(bit))?;
                self.outcomes[bit.index()] = outcome;
                Ok(end)
            }
            Op::Reset => {
                let name = || format!("the reset of {}", self.circuit.qubit_name(gate.target()));
                let (outcome, end) = self.measure(gate.target(), name)?;
                if outcome {
                    self.state.flip_all(gate.target());
                }
                Ok(end)
            }
            _ => match self.unitary(gate) {
                Ok(()) => Ok(None),
                Err(Stop::Entries) => Ok(Some(End::TooMany(self.most))),
                Err(Stop::Gate) => Err(AuditError::Gate { gate: in_words(self.circuit, gate) }),
                Err(Stop::Overflow) => Err(too_fine()),
            },
        }
    }

    fn unitary(&mut self, gate: &Gate) -> Result<(), Stop> {
        // An uncontrolled `rz` is a `p` but for a global phase, and `p` holds twice as many angles exactly.
        if gate.op() == Op::Rz && gate.control_count() == 0 && !self.strict {
            let angle = self.circuit.angle(gate).expect("rz has an angle");
            if multiples(angle, FRAC_PI_2).is_none() {
                let controls = self.circuit.controls(gate);
                return if multiples(angle, FRAC_PI_2 / 2.0).is_some() {
                    self.state.rotate(controls, gate.target(), angle)
                } else {
                    Err(Stop::Gate)
                };
            }
        }
        self.state.apply(self.circuit, gate)
    }

    /// Measures; afterwards every label must have kept the same weight.
    fn measure(&mut self, qubit: QubitId, name: impl Fn() -> String) -> Result<(bool, Option<End>), AuditError> {
        let (zero, one) = (self.state.occurs(qubit, false), self.state.occurs(qubit, true));
        if !(zero && one) {
            return Ok((one, None));
        }
        let outcome = self.draw.next(self.free);
        self.free += 1;
        self.state.project(qubit, outcome);
        let first = self.weight(0).ok_or_else(too_fine)?;
        for label in 1..self.labels {
            let is_same = self.state.sizes(label) == self.state.sizes(label - 1);
            if !is_same && self.weight(label).ok_or_else(too_fine)? != first {
                return Ok((outcome, Some(End::Telling { input: label, bit: name() })));
            }
        }
        Ok((outcome, None))
    }

    /// The squared norm of what a label has left, as x + y sqrt(2).
    fn weight(&self, label: usize) -> Option<(i128, i128)> {
        self.state.sizes(label).iter().try_fold((0i128, 0i128), |sum, amplitude| {
            let norm = amplitude.norm()?;
            Some((sum.0.checked_add(norm.0)?, sum.1.checked_add(norm.1)?))
        })
    }
}

/// Exact amplitudes that do not fit their integers.
fn too_fine() -> AuditError {
    AuditError::TooLarge { what: "its exact amplitudes do not fit 64 bits".to_owned() }
}

/// A gate as a message would write it.
pub(in crate::judge::audit) fn in_words(circuit: &Circuit, gate: &Gate) -> String {
    let mut text = String::new();
    for control in circuit.controls(gate) {
        text.push_str(if control.is_negated() { "negctrl @ " } else { "ctrl @ " });
    }
    text.push_str(&format!("{:?}", gate.op()).to_lowercase());
    if let Some(angle) = circuit.angle(gate) {
        text.push_str(&format!("({angle})"));
    }
    let controls = circuit.controls(gate).iter().map(|control| control.qubit());
    let names: Vec<String> = controls.chain([gate.target()]).map(|qubit| circuit.qubit_name(qubit)).collect();
    text.push(' ');
    text.push_str(&names.join(", "));
    text
}
