//! The conjunction of m opaque clauses of three literals: costs counted from the gates against a published kind of
//! optimum.

use tallymark::budget::Budget;
use tallymark::circuit::{Figures, Level, Mark};
use tallymark::id::Id;
use tallymark::make::lower::{Lowered, front_of, lower_within};
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

/// The same for a thousand clauses, at every number of ancillas of its table: on average and in the worst case with
/// measured erasure, and without measurement. The programme may share nothing between clauses, as there is nothing to share.
#[test]
#[ignore = "a minute"]
fn conjunctions_of_a_thousand_clauses_cost_what_a_dynamic_programme_gives() {
    let network = network_of(&conjunction(1000));
    let budget = Budget::unlimited();
    let measured = front_of(&network, &options(Level::Feedback, Mark::Phase), &budget).unwrap();
    let unitary = front_of(&network, &options(Level::CliffordT, Mark::Phase), &budget).unwrap();
    let within = |front: &[Lowered], ancillas: u64, of: fn(&Figures) -> f64| {
        let fit = front.iter().filter(|one| one.figures.qubits <= 3000 + ancillas);
        fit.map(|one| of(&one.figures) / 4.0).fold(f64::INFINITY, f64::min)
    };
    let mut missed = Vec::new();
    let mut compare = |what: &str, ancillas: u64, found: f64, reached: f64| {
        if found > reached {
            missed.push(format!("{what} at {ancillas}: {found} for {reached}"));
        }
    };
    let on_average = [
        (2998, 2998.0),
        (1999, 3498.0),
        (1001, 4496.0),
        (89, 4453.0),
        (88, 4474.0),
        (30, 6548.0),
        (21, 8700.0),
        (14, 15363.0),
    ];
    for (ancillas, reached) in on_average {
        compare("on average", ancillas, within(&measured, ancillas, |f| f.t_count_expected), reached);
    }
    let worst = [
        (2998, 2998.0),
        (1999, 3998.0),
        (1001, 5994.0),
        (89, 5908.0),
        (29, 9255.0),
        (23, 11006.0),
        (21, 15007.0),
        (14, 46821.0),
    ];
    for (ancillas, reached) in worst {
        compare("in the worst case", ancillas, within(&measured, ancillas, |f| f.t_count as f64), reached);
    }
    let without = [
        (2998, 5996.0),
        (1999, 7996.0),
        (1001, 13998.0),
        (89, 11816.0),
        (29, 18510.0),
        (23, 22012.0),
        (21, 30014.0),
        (14, 121_256.0),
    ];
    for (ancillas, reached) in without {
        compare("without measurement", ancillas, within(&unitary, ancillas, |f| f.t_count as f64), reached);
    }
    assert!(missed.is_empty(), "{missed:#?}");
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
