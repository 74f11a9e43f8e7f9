//! The three ways of judging a circuit that keeps basis states: by structure, by distinct nodes, by every gate. They must
//! agree with one another and with a plain run of the gates written here, on right circuits and on spoilt ones.

use tallymark::budget::Budget;
use tallymark::circuit::{Circuit, Control, Level, MARK, Mark, Op, QubitId, SEARCH, WORK};
use tallymark::id::Id;
use tallymark::judge::audit::{How, Options, Outcome, Phases, Verdict, Way, audit, distinct_nodes};
use tallymark::make::lower;
use tallymark::make::network::build;
use tallymark::pipeline::{self, Settings};
use tallymark::places::Places;
use tallymark::problem::{BitId, BitLit, Bits, Problem};
use tallymark::random::SplitMix64;

use super::random_problem::random_problem;

type GateList = Vec<(Op, Vec<Control>, QubitId)>;

fn clauses(bits: usize, clauses: &[Vec<i64>]) -> Problem {
    let mut problem = Problem::new();
    problem.add_numbered_vars(bits);
    for clause in clauses {
        for &lit in clause {
            let bit = BitId::new(lit.unsigned_abs() as usize - 1);
            problem.clauses.push_lit(BitLit::new(bit, lit > 0));
        }
        problem.clauses.end_clause();
    }
    problem
}

/// Random clauses of three different variables.
fn random_3_sat(bits: usize, count: usize, random: &mut SplitMix64) -> Problem {
    let mut list = Vec::new();
    for _ in 0..count {
        let mut clause: Vec<i64> = Vec::new();
        while clause.len() < 3 {
            let var = random.below(bits as u64) as i64 + 1;
            if clause.iter().all(|lit| lit.abs() != var) {
                clause.push(if random.coin() { var } else { -var });
            }
        }
        list.push(clause);
    }
    clauses(bits, &list)
}

fn judge_with(problem: &Problem, circuit: &Circuit, options: &Options) -> Verdict {
    audit(problem, &Places::as_given(problem), circuit, options, &Budget::unlimited()).expect("an oracle")
}

fn judge(problem: &Problem, circuit: &Circuit, way: Way) -> Verdict {
    judge_with(problem, circuit, &Options { way, ..Options::default() })
}

/// Judges in all ways, asserts that they agree, and gives the verdict of the best one.
#[track_caller]
fn judge_all(problem: &Problem, circuit: &Circuit) -> Verdict {
    let [best, nodes, gates] = [Way::Best, Way::Nodes, Way::Gates].map(|way| judge(problem, circuit, way));
    for other in [&nodes, &gates] {
        assert_eq!((best.outcome, best.phases, best.work_clean), (other.outcome, other.phases, other.work_clean));
        assert_eq!(best.witness, other.witness);
        assert_eq!(other.how, How::Exhaustive);
    }
    best
}

/// An oracle of clauses, ready to be spoilt: its registers, and its gates as a list.
struct Oracle {
    circuit: Circuit,
    gates: GateList,
}

impl Oracle {
    /// Two controls a gate at most: a clause by a scratch qubit, the conjunction in a chain, the mark, the mirror.
    fn in_pairs(problem: &Problem, mark: Mark) -> Self {
        let count = problem.clauses.len();
        let mut circuit = Circuit::new();
        let search = circuit.add_qubits(SEARCH, problem.bit_count());
        let target = (mark == Mark::Bit).then(|| circuit.add_qubits(MARK, 1)[0]);
        let work = circuit.add_qubits(WORK, 2 * count + 1);
        let (values, chain) = (&work[1..=count], &work[count + 1..]);
        let mut forward: GateList = Vec::new();
        for (clause, &value) in problem.clauses.iter().zip(values) {
            let [a, b, c] = [0, 1, 2].map(|at| Control::new(search[clause[at].bit().index()], clause[at].is_negated()));
            forward.push((Op::X, vec![a, b], work[0]));
            forward.push((Op::X, vec![Control::on(work[0]), c], value));
            forward.push((Op::X, vec![a, b], work[0]));
            forward.push((Op::X, vec![], value));
        }
        let mut last = values[0];
        for (&value, &link) in values[1..].iter().zip(chain) {
            forward.push((Op::X, vec![Control::on(last), Control::on(value)], link));
            last = link;
        }
        let mut gates = forward.clone();
        gates.push(match target {
            Some(target) => (Op::X, vec![Control::on(last)], target),
            None => (Op::Z, vec![], last),
        });
        gates.extend(forward.into_iter().rev());
        Self { circuit, gates }
    }

