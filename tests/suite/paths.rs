//! Clifford+T circuits with measurements as sums over paths: textbook ANDs in unusual orders, wrong ones, oracles of every
//! form, and large ones. `a and b and c` is the problem of the small circuits.

use tallymark::budget::Budget;
use tallymark::circuit::qasm::read::read;
use tallymark::circuit::{Circuit, Gate, Level, Mark, Op};
use tallymark::judge::audit::compare::{CompareOptions, compare};
use tallymark::judge::audit::faults::{Fault, Found, apply, self_test};
use tallymark::judge::audit::superposition::audit_superposition;
use tallymark::judge::audit::{How, Options, Outcome, Verdict, audit, controlled};
use tallymark::make::{lower, network};
use tallymark::places::Places;
use tallymark::problem::{BitLit, Problem};
use tallymark::random::SplitMix64;
use tallymark::span::Sources;

use crate::suite::random_problem::random_problem;

/// A problem of so many bits, by clauses in DIMACS numbers.
fn clauses(bits: usize, clauses: &[&[i64]]) -> Problem {
    let mut problem = Problem::new();
    problem.add_numbered_vars(bits);
    for clause in clauses {
        clause.iter().for_each(|&lit| problem.clauses.push_lit(BitLit::from_dimacs(lit).expect("not 0")));
        problem.clauses.end_clause();
    }
    problem
}

/// A circuit over `search`, two work qubits `w`, two measured bits `m`; `a`, `b`, `c` are the first three of `search`.
fn circuit(search: usize, body: &str) -> Circuit {
    let body = body.replace("$a", "search[0]").replace("$b", "search[1]").replace("$c", "search[2]");
    let body = body.replace("$w", "work[0]").replace("$v", "work[1]");
    let head = format!("OPENQASM 3.0;\ninclude \"stdgates.inc\";\nqubit[{search}] search; qubit[2] work; bit[2] m;\n");
    read(&(head + &body), "case", &mut Sources::new()).unwrap_or_else(|faults| panic!("{body}: {faults:#?}"))
}

fn judge_with(problem: &Problem, circuit: &Circuit, options: &Options) -> Verdict {
    audit(problem, &Places::as_given(problem), circuit, options, &Budget::unlimited()).expect("an oracle")
}

fn judge(problem: &Problem, circuit: &Circuit) -> Verdict {
    judge_with(problem, circuit, &Options { threads: 1, ..Options::default() })
}

/// Whether the sums over paths decided.
fn is_by_paths(verdict: &Verdict) -> bool {
    verdict.notes.iter().any(|note| note.contains("read as a sum over paths"))
}

fn abc() -> Problem {
    clauses(3, &[&[1], &[2], &[3]])
}

/// C. Gidney, "Halving the cost of quantum addition", Quantum 2:74, 2018, arXiv:1709.06648: four T into a clean qubit.
const AND: &str =
    "h $w; t $w; cx $a,$w; cx $b,$w; cx $w,$a; cx $w,$b; tdg $a; tdg $b; t $w; cx $w,$a; cx $w,$b; h $w; s $w; ";
/// The same phases in another order, with other flips between them.
const AND_COMMUTED: &str = "h $w; cx $b,$w; cx $a,$w; t $w; cx $w,$b; tdg $b; cx $w,$a; tdg $a; cx $w,$b; cx $w,$a; cx $b,$w; cx $a,$w; t $w; \
     cx $a,$w; cx $b,$w; h $w; s $w; ";
/// The textbook Toffoli from seven T (M. Nielsen and I. Chuang, figure 4.9, from memory).
const SEVEN: &str = "h $w; cx $b,$w; tdg $w; cx $a,$w; t $w; cx $b,$w; tdg $w; cx $a,$w; t $b; t $w; h $w; cx $a,$b; t $a; \
                     tdg $b; cx $a,$b; ";
