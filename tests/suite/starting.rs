//! Start states: preparations against their published gate counts and against plain state vectors, oracles that leave out
//! what the start guarantees, audits relative to the start, and whole searches from it.

use std::f64::consts::FRAC_1_SQRT_2;

use tallymark::budget::Budget;
use tallymark::circuit::qasm::{read, write};
use tallymark::circuit::{Circuit, Level, Mark, Op};
use tallymark::id::Id;
use tallymark::judge::audit::{self, Outcome};
use tallymark::judge::count::Counted;
use tallymark::make::lower::{
    self, LowerError, Rotation as Turn, append_preparation, append_unpreparation, preparation,
};
use tallymark::make::network;
use tallymark::make::start::{Choice, start};
use tallymark::places::{Part, Places, Start};
use tallymark::problem::{BitId, BitLit, Bits, Compare, Domain, Expr, Origin, Problem};
use tallymark::search::course::{self, Course};
use tallymark::search::simulate::{Options, Simulation, Way, simulate};
use tallymark::span::Sources;

use super::random_problem::random_problem;

fn below(len: u32, size: u64) -> Start {
    Start::Parts(vec![Part::Below { qubits: (0..len).collect(), size }])
}

fn weight(len: u32, ones: u32) -> Start {
    Start::Parts(vec![Part::Weight { qubits: (0..len).collect(), ones }])
}

fn count(turns: &[Turn], op: Op, controls: usize) -> usize {
    turns.iter().filter(|turn| turn.op == op && turn.controls.len() == controls).count()
}

/// Gate counts of A. Shukla, P. Vedula, Quantum Information Processing 23 (2024), arXiv:2306.11747: size and gates, computed
/// from the formula `l_r + 2 r` outside this program; for 100: 2 X, 2 H, 1 Ry, 1 controlled Ry, 4 controlled H.
#[test]
fn numbers_below_a_size_take_the_published_gates() {
    for (size, gates) in [(3u64, 3), (5, 4), (6, 4), (7, 6), (10, 5), (11, 7), (13, 7), (100, 10)] {
        assert_eq!(preparation(&below(7, size), 7).len(), gates, "{size}");
    }
    let turns = preparation(&below(7, 100), 7);
    let counts = [(Op::X, 0), (Op::H, 0), (Op::Ry, 0), (Op::Ry, 1), (Op::H, 1)].map(|(op, c)| count(&turns, op, c));
    assert_eq!(counts, [2, 2, 1, 1, 4]);
    assert_eq!(preparation(&below(5, 16), 5).len(), 4, "a power of two takes Hadamard gates only");
}

/// The chain for one-hot states: n - 1 controlled rotations, n - 1 CNOTs and one X (computed for n = 2 to 8 outside this
/// program). A. Bärtschi, S. Eidenbenz, FCT 2019, arXiv:1904.07358: (n, k), blocks on two and on three qubits.
#[test]
fn fixed_weights_take_the_published_gates() {
    for n in 2..=8u32 {
        let turns = preparation(&weight(n, 1), n as usize);
        assert_eq!(turns.len() as u32, 2 * n - 1);
        assert_eq!((count(&turns, Op::Ry, 1) as u32, count(&turns, Op::X, 1) as u32), (n - 1, n - 1));
    }
    for (n, k, two, three) in [(4, 2, 3, 2), (5, 3, 4, 3), (6, 3, 5, 7), (7, 4, 6, 9), (7, 3, 6, 9)] {
        let turns = preparation(&weight(n, k), n as usize);
        // More than half: as many zeros are prepared, (k - 1)(n - k) + (k - 1)(k - 2)/2 for the smaller k.
        assert_eq!((count(&turns, Op::Ry, 1), count(&turns, Op::Ry, 2)), (two, three), "{n} {k}");
    }
}

/// A plain real state vector.
fn run(circuit: &Circuit) -> Vec<f64> {
    let mut state = vec![0.0f64; 1 << circuit.qubit_count()];
    state[0] = 1.0;
    for gate in circuit.gates() {
        let bit = 1usize << gate.target().index();
        let (sin, cos) = (circuit.angle(gate).unwrap_or(0.0) / 2.0).sin_cos();
        let holds =
            |at: usize| circuit.controls(gate).iter().all(|c| (at >> c.qubit().index() & 1 == 1) != c.is_negated());
        for at in (0..state.len()).filter(|at| at & bit == 0 && holds(*at)) {
            let (a, b) = (state[at], state[at | bit]);
            (state[at], state[at | bit]) = match gate.op() {
                Op::X => (b, a),
                Op::Z => (a, -b),
                Op::H => ((a + b) * FRAC_1_SQRT_2, (a - b) * FRAC_1_SQRT_2),
                Op::Ry => (cos * a - sin * b, sin * a + cos * b),
                op => panic!("{op:?}"),
            };
        }
    }
    state
}

