//! The options of `compile` that limit a circuit or change its form or its text.

use std::fs;
use std::path::Path;
use std::process::{Command, Output};

use serde_json::Value;

fn tallymark(folder: &Path, arguments: &[&str]) -> Output {
    Command::new(env!("CARGO_BIN_EXE_tallymark")).current_dir(folder).args(arguments).output().unwrap()
}

fn json(folder: &Path, arguments: &[&str], exit: i32) -> Value {
    let output = tallymark(folder, arguments);
    assert_eq!(output.status.code(), Some(exit), "{arguments:?}: {output:?}");
    serde_json::from_slice(&output.stdout).unwrap()
}

/// Twelve clauses in four variables each.
fn folder() -> tempfile::TempDir {
    let folder = tempfile::tempdir().unwrap();
    let mut text = "p cnf 8 12\n".to_owned();
    for at in 0..12i64 {
        let lit = |step: i64| (at * step) % 8 + 1;
        text += &format!("{} -{} {} 0\n", lit(1), (lit(3) + 1) % 8 + 1, (lit(5) + 2) % 8 + 1);
    }
    fs::write(folder.path().join("a.cnf"), text).unwrap();
    folder
}

#[test]
fn a_limit_of_qubits_is_kept_audited_and_its_least_is_said() {
    let folder = folder();
    let full = json(folder.path(), &["compile", "a.cnf", "--level", "feedback", "--json"], 0)["circuit"].clone();
    let refused = json(folder.path(), &["compile", "a.cnf", "--level", "feedback", "--qubits", "9", "--json"], 3);
    assert_eq!(refused["error"]["code"], "C005");
    let help = refused["error"].to_string();
    let least = (9..full["qubits"].as_u64().unwrap()).find(|qubits| {
        let qubits = qubits.to_string();
        let arguments = ["compile", "a.cnf", "--level", "feedback", "--qubits", &qubits, "-o", "least.qasm"];
        tallymark(folder.path(), &arguments).status.code() == Some(0)
    });
    let least = least.unwrap();
    assert!(help.contains(&format!("has {least}")), "{help} {least}");
    let verdict = json(folder.path(), &["audit", "a.cnf", "least.qasm", "--json"], 0);
    assert_eq!(verdict["audit"]["verdict"], "equal");
    assert!(full["t_count_expected"].as_f64().unwrap() <= full["t_count"].as_f64().unwrap());
    let wrong = json(folder.path(), &["compile", "a.cnf", "--t-count", "9", "--json"], 2);
    assert_eq!(wrong["error"]["code"], "U022");
}

#[test]
fn a_dossier_keeps_to_the_limit() {
    let folder = folder();
    let limit = ["dossier", "a.cnf", "--qubits", "18", "-o", "d", "--json"];
    let report = json(folder.path(), &limit, 0);
    assert!(report["circuit"]["qubits"].as_u64().unwrap() <= 18);
    assert_eq!(report["audit"]["verdict"], "equal");
    assert!(report["search"]["circuit"]["qubits"].as_u64().unwrap() <= 18);
    assert_eq!(report["search"]["audit"]["verdict"], "equal");
}

#[test]
fn the_front_is_a_table_json_and_a_picture() {
    let folder = folder();
    let front = json(folder.path(), &["compile", "a.cnf", "--level", "clifford-t", "--front", "--json"], 0);
    let list = front["front"].as_array().unwrap();
    assert!(list.len() >= 3, "{list:?}");
    let column = |name: &str| list.iter().map(|one| one[name].as_u64().unwrap()).collect::<Vec<_>>();
    let columns = ["qubits", "t_count", "depth"].map(column);
    assert!(columns[0].is_sorted());
    for (a, b) in (0..list.len()).flat_map(|a| (0..a).flat_map(move |b| [(a, b), (b, a)])) {
        assert!(columns.iter().any(|column| column[a] < column[b]), "{b} is no better than {a} in anything: {list:?}");
    }
    let text = tallymark(folder.path(), &["compile", "a.cnf", "--front", "-o", "front.svg"]);
    assert!(String::from_utf8(text.stdout).unwrap().contains("qubits"));
    assert!(fs::read_to_string(folder.path().join("front.svg")).unwrap().starts_with("<svg"));
}

#[test]
fn openqasm_2_and_readable_text_are_judged_equal() {
    let folder = folder();
    for level in ["toffoli", "clifford-t", "feedback"] {
        for extra in
            [&["--dialect", "2"][..], &["--readable"], &["--qubits", "16"], &["--mark", "bit", "--dialect", "2"]]
        {
            let arguments = [&["compile", "a.cnf", "--level", level, "-o", "s.qasm"][..], extra].concat();
            assert_eq!(tallymark(folder.path(), &arguments).status.code(), Some(0), "{arguments:?}");
            let verdict = json(folder.path(), &["audit", "a.cnf", "s.qasm", "--json"], 0);
            assert_eq!(verdict["audit"]["verdict"], "equal", "{arguments:?}");
        }
    }
    let two = tallymark(folder.path(), &["compile", "a.cnf", "--level", "feedback", "--dialect", "2"]);
    let two = String::from_utf8(two.stdout).unwrap();
    assert!(two.starts_with("OPENQASM 2.0;") && two.contains("if(outcome_0==1) cz "), "{two}");
    let readable = tallymark(folder.path(), &["compile", "a.cnf", "--level", "feedback", "--readable"]);
    let readable = String::from_utf8(readable.stdout).unwrap();
    assert!(readable.contains("gate and_into_clean a, b, c {") && readable.contains("clause 1 "), "{readable}");
    let readable = tallymark(folder.path(), &["compile", "a.cnf", "--level", "clifford-t", "--readable"]);
    let readable = String::from_utf8(readable.stdout).unwrap();
    assert!(readable.contains("\n// c0 clause ") && readable.contains("\ndef compute_c0(qubit search_"), "{readable}");
    assert!(readable.contains("\ncompute_c0(search[") && readable.contains("\nundo_c0("), "{readable}");
    let refused =
        json(folder.path(), &["compile", "a.cnf", "--level", "wide", "--dialect", "2", "--json", "-o", "x.qasm"], 2);
    assert_eq!(refused["error"]["code"], "C008");
}

#[test]
fn angles_and_controls_have_their_registers() {
    let folder = folder();
    let text = |arguments: &[&str]| {
        let all = [&["compile", "a.cnf", "--level", "feedback"][..], arguments].concat();
        String::from_utf8(tallymark(folder.path(), &all).stdout).unwrap()
    };
    assert!(text(&["--phase", "pi/8"]).contains("p(pi/8) "));
    assert!(text(&["--phase", "pi/8", "--inverse"]).contains("p(-pi/8) "));
    assert!(text(&["--controlled"]).contains("qubit[1] control;"));
    let wrong = json(folder.path(), &["compile", "a.cnf", "--controlled", "--mark", "bit", "--json"], 2);
    assert_eq!(wrong["error"]["code"], "U012");
}
