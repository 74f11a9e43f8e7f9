//! The published and the exhaustively found numbers of ANDs, from the language and from clauses.
//!
//! The tables of symmetric functions hold exact values found by enumerating every span of few ANDs, complete for n up to
//! 5 with the published maximum of n - 1 ANDs (M. Sonmez Turan, R. Peralta, "The multiplicative complexity of Boolean
//! functions on four and five variables", LightSec 2014), and the values for n = 6 that three ANDs reach.

use tallymark::id::Id;
use tallymark::problem::{BitId, BitLit, Problem};

use super::{network_of, read};

const EXACTLY: [&[usize]; 4] = [&[1, 0, 1], &[2, 2, 2, 2], &[3, 2, 2, 2, 3], &[4, 4, 3, 3, 4, 4]];
const AT_LEAST: [&[usize]; 4] = [&[1, 1], &[2, 1, 2], &[3, 3, 3, 3], &[4, 3, 3, 3, 4]];
const ELEMENTARY: [&[usize]; 4] = [&[0, 1], &[0, 1, 2], &[0, 2, 2, 3], &[0, 2, 3, 3, 4]];

fn choose(n: usize, k: usize) -> usize {
    if k > n { 0 } else { (0..k).fold(1, |product, at| product * (n - at) / (at + 1)) }
}

/// The clauses that forbid every row on which the function of the number of ones fails.
fn row_by_row(n: usize, holds: impl Fn(usize) -> bool) -> Problem {
    let mut problem = Problem::new();
    problem.add_numbered_vars(n);
    for row in (0..1usize << n).filter(|row| !holds(row.count_ones() as usize)) {
        let clause: Vec<BitLit> = (0..n).map(|at| BitLit::new(BitId::new(at), row >> at & 1 == 0)).collect();
        problem.clauses.push(&clause);
    }
    problem
}

/// "At least k" as one clause for each n - k + 1 of the variables, the usual encoding without helpers.
fn subset_by_subset(n: usize, k: usize) -> Problem {
    let mut problem = Problem::new();
    problem.add_numbered_vars(n);
    for set in (0..1usize << n).filter(|set| set.count_ones() as usize == n + 1 - k) {
        let clause: Vec<BitLit> =
            (0..n).filter(|at| set >> at & 1 == 1).map(|at| BitLit::new(BitId::new(at), true)).collect();
        problem.clauses.push(&clause);
    }
    problem
}

fn ands(problem: &Problem) -> usize {
    network_of(problem).and_count()
}

#[test]
fn symmetric_functions_from_clauses_cost_what_no_circuit_can_beat() {
    for n in 2..=5 {
        let found = |holds: &dyn Fn(usize, usize) -> bool, least: usize| -> Vec<usize> {
            (least..=n).map(|k| ands(&row_by_row(n, |ones| holds(ones, k)))).collect()
        };
        assert_eq!(found(&|ones, k| ones == k, 0), EXACTLY[n - 2], "exactly k of {n}");
        assert_eq!(found(&|ones, k| ones >= k, 1), AT_LEAST[n - 2], "at least k of {n}");
        assert_eq!(found(&|ones, k| choose(ones, k) % 2 == 1, 1), ELEMENTARY[n - 2], "elementary {n}");
        let subsets: Vec<usize> = (1..=n).map(|k| ands(&subset_by_subset(n, k))).collect();
        assert_eq!(subsets, AT_LEAST[n - 2], "at least k of {n}, subset by subset");
    }
}

/// The elementary symmetric function of degree k as the language can say it: the parity of all products of k.
fn elementary(n: usize, k: usize) -> Problem {
    let product = |set: usize| {
        let names: Vec<String> = (0..n).filter(|at| set >> at & 1 == 1).map(|at| format!("x[{}]", at + 1)).collect();
        format!("({})", names.join(" and "))
    };
    let sets = (0..1usize << n).filter(|set| set.count_ones() as usize == k);
    let products: Vec<String> = sets.map(product).collect();
    read(&format!("pick x[i in 1 to {n}]\nmust odd [{}]\n", products.join(", ")))
}

fn counted(n: usize, what: &str) -> Problem {
    read(&format!("pick x[i in 1 to {n}]\nmust {what} of [x[i] for i in 1 to {n}]\n"))
}

