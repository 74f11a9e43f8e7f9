//! The written search of every aim, followed from its file: what comes out is what the plan of the aim predicts.

use num_bigint::BigUint;
use tallymark::budget::Budget;
use tallymark::circuit::qasm::{read, write};
use tallymark::circuit::{Circuit, ITERATIONS, Level, Mark};
use tallymark::judge::audit::{Outcome, audit_search};
use tallymark::make::lower;
use tallymark::make::network;
use tallymark::places::{Part, Places, Start};
use tallymark::problem::{BitLit, Bits, Problem};
use tallymark::search::course::{self, Course};
use tallymark::search::plan::certainty::certainty;
use tallymark::search::plan::estimate;
use tallymark::search::plan::fixed_point::{FixedPoint, fixed_point};
use tallymark::search::plan::{Known, Question, answer};
use tallymark::search::simulate::{Options, Simulation, Way, simulate};
use tallymark::span::Sources;

/// Bits of which the given clauses hold.
pub(super) fn problem(bits: usize, clauses: &[&[i64]]) -> Problem {
    let mut problem = Problem::new();
    problem.add_numbered_vars(bits);
    for clause in clauses {
        problem.clauses.push(&clause.iter().map(|&number| BitLit::from_dimacs(number).unwrap()).collect::<Vec<_>>());
    }
    problem
}

fn problems() -> Vec<Problem> {
    vec![
        problem(3, &[&[1], &[-2], &[3]]),
        problem(3, &[&[1, 2], &[-2, 3], &[-1, -3]]),
        problem(4, &[&[1, 2], &[-1, -2], &[3], &[2, -4]]),
        problem(5, &[&[1], &[2, 3], &[-3, 4], &[-2, -4], &[5]]),
    ]
}

fn marked(problem: &Problem) -> u64 {
    let bits = problem.bit_count();
    (0..1u64 << bits).filter(|&value| problem.holds(&Bits::from_number(value.into(), bits))).count() as u64
}

fn oracle(problem: &Problem, places: &Places, level: Level, mark: Mark) -> Circuit {
    lower::lower(&network::build(problem, places), &lower::Options { level, mark }, &Budget::unlimited()).unwrap()
}

fn text_of(circuit: &Circuit) -> String {
    let mut text = Vec::new();
    write::write(circuit, &[], &mut text).unwrap();
    String::from_utf8(text).unwrap()
}

fn follow(text: &str, way: Option<Way>) -> Simulation {
    let circuit = read::read(text, "search.qasm", &mut Sources::new()).unwrap_or_else(|e| panic!("{e:?}\n{text}"));
    simulate(&circuit, &Options { way, draw: 0, seed: 3, threads: 1 }, &Budget::unlimited()).unwrap()
}

fn run(problem: &Problem, course: &Course, level: Level, way: Option<Way>) -> Simulation {
    let places = Places::as_given(problem);
    let mark = if course.needs_bit_oracle() { Mark::Bit } else { Mark::Phase };
    let circuit = course::circuit(&oracle(problem, &places, level, mark), &places.start, course, level);
    assert!(circuit.gates().iter().all(|gate| level.has(&circuit, gate)), "{course:?} at {level}");
    follow(&text_of(&circuit), way)
}

/// G. Long, Physical Review A 64 (2001) 022307: the success is exactly 1.
#[test]
fn matched_phases_succeed_for_certain() {
    for (at, problem) in problems().iter().enumerate() {
        let (space, marked) = (BigUint::from(1u64 << problem.bit_count()), BigUint::from(marked(problem)));
        let tuned = certainty(&space, &marked).unwrap();
        let iterations = u64::try_from(&tuned.iterations).unwrap();
        let course = Course::Matched { iterations, phase: tuned.phase };
        for level in Level::ALL {
            let found = run(problem, &course, level, Some(Way::Classes));
            let success = found.success.unwrap();
            assert!((success - 1.0).abs() < 1e-12, "{at} {level}: {success}");
            assert_eq!(found.iterations, iterations);
        }
        let by_gates = run(problem, &course, Level::Toffoli, Some(Way::Gates));
        let hit: f64 = by_gates.likeliest.iter().filter(|(bits, _)| problem.holds(bits)).map(|one| one.1).sum();
        assert!((hit - 1.0).abs() < 1e-12, "{at}: {hit}");
    }
}

