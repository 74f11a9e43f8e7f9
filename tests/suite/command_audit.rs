//! `audit` without a problem, against a good circuit, with a story for its witness, and put to the test.

use std::fs::read_to_string;

use super::command::{Desk, PUZZLE, RARE};

fn compiled(levels: &[&str]) -> Desk {
    let desk = Desk::new();
    desk.file("p.tally", PUZZLE);
    for level in levels {
        let name = format!("{level}.qasm");
        assert_eq!(desk.exit(&["compile", "p.tally", "--level", level, "-o", &name]), 0);
    }
    desk
}

/// The file with the last line that begins so left out.
fn without_last(desk: &Desk, from: &str, to: &str, begin: &str) -> usize {
    let text = read_to_string(desk.path(from)).unwrap();
    let lines: Vec<&str> = text.lines().collect();
    let at = lines.iter().rposition(|line| line.starts_with(begin)).expect("such a gate");
    let kept: String =
        lines.iter().enumerate().filter(|(line, _)| *line != at).map(|(_, l)| format!("{l}\n")).collect();
    desk.file(to, &kept);
    at
}

#[test]
fn a_circuit_alone_says_what_it_marks() {
    let desk = compiled(&["wide", "toffoli", "clifford-t", "feedback"]);
    for level in ["wide", "toffoli", "clifford-t", "feedback"] {
        let name = format!("{level}.qasm");
        let (exit, object) = desk.json(&["audit", &name]);
        assert_eq!(exit, 0, "{object:#}");
        assert!(object["problem"].is_null() && object["partial"] == false);
        let audit = &object["audit"];
        assert_eq!((&audit["verdict"], &audit["mark"]), (&"equal".into(), &"phase".into()));
        assert_eq!((&audit["marked"], &audit["inputs"]), (&"3".into(), &"16".into()), "{level}");
        // a, b, n low bit first: a != b, and n = 3, or n = 2 and a.
        assert_eq!(audit["first"], serde_json::json!(["1001", "1101", "1110"]), "{level}");
        assert!(desk.text(&["audit", &name]).contains("3 of 16 values of search, by a sign"));
    }
    desk.exit(&["compile", "p.tally", "--mark", "bit", "-o", "bit.qasm"]);
    let (exit, object) = desk.json(&["audit", "bit.qasm"]);
    assert_eq!((exit, &object["audit"]["mark"], &object["audit"]["marked"]), (0, &"bit".into(), &"3".into()));
    without_last(&desk, "toffoli.qasm", "dirty.qasm", "ccx");
    let (exit, object) = desk.json(&["audit", "dirty.qasm"]);
    assert_eq!((exit, &object["audit"]["work_clean"]), (1, &false.into()), "{object:#}");
    let odd = "OPENQASM 3.0;\ninclude \"stdgates.inc\";\nqubit[2] search;\nt search[0];\n";
    desk.file("odd.qasm", odd);
    assert_eq!(desk.exit(&["audit", "odd.qasm"]), 1);
    assert_eq!(desk.exit(&["audit", "p.tally"]), 2);
    assert_eq!(desk.exit(&["audit", "wide.qasm", "--self-test", "3"]), 2);
    assert_eq!(desk.exit(&["audit", "missing.qasm"]), 2);
}

#[test]
fn two_circuits_are_compared_without_a_problem() {
    let desk = compiled(&["wide", "toffoli", "clifford-t", "feedback"]);
    for level in ["toffoli", "clifford-t", "feedback"] {
        let name = format!("{level}.qasm");
        let (exit, object) = desk.json(&["audit", &name, "--against", "wide.qasm"]);
        assert_eq!((exit, &object["audit"]["verdict"]), (0, &"equal".into()), "{level} {object:#}");
        let begin = if level == "toffoli" { "ccx" } else { "t " };
        without_last(&desk, &name, "spoilt.qasm", begin);
        let (exit, object) = desk.json(&["audit", "spoilt.qasm", "--against", &name]);
        let audit = &object["audit"];
        assert_eq!((exit, &audit["verdict"]), (1, &"differs".into()), "{level} {object:#}");
        assert!(audit["witness"]["parting"]["gate"]["text"].is_string(), "{level} {object:#}");
    }
    desk.file("other.qasm", "OPENQASM 3.0;\nqubit[3] search;\n");
    let (exit, object) = desk.json(&["audit", "other.qasm", "--against", "wide.qasm"]);
    assert_eq!((exit, &object["error"]["code"]), (2, &"P020".into()));
}

