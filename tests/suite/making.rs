//! The maker: the network says what the evaluator says, the circuits do what the network says, and the costs are the
//! published ones.

mod costs;
mod golden;
pub(super) mod problems;
mod puzzles;
mod simulate;
mod whole;
mod written;

use super::random_problem::random_problem;
use simulate::{Classical, Quantum};
use tallymark::budget::Budget;
use tallymark::circuit::{Circuit, Level, MARK, Mark, SEARCH};
use tallymark::id::Id;
use tallymark::make::lower::{LowerError, Options, lower};
use tallymark::make::network::{Network, build};
use tallymark::places::Places;
use tallymark::problem::{BitLit, Bits, Problem};

fn network_of(problem: &Problem) -> Network {
    build(problem, &Places::as_given(problem))
}

/// Random problems of two generators, of at most `max_bits` bits.
fn some_problems(count: u64, max_bits: usize) -> impl Iterator<Item = (u64, Problem)> {
    let shared = (0..count).map(|seed| (seed, random_problem(seed)));
    let own = (0..count).map(move |seed| (seed, problems::random_problem(seed, max_bits)));
    shared.chain(own).filter(move |(_, problem)| (1..=max_bits).contains(&problem.bit_count()))
}

fn solutions(problem: &Problem) -> Vec<bool> {
    let n = problem.bit_count();
    (0..1u128 << n).map(|input| problem.holds(&Bits::from_number(input, n))).collect()
}

/// Lowers a network; `None` where there is nothing to search or nothing to tell.
fn oracle(network: &Network, level: Level, mark: Mark) -> Option<Circuit> {
    match lower(network, &Options { level, mark }, &Budget::unlimited()) {
        Ok(circuit) => Some(circuit),
        Err(LowerError::NothingMarked | LowerError::EverythingMarked) => None,
        Err(error) => panic!("{error}"),
    }
}

fn check_level(circuit: &Circuit, level: Level) {
    assert!(circuit.gates().iter().all(|gate| level.has(circuit, gate)), "a gate is not of level {level}");
    let covered: u32 = circuit.regions.iter().map(|region| region.gates.len() as u32).sum();
    assert_eq!(covered as usize, circuit.gates().len(), "every gate has one region");
}

/// Runs an oracle of permutations on all inputs.
fn check_classical(circuit: &Circuit, expected: &[bool]) {
    let mut state = Classical::new(circuit);
    let start = Classical::new(circuit);
    state.run(circuit);
    let mark = circuit.register(MARK).first().map(|mark| mark.index());
    for (qubit, (after, before)) in state.qubits.iter().zip(&start.qubits).enumerate() {
        assert!(Some(qubit) == mark || after == before, "qubit {qubit} is not restored");
    }
    let marked = mark.map_or(&state.sign, |mark| &state.qubits[mark]);
    for (input, &expected) in expected.iter().enumerate() {
        assert_eq!(marked[input / 64] >> (input % 64) & 1 == 1, expected, "input {input:b}");
    }
    if mark.is_some() {
        assert!(state.sign.iter().all(|&word| word == 0), "a bit oracle adds no sign");
    }
}

/// Runs an oracle on a superposition of all inputs (and both values of the mark) with amplitudes of many phases.
fn check_quantum(circuit: &Circuit, expected: &[bool], seed: u64) {
    let n = circuit.register(SEARCH).len();
    let marks = if circuit.register(MARK).is_empty() { 1 } else { 2 };
    let amplitude = |state: u128| {
        let angle = state as f64 * 0.7 + 0.3;
        (angle.cos() * (1.0 + state as f64 % 3.0), angle.sin())
    };
    let states = || (0..expected.len() as u128).flat_map(|x| (0..marks).map(move |y: u128| x | y << n));
    let mut state = Quantum::new(states().map(|s| (s, amplitude(s))), circuit, seed);
    state.run(circuit);
    assert_eq!(state.amplitudes.len(), expected.len() * marks as usize, "the ancillas are clean");
    for s in states() {
        let marked = expected[(s as usize) & (expected.len() - 1)];
        let (to, sign) =
            if marks == 2 { (s ^ u128::from(marked) << n, 1.0) } else { (s, 1.0 - 2.0 * f64::from(marked as u8)) };
        let (wanted, got) = (amplitude(s), state.amplitudes[&to]);
        let error = (wanted.0 * sign - got.0).abs() + (wanted.1 * sign - got.1).abs();
        assert!(error < 1e-9, "state {s:b}: wanted {wanted:?} times {sign}, got {got:?}");
    }
}

