//! At-most-k and at-least-k groups among the clauses, rebuilt from the weight.
//!
//! Takes the clauses of a network; gives one in which the clauses over all j-subsets of a set of literals, which say
//! that fewer than j of them fail, are one comparison of their number (see [`columns`](super::super::columns)). A group
//! and the group or the clause over the complements, "at least" and "at most" of one set, become "exactly" where both
//! say one number.
//!
//! Holds after: a group of six or more literals that the search met costs as much as counting them.
//!
//! A set grows from a clause literal by literal while all the clauses it needs are there and free. Sets of up to five
//! are left to the pass of [`windows`](super::windows).

use std::cell::OnceCell;
use std::collections::BTreeMap;

use rustc_hash::FxHashMap;

use super::Passed;
use super::copy::Copy;
use super::lists::{ClauseLists, node_set};
use super::view::{self, Clause, View};
use crate::make::network::Lit;
use crate::make::network::build::Conjuncts;
use crate::make::network::linear::Linear;
use crate::make::network::small::INPUTS;

/// The longest clauses of a group.
const MAX_LENGTH: usize = 8;

/// Clauses that one more literal may need.
const MAX_NEEDED: usize = 20_000;

/// The pass.
pub(super) fn weights(view: View<'_>) -> Option<Passed> {
    let (network, clauses) = (view.network, view.clauses());
    let mut search = Search::new(clauses);
    let mut groups: BTreeMap<Vec<Lit>, Bounds> = BTreeMap::new();
    for (at, clause) in clauses.iter().enumerate() {
        if let Some((set, members)) = search.group(at) {
            let least = set.len() + 1 - clause.lits.len();
            members.iter().for_each(|&member| search.taken[member] = true);
            // Both directions of a set meet under the one whose first literal is not complemented.
            let flip = set[0].is_complemented();
            let key: Vec<Lit> = set.iter().map(|lit| lit.complement_if(flip)).collect();
            let bounds = groups.entry(key).or_insert(Bounds { least: 0, most: set.len(), first: members[0] });
            if flip { bounds.most = bounds.most.min(set.len() - least) } else { bounds.least = bounds.least.max(least) }
        }
    }
    if groups.is_empty() {
        return None;
    }
    for (set, bounds) in &mut groups {
        let opposite: Vec<Lit> = set.iter().map(|&lit| !lit).collect();
        for (clause, is_least) in [(set, true), (&opposite, false)] {
            if let Some(&at) = search.by_lits().get(clause.as_slice())
                && !std::mem::replace(&mut search.taken[at], true)
            {
                if is_least {
                    bounds.least = bounds.least.max(1)
                } else {
                    bounds.most = bounds.most.min(clause.len() - 1)
                }
            }
        }
    }
    let mut first: BTreeMap<usize, Vec<(&Vec<Lit>, &Bounds)>> = BTreeMap::new();
    groups.iter().for_each(|(set, bounds)| first.entry(bounds.first).or_default().push((set, bounds)));
    let mut copy = Copy::new(network);
    let mut conjuncts = Conjuncts::default();
    for (at, clause) in clauses.iter().enumerate() {
        for (set, bounds) in first.get(&at).into_iter().flatten() {
            bounds.add(&mut copy, &mut conjuncts, set, clause);
        }
        if !search.taken[at] {
            view::add(&mut copy, &mut conjuncts, clause);
        }
    }
    Some(copy.finish(conjuncts))
}

/// How many of a set hold.
struct Bounds {
    least: usize,
    most: usize,
    /// The first clause that says so.
    first: usize,
}

impl Bounds {
    fn add(&self, copy: &mut Copy<'_>, conjuncts: &mut Conjuncts, set: &[Lit], clause: &Clause) {
        let ones: Vec<Linear> = set.iter().map(|&lit| Linear::truth(copy.lit(lit))).collect();
        let (weight, builder) = (Linear::sum(&ones), &mut copy.builder);
        let (least, most) = (self.least as i128, self.most as i128);
        let mut add = |lit: Lit| conjuncts.add(lit, clause.constraint);
        match () {
            () if least > most => add(Lit::NO),
            () if least == most => add(builder.equal(&weight, least)),
            () => {
                add(builder.at_least(&weight, least));
                add(!builder.at_least(&weight, most + 1));
            }
        }
    }
}

