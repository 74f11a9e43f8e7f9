//! Real vectors over the values of the search register: the start state, and the axis of the reflection.
//!
//! A product of single qubits stays one until a gate entangles them; then every amplitude is kept.

use std::f64::consts::FRAC_1_SQRT_2;

use crate::circuit::Op;

/// A gate on the search register alone; qubits are places in it.
#[derive(Clone, PartialEq, Debug)]
pub(super) struct Local {
    pub(super) op: Op,
    pub(super) angle: f64,
    /// Controls: the place, and the value it must have.
    pub(super) controls: Vec<(usize, bool)>,
    pub(super) target: usize,
}

impl Local {
    /// Whether this undoes the other.
    pub(super) fn undoes(&self, other: &Self) -> bool {
        let sorted = |gate: &Self| {
            let mut controls = gate.controls.clone();
            controls.sort_unstable();
            controls
        };
        let same = self.target == other.target && sorted(self) == sorted(other);
        same && match (self.op, other.op) {
            (Op::X, Op::X) | (Op::H, Op::H) | (Op::Z, Op::Z) => true,
            (Op::S, Op::Sdg) | (Op::Sdg, Op::S) | (Op::T, Op::Tdg) | (Op::Tdg, Op::T) => true,
            (Op::Ry, Op::Ry) | (Op::Rz, Op::Rz) | (Op::P, Op::P) => self.angle == -other.angle,
            _ => false,
        }
    }

    /// Whether the two share a qubit.
    pub(super) fn meets(&self, other: &Self) -> bool {
        self.qubits().any(|qubit| other.qubits().any(|of| of == qubit))
    }

    fn qubits(&self) -> impl Iterator<Item = usize> + '_ {
        self.controls.iter().map(|control| control.0).chain([self.target])
    }

    /// Whether it takes real amplitudes to real ones.
    pub(super) fn is_real(&self) -> bool {
        matches!(self.op, Op::X | Op::Z | Op::H | Op::Ry)
    }

    /// The matrix of a real gate, row by row.
    fn matrix(&self) -> [[f64; 2]; 2] {
        let (sin, cos) = (self.angle / 2.0).sin_cos();
        match self.op {
            Op::X => [[0.0, 1.0], [1.0, 0.0]],
            Op::Z => [[1.0, 0.0], [0.0, -1.0]],
            Op::Ry => [[cos, -sin], [sin, cos]],
            _ => [[FRAC_1_SQRT_2, FRAC_1_SQRT_2], [FRAC_1_SQRT_2, -FRAC_1_SQRT_2]],
        }
    }
}

/// The vector.
#[derive(Clone, PartialEq, Debug)]
pub(super) enum Vector {
    /// The amplitudes of 0 and of 1 for each qubit.
    Product(Vec<[f64; 2]>),
    /// The amplitudes of all strings.
    Dense(Vec<f64>),
}

impl Vector {
    /// A basis state.
    pub(super) fn basis(bits: usize, value: usize) -> Self {
        let qubit = |at: usize| if value >> at & 1 == 1 { [0.0, 1.0] } else { [1.0, 0.0] };
        Self::Product((0..bits).map(qubit).collect())
    }

    /// Applies a real gate.
    pub(super) fn apply(&mut self, gate: &Local) {
        debug_assert!(gate.is_real());
        if let Self::Product(qubits) = self {
            let fixed = |&(at, value): &(usize, bool)| match qubits[at] {
                [_, 0.0] => Some(!value),
                [0.0, _] => Some(value),
                _ => None,
            };
            let held: Vec<Option<bool>> = gate.controls.iter().map(fixed).collect();
            if held.contains(&Some(false)) {
                return;
            }
            if held.iter().all(Option::is_some) {
                let [a, b] = qubits[gate.target];
                qubits[gate.target] = gate.matrix().map(|row| row[0] * a + row[1] * b);
                return;
            }
        }
        self.spread();
        let Self::Dense(amplitudes) = self else { return };
        let (mask, want) = gate
            .controls
            .iter()
            .fold((0usize, 0usize), |(mask, want), &(at, value)| (mask | 1 << at, want | usize::from(value) << at));
        let matrix = gate.matrix();
        let stride = 1usize << gate.target;
        for (block, pair) in amplitudes.chunks_exact_mut(2 * stride).enumerate() {
            let (zeros, ones) = pair.split_at_mut(stride);
            for (at, (a, b)) in zeros.iter_mut().zip(ones).enumerate() {
                if (block * 2 * stride + at) & mask == want {
                    (*a, *b) = (matrix[0][0] * *a + matrix[0][1] * *b, matrix[1][0] * *a + matrix[1][1] * *b);
                }
            }
        }
    }

    /// Keeps every amplitude from now on.
    pub(super) fn spread(&mut self) {
        if let Self::Product(qubits) = self {
            let mut all = Vec::with_capacity(1 << qubits.len());
            all.push(1.0);
            for &[zero, one] in qubits.iter() {
                let from = all.len();
                all.extend_from_within(..);
                all[..from].iter_mut().for_each(|x| *x *= zero);
                all[from..].iter_mut().for_each(|x| *x *= one);
            }
            *self = Self::Dense(all);
        }
    }

    /// The amplitude that all strings have, where it is the same for all.
    pub(super) fn level(&self) -> Option<f64> {
        match self {
            Self::Product(qubits) => {
                let even = qubits.iter().all(|&[a, b]| (a - b).abs() < 1e-15);
                even.then(|| {
                    0.5f64.powf(qubits.len() as f64 / 2.0) * qubits.iter().map(|q| q[0].signum()).product::<f64>()
                })
            }
            Self::Dense(_) => None,
        }
    }

    /// The amplitude of a string.
    pub(super) fn at(&self, value: usize) -> f64 {
        match self {
            Self::Product(qubits) => qubits.iter().enumerate().map(|(at, qubit)| qubit[value >> at & 1]).product(),
            Self::Dense(all) => all[value],
        }
    }
}
