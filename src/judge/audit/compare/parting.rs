//! Where two circuits part on one input.
//!
//! Input: a good circuit, another one, an input that shows a difference. Output: the first gate of the other after
//! which a qubit, or else a phase, is not what it is in the good one.
//!
//! Both are followed gate by gate (of a measurement whose outcome is free, the outcome 0). Gates that both lists have in
//! common from the start and from the end are taken for the same: where the rest is short, the states after it are
//! compared one by one. Otherwise the states themselves are aligned: the parting is the first state of the other
//! circuit that does not come later in the good one. Where the given input shows nothing on the way (its phase is
//! right and all others are wrong), inputs with few ones are tried.

use std::hash::{Hash, Hasher};

use rustc_hash::{FxHashMap, FxHasher};

use super::Shared;
use super::columns::start;
use super::gate_in_words;
use crate::budget::Budget;
use crate::circuit::{Circuit, Gate, QubitId, SEARCH, WORK};
use crate::judge::audit::superposition::run::{Draw, Run};
use crate::judge::audit::{AuditError, Options};
use crate::problem::Bits;

/// The longest run that is followed, its blocks written out.
const MOST_STEPS: usize = 1 << 16;
/// Gate lists that differ in no more gates than this are aligned by their gates.
const SHORT: usize = 32;
/// Inputs that are tried after the one given.
const MORE_INPUTS: usize = 64;

/// Where two circuits part.
#[derive(Clone, PartialEq, Eq, Debug)]
pub struct Parting {
    /// The input, over the registers that the two share.
    pub input: Bits,
    /// The gate of the circuit, from 0 in the order of the file, with its text; `None` before the first gate.
    pub gate: Option<(usize, String)>,
    /// The gate of the good circuit at the same point.
    pub good_gate: Option<(usize, String)>,
    /// The qubit that has another value; `None` where only a phase or an amplitude is another.
    pub qubit: Option<String>,
    /// Its values in the circuit and in the good one: `0`, `1`, or `0 and 1` in a superposition.
    pub values: Option<(&'static str, &'static str)>,
}

impl Parting {
    /// In one sentence.
    pub fn in_words(&self) -> String {
        let place = match &self.gate {
            Some((at, text)) => format!("after gate {at} `{text}`"),
            None => "before the first gate".to_owned(),
        };
        let good = match &self.good_gate {
            Some((at, text)) => format!("in the good circuit after gate {at} `{text}`"),
            None => "in the good circuit at the start".to_owned(),
        };
        let what = match (&self.qubit, self.values) {
            (Some(qubit), Some((got, wanted))) => format!("{qubit} is {got} ({wanted} {good})"),
            _ => format!("the phase is another than {good}"),
        };
        format!("{place} {what}, on input {}", self.input)
    }
}

/// Finds where two circuits part. `search` is the value of the search register of the good circuit that shows the
/// difference; `None` where they cannot be followed or part on none of the inputs tried.
pub fn parting(
    good: &Circuit,
    circuit: &Circuit,
    search: &Bits,
    budget: &Budget,
) -> Result<Option<Parting>, AuditError> {
    let shared = Shared::of(good, circuit)?;
    let pair = Pair::new(good, circuit, shared);
    let Some(pair) = pair else { return Ok(None) };
    let bits = pair.shared.first.len();
    let light = |ones: u32| (0..1u64 << bits.min(10)).filter(move |value| value.count_ones() == ones);
    let more = (0..=2).flat_map(light).take(MORE_INPUTS).map(|value| Bits::from_number(value.into(), bits));
    for input in pair.inputs(search).into_iter().chain(more) {
        if budget.spent() {
            return Ok(None);
        }
        if let Some(parting) = pair.part(&input, budget)? {
            return Ok(Some(parting));
        }
    }
    Ok(None)
}

/// The places of the gates in the order in which they are applied.
fn steps(circuit: &Circuit) -> Option<Vec<u32>> {
    let mut steps = Vec::new();
    for block in circuit.blocks() {
        for _ in 0..block.repeat {
            if steps.len() + block.gates.len() > MOST_STEPS {
                return None;
            }
            steps.extend(block.gates.clone());
        }
    }
    Some(steps)
}