#[test]
fn networks_of_random_problems_say_what_the_evaluator_says() {
    for (seed, problem) in some_problems(600, 11) {
        let network = network_of(&problem);
        let n = problem.bit_count();
        for (input, expected) in solutions(&problem).into_iter().enumerate() {
            let bits = Bits::from_number(input as u128, n);
            assert_eq!(network.holds(&bits), expected, "seed {seed} at {bits}\n{:?}\n{network}", problem.exprs);
        }
        assert_eq!(network.to_string().parse(), Ok(network), "seed {seed}");
    }
}

#[test]
fn oracles_of_random_problems_mark_the_solutions_at_levels_of_permutations() {
    for (_, problem) in some_problems(150, 9) {
        let (network, expected) = (network_of(&problem), solutions(&problem));
        for level in [Level::Wide, Level::Toffoli] {
            for mark in [Mark::Phase, Mark::Bit] {
                if let Some(circuit) = oracle(&network, level, mark) {
                    check_level(&circuit, level);
                    check_classical(&circuit, &expected);
                }
            }
        }
    }
}

#[test]
fn oracles_of_random_problems_mark_the_solutions_in_superposition() {
    let mut checked = 0;
    for (_, problem) in some_problems(60, 6) {
        let (network, expected) = (network_of(&problem), solutions(&problem));
        for level in Level::ALL {
            for mark in [Mark::Phase, Mark::Bit] {
                let Some(circuit) = oracle(&network, level, mark) else { continue };
                if circuit.qubit_count() <= 100 && circuit.gates().len() < 3000 {
                    check_level(&circuit, level);
                    // Two seeds: other outcomes of the measurements.
                    (0..2).for_each(|outcomes| check_quantum(&circuit, &expected, outcomes));
                    checked += 1;
                }
            }
        }
    }
    assert!(checked > 150, "{checked}");
}

/// A problem of `n` bits with these clauses, in DIMACS numbers.
fn clauses(n: usize, list: &[&[i64]]) -> Problem {
    let mut problem = Problem::new();
    problem.add_numbered_vars(n);
    for clause in list {
        let lits: Vec<BitLit> = clause.iter().map(|&lit| BitLit::from_dimacs(lit).unwrap()).collect();
        problem.clauses.push(&lits);
    }
    problem
}

#[test]
fn where_there_is_nothing_to_search_there_is_no_circuit() {
    let lowered = |problem: &Problem, budget: &Budget| {
        let options = Options { level: Level::Toffoli, mark: Mark::Phase };
        lower(&network_of(problem), &options, budget).map(|_| ()).map_err(|error| error.diagnostic().code.0)
    };
    let budget = Budget::unlimited();
    assert_eq!(lowered(&Problem::new(), &budget), Err("C001"));
    assert_eq!(lowered(&clauses(2, &[&[1], &[-1]]), &budget), Err("C002"));
    assert_eq!(lowered(&clauses(2, &[&[]]), &budget), Err("C002"));
    assert_eq!(lowered(&clauses(2, &[]), &budget), Err("C003"));
    assert_eq!(lowered(&clauses(2, &[&[1, -1, 2]]), &budget), Err("C003"));
    assert_eq!(lowered(&clauses(2, &[&[1, 2]]), &budget), Ok(()));
    budget.cancel();
    assert_eq!(lowered(&clauses(2, &[&[1, 2]]), &budget), Err("C004"));
    // Two ways to write one XOR are two nodes; only expanding them shows that their XOR is constant.
    let hidden = "search b0 b1 b2\nn4 = xor n1 n2\nn5 = xor n3 n4\nn6 = xor n2 n3\nn7 = xor n1 n6\nn8 = xor n5 n7\n";
    for (root, expected) in [("n8", LowerError::NothingMarked), ("!n8", LowerError::EverythingMarked)] {
        let network: Network = format!("{hidden}root {root}\n").parse().unwrap();
        let options = Options { level: Level::Wide, mark: Mark::Phase };
        assert_eq!(lower(&network, &options, &Budget::unlimited()), Err(expected));
    }
}

