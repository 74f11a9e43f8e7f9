//! Circuit against circuit: do two circuits apply the same operator to the registers they share?
//!
//! Input: two circuits whose registers besides `work` have the same names and sizes. Output: a [`Verdict`], with a
//! witness over those registers in the order of the first circuit, `search[0]` first where that is the first one. Work
//! qubits begin as 0 and must end as 0 in both, and a global phase is free, as for an oracle.
//!
//! Circuits that keep basis states are run on every input, 64 at a time (`words`). Others, and those with too many inputs,
//! are read as sums over paths (`by_paths`); where that does not close, they are run on a superposition of all inputs
//! (`columns`), for all strings of measurement outcomes where these are few. [`mod@parting`] says where on the way
//! the two part.

mod by_paths;
pub(in crate::judge::audit) mod columns;
pub mod parting;
mod superposed;
mod text;
pub(in crate::judge::audit) mod words;

pub(in crate::judge::audit) use by_paths::compare_by_paths;
pub use parting::{Parting, parting};
pub(in crate::judge::audit) use superposed::compare_superposed;
pub use text::gate_in_words;

use self::words::{Words, input_word};
use super::eighths::with_eighths;
use super::{AuditError, How, Options, Outcome, Phases, Verdict, Witness, oracle};
use crate::budget::Budget;
use crate::circuit::{Circuit, QubitId, Register, WORK};
use crate::id::Id;
use crate::problem::Bits;
use crate::random::SplitMix64;

/// How to compare.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub struct CompareOptions {
    /// Whether a global phase counts as a difference.
    pub strict_phase: bool,
    /// The seed of what is drawn.
    pub seed: u64,
    /// Inputs to draw where there are too many to try all.
    pub sample: usize,
    /// Up to so many strings of measurement outcomes are all followed; beyond, a few.
    pub all_strings: usize,
}

impl Default for CompareOptions {
    fn default() -> Self {
        Self { strict_phase: false, seed: 1, sample: 1 << 14, all_strings: 1 << 8 }
    }
}

impl From<&Options> for CompareOptions {
    fn from(options: &Options) -> Self {
        Self { strict_phase: options.strict_phase, seed: options.seed, sample: options.sample, ..Self::default() }
    }
}

/// All inputs are run 64 at a time up to so many input qubits.
const EXHAUSTIVE_BITS: usize = 26;

/// The qubits that two circuits share.
#[derive(Clone, Debug)]
pub(in crate::judge::audit) struct Shared {
    /// In the first circuit.
    pub(in crate::judge::audit) first: Vec<QubitId>,
    /// The same qubits in the second.
    pub(in crate::judge::audit) second: Vec<QubitId>,
}

impl Shared {
    /// The input qubits of two circuits.
    pub(in crate::judge::audit) fn of(first: &Circuit, second: &Circuit) -> Result<Self, AuditError> {
        let inputs = |circuit: &Circuit| -> Vec<Register> {
            circuit.qubits.iter().filter(|register| register.name != WORK).cloned().collect()
        };
        let (registers, others) = (inputs(first), inputs(second));
        let said = |register: &Register| format!("{}[{}]", register.name, register.len);
        let has = |list: &[Register], wanted: &Register| list.iter().any(|register| said(register) == said(wanted));
        let odd = registers.iter().find(|register| !has(&others, register));
        if let Some(odd) = odd.or_else(|| others.iter().find(|register| !has(&registers, register))) {
            return Err(AuditError::OtherInputs { what: format!("only one has {}", said(odd)) });
        }
        if registers.is_empty() {
            return Err(AuditError::NothingToSearch);
        }
        let all = |circuit: &Circuit| registers.iter().flat_map(|register| circuit.register(&register.name)).collect();
        Ok(Self { first: all(first), second: all(second) })
    }

    /// The qubits of a circuit that are not shared.
    pub(in crate::judge::audit) fn rest(circuit: &Circuit, inputs: &[QubitId]) -> Vec<QubitId> {
        (0..circuit.qubit_count()).map(QubitId::new).filter(|qubit| !inputs.contains(qubit)).collect()
    }
}