struct Pair<'c> {
    good: Way<'c>,
    other: Way<'c>,
    shared: Shared,
}

/// One of the two circuits.
struct Way<'c> {
    circuit: &'c Circuit,
    steps: Vec<u32>,
    /// The qubits that both circuits have, by name, in the order of the good circuit.
    common: Vec<QubitId>,
}

impl<'c> Pair<'c> {
    fn new(good: &'c Circuit, other: &'c Circuit, shared: Shared) -> Option<Self> {
        let (mut ours, mut theirs) = (shared.first.clone(), shared.second.clone());
        ours.extend(good.register(WORK));
        theirs.extend(other.register(WORK));
        let both = ours.len().min(theirs.len());
        ours.truncate(both);
        theirs.truncate(both);
        let good = Way { circuit: good, steps: steps(good)?, common: ours };
        let other = Way { circuit: other, steps: steps(other)?, common: theirs };
        Some(Self { good, other, shared })
    }

    /// The input with this value of the search register, with 0 and with 1 in the other shared qubits.
    fn inputs(&self, search: &Bits) -> Vec<Bits> {
        let register = self.good.circuit.register(SEARCH);
        let value = |other: bool| -> Bits {
            let bit = |qubit: &QubitId| match register.iter().position(|id| id == qubit) {
                Some(at) if at < search.len() => search.at(at),
                _ => other,
            };
            self.shared.first.iter().map(bit).collect()
        };
        let mut inputs = match search.len() == self.shared.first.len() {
            true => vec![search.clone()],
            false => vec![value(false), value(true)],
        };
        inputs.dedup();
        inputs
    }

    fn part(&self, input: &Bits, budget: &Budget) -> Result<Option<Parting>, AuditError> {
        let good = self.good.trail(&start(self.good.circuit, &self.shared.first, input), budget)?;
        let other = self.other.trail(&start(self.other.circuit, &self.shared.second, input), budget)?;
        let (Some(good), Some(other)) = (good, other) else { return Ok(None) };
        let Some((ours, theirs)) = self.align(&good, &other) else { return Ok(None) };
        let gate = |way: &Way, done: usize| {
            let at = *way.steps.get(done.checked_sub(1)?)? as usize;
            Some((at, gate_in_words(way.circuit, &way.circuit.gates()[at])))
        };
        let values = self.values(input, ours, theirs, budget)?;
        Ok(Some(Parting {
            input: input.clone(),
            gate: gate(&self.other, theirs),
            good_gate: gate(&self.good, ours),
            qubit: values.map(|(at, ..)| self.other.circuit.qubit_name(self.other.common[at])),
            values: values.map(|(_, got, wanted)| (got, wanted)),
        }))
    }

    /// How many gates of each are done where the states part.
    fn align(&self, good: &[u64], other: &[u64]) -> Option<(usize, usize)> {
        let (ours, theirs) = (self.good.steps.len(), self.other.steps.len());
        let same = |a: u32, b: u32| self.same_gate(&self.gate(&self.good, a), &self.gate(&self.other, b));
        let pairs = || self.good.steps.iter().zip(&self.other.steps);
        let prefix = pairs().take_while(|&(&a, &b)| same(a, b)).count();
        let back = self.good.steps.iter().rev().zip(self.other.steps.iter().rev());
        let most = ours.min(theirs) - prefix;
        let suffix = back.take(most).take_while(|&(&a, &b)| same(a, b)).count();
        if (ours - prefix - suffix).max(theirs - prefix - suffix) <= SHORT {
            let left = (0..=suffix).find(|left| good[ours - suffix + left] != other[theirs - suffix + left])?;
            return Some((ours - suffix + left, theirs - suffix + left));
        }
        let mut places: FxHashMap<u64, Vec<usize>> = FxHashMap::default();
        for (at, &state) in good.iter().enumerate() {
            places.entry(state).or_default().push(at);
        }
        let mut at = 0;
        for (done, state) in other.iter().enumerate() {
            let later = places.get(state).and_then(|list| list.get(list.partition_point(|&place| place < at)));
            match later {
                Some(&place) => at = place,
                None => return Some((at, done)),
            }
        }
        (good.last() != other.last()).then_some((ours, theirs))
    }

