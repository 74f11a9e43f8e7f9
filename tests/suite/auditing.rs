//! Audits of right and wrong circuits: hand-written ones for `(a or b) and not c`, each with a known fault and the words
//! in which it must be reported; and random ones, right and spoilt, against a plain run of their gates.

use std::collections::BTreeSet;

use tallymark::budget::Budget;
use tallymark::circuit::{Circuit, Control, MARK, Op, QubitId, SEARCH, WORK};
use tallymark::id::Id;
use tallymark::judge::audit::{AuditError, How, Options, Outcome, Phases, Verdict, Way, audit};
use tallymark::places::{Places, PlacesError};
use tallymark::problem::{BitId, BitLit, Bits, Problem};
use tallymark::random::SplitMix64;

fn problem() -> Problem {
    let mut problem = Problem::new();
    problem.add_numbered_vars(3);
    for clause in [&[1, 2][..], &[-3]] {
        clause.iter().for_each(|&lit| problem.clauses.push_lit(BitLit::from_dimacs(lit).expect("not 0")));
        problem.clauses.end_clause();
    }
    problem
}

fn judge(circuit: &Circuit) -> Verdict {
    let problem = problem();
    audit(&problem, &Places::as_given(&problem), circuit, &Options::default(), &Budget::unlimited()).expect("an oracle")
}

/// The circuit, its search qubits, its work qubits and its mark.
struct Oracle {
    circuit: Circuit,
    search: Vec<QubitId>,
    work: Vec<QubitId>,
    mark: Option<QubitId>,
}

fn blank(has_mark: bool) -> Oracle {
    let mut circuit = Circuit::new();
    let search = circuit.add_qubits(SEARCH, 3);
    let mark = has_mark.then(|| circuit.add_qubits(MARK, 1)[0]);
    let work = circuit.add_qubits(WORK, 2);
    Oracle { circuit, search, work, mark }
}

impl Oracle {
    /// `work[0] ^= a or b`.
    fn either(&mut self) {
        let [a, b] = [self.search[0], self.search[1]].map(|qubit| Control::new(qubit, false));
        self.circuit.push(Op::X, &[], self.work[0]);
        self.circuit.push(Op::X, &[a, b], self.work[0]);
    }

    /// The controls of the root: `work[0]` and not `c`.
    fn root(&self) -> [Control; 2] {
        [Control::on(self.work[0]), Control::new(self.search[2], false)]
    }

    /// Marks by the sign, or onto `mark`.
    fn mark(&mut self) {
        let [either, c] = self.root();
        match self.mark {
            Some(mark) => self.circuit.push(Op::X, &[either, c], mark),
            None => self.circuit.push(Op::Z, &[c], self.work[0]),
        }
    }

    fn finished(has_mark: bool) -> Self {
        let mut oracle = blank(has_mark);
        oracle.either();
        oracle.mark();
        oracle.either();
        oracle
    }
}

/// Asserts that the circuit differs first on the input with this number, and in these words.
#[track_caller]
fn differs(circuit: &Circuit, input: u128, expected: &str, got: &str) {
    let verdict = judge(circuit);
    let witness = verdict.witness.expect("a witness");
    assert_eq!((verdict.outcome, verdict.how), (Outcome::Differs, How::Exhaustive));
    let found = (witness.bits.to_number(), &*witness.expected, &*witness.got);
    assert_eq!(found, (Some(input), expected, got));
    assert_eq!(verdict.work_clean, !got.contains("work"));
}

#[test]
fn right_circuits_are_equal() {
    for has_mark in [false, true] {
        let verdict = judge(&Oracle::finished(has_mark).circuit);
        assert_eq!((verdict.outcome, verdict.how, verdict.inputs), (Outcome::Equal, How::Symbolic, 8));
        assert_eq!((verdict.work_clean, verdict.phases, verdict.witness), (true, Phases::Equal, None));
    }
}

