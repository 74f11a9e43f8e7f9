//! What a search file does, read from its gates alone: start vector, marked sets with their factors, reflections.
//!
//! Input: a circuit. Output: a [`Reading`], or [`Unread`] where the gates are no sequence of diagonals and reflections
//! about one axis.
//!
//! - The preparation is what stands before the first loop; in a file without loops it is the longest run of gates that
//!   both begins and ends it, because a search ends with the last half of a reflection, which prepares the start again.
//! - A diagonal is a run of gates that gives every value of the search register back with a phase (`diagonal`).
//! - A reflection is a run `P C P'`, C a diagonal with a phase on one value z alone and P' the inverse of P, which is
//!   checked gate by gate, gates on other qubits exchanged: it is `1 - (1 - f) |s><s|` with `|s> = P'|z>`. That is an
//!   identity, whatever P is.

use super::complex::Complex;
use super::diagonal::{MOST_PLANES, NotDiagonal, Plane, Run};
use super::sparse::Sparse;
use super::vector::{Local, Vector};
use crate::budget::Budget;
use crate::circuit::{Circuit, Gate, Op, PerQubit, QubitId, WORK};

/// Some diagonals and then the reflection.
#[derive(Clone, PartialEq, Debug)]
pub(super) struct Step {
    /// Sets of marked values, by their index, and the factor each gets.
    pub(super) turns: Vec<(usize, Complex)>,
    /// What the axis is multiplied by.
    pub(super) reflection: Complex,
}

/// Steps that are repeated.
#[derive(Clone, PartialEq, Debug)]
pub(super) struct Loop {
    pub(super) steps: Vec<Step>,
    pub(super) repeat: u64,
}

/// What was read.
#[derive(Debug)]
pub(super) struct Reading {
    pub(super) start: Vector,
    /// The axis of every reflection, where it is not the start.
    pub(super) axis: Option<Vector>,
    /// Sets of values that some diagonal changes.
    pub(super) sets: Vec<Vec<u64>>,
    pub(super) loops: Vec<Loop>,
}

/// The gates are something else.
#[derive(Clone, PartialEq, Debug)]
pub(super) struct Unread {
    pub(super) why: String,
    /// The values that the first diagonal changes, where that was read.
    pub(super) marked: Option<Vec<u64>>,
    /// The budget ran out.
    pub(super) spent: bool,
}

/// Gates, and how often.
#[derive(Clone, Copy)]
struct Segment<'c> {
    gates: &'c [Gate],
    repeat: u64,
}

/// Reads a search; `tail` is where its last measurement begins.
pub(super) fn read(
    circuit: &Circuit,
    search: &[QubitId],
    tail: usize,
    (threads, seed): (usize, u64),
    budget: &Budget,
) -> Result<Reading, Unread> {
    let mut place: PerQubit<Option<usize>> = vec![None; circuit.qubit_count()].into();
    search.iter().enumerate().for_each(|(at, &qubit)| place[qubit] = Some(at));
    let mut reader = Reader {
        circuit,
        search,
        place,
        threads,
        seed,
        budget,
        rest: Sparse::new(circuit.qubit_count()),
        outside: Circuit::with_registers_of(circuit),
        start: Vector::basis(search.len(), 0),
        axis: None,
        sets: Vec::new(),
    };
    let result = reader.search(tail);
    match result {
        Ok(loops) => {
            let axis = reader.axis.take().map(|(value, gates)| {
                let mut vector = Vector::basis(search.len(), value);
                gates.iter().for_each(|gate| vector.apply(gate));
                vector
            });
            let axis = axis.filter(|axis| *axis != reader.start);
            Ok(Reading { start: reader.start, axis, sets: reader.sets, loops })
        }
        Err(why) => {
            let union = |mut a: Vec<u64>, b: Vec<u64>| {
                a.iter_mut().zip(b).for_each(|(a, b)| *a |= b);
                a
            };
            let spent = why == SPENT;
            Err(Unread { why, marked: reader.sets.into_iter().reduce(union), spent })
        }
    }
}

const SPENT: &str = "the budget ran out";