/// D. Maslov, Phys. Rev. A 93:022311, 2016, arXiv:1508.03273: right up to phases that its inverse takes away.
const RELATIVE: &str = "h $w; t $w; cx $b,$w; tdg $w; cx $a,$w; t $w; cx $b,$w; tdg $w; h $w; ";
const RELATIVE_UNDONE: &str = "h $w; t $w; cx $b,$w; tdg $w; cx $a,$w; t $w; cx $b,$w; tdg $w; h $w; ";
const AND_UNDONE: &str =
    "sdg $w; h $w; cx $w,$b; cx $w,$a; tdg $w; t $b; t $a; cx $w,$b; cx $w,$a; cx $b,$w; cx $a,$w; tdg $w; h $w; ";
const MARK: &str = "cz $w,$c; ";
const ERASE: &str = "h $w; m[0] = measure $w; if (m[0]) { cz $a,$b; } reset $w; ";

#[test]
fn ands_in_any_order_are_read() {
    let right = [
        format!("{AND}{MARK}{ERASE}"),
        format!("{AND}{MARK}{AND_UNDONE}"),
        format!("{AND_COMMUTED}{MARK}{ERASE}"),
        format!("{AND_COMMUTED}{MARK}{AND_UNDONE}"),
        format!("{SEVEN}{MARK}{ERASE}"),
        format!("{SEVEN}{MARK}{AND_UNDONE}"),
        format!("{AND}{MARK}{SEVEN}"),
        format!("{RELATIVE}{MARK}{RELATIVE_UNDONE}"),
        // The controlled sign as S gates around a flip.
        format!(
            "{AND}{MARK}h $w; m[1] = measure $w; if (m[1]) {{ s $a; s $b; cx $a,$b; sdg $b; cx $a,$b; }} reset $w;"
        ),
        // The outcome put right on the qubit itself.
        format!("{AND}{MARK}h $w; m[0] = measure $w; if (m[0]) {{ cz $b,$a; x $w; }}"),
        // The correction for the other outcome, on negated controls, up to a sign that the outcome decides.
        format!("{SEVEN}{MARK}h $w; m[0] = measure $w; if (m[0]) {{ cz $a,$b; z $w; z $w; }} reset $w; reset $w;"),
        // An erase that is erased once more, and a qubit measured that holds nothing.
        format!("{AND}{MARK}{ERASE}h $w; h $w; m[1] = measure $v;"),
        // H as Z and a quarter turn about Y; as S and H in turns, up to a global phase.
        format!("{AND}{MARK}{ERASE}").replace("h $w;", "z $w; ry(pi/2) $w;"),
        format!("{AND}{MARK}{ERASE}").replacen("h $w;", "s $w; h $w; s $w; h $w; s $w;", 2),
        // Angles for gates.
        format!("{SEVEN}{MARK}{ERASE}").replace("tdg", "p(-pi/4)").replace(" t $", " rz(pi/4) $"),
        // The copied value: two ANDs with the same factors, one undone on the other's account.
        format!("{AND}cx $w,$v; cz $v,$c; cx $w,$v; {ERASE}"),
        // No work qubit: seven phases.
        "cx $b,$c; tdg $c; cx $a,$c; t $c; cx $b,$c; tdg $c; cx $a,$c; t $b; t $c; cx $a,$b; t $a; tdg $b; cx $a,$b;"
            .to_owned(),
        // The value measured in the basis of Y, which has a phase for a correction.
        format!(
            "{AND}{MARK}s $w; h $w; m[0] = measure $w; if (m[0]) {{ cz $a,$b; cz $a,$b; }} reset $w; \
                 if (!m[0]) {{ {cs_dagger} }} if (m[0]) {{ {cs} }}",
            cs_dagger = "tdg $a; tdg $b; cx $a,$b; t $b; cx $a,$b;",
            cs = "t $a; t $b; cx $a,$b; tdg $b; cx $a,$b;"
        ),
    ];
    for (at, body) in right.iter().enumerate() {
        let circuit = circuit(3, body);
        let verdict = judge(&abc(), &circuit);
        let slow =
            audit_superposition(&abc(), &Places::as_given(&abc()), &circuit, &Options::default(), &Budget::unlimited());
        assert_eq!(slow.expect("an oracle").outcome, Outcome::Equal, "case {at} in superposition: {body}");
        assert_eq!(verdict.outcome, Outcome::Equal, "case {at}: {body}\n{verdict:#?}");
        let is_plain = !body.contains('h') && !body.contains("ry");
        assert!(is_plain || is_by_paths(&verdict), "case {at}: {body}\n{verdict:#?}");
    }
}

