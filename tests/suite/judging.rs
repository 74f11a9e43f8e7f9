//! The judge's readings against the reference evaluator, and audits of right and wrong circuits.

use std::collections::BTreeSet;

use proptest::prelude::*;
use tallymark::budget::Budget;
use tallymark::id::Id;
use tallymark::judge::clauses::{Cnf, encode};
use tallymark::judge::rows;
use tallymark::problem::{BitId, BitLit, Bits, Clauses, Problem};
use tallymark::random::SplitMix64;
use varisat::{ExtendFormula, Lit, Solver};

use super::random_problem::random_problem;

/// The solutions by the reference evaluator, as numbers.
fn solutions(problem: &Problem) -> Vec<u128> {
    let bits = problem.bit_count();
    (0..1u128 << bits).filter(|&number| problem.holds(&Bits::from_number(number, bits))).collect()
}

/// Unit propagation from the bits: the values of all variables, or `None` on a conflict. Panics where a variable stays
/// open, which two-sided definitions rule out.
fn propagate(cnf: &Cnf, bits: &Bits) -> Option<Vec<bool>> {
    let mut values: Vec<Option<bool>> = bits.iter().map(Some).collect();
    values.resize(cnf.var_count, None);
    let mut changed = true;
    while changed {
        changed = false;
        for clause in cnf.clauses.iter() {
            let value = |lit: &BitLit| values[lit.bit().index()].map(|value| value != lit.is_negated());
            if clause.iter().any(|lit| value(lit) == Some(true)) {
                continue;
            }
            let open: Vec<BitLit> = clause.iter().filter(|lit| value(lit).is_none()).copied().collect();
            match open[..] {
                [] => return None,
                [unit] => (values[unit.bit().index()], changed) = (Some(!unit.is_negated()), true),
                _ => {}
            }
        }
    }
    Some(values.into_iter().map(|value| value.expect("every variable is defined by the bits")).collect())
}

/// All models of a clause form by a solver, projected on the bits; the second number counts the models themselves.
fn models(cnf: &Cnf, bits: usize) -> (BTreeSet<u128>, usize) {
    let mut solver = Solver::new();
    let lit = |lit: &BitLit| Lit::from_dimacs(lit.to_dimacs() as isize);
    cnf.clauses.iter().for_each(|clause| solver.add_clause(&clause.iter().map(lit).collect::<Vec<_>>()));
    // The solver names only variables that occur; a tautology makes it know all of them.
    (1..=cnf.var_count as isize).for_each(|v| solver.add_clause(&[Lit::from_dimacs(v), Lit::from_dimacs(-v)]));
    let (mut projected, mut count) = (BTreeSet::new(), 0);
    while solver.solve().expect("no limit is set") {
        let model = solver.model().expect("satisfiable");
        let value = |at: usize| model.contains(&Lit::from_dimacs(at as isize + 1));
        projected.insert((0..bits).fold(0, |number, at| number | u128::from(value(at)) << at));
        count += 1;
        let block: Vec<Lit> =
            (0..cnf.var_count).map(|at| Lit::from_dimacs(if value(at) { -1 } else { 1 } * (at as isize + 1))).collect();
        solver.add_clause(&block);
    }
    (projected, count)
}

proptest! {
    #![proptest_config(ProptestConfig { cases: 300, failure_persistence: None, ..ProptestConfig::default() })]

    #[test]
    fn rows_read_a_problem_as_the_evaluator_does(seed: u64) {
        let problem = random_problem(seed);
        let expected = solutions(&problem);
        let sweep = rows::count(&problem, 2, 1 << 10, &Budget::unlimited()).expect("no budget is set");
        let found: Vec<u128> = sweep.solutions.iter().map(|bits| bits.to_number().expect("small")).collect();
        prop_assert_eq!(&found, &expected);
        prop_assert_eq!((sweep.count, sweep.complete), (expected.len() as u64, true));
        // The truth table in another order of the bits.
        let mut random = SplitMix64::new(seed);
        let mut searched: Vec<BitId> = problem.bits().collect();
        (1..searched.len()).for_each(|at| searched.swap(at, random.below(at as u64 + 1) as usize));
        let table = rows::truth(&problem, &searched);
        for x in 0..1usize << searched.len() {
            let mut bits = Bits::zeros(searched.len());
            searched.iter().enumerate().for_each(|(at, &bit)| bits.set(bit, x >> at & 1 == 1));
            prop_assert_eq!(table[x / 64] >> (x % 64) & 1 == 1, problem.holds(&bits), "{}", bits);
        }
    }

    #[test]
    fn clauses_have_one_model_for_each_solution(seed: u64) {
        let problem = random_problem(seed);
        let cnf = encode(&problem);
        for number in 0..1u128 << problem.bit_count() {
            let bits = Bits::from_number(number, problem.bit_count());
            prop_assert_eq!(propagate(&cnf, &bits).is_some(), problem.holds(&bits), "{}", bits);
        }
    }
}

#[test]
fn a_solver_finds_the_models_of_the_clauses() {
    let mut checked = 0;
    for seed in 0..60 {
        let problem = random_problem(seed);
        let expected: BTreeSet<u128> = solutions(&problem).into_iter().collect();
        if expected.len() > 100 {
            continue;
        }
        let count = expected.len();
        assert_eq!(models(&encode(&problem), problem.bit_count()), (expected, count), "seed {seed}");
        checked += 1;
    }
    assert!(checked >= 20, "{checked} problems had few enough solutions");
}

#[test]
fn clause_problems_are_copied_as_they_are() {
    let mut problem = Problem::new();
    problem.add_numbered_vars(3);
    for clause in [&[1, -2][..], &[3, 3, -1], &[2, -2], &[]] {
        clause.iter().for_each(|&lit| problem.clauses.push_lit(BitLit::from_dimacs(lit).expect("not 0")));
        problem.clauses.end_clause();
    }
    assert_eq!(encode(&problem), Cnf { var_count: 3, clauses: problem.clauses.clone() });
    problem.clauses = Clauses::new();
    assert_eq!(rows::count(&problem, 1, 9, &Budget::unlimited()).expect("no budget is set").count, 8);
}

/// Audits of hand-written circuits for `(a or b) and not c`, with and without a known fault.
mod audits {
    use super::*;
    use tallymark::circuit::{Circuit, Control, MARK, Op, QubitId, SEARCH, WORK};
    use tallymark::judge::audit::{AuditError, How, Options, Outcome, Phases, Verdict, audit};
    use tallymark::places::{Places, PlacesError};

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
        audit(&problem, &Places::as_given(&problem), circuit, &Options::default(), &Budget::unlimited())
            .expect("an oracle")
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
            assert_eq!((verdict.outcome, verdict.how, verdict.inputs), (Outcome::Equal, How::Exhaustive, 8));
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
        let options = Options { exhaustive_bits: 2, sample: 0, known, ..Options::default() };
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
}
