//! The command line as its user meets it: outputs, the JSON contract, exit codes, files.

use std::path::{Path, PathBuf};
use std::process::{Command, Output, Stdio};

use serde_json::Value;

/// A folder to work in, and the command run inside it.
pub(super) struct Desk {
    folder: tempfile::TempDir,
}

impl Desk {
    pub(super) fn new() -> Self {
        Self { folder: tempfile::tempdir().unwrap() }
    }

    pub(super) fn file(&self, name: &str, text: &str) -> PathBuf {
        let path = self.folder.path().join(name);
        std::fs::write(&path, text).unwrap();
        path
    }

    pub(super) fn path(&self, name: &str) -> PathBuf {
        self.folder.path().join(name)
    }

    pub(super) fn run(&self, arguments: &[&str]) -> Output {
        let mut command = Command::new(env!("CARGO_BIN_EXE_tallymark"));
        command.args(arguments).current_dir(self.folder.path()).stdin(Stdio::null()).output().unwrap()
    }

    /// Runs with `--json` and gives the exit code and the object.
    pub(super) fn json(&self, arguments: &[&str]) -> (i32, Value) {
        let output = self.run(&[arguments, &["--json"]].concat());
        let text = String::from_utf8(output.stdout).unwrap();
        let value = serde_json::from_str(&text).unwrap_or_else(|error| panic!("{arguments:?}: {error}\n{text}"));
        (output.status.code().unwrap(), value)
    }

    pub(super) fn exit(&self, arguments: &[&str]) -> i32 {
        self.run(arguments).status.code().unwrap()
    }

    pub(super) fn text(&self, arguments: &[&str]) -> String {
        String::from_utf8(self.run(arguments).stdout).unwrap()
    }
}

// Neither has an equation that would determine a bit: all four are searched.

/// Four bits, one of the sixteen strings is a solution: three iterations.
pub(super) const RARE: &str = "pick a\npick b\npick n in 0 to 3\nmust (a or b) and not (a and b)\nmust n > 2 and a\n";

/// Four bits, three of the sixteen strings are solutions.
pub(super) const PUZZLE: &str = "title \"Four switches\"\n\
    pick a\npick b\npick n in 0 to 3\n\
    must (a or b) and not (a and b)\nmust n = 3 or (n = 2 and a)\n";

pub(super) fn problem(name: &str) -> String {
    Path::new(env!("CARGO_MANIFEST_DIR")).join("problems").join(name).display().to_string()
}

#[test]
fn the_dossier_of_a_demo() {
    let desk = Desk::new();
    let (exit, report) = desk.json(&["dossier", &problem("buoy-payload.tally"), "-o", "folder"]);
    assert_eq!(exit, 0, "{report:#}");
    // The count is that of the puzzle as published with it: exhaustive search and a second model agree on 49 of 2^13.
    assert_eq!(report["tally"]["count"], "49");
    // Two of the bits follow from equations.
    assert_eq!(report["tally"]["space"], "2048");
    assert_eq!(report["tally"]["marked"], "49");
    assert!(!report["tally"]["checked_by"].as_array().unwrap().is_empty());
    assert_eq!(report["audit"]["verdict"], "equal");
    assert_eq!(report["audit"]["how"], "exhaustive");
    assert_eq!(report["audit"]["inputs"], "2048");
    assert_eq!(report["search"]["audit"]["verdict"], "equal");
    assert_eq!(report["plan"]["iterations"], "5");
    for name in ["oracle.qasm", "search.qasm", "search.svg", "places.json", "report.json", "summary.txt"] {
        assert!(desk.path("folder").join(name).exists(), "{name}");
    }
    let written: Value = serde_json::from_slice(&std::fs::read(desk.path("folder/report.json")).unwrap()).unwrap();
    assert_eq!(written, report);
    let summary = std::fs::read_to_string(desk.path("folder/summary.txt")).unwrap();
    assert!(summary.contains("49 solutions") && summary.contains("equal"), "{summary}");
}

