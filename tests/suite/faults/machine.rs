//! A plain simulator over labelled basis states, written for the test of the self-test alone: floating point, one
//! entry a line, every branch of every measurement followed to its end. It judges an oracle and a whole search by
//! their definitions.

use tallymark::circuit::{Circuit, FOUND, Gate, MARK, Op, SEARCH};
use tallymark::id::Id;

/// Amplitudes and weights below this are nothing.
const NOTHING: f64 = 1e-9;
/// The label of an entry stands above its qubits.
const LABEL: u32 = 32;

/// A basis state with its label, and its amplitude.
type Entry = (u64, f64, f64);

/// Whether some branch of the circuit, from these entries, ends in a state that `is_right` refuses.
struct Walk<'c> {
    circuit: &'c Circuit,
    gates: Vec<Gate>,
    is_right: &'c dyn Fn(&[Entry]) -> bool,
    /// Measurements into bits from here on end a search and are not followed.
    finals: usize,
}

impl Walk<'_> {
    fn follow(&self, mut at: usize, mut state: Vec<Entry>, mut outcomes: Vec<bool>) -> bool {
        while let Some(gate) = self.gates.get(at) {
            at += 1;
            if gate.condition().is_some_and(|condition| outcomes[condition.bit().index()] != condition.value()) {
                continue;
            }
            let bit = 1u64 << gate.target().index();
            match gate.op() {
                Op::Measure if gate.measured().unwrap().index() >= self.finals => {}
                Op::Measure | Op::Reset => {
                    let weight = |one: bool| -> f64 {
                        let there = state.iter().filter(|entry| (entry.0 & bit != 0) == one);
                        there.map(|entry| entry.1 * entry.1 + entry.2 * entry.2).sum()
                    };
                    let likely: Vec<bool> = [false, true].into_iter().filter(|&one| weight(one) > NOTHING).collect();
                    for &one in &likely {
                        let kept = state.iter().filter(|entry| (entry.0 & bit != 0) == one);
                        let clears = gate.op() == Op::Reset;
                        let branch =
                            kept.map(|&(key, re, im)| (if clears { key & !bit } else { key }, re, im)).collect();
                        let mut outcomes = outcomes.clone();
                        if let Some(into) = gate.measured() {
                            outcomes[into.index()] = one;
                        }
                        if !self.follow(at, branch, outcomes) {
                            return false;
                        }
                    }
                    return true;
                }
                op => self.unitary(gate, op, bit, &mut state),
            }
        }
        outcomes.clear();
        (self.is_right)(&state)
    }

    fn unitary(&self, gate: &Gate, op: Op, bit: u64, state: &mut Vec<Entry>) {
        let controls = self.circuit.controls(gate);
        let holds = |key: u64| controls.iter().all(|c| (key >> c.qubit().index() & 1 == 1) != c.is_negated());
        let r = std::f64::consts::FRAC_1_SQRT_2;
        let (cos, sin) = match op {
            Op::Z => (-1.0, 0.0),
            Op::S => (0.0, 1.0),
            Op::Sdg => (0.0, -1.0),
            Op::T => (r, r),
            Op::Tdg => (r, -r),
            Op::X | Op::H => (1.0, 0.0),
            other => panic!("{other:?} is not simulated here"),
        };
        if op == Op::H {
            let mut after: Vec<Entry> = Vec::with_capacity(2 * state.len());
            for &(key, re, im) in state.iter() {
                if !holds(key) {
                    after.push((key, re, im));
                    continue;
                }
                let sign = if key & bit != 0 { -1.0 } else { 1.0 };
                after.push((key & !bit, re * r, im * r));
                after.push((key | bit, sign * re * r, sign * im * r));
            }
            after.sort_unstable_by_key(|entry| entry.0);
            state.clear();
            for entry in after {
                match state.last_mut() {
                    Some(last) if last.0 == entry.0 => (last.1, last.2) = (last.1 + entry.1, last.2 + entry.2),
                    _ => state.push(entry),
                }
            }
            state.retain(|entry| entry.1.abs() + entry.2.abs() > 1e-12);
            return;
        }
        for (key, re, im) in state.iter_mut().filter(|entry| holds(entry.0)) {
            if op == Op::X {
                *key ^= bit;
            } else if *key & bit != 0 {
                (*re, *im) = (*re * cos - *im * sin, *re * sin + *im * cos);
            }
        }
    }
}