/// T. Yoder, G. Low, I. Chuang, Physical Review Letters 113 (2014) 210501: the success of the sequence.
#[test]
fn sequences_of_phases_have_the_published_success() {
    for (at, problem) in problems().iter().enumerate() {
        let (space, marked) = (BigUint::from(1u64 << problem.bit_count()), BigUint::from(marked(problem)));
        let planned = fixed_point(&space, &BigUint::from(1u32), 0.1).unwrap();
        for sequence in [planned, FixedPoint::with(3u32.into(), 0.1), FixedPoint::with(2u32.into(), 0.01)] {
            let course = Course::Sequence(sequence.phases().unwrap());
            let wanted = sequence.success(&space, &marked);
            for level in [Level::Wide, Level::Toffoli] {
                let found = run(problem, &course, level, Some(Way::Classes)).success.unwrap();
                assert!((found - wanted).abs() < 1e-12, "{at} {level}: {found} not {wanted}");
            }
        }
    }
}

/// G. Brassard, P. Hoyer, M. Mosca, A. Tapp 2002, Theorem 12: the exact distribution of what is measured.
#[test]
fn counting_measures_the_published_distribution() {
    for problem in &problems()[..3] {
        let (space, marked) = (BigUint::from(1u64 << problem.bit_count()), BigUint::from(marked(problem)));
        for digits in 1..=4u32 {
            let found = run(problem, &Course::Counting(digits), Level::Toffoli, None);
            let wanted = estimate::distribution(&space, &marked, 1 << digits);
            let mut got = vec![0.0; 1 << digits];
            for (bits, chance) in &found.likeliest {
                got[bits.to_number().unwrap() as usize] += chance;
            }
            for (y, (got, wanted)) in got.iter().zip(&wanted).enumerate() {
                assert!((got - wanted).abs() < 1e-9, "{marked} {digits} {y}: {got} not {wanted}");
            }
        }
    }
}

#[test]
fn the_number_of_iterations_may_be_an_input() {
    let problem = &problems()[2];
    let places = Places::as_given(problem);
    let phase = oracle(problem, &places, Level::Toffoli, Mark::Phase);
    let circuit = course::circuit(&phase, &places.start, &Course::Given, Level::Toffoli);
    let text = text_of(&circuit);
    assert!(text.contains("input int iterations;") && text.contains("for int i in [1:iterations] {"), "{text}");
    assert!(read::read(&text, "search.qasm", &mut Sources::new()).is_err(), "the file alone does not say the number");
    assert_eq!(read::give(&text, "other", 3), None);
    let theta = (marked(problem) as f64 / 16.0).sqrt().asin();
    for k in 0..5u64 {
        let found = follow(&read::give(&text, ITERATIONS, k).unwrap(), None);
        let wanted = ((2 * k + 1) as f64 * theta).sin().powi(2);
        if k > 0 {
            assert!((found.success.unwrap() - wanted).abs() < 1e-12, "{k}");
            assert_eq!(found.iterations, k);
        }
    }
}

