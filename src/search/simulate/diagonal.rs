//! What a run of gates does to each value of the search register, if it only multiplies it by a phase.
//!
//! Input: gates, and the state of all other qubits before them. Output: the phases as [`Plane`]s: sets of values that
//! share a factor. After: for every value, the search register and the other qubits are what they were, up to the phase;
//! a run that does anything else is no diagonal.
//!
//! Three ways. The gates are read for all values at once, and what they mark is evaluated on each (`symbolic`). Where that
//! does not close, and the gates keep basis states and the other qubits are in one, 1024 values are run at a time, a row of
//! bits for each qubit. Otherwise each value is followed by itself as a small sparse state; the outcomes of measurements
//! are drawn once, for all values alike, and a measurement whose chances depend on the value makes the run no diagonal.

use rustc_hash::FxHashSet;

use super::complex::Complex;
use super::sparse::{Sparse, is_set, phases};
use super::symbolic;
use crate::budget::Budget;
use crate::circuit::{Circuit, Gate, Op, QubitId};
use crate::columns::column;
use crate::id::Id;
use crate::random::SplitMix64;

/// Values that are run together.
const LANES: usize = 1024;
const WORDS: usize = LANES / 64;
type Row = [u64; WORDS];

/// Values are followed by themselves up to so many bits of them; a circuit of a thousand gates then takes a quarter of an hour.
const MOST_BITS_BY_THEMSELVES: usize = 20;
/// At most so many sets of values with phases of their own.
pub(super) const MOST_PLANES: usize = 6;

/// A set of values of the search register and the factor that its members get.
#[derive(Clone, PartialEq, Debug)]
pub(super) struct Plane {
    pub(super) set: Vec<u64>,
    pub(super) factor: Complex,
}

/// Why there are no planes.
#[derive(Clone, PartialEq, Eq, Debug)]
pub(super) enum NotDiagonal {
    /// The gates change the register, or leave the other qubits in another state.
    Moves,
    /// The chances of a measurement depend on the value, or the phases on its outcome.
    Tells,
    /// A gate depends on what was measured before the run.
    Earlier,
    /// There are too many different phases.
    Phases,
    /// Each value would have to be followed by itself, and there are too many.
    Values,
    /// The budget ran out.
    Spent,
}

/// A run of gates over the qubits of a circuit.
#[derive(Clone, Copy)]
pub(super) struct Run<'a> {
    pub(super) circuit: &'a Circuit,
    pub(super) search: &'a [QubitId],
    pub(super) gates: &'a [Gate],
    /// The other qubits; the search register is 0 in it.
    pub(super) rest: &'a Sparse,
    /// The gates that make `rest` of all zeros.
    pub(super) outside: &'a Circuit,
    pub(super) threads: usize,
    pub(super) seed: u64,
}

