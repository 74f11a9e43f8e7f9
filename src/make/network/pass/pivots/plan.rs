//! Which clauses are grouped on which pivot.
//!
//! Takes clauses as sorted literals; gives [`Term`]s whose conjunction they are, each with the place of its first clause.
//!
//! Every clause goes to the group of one of its nodes. First greedily: the node whose group saves most takes all of its
//! clauses that are still free, and so on. Then clauses move one by one to another of their nodes where that saves
//! ANDs: the saving grows faster than a group, so clauses gather on few pivots, and clauses whose rests share literals
//! on the same one. The search stops after [`MOVES`] tries.

mod groups;

use crate::make::network::Lit;
use groups::Groups;

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
    improve(&mut groups);
    groups.terms()
}

/// The terms for what is left of some clauses, greedily.
fn rest(clauses: &[Vec<Lit>]) -> Vec<Term> {
    Groups::greedy(clauses).terms().into_iter().map(|(term, _)| term).collect()
}

/// Moves clauses while that saves ANDs.
fn improve(groups: &mut Groups<'_>) {
    groups.price();
    let mut tries = 0;
    for round in 0..ROUNDS {
        let mut moved = false;
        for at in 0..groups.clause_count() {
            let Some(from) = groups.owner(at) else { continue };
            let left_cost = groups.cost_without(from, at);
            let mut best: Option<(usize, usize, usize)> = None;
            for &to in groups.places(at) {
                let to = to as usize;
                tries += 1;
                if to == from || groups.is_empty(to) {
                    continue;
                }
                let cost = groups.cost_with(to, at);
                // What the change would make the two groups cost; at the same cost the larger group wins.
                let (before, after) = (groups.cost(from) + groups.cost(to), left_cost + cost);
                let larger = groups.len(to) + 1 > groups.len(from);
                let gains = after < before || after == before && larger && round % 2 == 1;
                if gains && best.is_none_or(|best| before - after > best.2) {
                    best = Some((to, cost, before - after));
                }
            }
            if let Some((to, cost, _)) = best {
                moved = true;
                groups.move_clause(at, (from, left_cost), (to, cost));
            }
        }
        if tries > MOVES || !moved && round % 2 == 1 {
            return;
        }
    }
}
