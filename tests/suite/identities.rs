//! Textbook identities as circuits written by hand: they are what they say, at the cost they say, and with one gate
//! changed they are not. One file, one case; the plain circuit (`same`) and the counts stand in its comments, and so
//! does the source.

use std::fs;
use std::path::PathBuf;

use tallymark::budget::Budget;
use tallymark::circuit::figures::figures;
use tallymark::circuit::qasm::read::read;
use tallymark::circuit::{Circuit, Op};
use tallymark::judge::audit::compare::{CompareOptions, compare};
use tallymark::judge::audit::faults::{Fault, apply};
use tallymark::judge::audit::{Outcome, Verdict};
use tallymark::span::Sources;

fn parse(name: &str, text: &str) -> Circuit {
    read(text, name, &mut Sources::new()).unwrap_or_else(|faults| panic!("{name}: {faults:#?}"))
}

/// What a case says after a word, line by line.
fn said<'t>(text: &'t str, word: &'t str) -> impl Iterator<Item = &'t str> {
    text.lines().filter_map(move |line| line.strip_prefix("//! ")?.strip_prefix(word)?.strip_prefix(' '))
}

fn verdict(good: &Circuit, circuit: &Circuit) -> Verdict {
    compare(good, circuit, &CompareOptions::default(), &Budget::unlimited()).expect("the same registers")
}

fn outcome(good: &Circuit, circuit: &Circuit) -> Outcome {
    verdict(good, circuit).outcome
}

/// Whether the sums over paths decided.
fn is_by_paths(verdict: &Verdict) -> bool {
    verdict.notes.iter().any(|note| note.contains("read as sums over paths"))
}

/// Single changes of a gate, each of which spoils an identity.
fn changes(circuit: &Circuit, at: u32) -> Vec<Fault> {
    let gate = &circuit.gates()[at as usize];
    let mut changes = vec![Fault::Drop(at)];
    if matches!(gate.op(), Op::T | Op::Tdg | Op::S | Op::Sdg) {
        changes.push(Fault::Adjoint(at));
    }
    for place in 0..gate.control_count() as u32 {
        changes.extend([Fault::FlipControl(at, place), Fault::LoseControl(at, place)]);
    }
    if gate.condition().is_some() {
        changes.extend([Fault::FlipCondition(at), Fault::LoseCondition(at)]);
    }
    changes
}

#[test]
fn textbook_identities_hold_and_no_changed_one_does() {
    let folder = PathBuf::from(env!("CARGO_MANIFEST_DIR")).join("tests/cases/identities");
    let mut paths: Vec<PathBuf> = fs::read_dir(&folder).unwrap().map(|entry| entry.unwrap().path()).collect();
    paths.sort();
    assert!(paths.len() >= 10, "{} cases", paths.len());
    let mut changed = 0;
    for path in paths {
        let name = path.file_name().unwrap().to_string_lossy().into_owned();
        let text = fs::read_to_string(&path).unwrap();
        let circuit = parse(&name, &text);
        let same = said(&text, "same").collect::<Vec<_>>().join("\n");
        let good = parse(&name, &format!("OPENQASM 3.0;\ninclude \"stdgates.inc\";\n{same}\n"));
        let found = verdict(&good, &circuit);
        assert_eq!(found.outcome, Outcome::Equal, "{name}");
        let has_hadamards = circuit.gates().iter().any(|gate| gate.op() == Op::H);
        assert_eq!(is_by_paths(&found), has_hadamards, "{name}: {found:#?}");
        let figures = figures(&circuit);
        let counts: Vec<&str> = said(&text, "count").collect();
        assert!(!counts.is_empty(), "{name} says no counts");
        for count in counts {
            let (what, number) = count.split_once(' ').unwrap();
            let got = match what {
                "t" => figures.t_count,
                "cx" => figures.cx_count,
                "toffoli" => figures.and_gates,
                "gates" => figures.gates,
                "measurements" => figures.measurements,
                _ => panic!("{name} counts {what}"),
            };
            assert_eq!(got.to_string(), number, "{name}: {what}");
        }
        for at in 0..circuit.gates().len() as u32 {
            for fault in changes(&circuit, at) {
                let spoilt = apply::to_circuit(&fault, &circuit).expect("it fits");
                assert_eq!(outcome(&good, &spoilt), Outcome::Differs, "{name}: {fault}");
                changed += 1;
            }
        }
    }
    assert!(changed >= 300, "{changed} changes");
}