#[test]
fn a_missing_control_is_seen() {
    let mut oracle = blank(false);
    oracle.either();
    oracle.circuit.push(Op::Z, &[], oracle.work[0]);
    oracle.either();
    differs(&oracle.circuit, 0b101, "not marked", "marked");
}

#[test]
fn a_missing_sign_is_seen() {
    let mut oracle = blank(false);
    oracle.either();
    oracle.either();
    differs(&oracle.circuit, 0b001, "marked", "not marked");
    let mut oracle = blank(true);
    oracle.either();
    oracle.either();
    differs(&oracle.circuit, 0b001, "marked", "not marked");
}

#[test]
fn an_ancilla_left_dirty_is_seen() {
    let mut oracle = blank(true);
    oracle.either();
    oracle.mark();
    differs(&oracle.circuit, 0b001, "marked", "work[0] left at 1");
}

#[test]
fn an_ancilla_cleaned_by_reset_is_seen() {
    let mut oracle = blank(false);
    oracle.either();
    oracle.mark();
    oracle.circuit.push(Op::Reset, &[], oracle.work[0]);
    differs(&oracle.circuit, 0b001, "marked", "work[0] reset at 1");
}

#[test]
fn resets_that_find_the_same_value_on_every_input_are_fine() {
    let mut oracle = blank(false);
    oracle.circuit.push(Op::Reset, &[], oracle.work[0]);
    oracle.either();
    oracle.mark();
    oracle.either();
    oracle.circuit.push(Op::Reset, &[], oracle.work[0]);
    oracle.circuit.push(Op::X, &[], oracle.work[1]);
    oracle.circuit.push(Op::Reset, &[], oracle.work[1]);
    assert_eq!(judge(&oracle.circuit).outcome, Outcome::Equal);
}

#[test]
fn a_changed_search_register_is_seen() {
    let mut oracle = Oracle::finished(true);
    oracle.circuit.push(Op::X, &[Control::on(oracle.search[0])], oracle.search[1]);
    differs(&oracle.circuit, 0b001, "marked", "search[1] changed");
}

#[test]
fn a_sign_on_a_bit_oracle_is_seen() {
    // Right on basis states, wrong in sign.
    let mut oracle = Oracle::finished(true);
    oracle.circuit.push(Op::Z, &[], oracle.search[1]);
    differs(&oracle.circuit, 0b010, "marked", "the sign depends on the input");
    let mut oracle = Oracle::finished(true);
    oracle.circuit.push(Op::Z, &[], oracle.mark.expect("a bit oracle"));
    differs(&oracle.circuit, 0b000, "not marked", "the sign depends on mark");
}

#[test]
fn a_wrong_sign_on_a_phase_oracle_is_seen() {
    let mut oracle = Oracle::finished(false);
    let all: Vec<Control> = oracle.search[..2].iter().map(|&qubit| Control::on(qubit)).collect();
    oracle.circuit.push(Op::Z, &all, oracle.search[2]);
    differs(&oracle.circuit, 0b111, "not marked", "marked");
    let mut oracle = Oracle::finished(false);
    let all: Vec<Control> = oracle.search[..2].iter().map(|&qubit| Control::on(qubit)).collect();
    oracle.circuit.push(Op::S, &all, oracle.search[2]);
    differs(&oracle.circuit, 0b111, "not marked", "turned by 2/4 of pi");
}

#[test]
fn signs_made_of_eighth_turns_count() {
    let mut oracle = blank(false);
    oracle.either();
    let [_, c] = oracle.root();
    // 1 + 6 + 1 + 2 + 2 + 7 + 1 = 20 eighths of a turn, which is 4 beyond two whole turns: a sign.
    for op in [Op::T, Op::Sdg, Op::T, Op::S, Op::S, Op::Tdg, Op::T] {
        oracle.circuit.push(op, &[c], oracle.work[0]);
    }
    oracle.either();
    let verdict = judge(&oracle.circuit);
    assert_eq!((verdict.outcome, verdict.phases), (Outcome::Equal, Phases::Equal));
    oracle.circuit.push(Op::T, &[c], oracle.search[0]);
    differs(&oracle.circuit, 0b001, "marked", "turned by 5/4 of pi");
}

