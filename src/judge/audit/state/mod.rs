//! A sparse state in which every basis state carries a label, interpreted gate by gate.
//!
//! Input: the basis states at the start, one for each label, and the gates one by one. Output: for each label, the
//! basis states that are left with their amplitudes. Labels are never mixed: the state is that of a register and of a
//! copy of its start that no gate touches, so with one label for each basis state of the inputs it determines the
//! whole operator, relative phases and what remains in the ancillas included.
//!
//! Basis states ([`Entry`]s) lie flat, those of one label together. Gates that permute basis states or turn their
//! phase run over the entries in place; a gate that mixes the values of a qubit looks for the partner of an entry (the
//! same but for that qubit) among those of the same label, so nothing is hashed. An AND gadget opens two entries a
//! label and closes them again.

pub(in crate::judge::audit) mod amplitude;

use std::f64::consts::FRAC_PI_4;

use self::amplitude::{Amplitude, Mix, multiples};
use crate::circuit::{Circuit, Control, Gate, Op, QubitId};
use crate::id::Id;
use crate::problem::Bits;

/// Why a state cannot be followed further.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub(super) enum Stop {
    /// The amplitudes do not hold this gate.
    Gate,
    /// A coefficient does not fit.
    Overflow,
    /// There are too many basis states.
    Entries,
}

/// The state.
pub(super) struct State<A> {
    /// Words of one entry, 64 qubits each.
    width: usize,
    /// The qubits of all entries.
    rows: Vec<u64>,
    /// Amplitudes without their [`State::turns`].
    amplitudes: Vec<A>,
    /// Powers of w = e^(i pi/4) to multiply the amplitudes with, modulo 8.
    turns: Vec<u8>,
    /// For each label, its first entry; one more at the end.
    starts: Vec<u32>,
    most: usize,
    spare: Spare<A>,
}

/// Buffers for the entries after a mixing gate.
struct Spare<A> {
    rows: Vec<u64>,
    amplitudes: Vec<A>,
    turns: Vec<u8>,
    starts: Vec<u32>,
}

impl<A> Default for Spare<A> {
    fn default() -> Self {
        Self { rows: Vec::new(), amplitudes: Vec::new(), turns: Vec::new(), starts: Vec::new() }
    }
}

impl<A> Spare<A> {
    fn clear(&mut self) {
        self.rows.clear();
        self.amplitudes.clear();
        self.turns.clear();
        self.starts.clear();
    }

    /// Appends an entry: a row whose bits `mask` of one word become `value`.
    fn put(&mut self, row: &[u64], (word, mask, value): (usize, u64, u64), amplitude: A, turn: u8) {
        if let &[only] = row {
            self.rows.push(only & !mask | value);
        } else {
            let start = self.rows.len();
            self.rows.extend_from_slice(row);
            self.rows[start + word] = row[word] & !mask | value;
        }
        self.amplitudes.push(amplitude);
        self.turns.push(turn);
    }
}

/// A basis state of a label.
pub(super) struct Entry<'s, A> {
    /// Its qubits, 64 to a word.
    pub(super) row: &'s [u64],
    /// Its amplitude.
    pub(super) amplitude: A,
}

impl<A> Entry<'_, A> {
    /// The value of a qubit.
    pub(super) fn qubit(&self, qubit: QubitId) -> bool {
        self.row[qubit.index() / 64] >> (qubit.index() % 64) & 1 == 1
    }
}

/// Controls as masks: `row[word] & mask == want` for each.
struct Masks(Vec<(usize, u64, u64)>);

impl Masks {
    fn new(controls: &[Control]) -> Self {
        let mut masks: Vec<(usize, u64, u64)> = Vec::new();
        for control in controls {
            let (word, bit) = (control.qubit().index() / 64, 1u64 << (control.qubit().index() % 64));
            let want = if control.is_negated() { 0 } else { bit };
            match masks.iter_mut().find(|mask| mask.0 == word) {
                Some(mask) => *mask = (word, mask.1 | bit, mask.2 | want),
                None => masks.push((word, bit, want)),
            }
        }
        Self(masks)
    }

    fn hold(&self, row: &[u64]) -> bool {
        self.0.iter().all(|&(word, mask, want)| row[word] & mask == want)
    }
}

