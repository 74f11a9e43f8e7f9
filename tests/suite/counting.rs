//! Counting: the instance collection, published numbers, a third way to count, laws, and brute force.

use std::collections::BTreeSet;
use std::fs;
use std::path::{Path, PathBuf};
use std::time::Duration;

use biodivine_lib_bdd::{Bdd, BddPartialValuation, BddVariable, BddVariableSet};
use num_bigint::BigUint;
use proptest::prelude::*;
use tallymark::budget::Budget;
use tallymark::id::Id;
use tallymark::judge::count::{Method, Options, Over, Tally, count};
use tallymark::problem::{BitId, BitLit, Bits, Problem};
use tallymark::random::SplitMix64;
use tallymark::source::load;
use tallymark::span::Sources;

/// Solutions that the everyday tests list at most; the long test goes to a million.
const EVERYDAY: u64 = 5000;

fn tally(problem: &Problem, over: Over) -> Tally {
    count(problem, over, &Options { keep: 20, ..Options::default() }, &Budget::unlimited()).expect("the ways agree")
}

fn cnf(vars: usize, clauses: impl IntoIterator<Item = Vec<i64>>) -> Problem {
    let mut problem = Problem::new();
    problem.add_numbered_vars(vars);
    for clause in clauses {
        let lits: Vec<BitLit> = clause.iter().map(|&lit| BitLit::from_dimacs(lit).unwrap()).collect();
        problem.clauses.push(&lits);
    }
    problem
}

// The instance collection.

/// Says that a test had nothing to do.
#[expect(clippy::print_stderr, reason = "a skipped test must be seen")]
fn skipped() {
    eprintln!("skipped: the folder of all instances is not beside the project");
}

fn check_instances(folder: &str, from: u64, to: u64, also_copied: bool) -> Option<usize> {
    let root = Path::new(env!("CARGO_MANIFEST_DIR"));
    let copied = |name: &str| root.join("tests/instances").join(name).exists();
    let folder: PathBuf = root.join(folder);
    let text = fs::read_to_string(folder.join("index.json")).ok()?;
    let index: serde_json::Value = serde_json::from_str(&text).expect("the index is JSON");
    let mut checked = 0;
    for entry in index.as_array().expect("a list") {
        let name = entry["file"].as_str().unwrap();
        if entry["expect"] != "ok" || (!also_copied && copied(name)) {
            continue;
        }
        let path = folder.join(name);
        let problem = load(path.to_str().unwrap(), &[], &mut Sources::new()).unwrap().problem;
        for (over, key) in [(Over::AllBits, "count"), (Over::Shown, "projected_count")] {
            let Some(expected) = entry[key].as_str() else { continue };
            // The many solutions of this one are those of twelve variables, doubled 108 times.
            let listed = if name == "edge-unused-variables.cnf" { 0 } else { expected.parse().unwrap_or(u64::MAX) };
            if (from..=to).contains(&listed) {
                let tally = tally(&problem, over);
                assert_eq!(tally.exact().map(|n| n.to_string()).as_deref(), Some(expected), "{name}, {over:?}");
                assert!(!tally.checked_by.is_empty() || listed > EVERYDAY, "{name}, {over:?}: confirmed");
                checked += 1;
            }
        }
    }
    Some(checked)
}

#[test]
fn copied_instances_have_the_number_of_solutions_in_their_index() {
    let checked = check_instances("tests/instances", 0, EVERYDAY, true).expect("copied into the project");
    assert!(checked >= 60, "{checked} counts");
}

#[test]
fn the_other_instances_have_the_number_of_solutions_in_their_index() {
    match check_instances("../shared/instances", 0, EVERYDAY, false) {
        Some(checked) => assert!(checked >= 8, "{checked} counts"),
        None => skipped(),
    }
}

