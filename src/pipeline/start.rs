//! The stage that chooses the start state: each choice is compiled and priced as one search, and the cheapest is taken.
//!
//! The price of a search is the number of its iterations times the T gates of one. An AND of a level without T gates
//! counts as four of them (C. Gidney, "Halving the cost of quantum addition", Quantum 2:74, 2018), and a rotation as
//! `3 log2(1 / e)` (N. Ross and P. Selinger, "Optimal ancilla-free Clifford+T approximation of z-rotations", Quantum
//! Information and Computation 16:901, 2016: typical), where e is the precision of the whole divided by its rotations;
//! a rotation by an odd multiple of pi/4 is one T gate and Cliffords, by an even one none.
//!
//! Iterations are taken in proportion to the square root of N: how many solutions there are is the same for every choice,
//! and nothing else of the tally would matter. So the choice does not rest on a count.

use std::f64::consts::FRAC_PI_4;

use super::{Error, Settings, course, oracle};
use crate::budget::Budget;
use crate::circuit::{Circuit, Mark};
use crate::judge::count::Counted;
use crate::make::lower::LowerError;
use crate::make::start::{Choice, start};
use crate::places::Places;
use crate::problem::Problem;
use crate::search::course::Course;
use crate::search::number::Wide;

/// The error that all rotations of a search may make together, where nothing else is said.
pub const PRECISION: f64 = 1e-3;

/// A start state with what a search from it costs.
#[derive(Clone, PartialEq, Debug)]
pub struct Priced {
    /// The choice.
    pub choice: Choice,
    /// The places with that start.
    pub places: Places,
    /// T gates of one iteration, rotations included.
    pub iteration: f64,
    /// Rotations of one iteration that have to be approximated.
    pub rotations: u64,
    /// T gates of all iterations, for one marked state.
    pub total: Wide,
}

/// The places with the start state of this choice.
pub fn places_from(problem: &Problem, places: &Places, choice: Choice) -> Places {
    Places { start: start(problem, places, choice), ..places.clone() }
}

/// Every choice that finds a start of its own, the cheapest first; of equals, the plainer. A start from which everything
/// is marked, or nothing, is no candidate.
pub fn priced(
    problem: &Problem,
    places: &Places,
    settings: Settings,
    precision: f64,
    budget: &Budget,
) -> Result<Vec<Priced>, Error> {
    let mut all: Vec<Priced> = Vec::new();
    let mut last = None;
    for choice in Choice::ALL {
        let places = places_from(problem, places, choice);
        if all.iter().any(|other| other.places.start == places.start) {
            continue;
        }
        let phase = Settings { mark: Mark::Phase, ..settings };
        match oracle(problem, &places, phase, budget) {
            Ok(oracle) => {
                let iterations = Wide::of(&Counted::space(&places)).sqrt() * Wide::new(FRAC_PI_4);
                let one = course(&oracle, &places.start, &Course::Plain(1))?.circuit;
                let none = course(&oracle, &places.start, &Course::Plain(0))?.circuit;
                let rotations = approximated(&one) - approximated(&none);
                let number = (iterations * Wide::new(rotations.max(1) as f64)).log2();
                let each = 3.0 * (number - precision.log2()).max(0.0);
                let iteration = t_gates(&one) - t_gates(&none) + rotations as f64 * each;
                all.push(Priced { choice, total: iterations * Wide::new(iteration), places, iteration, rotations });
            }
            Err(Error::Lower(error @ (LowerError::EverythingMarked | LowerError::NothingMarked))) => last = Some(error),
            Err(error) => return Err(error),
        }
    }
    match last {
        Some(error) if all.is_empty() => Err(error.into()),
        _ => {
            all.sort_by(|a, b| a.total.partial_cmp(&b.total).unwrap_or(std::cmp::Ordering::Equal));
            Ok(all)
        }
    }
}

/// How many eighths of a turn a rotation is, where it is a whole number of them.
fn eighths(angle: f64) -> Option<i64> {
    let times = angle / FRAC_PI_4;
    ((times - times.round()).abs() < 1e-12).then(|| times.round() as i64)
}

/// Rotations that are no Clifford+T gates.
fn approximated(circuit: &Circuit) -> u64 {
    let angles = circuit.gates().iter().filter_map(|gate| circuit.angle(gate));
    angles.filter(|&angle| eighths(angle).is_none()).count() as u64
}

/// T gates without those of approximated rotations, every block once.
fn t_gates(circuit: &Circuit) -> f64 {
    let figures = crate::circuit::figures::figures(circuit);
    let angles = circuit.gates().iter().filter_map(|gate| circuit.angle(gate));
    let exact = angles.filter(|&angle| eighths(angle).is_some_and(|eighths| eighths % 2 != 0)).count();
    (figures.t_count + 4 * figures.and_gates + exact as u64) as f64
}