#[test]
fn every_preparation_is_even_and_its_inverse_undoes_it() {
    let mut starts: Vec<(Start, usize)> = (2..=40u64).map(|size| (below(6, size), 6)).collect();
    starts.extend((1..=7u32).flat_map(|n| (0..=n).map(move |k| (weight(n, k), n as usize))));
    let parts = vec![Part::Below { qubits: vec![4, 0], size: 3 }, Part::Weight { qubits: vec![1, 5, 3], ones: 2 }];
    starts.push((Start::Parts(parts), 6));
    for (start, len) in starts {
        for level in [Level::Wide, Level::Toffoli] {
            let mut circuit = Circuit::new();
            let search = circuit.add_qubits("search", len);
            append_preparation(&mut circuit, &search, &start, level);
            assert!(circuit.gates().iter().all(|gate| level.has(&circuit, gate)), "{start:?} {level}");
            let state = run(&circuit);
            let held = |value: usize| start.allows(|qubit| value >> qubit & 1 == 1);
            let all = (0..state.len()).filter(|&value| held(value)).count();
            let places = Places { start: start.clone(), ..numbered(len) };
            assert_eq!(Counted::space(&places), all.into(), "{start:?}");
            for (value, amplitude) in state.iter().enumerate() {
                let wanted = if held(value) { (all as f64).sqrt().recip() } else { 0.0 };
                assert!((amplitude - wanted).abs() < 1e-13, "{start:?} {value}: {amplitude} not {wanted}");
            }
            append_unpreparation(&mut circuit, &search, &start, level);
            assert!((run(&circuit)[0] - 1.0).abs() < 1e-13, "{start:?}");
        }
    }
}

fn numbered(bits: usize) -> Places {
    let mut problem = Problem::new();
    problem.add_numbered_vars(bits);
    Places::as_given(&problem)
}

fn oracle(problem: &Problem, places: &Places, level: Level, mark: Mark) -> Result<Circuit, LowerError> {
    lower::lower(&network::build(problem, places), &lower::Options { level, mark }, &Budget::unlimited())
}

fn places_of(problem: &Problem, choice: Choice) -> Places {
    let plain = Places::as_given(problem);
    Places { start: start(problem, &plain, choice), ..plain }
}

fn through_text(circuit: &Circuit) -> Circuit {
    let mut text = Vec::new();
    write::write(circuit, &[], &mut text).unwrap();
    let text = String::from_utf8(text).unwrap();
    read::read(&text, "search.qasm", &mut Sources::new()).unwrap_or_else(|errors| panic!("{errors:?}\n{text}"))
}

fn follow(circuit: &Circuit) -> Simulation {
    simulate(circuit, &Options { threads: 1, ..Options::default() }, &Budget::unlimited()).unwrap()
}

/// Checks oracle, audit and search of a problem from a start; says whether there was one.
fn check_from(problem: &Problem, places: &Places, level: Level, what: &str) -> bool {
    let Ok(circuit) = oracle(problem, places, level, Mark::Phase) else { return false };
    let options = audit::Options { threads: 1, ..audit::Options::default() };
    let verdict = audit::audit(problem, places, &circuit, &options, &Budget::unlimited()).unwrap();
    assert_eq!(verdict.outcome, Outcome::Equal, "{what} {level}: {verdict:?}");
    let bits = places.search_len();
    let held = |value: u64| places.start.allows(|qubit| value >> qubit & 1 == 1);
    let holds = |value: u64| problem.holds(&Bits::from_number(value.into(), bits));
    let all = (0..1u64 << bits).filter(|&value| held(value)).count();
    let marked = (0..1u64 << bits).filter(|&value| holds(value)).count();
    let search = through_text(&course::circuit(&circuit, &places.start, &Course::Plain(3), level));
    let found = follow(&search);
    let theta = (marked as f64 / all as f64).sqrt().asin();
    let success = |k: usize| ((2 * k + 1) as f64 * theta).sin().powi(2);
    if found.way == Way::Gates {
        // Sign flips under two controls have complex phases inside below `toffoli`: these are followed gate by gate.
        assert!(level >= Level::CliffordT, "{what} {level}: {:?}", found.notes);
        let hit: f64 = found.likeliest.iter().filter(|(bits, _)| problem.holds(bits)).map(|one| one.1).sum();
        assert!((hit - success(3)).abs() < 1e-9, "{what} {level}: {hit}");
        return true;
    }
    assert_eq!((found.space, found.marked), (Some(all as u64), Some(marked as u64)), "{what} {level}");
    for (k, p) in found.curve.iter().enumerate() {
        assert!((p - success(k)).abs() < 1e-9, "{what} {level} {k}: {p} not {}", success(k));
    }
    if level <= Level::Toffoli {
        let verdict = audit::audit_search(problem, places, &search, 1 << 22, &Budget::unlimited()).unwrap();
        assert_eq!(verdict.outcome, Outcome::Equal, "{what} {level}: {verdict:?}");
    }
    true
}

