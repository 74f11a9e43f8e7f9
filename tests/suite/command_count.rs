//! `tallymark count` and what it may be asked about precision, ways and memory.

use serde_json::Value;

use super::command::{Desk, PUZZLE};

/// Random clauses of three, two for each variable: the count has some twenty binary places.
fn sparse(vars: u64, seed: u64) -> String {
    let mut random = tallymark::random::SplitMix64::new(seed);
    let mut text = format!("p cnf {vars} {}\n", 2 * vars);
    for _ in 0..2 * vars {
        for _ in 0..3 {
            let sign = if random.coin() { "" } else { "-" };
            text += &format!("{sign}{} ", 1 + random.below(vars));
        }
        text += "0\n";
    }
    text
}

fn big(value: &Value) -> num_bigint::BigUint {
    value.as_str().unwrap().parse().unwrap()
}

fn methods(object: &Value) -> Vec<&str> {
    object["ways"].as_array().unwrap().iter().map(|way| way["method"].as_str().unwrap()).collect()
}

#[test]
fn every_way_by_its_name() {
    let desk = Desk::new();
    desk.file("small.cnf", "p cnf 3 1\n1 2 3 0\n");
    for way in ["sweep", "inputs", "frontier", "components", "listing", "hashing"] {
        let (exit, object) = desk.json(&["count", "small.cnf", "--by", way]);
        assert_eq!((exit, &object["tally"]["count"]), (0, &Value::from("7")), "{way}");
        assert_eq!(methods(&object), [way], "only this way ran");
        assert!(object["ways"][0]["seconds"].as_f64().unwrap() >= 0.0);
    }
    assert_eq!(desk.exit(&["count", "small.cnf", "--by", "magic"]), 2);
}

#[test]
fn an_interval_says_what_it_is() {
    let desk = Desk::new();
    desk.file("sparse.cnf", &sparse(40, 3));
    let (_, exact) = desk.json(&["count", "sparse.cnf", "--exact-only"]);
    let count = big(&exact["tally"]["count"]);
    assert!(count.bits() > 20);
    let forced = ["count", "sparse.cnf", "--by", "hashing", "--within", "0.5", "--sure", "0.9"];
    let (exit, object) = desk.json(&forced);
    let tally = &object["tally"];
    assert_eq!((exit, &object["partial"]), (0, &Value::from(false)));
    assert_eq!((&tally["exact"], &tally["count"]), (&Value::from(false), &Value::Null));
    assert_eq!((&tally["method"], &tally["confidence"]), (&Value::from("hashing"), &Value::from(0.9)));
    let (low, high) = (big(&tally["low"]), big(&tally["high"]));
    // This seed holds; that intervals hold as often as promised is tested with the engine.
    assert!(low <= count && count <= high, "{low} {count} {high}");
    assert!(&high * 100u32 <= &low * 226u32, "a factor of 1.5 on either side");
    assert_eq!(desk.json(&forced).1["tally"], *tally, "the same seed");
    let text = desk.text(&forced);
    assert!(text.contains("with confidence 0.9"), "{text}");
}

/// A count by itself speaks of what is counted over; a search of every bit as given has its own space and marked states.
#[test]
fn the_space_is_that_of_what_is_counted_unless_a_search_is_named() {
    let desk = Desk::new();
    // Over 1 and 2 alone there are three, and one of these goes with both values of 3.
    desk.file("shown.cnf", "p cnf 3 2\nc p show 1 2 0\n1 2 0\n-1 3 0\n");
    for (more, space, marked, ways) in [(&[][..], "4", "3", 1), (&["--no-narrowing"][..], "8", "4", 2)] {
        let (exit, object) = desk.json(&[&["count", "shown.cnf", "--unconfirmed"], more].concat());
        let tally = &object["tally"];
        assert_eq!((exit, &tally["count"]), (0, &"3".into()), "{more:?}");
        assert_eq!((&tally["space"], &tally["marked"]), (&space.into(), &marked.into()), "{more:?}");
        assert_eq!(methods(&object).len(), ways, "{more:?}");
    }
}

#[test]
fn what_comes_quickly_is_exact_in_spite_of_a_tolerance() {
    let desk = Desk::new();
    desk.file("puzzle.tally", PUZZLE);
    let (exit, object) = desk.json(&["count", "puzzle.tally", "--within", "0.5"]);
    assert_eq!((exit, &object["tally"]["count"], &object["tally"]["exact"]), (0, &"3".into(), &true.into()));
    let (exit, object) = desk.json(&["count", "puzzle.tally", "--for-plan", "0.01"]);
    let plan = &object["for_plan"];
    assert_eq!((exit, &plan["reached"], &plan["tolerance"]), (0, &true.into(), &0.0.into()));
    assert_eq!(plan["iterations"], "1");
}

#[test]
fn a_margin_is_met_by_hashing_where_it_is_forced() {
    let desk = Desk::new();
    desk.file("sparse.cnf", &sparse(36, 5));
    for (more, margin) in [(&["--for-plan", "0.05"][..], 0.05), (&["--for-plan", "0.1", "--least-work"][..], 0.1)] {
        let arguments = [&["count", "sparse.cnf", "--by", "hashing", "--sure", "0.8"], more].concat();
        let (exit, object) = desk.json(&arguments);
        let plan = &object["for_plan"];
        let figure = |name: &str| plan[name].as_f64().unwrap();
        assert_eq!((exit, &plan["reached"]), (0, &true.into()), "{plan}");
        assert!(figure("best") - figure("worst") <= margin && figure("tolerance") > 0.0, "{plan}");
        assert_eq!(object["tally"]["exact"], false);
    }
}

#[test]
fn wishes_that_cannot_be_met_are_refused() {
    let desk = Desk::new();
    desk.file("puzzle.tally", PUZZLE);
    for wish in [
        &["--within", "0"][..],
        &["--within", "0.3", "--sure", "1"],
        &["--sure", "0"],
        &["--within", "0.3", "--exact-only"],
        &["--for-plan", "0"],
        &["--for-plan", "0.1", "--within", "0.3"],
        &["--least-work"],
        &["--memory", "many"],
        &["--memory", "0M"],
        &["--memory", "99999999999G"],
    ] {
        assert_eq!(desk.exit(&[&["count", "puzzle.tally"], wish].concat()), 2, "{wish:?}");
    }
}

#[test]
fn little_memory_changes_nothing_but_the_time() {
    let desk = Desk::new();
    desk.file("sparse.cnf", &sparse(44, 9));
    let count = |more: &[&str]| {
        let arguments = [&["count", "sparse.cnf", "--by", "components"], more].concat();
        big(&desk.json(&arguments).1["tally"]["count"])
    };
    assert_eq!(count(&["--memory", "100K"]), count(&[]));
}

#[test]
fn out_of_time_gives_bounds_and_exit_code_3() {
    let desk = Desk::new();
    desk.file("dense.cnf", &sparse(200, 2));
    let (exit, object) = desk.json(&["count", "dense.cnf", "--exact-only", "--time", "0.5"]);
    let tally = &object["tally"];
    assert_eq!((exit, &object["partial"], &tally["confidence"]), (3, &true.into(), &1.0.into()));
    assert!(big(&tally["low"]) < big(&tally["high"]));
}
