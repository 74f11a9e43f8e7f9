//! Follows a whole search gate by gate from |0...0>, in the form that fits: [`Rows`] while it holds, and a sparse
//! state in floating point from the first gate that it does not hold.

use std::f64::consts::FRAC_PI_4;

use super::entries::{Residue, Rows};
use super::{MOST_TOLERANCE, ROUNDING, TOLERANCE};
use crate::circuit::{Circuit, Gate, Op, QubitId};
use crate::id::Id;
use crate::judge::audit::state::amplitude::{Amplitude, Complex, multiples};
use crate::judge::audit::state::{State, Stop};
use crate::problem::Bits;
use crate::random::SplitMix64;

/// At most so many basis states in the general form.
pub(super) const MOST_ENTRIES: usize = 1 << 20;
/// Amplitudes below this are taken for nothing where a register must be clean.
const NOTHING: f64 = 1e-12;
/// What measurement outcomes inside a search are drawn from.
const SEED: u64 = 1;

/// The machine.
pub(super) struct Machine<'c> {
    circuit: &'c Circuit,
    search: Vec<QubitId>,
    form: Form,
    outcomes: Vec<bool>,
    random: SplitMix64,
    /// Measurements of which both outcomes could have come.
    drawn: u64,
    updates: u64,
    /// Rotations by other angles than multiples of pi/4.
    rotations: u64,
}

enum Form {
    Rows(Rows),
    Sparse(State<Complex>),
}

impl<'c> Machine<'c> {
    /// All qubits in |0>.
    pub(super) fn new(circuit: &'c Circuit, search: &[QubitId]) -> Self {
        Self {
            circuit,
            search: search.to_vec(),
            form: Form::Rows(Rows::new(circuit, search)),
            outcomes: vec![false; circuit.measured_count()],
            random: SplitMix64::new(SEED),
            drawn: 0,
            updates: 0,
            rotations: 0,
        }
    }

    /// The same in the general form from the start.
    pub(super) fn sparse(circuit: &'c Circuit, search: &[QubitId]) -> Self {
        let zeros = (Bits::zeros(circuit.qubit_count()), Complex { re: 1.0, im: 0.0 });
        let state = State::superposition(circuit.qubit_count(), &[zeros], MOST_ENTRIES);
        Self {
            circuit,
            search: search.to_vec(),
            form: Form::Sparse(state),
            outcomes: vec![false; circuit.measured_count()],
            random: SplitMix64::new(SEED),
            drawn: 0,
            updates: 0,
            rotations: 0,
        }
    }

    /// The state, in the general form.
    pub(super) fn state(&self) -> Option<&State<Complex>> {
        match &self.form {
            Form::Rows(_) => None,
            Form::Sparse(state) => Some(state),
        }
    }

    /// How far an amplitude may be off: each rotation so far may have added to it.
    pub(super) fn tolerance(&self) -> f64 {
        (TOLERANCE + ROUNDING * self.rotations as f64).min(MOST_TOLERANCE)
    }

    /// What the verdict rests on.
    pub(super) fn notes(&self) -> Vec<String> {
        let drawn = (self.drawn > 0).then(|| {
            let drawn = self.drawn;
            format!(
                "{drawn} measurement outcomes inside the search were drawn from seed {SEED}; others are not covered"
            )
        });
        let tolerance = match self.rotations {
            0 => format!("amplitudes agree within {TOLERANCE:e}"),
            rotations => {
                let tolerance = self.tolerance();
                format!(
                    "amplitudes agree within {tolerance:.1e}, the bound for {rotations} rotations of seven decimals"
                )
            }
        };
        drawn.into_iter().chain([tolerance]).collect()
    }

    /// Work so far: amplitudes, or words of 64 bits, that were computed.
    pub(super) fn updates(&self) -> u64 {
        self.updates
    }

