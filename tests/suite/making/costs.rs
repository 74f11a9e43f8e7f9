//! Costs against published and measured values: ANDs of networks, T gates of emitted circuits.

use std::collections::BTreeSet;

use tallymark::budget::Budget;
use tallymark::circuit::{Circuit, Level, Mark, figures::figures};
use tallymark::id::Id;
use tallymark::make::lower::and_count;
use tallymark::problem::{BitId, BitLit, Bits, Compare, Domain, Expr, ExprId, Origin, Problem};
use tallymark::random::SplitMix64;

use super::{network_of, oracle};

/// A problem over `n` yes/no variables with one constraint.
fn over_truths(n: usize, constraint: impl FnOnce(&mut Problem, &[ExprId]) -> ExprId) -> Problem {
    let mut problem = Problem::new();
    problem.add_numbered_vars(n);
    let leaves: Vec<ExprId> = problem.vars().ids().map(Expr::Var).map(|e| problem.exprs.node(e)).collect();
    let expr = constraint(&mut problem, &leaves);
    problem.must(expr, Origin::default());
    problem
}

/// "The number of those that hold compares so to k".
fn number_of(n: usize, compare: Compare, k: usize) -> Problem {
    over_truths(n, |problem, leaves| {
        let count = problem.exprs.over(Expr::Count, leaves);
        let k = problem.exprs.node(Expr::Number(k as i64));
        problem.exprs.node(Expr::Compare(compare, count, k))
    })
}

fn at_least(n: usize, k: usize) -> Problem {
    over_truths(n, |problem, leaves| {
        let count = problem.exprs.over(Expr::Count, leaves);
        let k = problem.exprs.node(Expr::Number(k as i64));
        problem.exprs.node(Expr::Compare(Compare::Le, k, count))
    })
}

fn ands(problem: &Problem) -> usize {
    network_of(problem).and_count()
}

/// Two numbers from 0 to 2^n - 1.
fn over_numbers(n: usize, expr: impl FnOnce(ExprId, ExprId) -> Expr) -> Problem {
    let mut problem = Problem::new();
    let domain = Domain::Range { lo: 0, hi: (1i64 << n) - 1 };
    let vars = ["a", "b"].map(|name| problem.add_var(name, domain, None));
    let [a, b] = vars.map(|var| problem.exprs.node(Expr::Var(var)));
    let constraint = problem.exprs.node(expr(a, b));
    problem.must(constraint, Origin::default());
    problem
}

/// Exact values, "Symmetric functions", found by exhaustive search over all spans of few ANDs for n up to 5, and the
/// degree bound (C. P. Schnorr, 1988, from memory) for n = 6: nobody can do with fewer.
#[test]
fn symmetric_functions_cost_what_no_circuit_can_beat() {
    let exactly: [&[usize]; 4] = [&[1, 0, 1], &[2, 2, 2, 2], &[3, 2, 2, 2, 3], &[4, 4, 3, 3, 4, 4]];
    let least: [&[usize]; 4] = [&[1, 1], &[2, 1, 2], &[3, 3, 3, 3], &[4, 3, 3, 3, 4]];
    for n in 2..=5 {
        let found: Vec<usize> = (0..=n).map(|k| ands(&number_of(n, Compare::Eq, k))).collect();
        assert_eq!(found, exactly[n - 2], "exactly k of {n}");
        let found: Vec<usize> = (1..=n).map(|k| ands(&at_least(n, k))).collect();
        assert_eq!(found, least[n - 2], "at least k of {n}");
    }
    assert_eq!(ands(&number_of(6, Compare::Eq, 3)), 3);
}

/// Measured bounds of an offset adder and of a weight modulo a power of two: at most k never above n + 2 ANDs, and n - 1
/// where n is a power of two (the degree bound); exactly k never above n + 2. The circuits here keep to them and beat
/// the second.
#[test]
fn cardinalities_stay_below_the_measured_bounds() {
    for n in 3..=32usize {
        for k in 1..=n - 2 {
            let at_most = ands(&number_of(n, Compare::Le, k));
            assert!(at_most <= n + 2, "at most {k} of {n}: {at_most}");
            assert!(!n.is_power_of_two() || at_most == n - 1, "at most {k} of {n}: {at_most}");
            let exactly = ands(&number_of(n, Compare::Eq, k));
            assert!(exactly <= n + 2, "exactly {k} of {n}: {exactly}");
        }
    }
    for (n, ceiling) in [(8, 8), (16, 17), (32, 34)] {
        let worst = (1..n).map(|k| ands(&number_of(n, Compare::Eq, k))).max().unwrap();
        assert!(worst <= ceiling, "exactly k of {n}: {worst}");
    }
}

