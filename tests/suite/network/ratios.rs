//! ANDs against the plain construction, clause by clause.

use std::path::PathBuf;
use std::time::Instant;

use tallymark::problem::Problem;
use tallymark::source::open::load;
use tallymark::span::Sources;

use super::{network_of, plain, random_sat, simplified};

fn ratio(problem: &Problem) -> f64 {
    simplified(problem).and_count() as f64 / plain(problem) as f64
}

fn median(mut values: Vec<f64>) -> f64 {
    values.sort_by(f64::total_cmp);
    let half = values.len() / 2;
    (values[half] + values[(values.len() - 1) / 2]) / 2.0
}

/// The aims for random 3-SAT at four clauses a variable. Measured over 20 seeds: 0.51 and 0.61.
#[test]
fn random_3sat_stays_below_its_aims() {
    assert!(median((0..9).map(|seed| ratio(&random_sat(30, 120, 3, seed))).collect()) <= 0.55);
    assert!(median((0..3).map(|seed| ratio(&random_sat(250, 1000, 3, seed))).collect()) <= 0.65);
}

/// At most one of n, pair by pair, costs about n ANDs instead of n (n - 1); at most two of n likewise.
#[test]
fn groups_of_clauses_cost_about_an_and_for_each_variable() {
    let group = |n: usize, k: u32| {
        let mut problem = Problem::new();
        problem.add_numbered_vars(n);
        for set in (0..1u32 << n).filter(|set| set.count_ones() == k + 1) {
            let lits: Vec<_> = (0..n as i64).filter(|at| set >> at & 1 == 1).map(|at| -(at + 1)).collect();
            let lits: Vec<_> =
                lits.into_iter().map(|lit| tallymark::problem::BitLit::from_dimacs(lit).unwrap()).collect();
            problem.clauses.push(&lits);
        }
        problem
    };
    for n in 6..=12 {
        for k in 1..=2 {
            let ands = network_of(&group(n, k)).and_count();
            assert!(
                ands <= n + 2 && ands >= n - 1 - usize::from(!n.is_power_of_two()) * 2,
                "at most {k} of {n}: {ands}"
            );
        }
    }
}

/// The shared instances, where the folder is there: no formula above plain, structured ones at a third of it. Prints the
/// table; `cargo test --release -- --ignored --nocapture shared_instances`.
#[test]
#[ignore = "needs the shared instances, and some time"]
#[expect(clippy::print_stdout, reason = "the table is what it is run for")]
fn shared_instances_stay_below_plain() {
    let Some(folder) = std::env::var_os("TALLYMARK_INSTANCES").map(PathBuf::from) else {
        println!("skipped: TALLYMARK_INSTANCES names no folder");
        return;
    };
    let index = std::fs::read_to_string(folder.join("index.json")).unwrap();
    let index: serde_json::Value = serde_json::from_str(&index).unwrap();
    let (mut logarithms, mut measured) = (0.0, 0);
    for entry in index.as_array().unwrap().iter().filter(|entry| entry["expect"] == "ok") {
        let name = entry["file"].as_str().unwrap();
        let path = folder.join(name);
        let problem = load(path.to_str().unwrap(), &[], &mut Sources::new()).unwrap().problem;
        let (plain, start) = (plain(&problem), Instant::now());
        let ands = simplified(&problem).and_count();
        println!("{name:36} {ands:6} of {plain:6}  {:.2} s", start.elapsed().as_secs_f64());
        assert!(ands <= plain, "{name}");
        let family = entry["family"].as_str().unwrap();
        if ands > 0 && !["random", "edge", "quirk"].iter().any(|kind| family.contains(kind)) {
            logarithms += (ands as f64 / plain as f64).ln();
            measured += 1;
        }
    }
    let mean = (logarithms / f64::from(measured)).exp();
    println!("geometric mean over {measured} structured instances: {mean:.3}");
    for (n, count) in [(30, 20), (250, 20)] {
        let ratios = (0..count).map(|seed| ratio(&random_sat(n, 4 * n, 3, seed))).collect();
        println!("random 3-SAT, n = {n}: median {:.3}", median(ratios));
    }
    assert!(mean <= 1.0 / 3.0);
}