    fn circuit(&self) -> Circuit {
        let mut circuit = self.circuit.clone();
        self.gates.iter().for_each(|(op, controls, target)| circuit.push(*op, controls, *target));
        circuit
    }

    /// Whether a plain run of the gates on every input finds the oracle of the problem, up to a global phase.
    fn is_right(&self, problem: &Problem, mark: Mark) -> bool {
        let bits = problem.bit_count();
        let mut global = None;
        for x in 0..1u128 << bits {
            let holds = problem.holds(&Bits::from_number(x, bits));
            for y in 0..if mark == Mark::Bit { 2 } else { 1 } {
                let begin = x | y << bits;
                let (end, eighths) = apply(&self.gates, begin);
                let (flip, owed) = if mark == Mark::Bit { (holds, 0) } else { (false, 4 * u32::from(holds)) };
                let rest = (eighths + 8 - owed) % 8;
                if end != begin ^ u128::from(flip) << bits || *global.get_or_insert(rest) != rest {
                    return false;
                }
            }
        }
        true
    }
}

fn apply(gates: &GateList, mut state: u128) -> (u128, u32) {
    let mut eighths = 0;
    for (op, controls, target) in gates {
        let acts = controls.iter().all(|control| (state >> control.qubit().index() & 1 == 1) != control.is_negated());
        let turn = match op {
            Op::X if acts => {
                state ^= 1 << target.index();
                0
            }
            Op::T => 1,
            Op::S => 2,
            Op::Z => 4,
            Op::Sdg => 6,
            Op::Tdg => 7,
            _ => 0,
        };
        if acts && state >> target.index() & 1 == 1 {
            eighths += turn;
        }
    }
    (state, eighths % 8)
}

/// The kinds of single faults, by name.
const FAULTS: [&str; 8] =
    ["dropped", "doubled", "control moved", "control flipped", "control lost", "swapped", "turned", "moved"];

/// Makes one fault of a kind somewhere; false where the place drawn does not allow it.
fn spoil(gates: &mut GateList, kind: &str, qubits: usize, random: &mut SplitMix64) -> bool {
    let at = random.below(gates.len() as u64) as usize;
    let other = QubitId::new(random.below(qubits as u64) as usize);
    let gate = gates[at].clone();
    let is_free = gate.2 != other && gate.1.iter().all(|control| control.qubit() != other);
    let has_controls = !gate.1.is_empty();
    match kind {
        "dropped" => drop(gates.remove(at)),
        "doubled" => gates.insert(at, gate),
        "control moved" if is_free && has_controls => gates[at].1[0] = Control::new(other, !gate.1[0].is_negated()),
        "control flipped" if has_controls => gates[at].1[0] = !gate.1[0],
        "control lost" if has_controls => drop(gates[at].1.pop()),
        "swapped" if at + 1 < gates.len() => gates.swap(at, at + 1),
        "turned" => gates.insert(at, ([Op::T, Op::Tdg, Op::S, Op::Sdg, Op::Z][at % 5], gate.1, gate.2)),
        "moved" if is_free => gates[at].2 = other,
        _ => return false,
    }
    true
}

#[test]
fn every_kind_of_fault_is_judged_alike_by_all_ways() {
    let mut random = SplitMix64::new(5);
    for kind in FAULTS {
        let (mut harmful, mut harmless, mut tries) = (0, 0, 0);
        while harmful < 6 {
            tries += 1;
            assert!(tries < 100, "{kind}: {harmless} harmless");
            let mark = if tries % 2 == 0 { Mark::Phase } else { Mark::Bit };
            let problem = random_3_sat(11, 12, &mut random);
            let mut oracle = Oracle::in_pairs(&problem, mark);
            assert!(oracle.is_right(&problem, mark));
            let qubits = oracle.circuit.qubit_count();
            if !spoil(&mut oracle.gates, kind, qubits, &mut random) {
                continue;
            }
            let is_right = oracle.is_right(&problem, mark);
            let outcome = judge_all(&problem, &oracle.circuit()).outcome;
            assert_eq!(outcome, if is_right { Outcome::Equal } else { Outcome::Differs }, "{kind}");
            if is_right { harmless += 1 } else { harmful += 1 }
        }
    }
}

