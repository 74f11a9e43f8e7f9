//! X and Z with many controls: the published counts, exactly, from the gates; each circuit judged on all inputs.

use tallymark::circuit::figures::figures;
use tallymark::circuit::{Circuit, Level, MeasuredId, Op, QubitId};
use tallymark::id::Id;
use tallymark::make::lower::{Idle, Way, append_controlled, append_reflection, reflection_work, ways};
use tallymark::problem::{BitId, BitLit, Problem};

use super::check;

struct Case {
    circuit: Circuit,
    problem: Problem,
}

/// All of `c` controls and, for a Z, the target. Dirty qubits are searched bits that no clause has, so that the judge sees
/// every state of them.
fn case(level: Level, op: Op, c: usize, (clean, dirty): (usize, usize), way: Way) -> Case {
    let controlled = if op == Op::Z { c + 1 } else { c };
    let mut problem = Problem::new();
    problem.add_numbered_vars(controlled + dirty);
    (0..controlled).for_each(|at| problem.clauses.push(&[BitLit::new(BitId::new(at), true)]));
    let mut circuit = Circuit::new();
    let search = circuit.add_qubits("search", controlled + dirty);
    let target = if op == Op::Z { search[c] } else { circuit.add_qubits("mark", 1)[0] };
    let work = if clean > 0 { circuit.add_qubits("work", clean) } else { Vec::new() };
    let measured = level == Level::Feedback && clean > 0;
    let outcomes: Vec<MeasuredId> = if measured { circuit.add_measured("outcome", clean) } else { Vec::new() };
    let idle = Idle { clean: &work, dirty: &search[controlled..], outcomes: &outcomes };
    assert!(ways(c, op, idle, level).contains(&way), "{way:?} with {clean} clean and {dirty} dirty");
    append_controlled(&mut circuit, level, op, (&search[..c], target), idle, way);
    assert!(circuit.gates().iter().all(|gate| level.has(&circuit, gate)));
    Case { circuit, problem }
}

/// The Toffolis and the T gates of a case that was judged.
fn costs(level: Level, op: Op, c: usize, idle: (usize, usize), way: Way) -> (u64, u64) {
    let Case { circuit, problem } = case(level, op, c, idle, way);
    check(&problem, &circuit, &format!("{way:?} {op:?} with {c} controls at {level}, {idle:?}"));
    let figures = figures(&circuit);
    (figures.and_gates, figures.t_count)
}

/// The chain over clean ancillas: 2c - 3 Toffolis (textbook); with measured erasure 4(c - 1) T gates (C. Gidney, Quantum
/// 2:74, 2018); up to phases 8c - 9 (D. Maslov, Phys. Rev. A 93:022311, 2016, from memory).
#[test]
fn clean_ancillas() {
    for c in 2..=9usize {
        let n = c as u64;
        assert_eq!(costs(Level::Toffoli, Op::X, c, (c - 2, 0), Way::Tree).0, 2 * n - 3);
        assert_eq!(costs(Level::CliffordT, Op::X, c, (c - 2, 0), Way::Tree).1, 8 * n - 9);
        assert_eq!(costs(Level::Feedback, Op::X, c, (c - 1, 0), Way::Tree).1, 4 * (n - 1));
        // A Z is symmetric: its target is one more control. C^(n-1) Z on n qubits is 4(n - 2) (derived).
        assert_eq!(costs(Level::Feedback, Op::Z, c, (c - 1, 0), Way::Tree).1, 4 * (n - 1));
    }
}

/// Barenco and others, Phys. Rev. A 52:3457 (1995): Lemma 7.2, 4(c - 2) Toffolis over c - 2 dirty qubits; Corollary 7.4,
/// 8(c - 3) over one, for c from 5; ten for four controls (computed).
#[test]
fn dirty_qubits() {
    for c in 3..=8usize {
        let n = c as u64;
        assert_eq!(costs(Level::Toffoli, Op::X, c, (0, c - 2), Way::Ladder).0, 4 * (n - 2));
        assert_eq!(costs(Level::Toffoli, Op::Z, c, (0, c - 2), Way::Ladder).0, 4 * (n - 2));
        if c >= 4 {
            let halves = if c == 4 { 10 } else { 8 * (n - 3) };
            assert_eq!(costs(Level::Toffoli, Op::X, c, (0, 1), Way::Halves).0, halves);
            assert_eq!(costs(Level::CliffordT, Op::X, c, (0, 1), Way::Halves).1, 7 * halves);
        }
    }
}