#[test]
fn wrong_erases_are_found() {
    let wrong = [
        // No correction; one for the other outcome; one always; one too weak; one on a wrong pair.
        format!("{AND}{MARK}h $w; m[0] = measure $w; reset $w;"),
        format!("{AND}{MARK}h $w; m[0] = measure $w; if (!m[0]) {{ cz $a,$b; }} reset $w;"),
        format!("{AND}{MARK}h $w; m[0] = measure $w; cz $a,$b; reset $w;"),
        format!("{AND}{MARK}h $w; m[0] = measure $w; if (m[0]) {{ z $a; }} reset $w;"),
        format!("{AND}{MARK}h $w; m[0] = measure $w; if (m[0]) {{ cz $a,$c; }} reset $w;"),
        // No H before the measurement; a reset for an erase; a reset before it.
        format!("{AND}{MARK}m[0] = measure $w; if (m[0]) {{ cz $a,$b; }} reset $w;"),
        format!("{AND}{MARK}reset $w;"),
        format!("{AND}reset $w; {MARK}{ERASE}"),
        // Not clean: the reset is left out; the correction flips another qubit.
        format!("{AND}{MARK}h $w; m[0] = measure $w; if (m[0]) {{ cz $a,$b; }}"),
        format!("{AND}{MARK}h $w; m[0] = measure $w; if (m[0]) {{ cz $a,$b; x $v; }} reset $w;"),
        format!("{AND}{MARK}h $w; m[0] = measure $w; if (m[0]) {{ cz $a,$b; x $a; }} reset $w;"),
        // A T for its inverse; a missing S; a relative phase that is not taken away; a wrong bit.
        format!("{AND}{MARK}{ERASE}").replacen("tdg $a", "t $a", 1),
        format!("{AND}{MARK}{ERASE}").replacen("s $w;", "", 1),
        format!("{RELATIVE}{MARK}{ERASE}"),
        format!("{RELATIVE}{MARK}{AND_UNDONE}"),
        format!("{AND}{MARK}m[1] = measure $v; h $w; m[0] = measure $w; if (m[1]) {{ cz $a,$b; }} reset $w;"),
        // The mark between erase and reset, and none.
        format!("{AND}{ERASE}{MARK}"),
        format!("{AND}{ERASE}"),
    ];
    for (at, body) in wrong.iter().enumerate() {
        let verdict = judge(&abc(), &circuit(3, body));
        assert_eq!(verdict.outcome, Outcome::Differs, "case {at}: {body}\n{verdict:#?}");
        assert!(verdict.witness.is_some(), "case {at}: {body}");
    }
}

fn oracle(problem: &Problem, level: Level, mark: Mark) -> Option<Circuit> {
    let network = network::build(problem, &Places::as_given(problem));
    lower::lower(&network, &lower::Options { level, mark }, &Budget::unlimited()).ok()
}

