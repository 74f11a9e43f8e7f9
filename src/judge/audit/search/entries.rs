//! A search register in superposition with everything else a function of it: the fast way to follow a whole search.
//!
//! There is one entry for each value of the search register (entry v stands for the basis state in which `search` is
//! v, as long as no gate changes that), a real amplitude for each entry, and for every qubit a row of bits, one for each
//! entry. Gates that permute basis states work on rows, 64 entries a word; gates that change signs work on a row of
//! signs. A Hadamard gate or a rotation `ry` on a qubit needs the entries in pairs that differ in that qubit and in nothing else; then it
//! mixes the two amplitudes. Where that does not hold, or for a gate with complex phases, this way ends
//! ([`Lost`]) and the caller takes the general one.

use std::f64::consts::FRAC_1_SQRT_2;

use crate::circuit::{Circuit, Control, Gate, Op, QubitId};
use crate::columns::column;
use crate::id::Id;
use crate::problem::Bits;

/// The state is not of this form after the gate.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub(super) struct Lost;

/// What is known about a row.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
enum Pattern {
    /// The same bit for every entry.
    Constant(bool),
    /// Bit `index` of the number of the entry, or its negation.
    Input { index: usize, negated: bool },
    /// Something else, or not looked at.
    Unknown,
}

/// The state.
pub(super) struct Rows {
    bits: usize,
    words: usize,
    /// Rows of all qubits, one after the other.
    rows: Vec<u64>,
    patterns: Vec<Pattern>,
    signs: Vec<u64>,
    amplitudes: Vec<f64>,
    /// Words of rows and amplitudes that were computed.
    pub(super) updates: u64,
}

impl Rows {
    /// The bytes that a search over 2^`bits` strings with so many qubits takes.
    pub(super) fn bytes(bits: usize, qubits: usize) -> u64 {
        let words = (1u64 << bits).div_ceil(64);
        (8u64 << bits) + 8 * words * (qubits as u64 + 2)
    }

    /// All qubits in |0>.
    pub(super) fn new(circuit: &Circuit, search: &[QubitId]) -> Self {
        let bits = search.len();
        let words = (1usize << bits).div_ceil(64);
        let qubits = circuit.qubit_count();
        let mut amplitudes = vec![0.0; 1 << bits];
        amplitudes[0] = 1.0;
        let mut state = Self {
            bits,
            words,
            rows: vec![0; words * qubits],
            patterns: vec![Pattern::Constant(false); qubits],
            signs: vec![0; words],
            amplitudes,
            updates: 0,
        };
        for (index, qubit) in search.iter().enumerate() {
            let at = qubit.index() * words;
            (0..words).for_each(|word| state.rows[at + word] = column(index, word));
            state.patterns[qubit.index()] = Pattern::Input { index, negated: false };
        }
        state
    }

    /// Applies a gate.
    pub(super) fn apply(&mut self, circuit: &Circuit, gate: &Gate) -> Result<(), Lost> {
        if gate.condition().is_some() {
            return Err(Lost);
        }
        let controls = circuit.controls(gate);
        self.updates += self.words as u64;
        match gate.op() {
            Op::X => self.flip(controls, gate.target()),
            Op::Z => self.sign(controls, gate.target()),
            Op::H if controls.is_empty() => {
                self.mix(gate.target(), |a, b| ((a + b) * FRAC_1_SQRT_2, (a - b) * FRAC_1_SQRT_2))?;
            }
            Op::Ry if controls.is_empty() => {
                let (sin, cos) = (circuit.angle(gate).expect("a gate with an angle") / 2.0).sin_cos();
                self.mix(gate.target(), |a, b| (cos * a - sin * b, sin * a + cos * b))?;
            }
            Op::Reset => self.reset(gate.target())?,
            _ => return Err(Lost),
        }
        Ok(())
    }

    fn row(&self, qubit: usize) -> &[u64] {
        &self.rows[qubit * self.words..(qubit + 1) * self.words]
    }

