//! Budgets of qubits in steps of one: from the least to the circuit that keeps everything.

use tallymark::budget::Budget;
use tallymark::circuit::Level;
use tallymark::id::Id;
use tallymark::make::lower::{Favour, Limits, LowerError, Lowered, front_of, lower, lower_within};
use tallymark::make::network::Network;
use tallymark::problem::{BitId, BitLit, Problem};
use tallymark::source::load;
use tallymark::span::Sources;

use super::super::making::problems::random_problem;
use super::{MARKS, check, check_level, network_of, options, within};

/// What a level pays for.
fn paid(level: Level, lowered: &Lowered) -> f64 {
    match level {
        Level::Feedback => lowered.figures.t_count_expected,
        Level::CliffordT => lowered.figures.t_count as f64,
        _ => lowered.figures.and_gates as f64,
    }
}

/// Walks down from the circuit that keeps everything; the circuits met, most qubits first.
fn every_budget(network: &Network, level: Level, mark: tallymark::circuit::Mark) -> Vec<Lowered> {
    let budget = Budget::unlimited();
    let within = |qubits| lower_within(network, &options(level, mark), &within(qubits), &budget);
    let mut met: Vec<Lowered> = Vec::new();
    let mut qubits = lower(network, &options(level, mark), &budget).unwrap().qubit_count() as u64;
    loop {
        match within(qubits) {
            Ok(lowered) => {
                assert!(lowered.figures.qubits <= qubits);
                if let Some(wider) = met.last() {
                    assert!(paid(level, wider) <= paid(level, &lowered), "{level} {mark:?} at {qubits}");
                }
                qubits = lowered.figures.qubits - 1;
                met.push(lowered);
            }
            Err(LowerError::TooFewQubits { asked, least }) => {
                assert_eq!((asked, least), (qubits, qubits + 1), "the least that would do");
                return met;
            }
            Err(error) => panic!("{error}"),
        }
    }
}

fn has_oracle(network: &Network) -> bool {
    lower(network, &options(Level::Toffoli, MARKS[0]), &Budget::unlimited()).is_ok()
}

fn small_problems(count: u64) -> impl Iterator<Item = (u64, Problem, Network)> {
    (0..count).filter_map(|seed| {
        let problem = random_problem(seed, 7);
        let network = network_of(&problem);
        (has_oracle(&network) && network.and_count() <= 60).then_some((seed, problem, network))
    })
}

#[test]
fn every_budget_of_a_random_problem_has_a_right_circuit_and_more_never_costs_more() {
    let mut narrowed = 0;
    for (seed, problem, network) in small_problems(16) {
        for level in Level::ALL {
            for mark in MARKS {
                let met = every_budget(&network, level, mark);
                narrowed += met.len() - 1;
                for lowered in &met {
                    check_level(&lowered.circuit, level);
                    let what = format!("seed {seed} {level} {mark:?} {} qubits", lowered.figures.qubits);
                    check(&problem, &lowered.circuit, &what);
                }
            }
        }
    }
    assert!(narrowed > 80, "{narrowed}");
}

/// The same on problems of this repository, each budget in turn.
#[test]
fn every_budget_of_a_problem_of_this_repository_has_a_circuit_and_more_never_costs_more() {
    let folder = concat!(env!("CARGO_MANIFEST_DIR"), "/problems");
    let mut met = 0;
    for file in ["buoy-payload.tally", "four-into-three.cnf", "paint-shelf.tally"] {
        let loaded = load(&format!("{folder}/{file}"), &[], &mut Sources::new()).unwrap();
        let network = network_of(&loaded.problem);
        for level in [Level::CliffordT, Level::Feedback] {
            let circuits = every_budget(&network, level, MARKS[0]);
            let narrowest = circuits.last().unwrap();
            check(&loaded.problem, &narrowest.circuit, &format!("{file} {level} at its least"));
            met += circuits.len();
        }
    }
    assert!(met > 30, "{met}");
}

