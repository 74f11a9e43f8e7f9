//! The sweep of the inputs: where clauses define most variables from a few others, only those few are tried, 2048 rows
//! at a time, and the rest is computed.
//!
//! Input:  a prepared formula in which every shown variable counts, and a limit of work. Output: the count, or nothing
//! where the formula is not of this kind or the sweep would take more work.
//! Holds:  a definition was found row by row in the clauses, so each assignment of the inputs extends in at most one
//!         way; whatever clauses the definitions do not contain is required of it.
//!
//! J.-M. Lagniez, E. Lonca, P. Marquis, "Improving model counting by leveraging definability", IJCAI 2016, for the inputs
//! as all that matters; the sweep by rows is this crate's own (`judge/rows`). It shares nothing with the engine's search.

mod definitions;
mod network;

use num_bigint::BigUint;

use super::engine::Prepared;
use crate::budget::Budget;
use crate::judge::rows::{self, MAX_BITS};
use definitions::definitions;
use network::tapes;

/// Counts by a sweep of the inputs of at most so much work (row operations, some 10 ns each).
pub(super) fn count(formula: &Prepared, work: u64, threads: usize, budget: &Budget) -> Option<BigUint> {
    if formula.contradiction {
        return Some(BigUint::ZERO);
    }
    let most = (u64::BITS - work.leading_zeros()) as usize + SPARE_BITS;
    let found = definitions(formula, most.min(MAX_BITS))?;
    let bits = found.inputs.len();
    let tape = tapes(formula, &found).into_iter().min_by_key(rows::tape::Tape::work)?;
    if tape.work() > work {
        return None;
    }
    let swept = rows::count_tape(&tape, bits, threads, 0, budget)?;
    Some(BigUint::from(swept.count) << formula.free)
}

/// A row operation is done for 2^11 inputs at once, and at least one operation a block is needed.
const SPARE_BITS: usize = rows::lanes::LANE_BITS;

#[cfg(test)]
mod tests {
    use super::*;
    use crate::id::Id;
    use crate::judge::count::engine::{Effort, prepare};
    use crate::problem::{BitId, BitLit, Clauses};
    use crate::random::SplitMix64;

    /// A circuit of random gates over a few inputs, encoded both ways, with some clauses on top.
    struct Encoded {
        clauses: Clauses,
        vars: usize,
        inputs: usize,
    }

    impl Encoded {
        fn draw(random: &mut SplitMix64) -> Self {
            let inputs = 4 + random.below(4) as usize;
            let mut drawn = Self { clauses: Clauses::new(), vars: inputs, inputs };
            for _ in 0..3 + random.below(7) {
                drawn.gate(random);
            }
            for _ in 0..random.below(4) {
                let clause: Vec<i64> = (0..1 + random.below(3)).map(|_| drawn.literal(random)).collect();
                drawn.add(&clause);
            }
            drawn
        }

        fn literal(&self, random: &mut SplitMix64) -> i64 {
            let var = random.below(self.vars as u64) as i64 + 1;
            if random.coin() { var } else { -var }
        }

        fn add(&mut self, clause: &[i64]) {
            let lits: Vec<BitLit> = clause.iter().map(|&lit| BitLit::from_dimacs(lit).unwrap()).collect();
            self.clauses.push(&lits);
        }

        fn gate(&mut self, random: &mut SplitMix64) {
            let of: Vec<i64> = (0..2 + random.below(2)).map(|_| self.literal(random)).collect();
            let kind = random.below(3);
            self.vars += 1;
            let out = self.vars as i64;
            if kind == 0 {
                for &lit in &of {
                    self.add(&[-out, lit]);
                }
                let long: Vec<i64> = std::iter::once(out).chain(of.iter().map(|lit| -lit)).collect();
                return self.add(&long);
            }
            // A sum, or a majority (a conjunction, of two), row by row.
            for row in 0..1u32 << of.len() {
                let ones = row.count_ones() as usize;
                let value = if kind == 1 { ones % 2 == 1 } else { 2 * ones > of.len() };
                let forbidden = of.iter().enumerate().map(|(at, &lit)| if row >> at & 1 == 1 { -lit } else { lit });
                let clause: Vec<i64> = forbidden.chain([if value { out } else { -out }]).collect();
                self.add(&clause);
            }
        }

        fn brute(&self, shown: &[BitId]) -> usize {
            let holds = |row: u32, lit: &BitLit| (row >> lit.bit().index() & 1 == 1) != lit.is_negated();
            let models = (0..1u32 << self.vars)
                .filter(|&row| self.clauses.iter().all(|clause| clause.iter().any(|lit| holds(row, lit))));
            let mask = shown.iter().fold(0, |mask, bit| mask | 1 << bit.index());
            let seen: std::collections::BTreeSet<u32> = models.map(|row| row & mask).collect();
            seen.len()
        }
    }

    #[test]
    fn circuits_equal_brute_force_plain_and_shown() {
        let mut random = SplitMix64::new(12);
        let mut swept = 0;
        for round in 0..150 {
            let encoded = Encoded::draw(&mut random);
            let all: Vec<BitId> = (0..encoded.vars).map(BitId::new).collect();
            for shown in [&all[..], &all[..encoded.inputs], &all[..encoded.inputs - 1]] {
                let listed = (shown.len() < all.len()).then_some(shown);
                let prepared = prepare(&encoded.clauses, encoded.vars, listed, Effort::Models, &Budget::unlimited());
                let Some(count) = count(&prepared, 1 << 30, 1, &Budget::unlimited()) else { continue };
                swept += 1;
                assert_eq!(count, BigUint::from(encoded.brute(shown)), "round {round}, {} shown", shown.len());
            }
        }
        // Two of three show every input; a clause on top may swallow part of a definition, which is then not found.
        assert!(swept > 270, "nearly all that show every input are of this kind: {swept} of 300");
    }

    /// In `d = a xor (a and b)` the clause `a or not c or d` falls to `a or not c`, a part of the definition of c.
    #[test]
    fn a_definition_that_lost_a_clause_to_another_one_is_found() {
        let mut encoded = Encoded { clauses: Clauses::new(), vars: 4, inputs: 2 };
        for clause in [&[-3, 1][..], &[-3, 2], &[3, -1, -2], &[1, 3, -4], &[-1, 3, 4], &[1, -3, 4], &[-1, -3, -4]] {
            encoded.add(clause);
        }
        let prepared = prepare(&encoded.clauses, 4, None, Effort::Models, &Budget::unlimited());
        assert_eq!(prepared.clauses.len(), 6, "one clause is subsumed");
        assert_eq!(definitions(&prepared, 2).expect("two inputs").inputs, [0, 1]);
        assert_eq!(count(&prepared, 1 << 20, 1, &Budget::unlimited()), Some(BigUint::from(4u32)));
    }

    #[test]
    fn what_costs_too_much_is_left_alone() {
        let mut clauses = Clauses::new();
        let lits: Vec<BitLit> = (1..=40).map(|lit| BitLit::from_dimacs(lit).unwrap()).collect();
        lits.chunks(4).for_each(|clause| clauses.push(clause));
        let prepared = prepare(&clauses, 40, None, Effort::Models, &Budget::unlimited());
        assert_eq!(count(&prepared, 1 << 20, 1, &Budget::unlimited()), None);
    }
}