#[test]
fn searches_from_the_domains_are_right_and_no_dearer() {
    let (mut restricted, mut cheaper) = (0, 0);
    for seed in 0..60 {
        let problem = random_problem(seed);
        if problem.bit_count() > 7 || problem.shown.is_some() {
            continue;
        }
        let places = places_of(&problem, Choice::Domains);
        if places.start == Start::AllStrings {
            continue;
        }
        let level = Level::ALL[seed as usize % 2];
        restricted += u32::from(check_from(&problem, &places, level, &format!("seed {seed}")));
        let ands = |places: &Places| {
            let network = network::build(&problem, places);
            lower::and_count(&network, Mark::Phase, &Budget::unlimited()).ok()
        };
        if let (Some(with), Some(without)) = (ands(&places), ands(&Places::as_given(&problem))) {
            assert!(with <= without, "seed {seed}: {with} ANDs, {without} without the start");
            cheaper += u32::from(with < without);
        }
    }
    assert!(restricted >= 5 && cheaper >= 3, "{restricted} {cheaper}");
}

/// Two groups of three in clauses, exactly one each, and a clause across them.
fn in_clauses() -> Problem {
    let mut problem = Problem::new();
    problem.add_numbered_vars(7);
    let lit = |number: i64| BitLit::from_dimacs(number).unwrap();
    for clause in [
        &[1i64, 2, 3][..],
        &[-1, -2],
        &[-1, -3],
        &[-2, -3],
        &[6, 5, 4],
        &[-5, -4],
        &[-6, -4],
        &[-5, -6],
        &[1, 5, 7],
        &[-2, -7],
    ] {
        problem.clauses.push(&clause.iter().map(|&number| lit(number)).collect::<Vec<_>>());
    }
    problem
}

/// Exactly two of four, and a number from 1 to 5 that is at least as large as one of them says.
fn in_constraints() -> Problem {
    let mut problem = Problem::new();
    let vars: Vec<_> = (0..4).map(|at| problem.add_var(format!("on[{at}]"), Domain::YesNo, None)).collect();
    let number = problem.add_var("n", Domain::Range { lo: 1, hi: 5 }, None);
    let on: Vec<_> = vars.iter().map(|&var| problem.exprs.node(Expr::Var(var))).collect();
    let count = problem.exprs.over(Expr::Count, &on);
    let [two, four] = [2, 4].map(|number| problem.exprs.node(Expr::Number(number)));
    let exactly = problem.exprs.node(Expr::Compare(Compare::Eq, count, two));
    let number = problem.exprs.node(Expr::Var(number));
    let large = problem.exprs.node(Expr::Compare(Compare::Le, four, number));
    let either = problem.exprs.over(Expr::Some, &[on[0], large]);
    problem.must(exactly, Origin::default());
    problem.must(either, Origin::default());
    problem
}

#[test]
fn groups_are_found_and_left_out_of_the_oracle() {
    let places = places_of(&in_clauses(), Choice::Groups);
    let groups = vec![Part::Weight { qubits: vec![0, 1, 2], ones: 1 }, Part::Weight { qubits: vec![3, 4, 5], ones: 1 }];
    assert_eq!(places.start, Start::Parts(groups));
    assert_eq!(Counted::space(&places), 18u32.into());
    let problem = in_constraints();
    let places = places_of(&problem, Choice::Groups);
    let parts =
        vec![Part::Weight { qubits: vec![0, 1, 2, 3], ones: 2 }, Part::Below { qubits: vec![4, 5, 6], size: 5 }];
    assert_eq!(places.start, Start::Parts(parts));
    assert_eq!(Counted::space(&places), 30u32.into());
    // One OR of a bit and a comparison with 4 to 5, which is bit 0 and bit 1, or bit 2, of n - 1.
    let ands = |places: &Places| {
        lower::and_count(&network::build(&problem, places), Mark::Phase, &Budget::unlimited()).unwrap()
    };
    assert!(ands(&places) + 4 <= ands(&Places::as_given(&problem)));
    for level in Level::ALL {
        assert!(check_from(&in_clauses(), &places_of(&in_clauses(), Choice::Groups), level, "clauses"));
        assert!(check_from(&problem, &places, level, "constraints"));
    }
}