#[test]
fn oracles_of_random_problems_are_read_and_spoilt_ones_are_judged_as_in_superposition() {
    let (mut right, mut spoilt, mut harmful) = (0, 0, 0);
    let mut random = SplitMix64::new(5);
    for seed in 0..100 {
        let problem = random_problem(seed);
        let level = [Level::CliffordT, Level::Feedback][seed as usize % 2];
        let mark = [Mark::Phase, Mark::Bit][seed as usize / 2 % 2];
        let Some(circuit) = oracle(&problem, level, mark) else { continue };
        let verdict = judge(&problem, &circuit);
        assert_eq!(verdict.outcome, Outcome::Equal, "{seed}: {verdict:#?}");
        assert!(!matches!(verdict.how, How::Superposition | How::Sample), "{seed}: {verdict:#?}");
        right += usize::from(is_by_paths(&verdict));
        for _ in 0..3 {
            let at = random.below(circuit.gates().len() as u64) as u32;
            let fault = [Fault::Drop(at), Fault::Double(at), Fault::Swap(at)][random.below(3) as usize].clone();
            let Some(changed) = apply::to_circuit(&fault, &circuit) else { continue };
            if problem.bit_count() > 8 {
                continue;
            }
            let places = Places::as_given(&problem);
            let slow = audit_superposition(&problem, &places, &changed, &Options::default(), &Budget::unlimited());
            let (fast, slow) = (judge(&problem, &changed).outcome, slow.expect("an oracle").outcome);
            assert_eq!(fast, slow, "{seed}: {fault}");
            spoilt += 1;
            harmful += usize::from(fast == Outcome::Differs);
        }
    }
    assert!(right >= 20 && spoilt >= 50 && harmful >= 30, "{right} right, {spoilt} spoilt, {harmful} of them harmful");
}

/// Clauses of three different variables, drawn.
fn three_sat(bits: usize, count: usize, seed: u64) -> Problem {
    let mut random = SplitMix64::new(seed);
    let mut problem = clauses(bits, &[]);
    for _ in 0..count {
        let mut chosen: Vec<i64> = Vec::new();
        while chosen.len() < 3 {
            let var = random.below(bits as u64) as i64 + 1;
            if !chosen.contains(&var) && !chosen.contains(&-var) {
                chosen.push(if random.coin() { var } else { -var });
            }
        }
        chosen.iter().for_each(|&lit| problem.clauses.push_lit(BitLit::from_dimacs(lit).expect("not 0")));
        problem.clauses.end_clause();
    }
    problem
}

#[test]
fn large_oracles_are_decided_for_every_input_and_outcome() {
    let problem = three_sat(60, 90, 3);
    for level in [Level::CliffordT, Level::Feedback] {
        let good = oracle(&problem, level, Mark::Phase).expect("an oracle");
        let verdict = judge(&problem, &good);
        assert_eq!((verdict.outcome, verdict.how), (Outcome::Equal, How::Symbolic), "{level}: {verdict:#?}");
        assert_eq!(verdict.inputs, 1 << 60);
        // Against the good circuit: a flip three times for once is the same, a T for its inverse is not.
        let options = CompareOptions { sample: 32, ..CompareOptions::default() };
        let outcome =
            |circuit: &Circuit| compare(&good, circuit, &options, &Budget::unlimited()).expect("the same").outcome;
        let first = |wanted: &dyn Fn(&Gate) -> bool| {
            let from = good.gates().len() / 3;
            (from + good.gates()[from..].iter().position(wanted).expect("such a gate")) as u32
        };
        let at = first(&|gate| gate.op() == Op::X && gate.control_count() == 1);
        let double = |circuit: &Circuit| apply::to_circuit(&Fault::Double(at), circuit).expect("it fits");
        assert_eq!(outcome(&double(&double(&good))), Outcome::Equal, "{level}");
        let at = first(&|gate| gate.op() == Op::T);
        let spoilt = apply::to_circuit(&Fault::Adjoint(at), &good).expect("it fits");
        assert_eq!(outcome(&spoilt), Outcome::Differs, "{level}");
    }
}

#[test]
fn faults_in_a_large_circuit_are_caught_or_proven_harmless() {
    let problem = three_sat(40, 24, 4);
    let good = oracle(&problem, Level::Feedback, Mark::Phase).expect("an oracle");
    let places = Places::as_given(&problem);
    let options = Options { threads: 1, sample: 64, seed: 3, ..Options::default() };
    let test = self_test(&problem, &places, &good, 60, &options, &Budget::unlimited()).expect("an oracle");
    assert!(test.is_complete && test.passed(), "{test:#?}");
    let harmless = test.count(|found| *found == Found::Harmless);
    assert!(harmless >= 3 && test.count(|found| *found == Found::Caught) >= 40, "{test:#?}");
    // A test that runs out of time is not finished, and has not failed.
    let spent = Budget::unlimited().within(std::time::Duration::ZERO);
    let test = self_test(&problem, &places, &good, 60, &options, &spent).expect("an oracle");
    assert!(!test.is_complete && test.passed());
}

