//! The puzzles in `problems/`: layout of their bits, published numbers of solutions, examples.
//!
//! Sizes, counts and examples of the first six: the project's collection of puzzles in plain words, each counted there
//! by backtracking over constraints written in Python and by a constraint solver over a model written apart. The other
//! three are invented here; their counts come from the two ways of counting of these tests.

use std::path::Path;

use tallymark::problem::Problem;

use super::cases::{Case, read_case};
use super::count;

fn demo(name: &str) -> Problem {
    let path = Path::new(env!("CARGO_MANIFEST_DIR")).join("problems").join(name).with_extension("tally");
    let outcome = read_case(path).run();
    assert!(outcome.messages.is_empty(), "{name}: {:#?}", outcome.diagnostics);
    outcome.problem.expect("no message, so read")
}

fn holds(problem: &Problem, values: &[i64]) -> bool {
    problem.encode(values).is_some_and(|bits| problem.holds(&bits))
}

fn names(problem: &Problem) -> Vec<String> {
    problem.vars().values().map(|var| var.name.to_string()).collect()
}

#[test]
fn sizes_and_counts_are_the_published_ones() {
    let published = [
        ("buoy-payload", 13, 49),
        ("choir-seating", 21, 66),
        ("greenhouse-benches", 18, 410),
        ("bakery-ovens", 24, 752),
        ("shift-roster", 40, 12928),
        ("irrigation-valves", 14, 0),
        ("lantern-walk", 10, 20),
        ("paint-shelf", 12, 7),
        ("relay-codes", 18, 480),
    ];
    for (name, bits, solutions) in published {
        let problem = demo(name);
        assert_eq!(problem.bit_count(), bits, "{name}");
        assert_eq!(count::solutions(&problem), solutions, "{name}");
    }
}

#[test]
fn variables_stand_in_source_order_and_rows_in_index_order() {
    let bakery = names(&demo("bakery-ovens"));
    assert_eq!(bakery[..3], ["start[rye]", "start[rolls]", "start[cake]"]);
    assert_eq!(bakery[6], "oven[rye]");
    let roster = demo("shift-roster");
    assert_eq!(
        names(&roster)[..6],
        ["works[1, A]", "works[1, B]", "works[1, C]", "works[1, D]", "works[1, E]", "works[2, A]"]
    );
    let choir = demo("choir-seating");
    assert!(choir.vars().values().all(|var| var.width == 3));
    let buoy = names(&demo("buoy-payload"));
    assert_eq!((buoy[0].as_str(), buoy[11].as_str()), ("mounted[thermistor]", "packs"));
}

#[test]
fn published_examples_are_solutions_and_their_neighbours_are_judged() {
    // Values in the order of the variables, from the collection's examples and optimal examples.
    let buoy = demo("buoy-payload");
    assert!(holds(&buoy, &[1, 0, 0, 0, 1, 1, 1, 0, 0, 1, 1, 4]));
    assert!(holds(&buoy, &[1, 1, 1, 1, 0, 0, 0, 1, 0, 0, 0, 4]));
    // A profiler beside the hydrophone; too few packs; wind without barometer.
    assert!(!holds(&buoy, &[1, 0, 1, 0, 1, 1, 1, 0, 0, 1, 1, 4]));
    assert!(!holds(&buoy, &[1, 0, 0, 0, 1, 1, 1, 0, 0, 1, 1, 1]));
    assert!(!holds(&buoy, &[1, 0, 0, 0, 1, 0, 1, 0, 0, 1, 1, 4]));

    let choir = demo("choir-seating");
    assert!(holds(&choir, &[2, 1, 7, 4, 5, 3, 6]));
    assert!(!holds(&choir, &[2, 1, 7, 4, 5, 6, 3 + 4]));
    assert!(!holds(&choir, &[1, 2, 3, 4, 5, 6, 7]));

    let greenhouse = demo("greenhouse-benches");
    assert!(holds(&greenhouse, &[1, 0, 3, 1, 1, 0, 2, 2, 3]));
    assert!(!holds(&greenhouse, &[1, 0, 3, 1, 0, 0, 2, 2, 3]));

    let bakery = demo("bakery-ovens");
    assert!(holds(&bakery, &[0, 6, 0, 6, 3, 4, 0, 0, 1, 1, 1, 1]));
    assert!(holds(&bakery, &[0, 0, 2, 5, 4, 5, 0, 1, 1, 1, 0, 0]));
    assert!(!holds(&bakery, &[0, 6, 0, 6, 3, 4, 1, 0, 1, 1, 1, 1]));
    assert!(!holds(&bakery, &[0, 6, 0, 6, 3, 4, 0, 1, 1, 1, 1, 1]));

    let days = [
        [0, 0, 1, 1, 0],
        [1, 0, 0, 1, 0],
        [1, 0, 1, 0, 0],
        [0, 1, 0, 0, 1],
        [1, 0, 1, 0, 0],
        [0, 1, 0, 0, 1],
        [0, 0, 0, 1, 1],
        [0, 1, 0, 1, 0],
    ];
    let roster = demo("shift-roster");
    assert!(holds(&roster, &days.concat()));
    let mut swapped = days;
    swapped.swap(5, 4);
    swapped[4] = swapped[5];
    assert!(!holds(&roster, &swapped.concat()));
}

#[test]
fn objectives_have_the_published_optima() {
    // Optimum and the number of solutions that reach it, from the same collection.
    for (name, optimum, reached) in [("buoy-payload", 25, 1), ("bakery-ovens", 7, 24)] {
        let mut problem = demo(name);
        let objective = problem.objective.take().expect("an objective");
        let target = problem.exprs.node(tallymark::problem::Expr::Number(optimum));
        let compare = tallymark::problem::Compare::Eq;
        let equal = problem.exprs.node(tallymark::problem::Expr::Compare(compare, objective.expr, target));
        problem.must(equal, Default::default());
        assert_eq!(count::solutions(&problem), reached, "{name}");
    }
}

#[test]
fn a_set_changes_what_depends_on_it() {
    let path = Path::new(env!("CARGO_MANIFEST_DIR")).join("problems/lantern-walk.tally");
    let Case { path, text, mut keys } = read_case(path);
    keys.push(("set".to_owned(), "steps=6".to_owned()));
    let problem = Case { path, text, keys }.run().problem.expect("read");
    assert_eq!(problem.bit_count(), 12);
    assert_eq!(problem.vars().as_slice()[5].name.as_ref(), "stride[6]");
}

#[test]
fn constraints_of_a_loop_know_their_turn() {
    let problem = demo("shift-roster");
    let turns: Vec<String> = problem
        .constraints
        .iter()
        .map(|constraint| {
            let turn = constraint.origin.bindings.iter().map(|(name, value)| format!("{name}={value}"));
            turn.collect::<Vec<_>>().join(" ")
        })
        .collect();
    assert_eq!(turns[..2], ["d=1", "d=2"]);
    assert_eq!(turns[8..10], ["d=1 c=A", "d=1 c=B"]);
    assert_eq!(turns.last().map(String::as_str), Some(""));
}
