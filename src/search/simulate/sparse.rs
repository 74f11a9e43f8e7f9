//! A state of all qubits as the basis states that have an amplitude: gate by gate, whatever the gates are.
//!
//! Rows of 64 qubits a word lie one after the other; no two rows are equal. A gate that mixes the two values of a qubit
//! pairs the rows that differ in that qubit only.

use std::f64::consts::FRAC_1_SQRT_2;

use super::complex::Complex;
use crate::circuit::{Circuit, Control, Gate, Op, QubitId};
use crate::id::Id;

/// Amplitudes whose square is below this are taken for nothing.
const NOTHING: f64 = 1e-28;

/// The state.
#[derive(Clone, Debug)]
pub(super) struct Sparse {
    width: usize,
    rows: Vec<u64>,
    amplitudes: Vec<Complex>,
}

impl Sparse {
    /// All qubits in |0>.
    pub(super) fn new(qubits: usize) -> Self {
        let width = qubits.div_ceil(64).max(1);
        Self { width, rows: vec![0; width], amplitudes: vec![Complex::ONE] }
    }

    /// How many basis states.
    pub(super) fn len(&self) -> usize {
        self.amplitudes.len()
    }

    /// The basis states with their amplitudes.
    pub(super) fn entries(&self) -> impl Iterator<Item = (&[u64], Complex)> {
        self.rows.chunks_exact(self.width).zip(self.amplitudes.iter().copied())
    }

    /// Flips qubits in every basis state.
    pub(super) fn flip(&mut self, qubit: QubitId) {
        let (word, bit) = place(qubit);
        self.rows.chunks_exact_mut(self.width).for_each(|row| row[word] ^= bit);
    }

    /// Applies a unitary gate; its condition is the caller's.
    pub(super) fn apply(&mut self, circuit: &Circuit, gate: &Gate) {
        let controls = circuit.controls(gate);
        let angle = circuit.angle(gate).unwrap_or(0.0);
        let target = gate.target();
        match gate.op() {
            Op::X => {
                let (word, bit) = place(target);
                for row in self.rows.chunks_exact_mut(self.width) {
                    if holds(row, controls) {
                        row[word] ^= bit;
                    }
                }
            }
            Op::H => self.mix(controls, target, [[1.0, 1.0], [1.0, -1.0]].map(|r| r.map(|x| x * FRAC_1_SQRT_2))),
            Op::Ry => {
                let (sin, cos) = (angle / 2.0).sin_cos();
                self.mix(controls, target, [[cos, -sin], [sin, cos]]);
            }
            Op::Measure | Op::Reset => unreachable!("not unitary"),
            op => {
                let [zero, one] = phases(op, angle);
                let (word, bit) = place(target);
                for (row, amplitude) in self.rows.chunks_exact(self.width).zip(&mut self.amplitudes) {
                    if holds(row, controls) {
                        *amplitude = *amplitude * if row[word] & bit == 0 { zero } else { one };
                    }
                }
            }
        }
    }

    fn mix(&mut self, controls: &[Control], target: QubitId, by: [[f64; 2]; 2]) {
        let (word, bit) = place(target);
        let order = self.order(word, bit);
        let (mut rows, mut amplitudes) = (Vec::with_capacity(self.rows.len() * 2), Vec::new());
        let mut put = |row: &[u64], value: u64, amplitude: Complex| {
            if amplitude.norm() > NOTHING {
                let start = rows.len();
                rows.extend_from_slice(row);
                rows[start + word] = row[word] & !bit | value;
                amplitudes.push(amplitude);
            }
        };
        let mut at = 0;
        while at < order.len() {
            let row = self.row(order[at]);
            let partner = order.get(at + 1).copied().filter(|&next| are_partners(row, self.row(next), word, bit));
            let mut pair = [Complex::ZERO; 2];
            for entry in [Some(order[at]), partner].into_iter().flatten() {
                pair[usize::from(self.row(entry)[word] & bit != 0)] = self.amplitudes[entry as usize];
            }
            at += 1 + usize::from(partner.is_some());
            if holds(row, controls) {
                let mixed = |row: [f64; 2]| pair[0].scaled(row[0]) + pair[1].scaled(row[1]);
                pair = by.map(mixed);
            }
            put(row, 0, pair[0]);
            put(row, bit, pair[1]);
        }
        (self.rows, self.amplitudes) = (rows, amplitudes);
    }

    /// The entries in an order in which partners are neighbours.
    fn order(&self, word: usize, bit: u64) -> Vec<u32> {
        let mut order: Vec<u32> = (0..self.len() as u32).collect();
        let key = |&at: &u32| {
            let row = self.row(at);
            row.iter().enumerate().map(move |(index, &value)| if index == word { value & !bit } else { value })
        };
        order.sort_unstable_by(|a, b| key(a).cmp(key(b)).then(a.cmp(b)));
        order
    }

    fn row(&self, at: u32) -> &[u64] {
        &self.rows[at as usize * self.width..(at as usize + 1) * self.width]
    }

    /// The probability that the qubit is 1.
    pub(super) fn chance(&self, qubit: QubitId) -> f64 {
        let is_one = |row: &[u64]| is_set(row, qubit);
        self.entries().filter(|(row, _)| is_one(row)).map(|(_, amplitude)| amplitude.norm()).sum::<f64>()
            / self.entries().map(|(_, amplitude)| amplitude.norm()).sum::<f64>()
    }

    /// Keeps what has this value of the qubit, scaled to length 1.
    pub(super) fn project(&mut self, qubit: QubitId, value: bool) {
        let keep: Vec<usize> = (0..self.len()).filter(|&at| is_set(self.row(at as u32), qubit) == value).collect();
        self.rows = keep.iter().flat_map(|&at| self.row(at as u32).to_vec()).collect();
        self.amplitudes = keep.iter().map(|&at| self.amplitudes[at]).collect();
        let length = self.amplitudes.iter().map(|amplitude| amplitude.norm()).sum::<f64>().sqrt();
        self.amplitudes.iter_mut().for_each(|amplitude| *amplitude = amplitude.scaled(1.0 / length));
    }
}

/// The value of a qubit in a row.
pub(super) fn is_set(row: &[u64], qubit: QubitId) -> bool {
    let (word, bit) = place(qubit);
    row[word] & bit != 0
}

/// What a diagonal gate multiplies the two values of its target by.
pub(super) fn phases(op: Op, angle: f64) -> [Complex; 2] {
    use std::f64::consts::{FRAC_PI_2, FRAC_PI_4, PI};
    let of = |angle| [Complex::ONE, Complex::turn(angle)];
    match op {
        Op::Z => of(PI),
        Op::S => of(FRAC_PI_2),
        Op::Sdg => of(-FRAC_PI_2),
        Op::T => of(FRAC_PI_4),
        Op::Tdg => of(-FRAC_PI_4),
        Op::P => of(angle),
        Op::Rz => [Complex::turn(-angle / 2.0), Complex::turn(angle / 2.0)],
        _ => [Complex::ONE; 2],
    }
}

fn place(qubit: QubitId) -> (usize, u64) {
    (qubit.index() / 64, 1 << (qubit.index() % 64))
}

fn holds(row: &[u64], controls: &[Control]) -> bool {
    controls.iter().all(|control| is_set(row, control.qubit()) != control.is_negated())
}

fn are_partners(a: &[u64], b: &[u64], word: usize, bit: u64) -> bool {
    a.iter().zip(b).enumerate().all(|(at, (&a, &b))| a ^ b == if at == word { bit } else { 0 })
}
