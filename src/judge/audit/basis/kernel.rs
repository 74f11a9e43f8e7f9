//! Running a circuit on 2048 basis states at a time, gate by gate.
//!
//! Input: a circuit whose gates keep basis states. Output: a [`Program`], and a [`Machine`] that runs it. Every qubit is
//! a row of lanes, one lane a basis state; the phase is three more rows, a number modulo 8 in each lane.
//!
//! An X without controls only notes that the row now holds the complement; the notes are folded into the operands of
//! later gates, which all become "flip the target where two operands hold", in one loop without branches. Gates with
//! more controls stand between runs of such pairs. Nothing else is simplified: every gate of the circuit is run. A
//! Z is such a gate onto the phase, S and T are two and three of them. Repeated blocks are written out.
//!
//! The loop is compiled for the default target and for AVX2. A row is eight vectors of 256 bits: eight independent chains
//! hide the latency of a row that the gate before has just written.

use crate::circuit::{Circuit, Gate, Op, QubitId};
use crate::id::Id;
use crate::judge::audit::oracle::{Trace, eighths};
use crate::judge::rows::lanes::{Row, WORDS, update, wide_fn};

/// A row or its complement: `row << 1 | negated`.
type Operand = u32;

/// Flip row `to` where both operands hold. Twelve bytes: together with the rows of some hundred qubits, the pairs of some
/// thousand gates should stay in the first cache.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
struct Pair {
    a: Operand,
    b: Operand,
    to: u32,
}

/// A run of work.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
enum Segment {
    /// The pairs up to this one.
    Pairs { end: u32 },
    /// Flip row `to` where all operands in this range of the pool hold.
    Wide { to: u32, start: u32, end: u32 },
    /// The qubit must hold the same value in every lane; then it is 0.
    Reset { qubit: Operand, value: bool },
}

/// A circuit as row operations.
#[derive(Clone, Debug)]
pub(crate) struct Program {
    qubits: usize,
    pairs: Vec<Pair>,
    pool: Vec<Operand>,
    segments: Vec<Segment>,
    /// Which qubits end as the complement of their row.
    flipped: Vec<bool>,
}

impl Program {
    /// Translates a circuit. `first` is the run of one input, which says what every `reset` must find.
    pub(crate) fn new(circuit: &Circuit, first: &Trace) -> Self {
        let qubits = circuit.qubit_count();
        let program =
            Program { qubits, pairs: Vec::new(), pool: Vec::new(), segments: Vec::new(), flipped: vec![false; qubits] };
        let resets = first.resets.iter().map(|&(_, value)| value);
        let mut writer = Writer { circuit, program, touched: vec![false; qubits], operands: Vec::new() };
        writer.write(resets);
        writer.program
    }

    fn row_count(&self) -> usize {
        self.qubits + 4
    }

    /// The row that is all ones.
    fn ones(&self) -> u32 {
        self.qubits as u32
    }

    /// The row of a bit of the phase.
    fn phase(&self, bit: usize) -> u32 {
        (self.qubits + 1 + bit) as u32
    }
}

struct Writer<'a> {
    circuit: &'a Circuit,
    program: Program,
    /// Which qubits may differ from 0 if they began as 0.
    touched: Vec<bool>,
    /// The operands of the gate at hand.
    operands: Vec<Operand>,
}

