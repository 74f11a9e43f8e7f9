//! The even superposition of the strings with exactly so many ones.
//!
//! One of them: a chain of n - 1 controlled rotations and n - 1 CNOTs behind one X (the one-hot or W state). More: the
//! split-and-shift blocks of the source, n - 1 on two qubits and (k - 1)(n - k) + (k - 1)(k - 2)/2 on three; more than
//! half: as many zeros, and all flipped.
//!
//! # References
//! - A. Bärtschi and S. Eidenbenz: "Deterministic preparation of Dicke states", Fundamentals of Computation Theory 2019,
//!   LNCS 11651, page 126, arXiv:1904.07358 (from memory; checked by simulation in the tests).

use super::Turn;
use crate::circuit::Op;

/// Appends the gates.
pub(super) fn append(turns: &mut Vec<Turn>, qubits: &[u32], ones: u32) {
    let (n, k) = (qubits.len(), ones as usize);
    let flip_all =
        |turns: &mut Vec<Turn>, of: &[u32]| turns.extend(of.iter().map(|&qubit| Turn::new(Op::X, &[], qubit)));
    match k {
        0 => {}
        _ if k == n => flip_all(turns, qubits),
        1 => one(turns, qubits),
        _ if 2 * k > n => {
            append(turns, qubits, (n - k) as u32);
            flip_all(turns, qubits);
        }
        _ => {
            flip_all(turns, &qubits[n - k..]);
            (2..=n).rev().for_each(|l| split(turns, &qubits[..l], k.min(l - 1)));
        }
    }
}

fn one(turns: &mut Vec<Turn>, qubits: &[u32]) {
    turns.push(Turn::new(Op::X, &[], qubits[0]));
    for (at, pair) in qubits.windows(2).enumerate() {
        let left = (qubits.len() - at) as f64;
        turns.push(Turn::rotation(2.0 * (1.0 / left).sqrt().acos(), &[(pair[0], true)], pair[1]));
        turns.push(Turn::new(Op::X, &[(pair[1], true)], pair[0]));
    }
}

/// Splits off the last of the qubits: the strings with up to k ones keep or shift them.
fn split(turns: &mut Vec<Turn>, qubits: &[u32], k: usize) {
    let l = qubits.len();
    let last = qubits[l - 1];
    for i in 1..=k {
        let moved = qubits[l - 1 - i];
        let angle = 2.0 * (i as f64 / l as f64).sqrt().acos();
        let mut controls = vec![(last, true)];
        if i > 1 {
            controls.push((qubits[l - i], true));
        }
        turns.push(Turn::new(Op::X, &[(moved, true)], last));
        turns.push(Turn::rotation(angle, &controls, moved));
        turns.push(Turn::new(Op::X, &[(moved, true)], last));
    }
}