/// Beyond listing: components or a way of dynamic programming leads, and another one, a checked certificate or a sweep
/// confirms it.
#[test]
fn counts_beyond_listing_are_those_of_the_index() {
    let checked =
        check_large("tests/instances", &["rand3-n50-m110.cnf", "xor4-n40-m20.cnf", "edge-unused-variables.cnf"]);
    assert_eq!(checked, Some(3));
    let others = ["fm-frscs.cnf", "fm-sensorkit.cnf"];
    match check_large("../shared/instances", &others) {
        Some(checked) => assert_eq!(checked, others.len()),
        None => skipped(),
    }
}

fn check_large(folder: &str, names: &[&str]) -> Option<usize> {
    let folder = Path::new(env!("CARGO_MANIFEST_DIR")).join(folder);
    let text = fs::read_to_string(folder.join("index.json")).ok()?;
    let index: serde_json::Value = serde_json::from_str(&text).expect("the index is JSON");
    let mut checked = 0;
    for entry in index.as_array().expect("a list") {
        let name = entry["file"].as_str().unwrap();
        if !names.contains(&name) {
            continue;
        }
        let problem = load(folder.join(name).to_str().unwrap(), &[], &mut Sources::new()).unwrap().problem;
        for (over, key) in [(Over::AllBits, "count"), (Over::Shown, "projected_count")] {
            let Some(expected) = entry[key].as_str() else { continue };
            let tally = tally(&problem, over);
            assert_eq!(tally.exact().map(|n| n.to_string()).as_deref(), Some(expected), "{name}, {over:?}");
            let lists = matches!(tally.method, Method::Sweep | Method::Listing | Method::SecondListing);
            assert!(!lists && tally.method != Method::Hashing, "{name}, {over:?}: {:?}", tally.method);
            assert!(!tally.checked_by.is_empty(), "{name}, {over:?}: confirmed");
            assert_eq!(tally.solutions.len(), 20, "{name}, {over:?}");
            checked += 1;
        }
    }
    Some(checked)
}

#[test]
#[ignore = "long: up to a million solutions, minutes without optimisation"]
fn large_instances_have_the_number_of_solutions_in_their_index() {
    check_instances("tests/instances", EVERYDAY + 1, 1_000_000, true).expect("copied into the project");
    if check_instances("../shared/instances", EVERYDAY + 1, 1_000_000, false).is_none() {
        skipped();
    }
}

/// The numbers of the puzzles in plain words, each found by backtracking over the written rules and by enumerating a
/// separately written model with another solver; the two solution sets were equal.
#[test]
fn puzzles_have_the_number_of_solutions_found_elsewhere() {
    for (name, bits, expected) in [
        ("buoy-payload", 13, 49_u32),
        ("choir-seating", 21, 66),
        ("greenhouse-benches", 18, 410),
        ("bakery-ovens", 24, 752),
        ("shift-roster", 40, 12_928),
        ("irrigation-valves", 14, 0),
    ] {
        let path = Path::new(env!("CARGO_MANIFEST_DIR")).join("problems").join(name).with_extension("tally");
        let problem = load(path.to_str().unwrap(), &[], &mut Sources::new()).unwrap().problem;
        assert_eq!(problem.bit_count(), bits, "{name}");
        let tally = tally(&problem, Over::Shown);
        assert_eq!(tally.exact(), Some(&expected.into()), "{name}");
        assert!(!tally.checked_by.is_empty(), "{name}: confirmed");
    }
}

// Published numbers.

/// Exactly one of these.
fn exactly_one(vars: &[i64]) -> Vec<Vec<i64>> {
    let mut clauses = vec![vars.to_vec()];
    for (at, &a) in vars.iter().enumerate() {
        clauses.extend(vars[..at].iter().map(|&b| vec![-a, -b]));
    }
    clauses
}