#[test]
fn large_cardinalities_and_weighted_sums_are_right_on_random_inputs() {
    let mut random = SplitMix64::new(3);
    for (n, k) in [(32, 7), (32, 16), (31, 30), (21, 1)] {
        for compare in [Compare::Eq, Compare::Le, Compare::Lt, Compare::Ne] {
            check_on(&number_of(n, compare, k), 200, &mut random, k as f64 / n as f64);
        }
    }
    let weighted = over_truths(24, |problem, leaves| {
        let weights: Vec<ExprId> =
            (0..24).map(|at| problem.exprs.node(Expr::Number([3, -17, 250, 8, 1, -90][at % 6]))).collect();
        let parts: Vec<ExprId> = leaves
            .iter()
            .zip(&weights)
            .map(|(&leaf, &weight)| {
                let number = problem.exprs.node(Expr::AsNumber(leaf));
                problem.exprs.node(Expr::Product(number, weight))
            })
            .collect();
        let sum = problem.exprs.over(Expr::Sum, &parts);
        let bound = problem.exprs.node(Expr::Number(320));
        problem.exprs.node(Expr::Compare(Compare::Le, sum, bound))
    });
    check_on(&weighted, 500, &mut random, 0.5);
}

/// Compares network and evaluator on random inputs in which each bit is 1 with this probability.
fn check_on(problem: &Problem, inputs: usize, random: &mut SplitMix64, density: f64) {
    let network = network_of(problem);
    for _ in 0..inputs {
        let bits: Bits = (0..problem.bit_count()).map(|_| random.unit() < density).collect();
        assert_eq!(network.holds(&bits), problem.holds(&bits), "{bits}");
    }
}

/// The proofs are by degree: a function of degree d needs d - 1 ANDs (C. P. Schnorr, 1988, from memory).
#[test]
fn comparisons_cost_their_degree() {
    for n in 1..=9 {
        assert_eq!(ands(&over_numbers(n, |a, b| Expr::Compare(Compare::Lt, a, b))), n, "a < b, {n} bits");
        assert_eq!(ands(&over_numbers(n, |a, b| Expr::Compare(Compare::Le, a, b))), n, "a <= b, {n} bits");
        assert_eq!(ands(&over_numbers(n, |a, b| Expr::Compare(Compare::Eq, a, b))), n - 1, "a = b, {n} bits");
    }
    for c in 1..64i64 {
        let mut problem = Problem::new();
        let x = problem.add_var("x", Domain::Range { lo: 0, hi: 63 }, None);
        let x = problem.exprs.node(Expr::Var(x));
        let number = problem.exprs.node(Expr::Number(c));
        let expr = problem.exprs.node(Expr::Compare(Compare::Le, number, x));
        problem.must(expr, Origin::default());
        assert_eq!(ands(&problem), 6 - c.trailing_zeros() as usize - 1, "x >= {c}");
    }
    let parity = over_truths(9, |problem, leaves| problem.exprs.over(Expr::Odd, leaves));
    assert_eq!(ands(&parity), 0);
    let choice = over_truths(3, |problem, l| problem.exprs.node(Expr::Choose(l[0], l[1], l[2])));
    assert_eq!(ands(&choice), 1);
}

/// Random 3-SAT in which no two clauses share two variables, so that no AND is shared.
fn scattered_3sat(clauses: usize, seed: u64) -> Problem {
    let mut random = SplitMix64::new(seed);
    let mut problem = Problem::new();
    let variables = 6 * clauses as u64 + 3;
    problem.add_numbered_vars(variables as usize);
    let mut pairs = BTreeSet::new();
    while problem.clauses.len() < clauses {
        let [a, b, c] = std::array::from_fn(|_| random.below(variables) as usize);
        let new = [(a.min(b), a.max(b)), (b.min(c), b.max(c)), (a.min(c), a.max(c))];
        if a != b && b != c && a != c && new.iter().all(|pair| !pairs.contains(pair)) {
            pairs.extend(new);
            problem.clauses.push(&[a, b, c].map(|at| BitLit::new(BitId::new(at), random.coin())));
        }
    }
    problem
}

