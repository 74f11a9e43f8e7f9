//! One file, one case. `good/`: a text and, below a line `// ---- expect`, the circuit it stands for. `bad/`: a text
//! in which every mistake is drawn as `>>>place<<<`, with its code in a comment at the end of the line.

use std::fmt::Write as _;
use std::fs;
use std::path::PathBuf;

use tallymark::circuit::qasm::read::read;
use tallymark::circuit::{Circuit, Op};
use tallymark::diag::Diagnostic;
use tallymark::random::SplitMix64;
use tallymark::span::Sources;

fn cases(folder: &str, least: usize) -> Vec<(String, String)> {
    let folder = PathBuf::from(env!("CARGO_MANIFEST_DIR")).join("tests/cases/qasm").join(folder);
    let entries = fs::read_dir(&folder).expect("the folder of cases is there");
    let mut paths: Vec<PathBuf> = entries.map(|entry| entry.expect("readable").path()).collect();
    paths.sort();
    assert!(paths.len() >= least, "{} cases in {}, at least {least} expected", paths.len(), folder.display());
    let name = |path: &PathBuf| path.file_name().expect("a file").to_string_lossy().into_owned();
    paths.iter().map(|path| (name(path), fs::read_to_string(path).expect("readable"))).collect()
}

/// A circuit in one line a gate; controls in front, conditions in brackets.
fn summary(circuit: &Circuit) -> String {
    let mut text = String::new();
    let registers = |list: &[tallymark::circuit::Register]| {
        list.iter().map(|register| format!(" {}[{}]", register.name, register.len)).collect::<String>()
    };
    writeln!(text, "qubits{}", registers(&circuit.qubits)).unwrap();
    writeln!(text, "bits{}", registers(&circuit.measured)).unwrap();
    for block in circuit.blocks() {
        if block.repeat != 1 {
            writeln!(text, "repeat {}", block.repeat).unwrap();
        }
        for gate in &circuit.gates()[block.gates.start as usize..block.gates.end as usize] {
            if let Some(condition) = gate.condition() {
                let not = if condition.value() { "" } else { "!" };
                write!(text, "if {not}{}: ", circuit.measured_name(condition.bit())).unwrap();
            }
            write!(text, "{}", format!("{:?}", gate.op()).to_lowercase()).unwrap();
            if let Some(angle) = circuit.angle(gate) {
                write!(text, "({angle:.6})").unwrap();
            }
            for control in circuit.controls(gate) {
                let not = if control.is_negated() { "!" } else { "" };
                write!(text, " {not}{}", circuit.qubit_name(control.qubit())).unwrap();
            }
            if gate.control_count() > 0 {
                text.push_str(" :");
            }
            write!(text, " {}", circuit.qubit_name(gate.target())).unwrap();
            if let Some(bit) = gate.measured() {
                write!(text, " -> {}", circuit.measured_name(bit)).unwrap();
            }
            text.push('\n');
        }
        if block.repeat != 1 {
            text.push_str("end\n");
        }
    }
    text
}

#[test]
fn good_texts_give_their_circuits() {
    const MARK: &str = "// ---- expect\n";
    for (name, text) in cases("good", 12) {
        let (source, expected) = text.split_once(MARK).unwrap_or_else(|| panic!("{name} has no expectation"));
        let got = match read(source, &name, &mut Sources::new()) {
            Ok(circuit) => summary(&circuit),
            Err(faults) => panic!("{name} is refused: {faults:#?}"),
        };
        let got: String = got.lines().map(|line| format!("// {line}\n")).collect();
        if std::env::var_os("BLESS").is_some() {
            let path = PathBuf::from(env!("CARGO_MANIFEST_DIR")).join("tests/cases/qasm/good").join(&name);
            fs::write(path, format!("{source}{MARK}{got}")).expect("writable");
        } else {
            assert_eq!(got, expected, "{name}: run with BLESS=1 to accept what was read");
        }
    }
}

/// The text without the marks, and for each mark its range and the code that its line ends with.
fn drawn(marked: &str) -> (String, Vec<(usize, usize, String)>) {
    let (mut text, mut marks) = (String::new(), Vec::new());
    for line in marked.split_inclusive('\n') {
        let code = line.rsplit_once("// Q").map_or("", |(_, code)| code.trim());
        let codes: Vec<String> = code.split(" Q").map(|code| format!("Q{code}")).collect();
        let (mut rest, mut at) = (line, 0);
        while let Some((before, after)) = rest.split_once(">>>") {
            let (inside, after) = after.split_once("<<<").expect("a mark is closed");
            text.push_str(before);
            let code = codes.get(at).cloned().expect("a code for each mark of a line");
            marks.push((text.len(), text.len() + inside.len(), code));
            text.push_str(inside);
            rest = after;
            at += 1;
        }
        text.push_str(rest);
    }
    (text, marks)
}