#[test]
fn the_default_folder_is_named_after_the_problem() {
    let desk = Desk::new();
    desk.file("switches.tally", PUZZLE);
    assert_eq!(desk.exit(&["dossier", "switches.tally"]), 0);
    assert!(desk.path("out/switches/oracle.qasm").exists());
}

#[test]
fn every_object_follows_the_contract() {
    let desk = Desk::new();
    desk.file("p.tally", PUZZLE);
    desk.exit(&["compile", "p.tally", "-o", "p.qasm"]);
    let commands: [&[&str]; 6] = [
        &["count", "p.tally"],
        &["compile", "p.tally"],
        &["plan", "p.tally"],
        &["explain", "p.tally"],
        &["audit", "p.tally", "p.qasm"],
        &["dossier", "p.tally"],
    ];
    for command in commands {
        let (exit, object) = desk.json(command);
        assert_eq!(exit, 0, "{command:?}");
        assert_eq!(object["schema"], 1);
        assert_eq!(object["command"], command[0]);
        assert_eq!(object["problem"]["title"], "Four switches");
        assert_eq!(object["problem"]["bits"], 4);
        assert_eq!(object["problem"]["format"], "tally");
        assert_eq!(object["problem"]["sha256"].as_str().unwrap().len(), 64);
        assert!(object["warnings"].is_array() && object["partial"] == false);
    }
}

#[test]
fn counts_are_answers_also_when_they_are_zero() {
    let desk = Desk::new();
    desk.file("p.tally", PUZZLE);
    desk.file("none.cnf", "p cnf 2 3\n1 2 0\n-1 0\n-2 0\n");
    let (exit, object) = desk.json(&["count", "p.tally", "--list", "9"]);
    assert_eq!((exit, &object["tally"]["count"]), (0, &"3".into()));
    assert_eq!(object["solutions"].as_array().unwrap().len(), 3);
    assert_eq!(object["solutions"][0]["values"]["a"], "yes");
    assert_eq!(object["solutions"][0]["values"]["n"], "2");
    let (exit, object) = desk.json(&["count", "none.cnf"]);
    assert_eq!((exit, &object["tally"]["count"]), (0, &"0".into()));
    let (exit, object) = desk.json(&["dossier", "none.cnf"]);
    assert_eq!(exit, 0, "{object:#}");
    assert_eq!(object["search"], Value::Null);
    let codes: Vec<&str> = object["advice"].as_array().unwrap().iter().map(|a| a["code"].as_str().unwrap()).collect();
    assert!(codes.contains(&"no-solution") && codes.contains(&"already-decided"), "{codes:?}");
}

#[test]
fn a_setting_replaces_a_known() {
    let desk = Desk::new();
    desk.file("k.tally", "known limit = 1\npick a[i in 1 to 4]\nmust at most limit of [a[i] for i in 1 to 4]\n");
    assert_eq!(desk.json(&["count", "k.tally"]).1["tally"]["count"], "5");
    assert_eq!(desk.json(&["count", "k.tally", "--set", "limit=2"]).1["tally"]["count"], "11");
    let (exit, object) = desk.json(&["count", "k.tally", "--set", "other=2"]);
    assert_eq!(exit, 2, "{object:#}");
    assert_eq!(desk.exit(&["count", "k.tally", "--set", "limit"]), 2);
}

#[test]
fn a_circuit_that_differs_is_an_answer_of_no() {
    let desk = Desk::new();
    desk.file("p.tally", PUZZLE);
    assert_eq!(desk.exit(&["compile", "p.tally", "-o", "p.qasm"]), 0);
    assert_eq!(desk.exit(&["audit", "p.tally", "p.qasm"]), 0);
    let good = std::fs::read_to_string(desk.path("p.qasm")).unwrap();
    desk.file("p.qasm", &format!("{good}z search[0];\n"));
    let (exit, object) = desk.json(&["audit", "p.tally", "p.qasm"]);
    assert_eq!(exit, 1);
    assert_eq!(object["audit"]["verdict"], "differs");
    assert!(object["audit"]["witness"]["values"]["a"].is_string(), "{object:#}");
}