#[test]
fn right_oracles_of_clauses_are_equal_by_structure_however_large() {
    let mut random = SplitMix64::new(6);
    for (bits, count) in [(4, 3), (12, 30), (40, 160), (500, 2000)] {
        for mark in [Mark::Phase, Mark::Bit] {
            let problem = random_3_sat(bits, count, &mut random);
            let verdict = judge(&problem, &Oracle::in_pairs(&problem, mark).circuit(), Way::Best);
            assert_eq!((verdict.outcome, verdict.how), (Outcome::Equal, How::Symbolic), "{bits} bits");
            assert_eq!(verdict.inputs, 1u128.checked_shl(bits as u32).unwrap_or(u128::MAX));
            assert!(verdict.work_clean && verdict.witness.is_none() && verdict.notes.is_empty());
        }
    }
}

/// Circuits of the maker for random problems, at the levels that keep basis states.
#[test]
fn the_makers_circuits_are_judged_alike_by_all_ways() {
    let mut tried = 0;
    for seed in 0..60 {
        let problem = random_problem(seed);
        let (level, mark) = match seed % 4 {
            0 => (Level::Wide, Mark::Phase),
            1 => (Level::Toffoli, Mark::Phase),
            2 => (Level::Wide, Mark::Bit),
            _ => (Level::Toffoli, Mark::Bit),
        };
        let settings = Settings { level, mark, seed, threads: 1 };
        let places = Places::as_given(&problem);
        if let Ok(product) = pipeline::oracle(&problem, &places, settings, &Budget::unlimited()) {
            assert_eq!(judge_all(&problem, &product.circuit).outcome, Outcome::Equal, "seed {seed}");
            tried += 1;
        }
    }
    assert!(tried > 20, "{tried} circuits");
}

/// `abc` computed as `(ab)c` and taken away as `a(bc)`: clean on every input, but not by structure.
#[test]
fn a_work_qubit_that_is_clean_only_in_effect_is_judged_gate_by_gate() {
    let problem = clauses(3, &[vec![1], vec![2], vec![3]]);
    for (is_right, outcome) in [(true, Outcome::Equal), (false, Outcome::Differs)] {
        let mut circuit = Circuit::new();
        let search = circuit.add_qubits(SEARCH, 3);
        let work = circuit.add_qubits(WORK, 2);
        let [a, b, c] = [0, 1, 2].map(|at| Control::on(search[at]));
        let mut conjunction = |one, two, three| {
            circuit.push(Op::X, &[one, two], work[0]);
            circuit.push(Op::X, &[Control::on(work[0]), three], work[1]);
            circuit.push(Op::X, &[one, two], work[0]);
        };
        conjunction(a, b, c);
        conjunction(b, c, if is_right { a } else { !a });
        circuit.push(Op::Z, &[a, b], search[2]);
        let verdict = judge_all(&problem, &circuit);
        assert_eq!((verdict.outcome, verdict.how, verdict.work_clean), (outcome, How::Exhaustive, is_right));
        let note = verdict.notes.last().expect("a note");
        assert!(note.contains("work[1]") && note.contains("one by one"), "{note}");
        assert_eq!(distinct_nodes(&problem, &Places::as_given(&problem), &circuit), Ok(None));
    }
}