struct Search<'a> {
    clauses: &'a [Clause],
    /// Made when it is first asked for.
    by_lits: OnceCell<FxHashMap<&'a [Lit], usize>>,
    /// The short clauses of each literal.
    at_lit: ClauseLists,
    taken: Vec<bool>,
}

impl<'a> Search<'a> {
    fn new(clauses: &'a [Clause]) -> Self {
        let at_lit = ClauseLists::new(clauses, |clause| (2..=MAX_LENGTH).contains(&clause.lits.len()));
        Self { clauses, by_lits: OnceCell::new(), at_lit, taken: vec![false; clauses.len()] }
    }

    /// The first clause of these literals.
    fn by_lits(&self) -> &FxHashMap<&'a [Lit], usize> {
        self.by_lits.get_or_init(|| {
            let mut by_lits = FxHashMap::default();
            for (at, clause) in self.clauses.iter().enumerate() {
                by_lits.entry(clause.lits.as_slice()).or_insert(at);
            }
            by_lits
        })
    }

    /// The largest set that grows from a clause, and its clauses, where counting is worth it.
    fn group(&self, seed: usize) -> Option<(Vec<Lit>, Vec<usize>)> {
        let size = self.clauses[seed].lits.len();
        if self.taken[seed] || !(2..=MAX_LENGTH).contains(&size) {
            return None;
        }
        let candidates = self.candidates(seed);
        let mut set = self.clauses[seed].lits.clone();
        if set.len() + candidates.len() <= INPUTS {
            return None;
        }
        let mut members = vec![seed];
        for next in candidates {
            if set.contains(&next) {
                continue;
            }
            let Some(more) = self.needed(&set, size - 1, next) else { continue };
            members.extend(more);
            set.insert(set.partition_point(|&lit| lit < next), next);
        }
        members.sort_unstable();
        // At most one of few is cheaper by its truth table; a comparison costs about an AND for each literal.
        (set.len() > INPUTS && members.len() * size > 2 * set.len()).then_some((set, members))
    }

    /// The literals that stand in a clause with all but the last of the seed's.
    fn candidates(&self, seed: usize) -> Vec<Lit> {
        let lits = &self.clauses[seed].lits;
        let (_, fixed) = lits.split_last().expect("two literals or more");
        let mut found: Vec<Lit> = Vec::new();
        let (mut place, set) = (0, node_set(fixed));
        while let Some((at, next)) = self.at_lit.next(lits[0], place, set) {
            place = next;
            let other = &self.clauses[at].lits;
            if other.len() == lits.len() && !self.taken[at] && fixed.iter().all(|lit| other.binary_search(lit).is_ok())
            {
                found.extend(other.iter().filter(|lit| !fixed.contains(lit)));
            }
        }
        found.sort_unstable();
        found.dedup();
        found
    }

    /// The clauses of the new literal with every subset of `count` of the set, where all are there and free.
    fn needed(&self, set: &[Lit], count: usize, next: Lit) -> Option<Vec<usize>> {
        let mut found = Vec::new();
        let mut places: Vec<usize> = (0..count).collect();
        loop {
            let mut lits: Vec<Lit> = places.iter().map(|&place| set[place]).chain([next]).collect();
            lits.sort_unstable();
            found.push(*self.by_lits().get(lits.as_slice()).filter(|&&at| !self.taken[at])?);
            if found.len() > MAX_NEEDED {
                return None;
            }
            // The next subset.
            let Some(turn) = (0..count).rev().find(|&at| places[at] < set.len() - count + at) else { break };
            places[turn] += 1;
            (turn + 1..count).for_each(|at| places[at] = places[at - 1] + 1);
        }
        Some(found)
    }
}