#[test]
fn bad_texts_get_their_codes_at_their_places() {
    let mut wrong = Vec::new();
    for (name, marked) in cases("bad", 25) {
        let (text, expected) = drawn(&marked);
        assert!(!expected.is_empty(), "{name} draws no mistake");
        let faults = read(&text, &name, &mut Sources::new()).err().unwrap_or_default();
        let place = |fault: &Diagnostic| {
            let span = fault.span().expect("every mistake of a text has a place");
            (span.lo as usize, span.hi as usize, fault.code.to_string())
        };
        let got: Vec<_> = faults.iter().map(place).collect();
        if got != expected {
            let messages: Vec<&str> = faults.iter().map(|fault| fault.message.as_str()).collect();
            wrong.push(format!("{name}: drawn {expected:?}, got {got:?}: {messages:?}\n{text}"));
        }
    }
    assert!(wrong.is_empty(), "{}", wrong.join("\n"));
}

#[test]
fn a_missing_semicolon_is_said_in_words() {
    let text = "OPENQASM 3.0;\ninclude \"stdgates.inc\";\nqubit[2] q;\nx q[0]\ny q[1];\n";
    let faults = read(text, "a.qasm", &mut Sources::new()).unwrap_err();
    assert_eq!(faults.len(), 1);
    assert_eq!(faults[0].found.as_deref(), Some("`y`"));
    assert_eq!(faults[0].expected.as_deref(), Some("`;` or `,`"));
    assert!(faults[0].help.as_deref().is_some_and(|help| help.contains("`;` is missing")));
}

#[test]
fn every_mutation_of_the_good_texts_is_read_or_refused() {
    let mut random = SplitMix64::new(7);
    let texts: Vec<String> = cases("good", 12).into_iter().chain(cases("bad", 25)).map(|(_, text)| text).collect();
    let pieces =
        ["{", "}", "(", ")", ";", "[", "ctrl @ ", "if (c[0]) ", "for int i in [0:3] ", "\"", "/*", "-", "π", "9e9"];
    let (mut accepted, mut refused) = (0, 0);
    for round in 0..3000 {
        let mut bytes = texts[round % texts.len()].clone().into_bytes();
        for _ in 0..1 + random.below(3) {
            let at = random.below(bytes.len() as u64) as usize;
            match random.below(4) {
                0 => drop(bytes.remove(at)),
                1 => bytes[at] = random.below(128) as u8,
                2 => {
                    let piece = pieces[random.below(pieces.len() as u64) as usize];
                    bytes.splice(at..at, piece.bytes());
                }
                _ => {
                    let end = (at + 1 + random.below(20) as usize).min(bytes.len());
                    let copy = bytes[at..end].to_vec();
                    bytes.splice(at..at, copy);
                }
            }
        }
        let text = String::from_utf8_lossy(&bytes);
        match read(&text, "mutated.qasm", &mut Sources::new()) {
            Ok(circuit) => {
                accepted += 1;
                let measured = circuit.gates().iter().filter(|gate| gate.op() == Op::Measure).count();
                assert!(measured <= circuit.gates().len());
            }
            Err(faults) => {
                refused += 1;
                assert!(!faults.is_empty());
                assert!(faults.iter().all(|fault| fault.span().is_some_and(|span| span.hi as usize <= text.len())));
            }
        }
    }
    assert!(accepted > 50 && refused > 500, "{accepted} accepted, {refused} refused");
}

#[test]
fn deep_nesting_and_long_chains_do_not_exhaust_the_stack() {
    let head = "OPENQASM 3.0;\ninclude \"stdgates.inc\";\nqubit q;\nbit c;\nc = measure q;\n";
    let bodies = [
        format!("p({}1{}) q;", "(".repeat(100_000), ")".repeat(100_000)),
        "if (c) { ".repeat(100_000),
        "for int i in [0:1] ".repeat(100_000),
        "if (c) ".repeat(100_000),
    ];
    for body in bodies {
        let faults = read(&format!("{head}{body}"), "deep.qasm", &mut Sources::new()).unwrap_err();
        assert!(!faults.is_empty() && faults.len() <= 3, "{faults:#?}");
    }
    let long = format!("{head}p({}1{}) q;", "-".repeat(100_000), " + 1".repeat(100_000));
    assert!(read(&long, "long.qasm", &mut Sources::new()).is_ok());
}
