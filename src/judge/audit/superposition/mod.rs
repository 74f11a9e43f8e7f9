//! The audit in superposition: for oracles with Hadamard gates, T gates, measurements and corrections.
//!
//! Input: a problem, its places, a circuit. Output: a [`Verdict`]. The circuit is applied to a superposition of all
//! inputs (of `search`, and of `mark` in a bit oracle) in which every input carries a label that no gate touches: the
//! operator acts on one half of a maximally entangled state. The result determines the whole operator, not only what
//! it does to basis states one by one: relative phases between inputs, and anything about the input that stays behind
//! in an ancilla or went out through a measurement. Amplitudes are exact (`state::amplitude`), or where an angle is no
//! multiple of pi/4 in floating point with a stated tolerance (`floating`).
//!
//! A measurement, and a `reset` that is not of |0>, draws its outcome and projects. After each of them every input must
//! have kept the same weight, else the outcome says something about the input. At the end each input must have one
//! basis state: `search` as it was, `work` clean, `mark` flipped for the solutions, and its amplitude must be one
//! constant (times -1 for the solutions, in a phase oracle).
//!
//! A circuit without free outcomes is covered by one run, and one with a few by all strings of outcomes; otherwise
//! the verdict holds for the strings drawn, and its notes say which.

mod floating;
mod inputs;
pub(in crate::judge::audit) mod run;

use std::f64::consts::{FRAC_PI_4, PI};

use self::inputs::{Input, Inputs};
use self::run::{Draw, End, Run};
use super::oracle::{self, Roles};
use super::state::amplitude::{Amplitude, Exact, multiples};
use super::{AuditError, How, Options, Outcome, Phases, Verdict, Witness};
use crate::budget::Budget;
use crate::circuit::Circuit;
use crate::places::Places;
use crate::problem::{Bits, Problem};

/// All inputs are tried up to so many searched bits.
pub(super) const ALL_BITS: usize = 16;
/// Gates times labels times strings of outcomes: beyond this inputs are sampled.
const MOST_STEPS: u64 = 1 << 34;
/// As many strings of outcomes are tried, or all if there are not more.
const STRINGS: usize = 8;

/// Judges a circuit on a superposition of all inputs, or of a sample of them where there are too many.
pub fn audit_superposition(
    problem: &Problem,
    places: &Places,
    circuit: &Circuit,
    options: &Options,
    budget: &Budget,
) -> Result<Verdict, AuditError> {
    let roles = oracle::roles(problem, places, circuit)?;
    oracle::check_gates(circuit)?;
    let blocks = circuit.blocks().iter();
    let gates = blocks.map(|block| block.repeat * block.gates.len() as u64).sum::<u64>();
    let measures = circuit.gates().iter().any(|gate| !gate.op().is_unitary());
    let labels = MOST_STEPS / (gates.max(1) * if measures { STRINGS as u64 } else { 1 });
    let has_mark = roles.mark.is_some();
    let most = (labels >> u32::from(has_mark)).clamp(16, 1 << ALL_BITS) as usize;
    let all_bits = ALL_BITS.min(options.exhaustive_bits as usize).min(most.ilog2() as usize);
    let inputs = Inputs::choose(problem, places, has_mark, options, all_bits, most);
    Audit { places, circuit, options, budget, roles, inputs, eighths: eighths_of(options) }.judge()
}

/// Judges a circuit on one input, and others beside it.
pub(super) fn audit_near(
    problem: &Problem,
    places: &Places,
    circuit: &Circuit,
    input: &Bits,
    options: &Options,
    budget: &Budget,
) -> Result<Verdict, AuditError> {
    let roles = oracle::roles(problem, places, circuit)?;
    let inputs = Inputs::near(problem, roles.mark.is_some(), input, options.seed);
    Audit { places, circuit, options, budget, roles, inputs, eighths: eighths_of(options) }.judge()
}

/// The phase of what is marked, in multiples of pi/4, where it is one.
fn eighths_of(options: &Options) -> Option<u8> {
    options.angle.map_or(Some(4), |angle| multiples(angle, FRAC_PI_4))
}

struct Audit<'p> {
    places: &'p Places,
    circuit: &'p Circuit,
    options: &'p Options,
    budget: &'p Budget,
    roles: Roles,
    inputs: Inputs,
    /// The phase of what is marked, in multiples of pi/4, where it is one.
    eighths: Option<u8>,
}

/// The constant by which all amplitudes agree with the oracle.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
enum Constant {
    Positive,
    Negative,
    Other,
}

/// What one run, or all together, say.
enum Finding {
    Agrees(Constant),
    Differs { input: usize, expected: String, got: String, clean: bool },
}

