//! Which clauses are grouped on which pivot.
//!
//! Takes clauses as sorted literals; gives [`Term`]s whose conjunction they are, each with the place of its first clause.
//!
//! Every clause goes to the group of one of its nodes. First greedily: the node whose group saves most takes all of its
//! clauses that are still free, and so on. Then clauses move one by one to another of their nodes where that saves
//! ANDs: the saving grows faster than a group, so clauses gather on few pivots, and clauses whose rests share literals
//! on the same one. The search stops after [`MOVES`] tries.

use std::collections::BinaryHeap;
use std::cmp::Reverse;

use crate::id::Id;
use crate::make::network::{Lit, NodeId};

/// Tries of moving a clause, over all rounds.
const MOVES: usize = 400_000;

/// Rounds over all clauses.
const ROUNDS: usize = 40;

/// Part of a conjunction.
#[derive(Clone, PartialEq, Eq, Debug)]
pub(super) enum Term {
    /// At least one holds.
    Clause(Vec<Lit>),
    /// `with` where the pivot holds, else `without`.
    Pivot { pivot: Lit, without: Vec<Term>, with: Vec<Term> },
}

impl Term {
    fn ands(&self) -> usize {
        match self {
            Term::Clause(lits) => lits.len().saturating_sub(1),
            Term::Pivot { without, with, .. } => 1 + conjunction_ands(without) + conjunction_ands(with),
        }
    }
}

fn conjunction_ands(terms: &[Term]) -> usize {
    terms.iter().map(Term::ands).sum::<usize>() + terms.len().saturating_sub(1)
}

/// The terms for these clauses, with local search.
pub(super) fn plan(clauses: &[Vec<Lit>]) -> Vec<(Term, usize)> {
    let mut groups = Groups::greedy(clauses);
    groups.improve();
    groups.terms()
}

/// The terms for what is left of some clauses, greedily.
fn rest(clauses: &[Vec<Lit>]) -> Vec<Term> {
    Groups::greedy(clauses).terms().into_iter().map(|(term, _)| term).collect()
}

/// Clauses by the pivot they are grouped on.
struct Groups<'a> {
    clauses: &'a [Vec<Lit>],
    /// The nodes of the clauses, sorted.
    nodes: Vec<NodeId>,
    /// The clauses of each node's group, in increasing order.
    groups: Vec<Vec<usize>>,
    /// The group of each clause; none for a clause of one literal.
    owner: Vec<Option<usize>>,
}

impl<'a> Groups<'a> {
    fn greedy(clauses: &'a [Vec<Lit>]) -> Self {
        let mut nodes: Vec<NodeId> = clauses.iter().flatten().map(|lit| lit.node()).collect();
        nodes.sort_unstable();
        nodes.dedup();
        let mut found = Self { clauses, groups: vec![Vec::new(); nodes.len()], owner: vec![None; clauses.len()], nodes };
        let mut uses = vec![Vec::new(); found.nodes.len()];
        // Occurrences of each node that are still free: plain and complemented.
        let mut free = vec![[0usize; 2]; found.nodes.len()];
        for (at, clause) in clauses.iter().enumerate().filter(|(_, clause)| clause.len() > 1) {
            for lit in clause {
                let node = found.place(*lit);
                uses[node].push(at);
                free[node][usize::from(lit.is_complemented())] += 1;
            }
        }
        let saving = |[plain, complemented]: [usize; 2]| {
            let count = plain + complemented;
            if plain > 0 && complemented > 0 { count } else { count.saturating_sub(1) }
        };
        let mut heap: BinaryHeap<(usize, Reverse<usize>)> =
            free.iter().enumerate().map(|(node, &free)| (saving(free), Reverse(node))).collect();
        while let Some((claimed, Reverse(node))) = heap.pop() {
            let now = saving(free[node]);
            if now == 0 {
                continue;
            }
            if now < claimed {
                heap.push((now, Reverse(node)));
                continue;
            }
            for &at in &uses[node] {
                if found.owner[at].is_none() {
                    found.owner[at] = Some(node);
                    found.groups[node].push(at);
                    for lit in &clauses[at] {
                        let node = found.place(*lit);
                        free[node][usize::from(lit.is_complemented())] -= 1;
                    }
                }
            }
        }
        // Clauses that share nothing with others.
        for at in 0..clauses.len() {
            if found.owner[at].is_none() && clauses[at].len() > 1 {
                let node = found.place(clauses[at][0]);
                found.owner[at] = Some(node);
                found.groups[node].push(at);
            }
        }
        found
    }

