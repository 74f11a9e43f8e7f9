//! Solutions drawn from a certificate, each with the same probability.
//!
//! The graph gives every solution a rank from 0 to the count less one: a conjunction counts through its parts as digits,
//! a decision counts the side of 1 first, and each variable that a side does not speak of is a digit of two. So a uniform
//! rank, which is drawn by rejection from random bits, is a uniform solution, exactly.

use num_bigint::BigUint;
use num_traits::Zero;

use super::number::Counted;
use super::sets::VarSets;
use super::{Formula, Graph, Node, Refusal};
use crate::id::Id;
use crate::problem::{BitId, Bits};
use crate::random::SplitMix64;

/// Draws solutions from the graph of a checked certificate.
#[derive(Debug)]
pub struct Drawer<'a> {
    graph: &'a Graph,
    sets: VarSets,
    counts: Vec<BigUint>,
    total: BigUint,
    bit_count: usize,
}

impl<'a> Drawer<'a> {
    /// Ready to draw.
    pub fn new(formula: &Formula, graph: &'a Graph) -> Result<Self, Refusal> {
        let sets = VarSets::of(graph, formula.var_count, formula.shown.as_deref())?;
        let counted = Counted::new(graph, &sets);
        let (total, counts) = (counted.total(), counted.counts);
        Ok(Self { graph, sets, counts, total, bit_count: formula.bit_count })
    }

    /// How many solutions there are.
    pub fn total(&self) -> &BigUint {
        &self.total
    }

    /// A solution over the bits of the problem, each with the same probability; `None` where there is none.
    pub fn draw(&self, random: &mut SplitMix64) -> Option<Bits> {
        (!self.total.is_zero()).then(|| self.solution(below(&self.total, random)))
    }

    /// The solution of a rank, which must be below the total.
    pub fn solution(&self, rank: BigUint) -> Bits {
        assert!(rank < self.total, "rank {rank} of {}", self.total);
        let mut bits = Bits::zeros(self.bit_count);
        let root = self.graph.root();
        let rank = self.digits(self.sets.outside(root), rank, &mut bits);
        let mut open = vec![(root, rank)];
        while let Some((at, rank)) = open.pop() {
            let node = &self.graph.nodes()[at];
            match *node {
                Node::Never => unreachable!("a node without models has no ranks"),
                Node::Lit(lit) => self.set(lit.bit(), !lit.is_negated(), &mut bits),
                Node::All { .. } => {
                    let mut rank = rank;
                    for child in self.graph.children(node) {
                        let radix = &self.counts[child as usize];
                        open.push((child as usize, &rank % radix));
                        rank /= radix;
                    }
                }
                Node::Either { yes, no, .. } => open.push(self.side(at, yes as usize, no as usize, rank, &mut bits)),
            }
        }
        bits
    }

    /// The side of a decision that a rank belongs to, and its rank there.
    fn side(&self, at: usize, yes: usize, no: usize, rank: BigUint, bits: &mut Bits) -> (usize, BigUint) {
        if self.sets.shown_in(at) == 0 {
            // One model decides, and it is the first.
            return (if self.counts[yes].is_zero() { no } else { yes }, rank);
        }
        let first = &self.counts[yes] << self.sets.gap(at, yes).count();
        let (child, rank) = if rank < first { (yes, rank) } else { (no, rank - first) };
        let rank = self.digits(self.sets.gap(at, child), rank, bits);
        (child, rank)
    }

    /// Sets free variables by the lowest digits of a rank, and gives the rest.
    fn digits(&self, free: impl Iterator<Item = BitId>, rank: BigUint, bits: &mut Bits) -> BigUint {
        let mut used = 0u64;
        for bit in free {
            self.set(bit, rank.bit(used), bits);
            used += 1;
        }
        rank >> used
    }

    /// Sets a bit of the problem; variables of the formula that are none are left out.
    fn set(&self, bit: BitId, value: bool, bits: &mut Bits) {
        if bit.index() < self.bit_count {
            bits.set(bit, value);
        }
    }
}

/// A uniform number below `bound`.
fn below(bound: &BigUint, random: &mut SplitMix64) -> BigUint {
    let bits = bound.bits();
    let words = bits.div_ceil(32) as usize;
    loop {
        let mut digits: Vec<u32> = (0..words).map(|_| (random.next_u64() >> 32) as u32).collect();
        if let Some(last) = digits.last_mut()
            && !bits.is_multiple_of(32)
        {
            *last &= (1 << (bits % 32)) - 1;
        }
        let number = BigUint::new(digits);
        if &number < bound {
            return number;
        }
    }
}
