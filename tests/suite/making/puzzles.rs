//! The demo puzzles: each constraint of the network against the evaluator, on random values within the domains.

use std::fs;
use std::path::Path;

use tallymark::budget::Budget;
use tallymark::circuit::{Level, Mark};
use tallymark::id::Id;
use tallymark::make::lower::{Options, lower};
use tallymark::make::network::Network;
use tallymark::problem::{Domain, Problem};
use tallymark::random::SplitMix64;
use tallymark::source::tally;
use tallymark::span::Sources;

use super::{check_level, network_of};

const LEAST_PUZZLES: usize = 6;

fn puzzles() -> Vec<(String, Problem)> {
    let folder = Path::new(env!("CARGO_MANIFEST_DIR")).join("problems");
    let mut files: Vec<_> = fs::read_dir(folder).unwrap().map(|entry| entry.unwrap().path()).collect();
    files.retain(|file| file.extension().is_some_and(|extension| extension == "tally"));
    files.sort();
    assert!(files.len() >= LEAST_PUZZLES, "only {} puzzles", files.len());
    let read = |file: &std::path::PathBuf| {
        let text = fs::read_to_string(file).unwrap();
        let name = file.display().to_string();
        let (problem, _) = tally::read(&text, &name, &[], &mut Sources::new()).unwrap();
        (name, problem)
    };
    files.iter().map(read).collect()
}

fn random_values(problem: &Problem, random: &mut SplitMix64) -> Vec<i64> {
    let value = |domain: Domain| {
        let lo = if let Domain::Range { lo, .. } = domain { lo } else { 0 };
        lo + random.below(problem.size(domain) + 1) as i64
    };
    problem.vars().values().map(|var| var.domain).map(value).collect()
}

/// A constraint holds where its conjuncts hold; a conjunct that an earlier constraint has too is listed there only.
fn check_constraints(problem: &Problem, network: &Network, values: &[i64]) {
    let results = problem.evaluate(values);
    let nodes = network.evaluate(&problem.encode(values).unwrap());
    let mut failed = vec![false; problem.constraints.len()];
    for conjunct in network.conjuncts() {
        let holds = nodes[conjunct.lit.node()] ^ conjunct.lit.is_complemented();
        match conjunct.constraint {
            Some(constraint) => failed[constraint.index()] |= !holds,
            None => assert!(holds, "the values lie in their domains"),
        }
    }
    let mut earlier = false;
    for (constraint, failed) in problem.constraints.iter().zip(failed) {
        let holds = results[constraint.expr] != 0;
        assert!(!(holds && failed), "{:?} holds", constraint.origin);
        assert!(holds || failed || earlier, "{:?} fails", constraint.origin);
        earlier |= failed;
    }
}

#[test]
fn every_constraint_of_the_puzzles_says_what_the_evaluator_says() {
    let mut random = SplitMix64::new(5);
    for (_, problem) in puzzles() {
        let network = network_of(&problem);
        for _ in 0..1000 {
            check_constraints(&problem, &network, &random_values(&problem, &mut random));
        }
    }
}

#[test]
fn the_puzzles_compile_at_every_level() {
    for (name, problem) in puzzles() {
        let network = network_of(&problem);
        for level in Level::ALL {
            let options = Options { level, mark: Mark::Phase };
            let circuit = lower(&network, &options, &Budget::unlimited()).unwrap_or_else(|e| panic!("{name}: {e}"));
            check_level(&circuit, level);
            // Every node has at most one ancilla.
            assert!(circuit.qubit_count() <= problem.bit_count() + network.nodes().len());
        }
    }
}