#[test]
fn every_level_form_and_whole_search_is_judged_equal() {
    let desk = Desk::new();
    desk.file("p.tally", PUZZLE);
    for level in ["wide", "toffoli", "clifford-t", "feedback"] {
        for form in [&["--mark", "phase"][..], &["--mark", "bit"], &["--whole"]] {
            let compile = [&["compile", "p.tally", "--level", level, "-o", "c.qasm"], form].concat();
            assert_eq!(desk.exit(&compile), 0, "{compile:?}");
            let (exit, object) = desk.json(&["audit", "p.tally", "c.qasm"]);
            assert_eq!((exit, &object["audit"]["verdict"]), (0, &"equal".into()), "{compile:?} {object:#}");
        }
    }
}

#[test]
fn a_whole_search_with_one_gate_changed_differs() {
    let desk = Desk::new();
    desk.file("p.tally", RARE);
    assert_eq!(desk.exit(&["compile", "p.tally", "--whole", "-o", "s.qasm"]), 0);
    let good = std::fs::read_to_string(desk.path("s.qasm")).unwrap();
    let gates: Vec<usize> = good
        .lines()
        .enumerate()
        .filter(|(_, line)| {
            let line = line.trim();
            ["h ", "x ", "cx ", "ccx ", "z ", "cz "].iter().any(|gate| line.starts_with(gate))
        })
        .map(|(at, _)| at)
        .collect();
    assert!(gates.len() > 8, "{good}");
    for &dropped in &gates {
        let bad: String =
            good.lines().enumerate().filter(|(at, _)| *at != dropped).map(|(_, line)| format!("{line}\n")).collect();
        desk.file("s.qasm", &bad);
        let (exit, object) = desk.json(&["audit", "p.tally", "s.qasm"]);
        assert_eq!(exit, 1, "without line {}: {object:#}", dropped + 1);
    }
}

#[test]
fn bad_input_is_an_error_with_a_place() {
    let desk = Desk::new();
    desk.file("bad.cnf", "p cnf 2 1\n1 x 0\n");
    desk.file("bad.tally", "pick a\nmust a <= bb\n");
    for (file, line, column) in [("bad.cnf", 2, 3), ("bad.tally", 2, 11)] {
        let (exit, object) = desk.json(&["count", file]);
        let error = &object["error"];
        assert_eq!(exit, 2);
        assert_eq!((&error["file"], &error["line"], &error["column"]), (&file.into(), &line.into(), &column.into()));
        assert!(error["code"].is_string() && error["expected"].is_string(), "{object:#}");
        let output = desk.run(&["count", file]);
        assert!(output.stdout.is_empty());
        assert!(String::from_utf8(output.stderr).unwrap().contains(&format!("{file}:{line}:{column}")));
    }
    let (exit, object) = desk.json(&["count", "missing.cnf"]);
    assert_eq!((exit, &object["error"]["file"]), (2, &"missing.cnf".into()));
}

#[test]
fn bad_usage() {
    let desk = Desk::new();
    desk.file("p.tally", PUZZLE);
    desk.file("empty.cnf", "p cnf 0 0\n");
    for arguments in [
        &["frobnicate"][..],
        &["count"],
        &["count", "p.tally", "--time", "soon"],
        &["compile", "p.tally", "--level", "deep"],
        &["compile", "p.tally", "--whole", "--mark", "bit"],
        &["compile", "p.tally", "--json", "-o", "-"],
        &["plan", "p.tally", "--count", "17"],
        &["compile", "empty.cnf"],
        &["audit", "p.tally", "p.tally"],
    ] {
        assert_eq!(desk.exit(arguments), 2, "{arguments:?}");
        let (exit, object) = desk.json(arguments);
        assert_eq!(exit, 2, "{arguments:?}");
        assert!(object["error"]["code"].is_string(), "{arguments:?} {object:#}");
    }
}

