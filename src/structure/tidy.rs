//! Clauses in order: each literal once, sorted, no tautologies, with the clauses of each literal.

use crate::id::Id;
use crate::problem::{BitId, BitLit, Clauses};

/// Clauses without repeated literals and without those that always hold.
#[derive(Clone, Debug)]
pub struct Tidy {
    lits: Vec<BitLit>,
    ends: Vec<u32>,
    origins: Vec<u32>,
    /// The clauses of each literal: `used[starts[l]..starts[l + 1]]`.
    used: Vec<u32>,
    starts: Vec<u32>,
}

impl Tidy {
    /// Clauses over so many bits.
    pub fn new(clauses: &Clauses, bit_count: usize) -> Self {
        let mut tidy =
            Self { lits: Vec::new(), ends: Vec::new(), origins: Vec::new(), used: Vec::new(), starts: Vec::new() };
        let mut sorted: Vec<BitLit> = Vec::new();
        for (at, clause) in clauses.iter().enumerate() {
            sorted.clear();
            sorted.extend_from_slice(clause);
            sorted.sort_unstable();
            sorted.dedup();
            if sorted.windows(2).any(|pair| pair[0] == !pair[1]) {
                continue;
            }
            tidy.lits.extend_from_slice(&sorted);
            tidy.ends.push(tidy.lits.len() as u32);
            tidy.origins.push(at as u32);
        }
        tidy.index(bit_count);
        tidy
    }

    fn index(&mut self, bit_count: usize) {
        let mut starts = vec![0u32; 2 * bit_count + 1];
        self.lits.iter().for_each(|lit| starts[lit.index() + 1] += 1);
        (0..2 * bit_count).for_each(|at| starts[at + 1] += starts[at]);
        let mut next = starts.clone();
        let mut used = vec![0; self.lits.len()];
        for at in 0..self.len() {
            for lit in self.get(at) {
                let place = &mut next[lit.index()];
                used[*place as usize] = at as u32;
                *place += 1;
            }
        }
        (self.used, self.starts) = (used, starts);
    }

    /// How many clauses.
    pub fn len(&self) -> usize {
        self.ends.len()
    }

    /// Whether there is none.
    pub fn is_empty(&self) -> bool {
        self.ends.is_empty()
    }

    /// How many bits they are over.
    pub fn bit_count(&self) -> usize {
        (self.starts.len() - 1) / 2
    }

    /// How many literals all clauses have together.
    pub fn lit_count(&self) -> usize {
        self.lits.len()
    }

    /// The literals of a clause in increasing order.
    pub fn get(&self, at: usize) -> &[BitLit] {
        let start = if at == 0 { 0 } else { self.ends[at - 1] };
        &self.lits[start as usize..self.ends[at] as usize]
    }

    /// The place of a clause in the list that was tidied.
    pub fn origin(&self, at: usize) -> u32 {
        self.origins[at]
    }

    /// The clauses with this literal, in increasing order.
    pub fn with(&self, lit: BitLit) -> &[u32] {
        &self.used[self.starts[lit.index()] as usize..self.starts[lit.index() + 1] as usize]
    }

    /// All literals.
    pub fn all_lits(&self) -> impl Iterator<Item = BitLit> + use<> {
        (0..self.bit_count()).flat_map(|bit| [true, false].map(|value| BitLit::new(BitId::new(bit), value)))
    }
}