/// T. Khattar, C. Gidney, Quantum 9:1752 (2025): one clean ancilla, 2c - 3 Toffolis (from memory).
#[test]
fn one_clean_ancilla() {
    for c in 4..=11usize {
        let n = c as u64;
        assert_eq!(costs(Level::Toffoli, Op::X, c, (1, 0), Way::Conditional).0, 2 * n - 3);
        assert_eq!(costs(Level::Toffoli, Op::Z, c, (1, 0), Way::Conditional).0, 2 * n - 3);
        assert_eq!(costs(Level::CliffordT, Op::X, c, (1, 0), Way::Conditional).1, 8 * n - 9);
        // The clean ancilla is erased by measurement, the others are not.
        assert_eq!(costs(Level::Feedback, Op::Z, c, (1, 0), Way::Conditional).1, 8 * (n - 3) + 4 + 7);
    }
}

/// The same with two clean ancillas or more: no more Toffolis than the published 2c (abstract), and each doubling of the
/// controls adds so many layers at most, so the depth grows with the logarithm.
#[test]
fn layers_of_conditionally_clean_qubits() {
    for c in 5..=11usize {
        let n = c as u64;
        assert_eq!(costs(Level::Toffoli, Op::X, c, (2, 0), Way::Layers).0, 2 * n - 3);
        assert_eq!(costs(Level::Toffoli, Op::Z, c, (2, 0), Way::Layers).0, 2 * n - 3);
        assert_eq!(costs(Level::CliffordT, Op::X, c, (2, 0), Way::Layers).1, 8 * n - 9);
        assert_eq!(costs(Level::Feedback, Op::Z, c, (2, 0), Way::Layers).1, 8 * (n - 4) + 2 * 4 + 7);
    }
    let depth = |c: usize, way| figures(&case(Level::Toffoli, Op::X, c, (2, 0), way).circuit).depth;
    let depths: Vec<u64> = (5..=10).map(|log| depth(1 << log, Way::Layers)).collect();
    assert!(depths.windows(2).all(|pair| pair[1] <= pair[0] + 12), "{depths:?}");
    assert!(depths[5] * 10 < depth(1 << 10, Way::Conditional), "{depths:?}");
}

#[test]
fn every_way_at_every_level_with_every_number_of_idle_qubits() {
    let mut cases = 0;
    for level in Level::ALL {
        for op in [Op::X, Op::Z] {
            for (c, clean, dirty) in (1..=6).flat_map(|c| (0..=c).flat_map(move |p| (0..=2).map(move |d| (c, p, d)))) {
                let work: Vec<QubitId> = (100..100 + clean).map(QubitId::new).collect();
                let others: Vec<QubitId> = (200..200 + dirty).map(QubitId::new).collect();
                for way in ways(c, op, Idle { clean: &work, dirty: &others, outcomes: &[] }, level) {
                    costs(level, op, c, (clean, dirty), way);
                    cases += 1;
                }
            }
        }
    }
    assert!(cases > 300, "{cases}");
}

/// A complete binary tree of ANDs has ceil(log2 c) layers; with flip and undoing 2 ceil(log2 c) - 1 (derived).
#[test]
fn the_tree_is_as_shallow_as_a_tree_can_be() {
    for c in 2..=17usize {
        let Case { circuit, .. } = case(Level::Toffoli, Op::X, c, (c - 2, 0), Way::Tree);
        let log = u64::from(c.next_power_of_two().ilog2());
        assert_eq!(figures(&circuit).depth, 2 * log - 1, "{c} controls");
    }
}

/// With every number of ancillas from one up, the reflection is the sign of one state between Hadamards.
#[test]
fn the_reflection_with_few_ancillas() {
    for level in [Level::Toffoli, Level::CliffordT, Level::Feedback] {
        for n in 3..=7usize {
            let most = reflection_work(n, level);
            for clean in most.min(1)..=most {
                let mut circuit = Circuit::new();
                let search = circuit.add_qubits("search", n);
                let work = if clean > 0 { circuit.add_qubits("work", clean) } else { Vec::new() };
                // Between Hadamards it is the sign of the state of all zeros.
                search.iter().for_each(|&qubit| circuit.push(Op::H, &[], qubit));
                append_reflection(&mut circuit, &search, &work, level);
                search.iter().for_each(|&qubit| circuit.push(Op::H, &[], qubit));
                let mut problem = Problem::new();
                problem.add_numbered_vars(n);
                (0..n).for_each(|at| problem.clauses.push(&[BitLit::new(BitId::new(at), false)]));
                check(&problem, &circuit, &format!("{n} qubits, {clean} ancillas at {level}"));
                let t = figures(&circuit).t_count;
                if clean == most && level == Level::Feedback {
                    assert_eq!(t, 4 * (n as u64 - 2));
                }
                if level == Level::CliffordT {
                    assert_eq!(t, 8 * (n as u64 - 3) + 7, "also with one ancilla");
                }
            }
        }
    }
}