#[test]
fn a_problem_without_bits_is_counted_and_planned() {
    let desk = Desk::new();
    desk.file("empty.cnf", "p cnf 0 0\n");
    assert_eq!(desk.json(&["count", "empty.cnf"]).1["tally"]["count"], "1");
    let (exit, object) = desk.json(&["plan", "empty.cnf"]);
    assert_eq!((exit, &object["plan"]["iterations"]), (0, &"0".into()));
    assert!(object["advice"].to_string().contains("nothing-to-search"));
    let (exit, object) = desk.json(&["dossier", "empty.cnf"]);
    assert_eq!((exit, &object["circuit"]), (0, &Value::Null), "{object:#}");
}

#[test]
fn a_plan_for_a_given_number() {
    let desk = Desk::new();
    desk.file("free.cnf", "p cnf 10 0\n");
    let (exit, object) = desk.json(&["plan", "free.cnf", "--count", "1"]);
    // Boyer, Brassard, Hoyer, Tapp 1998, section 3: N = 1024, M = 1.
    assert_eq!((exit, &object["plan"]["iterations"]), (0, &"25".into()));
    assert!((object["plan"]["success"].as_f64().unwrap() - 0.999461244744408).abs() < 1e-14);
}

#[test]
fn time_that_runs_out_gives_what_was_reached() {
    let desk = Desk::new();
    // Clauses of three among 400 variables, drawn: no way to count is near in this time.
    let mut random = tallymark::random::SplitMix64::new(4);
    let mut lit = || (1 + random.below(400) as i64) * if random.coin() { 1 } else { -1 };
    let clauses: String = (0..1100).map(|_| format!("{} {} {} 0\n", lit(), lit(), lit())).collect();
    desk.file("large.cnf", &format!("p cnf 400 1100\n{clauses}"));
    let (exit, object) = desk.json(&["count", "large.cnf", "--time", "0.2"]);
    assert_eq!(exit, 3, "{object:#}");
    assert_eq!((&object["partial"], &object["tally"]["count"]), (&true.into(), &Value::Null));
    assert_eq!(object["tally"]["exact"], false);
    let (exit, object) = desk.json(&["plan", "large.cnf", "--time", "0.2"]);
    assert_eq!((exit, &object["plan"]), (3, &Value::Null));
    assert!(object["advice"].to_string().contains("marked-unknown"));
}

#[test]
fn hidden_bits_that_are_searched_are_said_to_be() {
    let desk = Desk::new();
    // One-sided: x3 may be anything where x1 holds. Shown on 1 and 2: three solutions; over all bits: five.
    desk.file("shown.cnf", "p cnf 3 2\nc p show 1 2 0\n1 2 0\n1 3 0\n");
    let (exit, object) = desk.json(&["dossier", "shown.cnf", "--no-narrowing"]);
    assert_eq!(exit, 0, "{object:#}");
    assert_eq!(object["tally"]["count"], "3");
    assert_eq!(object["tally"]["marked"], "5");
    assert_eq!(object["plan"]["success"], 0.625);
    assert!(object["advice"].to_string().contains("hidden-bits-searched"));
}

#[test]
fn the_same_input_gives_the_same_bytes() {
    let desk = Desk::new();
    desk.file("p.tally", PUZZLE);
    for arguments in [&["compile", "p.tally", "--whole", "--level", "feedback"][..], &["explain", "p.tally"]] {
        assert_eq!(desk.text(arguments), desk.text(arguments));
    }
}

