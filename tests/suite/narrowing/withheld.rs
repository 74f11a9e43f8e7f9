//! The compiler does not solve the puzzle on the way: without the answers of solvers it writes the same bytes.

use std::path::Path;

use tallymark::budget::Budget;
use tallymark::circuit::{Level, Mark};
use tallymark::judge::count::{self, Over};
use tallymark::make::lower::Limits;
use tallymark::pipeline::{Narrowing, Settings, choose, oracle_within};
use tallymark::problem::Problem;
use tallymark::sat::withheld::withholding;
use tallymark::source::open::load;
use tallymark::span::Sources;

use super::families::{self, Counting};

/// The places, the gates and the figures, as text.
fn compiled(problem: &Problem, narrowing: Narrowing, qubits: Option<u64>) -> String {
    let settings = Settings { level: Level::Feedback, mark: Mark::Phase, seed: 1, threads: 1 };
    let places = choose(problem, narrowing, settings, &Budget::unlimited()).expect("a choice").0.places;
    let limits = Limits { qubits, ..Limits::default() };
    let product = oracle_within(problem, &places, settings, &limits, &Budget::unlimited());
    let circuit = product.map(|product| (product.circuit, product.figures)).map_err(|error| error.to_string());
    format!("{}\n{circuit:?}", places.to_json())
}

fn assert_same(problem: &Problem, name: &str) {
    for narrowing in [Narrowing::OneForOne, Narrowing::OneForMany] {
        // Limits of qubits take long where there are many gates.
        let limit = Some(problem.bit_count() as u64 + 6).filter(|&qubits| qubits < 20);
        for qubits in [None, limit] {
            let with = compiled(problem, narrowing, qubits);
            let (without, asked) = withholding(|| compiled(problem, narrowing, qubits));
            assert!(with == without, "{name}, {narrowing:?}, {qubits:?}: other bytes without the answers");
            assert_eq!(asked, 0, "{name}, {narrowing:?}: it asked what it must not ask");
        }
    }
}

#[test]
fn compiling_without_answers_gives_the_same_bytes() {
    let problems = Path::new(env!("CARGO_MANIFEST_DIR")).join("problems");
    let mut read = 0;
    for entry in std::fs::read_dir(&problems).expect("the problems") {
        let path = entry.expect("an entry").path();
        let name = path.to_string_lossy();
        if name.ends_with(".tally") || name.ends_with(".cnf") {
            assert_same(&load(&name, &[], &mut Sources::new()).expect("a good file").problem, &name);
            read += 1;
        }
    }
    assert!(read > 9, "{read}");
    assert_same(&families::product(4, 143).finish(), "a product");
    assert_same(&families::sat_with_count(6, 2.0, 3, Counting::Totalizer, 1).finish_shown(), "counted");
    assert_same(&families::random_3sat(14, 50, 1), "random 3-SAT");
}

/// The control: a count that lists solutions does ask, and does not get there without the answers.
#[test]
fn withheld_answers_are_missed_by_who_needs_them() {
    let problem = families::random_3sat(40, 160, 1);
    let options = count::Options { only: Some(count::Method::Listing), ..count::Options::default() };
    let count = || count::count(&problem, Over::AllBits, &options, &Budget::unlimited()).expect("a tally");
    let (tally, asked) = withholding(count);
    assert!(tally.exact().is_none() && asked > 0, "{tally:?} after {asked} questions");
}