/// Exactly `k` of `n`: no k + 1 are true, no n - k + 1 are false.
fn exactly(k: usize, n: usize) -> Problem {
    let subsets = |size: usize, sign: i64| {
        let chosen = move |mask: &u32| mask.count_ones() as usize == size;
        let lits = move |mask: u32| (0..n).filter(move |at| mask >> at & 1 == 1).map(move |at| sign * (at as i64 + 1));
        (0_u32..1 << n).filter(chosen).map(move |mask| lits(mask).collect::<Vec<_>>())
    };
    cnf(n, subsets(k + 1, -1).chain(subsets(n - k + 1, 1)))
}

/// One colour of each vertex, two colours on each edge.
fn colouring(vertices: usize, edges: &[(usize, usize)], colours: usize) -> Problem {
    let var = |vertex: usize, colour: usize| (vertex * colours + colour) as i64 + 1;
    let mut clauses = Vec::new();
    for vertex in 0..vertices {
        clauses.extend(exactly_one(&(0..colours).map(|colour| var(vertex, colour)).collect::<Vec<_>>()));
    }
    for &(a, b) in edges {
        clauses.extend((0..colours).map(|colour| vec![-var(a, colour), -var(b, colour)]));
    }
    cnf(vertices * colours, clauses)
}

fn cycle(length: usize) -> Vec<(usize, usize)> {
    (0..length).map(|at| (at, (at + 1) % length)).collect()
}

fn petersen() -> Vec<(usize, usize)> {
    let spokes = (0..5).map(|at| (at, at + 5));
    let star = (0..5).map(|at| (at + 5, (at + 2) % 5 + 5));
    cycle(5).into_iter().chain(spokes).chain(star).collect()
}

fn grid(side: usize) -> Vec<(usize, usize)> {
    let right = (0..side * side).filter(|at| at % side + 1 < side).map(|at| (at, at + 1));
    let down = (0..side * (side - 1)).map(|at| (at, at + side));
    right.chain(down).collect()
}

/// A queen in each row, none of which attack each other.
fn queens(n: usize) -> Problem {
    let var = |row: usize, column: usize| (row * n + column) as i64 + 1;
    let squares: Vec<(usize, usize)> = (0..n * n).map(|at| (at / n, at % n)).collect();
    let mut clauses: Vec<Vec<i64>> = (0..n).map(|row| (0..n).map(|column| var(row, column)).collect()).collect();
    for (at, &(row, column)) in squares.iter().enumerate() {
        for &(other_row, other_column) in &squares[..at] {
            let (rows, columns) = (row.abs_diff(other_row), column.abs_diff(other_column));
            if rows == 0 || columns == 0 || rows == columns {
                clauses.push(vec![-var(row, column), -var(other_row, other_column)]);
            }
        }
    }
    cnf(n * n, clauses)
}

/// Pigeons that each sit in exactly one hole, at most one to a hole.
fn pigeonhole(pigeons: usize, holes: usize) -> Problem {
    let complete: Vec<(usize, usize)> = (0..pigeons).flat_map(|a| (0..a).map(move |b| (a, b))).collect();
    colouring(pigeons, &complete, holes)
}

/// An XOR of literals is true: every assignment of even parity is excluded.
fn odd(vars: &[i64]) -> Vec<Vec<i64>> {
    let even = (0_u32..1 << vars.len()).filter(|mask| mask.count_ones() % 2 == 0);
    even.map(|mask| (0..).zip(vars).map(|(at, &var)| if mask >> at & 1 == 1 { -var } else { var }).collect()).collect()
}

/// The first `n` variables have odd parity; helper variables hold the parities of the first ones.
fn parity_chain(n: i64) -> Problem {
    // The negated helper turns "odd" into "the helper equals the XOR of the others".
    let mut clauses = odd(&[1, 2, -(n + 1)]);
    for at in 3..=n {
        clauses.extend(odd(&[n + at - 2, at, -(n + at - 1)]));
    }
    clauses.push(vec![n + n - 1]);
    let mut problem = cnf(2 * n as usize - 1, clauses);
    problem.shown = Some((0..n as usize).map(BitId::new).collect());
    problem
}

