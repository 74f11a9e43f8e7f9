//! Runs a search file on this machine: what its gates do, and nothing else, decides what comes out.
//!
//! Input: a circuit that prepares, iterates and measures, as it was read from a file. Output: a [`Simulation`]. Neither
//! the plan nor the tally is known here: marks, factors, start vector and axis are read from the gates (`reading`).
//!
//! Three ways, of which the first that fits is taken unless another is asked for:
//!
//! | way | what it costs | what it needs |
//! |---|---|---|
//! | [`Way::Classes`] | one pass over the strings, however many iterations (`classes`) | diagonals and reflections |
//! | [`Way::Steps`] | one pass an iteration (`steps`) | the same, with signs only |
//! | [`Way::Gates`] | a pass a gate over the basis states there are (`gates`) | at most 2^20 of them |

mod classes;
mod complex;
mod diagonal;
mod draw;
mod gates;
mod reading;
mod sparse;
pub mod steps;
mod symbolic;
mod vector;

use thiserror::Error;

use crate::budget::Budget;
use crate::circuit::{Circuit, FOUND, Gate, Op, QubitId, SEARCH};
use crate::id::Id;
use crate::problem::Bits;
use classes::Classes;
use complex::Complex;
use draw::{draw, draw_from};
use reading::Reading;
use steps::{Axis, Stepped};
use vector::Vector;

/// The largest search register that is followed as a whole.
pub const MOST_BITS: usize = 30;
/// At most so many bytes, unless the budget says otherwise.
pub const MEMORY: u64 = 24 << 30;
/// At most so many probabilities of a curve are kept; of longer ones every second, fourth and so on.
const MOST_POINTS: u64 = 1 << 16;

/// How a search is followed.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub enum Way {
    /// By classes of strings that all phases treat alike.
    Classes,
    /// Amplitude by amplitude, iteration by iteration.
    Steps,
    /// Gate by gate.
    Gates,
}

impl Way {
    /// Its name on the command line and in reports.
    pub fn name(self) -> &'static str {
        match self {
            Way::Classes => "classes",
            Way::Steps => "steps",
            Way::Gates => "gates",
        }
    }
}

/// What is wanted.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub struct Options {
    /// The way; without it the first that fits.
    pub way: Option<Way>,
    /// How many results to draw.
    pub draw: u64,
    /// Seeds what is drawn.
    pub seed: u64,
    /// Threads to use.
    pub threads: usize,
}

impl Default for Options {
    fn default() -> Self {
        Self { way: None, draw: 0, seed: 1, threads: 2 }
    }
}

/// What came out.
#[derive(Clone, PartialEq, Debug)]
pub struct Simulation {
    /// How it was followed.
    pub way: Way,
    /// The size of the search register.
    pub bits: usize,
    /// Strings that have an amplitude at the start, where the preparation was read.
    pub space: Option<u64>,
    /// Those of them that some diagonal of the file changes, where the diagonals were read.
    pub marked: Option<u64>,
    /// The probability of the marked strings, after 0, 1, 2, … iterations; of long searches after every `stride`-th.
    pub curve: Vec<f64>,
    /// Iterations between two points of the curve.
    pub stride: u64,
    /// Iterations in the file.
    pub iterations: u64,
    /// The probability at the end.
    pub success: Option<f64>,
    /// Results that were drawn, each with how often; in increasing order.
    pub drawn: Vec<(Bits, u64)>,
    /// The likeliest results with their probabilities, for small files followed gate by gate.
    pub likeliest: Vec<(Bits, f64)>,
    /// What was assumed or left out.
    pub notes: Vec<String>,
    /// Whether the budget ran out before the end.
    pub partial: bool,
}

/// Why nothing came out.
#[derive(Clone, PartialEq, Eq, Debug, Error)]
pub enum SimulateError {
    /// There is nothing to follow.
    #[error("the circuit has no register `{SEARCH}`")]
    NoSearch,
    /// Nothing is measured at the end.
    #[error("the circuit ends without a measurement, so it is no search")]
    NoResult,
    /// The state does not fit.
    #[error("this needs {needed}, and {limit} are allowed")]
    TooLarge {
        /// What it takes.
        needed: String,
        /// What there is.
        limit: String,
    },
    /// The way that was asked for does not fit the file.
    #[error("the file cannot be followed {way}: {why}")]
    NotFollowed {
        /// The way in words.
        way: &'static str,
        /// Why.
        why: String,
    },
    /// The budget ran out.
    #[error("the time ran out before anything came out")]
    Spent,
}

