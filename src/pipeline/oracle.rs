//! The stages that make circuits: the oracle at one level or at all, and the search around it.

use std::convert::Infallible;

use num_bigint::BigUint;

use super::{Error, Settings};
use crate::budget::Budget;
use crate::circuit::{Level, Mark, Product};
use crate::make::lower::{self, LowerError};
use crate::make::network::pass::{self, check};
use crate::make::network::{self, Network};
use crate::places::Places;
use crate::problem::Problem;
use crate::search::{Advice, whole};

/// Compiles the oracle.
pub fn oracle(problem: &Problem, places: &Places, settings: Settings, budget: &Budget) -> Result<Product, Error> {
    lowered(&network(problem, places, budget), settings, budget)
}

/// The network after all passes.
fn network(problem: &Problem, places: &Places, budget: &Budget) -> Network {
    let Ok(network) = pass::simplify(network::build(problem, places), budget, |_| Ok::<(), Infallible>(()));
    network
}

fn lowered(network: &Network, settings: Settings, budget: &Budget) -> Result<Product, Error> {
    let options = lower::Options { level: settings.level, mark: settings.mark };
    let circuit = lower::lower(network, &options, budget)?;
    let and_count = lower::and_count(network, settings.mark, budget)?;
    Ok(Product::new(circuit, settings.level, settings.mark, and_count))
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

/// Puts a phase oracle into the whole search circuit.
pub fn whole_search(oracle: &Product, iterations: &BigUint) -> Result<Product, Error> {
    let iterations = u64::try_from(iterations).map_err(|_| Error::TooManyIterations(iterations.clone()))?;
    let circuit = whole::whole_search(&oracle.circuit, iterations, oracle.level);
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
    let network = network(problem, places, budget);
    Level::ALL.iter().map(|&level| lowered(&network, Settings { level, ..settings }, budget)).collect()
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
