//! Counting along a line: variables are given values one after the other, and all that is kept of the past is which
//! clauses are still waiting to be satisfied.
//!
//! Input:  a prepared formula in which no variable is hidden, and a limit of work. Output: the count, or nothing where
//! the formula is not so, or the way would take more work.
//! Holds:  two assignments of the first variables that leave the same clauses waiting have the same number of
//!         continuations, so they are counted together.
//!
//! A clause *waits* from its first variable to its last while none of its literals has come true. If it still waits
//! after its last variable, the assignment is dropped. The number of states is bounded by how many clauses cross a cut
//! of the line: small for grids, chains and sparse formulas, whatever the count. This is the dynamic programming over
//! cuts of K. Sekine, H. Imai, S. Tani, "Computing the Tutte polynomial of a graph of moderate size", ISAAC 1995, with
//! clauses in place of edges; for clauses see also J. Huang, A. Darwiche, "Using DPLL for efficient OBDD construction",
//! SAT 2004, section 4 (cutset caching). It shares nothing with the engine's search.

mod line;
mod states;

use num_bigint::BigUint;

use super::engine::{Class, Prepared};
use crate::budget::Budget;
use line::line;
use states::{Stepper, Width};

/// Counts along a line with at most so much work (states looked at, some 50 ns each) and states at a time.
pub(super) fn count(formula: &Prepared, work: u64, budget: &Budget) -> Option<BigUint> {
    if formula.contradiction {
        return Some(BigUint::ZERO);
    }
    if formula.class.contains(&Class::Hidden) {
        return None;
    }
    let line = line(formula, work / 2)?;
    // A table of counts must fit into memory long before it would not fit the work.
    let states = budget.memory().map_or(MOST_STATES, |bytes| (bytes / STATE_BYTES).min(MOST_STATES));
    let stepper = Stepper::new(formula, &line);
    let count = match stepper.width() {
        Width::One => stepper.run::<1>(work, states, budget),
        Width::Two => stepper.run::<2>(work, states, budget),
        Width::Four => stepper.run::<4>(work, states, budget),
        Width::More => None,
    }?;
    Some(count << formula.free)
}

/// States kept at a time, and what each takes in both tables at most.
const MOST_STATES: u64 = 1 << 22;
const STATE_BYTES: u64 = 320;

#[cfg(test)]
mod tests {
    use super::*;
    use crate::judge::count::engine::{Effort, prepare};
    use crate::problem::{BitLit, Clauses};
    use crate::random::SplitMix64;

    fn random(random: &mut SplitMix64, vars: usize, count: u64) -> Clauses {
        let mut clauses = Clauses::new();
        for _ in 0..count {
            let lits: Vec<BitLit> = (0..1 + random.below(4))
                .map(|_| {
                    let var = random.below(vars as u64) as i64 + 1;
                    BitLit::from_dimacs(if random.coin() { var } else { -var }).unwrap()
                })
                .collect();
            clauses.push(&lits);
        }
        clauses
    }

    #[test]
    fn equals_brute_force() {
        let mut source = SplitMix64::new(21);
        for round in 0..200 {
            let vars = 3 + source.below(10) as usize;
            let count_of = source.below(4 * vars as u64);
            let clauses = random(&mut source, vars, count_of);
            let holds = |row: u32, lit: &BitLit| {
                use crate::id::Id;
                (row >> lit.bit().index() & 1 == 1) != lit.is_negated()
            };
            let want = (0..1u32 << vars)
                .filter(|&row| clauses.iter().all(|clause| clause.iter().any(|lit| holds(row, lit))))
                .count();
            for effort in [Effort::Models, Effort::Count] {
                let prepared = prepare(&clauses, vars, None, effort, &Budget::unlimited());
                let found = count(&prepared, u64::MAX, &Budget::unlimited());
                assert_eq!(found, Some(BigUint::from(want)), "round {round} {effort:?}");
            }
        }
    }

    /// A chain of implications has one model more than variables: a state or two at a time.
    #[test]
    fn long_lines_cost_little() {
        let mut clauses = Clauses::new();
        for var in 1..3000 {
            clauses.push(&[BitLit::from_dimacs(-var).unwrap(), BitLit::from_dimacs(var + 1).unwrap()]);
        }
        // Prepared by hand: the chain stays as it is.
        let prepared = prepare(&clauses, 3000, None, Effort::Models, &Budget::unlimited());
        assert_eq!(count(&prepared, 100_000, &Budget::unlimited()), Some(BigUint::from(3001u32)));
        assert_eq!(count(&prepared, 1000, &Budget::unlimited()), None, "the limit of work is kept");
    }

    #[test]
    fn counts_beyond_128_bits() {
        let mut clauses = Clauses::new();
        for pair in 0..200 {
            clauses.push(&[2 * pair + 1, 2 * pair + 2].map(|var| BitLit::from_dimacs(var).unwrap()));
        }
        let prepared = prepare(&clauses, 400, None, Effort::Models, &Budget::unlimited());
        assert_eq!(count(&prepared, u64::MAX, &Budget::unlimited()), Some(BigUint::from(3u32).pow(200)));
    }
}