/// Compares a circuit with a good one.
pub fn compare(
    good: &Circuit,
    circuit: &Circuit,
    options: &CompareOptions,
    budget: &Budget,
) -> Result<Verdict, AuditError> {
    let shared = Shared::of(good, circuit)?;
    oracle::check_gates(good)?;
    oracle::check_gates(circuit)?;
    let exact = [good, circuit].map(|circuit| with_eighths(circuit, options.strict_phase));
    let is_plain = exact.iter().all(|circuit| oracle::keeps_basis_states(circuit));
    let by_rows = is_plain.then(|| Sides::new(&exact[0], &exact[1], &shared, options).compare(budget));
    if let Some(verdict) = by_rows.as_ref().filter(|verdict| verdict.outcome != Outcome::Undecided) {
        return Ok(verdict.clone());
    }
    let open = match compare_by_paths(good, circuit, &shared, options, budget)? {
        Ok(verdict) if verdict.outcome != Outcome::Undecided || by_rows.is_none() => return Ok(verdict),
        Ok(verdict) => verdict.notes.join("; "),
        Err(open) => open,
    };
    let mut verdict = match by_rows {
        Some(verdict) => verdict,
        None => compare_superposed(good, circuit, &shared, options, budget)?,
    };
    verdict.notes.push(format!("as sums over paths: {open}"));
    Ok(verdict)
}

/// The verdict before anything was found.
fn open(how: How, inputs: u128) -> Verdict {
    Verdict {
        outcome: Outcome::Undecided,
        how,
        inputs,
        work_clean: true,
        phases: Phases::Equal,
        witness: None,
        certificate: None,
        notes: Vec::new(),
    }
}

/// One circuit of a comparison of circuits that keep basis states.
struct Side<'c> {
    circuit: &'c Circuit,
    inputs: &'c [QubitId],
    work: Vec<QubitId>,
    /// What each `reset` finds on the first input; it must be the same on all.
    resets: Option<Vec<bool>>,
}

impl Side<'_> {
    fn run(&mut self, inputs: &[u64]) -> Words {
        let mut words = Words::new(self.circuit);
        self.inputs.iter().zip(inputs).for_each(|(qubit, &word)| words.qubits[qubit.index()] = word);
        words.run(self.circuit);
        self.resets.get_or_insert_with(|| words.resets.iter().map(|word| word & 1 == 1).collect());
        words
    }

    /// The lanes in which work is dirty, or a `reset` found something else than on the first input.
    fn dirty(&self, words: &Words) -> u64 {
        let left = self.work.iter().fold(0, |dirty, qubit| dirty | words.qubits[qubit.index()]);
        let expected = self.resets.iter().flatten();
        words
            .resets
            .iter()
            .zip(expected)
            .fold(left, |dirty, (word, &value)| dirty | word ^ if value { u64::MAX } else { 0 })
    }
}

struct Sides<'c> {
    good: Side<'c>,
    other: Side<'c>,
    options: &'c CompareOptions,
    /// The phase of the second circuit against the first on the first input.
    phase: Option<u8>,
    /// Inputs whose phase is another, and the first of them.
    turned: (u128, Option<Witness>),
    first_input: Option<Bits>,
    inputs: u128,
}

impl<'c> Sides<'c> {
    fn new(good: &'c Circuit, other: &'c Circuit, shared: &'c Shared, options: &'c CompareOptions) -> Self {
        let side = |circuit, inputs| Side { circuit, inputs, work: Shared::rest(circuit, inputs), resets: None };
        Self {
            good: side(good, &shared.first),
            other: side(other, &shared.second),
            options,
            phase: None,
            turned: (0, None),
            first_input: None,
            inputs: 0,
        }
    }

