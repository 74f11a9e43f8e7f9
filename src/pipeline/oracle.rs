//! The stages that make circuits: the oracle at one level or at all, and the search around it.

use num_bigint::BigUint;

use super::{Error, Settings};
use crate::budget::Budget;
use crate::circuit::{Level, Mark, Product};
use crate::make::lower::{self, LowerError};
use crate::make::network;
use crate::places::{Places, Start};
use crate::problem::Problem;
use crate::search::course::Course;
use crate::search::{self, Advice, whole};

/// Compiles the oracle.
pub fn oracle(problem: &Problem, places: &Places, settings: Settings, budget: &Budget) -> Result<Product, Error> {
    let network = network::build(problem, places);
    let options = lower::Options { level: settings.level, mark: settings.mark };
    let circuit = lower::lower(&network, &options, budget)?;
    let and_count = lower::and_count(&network, settings.mark, budget)?;
    Ok(Product::new(circuit, settings.level, settings.mark, and_count))
}

/// Puts a phase oracle into the whole search circuit.
pub fn whole_search(oracle: &Product, iterations: &BigUint) -> Result<Product, Error> {
    let iterations = u64::try_from(iterations).map_err(|_| Error::TooManyIterations(iterations.clone()))?;
    let circuit = whole::whole_search(&oracle.circuit, iterations, oracle.level);
    Ok(Product::new(circuit, oracle.level, oracle.mark, oracle.and_count))
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
    let gates = |iterations: u32| whole_search(&phase, &iterations.into()).map(|search| search.figures.gates);
    Ok(gates(2)?.saturating_sub(gates(1)?))
}

pub(super) fn every_level(
    problem: &Problem,
    places: &Places,
    settings: Settings,
    budget: &Budget,
) -> Result<Vec<Product>, Error> {
    Level::ALL.iter().map(|&level| oracle(problem, places, Settings { level, ..settings }, budget)).collect()
}

/// A problem without an oracle is an answer with advice; a budget that ran out is not.
pub(super) fn why_no_oracle(error: LowerError) -> Result<Advice, Error> {
    match error {
        LowerError::NoBits => Ok(Advice::nothing_to_search()),
        LowerError::NothingMarked => Ok(Advice::no_solution()),
        LowerError::EverythingMarked => Ok(Advice::everything_marked()),
        LowerError::OutOfTime => Err(error.into()),
    }
}