impl Audit<'_> {
    /// Judges exactly where that goes, else in floating point.
    fn judge(&self) -> Result<Verdict, AuditError> {
        let qubits = self.circuit.qubit_count();
        let starts: Vec<_> =
            self.inputs.list.iter().map(|input| input.start(self.places, &self.roles, qubits)).collect();
        let exact = self.eighths.map(|eighths| self.judge_exactly(&starts, eighths));
        match exact {
            Some(Ok(verdict)) => Ok(verdict),
            Some(Err(AuditError::Gate { .. } | AuditError::TooLarge { .. })) | None => {
                floating::judge(self, &starts, self.options.angle.unwrap_or(PI))
            }
            Some(Err(error)) => Err(error),
        }
    }

    fn judge_exactly(&self, starts: &[Bits], eighths: u8) -> Result<Verdict, AuditError> {
        let mut constants = Vec::new();
        // The number of free outcomes of the first run; whether every run had as many.
        let (mut free, mut even) = (0, true);
        let mut strings = 1;
        let mut at = 0;
        while at < strings {
            let draw = self.draw(at, free);
            let mut run = Run::new(self.circuit, starts, draw, self.options, self.budget);
            let end = run.follow()?;
            match end {
                End::Reached => {}
                End::Spent => return Ok(self.undecided("the budget ran out", at)),
                End::TooMany(most) => {
                    return Ok(self.undecided(&format!("more than {most} basis states at one time"), at));
                }
                End::Telling { input, bit } => {
                    let expected = "the outcome of every measurement says nothing about the input".to_owned();
                    let got = format!("the outcome at {bit} depends on the input");
                    return Ok(self.differs(&Finding::Differs { input, expected, got, clean: false }));
                }
            }
            if at == 0 {
                free = run.free();
                strings = if free < 64 && 1 << free <= STRINGS { 1 << free } else { STRINGS };
            }
            even &= run.free() == free;
            match self.compare(&run, eighths) {
                Finding::Agrees(constant) => constants.push(constant),
                differs @ Finding::Differs { .. } => return Ok(self.differs(&differs)),
            }
            at += 1;
        }
        Ok(self.agrees(&constants, free, even && 1usize.checked_shl(free as u32) == Some(strings)))
    }

    /// The strings of outcomes: all of them where they are few, else all zeros, all ones, and drawn ones.
    fn draw(&self, at: usize, free: usize) -> Draw {
        if at > 0 && free < 64 && 1 << free <= STRINGS {
            return Draw::Counted(at as u64);
        }
        match at {
            0 => Draw::Zeros,
            1 => Draw::Ones,
            _ => Draw::seeded(self.options.seed.wrapping_add(at as u64)),
        }
    }

    /// Compares the state at the end of a run with what it must be.
    fn compare(&self, run: &Run<'_>, eighths: u8) -> Finding {
        let mut factors: Vec<Exact> = Vec::with_capacity(self.inputs.list.len());
        for (at, input) in self.inputs.list.iter().enumerate() {
            let mut entries = run.state().entries(at);
            let count = entries.len();
            let Some(entry) = entries.next().filter(|_| count == 1) else {
                let got = format!("a superposition of {count} basis states");
                return Finding::Differs { input: at, expected: "one basis state".to_owned(), got, clean: false };
            };
            if let Some((expected, got, clean)) = self.compare_qubits(input, |qubit| entry.qubit(qubit)) {
                return Finding::Differs { input: at, expected, got, clean };
            }
            let is_turned = input.holds && self.roles.mark.is_none();
            factors.push(entry.amplitude.turned(if is_turned { 8 - eighths } else { 0 }));
        }
        let constant = majority(&factors);
        let kind = match constant {
            constant if constant.is_positive() => Constant::Positive,
            constant if constant.negated().is_positive() => Constant::Negative,
            _ => Constant::Other,
        };
        let wanted = if self.options.strict_phase && kind != Constant::Positive { None } else { Some(constant) };
        let wrong = factors.iter().position(|&factor| match wanted {
            Some(constant) => factor != constant,
            None => !factor.is_positive(),
        });
        match wrong {
            None => Finding::Agrees(kind),
            Some(input) => self.wrong_phase(input, factors[input], wanted, eighths),
        }
    }

    fn compare_qubits(
        &self,
        input: &Input,
        qubit: impl Fn(crate::circuit::QubitId) -> bool,
    ) -> Option<(String, String, bool)> {
        let name = |id| self.circuit.qubit_name(id);
        let bit = u8::from;
        let dirty = self.roles.work.iter().find(|&&work| qubit(work));
        if let Some(&dirty) = dirty {
            return Some((format!("{} is 0 again", name(dirty)), format!("{} is 1", name(dirty)), false));
        }
        let mut search = self.roles.search.iter().zip(&self.places.searched);
        if let Some((&changed, &was)) = search.find(|&(&id, &was)| qubit(id) != input.bits.get(was)) {
            let was = bit(input.bits.get(was));
            return Some((format!("{} stays {was}", name(changed)), format!("{} is {}", name(changed), 1 - was), true));
        }
        let mark = self.roles.mark?;
        let wanted = input.mark != input.holds;
        (qubit(mark) != wanted).then(|| {
            let from = bit(input.mark);
            (
                format!("mark goes from {from} to {}", bit(wanted)),
                format!("mark goes from {from} to {}", bit(!wanted)),
                true,
            )
        })
    }

    fn wrong_phase(&self, input: usize, factor: Exact, wanted: Option<Exact>, eighths: u8) -> Finding {
        let holds = self.inputs.list[input].holds && self.roles.mark.is_none();
        let said = |eighths: u8| match eighths {
            0 => "phase +1".to_owned(),
            4 => "phase -1".to_owned(),
            eighths => format!("phase e^({eighths} i pi/4)"),
        };
        let owed = if holds { eighths } else { 0 };
        let expected = said(owed);
        let against = if wanted.is_some() { ", against most other inputs" } else { "" };
        // The phase of the factor against the constant, where it is a multiple of pi/4.
        let constant = wanted.unwrap_or(Exact::ONE);
        let turn = (0..8u8).find(|&eighths| match wanted {
            Some(constant) => constant.turned(eighths) == factor,
            None => factor.turned(8 - eighths).is_positive(),
        });
        let got = match turn.map(|eighths| (eighths + owed) % 8) {
            Some(eighths) => said(eighths),
            None => format!("another amplitude: {:?} against {:?}", factor.0, constant.0),
        };
        Finding::Differs { input, expected: format!("{expected}{against}"), got, clean: true }
    }

    fn verdict(&self, outcome: Outcome) -> Verdict {
        Verdict {
            outcome,
            certificate: None,
            how: if self.inputs.are_all { How::Superposition } else { How::Sample },
            inputs: self.inputs.values,
            work_clean: true,
            phases: Phases::Equal,
            witness: None,
            notes: Vec::new(),
        }
    }

    fn undecided(&self, why: &str, strings: usize) -> Verdict {
        let mut verdict = self.verdict(Outcome::Undecided);
        verdict.work_clean = strings > 0;
        if strings == 0 {
            verdict.inputs = 0;
        }
        verdict.notes.push(format!("not finished: {why}; {strings} strings of outcomes were followed to the end"));
        verdict
    }

    fn differs(&self, finding: &Finding) -> Verdict {
        let mut verdict = self.verdict(Outcome::Differs);
        if let Finding::Differs { input, expected, got, clean } = finding {
            let bits = self.inputs.list[*input].bits.clone();
            verdict.work_clean = *clean;
            verdict.witness = Some(Witness { bits, expected: expected.clone(), got: got.clone() });
        }
        verdict
    }

    fn agrees(&self, constants: &[Constant], free: usize, all_strings: bool) -> Verdict {
        let mut verdict = self.verdict(if self.inputs.are_all { Outcome::Equal } else { Outcome::Undecided });
        if constants.iter().all(|&constant| constant == Constant::Negative) && self.roles.mark.is_none() {
            verdict.phases = Phases::Complement;
        } else if constants.iter().any(|&constant| constant != Constant::Positive) {
            verdict.notes.push("right up to a global phase other than 1".to_owned());
        }
        let seed = self.options.seed;
        if !self.inputs.are_all {
            let note = format!(
                "{} of all inputs: known solutions, their one-bit neighbours, others drawn from seed {seed}",
                self.inputs.values
            );
            verdict.notes.push(note);
        }
        verdict.notes.push(match free {
            0 => "complete: unitary".to_owned(),
            _ if all_strings => format!("complete: all {} strings of measurement outcomes", constants.len()),
            _ => format!(
                "measurement outcomes: {} strings of {free} were followed (all 0, all 1, {} drawn from seed {seed}); others are not covered",
                constants.len(),
                constants.len() - 2,
            ),
        });
        if !self.inputs.are_all {
            // What is complete about a sample is not the inputs.
            verdict.notes.last_mut().expect("just pushed").insert_str(0, "on these inputs ");
        }
        verdict
    }
}

/// The value that more than half of the list has, if one does (R. Boyer and J. Moore, "MJRTY: a fast majority vote
/// algorithm", in: Automated Reasoning, 1991); the list is not empty.
fn majority(list: &[Exact]) -> Exact {
    let (mut best, mut votes) = (list[0], 0usize);
    for &item in list {
        if votes == 0 {
            best = item;
        }
        votes = if item == best { votes + 1 } else { votes - 1 };
    }
    best
}
