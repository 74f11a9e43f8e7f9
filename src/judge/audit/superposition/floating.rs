//! The same audit in floating point: for circuits with angles that are no multiples of pi/4.
//!
//! Input and output are those of the exact audit. An amplitude may be off by [`TOLERANCE`], and by [`ROUNDING`] more for each
//! rotation that was followed, at most by [`MOST_TOLERANCE`]; the notes state the bound. A larger distance is a difference.

use std::f64::consts::{FRAC_PI_4, PI};

use super::run::Draw;
use super::{Audit, Finding, STRINGS};
use crate::circuit::{Gate, Op, QubitId};
use crate::id::Id;
use crate::judge::audit::search::{MOST_TOLERANCE, ROUNDING, TOLERANCE};
use crate::judge::audit::state::amplitude::{Complex, multiples};
use crate::judge::audit::state::{State, Stop};
use crate::judge::audit::{AuditError, Outcome, Verdict};
use crate::problem::Bits;

/// The most basis states at one time.
const MOST_ENTRIES: usize = 1 << 24;

/// Judges in floating point; what is marked is turned by `angle`.
pub(super) fn judge(audit: &Audit, starts: &[Bits], angle: f64) -> Result<Verdict, AuditError> {
    let (mut free, mut even, mut strings, mut at) = (0, true, 1, 0);
    let mut tolerance: f64 = 0.0;
    while at < strings {
        let mut run = Run::new(audit, starts, audit.draw(at, free));
        match run.follow() {
            Ok(()) => {}
            Err(Halt::Undecided(why)) => return Ok(audit.undecided(&why, at)),
            Err(Halt::Differs(finding)) => return Ok(audit.differs(&finding)),
            Err(Halt::Refused(error)) => return Err(error),
        }
        if at == 0 {
            free = run.free;
            strings = if free < 64 && 1 << free <= STRINGS { 1 << free } else { STRINGS };
        }
        even &= run.free == free;
        tolerance = tolerance.max(run.tolerance());
        if let Some(finding) = run.compare(angle) {
            return Ok(audit.differs(&finding));
        }
        at += 1;
    }
    let is_complete = even && 1usize.checked_shl(free as u32) == Some(strings);
    let mut verdict = audit.verdict(if audit.inputs.are_all { Outcome::Equal } else { Outcome::Undecided });
    verdict.notes.push(format!(
        "in floating point, since an angle is no multiple of pi/4: amplitudes agree within {tolerance:.1e}"
    ));
    if !audit.inputs.are_all {
        verdict.notes.push(format!("{} of all inputs were tried", audit.inputs.values));
    }
    verdict.notes.push(match free {
        0 => "complete: unitary".to_owned(),
        _ if is_complete => format!("complete: all {strings} strings of measurement outcomes"),
        _ => format!("{strings} strings of {free} measurement outcomes were followed; others are not covered"),
    });
    Ok(verdict)
}

/// Why a run ended before the end of the circuit.
enum Halt {
    Undecided(String),
    Differs(Finding),
    Refused(AuditError),
}

struct Run<'a, 'p> {
    audit: &'a Audit<'p>,
    state: State<Complex>,
    outcomes: Vec<bool>,
    draw: Draw,
    free: usize,
    rotations: u64,
}

impl<'a, 'p> Run<'a, 'p> {
    fn new(audit: &'a Audit<'p>, starts: &[Bits], draw: Draw) -> Self {
        let circuit = audit.circuit;
        let state = State::new(circuit.qubit_count(), starts, MOST_ENTRIES.max(starts.len()));
        Self { audit, state, outcomes: vec![false; circuit.measured_count()], draw, free: 0, rotations: 0 }
    }

    fn tolerance(&self) -> f64 {
        (TOLERANCE + ROUNDING * self.rotations as f64).min(MOST_TOLERANCE)
    }

    fn follow(&mut self) -> Result<(), Halt> {
        let circuit = self.audit.circuit;
        for block in circuit.blocks() {
            let gates = &circuit.gates()[block.gates.start as usize..block.gates.end as usize];
            for _ in 0..block.repeat {
                for gate in gates {
                    if self.audit.budget.spent() {
                        return Err(Halt::Undecided("the budget ran out".to_owned()));
                    }
                    self.step(gate)?;
                }
            }
        }
        Ok(())
    }