#[test]
fn a_witness_is_told_in_the_terms_of_the_problem() {
    let desk = compiled(&["toffoli"]);
    // A sign on every value with a and b: with two ones; a = b breaks the first constraint, in line 5.
    let good = read_to_string(desk.path("toffoli.qasm")).unwrap();
    desk.file("spoilt.qasm", &format!("{good}cz search[0], search[1];\n"));
    let (exit, object) = desk.json(&["audit", "p.tally", "spoilt.qasm", "--against", "toffoli.qasm"]);
    let witness = &object["audit"]["witness"];
    assert_eq!((exit, &witness["bits"]), (1, &"0011".into()), "{object:#}");
    assert_eq!(
        (&witness["values"]["a"], &witness["values"]["b"], &witness["values"]["n"]),
        (&"yes".into(), &"yes".into(), &"0".into())
    );
    assert_eq!((&witness["expected"], &witness["got"]), (&"not marked".into(), &"marked".into()));
    let because = &witness["because"];
    assert_eq!((&because["holds"], &because["constraint"]["line"]), (&false.into(), &5.into()), "{object:#}");
    assert_eq!(because["constraint"]["text"], "must (a or b) and not (a and b)");
    let parting = &witness["parting"];
    assert_eq!(parting["gate"]["text"], "cz search[0], search[1]", "{object:#}");
    assert!(parting["qubit"].is_null() && parting["input"] == "0011");
    let text = desk.text(&["audit", "p.tally", "spoilt.qasm", "--against", "toffoli.qasm"]);
    assert!(
        text.contains("constraint 0, line 5: must (a or b) and not (a and b) fails") && text.contains("parts"),
        "{text}"
    );
    // A work qubit that is not erased is named, at the gate that is missing.
    without_last(&desk, "toffoli.qasm", "spoilt.qasm", "ccx");
    let (exit, object) = desk.json(&["audit", "p.tally", "spoilt.qasm", "--against", "toffoli.qasm"]);
    let parting = &object["audit"]["witness"]["parting"];
    assert_eq!((exit, &object["audit"]["work_clean"]), (1, &false.into()));
    assert!(parting["qubit"].as_str().is_some_and(|qubit| qubit.starts_with("work[")), "{object:#}");
    assert!(parting["good_gate"]["text"].as_str().is_some_and(|text| text.starts_with("ccx")), "{object:#}");
    assert_ne!(parting["value"], parting["good_value"]);
}

#[test]
fn the_audit_is_put_to_the_test() {
    let desk = compiled(&["wide", "feedback"]);
    for level in ["wide", "feedback"] {
        let name = format!("{level}.qasm");
        let (exit, object) = desk.json(&["audit", "p.tally", &name, "--self-test", "60"]);
        let test = &object["self_test"];
        assert_eq!((exit, &test["faults"], &test["passed"]), (0, &60.into(), &true.into()), "{object:#}");
        assert!(test["results"]["caught"].as_u64().unwrap() > 40 && test["results"]["missed"] == 0, "{object:#}");
        let again = desk.json(&["audit", "p.tally", &name, "--self-test", "60"]).1;
        assert_eq!(object, again, "the same seed makes the same faults");
        let other = desk.json(&["audit", "p.tally", &name, "--self-test", "60", "--seed", "2"]).1;
        assert_ne!(object["self_test"], other["self_test"]);
    }
    assert!(
        desk.text(&["audit", "p.tally", "wide.qasm", "--self-test", "60"]).contains("self-test   passed: 60 faults")
    );
    // A circuit that is wrong is not put to the test.
    without_last(&desk, "wide.qasm", "spoilt.qasm", "ctrl");
    let (exit, object) = desk.json(&["audit", "p.tally", "spoilt.qasm", "--self-test", "60"]);
    assert!(exit == 1 && object["self_test"].is_null(), "{object:#}");
}

