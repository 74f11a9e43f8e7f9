//! Which values of its search register a circuit marks, as a set: for whoever runs searches and not audits.
//!
//! Input: a circuit with a register `search`, all other qubits 0 before it. Output: the values that get the phase, where the
//! reading as a sum over paths shows that, for every string of measurement outcomes, the circuit is that diagonal up to a
//! global phase and gives every other qubit back as 0. Where it does not show that, nothing is said about the circuit.
//!
//! The gates are read once, for all values; then the function that they mark is evaluated on each.

use crate::budget::Budget;
use crate::circuit::{Circuit, QubitId, SEARCH};
use crate::id::Id;
use crate::judge::audit::basis::normal;
use crate::judge::audit::compare::Shared;
use crate::judge::audit::oracle::Roles;
use crate::judge::audit::paths::{self, Functions};
use crate::judge::reading::graph::Signal;
use crate::judge::rows;
use crate::problem::BitId;

/// The values that get the phase `angle`, or a sign where that is `None`; value `x` is bit `x % 64` of word `x / 64`.
///
/// The set has `2^n` bits for `n` search qubits, and about as much memory is used besides. `None` where the reading does
/// not close, and where the budget ran out.
pub fn marked_values(circuit: &Circuit, angle: Option<f64>, threads: usize, budget: &Budget) -> Option<Vec<u64>> {
    let search: Vec<QubitId> = circuit.register(SEARCH);
    let bits = search.len();
    let work = Shared::rest(circuit, &search);
    let read = paths::read(circuit, &Roles { search, mark: None, work }, angle, budget).ok()?;
    // A sign on the whole is one on what is not marked, as far as gates can tell.
    let global = read.global().unwrap_or(0);
    let is_turned = angle.is_none() && global == 4;
    let Functions { graph, marked, zeros, others } = read.into_functions();
    let values = |root: Signal| {
        let is_better_negated = normal::is_better_negated(&graph, root);
        let reading = normal::for_evaluation(&graph, root ^ is_better_negated, bits);
        let searched: Vec<BitId> = (0..bits).map(BitId::new).collect();
        let mut set = rows::table(&rows::tape_of(&reading, &searched), bits, threads, budget)?;
        if is_better_negated {
            complement(&mut set, bits);
        }
        Some(set)
    };
    for zero in zeros {
        if values(zero)?.iter().any(|&word| word != 0) {
            return None;
        }
    }
    let mut set = values(marked)?;
    if is_turned {
        complement(&mut set, bits);
    }
    if !others.is_empty() {
        let mut sum = Eighths { digits: [0; 3].map(|_| vec![0; set.len()]) };
        for (root, eighths) in others {
            sum.add(&values(root)?, eighths);
        }
        let mut all = vec![0; set.len()];
        complement(&mut all, bits);
        // Where the whole has a sign, it is in the set already.
        sum.add(&all, if is_turned { 0 } else { global });
        // A phase on the whole that is no sign can be left out.
        let whole = sum.of_zero() % 4;
        sum.add(&all, (8 - whole) % 8);
        let half_turns = sum.half_turns()?;
        set.iter_mut().zip(half_turns).for_each(|(word, more)| *word ^= more);
    }
    Some(set)
}

fn complement(set: &mut [u64], bits: usize) {
    let all = if bits < 6 { (1 << (1 << bits)) - 1 } else { u64::MAX };
    set.iter_mut().for_each(|word| *word ^= all);
}

/// A phase for every value, in multiples of pi/4: a sum modulo 8, digit by digit.
struct Eighths {
    digits: [Vec<u64>; 3],
}

impl Eighths {
    /// Adds a phase on the values of a set.
    fn add(&mut self, set: &[u64], eighths: u8) {
        for first in (0..3).filter(|digit| eighths >> digit & 1 == 1) {
            for (at, &word) in set.iter().enumerate() {
                let mut carry = word;
                for digit in &mut self.digits[first..] {
                    let before = digit[at];
                    digit[at] = before ^ carry;
                    carry &= before;
                }
            }
        }
    }

    /// The phase of the value 0.
    fn of_zero(&self) -> u8 {
        self.digits.iter().rev().fold(0, |phase, digit| phase << 1 | (digit[0] & 1) as u8)
    }

    /// The values with half a turn; `None` where a phase is neither that nor a whole number of turns.
    fn half_turns(self) -> Option<Vec<u64>> {
        let [ones, twos, fours] = self.digits;
        ones.iter().chain(&twos).all(|&word| word == 0).then_some(fours)
    }
}
