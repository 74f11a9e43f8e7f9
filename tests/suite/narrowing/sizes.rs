//! How much is searched on instances of known kinds.
//!
//! The bounds: where an encoding defines every other variable from its inputs, so many as there are inputs (derived). All
//! others (below the inputs, the puzzles, random 3-SAT) are goals of ours, set by an earlier trial of the same rules on
//! instances of the same kinds; no published value is known.
#![expect(clippy::print_stdout, reason = "tables of what was reached, for whoever runs a test with --nocapture")]

use tallymark::budget::Budget;
use tallymark::judge::restate::restate;
use tallymark::make::narrow::{Options, narrow};
use tallymark::problem::Problem;

use super::families::{self, Counting};
use super::table::log2_count;

fn searched(problem: &Problem, one_for_many: bool, effort: u64) -> usize {
    let options = Options { one_for_many, seed: 1, effort };
    narrow(problem, &options, &Budget::unlimited()).places.search_len()
}

fn shrunk(problem: &Problem, one_for_many: bool, most: usize, what: &str) {
    let found = searched(problem, one_for_many, 1 << 22);
    println!("{what}: {} -> {found} (at most {most})", problem.bit_count());
    assert!(found <= most, "{what}: {found} of {} searched, at most {most} expected", problem.bit_count());
}

#[test]
fn encodings_shrink_to_their_inputs() {
    shrunk(&families::product(8, 143 * 251).finish(), false, 16, "product of 8 bits");
    shrunk(&families::product(16, 65521 * 65519).finish(), false, 32, "product of 16 bits");
    shrunk(&families::weighted(24, 16, true, 1).finish(), false, 24, "subset sum");
    shrunk(&families::weighted(24, 8, true, 2).finish(), false, 24, "weighted =");
    shrunk(&families::weighted(24, 8, false, 3).finish(), false, 24, "weighted <=");
    shrunk(&families::random_circuit(32, 400, 1).finish(), false, 32, "random circuit");
    for counting in Counting::ALL {
        let encoder = || families::sat_with_count(32, 2.5, 14, counting, 1);
        shrunk(&encoder().finish_shown(), false, 32, &format!("{counting:?}, shown"));
        let most = match counting {
            Counting::Sequential => 21,
            Counting::Sorting | Counting::Totalizer => 25,
            Counting::ExactlySequential | Counting::ExactlyTotalizer => 31,
            Counting::ExactlyBothWays => 32,
        };
        shrunk(&encoder().finish(), true, most, &format!("{counting:?}, any"));
    }
}

#[test]
fn parities_shrink_to_what_is_free() {
    shrunk(&families::parities(40, 30, 10, 1).finish(), false, 12, "parities");
    shrunk(&families::tseitin_torus(4, 5), false, 21, "torus");
}

#[test]
fn puzzles_shrink_by_their_last_choices() {
    shrunk(&families::queens(8), false, 49, "queens");
    shrunk(&families::colouring(5, 5, 3), false, 50, "colouring");
    shrunk(&families::matchings(10), false, 36, "matchings");
    shrunk(&families::pigeons(9, 8), true, 56, "pigeons");
}

#[test]
fn random_3sat_shrinks_where_one_solution_is_enough() {
    // A few seeds and little effort here; `.ci/deep` takes 20 seeds of 50 and 100 bits.
    for (ratio, most) in [(4.0, 0.58), (3.0, 0.50), (2.0, 0.38)] {
        let mut found: Vec<usize> = (0..5)
            .map(|seed| searched(&families::random_3sat(50, (50.0 * ratio) as usize, seed), true, 1 << 24))
            .collect();
        found.sort_unstable();
        println!("ratio {ratio}: {found:?}");
        assert!(found[2] as f64 <= most * 50.0, "ratio {ratio}: {found:?}");
    }
}

