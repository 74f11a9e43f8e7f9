//! Problems that ask for more: fixed variables, thresholds of an objective, answers left out; and the best value.

use num_bigint::BigUint;
use tallymark::budget::Budget;
use tallymark::circuit::{Level, Mark};
use tallymark::id::Id;
use tallymark::pipeline::{Settings, ladder};
use tallymark::places::Places;
use tallymark::problem::check::check;
use tallymark::problem::{Bits, Objective, Problem, Sense, VarId};
use tallymark::random::SplitMix64;
use tallymark::search::plan::ladder::{Ladder, Optimal};
use tallymark::source;
use tallymark::span::Sources;

use super::command::Desk;
use super::random_problem::random_problem;

fn all(problem: &Problem) -> Vec<Bits> {
    let bits = problem.bit_count();
    (0..1u64 << bits).map(|value| Bits::from_number(value.into(), bits)).filter(|bits| problem.holds(bits)).collect()
}

#[test]
fn fixed_variables_leave_the_solutions_that_agree() {
    let mut tried = 0;
    for seed in 0..150 {
        let problem = random_problem(seed);
        let mut random = SplitMix64::new(seed);
        let values: Vec<(VarId, i64)> = problem
            .vars()
            .ids()
            .filter_map(|var| {
                let size = problem.size(problem.vars()[var].domain);
                let code = random.below(size.saturating_add(1).max(1));
                let base = match problem.vars()[var].domain {
                    tallymark::problem::Domain::Range { lo, .. } => lo,
                    _ => 0,
                };
                random.coin().then(|| (var, base.wrapping_add(code as i64)))
            })
            .collect();
        let rest = problem.fixed(&values);
        if check(&rest).is_err() {
            // A constant may make a range exceed 64 bits no more, never the other way round.
            panic!("seed {seed}: {:?}", check(&rest));
        }
        let of = |problem: &Problem| -> Vec<Vec<i64>> {
            let mut found: Vec<Vec<i64>> = all(problem).iter().filter_map(|bits| problem.decode(bits)).collect();
            found.sort();
            found
        };
        let agrees = |solution: &Vec<i64>| values.iter().all(|&(var, value)| solution[var.index()] == value);
        let wanted: Vec<Vec<i64>> = of(&problem).into_iter().filter(agrees).collect();
        assert_eq!(of(&rest), wanted, "seed {seed}");
        tried += usize::from(!wanted.is_empty() && !values.is_empty());
    }
    assert!(tried > 20, "{tried}");
}

#[test]
fn answers_left_out_are_gone_and_no_others() {
    for seed in 0..40 {
        let problem = random_problem(seed);
        let solutions = all(&problem);
        if problem.shown.is_some() || solutions.len() < 2 {
            continue;
        }
        let out: Vec<Bits> = solutions.iter().step_by(2).cloned().collect();
        let left: Vec<Bits> = solutions.iter().skip(1).step_by(2).cloned().collect();
        assert_eq!(all(&problem.without(&out)), left, "seed {seed}");
    }
}

fn settings() -> Settings {
    Settings { level: Level::Toffoli, mark: Mark::Phase, seed: 1, threads: 1 }
}

fn ladder_of(problem: &Problem) -> Ladder {
    ladder(problem, &Places::as_given(problem), settings(), &Budget::unlimited()).unwrap()
}

/// Random problems with an objective: every threshold against plain listing.
#[test]
fn the_ladder_has_every_value_with_its_number() {
    let mut tried = 0;
    for seed in 0..60 {
        let mut problem = random_problem(seed);
        let ranges = tallymark::problem::check::ranges(&problem).0;
        let types = problem.types();
        let is_small = |id| {
            let range: tallymark::problem::check::Interval = ranges[id];
            types[id] == tallymark::problem::Type::Number && (1..60).contains(&(range.hi - range.lo))
        };
        let Some(expr) = problem.exprs.iter().map(|(id, _)| id).rfind(|&id| is_small(id)) else { continue };
        if problem.shown.is_some() {
            continue;
        }
        let sense = if seed % 2 == 0 { Sense::Least } else { Sense::Most };
        problem.objective = Some(Objective { sense, expr, span: None });
        let mut values: Vec<i64> = all(&problem).iter().map(|bits| number(&problem, bits)).collect();
        values.sort_unstable();
        if sense == Sense::Most {
            values.reverse();
        }
        let found = ladder_of(&problem);
        assert_eq!(found.solutions, BigUint::from(values.len()), "seed {seed}");
        let mut wanted: Vec<(i64, usize)> = Vec::new();
        for (at, &value) in values.iter().enumerate() {
            match wanted.last_mut() {
                Some(last) if last.0 == value => last.1 = at + 1,
                _ => wanted.push((value, at + 1)),
            }
        }
        let got: Vec<(i64, usize)> =
            found.rungs.iter().map(|rung| (rung.value, usize::try_from(&rung.as_good).unwrap())).collect();
        assert_eq!(got, wanted, "seed {seed}");
        assert_eq!(found.optimal.is_some(), !values.is_empty());
        tried += usize::from(got.len() > 1);
    }
    assert!(tried >= 5, "{tried}");
}

/// The value of the objective under these bits, by the reference evaluator.
fn number(problem: &Problem, bits: &Bits) -> i64 {
    let expr = problem.objective.as_ref().unwrap().expr;
    let values = problem.decode(bits).unwrap();
    i64::try_from(problem.evaluate(&values)[expr]).unwrap()
}

