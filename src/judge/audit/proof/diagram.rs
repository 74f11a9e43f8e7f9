//! Binary decision diagrams that say in a proof why each of their steps is right.
//!
//! Input: leaves (literals of the miter) in an order. Output: edges, and the clauses of a [`Proof`] in which every node is
//! a variable of its own, defined by its leaf and its two branches, and in which every conjunction, parity and
//! contradiction that was computed is derived from those of its branches.
//!
//! R. Bryant, "Graph-based algorithms for Boolean function manipulation", IEEE Trans. Computers 35 (1986); C. Sinz,
//! A. Biere, "Extended resolution proofs for conjoining BDDs", CSR 2006; R. Bryant, M. Heule, "Generating extended
//! resolution proofs with a BDD-based SAT solver", TACAS 2021 (all from memory). Edges carry negation here, so a lemma
//! serves a function and its negation, and parities are as small as conjunctions.

use rustc_hash::FxHashMap;

use crate::sat::Lit;
use crate::sat::drat::{Proof, Step};

/// A node or its negation: `node << 1 | negated`. Node 0 is the constant "no".
#[derive(Clone, Copy, PartialEq, Eq, PartialOrd, Ord, Hash, Debug)]
pub(super) struct Edge(u32);

impl Edge {
    /// Never.
    pub(super) const NO: Edge = Edge(0);
    /// Always.
    pub(super) const YES: Edge = Edge(1);

    fn node(self) -> usize {
        (self.0 >> 1) as usize
    }

    fn is_negated(self) -> bool {
        self.0 & 1 == 1
    }

    fn is_constant(self) -> bool {
        self.node() == 0
    }
}

impl std::ops::Not for Edge {
    type Output = Self;
    fn not(self) -> Self {
        Self(self.0 ^ 1)
    }
}

impl std::ops::BitXor<bool> for Edge {
    type Output = Self;
    fn bitxor(self, flip: bool) -> Self {
        Self(self.0 ^ u32::from(flip))
    }
}

/// A decision: `high` where the leaf of the level holds, else `low`. `high` is not negated, and they differ.
#[derive(Clone, Copy, PartialEq, Eq, Hash, Debug)]
struct Decision {
    level: u32,
    high: Edge,
    low: Edge,
}

/// The diagrams were about to grow beyond their limit.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub(super) struct TooLarge;

/// Where a clause needs no step, because a constant or the choice of nodes makes it hold.
const NO_STEP: u32 = u32::MAX;
const NO_STEPS: [u32; 4] = [NO_STEP; 4];

/// Diagrams over the same leaves.
#[derive(Debug)]
pub(super) struct Diagrams {
    /// What was derived.
    proof: Proof,
    /// The steps of the proof whose clauses are of use only while there are diagrams.
    passing: Vec<usize>,
    /// The first variable that nobody uses.
    next_var: usize,
    /// The leaf of each level.
    leaves: Vec<Lit>,
    decisions: Vec<Decision>,
    /// The literal of each node.
    lits: Vec<Lit>,
    /// The steps that define each node: two for where its leaf holds, two for where it does not.
    definitions: Vec<[u32; 4]>,
    unique: FxHashMap<Decision, Edge>,
    /// Results, each with the steps that say so.
    alls: FxHashMap<(Edge, Edge), (Edge, [u32; 4])>,
    odds: FxHashMap<(Edge, Edge), (Edge, [u32; 4])>,
    nevers: FxHashMap<[Edge; 3], (bool, [u32; 4])>,
    /// Steps that may still be made.
    left: usize,
}

impl Diagrams {
    /// No node yet. Variables from `next_var` on are free; so many steps may be made.
    pub(super) fn new(leaves: Vec<Lit>, next_var: usize, steps: usize) -> Self {
        let constant = Decision { level: u32::MAX, high: Edge::NO, low: Edge::NO };
        Self {
            proof: Proof::new(),
            passing: Vec::new(),
            next_var,
            leaves,
            decisions: vec![constant],
            // The constant has no literal: clauses leave it out.
            lits: vec![Lit::new(0, true)],
            definitions: vec![NO_STEPS],
            unique: FxHashMap::default(),
            alls: FxHashMap::default(),
            odds: FxHashMap::default(),
            nevers: FxHashMap::default(),
            left: steps,
        }
    }