/// Sets of cells of a square board, no two of them side by side.
fn independent_sets(side: usize) -> Problem {
    cnf(side * side, grid(side).into_iter().map(|(a, b)| vec![-(a as i64) - 1, -(b as i64) - 1]))
}

fn check_published(problem: &Problem, expected: u64, what: &str) {
    let tally = tally(problem, Over::AllBits);
    assert_eq!(tally.exact(), Some(&BigUint::from(expected)), "{what}");
    assert!(!tally.checked_by.is_empty(), "{what}: confirmed");
    assert_eq!(third_count(problem), BigUint::from(expected), "{what}: by decision diagrams");
}

/// OEIS A000170 ("Number of ways of placing n nonattacking queens on an n X n board").
#[test]
fn published_queens() {
    for (n, expected) in [(1, 1), (2, 0), (3, 0), (4, 2), (5, 10), (6, 4), (7, 40)] {
        check_published(&queens(n), expected, &format!("{n} queens"));
    }
}

/// The chromatic polynomials of cycles, (k-1)^n + (-1)^n (k-1), and of the Petersen graph at 3; grids: three times OEIS
/// A068253.
#[test]
fn published_colourings() {
    for (n, expected) in [(3, 6), (4, 18), (5, 30), (6, 66), (7, 126), (8, 258)] {
        check_published(&colouring(n, &cycle(n), 3), expected, &format!("three colours on a cycle of {n}"));
    }
    check_published(&colouring(10, &petersen(), 3), 120, "three colours on the Petersen graph");
    for (side, expected) in [(1, 3), (2, 18), (3, 246)] {
        check_published(&colouring(side * side, &grid(side), 3), expected, &format!("three colours, grid of {side}"));
    }
}

/// Injective maps, n!/(n-m)!; none where there are more pigeons than holes (W. Cook, C. R. Coullard, G. Turán, "On the
/// complexity of cutting-plane proofs", 1987, from memory, for the formula).
#[test]
fn published_pigeonholes() {
    for (pigeons, holes, expected) in [(2, 1, 0), (4, 3, 0), (5, 4, 0), (3, 5, 60), (4, 4, 24), (5, 5, 120)] {
        check_published(&pigeonhole(pigeons, holes), expected, &format!("{pigeons} pigeons, {holes} holes"));
    }
}

/// Binomial coefficients.
#[test]
fn published_cardinalities() {
    for (k, n, expected) in [(0, 4, 1), (4, 9, 126), (6, 12, 924), (3, 12, 220)] {
        check_published(&exactly(k, n), expected, &format!("exactly {k} of {n}"));
    }
}

/// OEIS A006506 ("Number of n X n binary matrices with no 2 adjacent 1's").
#[test]
fn published_independent_sets() {
    for (side, expected) in [(1, 2), (2, 7), (3, 63), (4, 1234)] {
        check_published(&independent_sets(side), expected, &format!("independent sets, grid of {side}"));
    }
}

/// 2^(n-1) strings of n bits have odd parity; the helper variables change nothing, shown or not.
#[test]
fn published_parities() {
    for n in [3, 8, 12] {
        let problem = parity_chain(n);
        check_published(&problem, 1 << (n - 1), &format!("parity of {n}"));
        assert_eq!(tally(&problem, Over::Shown).exact(), Some(&BigUint::from(1_u32 << (n - 1))));
    }
}