fn demo(name: &str) -> Problem {
    let path = std::path::Path::new(env!("CARGO_MANIFEST_DIR")).join("problems").join(name);
    source::load(&path.display().to_string(), &[], &mut Sources::new()).unwrap().problem
}

/// The two puzzles with an objective: best value and how many reach it, counted from the puzzles' own words by enumeration
/// outside this program.
#[test]
fn the_puzzles_with_an_objective() {
    for (name, best, many) in [("buoy-payload.tally", 25i64, 1u32), ("bakery-ovens.tally", 7, 24)] {
        let found = ladder_of(&demo(name));
        assert_eq!(found.rungs[0].value, best, "{name}");
        assert_eq!(found.rungs[0].as_good, BigUint::from(many), "{name}");
        assert!(matches!(found.optimal, Some(Optimal::Refuted { .. } | Optimal::Range)), "{name}: {:?}", found.optimal);
        let search = found.search.unwrap();
        assert!(search.iterations < search.bound, "{name}");
    }
}

#[test]
fn the_command_line_restricts() {
    let desk = Desk::new();
    desk.file("p.tally", "pick a\npick n in 1 to 5\npick b\nmust a or b\nmust n != 3 or a\nmost n + b\n");
    let count = |more: &[&str]| desk.json(&[&["count", "p.tally"], more].concat());
    assert_eq!(count(&[]).1["tally"]["count"], "14");
    assert_eq!(count(&["--fix", "a=no"]).1["tally"]["count"], "4");
    assert_eq!(count(&["--fix", "a=no", "--fix", "n=3"]).1["tally"]["count"], "0");
    assert_eq!(count(&["--threshold", "6"]).1["tally"]["count"], "2");
    assert_eq!(count(&["--fix", "c=1"]).1["error"]["code"], "U020");
    assert_eq!(count(&["--fix", "n=6"]).1["error"]["code"], "U021");
    let solutions = desk.json(&["count", "p.tally", "--list", "3"]).1;
    let listed = solutions["solutions"].as_array().map_or(0, Vec::len);
    assert_eq!(listed, 3, "{solutions}");
    let lines: String = solutions["solutions"]
        .as_array()
        .unwrap()
        .iter()
        .map(|one| format!("{} 1\n", one["bits"].as_str().unwrap()))
        .collect();
    desk.file("seen.txt", &lines);
    assert_eq!(count(&["--except", "seen.txt"]).1["tally"]["count"], "11");
    let (exit, plan) = desk.json(&["plan", "p.tally", "--objective"]);
    assert_eq!((exit, &plan["objective"]["best"], &plan["objective"]["multiplicity"]), (0, &6.into(), &"2".into()));
    assert_eq!(plan["objective"]["proof"]["kind"], "range");
}

/// compile, simulate and audit from the command line, for a start of the domains and groups.
#[test]
fn the_command_line_starts_where_it_is_told() {
    let desk = Desk::new();
    desk.file(
        "p.tally",
        "pick on[i in 1 to 4]\npick n in 1 to 5\nmust exactly 2 of [on[i] for i in 1 to 4]\nmust on[1] needs n = 5\nmust on[2] or n = 1\n",
    );
    for start in ["domains", "groups", "cheapest", "strings"] {
        let file = format!("{start}.qasm");
        assert_eq!(desk.exit(&["compile", "p.tally", "--start", start, "-o", &file]), 0, "{start}");
        let (exit, verdict) = desk.json(&["audit", "p.tally", &file]);
        assert_eq!((exit, &verdict["audit"]["verdict"]), (0, &"equal".into()), "{start}: {verdict}");
        let search = format!("{start}-search.qasm");
        assert_eq!(desk.exit(&["compile", "p.tally", "--start", start, "--whole", "-o", &search]), 0, "{start}");
        let (exit, found) =
            desk.json(&["simulate", &search, "--problem", "p.tally", "--draw", "100", "--svg", "curve.svg"]);
        let simulation = &found["simulation"];
        assert_eq!(exit, 0, "{start}: {found}");
        let rate = simulation["hits"].as_f64().unwrap() / 100.0;
        assert!((rate - simulation["success"].as_f64().unwrap()).abs() < 0.2, "{start}: {found}");
        assert!(std::fs::read_to_string(desk.path("curve.svg")).unwrap().contains("<polyline"));
        let space = if start == "groups" {
            "30"
        } else if start == "strings" {
            // One of the counted is a parity of the others.
            "64"
        } else {
            "80"
        };
        if start != "cheapest" {
            assert_eq!(simulation["space"], space, "{start}");
        }
    }
    for aim in ["certainty", "at-least-so-many"] {
        let file = format!("{aim}.qasm");
        let arguments = ["compile", "p.tally", "--start", "groups", "--whole", "--aim", aim, "-o", &file];
        assert_eq!(desk.exit(&arguments), 0, "{aim}");
        let success = desk.json(&["simulate", &file]).1["simulation"]["success"].as_f64().unwrap();
        let least = if aim == "certainty" { 1.0 - 1e-12 } else { 0.99 };
        assert!(success >= least, "{aim}: {success}");
    }
    assert_eq!(desk.exit(&["compile", "p.tally", "--whole", "--aim", "nothing-known", "-o", "any.qasm"]), 0);
    let (exit, found) = desk.json(&["simulate", "any.qasm", "--iterations", "1"]);
    assert_eq!((exit, &found["simulation"]["iterations"]), (0, &"1".into()), "{found}");
    let text = desk.text(&["simulate", "p.tally", "--draw", "5"]);
    assert!(text.contains("iterations     success") && text.contains("5 drawn"), "{text}");
}
