//! Gate by gate: the whole circuit on a sparse state of all its qubits, for small ones of any shape.

use super::complex::Complex;
use super::sparse::{Sparse, is_set};
use crate::budget::Budget;
use crate::circuit::{Circuit, Gate, MeasuredId, Op, QubitId};
use crate::id::Id;
use crate::problem::Bits;
use crate::random::SplitMix64;

/// At most so many basis states.
pub(super) const MOST_STATES: usize = 1 << 20;

/// How it ended.
pub(super) struct Ran {
    /// The probability of the marked values before the first loop and after each turn of a loop.
    pub(super) curve: Vec<f64>,
    /// What the last measurement gives, with its probability; likeliest first, then by value.
    pub(super) results: Vec<(Bits, f64)>,
    /// Measurements inside the circuit of which both outcomes could have come.
    pub(super) drawn: u64,
}

/// Why it did not end.
pub(super) enum Stopped {
    States,
    Spent,
}

/// Runs the gates up to `tail`, where the last measurement begins.
pub(super) fn run(
    circuit: &Circuit,
    search: &[QubitId],
    tail: usize,
    marked: Option<&[u64]>,
    seed: u64,
    budget: &Budget,
) -> Result<Ran, Stopped> {
    let mut machine = Machine {
        circuit,
        state: Sparse::new(circuit.qubit_count()),
        bits: vec![false; circuit.measured_count()],
        random: SplitMix64::new(seed),
        drawn: 0,
    };
    let success = |state: &Sparse| {
        let marked = marked?;
        let value =
            |row: &[u64]| search.iter().enumerate().map(|(at, &q)| usize::from(is_set(row, q)) << at).sum::<usize>();
        let is_marked = |row: &[u64]| marked[value(row) / 64] >> (value(row) % 64) & 1 == 1;
        Some(state.entries().filter(|(row, _)| is_marked(row)).map(|(_, a)| a.norm()).sum::<f64>())
    };
    let mut curve = Vec::new();
    for block in circuit.blocks() {
        let gates = block.gates.start as usize..(block.gates.end as usize).min(tail);
        let gates = circuit.gates().get(gates).unwrap_or(&[]);
        for turn in 0..if gates.is_empty() { 0 } else { block.repeat } {
            if turn == 0 && block.repeat != 1 && curve.is_empty() {
                curve.extend(success(&machine.state));
            }
            for gate in gates {
                machine.apply(gate);
                if machine.state.len() > MOST_STATES {
                    return Err(Stopped::States);
                }
                if machine.state.len() > 256 && budget.spent() {
                    return Err(Stopped::Spent);
                }
            }
            if budget.spent() {
                return Err(Stopped::Spent);
            }
            if block.repeat != 1 {
                curve.extend(success(&machine.state));
            }
        }
    }
    let last = success(&machine.state);
    if curve.is_empty()
        || circuit.blocks().last().is_some_and(|block| block.repeat == 1 && (block.gates.start as usize) < tail)
    {
        curve.extend(last);
    }
    Ok(Ran { curve, results: machine.results(&circuit.gates()[tail..]), drawn: machine.drawn })
}

struct Machine<'c> {
    circuit: &'c Circuit,
    state: Sparse,
    bits: Vec<bool>,
    random: SplitMix64,
    drawn: u64,
}

impl Machine<'_> {
    fn apply(&mut self, gate: &Gate) {
        if gate.condition().is_some_and(|condition| self.bits[condition.bit().index()] != condition.value()) {
            return;
        }
        if gate.op().is_unitary() {
            return self.state.apply(self.circuit, gate);
        }
        let chance = self.state.chance(gate.target());
        let free = chance.min(1.0 - chance) > 1e-12;
        self.drawn += u64::from(free && gate.op() == Op::Measure);
        let outcome = if free { self.random.unit() < chance } else { chance > 0.5 };
        if free {
            self.state.project(gate.target(), outcome);
        }
        match gate.measured() {
            Some(bit) => self.bits[bit.index()] = outcome,
            None if outcome => self.state.flip(gate.target()),
            None => {}
        }
    }

    /// What the last measurements give.
    fn results(&self, measurements: &[Gate]) -> Vec<(Bits, f64)> {
        let mut from: Vec<(MeasuredId, QubitId)> =
            measurements.iter().filter_map(|gate| Some((gate.measured()?, gate.target()))).collect();
        from.sort_by_key(|&(bit, _)| bit);
        let mut all: Vec<(Bits, f64)> = self
            .state
            .entries()
            .map(|(row, amplitude): (&[u64], Complex)| {
                (from.iter().map(|&(_, qubit)| is_set(row, qubit)).collect::<Bits>(), amplitude.norm())
            })
            .collect();
        all.sort_by(|a, b| a.0.cmp(&b.0));
        let mut results: Vec<(Bits, f64)> = Vec::new();
        for (bits, chance) in all {
            match results.last_mut() {
                Some(last) if last.0 == bits => last.1 += chance,
                _ => results.push((bits, chance)),
            }
        }
        results.sort_by(|a, b| b.1.total_cmp(&a.1).then_with(|| a.0.cmp(&b.0)));
        results
    }
}