struct Reader<'c> {
    circuit: &'c Circuit,
    search: &'c [QubitId],
    place: PerQubit<Option<usize>>,
    threads: usize,
    seed: u64,
    budget: &'c Budget,
    /// The qubits outside the search register.
    rest: Sparse,
    /// The gates that brought them there.
    outside: Circuit,
    start: Vector,
    /// The value z and the gates P' of the reflections.
    axis: Option<(usize, Vec<Local>)>,
    sets: Vec<Vec<u64>>,
}

impl<'c> Reader<'c> {
    fn search(&mut self, tail: usize) -> Result<Vec<Loop>, String> {
        let segments = self.segments(tail)?;
        let mut loops = Vec::new();
        for segment in segments {
            let steps = self.steps(segment.gates)?;
            loops.push(Loop { steps, repeat: segment.repeat });
        }
        Ok(loops)
    }

    /// Prepares, and gives what comes after.
    fn segments(&mut self, tail: usize) -> Result<Vec<Segment<'c>>, String> {
        let gates = &self.circuit.gates()[..tail];
        let blocks = self.circuit.blocks();
        let cut =
            |range: &std::ops::Range<u32>| &gates[(range.start as usize).min(tail)..(range.end as usize).min(tail)];
        let mut segments: Vec<Segment<'c>> = blocks
            .iter()
            .map(|block| Segment { gates: cut(&block.gates), repeat: block.repeat })
            .filter(|segment| !segment.gates.is_empty() && segment.repeat > 0)
            .collect();
        if segments.is_empty() {
            return Ok(segments);
        }
        if segments.len() > 1 && segments[0].repeat == 1 {
            let first = segments.remove(0);
            self.prepare(first.gates)?;
        } else if segments[0].repeat == 1 {
            let length = self.preparation(segments[0].gates);
            self.prepare(&segments[0].gates[..length])?;
            segments[0].gates = &segments[0].gates[length..];
            segments.retain(|segment| !segment.gates.is_empty());
        }
        Ok(segments)
    }

    /// How many gates prepare, in a file without loops.
    fn preparation(&self, gates: &[Gate]) -> usize {
        let locals: Vec<(usize, Local)> =
            gates.iter().enumerate().filter_map(|(at, gate)| Some((at, self.local(gate)?))).collect();
        let trailing = gates.iter().rev().take_while(|gate| self.local(gate).is_some()).count();
        let last = |length: usize| locals[locals.len() - length..].iter().map(|(_, gate)| gate);
        let first = |length: usize| locals[..length].iter().map(|(_, gate)| gate);
        let length = (1..=trailing.min(locals.len())).rev().find(|&length| first(length).eq(last(length)));
        let after = length.map_or(0, |length| locals[length - 1].0 + 1);
        // What sets up a qubit that is neither searched nor an ancilla belongs to it: the mark of a bit oracle.
        let work = self.circuit.register(WORK);
        let sets_up = |gate: &&Gate| {
            !self.touches_search(gate)
                && gate.control_count() == 0
                && (gate.op() == Op::Reset || !work.contains(&gate.target()))
                && matches!(gate.op(), Op::Reset | Op::X | Op::H)
        };
        after + gates[after..].iter().take_while(sets_up).count()
    }

    fn touches_search(&self, gate: &Gate) -> bool {
        self.place[gate.target()].is_some()
            || self.circuit.controls(gate).iter().any(|control| self.place[control.qubit()].is_some())
    }

    fn touches_rest(&self, gate: &Gate) -> bool {
        self.place[gate.target()].is_none()
            || self.circuit.controls(gate).iter().any(|control| self.place[control.qubit()].is_none())
    }

    /// A unitary gate on the search register alone.
    fn local(&self, gate: &Gate) -> Option<Local> {
        if gate.condition().is_some() || !gate.op().is_unitary() || self.touches_rest(gate) {
            return None;
        }
        let control = |c: &crate::circuit::Control| Some((self.place[c.qubit()]?, !c.is_negated()));
        Some(Local {
            op: gate.op(),
            angle: self.circuit.angle(gate).unwrap_or(0.0),
            controls: self.circuit.controls(gate).iter().map(control).collect::<Option<_>>()?,
            target: self.place[gate.target()]?,
        })
    }

    fn prepare(&mut self, gates: &[Gate]) -> Result<(), String> {
        for gate in gates {
            if gate.condition().is_some() || gate.op() == Op::Measure {
                return Err("the preparation measures".to_owned());
            }
            if gate.op() == Op::Reset {
                self.reset(gate.target())?;
            } else if let Some(local) = self.local(gate) {
                if !local.is_real() {
                    return Err("the start state is not real".to_owned());
                }
                self.start.apply(&local);
            } else if self.touches_search(gate) {
                return Err("the preparation entangles the search register with other qubits".to_owned());
            } else {
                self.rest.apply(self.circuit, gate);
                self.outside.push_copy(self.circuit, gate);
            }
        }
        Ok(())
    }

    fn reset(&mut self, qubit: QubitId) -> Result<(), String> {
        let refused = || Err("a qubit in superposition is reset".to_owned());
        if let Some(at) = self.place[qubit] {
            return match &mut self.start {
                Vector::Product(qubits) if qubits[at][1] == 0.0 => Ok(()),
                Vector::Product(qubits) if qubits[at][0] == 0.0 => {
                    qubits[at] = [1.0, 0.0];
                    Ok(())
                }
                _ => refused(),
            };
        }
        match self.rest.chance(qubit) {
            chance if chance < 1e-12 => Ok(()),
            chance if chance > 1.0 - 1e-12 => {
                self.rest.flip(qubit);
                self.outside.push(Op::X, &[], qubit);
                Ok(())
            }
            _ => refused(),
        }
    }

    /// Diagonals and reflections, in turn.
    fn steps(&mut self, gates: &'c [Gate]) -> Result<Vec<Step>, String> {
        let mut steps = Vec::new();
        let mut at = 0;
        while at < gates.len() {
            let (end, planes) = self.diagonal(gates, at)?;
            let turns = planes.into_iter().map(|plane| self.turn(plane)).collect::<Result<_, _>>()?;
            let (end, reflection) = self.reflection(gates, end)?;
            steps.push(Step { turns, reflection });
            at = end;
        }
        Ok(steps)
    }

    fn turn(&mut self, plane: Plane) -> Result<(usize, Complex), String> {
        let known = self.sets.iter().position(|set| *set == plane.set);
        let at = known.unwrap_or_else(|| {
            self.sets.push(plane.set);
            self.sets.len() - 1
        });
        if at >= MOST_PLANES { Err("there are too many marked sets".to_owned()) } else { Ok((at, plane.factor)) }
    }

    /// Where the run of gates from `at` ends that mix no value of the search register.
    fn run_end(&self, gates: &[Gate], at: usize) -> usize {
        let mixes = |gate: &Gate| {
            self.place[gate.target()].is_some() && matches!(gate.op(), Op::H | Op::Ry | Op::Reset | Op::Measure)
        };
        gates[at..].iter().position(mixes).map_or(gates.len(), |len| at + len)
    }

    /// The longest diagonal from `at` on whose end leaves only gates on the search register before the next mixing one.
    fn diagonal(&self, gates: &'c [Gate], at: usize) -> Result<(usize, Vec<Plane>), String> {
        let mut end = self.run_end(gates, at);
        loop {
            if end == at {
                return Err("where an oracle should be, no run of gates is diagonal".to_owned());
            }
            match self.planes(&gates[at..end]) {
                Ok(planes) => return Ok((end, planes)),
                Err(NotDiagonal::Moves) if self.local(&gates[end - 1]).is_some() => end -= 1,
                Err(NotDiagonal::Moves) => {
                    return Err("a run of gates moves values or leaves qubits changed".to_owned());
                }
                Err(NotDiagonal::Earlier) => {
                    return Err("a gate depends on what an oracle before it measured".to_owned());
                }
                Err(NotDiagonal::Tells) => return Err("a measurement tells of the value of the register".to_owned()),
                Err(NotDiagonal::Phases) => return Err("there are too many different phases".to_owned()),
                Err(NotDiagonal::Values) => {
                    return Err("the sums over paths of an oracle do not close, and its values are too many".to_owned());
                }
                Err(NotDiagonal::Spent) => return Err(SPENT.to_owned()),
            }
        }
    }

    fn planes(&self, gates: &[Gate]) -> Result<Vec<Plane>, NotDiagonal> {
        let (circuit, search) = (self.circuit, self.search);
        let (rest, outside) = (&self.rest, &self.outside);
        Run { circuit, search, gates, rest, outside, threads: self.threads, seed: self.seed }.planes(self.budget)
    }

    /// The reflection from `at` on: where it ends, and its factor.
    fn reflection(&mut self, gates: &'c [Gate], at: usize) -> Result<(usize, Complex), String> {
        let mut before: Vec<Local> = Vec::new();
        let mut centre = at;
        while centre < gates.len() {
            let begins = centre == at || matches!(gates[centre - 1].op(), Op::H | Op::Ry);
            let end = self.run_end(gates, centre);
            let axis = self.axis.clone();
            if begins
                && end > centre
                && let Some(found) = self.reflect(gates, &before, centre..end)?
            {
                // A part of the preparation may look like a reflection by itself: then no oracle comes after it.
                if found.0 == gates.len() || self.diagonal(gates, found.0).is_ok() {
                    return Ok(found);
                }
                self.axis = axis;
            }
            let Some(local) = self.local(&gates[centre]) else { break };
            before.push(local);
            centre += 1;
        }
        Err("after an oracle there is no reflection".to_owned())
    }

    fn reflect(
        &mut self,
        gates: &'c [Gate],
        before: &[Local],
        centre: std::ops::Range<usize>,
    ) -> Result<Option<(usize, Complex)>, String> {
        let mut end = centre.end;
        let planes = loop {
            match self.planes(&gates[centre.start..end]) {
                Ok(planes) => break planes,
                Err(NotDiagonal::Spent) => return Err(SPENT.to_owned()),
                Err(NotDiagonal::Moves) if end > centre.start + 1 && self.local(&gates[end - 1]).is_some() => end -= 1,
                Err(_) => return Ok(None),
            }
        };
        let Some((value, factor)) = self.single(&planes) else { return Ok(None) };
        let window = gates.get(end..end + before.len()).unwrap_or(&[]);
        let Some(after) = window.iter().map(|gate| self.local(gate)).collect::<Option<Vec<_>>>() else {
            return Ok(None);
        };
        if after.len() != before.len() || !cancels(before, &after) || !after.iter().all(Local::is_real) {
            return Ok(None);
        }
        let end = end + after.len();
        match &self.axis {
            Some(axis) if *axis != (value, after.clone()) => Err("the reflections have different axes".to_owned()),
            _ => {
                self.axis = Some((value, after));
                Ok(Some((end, factor)))
            }
        }
    }

    /// The only value with a factor of its own, and the factor.
    fn single(&self, planes: &[Plane]) -> Option<(usize, Complex)> {
        let [plane] = planes else { return None };
        let ones: u64 = plane.set.iter().map(|word| u64::from(word.count_ones())).sum();
        let all = 1u64 << self.search.len();
        let find =
            |wanted: bool| (0..all as usize).find(|&value| (plane.set[value / 64] >> (value % 64) & 1 == 1) == wanted);
        match ones {
            1 => find(true).map(|value| (value, plane.factor)),
            // All the others have it: the same up to a global phase.
            ones if ones == all - 1 => find(false).map(|value| (value, plane.factor.conj())),
            _ => None,
        }
    }
}

/// Whether the second list undoes the first; gates that share no qubit may be exchanged.
fn cancels(first: &[Local], second: &[Local]) -> bool {
    let mut left: Vec<&Local> = second.iter().collect();
    first.iter().rev().all(|gate| {
        let found = left.iter().position(|other| other.undoes(gate));
        let Some(at) = found.filter(|&at| left[..at].iter().all(|before| !before.meets(left[at]))) else {
            return false;
        };
        left.remove(at);
        true
    })
}
