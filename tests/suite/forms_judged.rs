//! Every form of an oracle with angles of any size: the right circuit is equal, one with a wrong angle, sign or phase is not.

use tallymark::budget::Budget;
use tallymark::circuit::qasm::read::read;
use tallymark::judge::audit::{Options, Outcome, Verdict, audit, controlled};
use tallymark::places::Places;
use tallymark::problem::{BitLit, Problem};
use tallymark::span::Sources;

/// Both of two bits.
fn both() -> Problem {
    let mut problem = Problem::new();
    problem.add_numbered_vars(2);
    [1, 2].iter().for_each(|&number| problem.clauses.push(&[BitLit::from_dimacs(number).unwrap()]));
    problem
}

fn judge(problem: &Problem, places: &Places, body: &str, angle: Option<f64>) -> Verdict {
    let searched = places.search_len();
    let mark = if body.contains("mark") { "qubit[1] mark;" } else { "" };
    let text =
        format!("OPENQASM 3.0; include \"stdgates.inc\"; qubit[{searched}] search; {mark} qubit[1] work; {body}");
    let circuit = read(&text, "form.qasm", &mut Sources::new()).unwrap_or_else(|faults| panic!("{faults:#?}"));
    let options = Options { angle, threads: 1, ..Options::default() };
    audit(problem, places, &circuit, &options, &Budget::unlimited()).expect("it is judged")
}

fn outcome(body: &str, angle: Option<f64>) -> Outcome {
    let problem = both();
    judge(&problem, &Places::as_given(&problem), body, angle).outcome
}

const AND: &str = "ccx search[0], search[1], work[0];";

#[test]
fn an_angle_form_is_right_to_a_thousandth_and_less() {
    // Plain, and with the work qubit in a superposition of any angle between.
    for (before, after) in [("", ""), ("ry(0.4) search[0];", "ry(-0.4) search[0];")] {
        for angle in [0.3, -1.1, 2.5] {
            let form = |used: f64| {
                let wrap = if before.is_empty() { String::new() } else { format!("{before} {after}") };
                format!("{AND} {wrap} p({used:?}) work[0]; {AND}")
            };
            assert_eq!(outcome(&form(angle), Some(angle)), Outcome::Equal, "{angle} {before}");
            for wrong in [angle + 1e-3, angle - 1e-3, -angle] {
                assert_eq!(outcome(&form(wrong), Some(angle)), Outcome::Differs, "{wrong} for {angle} {before}");
            }
        }
    }
}

#[test]
fn rounded_rotations_stay_within_the_bound() {
    let form = |quarter: f64| {
        format!("ry({quarter:?}) work[0]; cx search[0], work[0]; ry({:?}) work[0]; cz search[0], search[1];", -quarter)
    };
    // The quarter turn is a state that an X keeps, to seven decimals.
    assert_eq!(outcome(&form(1.5707963), None), Outcome::Equal);
    assert_eq!(outcome(&form(1.5717963), None), Outcome::Differs);
}

#[test]
fn a_controlled_form_shows_its_global_phase() {
    let problem = both();
    let (problem, places) = controlled(&problem, &Places::as_given(&problem));
    let outcome = |body: &str| judge(&problem, &places, body, None).outcome;
    let complement = format!("{AND} x work[0]; cz search[2], work[0]; x work[0];");
    assert_eq!(outcome(&format!("{complement} z search[2]; {AND}")), Outcome::Equal);
    assert_eq!(outcome(&format!("{complement} {AND}")), Outcome::Differs);
    // The same by angles that exact amplitudes do not hold.
    let halves = |second: &str| format!("{AND} cp(0.3) search[2], work[0]; cp({second}) search[2], work[0]; {AND}");
    assert_eq!(outcome(&halves("pi - 0.3")), Outcome::Equal);
    assert_eq!(outcome(&halves("pi - 0.301")), Outcome::Differs);
    let bare = |phase: &str| format!("{AND} ctrl @ rz(pi) search[2], work[0]; {phase} {AND}");
    assert_eq!(outcome(&bare("s search[2];")), Outcome::Equal);
    assert_eq!(outcome(&bare("")), Outcome::Differs);
    assert_eq!(outcome(&bare("sdg search[2];")), Outcome::Differs);
}

#[test]
fn a_bit_form_with_a_t_for_its_inverse_is_wrong() {
    let toffoli = |t: &str| {
        format!(
            "h mark[0]; cx search[1], mark[0]; {t} mark[0]; cx search[0], mark[0]; t mark[0]; cx search[1], mark[0]; \
             tdg mark[0]; cx search[0], mark[0]; t search[1]; t mark[0]; h mark[0]; cx search[0], search[1]; \
             t search[0]; tdg search[1]; cx search[0], search[1];"
        )
    };
    // Nielsen and Chuang, "Quantum Computation and Quantum Information", figure 4.9 (from memory).
    assert_eq!(outcome(&toffoli("tdg"), None), Outcome::Equal);
    assert_eq!(outcome(&toffoli("t"), None), Outcome::Differs);
}

#[test]
fn hadamard_gates_may_have_controls() {
    // A controlled Hadamard gate twice is nothing; once it leaves a superposition.
    let form = |middle: &str| format!("ch search[0], work[0]; {middle} cz search[0], search[1];");
    let problem = both();
    let verdict = judge(&problem, &Places::as_given(&problem), &form("ch search[0], work[0];"), None);
    assert_eq!(verdict.outcome, Outcome::Equal);
    assert!(verdict.notes.iter().any(|note| note.contains("sum over paths")), "{:?}", verdict.notes);
    assert_eq!(outcome(&form(""), None), Outcome::Differs);
    assert_eq!(outcome(&form("ch search[1], work[0];"), None), Outcome::Differs);
}