    /// Applies a gate.
    pub(super) fn apply(&mut self, gate: &Gate) -> Result<(), Stop> {
        self.rotations += u64::from(is_rotation(self.circuit, gate));
        if let Form::Rows(rows) = &mut self.form {
            let before = rows.updates;
            if rows.apply(self.circuit, gate).is_ok() {
                self.updates += rows.updates - before;
                return Ok(());
            }
            let complex = |(state, re)| (state, Complex { re, im: 0.0 });
            let basis: Vec<_> = rows.basis_states().into_iter().map(complex).collect();
            if basis.len() > MOST_ENTRIES {
                return Err(Stop::Entries);
            }
            self.form = Form::Sparse(State::superposition(self.circuit.qubit_count(), &basis, MOST_ENTRIES));
        }
        self.apply_sparse(gate)
    }

    fn apply_sparse(&mut self, gate: &Gate) -> Result<(), Stop> {
        let Form::Sparse(state) = &mut self.form else { return Ok(()) };
        self.updates += state.len() as u64;
        if gate.condition().is_some_and(|condition| self.outcomes[condition.bit().index()] != condition.value()) {
            return Ok(());
        }
        match gate.op() {
            Op::Measure | Op::Reset => {
                let outcome = measure(state, gate.target(), &mut self.random, &mut self.drawn);
                match gate.measured() {
                    Some(bit) => self.outcomes[bit.index()] = outcome,
                    None if outcome => state.flip_all(gate.target()),
                    None => {}
                }
                Ok(())
            }
            _ => state.apply(self.circuit, gate),
        }
    }

    /// The amplitudes by the value of the search register; every other qubit must be 0.
    pub(super) fn amplitudes(&mut self) -> Result<Vec<Complex>, Residue> {
        match &mut self.form {
            Form::Rows(rows) => {
                let amplitudes = rows.settled(&self.search)?;
                Ok(amplitudes.iter().map(|&re| Complex { re, im: 0.0 }).collect())
            }
            Form::Sparse(state) => {
                let mut dense = vec![Complex::ZERO; 1 << self.search.len()];
                for entry in state.entries(0) {
                    let bit = |(at, &qubit): (usize, &QubitId)| usize::from(entry.qubit(qubit)) << at;
                    let value: usize = self.search.iter().enumerate().map(bit).sum();
                    let all = (0..self.circuit.qubit_count()).map(QubitId::new);
                    let mut dirty = all.filter(|&qubit| entry.qubit(qubit) && !self.search.contains(&qubit));
                    match dirty.next() {
                        Some(qubit) if entry.amplitude.norm() > NOTHING * NOTHING => {
                            return Err(Residue { qubit, value });
                        }
                        Some(_) => {}
                        None => dense[value] = entry.amplitude,
                    }
                }
                Ok(dense)
            }
        }
    }
}

/// Whether a gate turns by another angle than a multiple of pi/4.
fn is_rotation(circuit: &Circuit, gate: &Gate) -> bool {
    circuit.angle(gate).is_some_and(|angle| multiples(angle, FRAC_PI_4).is_none())
}

/// Whether a circuit turns phases by other angles than multiples of pi/4.
pub(super) fn has_phases(circuit: &Circuit) -> bool {
    circuit.gates().iter().any(|gate| gate.op() != Op::Ry && is_rotation(circuit, gate))
}

/// Whether a circuit turns phases by angles.
pub(super) fn has_angles(circuit: &Circuit) -> bool {
    circuit.gates().iter().any(|gate| matches!(gate.op(), Op::P | Op::Rz))
}

/// Draws an outcome with its probability, and projects.
fn measure(state: &mut State<Complex>, qubit: QubitId, random: &mut SplitMix64, drawn: &mut u64) -> bool {
    let norm = |one: bool| -> f64 {
        state.entries(0).filter(|entry| entry.qubit(qubit) == one).map(|entry| entry.amplitude.norm()).sum()
    };
    let (zero, one) = (norm(false), norm(true));
    let free = zero.min(one) > NOTHING;
    *drawn += u64::from(free);
    let outcome = if free { random.unit() * (zero + one) >= zero } else { one > zero };
    state.project(qubit, outcome);
    let factor = 1.0 / if outcome { one } else { zero }.sqrt();
    state.amplitudes_mut().iter_mut().for_each(|amplitude| *amplitude = amplitude.scaled(factor));
    outcome
}