#[test]
fn symmetric_functions_from_the_language_cost_what_no_circuit_can_beat() {
    for n in 2..=5 {
        let found: Vec<usize> = (0..=n).map(|k| ands(&counted(n, &format!("exactly {k}")))).collect();
        assert_eq!(found, EXACTLY[n - 2], "exactly k of {n}");
        let found: Vec<usize> = (1..=n).map(|k| ands(&counted(n, &format!("at least {k}")))).collect();
        assert_eq!(found, AT_LEAST[n - 2], "at least k of {n}");
        let found: Vec<usize> = (1..=n).map(|k| ands(&elementary(n, k))).collect();
        assert_eq!(found, ELEMENTARY[n - 2], "elementary {n}");
    }
    assert_eq!(ands(&counted(6, "exactly 3")), 3);
    assert_eq!([2, 3].map(|k| ands(&elementary(6, k))), [3, 3]);
    // L. Brandao and others, "Upper bounds on the multiplicative complexity of symmetric Boolean functions", 2019.
    assert_eq!(ands(&counted(8, "exactly 4")), 6);
    assert_eq!(ands(&elementary(8, 4)), 6);
}

/// The parity of all digits of `w`, so that each of them is needed.
fn all_digits(head: &str, digits: usize) -> usize {
    let list: Vec<String> = (0..digits).map(|at| format!("(w / {}) mod 2 = 1", 1u64 << at)).collect();
    ands(&read(&format!("{head}\nmust odd [{}]\n", list.join(", "))))
}

/// J. Boyar, R. Peralta, "Tight bounds for the multiplicative complexity of symmetric functions", 2008: the weight of n
/// bits needs n - H(n) ANDs; n ANDs for the sum of two n-bit numbers by degree, n - 1 modulo 2^n (derived).
#[test]
fn weights_and_sums_cost_what_is_proven() {
    for n in (13..=64usize).step_by(17).chain([16, 31, 32, 63]) {
        let head = format!("pick x[i in 1 to {n}]\nlet w = number of [x[i] for i in 1 to {n}]");
        let digits = (usize::BITS - n.leading_zeros()) as usize;
        assert_eq!(all_digits(&head, digits), n - n.count_ones() as usize, "the weight of {n} bits");
    }
    for n in 1..=6 {
        let last = (1 << n) - 1;
        let head = format!("pick a in 0 to {last}\npick b in 0 to {last}");
        assert_eq!(all_digits(&format!("{head}\nlet w = a + b"), n + 1), n, "the sum of {n} bits");
        assert_eq!(all_digits(&format!("{head}\nlet w = (a + b) mod {}", last + 1), n), n - 1, "the sum modulo 2^{n}");
        let less = |compare: &str| ands(&read(&format!("{head}\nmust a {compare} b\n")));
        assert_eq!([less("<"), less("<="), less("=")], [n, n, n - 1], "{n} bits");
    }
}

/// Adders, choices and majorities spelled out in clauses are what they were: one AND each (derived), and one that joins.
#[test]
fn gates_spelled_out_in_clauses_cost_an_and_each() {
    // Output variable 0 is the function of the others.
    let gate = |inputs: usize, of: &dyn Fn(usize) -> bool| {
        let mut problem = Problem::new();
        problem.add_numbered_vars(inputs + 1);
        for row in (0..1usize << (inputs + 1)).filter(|row| of(row >> 1) != (row & 1 == 1)) {
            let clause: Vec<BitLit> = (0..=inputs).map(|at| BitLit::new(BitId::new(at), row >> at & 1 == 0)).collect();
            problem.clauses.push(&clause);
        }
        problem
    };
    assert_eq!(ands(&gate(2, &|row| row == 3)), 1, "and");
    assert_eq!(ands(&gate(2, &|row| row != 0)), 1, "or");
    assert_eq!(ands(&gate(4, &|row| row.count_ones() % 2 == 1)), 0, "xor");
    assert_eq!(ands(&gate(3, &|row| row.count_ones() >= 2)), 1, "majority");
    assert_eq!(ands(&gate(3, &|row| if row & 1 == 1 { row & 2 != 0 } else { row & 4 != 0 })), 1, "choice");
}