    /// The function that is the leaf of a level.
    pub(super) fn leaf(&mut self, level: usize) -> Result<Edge, TooLarge> {
        self.decide(level as u32, Edge::YES, Edge::NO)
    }

    /// Both hold. Derived: `all` just where `a` and `b`.
    pub(super) fn all(&mut self, a: Edge, b: Edge) -> Result<Edge, TooLarge> {
        let (a, b) = (a.min(b), a.max(b));
        match (a, b) {
            (Edge::NO, _) => return Ok(Edge::NO),
            (Edge::YES, _) => return Ok(b),
            _ if a == b => return Ok(a),
            _ if a == !b => return Ok(Edge::NO),
            _ => {}
        }
        if let Some(&(known, _)) = self.alls.get(&(a, b)) {
            return Ok(known);
        }
        self.spend()?;
        let level = self.level(a).min(self.level(b));
        let [(a1, a0), (b1, b0)] = [a, b].map(|edge| self.branches(edge, level));
        let (high, low) = (self.all(a1, b1)?, self.all(a0, b0)?);
        let all = self.decide(level, high, low)?;
        let steps = |a: Edge, b: Edge| self.alls.get(&(a.min(b), a.max(b))).map_or(NO_STEPS, |&(_, steps)| steps);
        let below = [steps(a1, b1), steps(a0, b0)];
        let lemmas: [&[Edge]; 3] = [&[!a, !b, all], &[!all, a], &[!all, b]];
        let [first, second, third] = lemmas.map(|lemma| self.lemma(level, lemma, &below));
        self.alls.insert((a, b), (all, [first, second, third, NO_STEP]));
        Ok(all)
    }

    /// One of them holds and not the other. Derived: `odd` just where `a` and `b` differ.
    pub(super) fn odd(&mut self, a: Edge, b: Edge) -> Result<Edge, TooLarge> {
        let flip = a.is_negated() != b.is_negated();
        let (a, b) = (a ^ a.is_negated(), b ^ b.is_negated());
        let (a, b) = (a.min(b), a.max(b));
        match (a, b) {
            (Edge::NO, _) => return Ok(b ^ flip),
            _ if a == b => return Ok(Edge::NO ^ flip),
            _ => {}
        }
        if let Some(&(known, _)) = self.odds.get(&(a, b)) {
            return Ok(known ^ flip);
        }
        self.spend()?;
        let level = self.level(a).min(self.level(b));
        let [(a1, a0), (b1, b0)] = [a, b].map(|edge| self.branches(edge, level));
        let (high, low) = (self.odd(a1, b1)?, self.odd(a0, b0)?);
        let odd = self.decide(level, high, low)?;
        let steps = |a: Edge, b: Edge| {
            let (a, b) = (a ^ a.is_negated(), b ^ b.is_negated());
            self.odds.get(&(a.min(b), a.max(b))).map_or(NO_STEPS, |&(_, steps)| steps)
        };
        let below = [steps(a1, b1), steps(a0, b0)];
        let lemmas = [[!a, !b, !odd], [!a, b, odd], [a, !b, odd], [a, b, !odd]];
        let steps = lemmas.map(|lemma| self.lemma(level, &lemma, &below));
        self.odds.insert((a, b), (odd, steps));
        Ok(odd ^ flip)
    }

    /// Whether the three never hold together. Derived, if so: one of them does not.
    pub(super) fn never(&mut self, edges: [Edge; 3]) -> Result<bool, TooLarge> {
        let mut edges = edges;
        edges.sort_unstable();
        if edges[0] == Edge::NO || edges.windows(2).any(|pair| pair[0] == !pair[1]) {
            return Ok(true);
        }
        if edges.iter().all(|&edge| edge == Edge::YES) {
            return Ok(false);
        }
        if let Some(&(known, _)) = self.nevers.get(&edges) {
            return Ok(known);
        }
        self.spend()?;
        let level = edges.iter().map(|&edge| self.level(edge)).min().expect("three edges");
        let branches = edges.map(|edge| self.branches(edge, level));
        let [high, low] = [branches.map(|(high, _)| high), branches.map(|(_, low)| low)];
        let is_never = self.never(high)? && self.never(low)?;
        let mut steps = NO_STEPS;
        if is_never {
            let below = [high, low].map(|mut edges| {
                edges.sort_unstable();
                self.nevers.get(&edges).map_or(NO_STEPS, |&(_, steps)| steps)
            });
            steps[0] = self.lemma(level, &edges.map(|edge| !edge), &below);
        }
        self.nevers.insert(edges, (is_never, steps));
        Ok(is_never)
    }