/// Follows a search file.
pub fn simulate(circuit: &Circuit, options: &Options, budget: &Budget) -> Result<Simulation, SimulateError> {
    let search = circuit.register(SEARCH);
    if search.is_empty() {
        return Err(SimulateError::NoSearch);
    }
    let tail = tail(circuit);
    if tail == circuit.gates().len() {
        return Err(SimulateError::NoResult);
    }
    if options.way == Some(Way::Gates) || !measures_search(circuit, &search, tail) {
        return by_gates(circuit, &search, tail, None, options, budget);
    }
    check_memory(circuit, &search, options, budget)?;
    match reading::read(circuit, &search, tail, (options.threads, options.seed), budget) {
        Ok(reading) if options.way == Some(Way::Steps) => by_steps(&reading, search.len(), options, budget),
        Ok(reading) => Ok(by_classes(&reading, search.len(), options, budget)),
        Err(unread) if unread.spent => Err(SimulateError::Spent),
        Err(unread) => match options.way {
            Some(_) => Err(SimulateError::NotFollowed { way: "in this way", why: unread.why }),
            None => {
                let mut found = by_gates(circuit, &search, tail, unread.marked.as_deref(), options, budget)?;
                found.notes.push(format!("followed gate by gate, because {}", unread.why));
                Ok(found)
            }
        },
    }
}

/// Where the last measurements begin.
fn tail(circuit: &Circuit) -> usize {
    let last = circuit.blocks().last().filter(|block| block.repeat == 1);
    let range = last.map_or(0..0, |block| block.gates.start as usize..block.gates.end as usize);
    let is_last = |gate: &&Gate| gate.op() == Op::Measure && gate.condition().is_none();
    let gates = &circuit.gates()[range];
    circuit.gates().len() - gates.iter().rev().take_while(is_last).count()
}

/// Whether the last measurement is `found[i]` from `search[i]`.
fn measures_search(circuit: &Circuit, search: &[QubitId], tail: usize) -> bool {
    let Some(found) = circuit.measured.iter().find(|register| register.name == FOUND) else { return false };
    let gates = &circuit.gates()[tail..];
    found.len as usize == search.len()
        && search.iter().enumerate().all(|(at, &qubit)| {
            let into = found.start as usize + at;
            gates.iter().any(|gate| gate.target() == qubit && gate.measured().is_some_and(|bit| bit.index() == into))
        })
}

/// The bytes that following the search register takes, at most.
pub fn bytes_needed(circuit: &Circuit, search: &[QubitId], steps: bool) -> u128 {
    let strings = 1u128 << search.len();
    let is_search = |qubit: QubitId| search.contains(&qubit);
    let mixes = |gate: &&Gate| is_search(gate.target()) && matches!(gate.op(), Op::H | Op::Ry);
    let turned = circuit.gates().iter().any(|gate| gate.op() == Op::Ry && is_search(gate.target()));
    let entangled = turned || circuit.gates().iter().filter(mixes).any(|gate| gate.control_count() > 0);
    let vectors = 2 * u128::from(entangled) + u128::from(steps);
    // Sets of strings: one for each kind of phase while a run is read, and what is kept of it.
    strings * 8 * vectors + strings / 8 * 4
}

fn check_memory(
    circuit: &Circuit,
    search: &[QubitId],
    options: &Options,
    budget: &Budget,
) -> Result<(), SimulateError> {
    if search.len() > MOST_BITS {
        let words = |bits: usize| format!("a search register of {bits} qubits");
        return Err(SimulateError::TooLarge { needed: words(search.len()), limit: format!("{MOST_BITS} qubits") });
    }
    let needed = bytes_needed(circuit, search, options.way == Some(Way::Steps));
    let limit = budget.memory().unwrap_or(MEMORY);
    let words = |bytes: u128| format!("{:.2} GiB", bytes as f64 / (1u64 << 30) as f64);
    match needed <= u128::from(limit) {
        true => Ok(()),
        false => Err(SimulateError::TooLarge { needed: words(needed), limit: words(limit.into()) }),
    }
}

fn iterations(reading: &Reading) -> u64 {
    let of = |steps: usize, repeat: u64| (steps as u64).saturating_mul(repeat);
    reading.loops.iter().fold(0, |sum, one| sum.saturating_add(of(one.steps.len(), one.repeat)))
}

fn by_classes(reading: &Reading, bits: usize, options: &Options, budget: &Budget) -> Simulation {
    let axis = reading.axis.as_ref().unwrap_or(&reading.start);
    let mut classes = Classes::new(bits, &reading.sets, &reading.start, axis);
    let iterations = iterations(reading);
    let stride = iterations.div_ceil(MOST_POINTS).max(1);
    let mut curve = vec![classes.success()];
    let mut done = 0u64;
    'all: for part in &reading.loops {
        for _ in 0..part.repeat {
            for step in &part.steps {
                step.turns.iter().for_each(|&(set, factor)| classes.turn(set, factor));
                classes.reflect(step.reflection);
                done += 1;
                if done.is_multiple_of(stride) {
                    curve.push(classes.success());
                }
            }
            if done % 4096 < part.steps.len() as u64 && budget.spent() {
                break 'all;
            }
        }
    }
    let mut simulation = Simulation {
        way: Way::Classes,
        bits,
        space: Some(classes.sizes().0),
        marked: Some(classes.sizes().1),
        success: Some(classes.success()),
        curve,
        stride,
        iterations: done,
        drawn: Vec::new(),
        likeliest: Vec::new(),
        notes: Vec::new(),
        partial: done < iterations,
    };
    if iterations == 0 {
        // Without an iteration there is no oracle that says what is marked.
        (simulation.marked, simulation.success) = (None, None);
        simulation.curve.clear();
        simulation.notes.push("the file has no iteration, so it does not say what is marked".to_owned());
    }
    if options.draw > 0 {
        simulation.drawn = draw(bits, options, |each| classes.chances(bits, each));
    }
    simulation
}

