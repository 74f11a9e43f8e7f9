//! Clauses in groups, each around one node, and what a group costs.
//!
//! Takes clauses as sorted literals; gives the groups that a greedy choice makes, changes them clause by clause, and
//! turns them into terms. Holds: a clause of two literals or more is in exactly one group, that of one of its nodes.

use std::cmp::Reverse;
use std::collections::BinaryHeap;

use super::{Term, rest};
use crate::make::network::pass::lists::Lists;
use crate::make::network::{Lit, NodeId};

/// The clauses around a node.
#[derive(Clone, Default)]
struct Group {
    /// In increasing order.
    clauses: Vec<u32>,
    /// How many have the node plain, and how many complemented.
    sides: [u32; 2],
    /// ANDs of the rests, each without the one that joins it to the others.
    ands: u32,
    /// Whether two rests on one side share a node.
    shares: bool,
    /// ANDs of the group, with the one that joins it to the others; known after [`Groups::price`].
    cost: usize,
}

impl Group {
    /// The cost where no rests share a node: a chain on each side, the choice, and the AND that joins it.
    fn plain_cost(sides: [u32; 2], ands: u32) -> usize {
        let joined = match sides {
            [0, 0] => 0,
            // A clause of k literals, and the AND that joins it.
            [1, 0] | [0, 1] => 2,
            _ => sides.map(|count| count.saturating_sub(1)).iter().sum::<u32>() + 2,
        };
        (ands + joined) as usize
    }
}

/// Clauses by the node they are grouped on.
pub(super) struct Groups<'a> {
    clauses: &'a [Vec<Lit>],
    /// The nodes of the clauses, sorted; a place is an index into these.
    nodes: Vec<NodeId>,
    /// The places of the literals of each clause, one clause after the other.
    places: Vec<u32>,
    /// Where the places of each clause start; one more for the end.
    starts: Vec<u32>,
    groups: Vec<Group>,
    /// The group of each clause; [`NO_GROUP`] for a clause of one literal.
    owner: Vec<u32>,
}

const NO_GROUP: u32 = u32::MAX;

impl<'a> Groups<'a> {
    /// Again and again, the node whose group saves most takes all of its clauses that are still free.
    pub(super) fn greedy(clauses: &'a [Vec<Lit>]) -> Self {
        let mut nodes: Vec<NodeId> = clauses.iter().flatten().map(|lit| lit.node()).collect();
        nodes.sort_unstable();
        nodes.dedup();
        let place = |lit: &Lit| nodes.binary_search(&lit.node()).expect("a node of a clause") as u32;
        let places: Vec<u32> = clauses.iter().flatten().map(place).collect();
        let mut starts = vec![0u32];
        clauses.iter().for_each(|clause| starts.push(starts[starts.len() - 1] + clause.len() as u32));
        let groups = vec![Group::default(); nodes.len()];
        let mut found = Self { clauses, nodes, places, starts, groups, owner: vec![NO_GROUP; clauses.len()] };
        found.take_most();
        // Clauses that share nothing with others.
        for (at, clause) in clauses.iter().enumerate() {
            if found.owner[at] == NO_GROUP && clause.len() > 1 {
                found.add(found.places(at)[0] as usize, at);
            }
        }
        found
    }