/// The gates as often as they are applied.
fn written_out(circuit: &Circuit) -> Vec<Gate> {
    let mut gates = Vec::new();
    for block in circuit.blocks() {
        for _ in 0..block.repeat {
            gates.extend_from_slice(&circuit.gates()[block.gates.start as usize..block.gates.end as usize]);
        }
    }
    gates
}

fn places(circuit: &Circuit, name: &str) -> Vec<usize> {
    circuit.register(name).into_iter().map(Id::index).collect()
}

/// Whether a circuit is the oracle that marks the values for which `marked` holds, in every branch up to one factor.
pub(super) fn is_oracle(circuit: &Circuit, marked: &dyn Fn(u64) -> bool) -> bool {
    let (search, mark) = (places(circuit, SEARCH), places(circuit, MARK));
    let mut inputs = search.clone();
    inputs.extend(&mark);
    let spread = |value: u64| inputs.iter().enumerate().fold(0u64, |key, (at, place)| key | (value >> at & 1) << place);
    let labels = 1u64 << inputs.len();
    let start = (0..labels).map(|label| (label << LABEL | spread(label), 1.0, 0.0)).collect();
    let is_right = |state: &[Entry]| {
        let mut state = state.to_vec();
        state.sort_unstable_by_key(|entry| entry.0);
        let mut first = None;
        state.len() == labels as usize
            && state.iter().zip(0..labels).all(|(&(key, re, im), label)| {
                let holds = marked(label & ((1 << search.len()) - 1));
                let flips = holds && !mark.is_empty();
                let expected = label << LABEL | spread(label ^ u64::from(flips) << search.len());
                let sign = if holds && mark.is_empty() { -1.0 } else { 1.0 };
                let (re, im) = (re * sign, im * sign);
                let (re0, im0) = *first.get_or_insert((re, im));
                key == expected && (re - re0).abs() + (im - im0).abs() < 1e-7
            })
    };
    let walk = Walk { circuit, gates: written_out(circuit), is_right: &is_right, finals: usize::MAX };
    walk.follow(0, start, vec![false; circuit.measured_count()])
}

/// Whether a search ends, before its last measurement, in the state after so many iterations (Boyer, Brassard, Hoyer,
/// Tapp, "Tight bounds on quantum searching", 1998, section 3), up to a global phase.
pub(super) fn is_search(circuit: &Circuit, marked: &dyn Fn(u64) -> bool, iterations: u64) -> bool {
    let search = places(circuit, SEARCH);
    let values = 1u64 << search.len();
    let count = (0..values).filter(|&value| marked(value)).count() as f64;
    let theta = (count / values as f64).sqrt().asin();
    let (sin, cos) = ((2.0 * iterations as f64 + 1.0) * theta).sin_cos();
    let (on, off) = (sin / count.sqrt(), cos / (values as f64 - count).sqrt());
    let is_right = |state: &[Entry]| {
        let norm: f64 = state.iter().map(|entry| entry.1 * entry.1 + entry.2 * entry.2).sum();
        let value = |key: u64| search.iter().enumerate().fold(0, |value, (at, place)| value | (key >> place & 1) << at);
        let others = !search.iter().fold(0u64, |mask, place| mask | 1 << place);
        let mut overlap = (0.0, 0.0);
        for &(key, re, im) in state.iter().filter(|entry| entry.0 & others == 0) {
            let wanted = if marked(value(key)) { on } else { off };
            overlap = (overlap.0 + re * wanted, overlap.1 + im * wanted);
        }
        ((overlap.0 * overlap.0 + overlap.1 * overlap.1) / norm - 1.0).abs() < 1e-7
    };
    let found = circuit.measured.iter().find(|register| register.name == FOUND).expect("a search measures");
    let walk = Walk { circuit, gates: written_out(circuit), is_right: &is_right, finals: found.start as usize };
    walk.follow(0, vec![(0, 1.0, 0.0)], vec![false; circuit.measured_count()])
}