fn by_steps(reading: &Reading, bits: usize, options: &Options, budget: &Budget) -> Result<Simulation, SimulateError> {
    let is_sign = |factor: Complex| factor.is_near(Complex::real(-1.0));
    let mut steps = reading.loops.iter().flat_map(|part| &part.steps);
    let first = steps.clone().next().map_or(&[][..], |step| &step.turns);
    if !steps
        .all(|step| step.turns == first && is_sign(step.reflection) && step.turns.iter().all(|turn| is_sign(turn.1)))
    {
        let why = "its phases are not the same signs in every iteration".to_owned();
        return Err(SimulateError::NotFollowed { way: "step by step", why });
    }
    let mut marked = vec![0u64; (1usize << bits).div_ceil(64)];
    for &(set, _) in first {
        marked.iter_mut().zip(&reading.sets[set]).for_each(|(all, one)| *all ^= one);
    }
    let axis = reading.axis.as_ref().unwrap_or(&reading.start);
    let axis = match (axis.level(), axis) {
        (Some(level), _) => Axis::Level(level),
        (None, axis) => Axis::Each(dense(axis)),
    };
    let amplitudes = dense(&reading.start);
    let chance = |amplitudes: &[f64]| -> f64 {
        let set = |value: usize| marked[value / 64] >> (value % 64) & 1 == 1;
        amplitudes.iter().enumerate().filter(|(value, _)| set(*value)).map(|(_, a)| a * a).sum()
    };
    let mut curve = vec![chance(&amplitudes)];
    let there = |word: usize| {
        let of = &amplitudes[word * 64..amplitudes.len().min(word * 64 + 64)];
        of.iter().enumerate().fold(0u64, |set, (at, &a)| set | u64::from(classes::is_there(a)) << at)
    };
    let counts = (0..marked.len()).map(|word| (there(word), there(word) & marked[word]));
    let (space, marked_count) = counts.fold((0, 0), |(space, all), (there, set)| {
        (space + u64::from(there.count_ones()), all + u64::from(set.count_ones()))
    });
    let iterations = iterations(reading);
    let mut search = Stepped::new(amplitudes, marked, axis, options.threads);
    curve.extend(search.run(iterations, budget));
    let done = curve.len() as u64 - 1;
    let mut simulation = Simulation {
        way: Way::Steps,
        bits,
        space: Some(space),
        marked: Some(marked_count),
        success: curve.last().copied(),
        curve,
        stride: 1,
        iterations: done,
        drawn: Vec::new(),
        likeliest: Vec::new(),
        notes: Vec::new(),
        partial: done < iterations,
    };
    if options.draw > 0 {
        let one_by_one = |each: &mut dyn FnMut(std::ops::Range<usize>, f64)| {
            search.amplitudes().iter().enumerate().for_each(|(value, a)| each(value..value + 1, a * a));
        };
        simulation.drawn = draw(bits, options, one_by_one);
    }
    Ok(simulation)
}

fn dense(vector: &Vector) -> Vec<f64> {
    let mut vector = vector.clone();
    vector.spread();
    match vector {
        Vector::Dense(all) => all,
        Vector::Product(_) => unreachable!("just spread"),
    }
}

fn by_gates(
    circuit: &Circuit,
    search: &[QubitId],
    tail: usize,
    marked: Option<&[u64]>,
    options: &Options,
    budget: &Budget,
) -> Result<Simulation, SimulateError> {
    let ran = gates::run(circuit, search, tail, marked, options.seed, budget).map_err(|stopped| match stopped {
        gates::Stopped::Spent => SimulateError::Spent,
        gates::Stopped::States => SimulateError::TooLarge {
            needed: "more basis states".to_owned(),
            limit: format!("{} basis states", gates::MOST_STATES),
        },
    })?;
    let drawn = match options.draw {
        0 => Vec::new(),
        _ => draw_from(&ran.results, options),
    };
    let mut notes = Vec::new();
    if ran.drawn > 0 {
        notes.push(format!("{} measurement outcomes inside the circuit were drawn from the seed", ran.drawn));
    }
    Ok(Simulation {
        way: Way::Gates,
        bits: search.len(),
        space: None,
        marked: None,
        success: ran.curve.last().copied(),
        iterations: (ran.curve.len() as u64).saturating_sub(1),
        curve: ran.curve,
        stride: 1,
        drawn,
        likeliest: ran.results,
        notes,
        partial: false,
    })
}