    fn take_most(&mut self) {
        let long = |&(_, clause): &(usize, &Vec<Lit>)| clause.len() > 1;
        let entries = self.clauses.iter().enumerate().filter(long);
        let uses = Lists::new(
            self.nodes.len(),
            entries.clone().flat_map(|(at, _)| self.places(at).iter().map(move |&place| (place as usize, at))),
        );
        // Occurrences of each node that are still free: plain and complemented.
        let mut free = vec![[0u32; 2]; self.nodes.len()];
        for (at, clause) in entries {
            let both = self.places(at).iter().zip(clause);
            both.for_each(|(&place, lit)| free[place as usize][usize::from(lit.is_complemented())] += 1);
        }
        let saving = |[plain, complemented]: [u32; 2]| {
            let count = plain + complemented;
            if plain > 0 && complemented > 0 { count } else { count.saturating_sub(1) }
        };
        let mut heap: BinaryHeap<(u32, Reverse<u32>)> =
            free.iter().enumerate().map(|(place, &free)| (saving(free), Reverse(place as u32))).collect();
        while let Some((claimed, Reverse(place))) = heap.pop() {
            let now = saving(free[place as usize]);
            if now == 0 {
                continue;
            }
            if now < claimed {
                heap.push((now, Reverse(place)));
                continue;
            }
            for at in uses.of(place as usize).iter().map(|&at| at as usize) {
                if self.owner[at] == NO_GROUP {
                    self.add(place as usize, at);
                    let both = self.places(at).iter().zip(&self.clauses[at]);
                    both.for_each(|(&place, lit)| free[place as usize][usize::from(lit.is_complemented())] -= 1);
                }
            }
        }
    }

    pub(super) fn clause_count(&self) -> usize {
        self.clauses.len()
    }

    /// The places of the nodes of a clause, in the order of its literals.
    pub(super) fn places(&self, at: usize) -> &[u32] {
        &self.places[self.starts[at] as usize..self.starts[at + 1] as usize]
    }

    pub(super) fn owner(&self, at: usize) -> Option<usize> {
        Some(self.owner[at]).filter(|&owner| owner != NO_GROUP).map(|owner| owner as usize)
    }

    pub(super) fn is_empty(&self, place: usize) -> bool {
        self.groups[place].clauses.is_empty()
    }

    pub(super) fn len(&self, place: usize) -> usize {
        self.groups[place].clauses.len()
    }

    /// The ANDs of a group, the one that joins it to the others included.
    pub(super) fn cost(&self, place: usize) -> usize {
        self.groups[place].cost
    }

    /// Whether the node at this place is plain (0) or complemented (1) in one of its clauses.
    fn side(&self, place: usize, at: usize) -> usize {
        let here = self.places(at).iter().position(|&other| other as usize == place);
        usize::from(self.clauses[at][here.expect("the pivot of the group")].is_complemented())
    }

    fn sides_with(&self, place: usize, at: usize) -> [u32; 2] {
        let mut sides = self.groups[place].sides;
        sides[self.side(place, at)] += 1;
        sides
    }

    /// Puts a clause into a group; the cost is not changed.
    fn add(&mut self, place: usize, at: usize) {
        let sides = self.sides_with(place, at);
        let ands = self.clauses[at].len() as u32 - 2;
        let group = &mut self.groups[place];
        let before = group.clauses.partition_point(|&other| (other as usize) < at);
        group.clauses.insert(before, at as u32);
        (group.sides, group.ands) = (sides, group.ands + ands);
        self.owner[at] = place as u32;
    }

    /// Works out the cost of every group.
    pub(super) fn price(&mut self) {
        for place in 0..self.groups.len() {
            self.groups[place].shares = self.shares(place);
            let Group { sides, ands, shares, ref clauses, .. } = self.groups[place];
            let cost = if shares { self.term(place, clauses).ands() + 1 } else { Group::plain_cost(sides, ands) };
            self.groups[place].cost = cost;
        }
    }

    /// Whether two rests on one side of a group share a node.
    fn shares(&self, place: usize) -> bool {
        let clauses = &self.groups[place].clauses;
        (1..clauses.len()).any(|upto| self.meets(place, clauses[upto] as usize, &clauses[..upto]))
    }

    /// Whether the rest of a clause shares a node with that of one of these on the same side.
    fn meets(&self, place: usize, at: usize, others: &[u32]) -> bool {
        let (side, own) = (self.side(place, at), self.places(at));
        others.iter().map(|&other| other as usize).filter(|&other| other != at).any(|other| {
            let shared = |node: &u32| *node as usize != place && own.contains(node);
            self.places(other).iter().any(shared) && self.side(place, other) == side
        })
    }

