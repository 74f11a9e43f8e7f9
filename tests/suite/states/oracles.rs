//! Oracles in superposition. One file, one case: a circuit, with the problem and the verdict in its comments.

use std::fs;
use std::path::PathBuf;

use tallymark::budget::Budget;
use tallymark::circuit::qasm::read::read;
use tallymark::circuit::{Circuit, Condition, Control, Op, QubitId};
use tallymark::id::Id;
use tallymark::judge::audit::superposition::audit_superposition;
use tallymark::judge::audit::{AuditError, How, Options, Outcome, Phases, Verdict};
use tallymark::places::Places;
use tallymark::problem::{BitLit, Problem};
use tallymark::span::Sources;

/// The problem in the comments of a case.
fn problem(text: &str) -> Problem {
    let said = |word: &str| {
        let word = word.to_owned();
        text.lines().filter_map(move |line| line.strip_prefix("//! ")?.strip_prefix(&word)?.strip_prefix(' '))
    };
    let mut problem = Problem::new();
    problem.add_numbered_vars(said("bits").next().expect("bits").parse().expect("a number"));
    for clause in said("clause") {
        let lit = |number: &str| BitLit::from_dimacs(number.parse().expect("a number")).expect("a literal");
        problem.clauses.push(&clause.split(' ').map(lit).collect::<Vec<_>>());
    }
    problem
}

fn judge(problem: &Problem, circuit: &Circuit, options: &Options) -> Result<Verdict, AuditError> {
    audit_superposition(problem, &Places::as_given(problem), circuit, options, &Budget::unlimited())
}

#[test]
fn written_circuits_get_their_verdicts() {
    let folder = PathBuf::from(env!("CARGO_MANIFEST_DIR")).join("tests/cases/states");
    let entries = fs::read_dir(&folder).expect("the folder of cases is there");
    let mut paths: Vec<PathBuf> = entries.map(|entry| entry.expect("readable").path()).collect();
    paths.sort();
    assert!(paths.len() >= 20, "{} cases", paths.len());
    let mut wrong = Vec::new();
    for path in paths {
        let text = fs::read_to_string(&path).expect("readable");
        let name = path.file_name().expect("a file").to_string_lossy().into_owned();
        let circuit = read(&text, &name, &mut Sources::new()).unwrap_or_else(|faults| panic!("{name}: {faults:#?}"));
        let said =
            |word: &str| text.lines().find_map(|line| line.strip_prefix("//! ")?.strip_prefix(word)?.strip_prefix(' '));
        let result = judge(&problem(&text), &circuit, &Options::default());
        let got = match &result {
            Ok(verdict) => match (verdict.outcome, verdict.phases) {
                (Outcome::Equal, Phases::Equal) => "equal".to_owned(),
                (Outcome::Equal, Phases::Complement) => "complement".to_owned(),
                (Outcome::Differs, _) => "differs".to_owned(),
                (Outcome::Undecided, _) => "undecided".to_owned(),
            },
            Err(error) => format!("error {}", error.diagnostic().code),
        };
        if Some(got.as_str()) != said("expect") {
            wrong.push(format!("{name}: expected {:?}, got {result:?}", said("expect")));
        }
        if let (Some(part), Ok(verdict)) = (said("got"), &result) {
            let witness = verdict.witness.as_ref().map(|witness| witness.got.as_str());
            if !witness.is_some_and(|got| got.contains(part)) {
                wrong.push(format!("{name}: the witness does not say {part:?}: {verdict:?}"));
            }
        }
        if let (Some(part), Ok(verdict)) = (said("note"), &result)
            && !verdict.notes.iter().any(|note| note.contains(part))
        {
            wrong.push(format!("{name}: no note says {part:?}: {verdict:?}"));
        }
    }
    assert!(wrong.is_empty(), "{}", wrong.join("\n"));
}