#[test]
fn limits_of_t_and_depth_are_kept_and_the_least_is_said() {
    let budget = Budget::unlimited();
    for (_, problem, network) in small_problems(12) {
        let (level, mark) = (Level::Feedback, MARKS[0]);
        let lower = |limits: &Limits| lower_within(&network, &options(level, mark), limits, &budget);
        let front = front_of(&network, &options(level, mark), &budget).unwrap();
        let least = |of: fn(&Lowered) -> u64| front.iter().map(of).min().unwrap();
        for favour in [Favour::Qubits, Favour::T, Favour::Depth, Favour::Volume] {
            let found = lower(&Limits { favour, ..Limits::default() }).unwrap();
            check(&problem, &found.circuit, "favoured");
            match favour {
                Favour::Qubits => assert_eq!(found.figures.qubits, least(|one| one.figures.qubits)),
                Favour::T => assert_eq!(found.figures.t_count, least(|one| one.figures.t_count)),
                Favour::Depth => assert_eq!(found.figures.depth, least(|one| one.figures.depth)),
                Favour::Volume => {
                    let volume = |one: &Lowered| one.figures.t_count * one.figures.qubits;
                    assert_eq!(volume(&found), front.iter().map(volume).min().unwrap());
                }
            }
        }
        for one in &front {
            let limits = Limits {
                qubits: Some(one.figures.qubits),
                t_count: Some(one.figures.t_count),
                depth: Some(one.figures.depth),
                favour: Favour::T,
            };
            let found = lower(&limits).unwrap().figures;
            assert!(found.qubits <= one.figures.qubits && found.t_count <= one.figures.t_count);
            assert!(found.depth <= one.figures.depth);
        }
        let few = least(|one| one.figures.t_count);
        if few > 0 {
            let found = lower(&Limits { t_count: Some(few - 1), ..Limits::default() });
            assert_eq!(found.unwrap_err(), LowerError::TooFewT { asked: few - 1, least: few });
        }
        let few = least(|one| one.figures.depth);
        let found = lower(&Limits { depth: Some(few - 1), ..Limits::default() });
        assert_eq!(found.unwrap_err(), LowerError::TooShallow { asked: few - 1, least: few });
    }
}

#[test]
fn no_circuit_of_the_front_is_worse_than_another_in_everything() {
    for (_, _, network) in small_problems(8) {
        for level in [Level::CliffordT, Level::Feedback] {
            let front = front_of(&network, &options(level, MARKS[0]), &Budget::unlimited()).unwrap();
            let figures = |one: &Lowered| (one.figures.qubits, one.figures.t_count, one.figures.depth);
            for (at, one) in front.iter().enumerate() {
                let dominated = front.iter().enumerate().any(|(other, better)| {
                    let ((q, t, d), (p, s, e)) = (figures(one), figures(better));
                    other != at
                        && p <= q
                        && s <= t
                        && e <= d
                        && (p, s, e) != (q, t, d)
                        && better.figures.t_count_expected <= one.figures.t_count_expected
                });
                assert!(!dominated);
            }
        }
    }
}

/// Clauses that share a variable are computed at the same time on copies of it: m of them in a number of layers that
/// grows with log m, not with m.
#[test]
fn copies_of_searched_qubits_make_a_circuit_shallow() {
    let shared = |m: usize| {
        let mut problem = Problem::new();
        problem.add_numbered_vars(2 * m + 1);
        for at in 0..m {
            let lits = [0, 2 * at + 1, 2 * at + 2].map(|bit| BitLit::new(BitId::new(bit), at % 2 == 0));
            problem.clauses.push(&lits);
        }
        problem
    };
    let depth = |m: usize, favour| {
        let network = network_of(&shared(m));
        let limits = Limits { favour, ..Limits::default() };
        lower_within(&network, &options(Level::Feedback, MARKS[0]), &limits, &Budget::unlimited()).unwrap().figures
    };
    let problem = shared(6);
    let limits = Limits { favour: Favour::Depth, ..Limits::default() };
    for level in Level::ALL {
        let found =
            lower_within(&network_of(&problem), &options(level, MARKS[0]), &limits, &Budget::unlimited()).unwrap();
        check_level(&found.circuit, level);
        check(&problem, &found.circuit, "spread");
    }
    let (one, four) = (depth(16, Favour::Depth), depth(64, Favour::Depth));
    assert!(four.depth < one.depth * 2 && four.t_depth < one.t_depth * 2, "{one:?} {four:?}");
    let plain = depth(64, Favour::T);
    assert!(four.depth * 3 < plain.depth && four.t_depth * 3 < plain.t_depth, "{four:?} {plain:?}");
    assert_eq!(four.t_count, plain.t_count);
}