impl<A: Amplitude> State<A> {
    /// One basis state for each label, each with amplitude 1; at most `most` entries at any time.
    pub(super) fn new(qubits: usize, labels: &[Bits], most: usize) -> Self {
        let width = qubits.div_ceil(64).max(1);
        let mut rows = vec![0; width * labels.len()];
        for (row, label) in rows.chunks_exact_mut(width).zip(labels) {
            row[..label.words().len()].copy_from_slice(label.words());
        }
        Self {
            width,
            rows,
            amplitudes: vec![A::ONE; labels.len()],
            turns: vec![0; labels.len()],
            starts: (0..=labels.len() as u32).collect(),
            most,
            spare: Spare::default(),
        }
    }

    /// These different basis states with their amplitudes, all of one label.
    pub(super) fn superposition(qubits: usize, basis: &[(Bits, A)], most: usize) -> Self {
        let states: Vec<Bits> = basis.iter().map(|(state, _)| state.clone()).collect();
        let mut state = Self::new(qubits, &states, most);
        state.amplitudes = basis.iter().map(|&(_, amplitude)| amplitude).collect();
        state.starts = vec![0, basis.len() as u32];
        state
    }

    /// How many basis states there are, of all labels.
    pub(super) fn len(&self) -> usize {
        self.amplitudes.len()
    }