/// Shapes that are rare in random problems: roots that are one literal, a XOR, an AND of equal or opposite XORs; ANDs
/// that one XOR uses; long XORs used twice.
#[test]
fn special_shapes_are_lowered_right() {
    let inputs = "search b0 b1 b2 b3 b4 b5 b6 b7 b8\n";
    let same = "n10 = xor n1 n2\nn11 = xor n3 n10\nn12 = xor n2 n3\nn13 = xor n1 n12\n";
    let long = "n10 = xor n1 n2\nn11 = xor n3 n10\nn12 = xor n4 n11\nn13 = xor n5 n12\nn14 = xor n6 n13\n\
                n15 = xor n7 n14\nn16 = xor n8 n15\n";
    let texts = [
        format!("{inputs}root n3\n"),
        format!("{inputs}root !n9\n"),
        format!("{inputs}n10 = xor n1 n9\nroot !n10\n"),
        format!("{inputs}{same}n14 = and n11 n13\nroot n14\n"),
        format!("{inputs}{same}n14 = and n11 !n13\nn15 = xor n4 n14\nroot n15\n"),
        format!("{inputs}{same}n14 = and n11 n13\nn15 = and n14 !n4\nn16 = and n5 n15\nroot !n16\n"),
        format!("{inputs}n10 = and n1 !n2\nn11 = xor n3 n10\nn12 = and !n11 n4\nn13 = xor n12 n5\nroot n13\n"),
        format!("{inputs}n10 = and n1 n2\nn11 = and n3 n4\nn12 = xor n10 n11\nn13 = xor n12 n5\nroot !n13\n"),
        format!("{inputs}n10 = and n1 n2\nn11 = xor n3 n10\nn12 = and n4 n10\nn13 = and !n11 !n12\nroot n13\n"),
        format!("{inputs}{long}n17 = and n16 n9\nn18 = and !n16 n1\nn19 = and !n17 !n18\nroot n19\n"),
        format!("{inputs}{long}n17 = and n16 n15\nn18 = and n14 !n13\nn19 = xor n17 n18\nroot n19\n"),
        format!(
            "{inputs}n10 = xor n1 n2\nn11 = xor n2 n3\nn12 = xor n1 n3\nn13 = and n10 n11\nn14 = and n12 n13\nn15 = xor n4 n14\nroot n15\n"
        ),
        format!(
            "{inputs}n10 = xor n1 n2\nn11 = xor n2 n3\nn12 = xor n1 n3\nn13 = and n10 n11\nn14 = and !n12 n13\nroot n14\n"
        ),
    ];
    for text in texts {
        let network: Network = text.parse().unwrap();
        let expected: Vec<bool> = (0..512).map(|input| network.holds(&Bits::from_number(input, 9))).collect();
        for level in Level::ALL {
            for mark in [Mark::Phase, Mark::Bit] {
                let circuit = oracle(&network, level, mark).unwrap();
                check_level(&circuit, level);
                if level <= Level::Toffoli {
                    check_classical(&circuit, &expected);
                }
                (0..2).for_each(|seed| check_quantum(&circuit, &expected, seed));
            }
        }
    }
}
