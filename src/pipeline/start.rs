//! The stage that chooses the start state: each choice is compiled and priced as one search, and the cheapest is taken.
//!
//! The price of a search is the number of its iterations times the T gates of one. An AND of a level without T gates
//! counts as four of them (C. Gidney, "Halving the cost of quantum addition", Quantum 2:74, 2018), and a rotation as
//! `search/price` says for the precision of the whole; a rotation by an odd multiple of pi/4 is one T gate and Cliffords, by
//! an even one none.
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
use crate::search::price::{PRECISION, StartPrice, t_gates_of_rotation};

/// A start state with what a search from it costs.
#[derive(Clone, PartialEq, Debug)]
pub struct Priced {
    /// The places with that start.
    pub places: Places,
    /// What a search from it costs.
    pub price: StartPrice,
}

/// The bits as given, with the start state of this choice.
pub fn places_from(problem: &Problem, choice: Choice) -> Places {
    let plain = Places::as_given(problem);
    Places { start: start(problem, &plain, choice), ..plain }
}

/// What can be started from: all strings of the bits that are searched then, some perhaps computed from others, and each
/// choice that finds a start of its own for the bits as given.
fn candidates(problem: &Problem, strings: &Places) -> Vec<(Choice, Places)> {
    let mut all = vec![(Choice::Strings, strings.clone())];
    for choice in [Choice::Domains, Choice::Groups] {
        let places = places_from(problem, choice);
        if !places.start.parts().is_empty() && all.iter().all(|(_, other)| other.start != places.start) {
            all.push((choice, places));
        }
    }
    all
}

/// Every candidate with its price, the cheapest first; of equals, the plainer. A start from which everything is marked,
/// or nothing, is no candidate. `strings` is what is searched from all strings.
///
/// Where hidden bits are searched too, more states may be marked than where they are computed, and all strings then look
/// dearer or the other starts cheaper by at most the root of that.
pub fn priced(
    problem: &Problem,
    strings: &Places,
    settings: Settings,
    precision: f64,
    budget: &Budget,
) -> Result<Vec<Priced>, Error> {
    let mut all: Vec<Priced> = Vec::new();
    let mut last = None;
    for (choice, places) in candidates(problem, strings) {
        match price(problem, &places, choice, settings, precision, budget) {
            Ok(price) => all.push(Priced { places, price }),
            Err(Error::Lower(error @ (LowerError::EverythingMarked | LowerError::NothingMarked))) => last = Some(error),
            Err(error) => return Err(error),
        }
    }
    match last {
        Some(error) if all.is_empty() => Err(error.into()),
        _ => {
            let order = |a: &Priced, b: &Priced| a.price.t_gates.partial_cmp(&b.price.t_gates);
            all.sort_by(|a, b| order(a, b).unwrap_or(std::cmp::Ordering::Equal));
            Ok(all)
        }
    }
}

/// The prices of all candidates, where there is more than one; for a report, so without an error.
pub fn prices(problem: &Problem, strings: &Places, settings: Settings, budget: &Budget) -> Vec<StartPrice> {
    if candidates(problem, strings).len() < 2 {
        return Vec::new();
    }
    let priced = priced(problem, strings, settings, PRECISION, budget).unwrap_or_default();
    priced.into_iter().map(|one| one.price).collect()
}

fn price(
    problem: &Problem,
    places: &Places,
    choice: Choice,
    settings: Settings,
    precision: f64,
    budget: &Budget,
) -> Result<StartPrice, Error> {
    let phase = Settings { mark: Mark::Phase, ..settings };
    let oracle = oracle(problem, places, phase, budget)?;
    let space = Counted::space(places);
    let iterations = Wide::of(&space).sqrt() * Wide::new(FRAC_PI_4);
    let one = course(&oracle, &places.start, &Course::Plain(1))?.circuit;
    let none = course(&oracle, &places.start, &Course::Plain(0))?.circuit;
    let rotations = approximated(&one) - approximated(&none);
    let each = t_gates_of_rotation(iterations * Wide::new(rotations as f64), precision);
    let t_gates_of_iteration = t_gates(&one) - t_gates(&none) + rotations as f64 * each;
    Ok(StartPrice {
        start: choice.name(),
        searched_bits: places.search_len(),
        space,
        t_gates_of_iteration,
        rotations_of_iteration: rotations,
        precision,
        t_gates: iterations * Wide::new(t_gates_of_iteration),
    })
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
