//! The judge's readings of a problem, rows and clauses, against the reference evaluator.

use std::collections::BTreeSet;

use proptest::prelude::*;
use tallymark::budget::Budget;
use tallymark::id::Id;
use tallymark::judge::clauses::{Cnf, encode};
use tallymark::judge::rows;
use tallymark::problem::{BitId, BitLit, Bits, Clauses, Compare, Domain, Expr, ExprId, Origin, Problem};
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
    #![proptest_config(ProptestConfig { cases: 600, failure_persistence: None, ..ProptestConfig::default() })]

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

#[test]
fn a_sweep_over_nothing_and_a_sweep_that_is_stopped() {
    let mut problem = Problem::new();
    let sweep = rows::count(&problem, 2, 9, &Budget::unlimited()).expect("no budget is set");
    assert_eq!((sweep.count, sweep.solutions, sweep.complete), (1, vec![Bits::zeros(0)], true));
    problem.clauses.end_clause();
    assert_eq!(rows::count(&problem, 2, 9, &Budget::unlimited()).expect("no budget is set").count, 0);
    let budget = Budget::unlimited();
    budget.cancel();
    assert_eq!(rows::count(&problem, 2, 9, &budget), None);
}

/// Values that need all 64 bits, far too many to try: chosen ones, by unit propagation in the clause form.
#[test]
fn wide_values_are_read_exactly() {
    let full = Domain::Range { lo: i64::MIN, hi: i64::MAX };
    let half = Domain::Range { lo: -3_037_000_499, hi: 3_037_000_499 };
    type Build = fn(&mut Problem, ExprId, ExprId) -> ExprId;
    let node: fn(&mut Problem, Expr) -> ExprId = |problem, expr| problem.exprs.node(expr);
    let cases: [(Domain, Build); 8] = [
        (full, |problem, x, _| problem.exprs.node(Expr::Quotient(x, 1))),
        (full, |problem, x, _| problem.exprs.node(Expr::Quotient(x, 7))),
        (full, |problem, x, _| problem.exprs.node(Expr::Quotient(x, i64::MAX))),
        (full, |problem, x, _| problem.exprs.node(Expr::Remainder(x, 8))),
        (full, |problem, x, _| problem.exprs.node(Expr::Remainder(x, i64::MAX))),
        (half, |problem, x, y| problem.exprs.node(Expr::Product(x, y))),
        (Domain::Range { lo: -i64::MAX, hi: i64::MAX }, |problem, x, _| problem.exprs.node(Expr::Abs(x))),
        (full, |problem, x, y| problem.exprs.over(Expr::Smallest, &[x, y])),
    ];
    let mut random = SplitMix64::new(3);
    for (at, (domain, build)) in cases.into_iter().enumerate() {
        let mut problem = Problem::new();
        let vars = [domain, domain, full].map(|domain| problem.add_var("", domain, None));
        let [x, y, z] = vars.map(|var| node(&mut problem, Expr::Var(var)));
        let result = build(&mut problem, x, y);
        let equal = node(&mut problem, Expr::Compare(Compare::Eq, result, z));
        problem.must(equal, Origin::default());
        tallymark::problem::check::check(&problem).expect("well formed");
        let cnf = encode(&problem);
        let Domain::Range { lo, hi } = domain else { unreachable!("a range") };
        let drawn: Vec<i64> = (0..12).map(|_| (random.next_u64() as i64 >> random.below(60)).clamp(lo, hi)).collect();
        for pair in
            [lo, lo + 1, -8, -7, -1, 0, 1, 6, 7, 8, hi - 1, hi].iter().chain(&drawn).collect::<Vec<_>>().windows(2)
        {
            let value = problem.evaluate(&[*pair[0], *pair[1], 0])[result] as i64;
            for (z, expected) in [(value, true), (value ^ 1, false), (value ^ i64::MIN, false)] {
                let bits = problem.encode(&[*pair[0], *pair[1], z]).expect("inside the domains");
                assert_eq!(problem.holds(&bits), expected);
                assert_eq!(propagate(&cnf, &bits).is_some(), expected, "case {at}: {pair:?} gives {value}, not {z}");
            }
        }
    }
}