    /// The entries in which all controls hold.
    fn hold(&self, controls: &[Control], word: usize) -> u64 {
        controls.iter().fold(u64::MAX, |hold, control| {
            let bits = self.rows[control.qubit().index() * self.words + word];
            hold & if control.is_negated() { !bits } else { bits }
        })
    }

    fn flip(&mut self, controls: &[Control], target: QubitId) {
        let at = target.index();
        for word in 0..self.words {
            self.rows[at * self.words + word] ^= self.hold(controls, word);
        }
        self.patterns[at] = match self.patterns[at] {
            pattern if !controls.is_empty() && pattern != Pattern::Unknown => Pattern::Unknown,
            Pattern::Constant(value) => Pattern::Constant(!value),
            Pattern::Input { index, negated } => Pattern::Input { index, negated: !negated },
            Pattern::Unknown => Pattern::Unknown,
        };
    }

    fn sign(&mut self, controls: &[Control], target: QubitId) {
        for word in 0..self.words {
            self.signs[word] ^= self.hold(controls, word) & self.rows[target.index() * self.words + word];
        }
    }

    /// Looks at a row that may have changed.
    fn look(&mut self, qubit: usize) -> Pattern {
        if self.patterns[qubit] == Pattern::Unknown {
            let row = self.row(qubit);
            let mask = last_mask(self.bits);
            let equals = |wanted: &dyn Fn(usize) -> u64| {
                (0..self.words)
                    .all(|word| (row[word] ^ wanted(word)) & if self.words == 1 { mask } else { u64::MAX } == 0)
            };
            let constant = [false, true].into_iter().find(|&value| equals(&|_| if value { u64::MAX } else { 0 }));
            let input = || {
                let inputs = (0..self.bits).flat_map(|index| [(index, false), (index, true)]);
                let mut inputs = inputs.filter(|&(index, negated)| {
                    equals(&|word| column(index, word) ^ if negated { u64::MAX } else { 0 })
                });
                inputs.next()
            };
            self.patterns[qubit] = match (constant, constant.is_none().then(input).flatten()) {
                (Some(value), _) => Pattern::Constant(value),
                (None, Some((index, negated))) => Pattern::Input { index, negated },
                (None, None) => Pattern::Unknown,
            };
        }
        self.patterns[qubit]
    }

    /// A gate that mixes the two values of a qubit: the entries must be pairs that differ in the target only.
    fn mix(&mut self, target: QubitId, mixed: impl Fn(f64, f64) -> (f64, f64)) -> Result<(), Lost> {
        let Pattern::Input { index, negated } = self.look(target.index()) else { return Err(Lost) };
        for qubit in 0..self.patterns.len() {
            let agrees = match self.look(qubit) {
                Pattern::Constant(_) => true,
                Pattern::Input { index: other, .. } => other != index || qubit == target.index(),
                Pattern::Unknown => self.pairs_agree(qubit, index),
            };
            if !agrees {
                return Err(Lost);
            }
        }
        self.settle_signs();
        let stride = 1usize << index;
        for block in self.amplitudes.chunks_exact_mut(2 * stride) {
            let (low, high) = block.split_at_mut(stride);
            let (zero, one) = if negated { (high, low) } else { (low, high) };
            for (a, b) in zero.iter_mut().zip(one) {
                (*a, *b) = mixed(*a, *b);
            }
        }
        self.updates += self.amplitudes.len() as u64;
        Ok(())
    }

    /// Whether a row is the same for both entries of every pair.
    fn pairs_agree(&self, qubit: usize, index: usize) -> bool {
        let row = self.row(qubit);
        if index >= 6 {
            let stride = 1 << (index - 6);
            return row.chunks_exact(2 * stride).all(|pair| pair[..stride] == pair[stride..]);
        }
        let low = !column(index, 0) & last_mask(self.bits);
        row.iter().all(|&word| (word ^ word >> (1 << index)) & low == 0)
    }

    /// Moves the signs into the amplitudes.
    fn settle_signs(&mut self) {
        for (word, signs) in self.signs.iter_mut().enumerate() {
            let mut left = std::mem::take(signs);
            while left != 0 {
                let entry = word * 64 + left.trailing_zeros() as usize;
                if let Some(amplitude) = self.amplitudes.get_mut(entry) {
                    *amplitude = -*amplitude;
                }
                left &= left - 1;
            }
        }
    }