#[test]
fn places_beside_the_circuit_are_used_and_others_refused() {
    let desk = Desk::new();
    desk.file("p.tally", PUZZLE);
    desk.file("q.tally", "pick a\nmust a\n");
    assert_eq!(desk.exit(&["compile", "p.tally", "-o", "p.qasm"]), 0);
    // The places file of p does not fit q.
    assert_eq!(desk.exit(&["audit", "q.tally", "p.qasm"]), 2);
    std::fs::remove_file(desk.path("p.places.json")).unwrap();
    assert_eq!(desk.exit(&["audit", "p.tally", "p.qasm"]), 0, "sizes match: bit i is search[i]");
    let (exit, object) = desk.json(&["audit", "q.tally", "p.qasm"]);
    assert_eq!((exit, &object["error"]["code"]), (2, &"P003".into()));
    // A permuted register map is another circuit.
    let (circuit, places) = (std::fs::read_to_string(desk.path("p.qasm")).unwrap(), "searched\":[3,1,2,0]}");
    desk.file("p.qasm", &circuit);
    desk.file("p.places.json", &format!("{{\"start\":\"all-strings\",\"claim\":\"one-for-one\",\"{places}"));
    assert_eq!(desk.exit(&["audit", "p.tally", "p.qasm"]), 1);
}

#[test]
fn a_ledger_holds_until_something_changes() {
    let desk = Desk::new();
    std::fs::create_dir(desk.path("all")).unwrap();
    desk.file("all/p.tally", PUZZLE);
    desk.file("all/q.cnf", "p cnf 3 2\n1 2 0\n-1 3 0\n");
    desk.file("all/notes.txt", "not a problem");
    assert_eq!(desk.exit(&["ledger", "check", "all"]), 2, "there is no ledger yet");
    let (exit, object) = desk.json(&["ledger", "update", "all"]);
    assert_eq!((exit, &object["problems"]["p.tally"]["count"]), (0, &"3".into()), "{object:#}");
    assert_eq!(object["problems"].as_object().unwrap().len(), 2);
    assert_eq!(desk.exit(&["ledger", "check", "all", "--all"]), 0);
    let ledger = std::fs::read_to_string(desk.path("all/ledger.json")).unwrap();
    desk.file("all/p.tally", &PUZZLE.replace("n = 3 or", "n >= 1 or"));
    let (exit, object) = desk.json(&["ledger", "check", "all", "--junit", "junit.xml"]);
    assert_eq!((exit, &object["holds"]), (1, &false.into()));
    let what: Vec<&str> = object["findings"].as_array().unwrap().iter().map(|f| f["what"].as_str().unwrap()).collect();
    assert!(what.contains(&"count"), "{what:?}");
    let xml = std::fs::read_to_string(desk.path("junit.xml")).unwrap();
    assert!(xml.contains("tests=\"2\" failures=\"1\"") && xml.contains("count: kept 3, now"), "{xml}");
    desk.file("all/p.tally", PUZZLE);
    // A cost that was lower in the ledger has grown; a tolerance may allow it.
    let gates = object["problems"]["q.cnf"]["costs"]["toffoli"]["gates"].as_u64().unwrap();
    let (was, less) = (format!("\"gates\": {gates}"), format!("\"gates\": {}", gates - 1));
    assert!(ledger.contains(&was));
    desk.file("all/ledger.json", &ledger.replacen(&was, &less, 8));
    assert_eq!(desk.exit(&["ledger", "check", "all", "--all"]), 1);
    assert_eq!(desk.exit(&["ledger", "check", "all", "--all", "--growth", "50"]), 0);
    desk.file("all/ledger.json", "[]");
    assert_eq!(desk.exit(&["ledger", "check", "all"]), 2);
}