/// The figures of a plan lead to the course of its aim.
#[test]
fn every_aim_has_its_course() {
    use tallymark::search::plan::Aim;
    let space = BigUint::from(1024u32);
    for aim in Aim::ALL {
        let mut question = Question::new(space.clone(), Known::Exactly(BigUint::from(3u32)));
        (question.aim, question.bound, question.precision) = (aim, Some(20u32.into()), Some(0.05));
        let course = Course::of(&answer(&question).unwrap().details).unwrap();
        let fits = match aim {
            Aim::Certainty => matches!(course, Course::Matched { iterations: 15, .. }),
            Aim::AtLeastSoMany => matches!(&course, Course::Sequence(phases) if phases.len() > 20),
            Aim::NothingKnown => course == Course::Given,
            Aim::CountOnMachine => matches!(course, Course::Counting(digits) if digits > 3),
            _ => matches!(course, Course::Plain(k) if k > 3),
        };
        assert!(fits, "{aim:?}: {course:?}");
    }
}

/// Tuned phases from a start with fewer strings: the amplitude amplification is about that start.
#[test]
fn matched_phases_from_a_restricted_start() {
    let problem = problem(4, &[&[1, 2, 3], &[-1, -2], &[-1, -3], &[-2, -3], &[-1, 4], &[-2, -4], &[-3, -4]]);
    let start = Start::Parts(vec![Part::Weight { qubits: vec![0, 1, 2], ones: 1 }]);
    let places = Places { start, ..Places::as_given(&problem) };
    let (space, marked) = (BigUint::from(6u32), BigUint::from(marked(&problem)));
    let tuned = certainty(&space, &marked).unwrap();
    let course = Course::Matched { iterations: u64::try_from(&tuned.iterations).unwrap(), phase: tuned.phase };
    let bit = oracle(&problem, &places, Level::Toffoli, Mark::Bit);
    let circuit = course::circuit(&bit, &places.start, &course, Level::Toffoli);
    let found = follow(&text_of(&circuit), Some(Way::Classes));
    assert_eq!(found.space, Some(6));
    assert!((found.success.unwrap() - 1.0).abs() < 1e-12, "{:?}", found.success);
}

/// The audit of searches whose iterations turn by angles of their own: right ones are equal with the success of their aim, a
/// gate less is found.
#[test]
fn searches_with_angles_of_their_own_are_audited() {
    let problem = &problems()[2];
    let places = Places::as_given(problem);
    let (space, marked) = (BigUint::from(16u32), BigUint::from(marked(problem)));
    let tuned = certainty(&space, &marked).unwrap();
    let sequence = FixedPoint::with(3u32.into(), 0.1);
    let matched = Course::Matched { iterations: u64::try_from(&tuned.iterations).unwrap(), phase: tuned.phase };
    let success = sequence.success(&space, &marked);
    for (course, wanted) in [(matched, 1.0), (Course::Sequence(sequence.phases().unwrap()), success)] {
        let bit = oracle(problem, &places, Level::Toffoli, Mark::Bit);
        let text = text_of(&course::circuit(&bit, &places.start, &course, Level::Toffoli));
        let judge = |text: &str| {
            let circuit = read::read(text, "search.qasm", &mut Sources::new()).unwrap();
            audit_search(problem, &places, &circuit, 1 << 24, &Budget::unlimited()).unwrap()
        };
        let verdict = judge(&text);
        assert_eq!((verdict.outcome, verdict.planned), (Outcome::Equal, None), "{course:?}: {verdict:?}");
        assert!((verdict.success - wanted).abs() < 1e-9, "{course:?}: {}", verdict.success);
        // Without a gate of the oracle: the state leaves the plane, or a qubit is left changed.
        let lines: Vec<&str> = text.lines().collect();
        let gates =
            (0..lines.len()).filter(|&at| lines[at].trim_start().starts_with(['c', 'p']) && lines[at].ends_with(';'));
        let mut caught = 0;
        let tried = gates
            .map(|at| {
                let without = [&lines[..at], &lines[at + 1..]].concat().join("\n");
                let verdict = judge(&without);
                caught += usize::from(verdict.outcome == Outcome::Differs || (verdict.success - wanted).abs() > 1e-9);
            })
            .count();
        assert!(tried >= 10 && caught == tried, "{course:?}: {caught} of {tried}");
    }
}