impl Run<'_> {
    /// The phases over all values.
    pub(super) fn planes(&self, budget: &Budget) -> Result<Vec<Plane>, NotDiagonal> {
        if self.depends_on_earlier() {
            return Err(NotDiagonal::Earlier);
        }
        let planes = match (symbolic::plane(self, budget), self.basis_state()) {
            (Some(plane), _) => vec![plane],
            (None, Some(rest)) => self.by_rows(rest, budget)?,
            (None, None) if self.search.len() > MOST_BITS_BY_THEMSELVES => return Err(NotDiagonal::Values),
            (None, None) => self.one_by_one(budget)?,
        };
        merge(planes)
    }

    /// Whether a gate depends on a bit that the run has not measured before.
    fn depends_on_earlier(&self) -> bool {
        let mut measured = vec![false; self.circuit.measured_count()];
        self.gates.iter().any(|gate| {
            let depends = gate.condition().is_some_and(|condition| !measured[condition.bit().index()]);
            if let Some(bit) = gate.measured() {
                measured[bit.index()] = true;
            }
            depends
        })
    }

    /// The basis state of the other qubits, where rows will do.
    fn basis_state(&self) -> Option<&[u64]> {
        let plain =
            |gate: &Gate| gate.condition().is_none() && !matches!(gate.op(), Op::H | Op::Ry | Op::Measure | Op::Reset);
        let turning = self.gates.iter().filter(|gate| !matches!(gate.op(), Op::X | Op::Z)).count();
        let fits = self.rest.len() == 1 && turning <= MOST_PLANES && self.gates.iter().all(plain);
        fits.then(|| self.rest.entries().next().expect("one basis state").0)
    }

    fn by_rows(&self, rest: &[u64], budget: &Budget) -> Result<Vec<Plane>, NotDiagonal> {
        let bits = self.search.len();
        let words = (1usize << bits).div_ceil(64);
        let blocks = (1usize << bits).div_ceil(LANES);
        let share = blocks.div_ceil(self.threads.max(1));
        let work = |from: usize| self.rows_of(rest, from..(from + share).min(blocks), budget);
        let parts: Vec<_> = std::thread::scope(|scope| {
            let threads: Vec<_> = (0..blocks).step_by(share).map(|from| scope.spawn(move || work(from))).collect();
            threads.into_iter().map(|thread| thread.join().expect("no panic in a thread")).collect()
        });
        let mut planes: Vec<Plane> = Vec::new();
        for part in parts {
            for (at, plane) in part?.into_iter().enumerate() {
                match planes.get_mut(at) {
                    Some(whole) => whole.set.extend(plane.set),
                    None => planes.push(plane),
                }
            }
        }
        for plane in &mut planes {
            plane.set.truncate(words);
            if bits < 6 {
                plane.set[0] &= (1 << (1 << bits)) - 1;
            }
        }
        Ok(planes)
    }

    /// The sets of values, block by block: first the sign, then each gate with another phase.
    fn rows_of(
        &self,
        rest: &[u64],
        blocks: std::ops::Range<usize>,
        budget: &Budget,
    ) -> Result<Vec<Plane>, NotDiagonal> {
        let mut rows: Vec<Row> = (0..self.circuit.qubit_count())
            .map(|qubit| [if is_set(rest, QubitId::new(qubit)) { u64::MAX } else { 0 }; WORDS])
            .collect();
        let before = rows.clone();
        let used: FxHashSet<QubitId> = self.gates.iter().map(Gate::target).collect();
        let mut used: Vec<QubitId> = used.into_iter().collect();
        used.sort_unstable();
        let mut planes = vec![Plane { set: Vec::new(), factor: Complex::real(-1.0) }];
        for gate in self.gates.iter().filter(|gate| !matches!(gate.op(), Op::X | Op::Z)) {
            let [zero, one] = phases(gate.op(), self.circuit.angle(gate).unwrap_or(0.0));
            // A factor on the 0 side is a factor of the whole and its inverse on the 1 side, which is what matters.
            planes.push(Plane { set: Vec::new(), factor: one * zero.conj() });
        }
        for block in blocks {
            if block % 64 == 0 && budget.spent() {
                return Err(NotDiagonal::Spent);
            }
            let mut inputs: Vec<Row> = Vec::with_capacity(self.search.len());
            for (at, qubit) in self.search.iter().enumerate() {
                inputs.push(input_row(at, block));
                rows[qubit.index()] = inputs[at];
            }
            self.run_block(&mut rows, &mut planes);
            let restored = self.search.iter().zip(&inputs).all(|(qubit, input)| rows[qubit.index()] == *input);
            let is_search = |qubit: &QubitId| self.search.contains(qubit);
            let clean = used.iter().all(|qubit| is_search(qubit) || rows[qubit.index()] == before[qubit.index()]);
            if !restored || !clean {
                return Err(NotDiagonal::Moves);
            }
        }
        Ok(planes)
    }

    fn run_block(&self, rows: &mut [Row], planes: &mut [Plane]) {
        let mut sign = [0u64; WORDS];
        let mut turning = 1;
        for gate in self.gates {
            let mut hold = [u64::MAX; WORDS];
            for control in self.circuit.controls(gate) {
                let flip = if control.is_negated() { u64::MAX } else { 0 };
                let row = &rows[control.qubit().index()];
                hold.iter_mut().zip(row).for_each(|(hold, bits)| *hold &= bits ^ flip);
            }
            let target = &mut rows[gate.target().index()];
            match gate.op() {
                Op::X => target.iter_mut().zip(&hold).for_each(|(bits, hold)| *bits ^= hold),
                Op::Z => (0..WORDS).for_each(|at| sign[at] ^= hold[at] & target[at]),
                _ => {
                    planes[turning].set.extend((0..WORDS).map(|at| hold[at] & target[at]));
                    turning += 1;
                }
            }
        }
        planes[0].set.extend(sign);
    }

    /// The phases of every value by itself: for outcomes that are drawn once, and, where some were free, for the others
    /// too, since what depends on outcomes is no diagonal.
    pub(super) fn one_by_one(&self, budget: &Budget) -> Result<Vec<Plane>, NotDiagonal> {
        let phases = self.for_outcomes(false, budget)?;
        if self.gates.iter().any(|gate| gate.measured().is_some()) {
            let others = self.for_outcomes(true, budget)?;
            let turned = others[0].conj() * phases[0];
            if !phases.iter().zip(&others).all(|(&phase, &other)| phase.is_near(other * turned)) {
                return Err(NotDiagonal::Tells);
            }
        }
        sorted_by_phase(&phases)
    }

    /// The phases for the outcomes that the seed gives, or for the opposite ones.
    fn for_outcomes(&self, opposite: bool, budget: &Budget) -> Result<Vec<Complex>, NotDiagonal> {
        let bits = self.search.len();
        let outcomes = self.follow(0, None, opposite)?.outcomes;
        let share = (1usize << bits).div_ceil(self.threads.max(1)).next_multiple_of(64);
        let work = |from: usize| -> Result<Vec<Complex>, NotDiagonal> {
            let mut phases = Vec::new();
            for value in from..(from + share).min(1 << bits) {
                if value % 64 == 0 && budget.spent() {
                    return Err(NotDiagonal::Spent);
                }
                phases.push(self.follow(value, Some(&outcomes), opposite)?.phase);
            }
            Ok(phases)
        };
        let parts: Vec<_> = std::thread::scope(|scope| {
            let work = &work;
            let threads: Vec<_> =
                (0..1usize << bits).step_by(share).map(|from| scope.spawn(move || work(from))).collect();
            threads.into_iter().map(|thread| thread.join().expect("no panic in a thread")).collect()
        });
        Ok(parts.into_iter().collect::<Result<Vec<_>, _>>()?.concat())
    }

    /// Follows one value through the gates.
    fn follow(&self, value: usize, given: Option<&[bool]>, opposite: bool) -> Result<Followed, NotDiagonal> {
        let mut state = self.rest.clone();
        for (at, &qubit) in self.search.iter().enumerate() {
            if value >> at & 1 == 1 {
                state.flip(qubit);
            }
        }
        let before = state.clone();
        let mut random = SplitMix64::new(self.seed);
        let mut bits = vec![false; self.circuit.measured_count()];
        let mut outcomes = Vec::new();
        for gate in self.gates {
            if gate.condition().is_some_and(|condition| bits[condition.bit().index()] != condition.value()) {
                continue;
            }
            if gate.op().is_unitary() {
                state.apply(self.circuit, gate);
                continue;
            }
            let chance = state.chance(gate.target());
            let settled = if chance < 1e-9 { Some(false) } else { (chance > 1.0 - 1e-9).then_some(true) };
            let outcome = match given {
                // Both outcomes must be as likely as for the first value: that is 1/2 for a mark that tells nothing.
                Some(given) => given[outcomes.len()],
                None => settled.unwrap_or_else(|| random.coin() != opposite),
            };
            if settled.is_some_and(|settled| settled != outcome) {
                return Err(NotDiagonal::Tells);
            }
            if settled.is_none() && (chance - 0.5).abs() > 1e-9 {
                return Err(NotDiagonal::Tells);
            }
            outcomes.push(outcome);
            state.project(gate.target(), outcome);
            match gate.measured() {
                Some(bit) => bits[bit.index()] = outcome,
                None if outcome => state.flip(gate.target()),
                None => {}
            }
        }
        let overlap = before.entries().fold(Complex::ZERO, |sum, (row, amplitude)| {
            let same = state.entries().find(|(other, _)| *other == row);
            same.map_or(sum, |(_, other)| sum + amplitude.conj() * other)
        });
        if (overlap.norm() - 1.0).abs() > 1e-9 {
            return Err(NotDiagonal::Moves);
        }
        Ok(Followed { phase: overlap, outcomes })
    }
}