    /// A reset of a qubit that is |0> wherever there is an amplitude does nothing; others are for the general way.
    fn reset(&mut self, qubit: QubitId) -> Result<(), Lost> {
        if self.look(qubit.index()) == Pattern::Constant(false) {
            return Ok(());
        }
        let row = self.row(qubit.index());
        let is_zero = |entry: usize, amplitude: f64| amplitude == 0.0 || row[entry / 64] >> (entry % 64) & 1 == 0;
        let clean = self.amplitudes.iter().enumerate().all(|(entry, &amplitude)| is_zero(entry, amplitude));
        if clean { Ok(()) } else { Err(Lost) }
    }

    /// The amplitudes by the value of the search register, where every other qubit is 0.
    pub(super) fn settled(&mut self, search: &[QubitId]) -> Result<&[f64], Residue> {
        self.settle_signs();
        let mut moved = false;
        for qubit in 0..self.patterns.len() {
            let place = search.iter().position(|id| id.index() == qubit);
            match (self.look(qubit), place) {
                (Pattern::Constant(false), None) => {}
                (Pattern::Input { index, negated: false }, Some(place)) if index == place => {}
                (_, Some(_)) => moved = true,
                (_, None) => {
                    let row = self.row(qubit);
                    let is_dirty = |entry: usize| row[entry / 64] >> (entry % 64) & 1 == 1;
                    let there = |entry: &usize| self.amplitudes[*entry].abs() > NOTHING && is_dirty(*entry);
                    if let Some(entry) = (0..1 << self.bits).find(there) {
                        let qubit = QubitId::new(qubit);
                        return Err(Residue { qubit, value: self.value(search, entry) });
                    }
                }
            }
        }
        if moved {
            self.sort_out(search);
        }
        Ok(&self.amplitudes)
    }

    /// The value of the search register in an entry.
    fn value(&self, search: &[QubitId], entry: usize) -> usize {
        let bit = |qubit: &QubitId| self.row(qubit.index())[entry / 64] >> (entry % 64) & 1;
        search.iter().enumerate().fold(0, |value, (at, qubit)| value | (bit(qubit) as usize) << at)
    }

    /// The basis states that have an amplitude, over all qubits, with their amplitudes.
    pub(super) fn basis_states(&mut self) -> Vec<(Bits, f64)> {
        self.settle_signs();
        let qubits = self.patterns.len();
        let there = self.amplitudes.iter().enumerate().filter(|&(_, amplitude)| amplitude.abs() > NOTHING);
        let state = |entry: usize| -> Bits {
            (0..qubits).map(|qubit| self.row(qubit)[entry / 64] >> (entry % 64) & 1 == 1).collect()
        };
        there.map(|(entry, &amplitude)| (state(entry), amplitude)).collect()
    }

    /// Entries whose search register has another value than their number go to their places. All other qubits are 0,
    /// and gates never make two basis states one, so no place is taken twice.
    fn sort_out(&mut self, search: &[QubitId]) {
        let mut sorted = vec![0.0; self.amplitudes.len()];
        for (entry, &amplitude) in self.amplitudes.iter().enumerate() {
            if amplitude.abs() > NOTHING {
                sorted[self.value(search, entry)] = amplitude;
            }
        }
        self.amplitudes = sorted;
        for (index, qubit) in search.iter().enumerate() {
            let at = qubit.index() * self.words;
            (0..self.words).for_each(|word| self.rows[at + word] = column(index, word));
            self.patterns[qubit.index()] = Pattern::Input { index, negated: false };
        }
    }
}

/// Amplitudes below this are taken for nothing.
const NOTHING: f64 = 1e-13;

/// A qubit outside the search register that is 1 where `search` has this value.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub(super) struct Residue {
    pub(super) qubit: QubitId,
    pub(super) value: usize,
}

/// The entries of the last word that exist.
fn last_mask(bits: usize) -> u64 {
    if bits >= 6 { u64::MAX } else { (1 << (1 << bits)) - 1 }
}
