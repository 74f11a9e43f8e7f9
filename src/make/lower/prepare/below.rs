//! The even superposition of the first `size` numbers.
//!
//! # References
//! - A. Shukla and P. Vedula: "An efficient quantum algorithm for preparation of uniform quantum superposition states",
//!   Quantum Information Processing 23 (2024), arXiv:2306.11747 (abstract read; the gates are from memory and checked by
//!   simulation in the tests).
//!
//! With `size = 2^(l_0) + 2^(l_1) + … + 2^(l_r)`, exponents rising, these are r X, l_0 H, one Ry, r - 1 controlled Ry and
//! l_r - l_0 controlled H: `l_r + 2 r` gates for r at least 1, and l_0 H where the size is a power of two.

use super::Turn;
use crate::circuit::Op;

/// Appends the gates; `qubits` holds the low bit first.
pub(super) fn append(turns: &mut Vec<Turn>, qubits: &[u32], size: u64) {
    let exponents: Vec<usize> = (0..64).filter(|&at| size >> at & 1 == 1).collect();
    let hadamards = |turns: &mut Vec<Turn>, from: usize, to: usize, controls: &[(u32, bool)]| {
        turns.extend(qubits[from..to].iter().map(|&qubit| Turn::new(Op::H, controls, qubit)));
    };
    turns.extend(exponents[1..].iter().map(|&at| Turn::new(Op::X, &[], qubits[at])));
    hadamards(turns, 0, exponents[0], &[]);
    let mut before = 0u64;
    for (at, pair) in exponents.windows(2).enumerate() {
        let (low, high) = (pair[0], pair[1]);
        // What stands below 2^low already has its share; this qubit takes the rest.
        let share = (1u64 << low) as f64 / (size - before) as f64;
        let angle = -2.0 * share.sqrt().acos();
        let control = [(qubits[low], false)];
        turns.push(Turn::rotation(angle, if at == 0 { &[] } else { &control }, qubits[high]));
        hadamards(turns, low, high, &[(qubits[high], false)]);
        before += 1 << low;
    }
}