    /// The basis states of a label.
    pub(super) fn entries(&self, label: usize) -> impl ExactSizeIterator<Item = Entry<'_, A>> {
        let range = self.starts[label] as usize..self.starts[label + 1] as usize;
        range.map(|at| Entry {
            row: &self.rows[at * self.width..(at + 1) * self.width],
            amplitude: self.amplitudes[at].turned(self.turns[at]),
        })
    }

    /// The amplitudes of a label, each up to a power of w.
    pub(super) fn sizes(&self, label: usize) -> &[A] {
        &self.amplitudes[self.starts[label] as usize..self.starts[label + 1] as usize]
    }

    /// Applies a unitary gate; its condition is the caller's.
    pub(super) fn apply(&mut self, circuit: &Circuit, gate: &Gate) -> Result<(), Stop> {
        let controls = circuit.controls(gate);
        let masks = Masks::new(controls);
        let target = gate.target();
        let angle = circuit.angle(gate).unwrap_or(0.0);
        match gate.op() {
            Op::X => self.flip(&masks, target),
            Op::Z => self.turn(controls, target, 4),
            Op::S => self.turn(controls, target, 2),
            Op::Sdg => self.turn(controls, target, 6),
            Op::T => self.turn(controls, target, 1),
            Op::Tdg => self.turn(controls, target, 7),
            Op::H => self.mix(Mix::H, &masks, target)?,
            Op::Ry => self.mix(Mix::Ry(angle), &masks, target)?,
            Op::P => self.rotate(controls, target, angle)?,
            Op::Rz => {
                self.rotate_if(&Masks::new(&with(controls, target, false)), -angle / 2.0)?;
                self.rotate_if(&Masks::new(&with(controls, target, true)), angle / 2.0)?;
            }
            Op::Measure | Op::Reset => unreachable!("not unitary: the caller draws an outcome and projects"),
        }
        Ok(())
    }

    /// Turns by e^(i angle) where the controls and the target are 1.
    pub(super) fn rotate(&mut self, controls: &[Control], target: QubitId, angle: f64) -> Result<(), Stop> {
        match multiples(angle, FRAC_PI_4) {
            Some(eighths) => self.turn(controls, target, eighths),
            None => self.rotate_if(&Masks::new(&with(controls, target, true)), angle)?,
        }
        Ok(())
    }

    fn flip(&mut self, masks: &Masks, target: QubitId) {
        let (word, bit) = (target.index() / 64, 1u64 << (target.index() % 64));
        match masks.0[..] {
            // The commonest gates have their own loops.
            [(0, mask, want)] if self.width == 1 => {
                self.rows.iter_mut().for_each(|row| *row ^= if *row & mask == want { bit } else { 0 });
            }
            [(from, mask, want)] => {
                for row in self.rows.chunks_exact_mut(self.width) {
                    row[word] ^= if row[from] & mask == want { bit } else { 0 };
                }
            }
            _ => {
                for row in self.rows.chunks_exact_mut(self.width) {
                    row[word] ^= if masks.hold(row) { bit } else { 0 };
                }
            }
        }
    }

    fn turn(&mut self, controls: &[Control], target: QubitId, eighths: u8) {
        let masks = Masks::new(&with(controls, target, true));
        let turned = |turn: u8, holds: bool| (turn + if holds { eighths } else { 0 }) & 7;
        match masks.0[..] {
            [(0, mask, want)] if self.width == 1 => {
                for (row, turn) in self.rows.iter().zip(&mut self.turns) {
                    *turn = turned(*turn, row & mask == want);
                }
            }
            [(from, mask, want)] => {
                for (row, turn) in self.rows.chunks_exact(self.width).zip(&mut self.turns) {
                    *turn = turned(*turn, row[from] & mask == want);
                }
            }
            _ => {
                for (row, turn) in self.rows.chunks_exact(self.width).zip(&mut self.turns) {
                    *turn = turned(*turn, masks.hold(row));
                }
            }
        }
    }

    fn rotate_if(&mut self, masks: &Masks, angle: f64) -> Result<(), Stop> {
        for (row, amplitude) in self.rows.chunks_exact(self.width).zip(&mut self.amplitudes) {
            if masks.hold(row) {
                *amplitude = amplitude.rotated(angle).ok_or(Stop::Gate)?;
            }
        }
        Ok(())
    }

    /// Mixes the two values of the target where the controls hold.
    fn mix(&mut self, mix: Mix, masks: &Masks, target: QubitId) -> Result<(), Stop> {
        if A::mixed(mix, A::ONE, A::ZERO).is_none() {
            return Err(Stop::Gate);
        }
        let mut out = std::mem::take(&mut self.spare);
        out.clear();
        let result = self.mix_into(mix, masks, target, &mut out);
        if result.is_ok() {
            std::mem::swap(&mut self.rows, &mut out.rows);
            std::mem::swap(&mut self.amplitudes, &mut out.amplitudes);
            std::mem::swap(&mut self.turns, &mut out.turns);
            std::mem::swap(&mut self.starts, &mut out.starts);
            A::reduce(&mut self.amplitudes);
        }
        self.spare = out;
        result
    }

    fn mix_into(&mut self, mix: Mix, masks: &Masks, target: QubitId, out: &mut Spare<A>) -> Result<(), Stop> {
        let place = (target.index() / 64, 1u64 << (target.index() % 64));
        let mut order: Vec<u32> = Vec::new();
        for label in 0..self.starts.len() - 1 {
            out.starts.push(out.amplitudes.len() as u32);
            let (start, end) = (self.starts[label] as usize, self.starts[label + 1] as usize);
            match end - start {
                0 => {}
                1 => self.mix_pair(mix, masks, (start, None), place, out)?,
                2 if self.are_partners(start, start + 1, place.0, place.1) => {
                    self.mix_pair(mix, masks, (start, Some(start + 1)), place, out)?;
                }
                _ => {
                    // Order the entries so that partners stand together.
                    order.clear();
                    order.extend(start as u32..end as u32);
                    let key = |at: u32| self.key(at, place.0, place.1);
                    order.sort_unstable_by(|&a, &b| key(a).cmp(key(b)));
                    self.mix_ordered(mix, masks, &order, place, out)?;
                }
            }
            if out.amplitudes.len() > self.most {
                return Err(Stop::Entries);
            }
        }
        out.starts.push(out.amplitudes.len() as u32);
        Ok(())
    }

    fn mix_ordered(
        &self,
        mix: Mix,
        masks: &Masks,
        order: &[u32],
        place: (usize, u64),
        out: &mut Spare<A>,
    ) -> Result<(), Stop> {
        let mut at = 0;
        while at < order.len() {
            let first = order[at] as usize;
            let second = order.get(at + 1).map(|&next| next as usize);
            let partner = second.filter(|&second| self.are_partners(first, second, place.0, place.1));
            at += 1 + usize::from(partner.is_some());
            self.mix_pair(mix, masks, (first, partner), place, out)?;
        }
        Ok(())
    }

    /// The words of an entry without one qubit: what partners have in common.
    fn key(&self, at: u32, word: usize, bit: u64) -> impl Iterator<Item = u64> + '_ {
        let row = &self.rows[at as usize * self.width..(at as usize + 1) * self.width];
        row.iter().enumerate().map(move |(index, &value)| if index == word { value & !bit } else { value })
    }

    fn are_partners(&self, a: usize, b: usize, word: usize, bit: u64) -> bool {
        let row = |at: usize| &self.rows[at * self.width..(at + 1) * self.width];
        let (a, b) = (row(a), row(b));
        a[word] ^ b[word] == bit && a[..word] == b[..word] && a[word + 1..] == b[word + 1..]
    }

    fn mix_pair(
        &self,
        mix: Mix,
        masks: &Masks,
        (first, second): (usize, Option<usize>),
        (word, bit): (usize, u64),
        out: &mut Spare<A>,
    ) -> Result<(), Stop> {
        let row = &self.rows[first * self.width..(first + 1) * self.width];
        if !masks.hold(row) {
            for at in [Some(first), second].into_iter().flatten() {
                let row = &self.rows[at * self.width..(at + 1) * self.width];
                let amplitude = self.amplitudes[at].untouched().ok_or(Stop::Overflow)?;
                out.put(row, (word, 0, 0), amplitude, self.turns[at]);
            }
            return Ok(());
        }
        let is_one = row[word] & bit != 0;
        if second.is_none() && mix == Mix::H {
            // The commonest case: one entry becomes two of the same size, the second with a sign where it was 1.
            let (amplitude, turn) = (self.amplitudes[first].halved(), self.turns[first]);
            out.put(row, (word, bit, 0), amplitude, turn);
            out.put(row, (word, bit, bit), amplitude, (turn + if is_one { 4 } else { 0 }) & 7);
            return Ok(());
        }
        let first = self.amplitudes[first].turned(self.turns[first]);
        let second = second.map_or(A::ZERO, |at| self.amplitudes[at].turned(self.turns[at]));
        let (zero, one) = if is_one { (second, first) } else { (first, second) };
        let (zero, one) = A::mixed(mix, zero, one).ok_or(Stop::Overflow)?;
        if !zero.is_zero() {
            out.put(row, (word, bit, 0), zero, 0);
        }
        if !one.is_zero() {
            out.put(row, (word, bit, bit), one, 0);
        }
        Ok(())
    }

    /// Keeps the basis states in which the qubit has this value.
    pub(super) fn project(&mut self, qubit: QubitId, value: bool) {
        let (word, bit) = (qubit.index() / 64, 1u64 << (qubit.index() % 64));
        let (mut kept, mut label_start) = (0, self.starts[0] as usize);
        for label in 0..self.starts.len() - 1 {
            let end = self.starts[label + 1] as usize;
            self.starts[label] = kept as u32;
            for at in label_start..end {
                if (self.rows[at * self.width + word] & bit != 0) == value {
                    self.rows.copy_within(at * self.width..(at + 1) * self.width, kept * self.width);
                    self.amplitudes[kept] = self.amplitudes[at];
                    self.turns[kept] = self.turns[at];
                    kept += 1;
                }
            }
            label_start = end;
        }
        *self.starts.last_mut().expect("one more than labels") = kept as u32;
        self.rows.truncate(kept * self.width);
        self.amplitudes.truncate(kept);
        self.turns.truncate(kept);
        A::reduce(&mut self.amplitudes);
    }

    /// Flips a qubit of every entry.
    pub(super) fn flip_all(&mut self, qubit: QubitId) {
        self.flip(&Masks::new(&[]), qubit);
    }

    /// Whether some entry has this value of the qubit.
    pub(super) fn occurs(&self, qubit: QubitId, value: bool) -> bool {
        let (word, bit) = (qubit.index() / 64, 1u64 << (qubit.index() % 64));
        self.rows.chunks_exact(self.width).any(|row| (row[word] & bit != 0) == value)
    }

    /// The amplitudes themselves, to scale them.
    pub(super) fn amplitudes_mut(&mut self) -> &mut [A] {
        &mut self.amplitudes
    }
}

fn with(controls: &[Control], target: QubitId, value: bool) -> Vec<Control> {
    let mut all = controls.to_vec();
    all.push(Control::new(target, value));
    all
}