    fn place(&self, lit: Lit) -> usize {
        self.nodes.binary_search(&lit.node()).expect("a node of a clause")
    }

    /// Moves clauses while that saves ANDs.
    fn improve(&mut self) {
        let mut costs: Vec<usize> = (0..self.nodes.len()).map(|node| self.cost(node, &self.groups[node])).collect();
        let mut tries = 0;
        for round in 0..ROUNDS {
            let mut moved = false;
            for at in 0..self.clauses.len() {
                let Some(from) = self.owner[at] else { continue };
                let left: Vec<usize> = self.groups[from].iter().copied().filter(|&other| other != at).collect();
                let left_cost = self.cost(from, &left);
                let mut best: Option<(usize, usize, Vec<usize>, usize)> = None;
                for lit in &self.clauses[at] {
                    let to = self.place(*lit);
                    tries += 1;
                    if to == from || self.groups[to].is_empty() {
                        continue;
                    }
                    let mut joined = self.groups[to].clone();
                    joined.insert(joined.partition_point(|&other| other < at), at);
                    let cost = self.cost(to, &joined);
                    // What the change would make the two groups cost; at the same cost the larger group wins.
                    let (before, after) = (costs[from] + costs[to], left_cost + cost);
                    let gains = after < before || after == before && joined.len() > self.groups[from].len() && round % 2 == 1;
                    if gains && best.as_ref().is_none_or(|best| before - after > best.3) {
                        best = Some((to, cost, joined, before - after));
                    }
                }
                if let Some((to, cost, joined, _)) = best {
                    moved = true;
                    (costs[from], costs[to]) = (left_cost, cost);
                    self.groups[from].clone_from(&left);
                    self.groups[to] = joined;
                    self.owner[at] = Some(to);
                }
                if tries > MOVES {
                    return;
                }
            }
            if !moved && round % 2 == 1 {
                return;
            }
        }
    }

    /// ANDs of a group, with the one that joins it to the others.
    fn cost(&self, node: usize, group: &[usize]) -> usize {
        if group.is_empty() { 0 } else { self.term(node, group).ands() + 1 }
    }

    fn term(&self, node: usize, group: &[usize]) -> Term {
        if let [only] = group {
            return Term::Clause(self.clauses[*only].clone());
        }
        let pivot = Lit::new(self.nodes[node], false);
        let side = |of: Lit| -> Vec<Vec<Lit>> {
            let clauses = group.iter().map(|&at| &self.clauses[at]).filter(|clause| clause.contains(&of));
            let mut rests: Vec<Vec<Lit>> =
                clauses.map(|clause| clause.iter().copied().filter(|&lit| lit != of).collect()).collect();
            rests.sort_unstable();
            rests.dedup();
            rests
        };
        Term::Pivot { pivot, without: rest(&side(pivot)), with: rest(&side(!pivot)) }
    }

    fn terms(&self) -> Vec<(Term, usize)> {
        let single = |at: usize| (Term::Clause(self.clauses[at].clone()), at);
        let mut terms: Vec<(Term, usize)> =
            (0..self.clauses.len()).filter(|&at| self.owner[at].is_none()).map(single).collect();
        let used = self.groups.iter().enumerate().filter(|(_, group)| !group.is_empty());
        terms.extend(used.map(|(node, group)| (self.term(node, group), group[0])));
        terms.sort_by_key(|&(_, first)| first);
        terms
    }
}