#[test]
fn the_judge_finds_a_start_that_loses_solutions_and_an_oracle_that_is_wrong_within() {
    let problem = in_clauses();
    let good = places_of(&problem, Choice::Groups);
    let circuit = oracle(&problem, &good, Level::Toffoli, Mark::Phase).unwrap();
    let judge = |places: &Places, circuit: &Circuit| {
        audit::audit(&problem, places, circuit, &audit::Options::default(), &Budget::unlimited()).unwrap()
    };
    assert_eq!(judge(&good, &circuit).outcome, Outcome::Equal);
    // Without the start the same oracle marks too much.
    assert_eq!(judge(&Places::as_given(&problem), &circuit).outcome, Outcome::Differs);
    // A start of two ones in the first group has no solution.
    let Start::Parts(mut parts) = good.start.clone() else { panic!() };
    parts[0] = Part::Weight { qubits: vec![0, 1, 2], ones: 2 };
    let lossy = Places { start: Start::Parts(parts), ..good.clone() };
    let verdict = judge(&lossy, &circuit);
    assert_eq!(verdict.outcome, Outcome::Differs);
    let witness = verdict.witness.unwrap();
    assert!(problem.holds(&witness.bits), "{witness:?}");
    let too_small = Places { start: below(1, 1), ..good.clone() };
    let verdict = judge(&too_small, &circuit);
    assert!(problem.holds(&verdict.witness.expect("a lost solution").bits));
    // One more sign, on a string within the start.
    let mut wrong = circuit.clone();
    let search = wrong.register("search");
    let inside = (0..1u64 << 7).find(|value| good.start.allows(|qubit| value >> qubit & 1 == 1)).unwrap();
    let controls: Vec<_> =
        (0..6).map(|at| tallymark::circuit::Control::new(search[at], inside >> at & 1 == 1)).collect();
    wrong.push(Op::X, &[], search[6]);
    wrong.push(Op::Z, &controls, search[6]);
    wrong.push(Op::X, &[], search[6]);
    assert_eq!(inside >> 6 & 1, 0);
    let verdict = judge(&good, &wrong);
    assert_eq!(verdict.outcome, Outcome::Differs);
    let bits = verdict.witness.unwrap().bits;
    assert_eq!(bits.to_number(), Some(inside.into()));
    assert!(bits.get(BitId::new(0)) == (inside & 1 == 1));
}

/// Too many strings to try: the proof is relative to the start too.
#[test]
fn a_proof_is_relative_to_the_start() {
    let mut problem = Problem::new();
    problem.add_numbered_vars(24);
    let lit = |number: i64| BitLit::from_dimacs(number).unwrap();
    for group in 0..6i64 {
        let of: Vec<i64> = (1..=4).map(|at| group * 4 + at).collect();
        problem.clauses.push(&of.iter().map(|&number| lit(number)).collect::<Vec<_>>());
        for (at, a) in of.iter().enumerate() {
            of[at + 1..].iter().for_each(|b| problem.clauses.push(&[lit(-a), lit(-b)]));
        }
    }
    (0..5i64).for_each(|group| problem.clauses.push(&[lit(-(group * 4 + 1)), lit(-(group * 4 + 6))]));
    let places = places_of(&problem, Choice::Groups);
    assert_eq!(Counted::space(&places), 4096u32.into());
    let options =
        audit::Options { exhaustive_bits: 4, exhaustive_work: 0, sample: 64, threads: 1, ..audit::Options::default() };
    let circuit = oracle(&problem, &places, Level::Toffoli, Mark::Phase).unwrap();
    let judge = |places: &Places| audit::audit(&problem, places, &circuit, &options, &Budget::unlimited()).unwrap();
    let verdict = judge(&places);
    assert_eq!((verdict.outcome, verdict.how), (Outcome::Equal, audit::How::Proof), "{verdict:?}");
    assert_eq!(judge(&Places::as_given(&problem)).outcome, Outcome::Differs);
}