#[test]
fn the_complement_is_a_global_sign_unless_strict() {
    let mut oracle = Oracle::finished(false);
    // -1 on everything: Z on both values of a clean ancilla.
    oracle.circuit.push(Op::X, &[], oracle.work[1]);
    oracle.circuit.push(Op::Z, &[], oracle.work[1]);
    oracle.circuit.push(Op::X, &[], oracle.work[1]);
    let verdict = judge(&oracle.circuit);
    assert_eq!((verdict.outcome, verdict.phases), (Outcome::Equal, Phases::Complement));
    let problem = problem();
    let strict = Options { strict_phase: true, ..Options::default() };
    let places = Places::as_given(&problem);
    let verdict = audit(&problem, &places, &oracle.circuit, &strict, &Budget::unlimited()).expect("an oracle");
    let witness = verdict.witness.expect("a witness");
    assert_eq!((witness.bits.to_number(), &*witness.got), (Some(0), "marked"));
}

#[test]
fn blocks_are_applied_as_often_as_they_say() {
    for (repeat, outcome) in [(1, Outcome::Equal), (2, Outcome::Differs), (3, Outcome::Equal)] {
        let mut oracle = Oracle::finished(true);
        oracle.circuit.repeat_from(0, repeat);
        assert_eq!(judge(&oracle.circuit).outcome, outcome, "{repeat} times");
    }
}

#[test]
fn places_say_which_qubit_carries_which_bit() {
    let problem = problem();
    let mut places = Places::as_given(&problem);
    places.searched.rotate_left(1);
    let mut oracle = blank(true);
    oracle.search.rotate_right(1);
    oracle.either();
    oracle.mark();
    oracle.either();
    let judged = |places: &Places| {
        audit(&problem, places, &oracle.circuit, &Options::default(), &Budget::unlimited()).expect("an oracle")
    };
    assert_eq!(judged(&places).outcome, Outcome::Equal);
    assert_eq!(judged(&Places::as_given(&problem)).outcome, Outcome::Differs);
}

#[test]
fn a_sample_is_undecided_unless_it_finds_a_difference() {
    let problem = problem();
    let known = vec![Bits::from_number(1, 3), Bits::from_number(2, 3)];
    let options = Options { exhaustive_bits: 2, sample: 0, known, proof: false, way: Way::Gates, ..Options::default() };
    let judged = |circuit: &Circuit| {
        audit(&problem, &Places::as_given(&problem), circuit, &options, &Budget::unlimited()).expect("an oracle")
    };
    let verdict = judged(&Oracle::finished(true).circuit);
    // 001 and 010; their neighbours 000, 011, 101, 110.
    assert_eq!((verdict.outcome, verdict.how, verdict.inputs), (Outcome::Undecided, How::Sample, 6));
    let mut oracle = blank(true);
    oracle.either();
    let either = oracle.root()[0];
    oracle.circuit.push(Op::X, &[either], oracle.mark.expect("a bit oracle"));
    oracle.either();
    let verdict = judged(&oracle.circuit);
    let witness = verdict.witness.expect("a witness");
    assert_eq!((verdict.outcome, verdict.how), (Outcome::Differs, How::Sample));
    assert_eq!((witness.bits.to_number(), &*witness.got), (Some(0b101), "marked"));
}

#[test]
fn a_spent_budget_leaves_a_sample() {
    let problem = problem();
    let budget = Budget::unlimited();
    budget.cancel();
    let circuit = Oracle::finished(true).circuit;
    let verdict =
        audit(&problem, &Places::as_given(&problem), &circuit, &Options::default(), &budget).expect("an oracle");
    assert_eq!((verdict.outcome, verdict.how), (Outcome::Undecided, How::Sample));
    assert!(verdict.notes[0].contains("budget"), "{:?}", verdict.notes);
}

