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
    unique: FxHashMap<Decision, Edge>,
    alls: FxHashMap<(Edge, Edge), Edge>,
    odds: FxHashMap<(Edge, Edge), Edge>,
    nevers: FxHashMap<[Edge; 3], bool>,
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
        if let Some(&known) = self.alls.get(&(a, b)) {
            return Ok(known);
        }
        self.spend()?;
        let level = self.level(a).min(self.level(b));
        let [(a1, a0), (b1, b0)] = [a, b].map(|edge| self.branches(edge, level));
        let (high, low) = (self.all(a1, b1)?, self.all(a0, b0)?);
        let all = self.decide(level, high, low)?;
        self.lemma(level, &[!a, !b, all]);
        self.lemma(level, &[!all, a]);
        self.lemma(level, &[!all, b]);
        self.alls.insert((a, b), all);
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
        if let Some(&known) = self.odds.get(&(a, b)) {
            return Ok(known ^ flip);
        }
        self.spend()?;
        let level = self.level(a).min(self.level(b));
        let [(a1, a0), (b1, b0)] = [a, b].map(|edge| self.branches(edge, level));
        let (high, low) = (self.odd(a1, b1)?, self.odd(a0, b0)?);
        let odd = self.decide(level, high, low)?;
        for (a, b, odd) in [(!a, !b, !odd), (!a, b, odd), (a, !b, odd), (a, b, !odd)] {
            self.lemma(level, &[a, b, odd]);
        }
        self.odds.insert((a, b), odd);
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
        if let Some(&known) = self.nevers.get(&edges) {
            return Ok(known);
        }
        self.spend()?;
        let level = edges.iter().map(|&edge| self.level(edge)).min().expect("three edges");
        let branches = edges.map(|edge| self.branches(edge, level));
        let is_never = self.never(branches.map(|(high, _)| high))? && self.never(branches.map(|(_, low)| low))?;
        if is_never {
            self.lemma(level, &edges.map(|edge| !edge));
        }
        self.nevers.insert(edges, is_never);
        Ok(is_never)
    }

    /// Adds a clause of literals and edges that follows by propagation; not where a constant makes it hold.
    pub(super) fn conclude(&mut self, lits: &[Lit], edges: &[Edge]) {
        if let Some(clause) = self.clause(lits, edges) {
            self.add(clause);
        }
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

    fn add(&mut self, clause: Vec<Lit>) {
        self.passing.push(self.proof.len());
        self.proof.add(clause);
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
        } else {
            self.lits.push(Lit::new(self.next_var, true));
            self.next_var += 1;
            // The defined literal comes first: these are no consequences, but definitions of a new variable.
            for (node, branch, on) in [
                (edge, !decision.high, !leaf),
                (edge, !decision.low, leaf),
                (!edge, decision.high, !leaf),
                (!edge, decision.low, leaf),
            ] {
                self.conclude(&[self.lit(node), on], &[branch]);
            }
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

    /// Derives a clause from what was derived for the branches, by cases of the leaf.
    fn lemma(&mut self, level: u32, edges: &[Edge]) {
        let leaf = self.leaves[level as usize];
        let (Some(whole), Some(case)) = (self.clause(&[], edges), self.clause(&[!leaf], edges)) else { return };
        self.proof.add(case.iter().copied());
        self.add(whole);
        self.proof.delete(case);
    }
}