    /// Adds a clause of literals and edges that follows by propagation; not where a constant makes it hold.
    pub(super) fn conclude(&mut self, lits: &[Lit], edges: &[Edge]) -> Option<u32> {
        let clause = self.clause(lits, edges)?;
        Some(self.add(clause, &[]))
    }

    /// Adds a clause that follows by propagation and outlives the diagrams.
    pub(super) fn result(&mut self, lits: &[Lit]) {
        self.proof.add(lits.iter().copied());
    }

    /// The whole proof, at its end without the clauses about nodes; and the first variable that it does not use.
    pub(super) fn finish(mut self) -> (Proof, usize) {
        for at in std::mem::take(&mut self.passing) {
            let Step::Add(clause) = self.proof.step(at) else { unreachable!("an addition") };
            let clause = clause.to_vec();
            self.proof.delete(clause);
        }
        (self.proof, self.next_var)
    }

    fn add(&mut self, clause: Vec<Lit>, hints: &[u32]) -> u32 {
        let step = self.proof.len();
        self.passing.push(step);
        self.proof.add_with(clause, hints);
        step as u32
    }

    /// How many steps are left.
    pub(super) fn left(&self) -> usize {
        self.left
    }

    fn spend(&mut self) -> Result<(), TooLarge> {
        self.left = self.left.checked_sub(1).ok_or(TooLarge)?;
        Ok(())
    }

    /// The level at which an edge decides; beyond all levels for a constant.
    pub(super) fn level(&self, edge: Edge) -> u32 {
        self.decisions[edge.node()].level
    }

    /// What an edge is where the leaf of a level holds and where it does not.
    fn branches(&self, edge: Edge, level: u32) -> (Edge, Edge) {
        let decision = self.decisions[edge.node()];
        match decision.level == level {
            true => (decision.high ^ edge.is_negated(), decision.low ^ edge.is_negated()),
            false => (edge, edge),
        }
    }

    fn decide(&mut self, level: u32, high: Edge, low: Edge) -> Result<Edge, TooLarge> {
        if high == low {
            return Ok(high);
        }
        let flip = high.is_negated();
        let decision = Decision { level, high: high ^ flip, low: low ^ flip };
        if let Some(&known) = self.unique.get(&decision) {
            return Ok(known ^ flip);
        }
        self.spend()?;
        let edge = Edge(u32::try_from(self.decisions.len()).expect("fewer than 2^31 nodes") << 1);
        self.decisions.push(decision);
        let leaf = self.leaves[level as usize];
        if decision.high == Edge::NO && decision.low == Edge::YES {
            // The negation of the leaf needs no variable of its own.
            self.lits.push(!leaf);
            self.definitions.push(NO_STEPS);
        } else {
            self.lits.push(Lit::new(self.next_var, true));
            self.next_var += 1;
            // The defined literal comes first: these are no consequences, but definitions of a new variable.
            let definition = [
                (edge, !decision.high, !leaf),
                (!edge, decision.high, !leaf),
                (edge, !decision.low, leaf),
                (!edge, decision.low, leaf),
            ];
            let steps =
                definition.map(|(node, branch, on)| self.conclude(&[self.lit(node), on], &[branch]).unwrap_or(NO_STEP));
            self.definitions.push(steps);
        }
        self.unique.insert(decision, edge);
        Ok(edge ^ flip)
    }

    /// The literal of an edge that is no constant.
    fn lit(&self, edge: Edge) -> Lit {
        let lit = self.lits[edge.node()];
        if edge.is_negated() { !lit } else { lit }
    }

    /// A clause without its constants; `None` where it holds in any case.
    fn clause(&self, lits: &[Lit], edges: &[Edge]) -> Option<Vec<Lit>> {
        let mut clause = lits.to_vec();
        for (at, &edge) in edges.iter().enumerate() {
            if edge == Edge::YES || edges[..at].contains(&!edge) {
                return None;
            }
            if !edge.is_constant() && !edges[..at].contains(&edge) {
                clause.push(self.lit(edge));
            }
        }
        Some(clause)
    }