#[test]
fn circuits_that_are_no_oracle_of_the_problem_are_refused() {
    let problem = problem();
    let places = Places::as_given(&problem);
    let judged = |circuit: &Circuit, places: &Places| {
        audit(&problem, places, circuit, &Options::default(), &Budget::unlimited()).expect_err("refused")
    };
    let mut oracle = blank(true);
    oracle.circuit.push(Op::Reset, &[], oracle.search[1]);
    assert_eq!(judged(&oracle.circuit, &places), AuditError::ResetOfInput { qubit: "search[1]".to_owned() });
    let mut circuit = Circuit::new();
    circuit.add_qubits(SEARCH, 2);
    let size = AuditError::RegisterSize { name: SEARCH, found: 2, expected: 3 };
    assert_eq!(judged(&circuit, &places), size);
    let mut circuit = Circuit::new();
    circuit.add_qubits(WORK, 3);
    assert_eq!(judged(&circuit, &places), AuditError::NoRegister(SEARCH));
    circuit.add_qubits("spare", 1);
    assert_eq!(judged(&circuit, &places), AuditError::UnknownRegister("spare".to_owned()));
    let mut other = places.clone();
    other.searched.pop();
    let fault = AuditError::Places(PlacesError::OtherProblem { found: 2, expected: 3 });
    assert_eq!(judged(&circuit, &other), fault);
}

/// A problem of 12 bits, so that a block of lanes is not all of it: random clauses of three.
fn random_clauses(random: &mut SplitMix64) -> Problem {
    let mut problem = Problem::new();
    problem.add_numbered_vars(12);
    for _ in 0..14 + random.below(14) {
        for _ in 0..3 {
            let bit = BitId::new(random.below(12) as usize);
            problem.clauses.push_lit(BitLit::new(bit, random.coin()));
        }
        problem.clauses.end_clause();
    }
    problem
}

type GateList = Vec<(Op, Vec<Control>, QubitId)>;

/// Every clause into an ancilla, one wide mark, and everything undone.
fn clause_oracle(problem: &Problem, has_mark: bool) -> (Circuit, GateList) {
    let mut circuit = Circuit::new();
    let search = circuit.add_qubits(SEARCH, problem.bit_count());
    let mark = has_mark.then(|| circuit.add_qubits(MARK, 1)[0]);
    let work = circuit.add_qubits(WORK, problem.clauses.len());
    let mut gates: GateList = Vec::new();
    for (clause, &value) in problem.clauses.iter().zip(&work) {
        // The ancilla is 1 where no literal holds; a control that stands twice is given once.
        let mut none: Vec<Control> =
            clause.iter().map(|lit| Control::new(search[lit.bit().index()], lit.is_negated())).collect();
        none.sort();
        none.dedup();
        gates.push((Op::X, none, value));
    }
    let mirror: GateList = gates.iter().rev().cloned().collect();
    let mut all: Vec<Control> = work.iter().map(|&qubit| Control::new(qubit, false)).collect();
    match mark {
        Some(mark) => gates.push((Op::X, all, mark)),
        None => {
            // A sign where the last ancilla is 0 needs that ancilla turned.
            all.pop();
            let last = work[work.len() - 1];
            gates.extend([(Op::X, vec![], last), (Op::Z, all, last), (Op::X, vec![], last)]);
        }
    }
    gates.extend(mirror);
    (circuit, gates)
}

