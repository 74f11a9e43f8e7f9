//! The audit of the whole search of every aim: the written file is right, and one wrong angle in it is not.

use num_bigint::BigUint;
use tallymark::budget::Budget;
use tallymark::circuit::qasm::{read, write};
use tallymark::circuit::{Circuit, ITERATIONS, Level, Mark};
use tallymark::judge::audit::search::{SearchVerdict, audit_search};
use tallymark::judge::audit::{Outcome, faults};
use tallymark::make::{lower, network};
use tallymark::places::{Part, Places, Start};
use tallymark::problem::{Bits, Problem};
use tallymark::search::course::{self, Course};
use tallymark::search::plan::certainty::certainty;
use tallymark::search::plan::fixed_point::FixedPoint;
use tallymark::span::Sources;

use super::courses::problem;

/// Two of eight, three of sixteen, one of thirty-two strings.
fn problems() -> Vec<Problem> {
    vec![
        problem(3, &[&[1, 2], &[-1, -2], &[3]]),
        problem(4, &[&[1, 2], &[-1, -2], &[3, 4], &[2, -4], &[-3, -4, 1]]),
        problem(5, &[&[1], &[2, 3], &[-3, 4], &[-2, -4], &[5], &[-3]]),
    ]
}

fn marked(problem: &Problem) -> u64 {
    let bits = problem.bit_count();
    (0..1u64 << bits).filter(|&value| problem.holds(&Bits::from_number(value.into(), bits))).count() as u64
}

fn written(problem: &Problem, places: &Places, course: &Course, level: Level) -> String {
    let mark = if course.needs_bit_oracle() { Mark::Bit } else { Mark::Phase };
    let options = lower::Options { level, mark };
    let oracle = lower::lower(&network::build(problem, places), &options, &Budget::unlimited()).unwrap();
    text_of(&course::circuit(&oracle, &places.start, course, level))
}

fn text_of(circuit: &Circuit) -> String {
    let mut text = Vec::new();
    write::write(circuit, &[], &mut text).unwrap();
    String::from_utf8(text).unwrap()
}

fn judge(problem: &Problem, places: &Places, text: &str) -> SearchVerdict {
    let circuit = read::read(text, "search.qasm", &mut Sources::new()).unwrap_or_else(|e| panic!("{e:?}\n{text}"));
    audit_search(problem, places, &circuit, 1 << 26, &Budget::unlimited()).unwrap()
}

/// The text with the angle of each rotation in turn off by a thousandth.
fn with_wrong_angles(text: &str) -> Vec<String> {
    let lines: Vec<&str> = text.lines().collect();
    let wrong = |at: usize| {
        let line = lines[at];
        let is_rotation = ["p(", "ry(", "rz("].iter().any(|gate| line.trim_start().starts_with(gate));
        let close = line.find(')').filter(|_| is_rotation)?;
        let mut changed: Vec<String> = lines.iter().map(|&line| line.to_owned()).collect();
        changed[at] = format!("{} + 0.001{}", &line[..close], &line[close..]);
        Some(changed.join("\n"))
    };
    (0..lines.len()).filter_map(wrong).collect()
}

fn assert_equal(verdict: &SearchVerdict, note: &str) {
    assert_eq!(verdict.outcome, Outcome::Equal, "{:?}", verdict.notes);
    assert!(verdict.notes.iter().any(|told| told.contains(note)), "{:?}", verdict.notes);
}

fn assert_wrong_angles_differ(problem: &Problem, places: &Places, text: &str, at_least: usize) {
    let wrong = with_wrong_angles(text);
    assert!(wrong.len() >= at_least, "{} angles in\n{text}", wrong.len());
    for text in wrong {
        let verdict = judge(problem, places, &text);
        assert_eq!(verdict.outcome, Outcome::Differs, "{:?}\n{text}", verdict.notes);
    }
}

fn matched(space: u64, marked: u64) -> Course {
    let tuned = certainty(&space.into(), &marked.into()).unwrap();
    Course::Matched { iterations: u64::try_from(&tuned.iterations).unwrap(), phase: tuned.phase }
}

#[test]
fn a_certain_search_is_told_as_one() {
    let mut judged = 0;
    for problem in problems() {
        let places = Places::as_given(&problem);
        let course = matched(1 << problem.bit_count(), marked(&problem));
        for level in Level::ALL {
            let text = written(&problem, &places, &course, level);
            let verdict = judge(&problem, &places, &text);
            assert!((verdict.success - 1.0).abs() < 1e-9, "{}", verdict.success);
            let Course::Matched { iterations, phase } = course else { unreachable!() };
            assert_eq!(verdict.iterations, iterations);
            let is_plain = (phase.abs() - std::f64::consts::PI).abs() < 1e-9;
            assert_equal(&verdict, if is_plain { "" } else { "for certain" });
            judged += usize::from(!is_plain);
            if level == Level::Toffoli && !is_plain {
                assert_wrong_angles_differ(&problem, &places, &text, 2);
            }
        }
    }
    assert!(judged >= 8, "{judged}");
}