#[test]
fn a_strict_audit_refuses_a_global_phase() {
    let text = "//! bits 2\n//! clause 1 2\n//! clause -1 -2\n";
    let strict = Options { strict_phase: true, ..Options::default() };
    for (gates, equal) in [("z search;", true), ("z search; x search[0]; z search; x search[0]; z search;", false)] {
        let source = format!("include \"stdgates.inc\"; qubit[2] search; {gates}");
        let circuit = read(&source, "a.qasm", &mut Sources::new()).unwrap();
        let verdict = judge(&problem(text), &circuit, &strict).unwrap();
        assert_eq!(verdict.outcome == Outcome::Equal, equal, "{verdict:?}");
    }
}

/// A 4-T AND of `a` and `b` into `c`, which is in |0>.
fn and(circuit: &mut Circuit, a: QubitId, b: QubitId, c: QubitId) {
    let cx = |circuit: &mut Circuit, control, target| circuit.push(Op::X, &[Control::on(control)], target);
    circuit.push(Op::H, &[], c);
    circuit.push(Op::T, &[], c);
    cx(circuit, a, c);
    cx(circuit, b, c);
    cx(circuit, c, a);
    cx(circuit, c, b);
    circuit.push(Op::Tdg, &[], a);
    circuit.push(Op::Tdg, &[], b);
    circuit.push(Op::T, &[], c);
    cx(circuit, c, a);
    cx(circuit, c, b);
    circuit.push(Op::H, &[], c);
    circuit.push(Op::S, &[], c);
}

/// All of `n` bits by a chain of ANDs, each erased by measurement.
fn chain(n: usize) -> Circuit {
    let mut circuit = Circuit::new();
    let search = circuit.add_qubits("search", n);
    let work = circuit.add_qubits("work", n - 1);
    let outcome = circuit.add_measured("outcome", n - 1);
    let inputs = |at: usize| (if at == 0 { search[0] } else { work[at - 1] }, search[at + 1]);
    for (at, &target) in work.iter().enumerate() {
        and(&mut circuit, inputs(at).0, inputs(at).1, target);
    }
    circuit.push(Op::Z, &[], work[n - 2]);
    for at in (0..n - 1).rev() {
        circuit.push(Op::H, &[], work[at]);
        circuit.push_measure(None, work[at], outcome[at]);
        let correct = Some(Condition::new(outcome[at], true));
        circuit.push_if(correct, Op::Z, &[Control::on(inputs(at).0)], inputs(at).1);
        circuit.push(Op::Reset, &[], work[at]);
    }
    circuit
}

/// All of `n` bits must be 1.
fn all_ones(n: usize) -> Problem {
    let mut problem = Problem::new();
    problem.add_numbered_vars(n);
    (1..=n as i64).for_each(|var| problem.clauses.push(&[BitLit::from_dimacs(var).unwrap()]));
    problem
}

#[test]
fn many_measurements_are_covered_by_drawn_strings_and_said_so() {
    let verdict = judge(&all_ones(8), &chain(8), &Options { seed: 5, ..Options::default() }).unwrap();
    assert_eq!((verdict.outcome, verdict.how, verdict.inputs), (Outcome::Equal, How::Superposition, 256));
    let note = verdict.notes.last().unwrap();
    assert!(note.contains("8 strings of 7") && note.contains("seed 5") && note.contains("not covered"), "{note}");
}

#[test]
fn more_inputs_than_fit_are_sampled_and_undecided_unless_a_difference_shows() {
    let problem = all_ones(40);
    let ones = problem.encode(&[1; 40]).unwrap();
    let options = Options { known: vec![ones.clone()], sample: 100, ..Options::default() };
    let verdict = judge(&problem, &chain(40), &options).unwrap();
    assert_eq!((verdict.outcome, verdict.how, verdict.inputs), (Outcome::Undecided, How::Sample, 141));
    // The same circuit leaves out one bit: only a neighbour of the solution shows it.
    let mut circuit = Circuit::new();
    let search = circuit.add_qubits("search", 40);
    let controls: Vec<Control> = search[1..39].iter().map(|&qubit| Control::on(qubit)).collect();
    circuit.push(Op::Z, &controls, search[39]);
    let verdict = judge(&problem, &circuit, &options).unwrap();
    assert_eq!(verdict.outcome, Outcome::Differs);
    let witness = verdict.witness.unwrap().bits;
    assert!(!witness.at(0) && (1..40).all(|at| witness.at(at)));
}