impl Writer<'_> {
    fn write(&mut self, mut resets: impl Iterator<Item = bool>) {
        for block in self.circuit.blocks() {
            for _ in 0..block.repeat {
                for gate in &self.circuit.gates()[block.gates.start as usize..block.gates.end as usize] {
                    match gate.op() {
                        Op::X => self.flip(gate),
                        Op::Reset => {
                            let value = resets.next().expect("the trace met every reset");
                            self.reset(gate.target(), value);
                        }
                        op => self.turn(gate, eighths(op).expect("a gate that keeps basis states")),
                    }
                }
            }
        }
        self.end_pairs();
    }

    fn operand(&self, qubit: QubitId, negated: bool) -> Operand {
        let flip = self.program.flipped[qubit.index()] != negated;
        (qubit.index() as u32) << 1 | u32::from(flip)
    }

    fn take_controls(&mut self, gate: &Gate) {
        self.operands.clear();
        for control in self.circuit.controls(gate) {
            let operand = self.operand(control.qubit(), control.is_negated());
            self.operands.push(operand);
        }
    }

    fn flip(&mut self, gate: &Gate) {
        let target = gate.target().index();
        self.touched[target] = true;
        if gate.control_count() == 0 {
            self.program.flipped[target] ^= true;
            return;
        }
        self.take_controls(gate);
        self.emit(target as u32);
    }

    /// Adds a multiple of pi/4 where target and controls hold. Adding 1 to the three phase rows ripples: the carry into
    /// a row is what the rows below hold together with the operands.
    fn turn(&mut self, gate: &Gate, eighths: u8) {
        self.take_controls(gate);
        let target = self.operand(gate.target(), false);
        self.operands.push(target);
        for from in (0..3).filter(|from| eighths >> from & 1 == 1) {
            for to in (from..3).rev() {
                let phases = (from..to).map(|bit| self.program.phase(bit) << 1);
                let len = self.operands.len();
                self.operands.extend(phases.collect::<Vec<_>>());
                self.emit(self.program.phase(to));
                self.operands.truncate(len);
            }
        }
    }

    /// Writes "flip `to` where the operands hold".
    fn emit(&mut self, to: u32) {
        let ones = self.program.ones() << 1;
        let (a, b) = match self.operands[..] {
            [a] => (a, ones),
            [a, b] => (a, b),
            _ => {
                self.end_pairs();
                let start = self.program.pool.len() as u32;
                self.program.pool.extend_from_slice(&self.operands);
                let end = self.program.pool.len() as u32;
                return self.program.segments.push(Segment::Wide { to, start, end });
            }
        };
        self.program.pairs.push(Pair { a, b, to });
    }

    fn end_pairs(&mut self) {
        let end = self.program.pairs.len() as u32;
        let done = self.program.segments.iter().rev().find_map(|segment| match segment {
            Segment::Pairs { end } => Some(*end),
            _ => None,
        });
        if done.unwrap_or(0) < end {
            self.program.segments.push(Segment::Pairs { end });
        }
    }

    fn reset(&mut self, qubit: QubitId, value: bool) {
        if !self.touched[qubit.index()] {
            return;
        }
        self.end_pairs();
        let operand = self.operand(qubit, false);
        self.program.segments.push(Segment::Reset { qubit: operand, value });
        self.program.flipped[qubit.index()] = false;
    }
}

/// A program with its rows.
#[derive(Clone, Debug)]
pub(crate) struct Machine<'a> {
    program: &'a Program,
    rows: Vec<Row>,
}

impl<'a> Machine<'a> {
    pub(crate) fn new(program: &'a Program) -> Self {
        Self { program, rows: vec![Row::ZEROS; program.row_count()] }
    }

    /// Makes every qubit 0 and every phase 1.
    pub(crate) fn clear(&mut self) {
        self.rows.fill(Row::ZEROS);
        self.rows[self.program.ones() as usize] = Row::ONES;
    }

    /// Makes every phase 1, after a run that left `search` and `work` as they were; only `mark` has to be set again.
    pub(crate) fn clear_phases(&mut self) {
        if self.program.flipped.contains(&true) {
            // A qubit that ended as the complement of its row would begin so.
            return self.clear();
        }
        (0..3).for_each(|bit| self.rows[self.program.phase(bit) as usize] = Row::ZEROS);
    }

    /// Sets a qubit.
    pub(crate) fn set(&mut self, qubit: QubitId, row: Row) {
        self.rows[qubit.index()] = row;
    }

    /// The qubit as it is after a run, in every lane.
    pub(crate) fn get(&self, qubit: QubitId) -> Row {
        let row = self.rows[qubit.index()];
        if self.program.flipped[qubit.index()] { !row } else { row }
    }