    fn compare(mut self, budget: &Budget) -> Verdict {
        let bits = self.good.inputs.len();
        let is_all = bits <= EXHAUSTIVE_BITS;
        let mut random = SplitMix64::new(self.options.seed);
        let blocks = if is_all { 1u64 << bits.saturating_sub(6) } else { (self.options.sample as u64).div_ceil(64) };
        let lanes = if is_all && bits < 6 { 1u64 << bits } else { 64 };
        let mut found = None;
        let mut done = 0;
        while done < blocks && found.is_none() && !budget.spent() {
            let words: Vec<u64> = match is_all {
                true => (0..bits).map(|bit| input_word(bit, done)).collect(),
                false => (0..bits).map(|_| random.next_u64()).collect(),
            };
            found = self.block(&words, lanes as usize);
            done += 1;
            self.inputs += u128::from(lanes);
            if done.is_multiple_of(1 << 10) {
                budget.report("compare", done, Some(blocks));
            }
        }
        let is_complete = is_all && done == blocks;
        let mut verdict = open(if is_all { How::Exhaustive } else { How::Sample }, self.inputs);
        verdict.work_clean = found.as_ref().is_none_or(|(_, is_clean)| *is_clean);
        verdict.witness = found.map(|(witness, _)| witness).or_else(|| self.wrong_phase());
        verdict.outcome = match (&verdict.witness, is_complete) {
            (Some(_), _) => Outcome::Differs,
            (None, true) => Outcome::Equal,
            (None, false) => Outcome::Undecided,
        };
        if verdict.outcome == Outcome::Equal && self.phase != Some(0) {
            verdict.notes.push(format!("the global phases differ by e^({} i pi/4)", self.phase.unwrap_or(0)));
        }
        verdict
    }

    /// Runs 64 inputs; the first that anything but the phase is wrong on, and whether work was clean there.
    fn block(&mut self, inputs: &[u64], lanes: usize) -> Option<(Witness, bool)> {
        let (good, other) = (self.good.run(inputs), self.other.run(inputs));
        let mask = if lanes == 64 { u64::MAX } else { (1 << lanes) - 1 };
        let dirty = (self.good.dirty(&good) | self.other.dirty(&other)) & mask;
        let pairs = || self.good.inputs.iter().zip(self.other.inputs);
        let apart =
            pairs().fold(dirty, |apart, (a, b)| apart | good.qubits[a.index()] ^ other.qubits[b.index()]) & mask;
        let input = |lane: usize| -> Bits { inputs.iter().map(|word| word >> lane & 1 == 1).collect() };
        if apart != 0 {
            let lane = apart.trailing_zeros() as usize;
            let say = |side: &Side, words: &Words| {
                let value: Bits =
                    side.inputs.iter().map(|qubit| words.qubits[qubit.index()] >> lane & 1 == 1).collect();
                let tail = if side.dirty(words) >> lane & 1 == 1 { ", work not clean" } else { "" };
                format!("{value}{tail}")
            };
            let (expected, got) = (say(&self.good, &good), say(&self.other, &other));
            return Some((Witness { bits: input(lane), expected, got }, dirty >> lane & 1 == 0));
        }
        let reference = *self.phase.get_or_insert_with(|| match self.options.strict_phase {
            true => 0,
            false => (other.eighths(0) + 8 - good.eighths(0)) % 8,
        });
        self.first_input.get_or_insert_with(|| input(0));
        for lane in 0..lanes {
            let turn = (other.eighths(lane) + 8 - good.eighths(lane)) % 8;
            if turn != reference {
                self.turned.0 += 1;
                self.turned.1.get_or_insert_with(|| phase_witness(input(lane), (turn + 8 - reference) % 8));
            }
        }
        None
    }

    /// The witness of a wrong phase: an input of the minority.
    fn wrong_phase(&mut self) -> Option<Witness> {
        let (count, first) = (self.turned.0, self.turned.1.take()?);
        match self.first_input.take() {
            Some(input) if 2 * count > self.inputs && !self.options.strict_phase => {
                Some(Witness { bits: input, ..first })
            }
            _ => Some(first),
        }
    }
}

fn phase_witness(bits: Bits, turn: u8) -> Witness {
    let got = format!("a phase turned by {turn}/4 of pi against other inputs");
    Witness { bits, expected: "the phase of the good circuit".to_owned(), got }
}