/// x1 -> x2 -> ... -> xn has n + 1 solutions; n disjoint clauses of k literals have (2^k - 1)^n; one clause of n
/// literals has 2^n - 1 (elementary).
#[test]
fn closed_forms_beyond_listing() {
    let chain = cnf(60, (1..60).map(|at| vec![-at, at + 1]));
    assert_eq!(tally(&chain, Over::AllBits).exact(), Some(&61_u32.into()));
    let disjoint = cnf(200, (0..100).map(|at| vec![2 * at + 1, 2 * at + 2]));
    let expected: BigUint = "515377520732011331036461129765621272702107522001".parse().unwrap();
    let found = tally(&disjoint, Over::AllBits);
    assert_eq!(found.exact(), Some(&expected));
    assert_eq!((found.solutions.len(), found.complete), (20, false));
    let free = cnf(300, []);
    assert_eq!(tally(&free, Over::AllBits).exact(), Some(&(BigUint::from(1_u32) << 300)));
}

/// By reduced ordered decision diagrams: a library that shares nothing with the solvers.
fn third_count(problem: &Problem) -> BigUint {
    let vars = BddVariableSet::new_anonymous(problem.bit_count() as u16);
    let mut bdd: Bdd = vars.mk_true();
    for clause in problem.clauses.iter() {
        let mut lits = BddPartialValuation::empty();
        for lit in clause {
            lits.set_value(BddVariable::from_index(lit.bit().index()), !lit.is_negated());
        }
        let clause = if clause.is_empty() { vars.mk_false() } else { vars.mk_disjunctive_clause(&lits) };
        bdd = bdd.and(&clause);
    }
    bdd.exact_cardinality().to_string().parse().unwrap()
}

// Budgets and bounds.

#[test]
fn under_a_deadline_the_solver_that_can_stop_confirms() {
    let problem = queens(6);
    let budget = Budget::unlimited().within(Duration::from_secs(3600));
    let tally = count(&problem, Over::AllBits, &Options::default(), &budget).unwrap();
    assert_eq!(tally.exact(), Some(&4_u32.into()));
    assert_eq!(tally.checked_by, [Method::SecondListing]);
    assert_eq!((tally.solutions.len(), tally.complete), (4, true));
}

#[test]
fn a_spent_budget_leaves_bounds_that_hold() {
    let problem = colouring(16, &grid(4), 3);
    let cancelled = Budget::unlimited();
    cancelled.cancel();
    let hasty = Budget::unlimited().within(Duration::from_millis(30));
    let expected = BigUint::from(7812_u32);
    for budget in [cancelled, hasty] {
        let tally = count(&problem, Over::AllBits, &Options::default(), &budget).unwrap();
        assert!(tally.low <= expected && expected <= tally.high, "{} to {}", tally.low, tally.high);
        assert!(tally.solutions.iter().all(|bits| problem.holds(bits)));
    }
}

// Brute force and laws.

fn small_problem() -> impl Strategy<Value = Problem> {
    (1_usize..11, 0_u64..u64::MAX, 0_usize..30, any::<bool>()).prop_map(|(vars, seed, clauses, shows)| {
        let mut random = SplitMix64::new(seed);
        let clause = |random: &mut SplitMix64| -> Vec<i64> {
            let length = 1 + random.below(4);
            let lit =
                |random: &mut SplitMix64| (random.below(vars as u64) as i64 + 1) * [1, -1][random.below(2) as usize];
            (0..length).map(|_| lit(random)).collect()
        };
        let clauses: Vec<Vec<i64>> = (0..clauses).map(|_| clause(&mut random)).collect();
        let mut problem = cnf(vars, clauses);
        problem.shown = shows.then(|| problem.bits().filter(|_| random.coin()).collect());
        problem
    })
}

/// The solutions, as strings of the shown bits where `over` says so.
fn brute_force(problem: &Problem, over: Over) -> BTreeSet<Vec<bool>> {
    let all = (0..1_u128 << problem.bit_count()).map(|number| Bits::from_number(number, problem.bit_count()));
    all.filter(|bits| problem.holds(bits)).map(|bits| seen(problem, over, &bits)).collect()
}

fn seen(problem: &Problem, over: Over, bits: &Bits) -> Vec<bool> {
    match (&problem.shown, over) {
        (Some(shown), Over::Shown) => shown.iter().map(|&bit| bits.get(bit)).collect(),
        _ => bits.iter().collect(),
    }
}