#[test]
fn a_budget_that_is_spent_leaves_the_verdict_open() {
    let budget = Budget::unlimited();
    budget.cancel();
    let problem = all_ones(3);
    let places = Places::as_given(&problem);
    let verdict = audit_superposition(&problem, &places, &chain(3), &Options::default(), &budget).unwrap();
    assert_eq!((verdict.outcome, verdict.inputs), (Outcome::Undecided, 0));
    let little = Budget::unlimited().with_memory(1);
    let verdict = audit_superposition(&problem, &places, &chain(3), &Options::default(), &little).unwrap();
    assert_eq!(verdict.outcome, Outcome::Undecided);
}

#[test]
fn registers_that_do_not_fit_are_named() {
    let problem = all_ones(2);
    let code = |source: &str| {
        let circuit = read(source, "a.qasm", &mut Sources::new()).unwrap();
        judge(&problem, &circuit, &Options::default()).unwrap_err().diagnostic().code.0
    };
    assert_eq!(code("qubit[2] q;"), "P013");
    assert_eq!(code("qubit[1] work;"), "P011");
    assert_eq!(code("qubit[3] search;"), "P012");
    assert_eq!(code("qubit[2] search; qubit[2] mark;"), "P012");
}

#[test]
fn changing_any_gate_of_a_right_circuit_is_noticed() {
    let problem = all_ones(4);
    let right = chain(4);
    assert_eq!(judge(&problem, &right, &Options::default()).unwrap().outcome, Outcome::Equal);
    let mut noticed = 0;
    for change in 0..right.gates().len() {
        let mut circuit = Circuit::new();
        circuit.add_qubits("search", 4);
        circuit.add_qubits("work", 3);
        circuit.add_measured("outcome", 3);
        for (at, gate) in right.gates().iter().enumerate() {
            let controls = right.controls(gate);
            match gate.measured() {
                Some(bit) => circuit.push_measure(None, gate.target(), bit),
                // Leave one gate out; a reset that is left out leaves its qubit dirty.
                None if at == change => {}
                None => circuit.push_if(gate.condition(), gate.op(), controls, gate.target()),
            }
        }
        let is_measure = right.gates()[change].measured().is_some();
        let verdict = judge(&problem, &circuit, &Options::default()).unwrap();
        assert_eq!(verdict.outcome == Outcome::Differs, !is_measure, "without gate {change}: {verdict:?}");
        noticed += usize::from(!is_measure);
    }
    assert_eq!(noticed, right.gates().len() - 3);
}

#[test]
fn qubits_beyond_the_first_word_are_followed() {
    // 70 ancillas that are not used lie between the inputs and the one that is.
    let mut circuit = Circuit::new();
    let search = circuit.add_qubits("search", 2);
    let work = circuit.add_qubits("work", 71);
    and(&mut circuit, search[0], search[1], work[70]);
    circuit.push(Op::Z, &[], work[70]);
    let outcome = circuit.add_measured("outcome", 1);
    circuit.push(Op::H, &[], work[70]);
    circuit.push_measure(None, work[70], outcome[0]);
    let correct = Some(Condition::new(outcome[0], true));
    circuit.push_if(correct, Op::Z, &[Control::on(search[0])], search[1]);
    circuit.push(Op::Reset, &[], work[70]);
    assert_eq!(work[70].index(), 72);
    assert_eq!(judge(&all_ones(2), &circuit, &Options::default()).unwrap().outcome, Outcome::Equal);
}
