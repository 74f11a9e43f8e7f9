//! Facts read back from clauses are implied by the clauses that they name, by truth table.

use rustc_hash::FxHashSet;
use tallymark::id::Id;
use tallymark::problem::{BitId, BitLit, Bits, Clauses, Problem};
use tallymark::random::SplitMix64;
use tallymark::structure::{Fact, Structure, read};

use super::families::{self, Encoder};

/// The most bits of the clauses of a fact that are tried in every way.
const MAX_BITS: usize = 16;

fn check(problem: &Problem) -> Structure {
    let structure = read(&problem.clauses, problem.bit_count());
    for finding in &structure.findings {
        let clauses: Vec<&[BitLit]> = finding.clauses.iter().map(|&at| problem.clauses.get(at as usize)).collect();
        let mut bits: Vec<BitId> = clauses.iter().copied().flatten().map(|lit| lit.bit()).collect();
        bits.sort_unstable();
        bits.dedup();
        if bits.len() > MAX_BITS {
            continue;
        }
        for value in 0u32..1 << bits.len() {
            let mut assignment = Bits::zeros(problem.bit_count());
            bits.iter().enumerate().for_each(|(at, &bit)| assignment.set(bit, value >> at & 1 == 1));
            let holds = |lit: &BitLit| assignment.get(lit.bit()) != lit.is_negated();
            if clauses.iter().all(|clause| clause.iter().any(holds)) {
                assert!(finding.fact.holds(&assignment), "{finding:?} at {assignment}");
            }
        }
    }
    structure
}

fn count(structure: &Structure, is: impl Fn(&Fact) -> bool) -> usize {
    structure.findings.iter().filter(|finding| is(&finding.fact)).count()
}

#[test]
fn adders_are_read_back() {
    let structure = check(&families::product(4, 143).finish());
    // 16 ANDs of the array, and the adders that 16 terms of a 4 by 4 array need: 8 full and 4 half ones.
    let adders = |inputs: usize| {
        count(&structure, |fact| matches!(fact, Fact::Adder { inputs: list, .. } if list.len() == inputs))
    };
    assert_eq!((adders(3), adders(2)), (8, 4), "{}", structure.in_words());
    assert_eq!(count(&structure, |fact| matches!(fact, Fact::And { .. })), 16 + 4);
    assert_eq!(count(&structure, |fact| matches!(fact, Fact::Holds(_))), 8);
}

#[test]
fn gates_of_random_circuits_are_read_back() {
    for seed in 0..10 {
        let encoder = families::random_circuit(8, 40, seed);
        let structure = check(&encoder.finish());
        let gates = |fact: &Fact| {
            matches!(fact, Fact::And { .. } | Fact::Choose { .. } | Fact::Majority { .. })
                || matches!(fact, Fact::Parity { bits, .. } if bits.len() == 3)
        };
        assert!(count(&structure, gates) >= 40, "seed {seed}: {}", structure.in_words());
    }
}

#[test]
fn parities_groups_and_equalities_are_read_back() {
    let structure = check(&families::tseitin_torus(4, 5));
    assert_eq!(count(&structure, |fact| matches!(fact, Fact::Parity { bits, .. } if bits.len() == 4)), 20);
    let structure = check(&families::queens(5));
    assert_eq!(count(&structure, |fact| matches!(fact, Fact::ExactlyOne(list) if list.len() == 5)), 10);
    // Diagonals of three squares and more.
    assert_eq!(count(&structure, |fact| matches!(fact, Fact::AtMost(1, _))), 10);

    let mut encoder = Encoder::new(6);
    for (a, b) in [(1, -2), (-2, 3), (3, 1)] {
        encoder.clause(&[-a, b]);
    }
    for group in [[1, 4, 5], [1, 4, 6], [1, 5, 6], [4, 5, 6]] {
        encoder.clause(&group.map(|lit: i64| -lit));
    }
    let structure = check(&encoder.finish());
    assert_eq!(count(&structure, |fact| matches!(fact, Fact::Equal(..))), 2);
    assert_eq!(count(&structure, |fact| matches!(fact, Fact::AtMost(2, list) if list.len() == 4)), 1);
}

#[test]
fn whatever_is_read_from_random_clauses_follows_from_them() {
    let mut random = SplitMix64::new(5);
    let mut found = 0;
    for _ in 0..300 {
        let bits = 3 + random.below(3) as usize;
        let mut clauses = Clauses::new();
        // So many clauses over so few bits that definitions appear by chance.
        for _ in 0..6 + random.below(24) {
            let length = 1 + random.below(4).min(2);
            let clause: Vec<BitLit> = (0..=length)
                .map(|_| BitLit::new(BitId::new(random.below(bits as u64) as usize), random.coin()))
                .collect();
            clauses.push(&clause);
        }
        let mut problem = Problem::new();
        problem.add_numbered_vars(bits);
        problem.clauses = clauses;
        let kinds: FxHashSet<_> = check(&problem).findings.iter().map(|f| std::mem::discriminant(&f.fact)).collect();
        found += kinds.len();
    }
    assert!(found > 300, "definitions appeared: {found}");
}
