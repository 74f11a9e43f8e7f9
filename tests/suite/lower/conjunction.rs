//! The conjunction of m opaque clauses of three literals: costs counted from the gates against a published kind of
//! optimum.

use tallymark::budget::Budget;
use tallymark::circuit::{Level, Mark};
use tallymark::id::Id;
use tallymark::make::lower::lower_within;
use tallymark::problem::{BitId, BitLit, Problem};

use super::{check, network_of, options, within};

/// `m` clauses of three literals each, over variables of their own.
fn conjunction(m: usize) -> Problem {
    let mut problem = Problem::new();
    problem.add_numbered_vars(3 * m);
    for clause in 0..m {
        let lits = [0, 1, 2].map(|at| BitLit::new(BitId::new(3 * clause + at), (clause + at) % 2 == 0));
        problem.clauses.push(&lits);
    }
    problem
}

/// ANDs with this many ancillas at a level, counted from the gates: on average and in the worst case at `feedback`,
/// computed and undone at `clifford-t`.
fn ands(m: usize, ancillas: u64, level: Level) -> (f64, u64) {
    let network = network_of(&conjunction(m));
    let limits = within(3 * m as u64 + ancillas);
    let found = lower_within(&network, &options(level, Mark::Phase), &limits, &Budget::unlimited()).unwrap();
    assert!(found.figures.qubits <= 3 * m as u64 + ancillas);
    (found.figures.t_count_expected / 4.0, found.figures.t_count / 4)
}

/// A dynamic programme over all splits of a conjunction gave these numbers of ANDs: with measured erasure on average,
/// and without measurement.
#[test]
fn conjunctions_of_a_hundred_clauses_cost_what_a_dynamic_programme_gives() {
    for (ancillas, measured, unitary) in [(298, 298.0, 596), (28, 433.0, 1136)] {
        let (expected, _) = ands(100, ancillas, Level::Feedback);
        assert!(expected <= measured, "{ancillas} ancillas: {expected} on average");
        let (_, all) = ands(100, ancillas, Level::CliffordT);
        assert!(all <= unitary, "{ancillas} ancillas: {all} without measurement");
    }
}

#[test]
fn conjunctions_are_right_with_every_number_of_ancillas() {
    let problem = conjunction(4);
    let network = network_of(&problem);
    for level in [Level::Toffoli, Level::Feedback] {
        for ancillas in 4..=10 {
            let limits = within(12 + ancillas);
            let found = lower_within(&network, &options(level, Mark::Phase), &limits, &Budget::unlimited());
            if let Ok(found) = found {
                check(&problem, &found.circuit, &format!("{level} {ancillas}"));
            }
        }
    }
}
