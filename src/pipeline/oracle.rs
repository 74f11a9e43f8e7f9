//! The stages that make circuits: the oracle at one level or at all, and the search around it.

use std::convert::Infallible;

use num_bigint::BigUint;

use super::bounds::bounds;
use super::{Error, Settings};
use crate::budget::Budget;
use crate::circuit::{Level, Mark, Product};
use crate::make::lower::{self, Limits, LowerError, Lowered, Turn};
use crate::make::network::pass::{self, check};
use crate::make::network::{self, Network};
use crate::places::{Places, Start};
use crate::problem::Problem;
use crate::search::course::Course;
use crate::search::{self, Advice, whole};

/// Compiles the oracle.
pub fn oracle(problem: &Problem, places: &Places, settings: Settings, budget: &Budget) -> Result<Product, Error> {
    oracle_within(problem, places, settings, &Limits::default(), budget)
}

/// Compiles the oracle that keeps to the limits.
pub fn oracle_within(
    problem: &Problem,
    places: &Places,
    settings: Settings,
    limits: &Limits,
    budget: &Budget,
) -> Result<Product, Error> {
    let network = network(problem, places, budget);
    let lowered = lower::lower_within(&network, &options(settings), limits, budget)?;
    let bounds = bounds(problem, places, settings.mark, None);
    Ok(Product { bounds, ..product(lowered, settings) })
}

/// Compiles another form of the oracle: an angle in place of the sign, or under a control.
pub fn turned(
    problem: &Problem,
    places: &Places,
    settings: Settings,
    turn: Turn,
    limits: &Limits,
    budget: &Budget,
) -> Result<Product, Error> {
    let network = network(problem, places, budget);
    Ok(product(lower::lower_turn(&network, settings.level, turn, limits, budget)?, settings))
}

/// The circuits of which none is better than another in qubits, T gates and depth at once.
pub fn front(problem: &Problem, places: &Places, settings: Settings, budget: &Budget) -> Result<Vec<Product>, Error> {
    let network = network(problem, places, budget);
    let front = lower::front_of(&network, &options(settings), budget)?;
    Ok(front.into_iter().map(|lowered| product(lowered, settings)).collect())
}

fn options(settings: Settings) -> lower::Options {
    lower::Options { level: settings.level, mark: settings.mark }
}

fn product(lowered: Lowered, settings: Settings) -> Product {
    let Lowered { circuit, and_count, figures } = lowered;
    Product { circuit, level: settings.level, mark: settings.mark, and_count, figures, bounds: None }
}

/// The network after all passes.
fn network(problem: &Problem, places: &Places, budget: &Budget) -> Network {
    let Ok(network) = pass::simplify(network::build(problem, places), budget, |_| Ok::<(), Infallible>(()));
    network
}

/// A pass that was checked.
#[derive(Clone, PartialEq, Eq, Debug)]
pub struct CheckedPass {
    /// Its name.
    pub name: &'static str,
    /// ANDs of the network before it.
    pub before: usize,
    /// ANDs of the network after it.
    pub after: usize,
    /// How the two were found to be equal.
    pub shown: check::Shown,
}

/// Runs the passes and compares the network before each of them with the one after it; a difference is a fault.
pub fn check_passes(problem: &Problem, places: &Places, seed: u64, budget: &Budget) -> Result<Vec<CheckedPass>, Error> {
    let mut list = Vec::new();
    pass::simplify(network::build(problem, places), budget, |pass::Step { name, before, passed }| {
        let shown = check::check(before, passed, seed, budget)
            .map_err(|difference| Error::Fault(format!("pass {name}: {difference}")))?;
        list.push(CheckedPass { name, before: before.and_count(), after: passed.network.and_count(), shown });
        Ok(())
    })
    .map(|_| list)
}

/// Puts a phase oracle into the whole search circuit, whose reflection keeps to the limit of qubits.
fn whole_search_within(oracle: &Product, iterations: &BigUint, limits: &Limits) -> Result<Product, Error> {
    let iterations = u64::try_from(iterations).map_err(|_| Error::TooManyIterations(iterations.clone()))?;
    let most = limits.qubits.unwrap_or(u64::MAX);
    let circuit = whole::whole_search_within(&oracle.circuit, iterations, oracle.level, most);
    let least = circuit.qubit_count() as u64;
    if least > most {
        return Err(LowerError::TooFewQubits { asked: most, least }.into());
    }
    Ok(Product::new(circuit, oracle.level, oracle.mark, oracle.and_count))
}

/// Puts a phase oracle into the whole search circuit from its start state, within the limit of qubits.
pub fn search_from(start: &Start, oracle: &Product, iterations: &BigUint, limits: &Limits) -> Result<Product, Error> {
    if start.parts().is_empty() {
        return whole_search_within(oracle, iterations, limits);
    }
    let iterations = u64::try_from(iterations).map_err(|_| Error::TooManyIterations(iterations.clone()))?;
    let product = course(oracle, start, &Course::Plain(iterations))?;
    match (limits.qubits, product.circuit.qubit_count() as u64) {
        (Some(asked), least) if least > asked => Err(LowerError::TooFewQubits { asked, least }.into()),
        _ => Ok(product),
    }
}

/// Puts an oracle into the circuit of a course from a start state.
pub fn course(oracle: &Product, start: &Start, course: &Course) -> Result<Product, Error> {
    let circuit = search::course::circuit(&oracle.circuit, start, course, oracle.level);
    Ok(Product::new(circuit, oracle.level, oracle.mark, oracle.and_count))
}

/// How many gates one iteration of the search has: of the oracle and of the reflection together.
pub fn gates_of_iteration(
    problem: &Problem,
    places: &Places,
    settings: Settings,
    budget: &Budget,
) -> Result<u64, Error> {
    let phase = oracle(problem, places, Settings { mark: Mark::Phase, ..settings }, budget)?;
    let gates = |iterations: u32| {
        search_from(&places.start, &phase, &iterations.into(), &Limits::default()).map(|search| search.figures.gates)
    };
    Ok(gates(2)?.saturating_sub(gates(1)?))
}

/// The oracle at every level that has one with so many qubits.
pub(super) fn every_level(
    problem: &Problem,
    places: &Places,
    settings: Settings,
    limits: &Limits,
    budget: &Budget,
) -> Result<Vec<Product>, Error> {
    let mut levels = Vec::new();
    for level in Level::ALL {
        let limits = Limits { qubits: limits.qubits, ..Limits::default() };
        match oracle_within(problem, places, Settings { level, ..settings }, &limits, budget) {
            Ok(product) => levels.push(product),
            Err(Error::Lower(LowerError::TooFewQubits { .. })) => {}
            Err(error) => return Err(error),
        }
    }
    Ok(levels)
}

/// A problem without an oracle is an answer with advice; a budget that ran out is not.
pub(super) fn why_no_oracle(error: LowerError) -> Result<Advice, Error> {
    match error {
        LowerError::NoBits => Ok(Advice::nothing_to_search()),
        LowerError::NothingMarked => Ok(Advice::no_solution()),
        LowerError::EverythingMarked => Ok(Advice::everything_marked()),
        _ => Err(error.into()),
    }
}