/// The same problem with unused variables in front of and behind its own, so that no sweep can reach it.
fn padded(problem: &Problem) -> Problem {
    let clauses = problem
        .clauses
        .iter()
        .map(|clause| clause.iter().map(|lit| lit.to_dimacs()).map(|lit| lit + 40 * lit.signum()).collect::<Vec<_>>());
    let mut wide = cnf(problem.bit_count() + 80, clauses);
    let shown = problem.shown.clone().unwrap_or_else(|| problem.bits().collect());
    wide.shown = Some(shown.iter().map(|bit| BitId::new(bit.index() + 40)).collect());
    wide
}

proptest! {
    #![proptest_config(ProptestConfig { cases: 150, failure_persistence: None, ..ProptestConfig::default() })]

    #[test]
    fn every_way_agrees_with_brute_force(problem in small_problem(), timed in any::<bool>()) {
        let budget = if timed { Budget::unlimited().within(Duration::from_secs(3600)) } else { Budget::unlimited() };
        for over in [Over::AllBits, Over::Shown] {
            let expected = brute_force(&problem, over);
            for keep in [1 << 11, 3] {
                let tally = count(&problem, over, &Options { keep, ..Options::default() }, &budget).unwrap();
                prop_assert_eq!(tally.exact(), Some(&expected.len().into()));
                prop_assert!(tally.solutions.is_sorted());
                prop_assert_eq!(tally.solutions.len(), expected.len().min(keep));
                let kept: BTreeSet<Vec<bool>> = tally.solutions.iter().map(|bits| seen(&problem, over, bits)).collect();
                prop_assert_eq!(kept.len(), tally.solutions.len());
                prop_assert!(kept.is_subset(&expected));
                prop_assert_eq!(tally.complete, expected.len() <= keep);
                prop_assert!(!tally.checked_by.is_empty());
            }
        }
    }

    #[test]
    fn without_a_sweep_the_other_ways_agree_with_brute_force(problem in small_problem()) {
        let expected = brute_force(&problem, Over::Shown).len();
        let tally = count(&padded(&problem), Over::Shown, &Options { keep: 1 << 11, ..Options::default() }, &Budget::unlimited()).unwrap();
        prop_assert_eq!(tally.exact(), Some(&expected.into()));
        prop_assert_eq!(&tally.checked_by[..], &[Method::Listing][..]);
        prop_assert_eq!((tally.solutions.len(), tally.complete), (expected, true));
    }

    /// Each way alone gives the number, or says what it does not know.
    #[test]
    fn every_way_alone_agrees_with_brute_force(problem in small_problem(), wide in any::<bool>()) {
        let expected = BigUint::from(brute_force(&problem, Over::Shown).len());
        let problem = if wide { padded(&problem) } else { problem };
        for method in Method::ALL {
            let options = Options { only: Some(method), keep: 5, ..Options::default() };
            let tally = count(&problem, Over::Shown, &options, &Budget::unlimited()).unwrap();
            let always = matches!(method, Method::Components | Method::Certificate | Method::Listing | Method::SecondListing);
            prop_assert!(tally.exact().is_some() || !always, "{}", method);
            if tally.confidence >= 1.0 {
                prop_assert!(tally.low <= expected && expected <= tally.high, "{}", method);
            }
        }
    }

    /// count(F) = count(F and x) + count(F and not x).
    #[test]
    fn a_variable_splits_the_number(problem in small_problem()) {
        let with = |lit: i64| {
            let mut problem = problem.clone();
            problem.clauses.push(&[BitLit::from_dimacs(lit).unwrap()]);
            tally(&problem, Over::AllBits).low
        };
        prop_assert_eq!(tally(&problem, Over::AllBits).low, with(1) + with(-1));
    }
}
