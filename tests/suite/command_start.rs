//! Start states on the command line: what a search costs from each, which is taken, and what the ledger keeps.

use serde_json::Value;

use super::command::{Desk, problem};

/// Seven of the nine codes of two numbers, three of which are solutions.
const NUMBERS: &str = "pick a in 0 to 2\npick b in 0 to 2\nmust a + b = 2\n";

fn codes(object: &Value) -> Vec<&str> {
    object["advice"].as_array().unwrap().iter().map(|advice| advice["code"].as_str().unwrap()).collect()
}

#[test]
fn plans_say_what_a_search_costs_from_each_start() {
    let desk = Desk::new();
    let file = problem("buoy-payload.tally");
    let (exit, plan) = desk.json(&["plan", &file, "--no-narrowing", "--start", "strings"]);
    let starts = plan["starts"].as_array().unwrap();
    let names: Vec<&str> = starts.iter().map(|start| start["start"].as_str().unwrap()).collect();
    assert_eq!((exit, names), (0, vec!["groups", "strings"]), "{plan:#}");
    let cost = |at: usize| starts[at]["t_gates"].as_str().unwrap().parse::<f64>().unwrap();
    // One group of 2^12 of the 2^13 strings: fewer iterations by the root of 2, at about the same cost each.
    assert!((1.3..1.5).contains(&(cost(1) / cost(0))), "{plan:#}");
    assert_eq!(starts[0]["precision"], 1e-3);
    assert!(codes(&plan).contains(&"cheaper-start"), "{plan:#}");
    let (_, cheapest) = desk.json(&["plan", &file, "--no-narrowing"]);
    assert!(!codes(&cheapest).contains(&"cheaper-start"));
    // sin^2 theta = 49 / 4096, so pi / (4 theta) = 7.17.
    assert_eq!((&cheapest["tally"]["space"], &cheapest["plan"]["iterations"]), (&"4096".into(), &"7".into()));
    assert!(desk.text(&["plan", &file, "--no-narrowing"]).contains("start       groups: 4096 states, "));
}

#[test]
fn a_dossier_from_another_start_is_right_within_it() {
    let desk = Desk::new();
    desk.file("numbers.tally", NUMBERS);
    for (start, space) in [("strings", "16"), ("domains", "9"), ("groups", "9")] {
        let (exit, report) = desk.json(&["dossier", "numbers.tally", "-o", "out", "--start", start, "--no-narrowing"]);
        assert_eq!((exit, &report["tally"]["space"]), (0, &space.into()), "{start}: {report:#}");
        assert_eq!(report["tally"]["marked"], "3", "{start}");
        assert_eq!(
            (&report["audit"]["verdict"], &report["search"]["audit"]["verdict"]),
            (&"equal".into(), &"equal".into())
        );
        assert_eq!(report["starts"].as_array().unwrap().len(), 2);
        // Nine codes are prepared with rotations, which are counted apart.
        let rotations = &report["search"]["circuit"]["rotations"];
        assert_eq!(rotations.as_u64().unwrap() > 0, start != "strings", "{report:#}");
        let (exit, _) = desk.json(&["audit", "numbers.tally", "out/search.qasm", "--places", "out/places.json"]);
        assert_eq!(exit, 0, "{start}");
    }
    assert!(
        desk.text(&["compile", "numbers.tally", "--whole", "--start", "domains", "-o", "s.qasm"]).contains("rotations")
    );
}

#[test]
fn an_objective_is_part_of_a_dossier_where_it_is_asked_for() {
    let desk = Desk::new();
    desk.file("best.tally", &format!("{NUMBERS}most a\n"));
    let (exit, report) = desk.json(&["dossier", "best.tally", "-o", "out", "--objective"]);
    assert_eq!((exit, &report["objective"]["best"]), (0, &2.into()), "{report:#}");
    assert_eq!(desk.json(&["dossier", "best.tally", "-o", "out"]).1["objective"], Value::Null);
    desk.file("plain.tally", NUMBERS);
    let (exit, refused) = desk.json(&["dossier", "plain.tally", "-o", "out", "--objective"]);
    assert_eq!((exit, &refused["error"]["code"]), (2, &"C093".into()));
}

#[test]
fn a_ledger_keeps_the_start_that_was_asked_for() {
    let desk = Desk::new();
    std::fs::create_dir(desk.path("all")).unwrap();
    desk.file("all/numbers.tally", NUMBERS);
    let (_, plain) = desk.json(&["ledger", "update", "all", "--no-narrowing"]);
    assert_eq!(plain["problems"]["numbers.tally"]["space"], "16");
    let (_, kept) = desk.json(&["ledger", "update", "all", "--no-narrowing", "--start", "domains"]);
    let entry = &kept["problems"]["numbers.tally"];
    assert_eq!(
        (&entry["space"], &entry["start"], &entry["verdict"]),
        (&"9".into(), &"domains".into(), &"equal".into())
    );
    // A check does the work from the start that the ledger has.
    assert_eq!(desk.exit(&["ledger", "check", "all", "--all"]), 0);
    assert_eq!(desk.exit(&["ledger", "check", "all", "--start", "strings"]), 1);
}

#[test]
fn nothing_to_search_for_is_an_answer_from_any_start() {
    let desk = Desk::new();
    let file = problem("irrigation-valves.tally");
    for start in ["strings", "domains", "cheapest"] {
        let (exit, plan) = desk.json(&["plan", &file, "--start", start]);
        assert_eq!((exit, &plan["plan"]["success"]), (0, &0.0.into()), "{start}: {plan:#}");
    }
    let (exit, refused) = desk.json(&["compile", &file, "--start", "cheapest"]);
    assert_eq!((exit, &refused["error"]["code"]), (2, &"C002".into()));
}

/// The number of iterations is the file's, unless it is an input of the file.
#[test]
fn iterations_are_given_to_files_that_ask_for_them() {
    let desk = Desk::new();
    desk.file("numbers.tally", NUMBERS);
    assert_eq!(desk.exit(&["compile", "numbers.tally", "--whole", "-o", "plain.qasm"]), 0);
    assert_eq!(desk.exit(&["compile", "numbers.tally", "--whole", "--aim", "nothing-known", "-o", "open.qasm"]), 0);
    for command in [&["simulate"][..], &["audit", "numbers.tally"]] {
        let (exit, refused) = desk.json(&[command, &["plain.qasm", "--iterations", "2"]].concat());
        assert_eq!((exit, &refused["error"]["code"]), (2, &"U025".into()), "{refused:#}");
        // Without a number there is nothing to simulate; the audit judges what a turn of the loop does.
        let exit = desk.exit(&[command, &["open.qasm"]].concat());
        assert_eq!(exit, if command[0] == "audit" { 0 } else { 2 });
        let (exit, object) = desk.json(&[command, &["open.qasm", "--iterations", "1"]].concat());
        assert_eq!(exit, 0, "{object:#}");
    }
}
