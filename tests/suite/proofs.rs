//! Audits by proof against audits of every input, and the checker of DRAT proofs against a second one.

use tallymark::budget::Budget;
use tallymark::circuit::{Circuit, Level, Mark};
use tallymark::judge::audit::{How, Options, Outcome, Verdict, Way, audit};
use tallymark::make::{lower, network};
use tallymark::places::Places;
use tallymark::problem::{BitLit, Problem};
use tallymark::random::SplitMix64;
use tallymark::sat::check::{Refused, check};
use tallymark::sat::drat::{Proof, Step};
use tallymark::sat::refute::{Refutation, refute_here};
use tallymark::sat::{Formula, Lit};

use crate::suite::random_problem::random_problem;

/// The example of the format's documentation, quoted with N. Wetzler, M. Heule, W. Hunt, SAT 2014.
const EXAMPLE: [&[i64]; 8] =
    [&[1, 2, -3], &[-1, -2, 3], &[2, 3, -4], &[-2, -3, 4], &[-1, -3, -4], &[1, 3, 4], &[-1, 2, 4], &[1, -2, -4]];

fn formula<'a>(clauses: impl IntoIterator<Item = &'a [i64]>) -> Formula {
    let mut formula = Formula::new(0);
    clauses.into_iter().for_each(|clause| formula.push(clause.iter().map(|&lit| Lit::from_dimacs(lit))));
    formula
}

fn is_accepted(formula: &Formula, proof: &Proof) -> bool {
    check(formula, proof, &Budget::unlimited()).is_ok()
}

/// A second checker, from the format's definition: every added clause must follow by unit propagation.
fn slow_check(formula: &Formula, proof: &Proof) -> bool {
    let mut clauses: Vec<Vec<i64>> =
        formula.iter().map(|clause| clause.iter().map(|lit| lit.to_dimacs()).collect()).collect();
    for step in proof.steps() {
        let numbers = |clause: &[Lit]| clause.iter().map(|lit| lit.to_dimacs()).collect::<Vec<i64>>();
        match step {
            Step::Add(clause) => {
                let clause = numbers(clause);
                if !conflicts(&clauses, clause.iter().map(|lit| -lit).collect()) {
                    return false;
                }
                if clause.is_empty() {
                    return true;
                }
                clauses.push(clause);
            }
            // Deletions may be ignored where clauses are only asked to follow.
            Step::Delete(_) => {}
        }
    }
    false
}

fn conflicts(clauses: &[Vec<i64>], mut holds: Vec<i64>) -> bool {
    loop {
        let before = holds.len();
        for clause in clauses {
            if clause.iter().any(|lit| holds.contains(lit)) {
                continue;
            }
            let mut open: Vec<i64> = clause.iter().copied().filter(|lit| !holds.contains(&-lit)).collect();
            open.dedup();
            match open[..] {
                [] => return true,
                [one] => holds.push(one),
                _ => {}
            }
        }
        if holds.len() == before {
            return false;
        }
    }
}

/// Pigeons that do not fit: one more than there are holes.
fn pigeons(holes: i64) -> Formula {
    let sits = |pigeon: i64, hole: i64| pigeon * holes + hole + 1;
    let mut clauses: Vec<Vec<i64>> = Vec::new();
    for pigeon in 0..=holes {
        clauses.push((0..holes).map(|hole| sits(pigeon, hole)).collect());
        for other in 0..pigeon {
            clauses.extend((0..holes).map(|hole| vec![-sits(pigeon, hole), -sits(other, hole)]));
        }
    }
    formula(clauses.iter().map(Vec::as_slice))
}

/// An odd cycle of variables, each different from the next.
fn odd_cycle(len: i64) -> Formula {
    let mut clauses: Vec<Vec<i64>> = Vec::new();
    for at in 0..len {
        let (a, b) = (at + 1, (at + 1) % len + 1);
        clauses.extend([vec![a, b], vec![-a, -b]]);
    }
    formula(clauses.iter().map(Vec::as_slice))
}

/// Proofs of families without models (pigeonhole: A. Haken, 1985; odd cycles: two colours are not enough) are accepted
/// by both checkers; without their inner steps neither accepts them.
#[test]
fn proofs_of_known_families_are_accepted_by_two_checkers() {
    for formula in [pigeons(2), pigeons(3), pigeons(4), odd_cycle(7), formula(EXAMPLE)] {
        let Refutation::Proof(proof) = refute_here(&formula) else { panic!("there is no model") };
        assert!(is_accepted(&formula, &proof));
        assert!(slow_check(&formula, &proof));
        assert!(is_accepted(&formula, &Proof::from_bytes(&proof.to_bytes()).expect("written here")));
        let mut bare = Proof::new();
        bare.add([]);
        assert_eq!(check(&formula, &bare, &Budget::unlimited()), Err(Refused::Step(1)));
        assert!(!slow_check(&formula, &bare));
    }
}