    fn step(&mut self, gate: &Gate) -> Result<(), Halt> {
        let circuit = self.audit.circuit;
        if gate.condition().is_some_and(|condition| self.outcomes[condition.bit().index()] != condition.value()) {
            return Ok(());
        }
        match gate.op() {
            Op::Measure => {
                let bit = gate.measured().expect("a measurement writes a bit");
                self.outcomes[bit.index()] = self.measure(gate.target(), &circuit.measured_name(bit))?;
            }
            Op::Reset => {
                let name = format!("the reset of {}", circuit.qubit_name(gate.target()));
                if self.measure(gate.target(), &name)? {
                    self.state.flip_all(gate.target());
                }
            }
            _ => {
                let is_rotation = circuit.angle(gate).is_some_and(|angle| multiples(angle, FRAC_PI_4).is_none());
                self.rotations += u64::from(is_rotation);
                self.state.apply(circuit, gate).map_err(|stop| match stop {
                    Stop::Entries => Halt::Undecided(format!("more than {MOST_ENTRIES} basis states at one time")),
                    Stop::Gate | Stop::Overflow => {
                        Halt::Refused(AuditError::Gate { gate: super::run::in_words(circuit, gate) })
                    }
                })?;
            }
        }
        Ok(())
    }

    /// Measures; every label must give an outcome with the same chance.
    fn measure(&mut self, qubit: QubitId, name: &str) -> Result<bool, Halt> {
        let labels = self.audit.inputs.list.len();
        let chance = |label: usize| -> f64 {
            let ones = self.state.entries(label).filter(|entry| entry.qubit(qubit));
            ones.map(|entry| entry.amplitude.norm()).sum()
        };
        let chances: Vec<f64> = (0..labels).map(chance).collect();
        let tolerance = self.tolerance();
        if let Some(input) = chances.iter().position(|one| (one - chances[0]).abs() > tolerance) {
            let expected = "the outcome of every measurement says nothing about the input".to_owned();
            let got = format!("the outcome at {name} depends on the input");
            return Err(Halt::Differs(Finding::Differs { input, expected, got, clean: false }));
        }
        let one = chances[0];
        let is_free = one > tolerance && 1.0 - one > tolerance;
        let outcome = if is_free { self.draw.next(self.free) } else { one > 0.5 };
        self.free += usize::from(is_free);
        self.state.project(qubit, outcome);
        let factor = 1.0 / if outcome { one } else { 1.0 - one }.sqrt();
        self.state.amplitudes_mut().iter_mut().for_each(|amplitude| *amplitude = amplitude.scaled(factor));
        Ok(outcome)
    }

    /// What is not as it must be at the end.
    fn compare(&self, angle: f64) -> Option<Finding> {
        let (audit, tolerance) = (self.audit, self.tolerance());
        let mut factors = Vec::with_capacity(audit.inputs.list.len());
        for (at, input) in audit.inputs.list.iter().enumerate() {
            let largest = self.state.entries(at).max_by(|a, b| a.amplitude.norm().total_cmp(&b.amplitude.norm()))?;
            let rest =
                self.state.entries(at).map(|entry| entry.amplitude.norm()).sum::<f64>() - largest.amplitude.norm();
            if rest > tolerance * tolerance + 1e-14 {
                let got = format!("a superposition: other basis states with the chance {rest:.3e}");
                return Some(Finding::Differs { input: at, expected: "one basis state".to_owned(), got, clean: false });
            }
            if let Some((expected, got, clean)) = audit.compare_qubits(input, |qubit| largest.qubit(qubit)) {
                return Some(Finding::Differs { input: at, expected, got, clean });
            }
            let owed = if input.holds && audit.roles.mark.is_none() { angle } else { 0.0 };
            let (sin, cos) = (-owed).sin_cos();
            factors.push(largest.amplitude.times(Complex { re: cos, im: sin }));
        }
        let distance = |a: Complex, b: Complex| a.minus(b).norm().sqrt();
        let one = Complex { re: 1.0, im: 0.0 };
        // The phase that most inputs have, as far as the first few tell.
        let fits =
            |&&constant: &&Complex| factors.iter().filter(|&&factor| distance(factor, constant) <= tolerance).count();
        let common = factors.iter().take(8).max_by_key(fits).copied().unwrap_or(one);
        let constant = if audit.options.strict_phase { one } else { common };
        let input = factors.iter().position(|&factor| distance(factor, constant) > tolerance)?;
        let turn = factors[input].times(Complex { re: constant.re, im: -constant.im }).angle();
        let expected = "the phase of the oracle, the same global phase as on most other inputs".to_owned();
        let got = format!("a phase that is off by {turn:.9} ({:.6} pi)", turn / PI);
        Some(Finding::Differs { input, expected, got, clean: true })
    }
}