    /// The cost of a group without one of its clauses.
    pub(super) fn cost_without(&self, place: usize, at: usize) -> usize {
        let group = &self.groups[place];
        let mut sides = group.sides;
        sides[self.side(place, at)] -= 1;
        if !group.shares || group.clauses.len() <= 2 {
            return Group::plain_cost(sides, group.ands - (self.clauses[at].len() as u32 - 2));
        }
        let left: Vec<u32> = group.clauses.iter().copied().filter(|&other| other as usize != at).collect();
        self.term(place, &left).ands() + 1
    }

    /// The cost of a group that is not empty with one more clause.
    pub(super) fn cost_with(&self, place: usize, at: usize) -> usize {
        let group = &self.groups[place];
        if !group.shares && !self.meets(place, at, &group.clauses) {
            return Group::plain_cost(self.sides_with(place, at), group.ands + self.clauses[at].len() as u32 - 2);
        }
        let before = group.clauses.partition_point(|&other| (other as usize) < at);
        let mut with = group.clauses.clone();
        with.insert(before, at as u32);
        self.term(place, &with).ands() + 1
    }

    /// Moves a clause from one group to another, whose costs are then these.
    pub(super) fn move_clause(&mut self, at: usize, from: (usize, usize), to: (usize, usize)) {
        let side = self.side(from.0, at);
        let group = &mut self.groups[from.0];
        group.clauses.retain(|&other| other as usize != at);
        group.sides[side] -= 1;
        group.ands -= self.clauses[at].len() as u32 - 2;
        group.cost = from.1;
        if group.shares {
            self.groups[from.0].shares = self.shares(from.0);
        }
        let meets = self.meets(to.0, at, &self.groups[to.0].clauses);
        self.add(to.0, at);
        let group = &mut self.groups[to.0];
        group.shares |= meets;
        group.cost = to.1;
    }

    fn term(&self, place: usize, group: &[u32]) -> Term {
        if let [only] = group {
            return Term::Clause(self.clauses[*only as usize].clone());
        }
        let pivot = Lit::new(self.nodes[place], false);
        let side = |of: Lit| -> Vec<Vec<Lit>> {
            let clauses = group.iter().map(|&at| &self.clauses[at as usize]).filter(|clause| clause.contains(&of));
            let mut rests: Vec<Vec<Lit>> =
                clauses.map(|clause| clause.iter().copied().filter(|&lit| lit != of).collect()).collect();
            rests.sort_unstable();
            rests.dedup();
            rests
        };
        let terms = |rests: Vec<Vec<Lit>>| {
            if share_a_node(&rests) { rest(&rests) } else { rests.into_iter().map(Term::Clause).collect() }
        };
        Term::Pivot { pivot, without: terms(side(pivot)), with: terms(side(!pivot)) }
    }

    /// The terms, each with the place of its first clause, in the order of these.
    pub(super) fn terms(&self) -> Vec<(Term, usize)> {
        let single = |at: usize| (Term::Clause(self.clauses[at].clone()), at);
        let mut terms: Vec<(Term, usize)> =
            (0..self.clauses.len()).filter(|&at| self.owner[at] == NO_GROUP).map(single).collect();
        let used = self.groups.iter().enumerate().filter(|(_, group)| !group.clauses.is_empty());
        terms.extend(used.map(|(place, group)| (self.term(place, &group.clauses), group.clauses[0] as usize)));
        terms.sort_by_key(|&(_, first)| first);
        terms
    }
}

/// Whether a node is in two of the clauses.
fn share_a_node(clauses: &[Vec<Lit>]) -> bool {
    let mut nodes: Vec<NodeId> = clauses.iter().flatten().map(|lit| lit.node()).collect();
    nodes.sort_unstable();
    nodes.windows(2).any(|pair| pair[0] == pair[1])
}
