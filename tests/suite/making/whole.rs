//! Whole searches, simulated gate by gate.

use tallymark::circuit::{Circuit, Level, MARK, Mark, SEARCH};
use tallymark::problem::{Expr, ExprId, Origin, Problem, Table};
use tallymark::search::whole::whole_search;

use super::simulate::Quantum;
use super::{network_of, oracle};

/// A problem of `n` bits whose solutions are the numbers below `marked`, scattered by an odd factor.
fn with_solutions(n: usize, marked: usize) -> (Problem, Vec<bool>) {
    let mut problem = Problem::new();
    problem.add_numbered_vars(n);
    let size = 1usize << n;
    let chosen: Vec<usize> = (0..marked).map(|at| (at * 5 + 3) % size).collect();
    let rows = chosen.iter().map(|code| (0..n).map(|at| (code >> at & 1) as i64).collect()).collect();
    let table = problem.exprs.add_table(Table::new(n, rows));
    let vars: Vec<_> = problem.vars().ids().collect();
    let numbers: Vec<ExprId> = vars
        .into_iter()
        .map(|var| {
            let truth = problem.exprs.node(Expr::Var(var));
            problem.exprs.node(Expr::AsNumber(truth))
        })
        .collect();
    let expr = problem.exprs.over(|list| Expr::OneOf(list, table), &numbers);
    problem.must(expr, Origin::default());
    let solutions = (0..size).map(|code| chosen.contains(&code)).collect();
    (problem, solutions)
}

/// Runs the search up to its measurement and compares every amplitude, up to one phase for all, with
/// sin((2k+1) theta) / sqrt M on marked and cos((2k+1) theta) / sqrt(N - M) on other states (M. Boyer, G. Brassard,
/// P. Hoyer, A. Tapp, "Tight bounds on quantum searching", 1998, section 3).
fn check_search(circuit: &Circuit, solutions: &[bool], iterations: u64) {
    let n = circuit.register(SEARCH).len();
    let (size, marked) = (solutions.len() as f64, solutions.iter().filter(|&&s| s).count() as f64);
    let theta = (marked / size).sqrt().asin();
    let angle = (2 * iterations + 1) as f64 * theta;
    let mut state = Quantum::new([(0u128, (1.0, 0.0))], circuit, iterations);
    state.run_before_found(circuit);
    let (mut overlap, mut norm) = ((0.0, 0.0), 0.0);
    let mark = circuit.register(MARK).len();
    for (&at, &(re, im)) in &state.amplitudes {
        assert_eq!(at >> (n + mark), 0, "the work qubits are clean");
        let hit = solutions[at as usize & (solutions.len() - 1)];
        let wanted = if hit { angle.sin() / marked.sqrt() } else { angle.cos() / (size - marked).sqrt() };
        // The mark of a bit oracle is in (|0> - |1>) / sqrt 2.
        let minus = if at >> n == 1 { -std::f64::consts::FRAC_1_SQRT_2 } else { std::f64::consts::FRAC_1_SQRT_2 };
        let wanted = if mark == 1 { wanted * minus } else { wanted };
        overlap = (overlap.0 + wanted * re, overlap.1 + wanted * im);
        norm += re * re + im * im;
    }
    assert!((norm - 1.0).abs() < 1e-9);
    let fidelity = overlap.0 * overlap.0 + overlap.1 * overlap.1;
    assert!((fidelity - 1.0).abs() < 1e-9, "{marked} of {size}, {iterations} iterations: {fidelity}");
}

#[test]
fn searches_have_the_amplitudes_of_the_published_law() {
    for (n, counts) in [(1, 1..=1), (2, 1..=3), (3, 1..=7), (4, 1..=4)] {
        for marked in counts {
            let (problem, solutions) = with_solutions(n, marked);
            let network = network_of(&problem);
            for level in Level::ALL {
                for mark in [Mark::Phase, Mark::Bit] {
                    let oracle = oracle(&network, level, mark).unwrap();
                    for iterations in 0..4 {
                        check_search(&whole_search(&oracle, iterations, level), &solutions, iterations);
                    }
                }
            }
        }
    }
}

#[test]
fn a_search_has_one_loop_and_every_level_keeps_to_its_gates() {
    let (problem, _) = with_solutions(6, 1);
    let network = network_of(&problem);
    for level in Level::ALL {
        let oracle = oracle(&network, level, Mark::Phase).unwrap();
        let search = whole_search(&oracle, 6, level);
        super::check_level(&search, level);
        let repeats: Vec<u64> = search.blocks().iter().map(|block| block.repeat).collect();
        assert_eq!(repeats, [1, 6, 1]);
    }
}
