//! Which clauses are grouped on which pivot.
//!
//! Takes clauses as sorted literals; gives [`Term`]s whose conjunction they are, each with the place of its first clause.
//!
//! Every clause goes to the group of one of its nodes. First greedily: the node whose group saves most takes all of its
//! clauses that are still free, and so on. Then clauses move one by one to another of their nodes where that saves
//! ANDs: the saving grows faster than a group, so clauses gather on few pivots, and clauses whose rests share literals
//! on the same one. The search stops after [`MOVES`] tries.

use std::cmp::Reverse;
use std::collections::BinaryHeap;

use crate::make::network::{Lit, NodeId};

/// Tries of moving a clause, over all rounds.
const MOVES: usize = 1_000_000;

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
        let mut found =
            Self { clauses, groups: vec![Vec::new(); nodes.len()], owner: vec![None; clauses.len()], nodes };
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
        for (at, clause) in clauses.iter().enumerate() {
            if found.owner[at].is_none() && clause.len() > 1 {
                let node = found.place(clause[0]);
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
        let mut scratch = Vec::new();
        let mut costs: Vec<usize> = (0..self.nodes.len())
            .map(|node| self.cost(&mut scratch, node, self.groups[node].iter().copied()))
            .collect();
        let mut tries = 0;
        for round in 0..ROUNDS {
            let mut moved = false;
            for at in 0..self.clauses.len() {
                let Some(from) = self.owner[at] else { continue };
                let left = self.groups[from].iter().copied().filter(|&other| other != at);
                let left_cost = self.cost(&mut scratch, from, left);
                let mut best: Option<(usize, usize, usize)> = None;
                for lit in &self.clauses[at] {
                    let to = self.place(*lit);
                    tries += 1;
                    if to == from || self.groups[to].is_empty() {
                        continue;
                    }
                    let cost = self.cost(&mut scratch, to, self.groups[to].iter().copied().chain([at]));
                    // What the change would make the two groups cost; at the same cost the larger group wins.
                    let (before, after) = (costs[from] + costs[to], left_cost + cost);
                    let larger = self.groups[to].len() + 1 > self.groups[from].len();
                    let gains = after < before || after == before && larger && round % 2 == 1;
                    if gains && best.is_none_or(|best| before - after > best.2) {
                        best = Some((to, cost, before - after));
                    }
                }
                if let Some((to, cost, _)) = best {
                    moved = true;
                    (costs[from], costs[to]) = (left_cost, cost);
                    self.groups[from].retain(|&other| other != at);
                    let place = self.groups[to].partition_point(|&other| other < at);
                    self.groups[to].insert(place, at);
                    self.owner[at] = Some(to);
                }
            }
            if tries > MOVES || !moved && round % 2 == 1 {
                return;
            }
        }
    }

    /// ANDs of a group, with the one that joins it to the others.
    fn cost(
        &self,
        scratch: &mut Vec<(usize, NodeId)>,
        node: usize,
        group: impl Iterator<Item = usize> + Clone,
    ) -> usize {
        scratch.clear();
        let mut members = [0; 2];
        let mut ands = 0;
        for at in group.clone() {
            let lits = &self.clauses[at];
            let pivot = lits.iter().find(|lit| lit.node() == self.nodes[node]).expect("the pivot of the group");
            let side = usize::from(pivot.is_complemented());
            members[side] += 1;
            ands += lits.len() - 2;
            scratch.extend(lits.iter().filter(|&lit| lit != pivot).map(|lit| (side, lit.node())));
        }
        match members {
            [0, 0] => return 0,
            // A clause of k literals, and the AND that joins it.
            [1, 0] | [0, 1] => return ands + 2,
            _ => {}
        }
        scratch.sort_unstable();
        if scratch.windows(2).all(|pair| pair[0] != pair[1]) {
            // Nothing to group in the rests: a chain on each side, the choice, and the AND that joins it.
            return ands + members.map(|count: usize| count.saturating_sub(1)).iter().sum::<usize>() + 2;
        }
        let group: Vec<usize> = group.collect();
        self.term(node, &group).ands() + 1
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