struct Followed {
    phase: Complex,
    outcomes: Vec<bool>,
}

/// The values of each phase. Corrections may leave a phase that all values share, which nothing shows: then it is taken
/// away.
fn sorted_by_phase(phases: &[Complex]) -> Result<Vec<Plane>, NotDiagonal> {
    let words = phases.len().div_ceil(64);
    let mut planes: Vec<Plane> = Vec::new();
    let mut sizes: Vec<usize> = Vec::new();
    for (value, &phase) in phases.iter().enumerate() {
        let known = planes.iter().position(|plane| plane.factor.is_near(phase));
        let at = known.unwrap_or_else(|| {
            planes.push(Plane { set: vec![0; words], factor: phase });
            sizes.push(0);
            planes.len() - 1
        });
        if planes.len() > MOST_PLANES + 1 {
            return Err(NotDiagonal::Phases);
        }
        planes[at].set[value / 64] |= 1 << (value % 64);
        sizes[at] += 1;
    }
    if !planes.iter().any(|plane| plane.factor.is_near(Complex::ONE)) {
        let most = (0..planes.len()).max_by_key(|&at| sizes[at]).expect("a value has a phase");
        let common = planes[most].factor.conj();
        planes.iter_mut().for_each(|plane| plane.factor = plane.factor * common);
    }
    Ok(planes)
}

/// Leaves out what has no effect, and makes one of planes over the same values.
fn merge(planes: Vec<Plane>) -> Result<Vec<Plane>, NotDiagonal> {
    let mut merged: Vec<Plane> = Vec::new();
    for plane in planes {
        if plane.factor.is_near(Complex::ONE) || plane.set.iter().all(|&word| word == 0) {
            continue;
        }
        match merged.iter_mut().find(|other| other.set == plane.set) {
            Some(other) => other.factor = other.factor * plane.factor,
            None => merged.push(plane),
        }
    }
    merged.retain(|plane| !plane.factor.is_near(Complex::ONE));
    if merged.len() > MOST_PLANES { Err(NotDiagonal::Phases) } else { Ok(merged) }
}

/// Bit `index` of the values of a block.
fn input_row(index: usize, block: usize) -> Row {
    std::array::from_fn(|word| column(index, block * WORDS + word))
}