    /// A bit of the phase after a run, the phase being a multiple of pi/4: bit 2 is the sign.
    pub(crate) fn phase(&self, bit: usize) -> &Row {
        &self.rows[self.program.phase(bit) as usize]
    }

    /// Runs the circuit; returns the lanes in which some `reset` found another value than it must.
    pub(crate) fn run(&mut self) -> Row {
        run(self.program, &mut self.rows)
    }

    /// The lanes in which some of these qubits is 1 after a run.
    pub(crate) fn any_set(&self, qubits: &[QubitId]) -> Row {
        any_set(&self.rows, &self.program.flipped, qubits)
    }

    /// The lanes in which some of these qubits differs from the row given for it after a run.
    pub(crate) fn any_changed(&self, qubits: &[QubitId], expected: &[Row]) -> Row {
        any_changed(&self.rows, &self.program.flipped, qubits, expected)
    }
}

wide_fn! {
    fn any_set(rows: &[Row], flipped: &[bool], qubits: &[QubitId]) -> Row {
        let mut any = Row::ZEROS;
        for qubit in qubits {
            let row = &rows[qubit.index()];
            let flip = 0u64.wrapping_sub(u64::from(flipped[qubit.index()]));
            for word in 0..WORDS {
                any.0[word] |= row.0[word] ^ flip;
            }
        }
        any
    }
}

wide_fn! {
    fn any_changed(rows: &[Row], flipped: &[bool], qubits: &[QubitId], expected: &[Row]) -> Row {
        let mut any = Row::ZEROS;
        for (qubit, expected) in qubits.iter().zip(expected) {
            let row = &rows[qubit.index()];
            let flip = 0u64.wrapping_sub(u64::from(flipped[qubit.index()]));
            for word in 0..WORDS {
                any.0[word] |= row.0[word] ^ expected.0[word] ^ flip;
            }
        }
        any
    }
}

wide_fn! {
    fn run(program: &Program, rows: &mut [Row]) -> Row {
        let mut surprised = Row::ZEROS;
        let mut done = 0;
        for &segment in &program.segments {
            match segment {
                Segment::Pairs { end } => {
                    run_pairs(&program.pairs[done..end as usize], rows);
                    done = end as usize;
                }
                Segment::Wide { to, start, end } => run_wide(&program.pool[start as usize..end as usize], to, rows),
                Segment::Reset { qubit, value } => {
                    let row = &mut rows[(qubit >> 1) as usize];
                    let expected = 0u64.wrapping_sub(u64::from((qubit & 1 == 1) != value));
                    for word in 0..WORDS {
                        surprised.0[word] |= row.0[word] ^ expected;
                    }
                    *row = Row::ZEROS;
                }
            }
        }
        surprised
    }
}

/// What an operand is combined with: nothing, or all ones for a complement. Making it from the flag takes a few instructions
/// between loads; loading it from a table was measured 7 % slower, because loads are what the loop waits for.
#[inline(always)]
fn mask(operand: Operand) -> u64 {
    0u64.wrapping_sub(u64::from(operand & 1))
}

#[inline(always)]
fn run_pairs(pairs: &[Pair], rows: &mut [Row]) {
    for &Pair { a, b, to } in pairs {
        let (mask_a, mask_b) = (mask(a), mask(b));
        let from = [(a >> 1) as usize, (b >> 1) as usize];
        update(rows, to as usize, from, |row, [a, b]| row ^ (a ^ mask_a) & (b ^ mask_b));
    }
}

#[inline(always)]
fn run_wide(operands: &[Operand], to: u32, rows: &mut [Row]) {
    let mut all = Row::ONES;
    for &operand in operands {
        let row = &rows[(operand >> 1) as usize];
        let flip = mask(operand);
        for word in 0..WORDS {
            all.0[word] &= row.0[word] ^ flip;
        }
    }
    let to = &mut rows[to as usize];
    for word in 0..WORDS {
        to.0[word] ^= all.0[word];
    }
}