fn row(name: &str, problem: &Problem, one_for_many: bool) {
    let options = Options { one_for_many, ..Options::default() };
    let narrowed = narrow(problem, &options, &Budget::unlimited());
    let (before, after) = (problem.bit_count(), narrowed.places.search_len());
    let states = |marked: f64, bits: usize| bits as f64 - marked;
    let gain = match (log2_count(problem), log2_count(&restate(problem, &narrowed.places).problem)) {
        (Some(all), Some(marked)) => format!("{:.1}", (states(all, before) - states(marked, after)) / 2.0),
        _ if narrowed.places.claim == tallymark::places::Claim::OneForOne && problem.shown.is_none() => {
            format!("{:.1}", (before - after) as f64 / 2.0)
        }
        _ => "not counted".to_owned(),
    };
    let mode = if one_for_many { "any" } else { "one" };
    println!("{name:<34} {mode} {before:>6} {after:>5}  {gain:>11}  {:?} {:?}", narrowed.order, narrowed.places.claim);
}

/// `cargo test --release -- --ignored narrowing --nocapture`: mode, bits before and after, and by how many powers of two the
/// iterations shrink.
#[test]
#[ignore = "prints a table and takes minutes"]
fn table_of_gains() {
    println!("{:<34} mode before after  log2 of gain", "instance");
    for counting in Counting::ALL {
        let encoder = || families::sat_with_count(32, 2.5, 14, counting, 1);
        row(&format!("3-SAT, {counting:?}, shown"), &encoder().finish_shown(), false);
        row(&format!("3-SAT, {counting:?}"), &encoder().finish(), true);
    }
    row("weighted = 24 x 8", &families::weighted(24, 8, true, 2).finish(), false);
    row("weighted <= 24 x 8", &families::weighted(24, 8, false, 3).finish(), false);
    row("subset sum 24 x 16", &families::weighted(24, 16, true, 1).finish(), false);
    row("product 8", &families::product(8, 143 * 251).finish(), false);
    row("product 16", &families::product(16, 65521 * 65519).finish(), false);
    row("random circuit, 400 gates", &families::random_circuit(32, 400, 1).finish(), false);
    row("30 parities of 10 in 40", &families::parities(40, 30, 10, 1).finish(), false);
    row("torus 4 x 5", &families::tseitin_torus(4, 5), false);
    row("matchings of 10", &families::matchings(10), false);
    row("pigeons 9 in 8", &families::pigeons(9, 8), true);
    row("queens 8", &families::queens(8), false);
    row("colouring 5 x 5", &families::colouring(5, 5, 3), false);
    for n in [50, 100] {
        for ratio in [4.0, 3.0, 2.0] {
            row(
                &format!("random 3-SAT n = {n}, ratio {ratio}"),
                &families::random_3sat(n, (n as f64 * ratio) as usize, 1),
                true,
            );
        }
    }
}

/// The medians over 20 seeds.
#[test]
#[ignore = "takes a minute"]
fn random_3sat_medians() {
    for n in [50, 100] {
        for (ratio, most) in [(4.0, 0.58), (3.0, 0.50), (2.0, 0.38)] {
            let clauses = (n as f64 * ratio) as usize;
            let effort = Options::EFFORT;
            let mut found: Vec<usize> =
                (0..20).map(|seed| searched(&families::random_3sat(n, clauses, seed), true, effort)).collect();
            found.sort_unstable();
            let median = (found[9] + found[10]) as f64 / 2.0;
            println!("n = {n}, ratio {ratio}: median {median} = {:.3} n, at most {most} n", median / n as f64);
            assert!(median <= most * n as f64, "n = {n}, ratio {ratio}: {found:?}");
        }
    }
}

/// A hundred thousand clauses: narrowed as far as smaller ones, 0.65 n for 3-SAT, and to the inputs of encodings.
#[test]
#[ignore = "takes a quarter of a minute"]
fn large_formulas_are_narrowed_in_seconds() {
    let cases = [
        ("random 3-SAT", families::random_3sat(25_000, 100_000, 1), true, 16_250),
        ("random circuit", families::random_circuit(1_000, 25_000, 1).finish(), false, 1_000),
        ("parities", families::parities(2_000, 900, 40, 1).finish(), false, 2_000),
    ];
    for (name, problem, one_for_many, most) in cases {
        let start = std::time::Instant::now();
        let found = searched(&problem, one_for_many, Options::EFFORT);
        let seconds = start.elapsed().as_secs_f64();
        println!("{name}: {} clauses, {} -> {found} in {seconds:.1} s", problem.clauses.len(), problem.bit_count());
        assert!(found <= most, "{name}: {found} searched, at most {most} expected");
    }
}