/// A conjunction of four by a borrowed search qubit (A. Barenco et al., "Elementary gates for quantum computation", 1995,
/// Lemma 7.3, from memory).
#[test]
fn borrowed_qubits_are_read_by_multiplying_out() {
    let problem = clauses(5, &[vec![1], vec![2], vec![3]]);
    let mut circuit = Circuit::new();
    let search = circuit.add_qubits(SEARCH, 5);
    let mark = circuit.add_qubits(MARK, 1)[0];
    for _ in 0..2 {
        circuit.push(Op::X, &[Control::on(search[0]), Control::on(search[1])], search[4]);
        circuit.push(Op::X, &[Control::on(search[4]), Control::on(search[2])], mark);
    }
    let verdict = judge_all(&problem, &circuit);
    assert_eq!((verdict.outcome, verdict.how), (Outcome::Equal, How::Symbolic));
    // The plain reading closes as well, on (ab xor e) c xor ec: two conjunctions and an exclusive or in one, and one more.
    assert_eq!(distinct_nodes(&problem, &Places::as_given(&problem), &circuit), Ok(Some(5)));
    // Without the last gate the borrowed qubit is taken back, but its value shows in the mark.
    circuit.push(Op::X, &[Control::on(search[4]), Control::on(search[2])], mark);
    let verdict = judge_all(&problem, &circuit);
    assert_eq!((verdict.outcome, verdict.how), (Outcome::Differs, How::Exhaustive));
}

/// The doubly controlled sign from seven eighth turns on exclusive ors (the phase part of the seven-T Toffoli gate: M. Nielsen
/// and I. Chuang, "Quantum Computation and Quantum Information", 2000, Figure 4.9, from memory).
fn sign_of_three(wrong: Option<usize>) -> Circuit {
    let mut circuit = Circuit::new();
    let search = circuit.add_qubits(SEARCH, 3);
    let work = circuit.add_qubits(WORK, 1)[0];
    let sums = [(0b001, 1), (0b010, 1), (0b100, 1), (0b011, 7), (0b101, 7), (0b110, 7), (0b111, 1)];
    for (at, (of, eighths)) in sums.into_iter().enumerate() {
        let op = if (eighths == 1) != (wrong == Some(at)) { Op::T } else { Op::Tdg };
        let members = || (0..3).filter(|bit| of >> bit & 1 == 1);
        members().for_each(|bit| circuit.push(Op::X, &[Control::on(search[bit])], work));
        circuit.push(op, &[], work);
        members().for_each(|bit| circuit.push(Op::X, &[Control::on(search[bit])], work));
    }
    circuit
}

#[test]
fn eighth_turns_on_exclusive_ors_are_added_up() {
    let problem = clauses(3, &[vec![1], vec![2], vec![3]]);
    let verdict = judge_all(&problem, &sign_of_three(None));
    assert_eq!((verdict.outcome, verdict.how, verdict.phases), (Outcome::Equal, How::Symbolic, Phases::Equal));
    for wrong in 0..7 {
        assert_eq!(judge_all(&problem, &sign_of_three(Some(wrong))).outcome, Outcome::Differs, "turn {wrong}");
    }
}

/// Every global phase, given by gates on both values of a clean work qubit.
#[test]
fn global_phases_are_free_unless_strict() {
    let problem = clauses(3, &[vec![1, 2], vec![-3]]);
    for mark in [Mark::Phase, Mark::Bit] {
        for eighths in 0..8 {
            let settings = Settings { level: Level::Toffoli, mark, seed: 1, threads: 1 };
            let places = Places::as_given(&problem);
            let product = pipeline::oracle(&problem, &places, settings, &Budget::unlimited()).expect("a circuit");
            let mut circuit = product.circuit;
            let work = circuit.register(WORK)[0];
            circuit.push(Op::X, &[], work);
            (0..eighths).for_each(|_| circuit.push(Op::T, &[], work));
            circuit.push(Op::X, &[], work);
            let verdict = judge_all(&problem, &circuit);
            let phases = if eighths == 4 && mark == Mark::Phase { Phases::Complement } else { Phases::Equal };
            assert_eq!((verdict.outcome, verdict.how, verdict.phases), (Outcome::Equal, How::Symbolic, phases));
            for way in [Way::Best, Way::Nodes, Way::Gates] {
                let strict = Options { strict_phase: true, way, ..Options::default() };
                let expected = if eighths == 0 { Outcome::Equal } else { Outcome::Differs };
                assert_eq!(judge_with(&problem, &circuit, &strict).outcome, expected, "{eighths} eighths, {way:?}");
            }
        }
    }
}