#[test]
fn oracles_of_every_form_are_judged() {
    let ab = clauses(2, &[&[1], &[2]]);
    let with = |angle: f64| Options { angle: Some(angle), threads: 1, ..Options::default() };
    let quarter = std::f64::consts::FRAC_PI_4;
    let angles = [
        ("t", quarter),
        ("s", 2.0 * quarter),
        ("sdg", -2.0 * quarter),
        ("p(0.3)", 0.3),
        ("p(-3*pi/4)", -3.0 * quarter),
    ];
    for (gate, angle) in angles {
        for erase in [ERASE, AND_UNDONE] {
            let good = circuit(2, &format!("{AND}{gate} $w; {erase}"));
            let verdict = judge_with(&ab, &good, &with(angle));
            assert_eq!(verdict.outcome, Outcome::Equal, "{gate}: {verdict:#?}");
            // On the negation it is the opposite angle and a global phase.
            let negated = circuit(2, &format!("{AND}x $w; {gate} $w; x $w; {erase}"));
            assert_eq!(judge_with(&ab, &negated, &with(-angle)).outcome, Outcome::Equal, "{gate}");
            if gate != "p(0.3)" {
                for wrong in [-angle, angle + quarter] {
                    assert_eq!(judge_with(&ab, &good, &with(wrong)).outcome, Outcome::Differs, "{gate} {wrong}");
                }
                assert_eq!(judge(&ab, &good).outcome, Outcome::Differs, "{gate} is no sign");
            }
        }
    }
    // Two disjoint parts: (a and b) or (a and not b) is a.
    let a = clauses(2, &[&[1]]);
    let parts = circuit(2, &format!("{AND}t $w; {ERASE}x $b; {AND}t $w; {ERASE}x $b;"));
    assert_eq!(judge_with(&a, &parts, &with(quarter)).outcome, Outcome::Equal);
    assert_eq!(judge_with(&ab, &parts, &with(quarter)).outcome, Outcome::Differs);
}

#[test]
fn controlled_oracles_have_the_phase_of_their_control() {
    let ab = clauses(2, &[&[1], &[2]]);
    let (problem, places) = controlled(&ab, &Places::as_given(&ab));
    let judge = |body: &str, angle: Option<f64>| {
        let options = Options { angle, threads: 1, ..Options::default() };
        audit(&problem, &places, &circuit(3, body), &options, &Budget::unlimited()).expect("an oracle").outcome
    };
    // `$c` is the control.
    for erase in [ERASE, AND_UNDONE] {
        assert_eq!(judge(&format!("{AND}cz $w,$c; {erase}"), None), Outcome::Equal);
        assert_eq!(judge(&format!("{AND}z $w; {erase}"), None), Outcome::Differs);
        // The complement is right up to a sign, and the sign is controlled.
        assert_eq!(judge(&format!("{AND}x $w; cz $w,$c; x $w; {erase}"), None), Outcome::Differs);
        assert_eq!(judge(&format!("{AND}x $w; cz $w,$c; x $w; z $c; {erase}"), None), Outcome::Equal);
        let angle = Some(std::f64::consts::FRAC_PI_2);
        assert_eq!(judge(&format!("{AND}cp(pi/2) $w,$c; {erase}"), angle), Outcome::Equal);
        // A controlled rz turns its control by minus half the angle too.
        assert_eq!(judge(&format!("{AND}crz(pi/2) $w,$c; {erase}"), angle), Outcome::Differs);
        assert_eq!(judge(&format!("{AND}crz(pi/2) $w,$c; t $w; {erase}"), angle), Outcome::Equal);
    }
}