/// Bits a and b; `c = a and b` is marked by a phase on registers of other names, in version 2.
#[test]
fn registers_of_other_names_are_told_by_options() {
    let desk = Desk::new();
    desk.file("p.tally", "pick a\npick b\npick c\nmust a and not b\n");
    let text = "OPENQASM 2.0;\ninclude \"qelib1.inc\";\nqreg r[2];\nqreg q[3];\n\
        x q[0];\nccx q[0],q[2],r[1];\nz r[1];\nccx q[0],q[2],r[1];\nx q[0];\n";
    desk.file("c.qasm", text);
    let audit = |more: &[&str]| desk.json(&[&["audit", "p.tally", "c.qasm"], more].concat());
    // The searched qubits are q[2], q[0], q[1] for the bits a, b, c.
    let (exit, object) = audit(&["--search", "q[2], q[0:1]"]);
    assert_eq!((exit, &object["audit"]["verdict"]), (0, &"equal".into()), "{object:#}");
    let (exit, object) = audit(&["--search", "q", "--bits", "1,2,0"]);
    assert_eq!((exit, &object["audit"]["verdict"]), (0, &"equal".into()), "{object:#}");
    desk.file("bits", "1 2\n0\n");
    assert_eq!(audit(&["--search", "q", "--bits", "bits", "--work", "r"]).0, 0);
    let (exit, object) = audit(&["--search", "q"]);
    assert_eq!((exit, &object["audit"]["verdict"]), (1, &"differs".into()), "{object:#}");
    let code = |more: &[&str]| {
        let (exit, object) = audit(more);
        assert_eq!(exit, 2, "{object:#}");
        object["error"]["code"].as_str().unwrap().to_owned()
    };
    assert_eq!(code(&["--search", "q[0:3]"]), "P020");
    assert_eq!(code(&["--search", "q", "--work", "r[0]"]), "P020");
    assert_eq!(code(&["--search", "q", "--bits", "0,0,1"]), "P021");
    assert_eq!(code(&["--search", "q", "--bits", "none"]), "P021");
    assert_eq!(code(&[]), "P003");
}

/// A router left the qubits of `a and not b` in a ring: q[0] to q[1], q[1] to q[2], q[2] to q[0]; q[2] is the ancilla.
#[test]
fn qubits_may_end_elsewhere_than_they_began() {
    let desk = Desk::new();
    desk.file("p.tally", "pick a\npick b\nmust a and not b\n");
    let routed = "swap q[0], q[1];\nswap q[0], q[2];\n";
    let head = "include \"stdgates.inc\";\nqubit[3] q;\n";
    let oracle = "x q[1];\nccx q[0], q[1], q[2];\nz q[2];\nccx q[0], q[1], q[2];\nx q[1];\n";
    desk.file("c.qasm", &format!("{head}{oracle}{routed}"));
    let audit = |more: &[&str]| desk.exit(&[&["audit", "p.tally", "c.qasm", "--search", "q[0:1]"], more].concat());
    assert_eq!(audit(&["--search-after", "q[1:2]"]), 0);
    assert_eq!(audit(&[]), 1, "read as if nothing had moved");
    assert_eq!(audit(&["--search-after", "q[2], q[1]"]), 1, "two of them exchanged");
    assert_eq!(audit(&["--search-after", "q[1], q[0]"]), 1, "an ancilla in the place of a bit");
    for bad in ["q[1]", "q[1], q[1]", "r"] {
        assert_eq!(audit(&["--search-after", bad]), 2, "{bad}");
    }
    // A bit oracle, its mark exchanged with an input.
    desk.file("b.qasm", &format!("{head}x q[1];\nccx q[0], q[1], q[2];\nx q[1];\nswap q[1], q[2];\n"));
    let audit = |more: &[&str]| {
        desk.exit(&[&["audit", "p.tally", "b.qasm", "--search", "q[0:1]", "--mark", "q[2]"], more].concat())
    };
    assert_eq!(audit(&["--search-after", "q[0], q[2]", "--mark-after", "q[1]"]), 0);
    assert_eq!(audit(&["--search-after", "q[0], q[2]", "--mark-after", "q[2]"]), 2, "one qubit for two");
    assert_eq!(audit(&["--mark-after", "q[1]"]), 2, "one qubit for two");
}

/// A bit oracle whose mark has another name.
#[test]
fn the_mark_may_have_another_name() {
    let desk = Desk::new();
    desk.file("p.tally", "pick a\npick b\nmust a and b\n");
    desk.file("c.qasm", "include \"stdgates.inc\";\nqubit[3] q;\nccx q[0], q[2], q[1];\n");
    let audit = |mark: &str| desk.exit(&["audit", "p.tally", "c.qasm", "--search", "q[0:2:2]", "--mark", mark]);
    assert_eq!(audit("q[1]"), 0);
    assert_eq!(audit("q[2]"), 2);
    assert_eq!(desk.exit(&["audit", "p.tally", "c.qasm", "--search", "q[0:2:2]"]), 1, "a dirty ancilla");
}