#[test]
fn a_search_is_compared_with_the_plan() {
    let desk = Desk::new();
    desk.file("p.tally", RARE);
    assert_eq!(desk.exit(&["compile", "p.tally", "--whole", "-o", "s.qasm"]), 0);
    let (exit, object) = desk.json(&["audit", "p.tally", "s.qasm", "--self-test", "40"]);
    let audit = &object["audit"];
    assert_eq!((exit, &audit["iterations"], &audit["planned"]), (0, &"3".into(), &"3".into()), "{object:#}");
    assert!(object["self_test"]["kinds"]["wrong-iterations"]["caught"].as_u64().is_some_and(|caught| caught > 0));
    let text = read_to_string(desk.path("s.qasm")).unwrap();
    assert!(text.contains("[1:3]"), "{text}");
    desk.file("s.qasm", &text.replace("[1:3]", "[1:2]"));
    let (exit, object) = desk.json(&["audit", "p.tally", "s.qasm"]);
    let audit = &object["audit"];
    assert_eq!((exit, &audit["iterations"], &audit["planned"]), (0, &"2".into(), &"3".into()), "{object:#}");
    assert!(audit["notes"].to_string().contains("have the highest success"), "{object:#}");
}

#[test]
fn every_form_of_an_oracle_is_asked_for() {
    let desk = Desk::new();
    desk.file("p.cnf", "p cnf 2 2\n1 0\n2 0\n");
    let head = "OPENQASM 3.0;\ninclude \"stdgates.inc\";\nqubit[2] search;\n";
    desk.file("quarter.qasm", &format!("{head}cp(pi/2) search[0], search[1];\n"));
    for (arguments, exit) in [
        (&["--angle", "pi/2"][..], 0),
        (&["--angle", "-pi/2", "--inverse"], 0),
        (&["--angle", "1.5707963267948966"], 0),
        (&["--angle", "-pi/2"], 1),
        (&["--inverse"], 1),
        (&["--angle", "4pi"], 2),
        (&["--angle", "quarter"], 2),
    ] {
        assert_eq!(desk.exit(&[&["audit", "p.cnf", "quarter.qasm"], arguments].concat()), exit, "{arguments:?}");
    }
    let (_, object) = desk.json(&["audit", "p.cnf", "quarter.qasm", "--angle", "pi/2"]);
    assert_eq!(
        (&object["audit"]["form"]["mark"], &object["audit"]["form"]["inverse"]),
        (&"angle".into(), &false.into())
    );
    desk.file("with.qasm", &format!("{head}qubit[1] go;\nctrl(2) @ z go[0], search[0], search[1];\n"));
    let (exit, object) = desk.json(&["audit", "p.cnf", "with.qasm", "--control", "go"]);
    assert_eq!((exit, &object["audit"]["form"]["control"]), (0, &"go".into()), "{object:#}");
    // The complement is no longer the same up to a global phase.
    desk.file("without.qasm", &format!("{head}qubit[1] go;\nctrl(2) @ z go[0], search[0], search[1];\nz go[0];\n"));
    let (exit, object) = desk.json(&["audit", "p.cnf", "without.qasm", "--control", "go"]);
    assert_eq!((exit, &object["audit"]["verdict"]), (1, &"differs".into()), "{object:#}");
    desk.file("bit.qasm", &format!("{head}qubit[1] mark;\nccx search[0], search[1], mark[0];\n"));
    assert_eq!(desk.exit(&["audit", "p.cnf", "bit.qasm"]), 0);
    let (exit, object) = desk.json(&["audit", "p.cnf", "bit.qasm", "--angle", "pi/2"]);
    assert_eq!((exit, &object["error"]["code"]), (2, &"U011".into()));
}

#[test]
fn a_search_is_held_against_a_good_one() {
    let desk = Desk::new();
    desk.file("p.tally", RARE);
    assert_eq!(desk.exit(&["compile", "p.tally", "--whole", "-o", "s.qasm"]), 0);
    let (exit, object) = desk.json(&["audit", "p.tally", "s.qasm", "--against", "s.qasm"]);
    assert_eq!((exit, &object["audit"]["against"]["verdict"]), (0, &"equal".into()), "{object:#}");
    let text = read_to_string(desk.path("s.qasm")).unwrap();
    desk.file("t.qasm", &text.replace("[1:3]", "[1:2]"));
    let (_, object) = desk.json(&["audit", "p.tally", "t.qasm", "--places", "s.places.json", "--against", "s.qasm"]);
    assert_eq!(object["audit"]["against"]["verdict"], "differs", "{object:#}");
}
