//! Two plain simulators for the tests, written for them alone: permutations with signs over all inputs at once, and a
//! sparse state vector with measurements.

use rustc_hash::FxHashMap;
use tallymark::circuit::{Circuit, FOUND, Gate, Op, QubitId};
use tallymark::id::Id;
use tallymark::random::SplitMix64;

/// One bit for each input, for each qubit; and the sign of each input.
pub(crate) struct Classical {
    pub(crate) qubits: Vec<Vec<u64>>,
    pub(crate) sign: Vec<u64>,
}

impl Classical {
    /// All inputs of the search register (register 0 of the circuit); the other qubits are 0.
    pub(crate) fn new(circuit: &Circuit) -> Self {
        let n = circuit.qubits[0].len as usize;
        let words = (1usize << n).div_ceil(64);
        let mut qubits = vec![vec![0u64; words]; circuit.qubit_count()];
        for input in 0..1usize << n {
            for (at, qubit) in qubits.iter_mut().enumerate().take(n) {
                qubit[input / 64] |= (input as u64 >> at & 1) << (input % 64);
            }
        }
        Self { qubits, sign: vec![0; words] }
    }

    pub(crate) fn run(&mut self, circuit: &Circuit) {
        for gate in circuit.gates() {
            let mut hold = vec![u64::MAX; self.sign.len()];
            for control in circuit.controls(gate) {
                for (word, bits) in hold.iter_mut().zip(&self.qubits[control.qubit().index()]) {
                    *word &= if control.is_negated() { !bits } else { *bits };
                }
            }
            let target = gate.target().index();
            for (at, hold) in hold.into_iter().enumerate() {
                match gate.op() {
                    Op::X => self.qubits[target][at] ^= hold,
                    Op::Z => self.sign[at] ^= hold & self.qubits[target][at],
                    Op::Reset => assert_eq!(self.qubits[target][at], 0, "only what is clean is reset here"),
                    other => panic!("{other:?} is not a permutation"),
                }
            }
        }
    }
}

pub(crate) type Complex = (f64, f64);

fn times(a: Complex, b: Complex) -> Complex {
    (a.0 * b.0 - a.1 * b.1, a.0 * b.1 + a.1 * b.0)
}

/// Amplitudes that are not zero, by basis state; qubit 0 is the lowest bit.
#[derive(Clone)]
pub(crate) struct Quantum {
    pub(crate) amplitudes: FxHashMap<u128, Complex>,
    outcomes: Vec<bool>,
    random: SplitMix64,
}

impl Quantum {
    pub(crate) fn new(amplitudes: impl IntoIterator<Item = (u128, Complex)>, circuit: &Circuit, seed: u64) -> Self {
        assert!(circuit.qubit_count() <= 128);
        Self {
            amplitudes: amplitudes.into_iter().collect(),
            outcomes: vec![false; circuit.measured_count()],
            random: SplitMix64::new(seed),
        }
    }

    pub(crate) fn run(&mut self, circuit: &Circuit) {
        for block in circuit.blocks() {
            for _ in 0..block.repeat {
                for gate in &circuit.gates()[block.gates.start as usize..block.gates.end as usize] {
                    self.gate(circuit, gate);
                }
            }
        }
    }

    /// Runs a whole search up to its last measurement.
    pub(crate) fn run_before_found(&mut self, circuit: &Circuit) {
        let found = circuit.measured.iter().find(|register| register.name == FOUND).unwrap();
        for block in circuit.blocks() {
            for _ in 0..block.repeat {
                for gate in &circuit.gates()[block.gates.start as usize..block.gates.end as usize] {
                    if gate.measured().is_none_or(|bit| bit.index() < found.start as usize) {
                        self.gate(circuit, gate);
                    }
                }
            }
        }
    }

    fn gate(&mut self, circuit: &Circuit, gate: &Gate) {
        if gate.condition().is_some_and(|c| self.outcomes[c.bit().index()] != c.value()) {
            return;
        }
        let target = gate.target();
        let bit = 1u128 << target.index();
        match gate.op() {
            Op::Measure => self.outcomes[gate.measured().unwrap().index()] = self.project(target),
            Op::Reset => {
                if self.project(target) {
                    self.amplitudes = self.amplitudes.drain().map(|(state, a)| (state ^ bit, a)).collect();
                }
            }
            op => {
                let held = |state: u128| {
                    let holds =
                        |c: &tallymark::circuit::Control| (state >> c.qubit().index() & 1 == 1) != c.is_negated();
                    circuit.controls(gate).iter().all(holds)
                };
                let mut after: FxHashMap<u128, Complex> = FxHashMap::default();
                let mut add = |state: u128, a: Complex| {
                    let sum = after.entry(state).or_insert((0.0, 0.0));
                    *sum = (sum.0 + a.0, sum.1 + a.1);
                };
                let h = std::f64::consts::FRAC_1_SQRT_2;
                for (&state, &a) in &self.amplitudes {
                    if !held(state) {
                        add(state, a);
                        continue;
                    }
                    let one = state & bit != 0;
                    let phase = |p: Complex| if one { times(a, p) } else { a };
                    match op {
                        Op::X => add(state ^ bit, a),
                        Op::H => {
                            add(state & !bit, (a.0 * h, a.1 * h));
                            add(state | bit, if one { (-a.0 * h, -a.1 * h) } else { (a.0 * h, a.1 * h) });
                        }
                        Op::Z => add(state, phase((-1.0, 0.0))),
                        Op::S => add(state, phase((0.0, 1.0))),
                        Op::Sdg => add(state, phase((0.0, -1.0))),
                        Op::T => add(state, phase((h, h))),
                        Op::Tdg => add(state, phase((h, -h))),
                        other => panic!("{other:?} is not simulated here"),
                    }
                }
                after.retain(|_, a| a.0 * a.0 + a.1 * a.1 > 1e-24);
                self.amplitudes = after;
            }
        }
    }

    /// Measures a qubit, with an outcome drawn by its probability.
    fn project(&mut self, qubit: QubitId) -> bool {
        let bit = 1u128 << qubit.index();
        let weight = |one: bool, amplitudes: &FxHashMap<u128, Complex>| -> f64 {
            amplitudes.iter().filter(|(state, _)| (*state & bit != 0) == one).map(|(_, a)| a.0 * a.0 + a.1 * a.1).sum()
        };
        let (zero, one) = (weight(false, &self.amplitudes), weight(true, &self.amplitudes));
        let outcome = self.random.unit() * (zero + one) < one;
        let norm = (if outcome { one } else { zero } / (zero + one)).sqrt();
        self.amplitudes.retain(|state, _| (state & bit != 0) == outcome);
        self.amplitudes.values_mut().for_each(|a| *a = (a.0 / norm, a.1 / norm));
        outcome
    }
}