#[test]
fn certificates_are_written_and_checked() {
    let desk = Desk::new();
    desk.file("p.tally", PUZZLE);
    let (exit, written) = desk.json(&["count", "p.tally", "--certificate", "p.nnf"]);
    assert_eq!((exit, written["certificate"]["verdict"].as_str()), (0, Some("holds")));
    assert_eq!(written["certificate"]["count"], written["tally"]["count"]);
    let (exit, checked) = desk.json(&["count", "p.tally", "--check", "p.nnf"]);
    assert_eq!((exit, checked["certificate"]["count"].as_str()), (0, Some("3")));
    // Another count, another problem, no certificate at all.
    let text = std::fs::read_to_string(desk.path("p.nnf")).unwrap();
    desk.file("wrong.nnf", &text.replace("c count 3", "c count 4"));
    assert_eq!(desk.exit(&["count", "p.tally", "--check", "wrong.nnf"]), 1);
    desk.file("other.tally", &PUZZLE.replace("n = 3", "n = 1"));
    assert_eq!(desk.exit(&["count", "other.tally", "--check", "p.nnf"]), 1);
    let (exit, refused) = desk.json(&["count", "p.tally", "--check", "p.tally"]);
    assert_eq!((exit, refused["certificate"]["verdict"].as_str()), (1, Some("refused")));
    assert_eq!(desk.exit(&["count", "p.tally", "--check", "absent.nnf"]), 2);
    assert_eq!(desk.exit(&["count", "p.tally", "--check", "p.nnf", "--values"]), 2);
}

#[test]
fn a_count_of_zero_is_refuted() {
    let desk = Desk::new();
    desk.file("none.tally", &format!("{PUZZLE}must n = 0\n"));
    let (exit, written) = desk.json(&["count", "none.tally", "--certificate", "none.drat"]);
    assert_eq!((exit, written["certificate"]["kind"].as_str()), (0, Some("refutation")));
    let (exit, checked) = desk.json(&["count", "none.tally", "--check", "none.drat"]);
    assert_eq!((exit, checked["certificate"]["count"].as_str()), (0, Some("0")));
    desk.file("some.tally", PUZZLE);
    assert_eq!(desk.exit(&["count", "some.tally", "--check", "none.drat"]), 1);
}

#[test]
fn values_and_draws_are_shown() {
    let desk = Desk::new();
    desk.file("p.tally", &format!("{PUZZLE}pick c\nmust c\n"));
    let (exit, shown) = desk.json(&["count", "p.tally", "--values", "--draw", "5", "--seed", "9"]);
    assert_eq!(exit, 0);
    let counts = |pick: usize| -> Vec<&str> {
        let counts = shown["values"]["picks"][pick]["counts"].as_array().unwrap();
        counts.iter().map(|entry| entry["count"].as_str().unwrap()).collect()
    };
    // The solutions are (a, b, n) = (no, yes, 3), (yes, no, 3), (yes, no, 2), all with c.
    assert_eq!(
        [counts(0), counts(1), counts(2), counts(3)].concat(),
        ["1", "2", "2", "1", "0", "0", "1", "2", "0", "3"]
    );
    assert_eq!(shown["values"]["backbone"], serde_json::json!([{ "name": "c", "value": "yes" }]));
    let never: Vec<_> = shown["values"]["never"].as_array().unwrap().iter().map(|entry| &entry["value"]).collect();
    assert_eq!(never, ["0", "1"]);
    assert_eq!(shown["drawn"].as_array().unwrap().len(), 5);
    let text = desk.text(&["count", "p.tally", "--values", "--draw", "5", "--seed", "9"]);
    assert!(text.contains("always      c=yes\nnever       n=0 n=1\n"), "{text}");
}