/// Clauses of one literal, which a maker takes out of others, and clauses that follow.
#[test]
fn required_literals_do_not_hide_the_structure() {
    let problem = clauses(6, &[vec![2], vec![-2, 3], vec![-3, 4, 5], vec![-1, 2, 6], vec![-6, -2], vec![1, -4, 6]]);
    for level in [Level::Wide, Level::Toffoli] {
        let settings = Settings { level, mark: Mark::Phase, seed: 1, threads: 1 };
        let places = Places::as_given(&problem);
        // Clause by clause: the passes of the maker may choose another structure, on which only the outcome is the same.
        let plain =
            lower::lower(&build(&problem, &places), &lower::Options { level, mark: Mark::Phase }, &Budget::unlimited());
        let verdict = judge_all(&problem, &plain.expect("a circuit"));
        assert_eq!((verdict.outcome, verdict.how), (Outcome::Equal, How::Symbolic));
        let product = pipeline::oracle(&problem, &places, settings, &Budget::unlimited()).expect("a circuit");
        assert_eq!(judge_all(&problem, &product.circuit).outcome, Outcome::Equal);
    }
    let mut other = problem.clone();
    other.clauses.push(&[BitLit::new(BitId::new(4), true)]);
    let settings = Settings { level: Level::Wide, mark: Mark::Phase, seed: 1, threads: 1 };
    let product = pipeline::oracle(&other, &Places::as_given(&other), settings, &Budget::unlimited());
    assert_eq!(judge_all(&problem, &product.expect("a circuit").circuit).outcome, Outcome::Differs);
}

#[test]
fn repeated_blocks_are_written_out() {
    let mut random = SplitMix64::new(9);
    let problem = random_3_sat(12, 20, &mut random);
    let oracle = Oracle::in_pairs(&problem, Mark::Bit);
    for (repeat, outcome) in [(1, Outcome::Equal), (2, Outcome::Differs), (5, Outcome::Equal)] {
        let mut circuit = oracle.circuit();
        circuit.repeat_from(0, repeat);
        assert_eq!(judge_all(&problem, &circuit).outcome, outcome, "{repeat} times");
    }
}

/// Places that are not in order, and inputs beyond the 2^26 that are tried whatever it takes.
#[test]
fn what_is_affordable_is_tried_beyond_the_limit() {
    let problem = clauses(28, &[vec![1, 2, 3], vec![-28, 27], vec![5, -9, 20], vec![14, -1]]);
    let mut places = Places::as_given(&problem);
    places.searched.reverse();
    let settings = Settings { level: Level::Toffoli, mark: Mark::Phase, seed: 1, threads: 1 };
    let product = pipeline::oracle(&problem, &places, settings, &Budget::unlimited()).expect("a circuit");
    let judged = |circuit: &Circuit, exhaustive_work| {
        let options = Options { way: Way::Nodes, exhaustive_work, sample: 0, proof: false, ..Options::default() };
        audit(&problem, &places, circuit, &options, &Budget::unlimited()).expect("an oracle")
    };
    let verdict = judged(&product.circuit, Options::default().exhaustive_work);
    assert_eq!((verdict.outcome, verdict.how, verdict.inputs), (Outcome::Equal, How::Exhaustive, 1 << 28));
    assert_eq!(judged(&product.circuit, 0).outcome, Outcome::Undecided);
    // A sign on one input in 2^27, the last ones in the order of trying.
    let mut circuit = product.circuit;
    let search = circuit.register(SEARCH);
    let controls: Vec<Control> = search[1..27].iter().map(|&qubit| Control::on(qubit)).collect();
    circuit.push(Op::Z, &controls, search[27]);
    let verdict = judged(&circuit, Options::default().exhaustive_work);
    let witness = verdict.witness.expect("a witness");
    assert_eq!((verdict.outcome, verdict.how), (Outcome::Differs, How::Exhaustive));
    assert_eq!(witness.bits.to_number(), Some((1 << 27) - 1), "all bits but the one that search[0] carries");
}
