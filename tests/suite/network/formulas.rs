//! Every pass on random problems and formulas: the predicate is what the evaluator says, on every assignment.

use tallymark::id::Id;
use tallymark::problem::{BitId, BitLit, Problem};
use tallymark::random::SplitMix64;

use super::super::making::problems;
use super::super::random_problem::random_problem;
use super::{assert_same, network_of, plain, random_sat, simplified};

#[test]
fn passes_keep_what_random_problems_mean() {
    for seed in 0..250 {
        let shared = random_problem(seed);
        assert_same(&shared, &network_of(&shared), &format!("shared problem {seed}"));
        let own = problems::random_problem(seed, 10);
        assert_same(&own, &network_of(&own), &format!("own problem {seed}"));
    }
}

/// Formulas as files have them: repeated and opposite literals, repeated clauses, units, clauses of every length.
fn careless_formula(seed: u64) -> Problem {
    let mut random = SplitMix64::new(seed);
    let mut problem = Problem::new();
    let variables = 2 + random.below(8);
    problem.add_numbered_vars(variables as usize);
    let longest = 2 + random.below(4);
    for _ in 0..1 + random.below(4 * variables) {
        for _ in 0..1 + random.below(longest) + u64::from(random.below(4) != 0) {
            let bit = BitId::new(random.below(variables) as usize);
            problem.clauses.push_lit(BitLit::new(bit, random.below(3) != 0));
        }
        problem.clauses.end_clause();
        if random.below(6) == 0 {
            let last = problem.clauses.get(problem.clauses.len() - 1).to_vec();
            problem.clauses.push(&last);
        }
    }
    problem
}

#[test]
fn passes_keep_what_careless_formulas_mean() {
    for seed in 0..600 {
        let problem = careless_formula(seed);
        let network = network_of(&problem);
        assert_same(&problem, &network, &format!("formula {seed}: {:?}", problem.clauses));
        assert!(network.and_count() <= plain(&problem), "formula {seed}");
    }
}

/// Groups of clauses that a pass knows, mixed: parities, at most one, at most two, exactly one, gates.
fn structured_formula(seed: u64) -> Problem {
    let mut random = SplitMix64::new(seed);
    let mut problem = Problem::new();
    let n = 11;
    problem.add_numbered_vars(n);
    for _ in 0..2 + random.below(3) {
        let mut bits: Vec<usize> = (0..n).collect();
        for at in (1..n).rev() {
            bits.swap(at, random.below(at as u64 + 1) as usize);
        }
        let size = 2 + random.below(7) as usize;
        let lits: Vec<BitLit> =
            bits[..size].iter().map(|&bit| BitLit::new(BitId::new(bit), random.below(4) != 0)).collect();
        let kind = random.below(4);
        let odd = random.coin();
        for set in 0..1u32 << size {
            let part: Vec<BitLit> = (0..size).filter(|at| set >> at & 1 == 1).map(|at| lits[at]).collect();
            match kind {
                0 if size <= 5 && (set.count_ones() % 2 == 1) == odd => {
                    let row: Vec<BitLit> =
                        (0..size).map(|at| if set >> at & 1 == 1 { lits[at] } else { !lits[at] }).collect();
                    problem.clauses.push(&row);
                }
                1 | 2 if set.count_ones() == kind as u32 + 1 => {
                    let none: Vec<BitLit> = part.iter().map(|&lit| !lit).collect();
                    problem.clauses.push(&none);
                }
                1 if odd && part.len() == size => problem.clauses.push(&part),
                3 if set.count_ones() + 1 == size as u32 => problem.clauses.push(&part),
                _ => {}
            }
        }
    }
    problem
}

#[test]
fn passes_keep_what_structured_formulas_mean() {
    for seed in 0..200 {
        let problem = structured_formula(seed);
        let network = network_of(&problem);
        assert_same(&problem, &network, &format!("formula {seed}: {:?}", problem.clauses));
        assert!(network.and_count() <= plain(&problem), "formula {seed}");
    }
}

/// The same input gives the same network.
#[test]
fn passes_are_deterministic() {
    for seed in 0..5 {
        let problem = random_sat(40, 160, 3, seed);
        assert_eq!(simplified(&problem), simplified(&problem));
    }
}