/// Changes one gate: drops it, turns a control, adds a control, moves its target, or puts a sign in its place.
fn spoil(gates: &mut GateList, qubits: usize, random: &mut SplitMix64) {
    let at = random.below(gates.len() as u64) as usize;
    let other = QubitId::new(random.below(qubits as u64) as usize);
    let is_free =
        |gate: &(Op, Vec<Control>, QubitId)| gate.2 != other && gate.1.iter().all(|control| control.qubit() != other);
    match random.below(5) {
        0 => drop(gates.remove(at)),
        1 if !gates[at].1.is_empty() => gates[at].1[0] = !gates[at].1[0],
        2 if is_free(&gates[at]) => gates[at].1.push(Control::new(other, random.coin())),
        3 if is_free(&gates[at]) => gates[at].2 = other,
        _ => gates.insert(at, ([Op::Z, Op::S, Op::T, Op::Sdg, Op::Tdg][random.below(5) as usize], vec![], other)),
    }
}

/// One basis state through the gates: the state and the phase in eighths of a turn. Written again here on purpose.
fn apply(gates: &GateList, mut state: u64) -> (u64, u32) {
    let mut eighths = 0;
    for (op, controls, target) in gates {
        let acts = controls.iter().all(|control| (state >> control.qubit().index() & 1 == 1) != control.is_negated());
        let target = target.index();
        match (acts, op) {
            (false, _) => {}
            (true, Op::X) => state ^= 1 << target,
            (true, op) => {
                let turn = match op {
                    Op::T => 1,
                    Op::S => 2,
                    Op::Z => 4,
                    Op::Sdg => 6,
                    _ => 7,
                };
                eighths = (eighths + turn * (state >> target & 1) as u32) % 8;
            }
        }
    }
    (state, eighths)
}

/// Whether the gates are the oracle, and else the first input on which anything but the phase is wrong.
fn by_hand(problem: &Problem, gates: &GateList, has_mark: bool) -> (bool, Option<u128>) {
    let bits = problem.bit_count();
    let (mut fault, mut phases) = (None, BTreeSet::new());
    for x in 0..1u64 << bits {
        let holds = problem.holds(&Bits::from_number(x.into(), bits));
        for y in 0..=u64::from(has_mark) {
            let begin = x | y << bits;
            let (end, eighths) = apply(gates, begin);
            let (flip, owed) = if has_mark { (u64::from(holds) << bits, 0) } else { (0, 4 * u32::from(holds)) };
            phases.insert((eighths + 8 - owed) % 8);
            if end != begin ^ flip {
                fault = fault.or(Some(x.into()));
            }
        }
    }
    (fault.is_none() && phases.len() == 1, fault)
}

/// Right oracles and spoilt ones, more inputs than a block has lanes, against a run of the gates written here.
#[test]
fn spoilt_circuits_are_judged_as_a_plain_run_judges_them() {
    let mut random = SplitMix64::new(20);
    let (mut right, mut wrong) = (0, 0);
    for round in 0..60 {
        let problem = random_clauses(&mut random);
        let has_mark = random.coin();
        let (mut circuit, mut gates) = clause_oracle(&problem, has_mark);
        if round % 5 != 0 {
            spoil(&mut gates, circuit.qubit_count(), &mut random);
        }
        gates.iter().for_each(|(op, controls, target)| circuit.push(*op, controls, *target));
        let options = Options { threads: 1 + round % 3, ..Options::default() };
        let places = Places::as_given(&problem);
        let verdict = audit(&problem, &places, &circuit, &options, &Budget::unlimited()).expect("an oracle");
        let (is_right, fault) = by_hand(&problem, &gates, has_mark);
        let expected = if is_right { Outcome::Equal } else { Outcome::Differs };
        assert_eq!(verdict.outcome, expected, "round {round}: {:?}", verdict.witness);
        // The witness has few ones: never more than the first input on which something is wrong.
        let found = verdict.witness.and_then(|witness| witness.bits.to_number());
        let ones = |input: Option<u128>| input.map(u128::count_ones);
        assert!(fault.is_none() || found.is_some(), "round {round}");
        assert!(fault.is_none() || ones(found) <= ones(fault), "round {round}: {found:?} after {fault:?}");
        if is_right { right += 1 } else { wrong += 1 }
    }
    assert!(right >= 12 && wrong >= 30, "{right} right, {wrong} wrong");
}