#[test]
fn a_proof_with_a_step_dropped_or_changed_is_refused() {
    let lines = ["-1 0", "d -1 2 4 0", "2 0", "0"];
    let judged =
        |lines: &[&str]| is_accepted(&formula(EXAMPLE), &Proof::from_text(&lines.join("\n")).expect("a proof"));
    assert!(judged(&lines));
    assert!(!judged(&lines[1..]));
    assert!(!judged(&[lines[0], lines[1], lines[3]]));
    // A model stays a model: nothing refutes a formula that has one.
    assert!(!is_accepted(
        &formula(EXAMPLE[1..].iter().copied()),
        &Proof::from_text(&lines.join("\n")).expect("a proof")
    ));
}

fn oracle(problem: &Problem, level: Level, mark: Mark) -> Option<Circuit> {
    let network = network::build(problem, &Places::as_given(problem));
    lower::lower(&network, &lower::Options { level, mark }, &Budget::unlimited()).ok()
}

fn judge(problem: &Problem, circuit: &Circuit, by_proof: bool) -> Verdict {
    let options = match by_proof {
        true => Options { exhaustive_bits: 0, sample: 0, way: Way::Gates, ..Options::default() },
        false => Options { threads: 1, ..Options::default() },
    };
    audit(problem, &Places::as_given(problem), circuit, &options, &Budget::unlimited()).expect("an oracle")
}

/// The circuit without one of its gates.
fn without(circuit: &Circuit, dropped: usize) -> Circuit {
    let mut other = Circuit::new();
    circuit.qubits.iter().for_each(|register| drop(other.add_qubits(&register.name, register.len as usize)));
    for (_, gate) in circuit.gates().iter().enumerate().filter(|&(at, _)| at != dropped) {
        other.push(gate.op(), circuit.controls(gate), gate.target());
    }
    other
}

/// On random problems the proof says what trying every input says, of right circuits and of spoilt ones.
#[test]
fn a_proof_agrees_with_trying_every_input() {
    let mut random = SplitMix64::new(7);
    let (mut equal, mut differ) = (0, 0);
    for seed in 0..90 {
        let problem = random_problem(seed);
        let level = if random.coin() { Level::Toffoli } else { Level::Wide };
        let mark = if random.coin() { Mark::Phase } else { Mark::Bit };
        let Some(right) = oracle(&problem, level, mark) else { continue };
        let spoilt = without(&right, random.below(right.gates().len() as u64) as usize);
        for circuit in [right, spoilt] {
            let (all, proof) = (judge(&problem, &circuit, false), judge(&problem, &circuit, true));
            assert_eq!(proof.outcome, all.outcome, "seed {seed}: {:?} {:?}", proof.notes, all.witness);
            match proof.outcome {
                Outcome::Equal => {
                    equal += 1;
                    let certificate = proof.certificate.expect("a proof");
                    assert!(is_accepted(&certificate.formula, &certificate.proof));
                }
                _ => differ += 1,
            }
        }
    }
    assert!(equal > 30 && differ > 20, "{equal} equal, {differ} differ");
}

/// Random clauses of three that a drawn assignment satisfies.
fn random_clauses(vars: u64, clauses: usize, seed: u64) -> Vec<[i64; 3]> {
    let mut random = SplitMix64::new(seed);
    let hidden: Vec<bool> = (0..vars).map(|_| random.coin()).collect();
    let mut found = Vec::new();
    while found.len() < clauses {
        let clause = [(); 3].map(|()| (random.below(vars) as i64 + 1) * if random.coin() { 1 } else { -1 });
        if clause.iter().any(|&lit| hidden[lit.unsigned_abs() as usize - 1] == (lit > 0)) {
            found.push(clause);
        }
    }
    found
}

fn problem_of(vars: u64, clauses: &[[i64; 3]]) -> Problem {
    let mut problem = Problem::new();
    problem.add_numbered_vars(vars as usize);
    for clause in clauses {
        clause.iter().for_each(|&lit| problem.clauses.push_lit(BitLit::from_dimacs(lit).expect("not 0")));
        problem.clauses.end_clause();
    }
    problem
}

#[test]
fn large_random_clauses_are_decided() {
    let mut clauses = random_clauses(300, 1000, 5);
    let problem = problem_of(300, &clauses);
    for mark in [Mark::Phase, Mark::Bit] {
        let circuit = oracle(&problem, Level::Toffoli, mark).expect("an oracle");
        let verdict = judge(&problem, &circuit, true);
        assert_eq!((verdict.outcome, verdict.how), (Outcome::Equal, How::Proof), "{:?}", verdict.notes);
        assert_eq!(verdict.inputs, u128::MAX);
    }
    clauses[500][1] *= -1;
    let other = problem_of(300, &clauses);
    let circuit = oracle(&other, Level::Toffoli, Mark::Phase).expect("an oracle");
    let verdict = judge(&problem, &circuit, true);
    assert_eq!((verdict.outcome, verdict.how), (Outcome::Differs, How::Proof), "{:?}", verdict.notes);
    let bits = verdict.witness.expect("a witness").bits;
    assert_ne!(problem.holds(&bits), other.holds(&bits));
}