    fn gate(&self, way: &Way, at: u32) -> Gate {
        way.circuit.gates()[at as usize]
    }

    fn same_gate(&self, a: &Gate, b: &Gate) -> bool {
        let place = |way: &Way, qubit: QubitId| way.common.iter().position(|&id| id == qubit);
        let same = |a, b| place(&self.good, a) == place(&self.other, b);
        let (ours, theirs) = (self.good.circuit.controls(a), self.other.circuit.controls(b));
        a.op() == b.op()
            && same(a.target(), b.target())
            && a.condition() == b.condition()
            && a.measured() == b.measured()
            && ours.len() == theirs.len()
            && ours.iter().zip(theirs).all(|(a, b)| a.is_negated() == b.is_negated() && same(a.qubit(), b.qubit()))
            && self.good.circuit.angle(a) == self.other.circuit.angle(b)
    }

    /// The first common qubit, work qubits first, with other values after so many gates; its values in both.
    fn values(
        &self,
        input: &Bits,
        ours: usize,
        theirs: usize,
        budget: &Budget,
    ) -> Result<Option<(usize, &'static str, &'static str)>, AuditError> {
        let wanted = self.good.values(&start(self.good.circuit, &self.shared.first, input), ours, budget)?;
        let got = self.other.values(&start(self.other.circuit, &self.shared.second, input), theirs, budget)?;
        let inputs = self.shared.first.len();
        let mut order = (inputs..wanted.len()).chain(0..inputs);
        Ok(order.find(|&at| got[at] != wanted[at]).map(|at| (at, got[at], wanted[at])))
    }
}

impl Way<'_> {
    /// A fingerprint of the state after each number of gates, before the first one too; `None` where a run does not
    /// get to its end.
    fn trail(&self, start: &Bits, budget: &Budget) -> Result<Option<Vec<u64>>, AuditError> {
        let (options, starts) = (Options { strict_phase: true, ..Options::default() }, [start.clone()]);
        let mut run = Run::new(self.circuit, &starts, Draw::Zeros, &options, budget);
        let mut trail = vec![self.fingerprint(&run)];
        for &at in &self.steps {
            if budget.spent() || run.step(&self.circuit.gates()[at as usize])?.is_some() {
                return Ok(None);
            }
            trail.push(self.fingerprint(&run));
        }
        Ok(Some(trail))
    }

    fn fingerprint(&self, run: &Run<'_>) -> u64 {
        let entry = |entry: crate::judge::audit::state::Entry<'_, _>| {
            let value: Bits = self.common.iter().map(|&qubit| entry.qubit(qubit)).collect();
            let amplitude: crate::judge::audit::state::amplitude::Exact = entry.amplitude;
            (value, amplitude.0)
        };
        let mut entries: Vec<_> = run.state().entries(0).map(entry).collect();
        entries.sort();
        let mut hasher = FxHasher::default();
        entries.hash(&mut hasher);
        hasher.finish()
    }

    /// The values that each common qubit has in the state after so many gates.
    fn values(&self, start: &Bits, done: usize, budget: &Budget) -> Result<Vec<&'static str>, AuditError> {
        let (options, starts) = (Options { strict_phase: true, ..Options::default() }, [start.clone()]);
        let mut run = Run::new(self.circuit, &starts, Draw::Zeros, &options, budget);
        for &at in &self.steps[..done] {
            run.step(&self.circuit.gates()[at as usize])?;
        }
        let value = |&qubit: &QubitId| {
            let occurs = |value: bool| run.state().entries(0).any(|entry| entry.qubit(qubit) == value);
            match (occurs(false), occurs(true)) {
                (true, true) => "0 and 1",
                (false, true) => "1",
                _ => "0",
            }
        };
        Ok(self.common.iter().map(value).collect())
    }
}