    /// Derives a clause from what was derived for the branches, by cases of the leaf; `below` are the steps about the
    /// branches where it holds and where it does not.
    fn lemma(&mut self, level: u32, edges: &[Edge], below: &[[u32; 4]; 2]) -> u32 {
        let leaf = self.leaves[level as usize];
        let (Some(whole), Some(case)) = (self.clause(&[], edges), self.clause(&[!leaf], edges)) else { return NO_STEP };
        let mut hints: [Vec<u32>; 2] = [Vec::with_capacity(10), Vec::with_capacity(11)];
        let first = self.proof.len() as u32;
        hints[1].push(first);
        for (part, hints) in hints.iter_mut().enumerate() {
            for &edge in edges.iter().filter(|&&edge| self.level(edge) == level) {
                hints.extend_from_slice(&self.definitions[edge.node()][2 * part..2 * part + 2]);
            }
            hints.extend_from_slice(&below[part]);
            hints.retain(|&hint| hint != NO_STEP);
        }
        self.proof.add_with(case.iter().copied(), &hints[0]);
        let step = self.add(whole, &hints[1]);
        self.proof.delete(case);
        step
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::budget::Budget;
    use crate::random::SplitMix64;
    use crate::sat::Formula;
    use crate::sat::check::{Refused, check};

    const LEAVES: usize = 5;

    /// Clauses without a model over two other variables, so that every step has to stand on those before it.
    fn other_clauses() -> Formula {
        let mut formula = Formula::new(LEAVES + 2);
        let lit = |at: usize, value| Lit::new(LEAVES + at, value);
        for (a, b) in [(true, true), (true, false), (false, true), (false, false)] {
            formula.push([lit(0, a), lit(1, b)]);
        }
        formula
    }

    /// The function of an edge on an input, by its decisions.
    fn value(diagrams: &Diagrams, edge: Edge, input: usize) -> bool {
        let mut edge = edge;
        while !edge.is_constant() {
            let level = diagrams.level(edge);
            let (high, low) = diagrams.branches(edge, level);
            edge = if input >> level & 1 == 1 { high } else { low };
        }
        edge == Edge::YES
    }

    /// Random functions have the right diagrams, and every step of their proof is accepted.
    #[test]
    fn steps_are_right_and_follow() {
        for seed in 0..40 {
            let mut random = SplitMix64::new(seed);
            let leaves = (0..LEAVES).map(|var| Lit::new(var, seed % 3 != 0)).collect();
            let mut diagrams = Diagrams::new(leaves, LEAVES + 2, 1 << 16);
            let mut found: Vec<(Edge, u32)> = Vec::new();
            for level in 0..LEAVES {
                let table = (0..1 << LEAVES).filter(|input| input >> level & 1 == 1).map(|input| 1_u32 << input).sum();
                found.push((diagrams.leaf(level).unwrap(), table));
            }
            for _ in 0..14 {
                let mut pick = || {
                    let (edge, table) = found[random.below(found.len() as u64) as usize];
                    if random.coin() { (edge, table) } else { (!edge, !table) }
                };
                let [(a, table_a), (b, table_b), (c, table_c)] = [pick(), pick(), pick()];
                found.push((diagrams.all(a, b).unwrap(), table_a & table_b));
                found.push((diagrams.odd(a, b).unwrap(), table_a ^ table_b));
                assert_eq!(diagrams.never([a, b, c]), Ok(table_a & table_b & table_c == 0));
            }
            for &(edge, table) in &found {
                (0..1 << LEAVES).for_each(|input| assert_eq!(value(&diagrams, edge, input), table >> input & 1 == 1));
                assert!(found.iter().all(|other| (other.0 == edge) == (other.1 == table)), "one function, one edge");
            }
            let (mut proof, _) = diagrams.finish();
            assert_eq!(check(&other_clauses(), &proof, &Budget::unlimited()), Err(Refused::NoConflict));
            proof.add([Lit::new(LEAVES, true)]);
            proof.add([]);
            assert!(check(&other_clauses(), &proof, &Budget::unlimited()).is_ok());
        }
    }

    #[test]
    fn the_steps_are_limited() {
        let mut diagrams = Diagrams::new((0..LEAVES).map(|var| Lit::new(var, true)).collect(), LEAVES, 12);
        let leaves: Vec<Edge> = (0..LEAVES).map(|level| diagrams.leaf(level).unwrap()).collect();
        let sum = leaves.into_iter().try_fold(Edge::NO, |sum, leaf| diagrams.odd(sum, leaf));
        assert_eq!((sum, diagrams.left()), (Err(TooLarge), 0));
    }
}