/// G. Meuli and others, "The role of multiplicative complexity in compiling low T-count oracle circuits", ICCAD 2019:
/// 4 T for each AND. A clause of k literals is k - 1 ANDs, so m clauses of three are 3m - 1; the last AND of a phase
/// oracle is a CZ (derived). Without measurement a pair of ANDs costs 8 T and the last Toffoli 7 (D. Maslov, Phys. Rev. A
/// 93:022311, 2016: 8c - 9 for c controls, from memory).
#[test]
fn oracles_of_3sat_cost_the_published_t_counts() {
    let t_count = |circuit: &Circuit| figures(circuit).t_count;
    for m in 2..=20u64 {
        let problem = scattered_3sat(m as usize, m);
        let network = network_of(&problem);
        assert_eq!(network.and_count() as u64, 3 * m - 1);
        let oracle = |level, mark| oracle(&network, level, mark).unwrap();
        assert_eq!(t_count(&oracle(Level::Feedback, Mark::Bit)), 4 * (3 * m - 1));
        assert_eq!(t_count(&oracle(Level::Feedback, Mark::Phase)), 4 * (3 * m - 1) - 4);
        assert_eq!(t_count(&oracle(Level::CliffordT, Mark::Bit)), 8 * (3 * m - 2) + 7);
        // The clauses are needed complemented, so only the ANDs of the tree over them can be marked as three at once.
        let three_at_once = if m > 2 { 8 * (3 * m - 3) + 7 } else { 8 * (3 * m - 2) };
        assert_eq!(t_count(&oracle(Level::CliffordT, Mark::Phase)), three_at_once);
        let count = |mark| and_count(&network, mark, &Budget::unlimited()).unwrap();
        assert_eq!((count(Mark::Bit), count(Mark::Phase)), (3 * m - 1, 3 * m - 2));
    }
}

/// A clause of k literals is k - 1 ANDs (derived), also where it is long and where the formula is nothing else.
#[test]
fn a_clause_of_k_literals_is_k_minus_one_ands() {
    for k in 1..=12usize {
        let mut problem = Problem::new();
        problem.add_numbered_vars(k);
        let clause: Vec<BitLit> = (0..k).map(|at| BitLit::new(BitId::new(at), at % 2 == 0)).collect();
        problem.clauses.push(&clause);
        assert_eq!(ands(&problem), k - 1);
    }
}

#[test]
fn domains_of_64_bits_are_compared_and_divided() {
    let mut random = SplitMix64::new(11);
    let wide = Domain::Range { lo: i64::MIN, hi: i64::MAX };
    let edges = [i64::MIN, i64::MIN + 1, -7, -1, 0, 1, 6, i64::MAX - 1, i64::MAX];
    for kind in 0..8 {
        let mut problem = Problem::new();
        let vars = ["a", "b"].map(|name| problem.add_var(name, wide, None));
        let [a, b] = vars.map(|var| problem.exprs.node(Expr::Var(var)));
        let mut node = |expr| problem.exprs.node(expr);
        let expr = match kind {
            0 => Expr::Compare(Compare::Lt, a, b),
            1 => Expr::Compare(Compare::Le, a, b),
            2 => Expr::Compare(Compare::Eq, a, b),
            3 => {
                let (p, q) = (node(Expr::Quotient(a, 7)), node(Expr::Remainder(b, 1000)));
                Expr::Compare(Compare::Lt, p, q)
            }
            4 => {
                let (p, q) = (node(Expr::Quotient(a, i64::MAX)), node(Expr::Number(0)));
                Expr::Compare(Compare::Eq, p, q)
            }
            5 => {
                let half = node(Expr::Quotient(a, 2));
                let (p, q) = (node(Expr::Abs(half)), node(Expr::Quotient(b, 1 << 20)));
                Expr::Compare(Compare::Le, p, q)
            }
            6 => {
                // Sums of products whose digits reach far beyond their range.
                let (one, large) = (node(Expr::Number(1)), node(Expr::Number(1 << 60)));
                let half = node(Expr::Quotient(a, 2));
                let size = node(Expr::Abs(half));
                let list = problem.exprs.list(&[size, one]);
                let bit = problem.exprs.node(Expr::Smallest(list));
                let product = problem.exprs.node(Expr::Product(bit, large));
                let sum = problem.exprs.over(Expr::Sum, &[product; 7]);
                Expr::Compare(Compare::Lt, b, sum)
            }
            _ => {
                let list = problem.exprs.list(&[a, b]);
                let (p, q) = (problem.exprs.node(Expr::Largest(list)), problem.exprs.node(Expr::Number(-1)));
                Expr::Compare(Compare::Le, p, q)
            }
        };
        let expr = problem.exprs.node(expr);
        problem.must(expr, Origin::default());
        tallymark::problem::check::check(&problem).unwrap();
        let network = network_of(&problem);
        let check = |values: [i64; 2]| {
            let bits = problem.encode(&values).unwrap();
            assert_eq!(network.holds(&bits), problem.holds(&bits), "kind {kind} at {values:?}");
        };
        for a in edges {
            edges.iter().for_each(|&b| check([a, b]));
        }
        for _ in 0..200 {
            check([random.next_u64() as i64, random.next_u64() as i64 >> random.below(64)]);
        }
    }
}