#[test]
fn a_fixed_point_search_is_told_with_its_failure() {
    for problem in &problems()[..2] {
        let places = Places::as_given(problem);
        for (iterations, failure) in [(1u32, 0.3), (2, 0.1), (4, 0.01)] {
            let sequence = FixedPoint::with(iterations.into(), failure);
            let course = Course::Sequence(sequence.phases().unwrap());
            let text = written(problem, &places, &course, Level::Toffoli);
            let verdict = judge(problem, &places, &text);
            assert_equal(&verdict, "fixed-point");
            let space = BigUint::from(1u64 << problem.bit_count());
            let wanted = sequence.success(&space, &marked(problem).into());
            assert!((verdict.success - wanted).abs() < 1e-9, "{} not {wanted}", verdict.success);
            if iterations > 1 {
                assert_wrong_angles_differ(problem, &places, &text, 4);
            }
        }
    }
}

#[test]
fn an_estimation_is_followed_to_its_digits() {
    for problem in &problems()[..2] {
        let places = Places::as_given(problem);
        for digits in 1..=4u32 {
            let text = written(problem, &places, &Course::Counting(digits), Level::Toffoli);
            assert_equal(&judge(problem, &places, &text), "estimation");
            if digits == 3 {
                assert_wrong_angles_differ(problem, &places, &text, 6);
                // The sign that only the control shows.
                let sign =
                    text.lines().rev().find(|line| line.trim() == "z count[0];").expect("the sign of an iterate");
                let at = text.rfind(sign).unwrap();
                let without = format!("{}{}", &text[..at], &text[at + sign.len()..]);
                assert_eq!(judge(problem, &places, &without).outcome, Outcome::Differs);
            }
        }
    }
}

#[test]
fn a_loop_of_given_length_is_judged_by_its_body() {
    let problem = &problems()[1];
    let places = Places::as_given(problem);
    let text = written(problem, &places, &Course::Given, Level::Toffoli);
    let given = |text: &str| read::give(text, ITERATIONS, 2).expect("an input");
    let verdict = judge(problem, &places, &given(&text));
    assert_eq!((verdict.outcome, verdict.iterations), (Outcome::Equal, 2), "{:?}", verdict.notes);
    let circuit = read::read(&given(&text), "search.qasm", &mut Sources::new()).unwrap();
    let wrong = faults::apply::to_circuit(&faults::Fault::Drop(circuit.gates().len() as u32 / 2), &circuit).unwrap();
    let verdict = audit_search(problem, &places, &wrong, 1 << 26, &Budget::unlimited()).unwrap();
    assert_eq!(verdict.outcome, Outcome::Differs, "{:?}", verdict.notes);
}

#[test]
fn tuned_phases_from_a_restricted_start_are_followed() {
    let problem = problem(4, &[&[1, 2, 3], &[-1, -2], &[-1, -3], &[-2, -3], &[-1, 4], &[-2, -4], &[-3, -4]]);
    let start = Start::Parts(vec![Part::Weight { qubits: vec![0, 1, 2], ones: 1 }]);
    let places = Places { start, ..Places::as_given(&problem) };
    let text = written(&problem, &places, &matched(6, marked(&problem)), Level::Toffoli);
    assert_equal(&judge(&problem, &places, &text), "for certain");
    assert_wrong_angles_differ(&problem, &places, &text, 4);
}

/// A search from elsewhere: Hadamard gates as rotations with seven decimals, and phases as `rz`.
#[test]
fn rotations_may_be_rounded_within_a_stated_bound() {
    let problem = problem(3, &[&[1], &[-2], &[3]]);
    let places = Places::as_given(&problem);
    // H is Z and a quarter turn; pi/2 = 1.57079633 with eight decimals, 1.5707963 with seven.
    let file = |quarter: &str| {
        let h = |qubit: usize| format!("z search[{qubit}];\nry({quarter}) search[{qubit}];\n");
        let all = |gate: &dyn Fn(usize) -> String| (0..3).map(gate).collect::<String>();
        let x = |qubit: usize| format!("x search[{qubit}];\n");
        let ccz = "ctrl @ cz search[0], search[1], search[2];\n";
        format!(
            "OPENQASM 3.0;\ninclude \"stdgates.inc\";\nqubit[3] search;\nbit[3] found;\n{}for int i in [1:2] {{\n{}{ccz}{}{}{}{ccz}{}{}}}\nfound = measure search;\n",
            all(&h),
            x(1),
            x(1),
            all(&h),
            all(&x),
            all(&x),
            all(&h),
        )
    };
    let verdict = judge(&problem, &places, &file("1.5707963"));
    assert_equal(&verdict, "the bound for");
    assert!((verdict.success - 121.0 / 128.0).abs() < 1e-6, "{}", verdict.success);
    for wrong in ["1.5717963", "1.5708", "1.571"] {
        assert_eq!(judge(&problem, &places, &file(wrong)).outcome, Outcome::Differs, "{wrong}");
    }
}
