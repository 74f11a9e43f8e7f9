//! The checker of DRAT proofs: a program of our own that shares nothing with the engines.
//!
//! Input: clauses and a proof. Output: how many steps were checked, or the first step that does not hold. A proof that
//! is accepted derives the empty clause, so the clauses have no model.
//!
//! Forward: every added clause is checked when it is met. Its negation is assumed and propagated with two watched
//! literals; a conflict shows that the clause follows (reverse unit propagation: E. Goldberg, Y. Novikov,
//! "Verification of proofs of unsatisfiability for CNF formulas", DATE 2003, from memory). Where there is none, the
//! clause may still be a resolution asymmetric tautology on its first literal (N. Wetzler, M. Heule, W. Hunt, SAT
//! 2014), which is then looked for among all clauses.
//!
//! A step may come with hints, as in L. Cruz-Filipe et al., "Efficient certified RAT verification", CADE 2017: which
//! clauses to take, and in which order. They are tried first and save the search; where they do not do, it is searched.
//!
//! What clauses of one literal imply stays for good: as in the reference checker, deleting the clause that implied a
//! literal does not take the literal back. That keeps more clauses than the proof asks for, which is sound.

use std::hash::BuildHasher;

use rustc_hash::{FxBuildHasher, FxHashMap};
use thiserror::Error;

use super::Lit;
use super::drat::{Proof, Step};
use super::formula::Formula;
use crate::budget::Budget;

/// What an accepted proof consists of.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub struct Checked {
    /// Clauses that were shown to follow.
    pub additions: usize,
    /// Clauses that were deleted.
    pub deletions: usize,
}

/// Why a proof is not accepted.
#[derive(Clone, Copy, PartialEq, Eq, Debug, Error)]
pub enum Refused {
    /// An added clause does not follow.
    #[error("step {0} of the proof does not follow")]
    Step(usize),
    /// No step is the empty clause, and none leads to it.
    #[error("the proof does not reach the empty clause")]
    NoConflict,
    /// The budget ran out.
    #[error("the budget ran out while the proof was checked")]
    Stopped,
}

/// Checks a proof that the clauses have no model.
pub fn check(formula: &Formula, proof: &Proof, budget: &Budget) -> Result<Checked, Refused> {
    let mut checker = Checker::new(formula.var_count());
    formula.iter().for_each(|clause| checker.insert(clause));
    let mut checked = Checked { additions: 0, deletions: 0 };
    let mut hinted = proof.hints().peekable();
    // The clause of each step that adds one.
    let mut clause_of = vec![u32::MAX; if hinted.peek().is_some() { proof.len() } else { 0 }];
    for (at, step) in proof.steps().enumerate() {
        if checker.refuted {
            break;
        }
        if at % 64 == 63 && budget.spent() {
            return Err(Refused::Stopped);
        }
        match step {
            Step::Add(clause) => {
                let hints = hinted.next_if(|&(step, _)| step == at).map_or(&[][..], |(_, hints)| hints);
                let hints = hints.iter().filter_map(|&hint| clause_of.get(hint as usize).copied());
                let is_clear = checker.is_blocked(clause) || checker.follows_by(clause, hints);
                if !is_clear && !checker.follows(clause) {
                    return Err(Refused::Step(at + 1));
                }
                if let Some(place) = clause_of.get_mut(at) {
                    *place = checker.clauses.len() as u32;
                }
                checker.insert(clause);
                checked.additions += 1;
            }
            Step::Delete(clause) => {
                checker.delete(clause);
                checked.deletions += 1;
            }
        }
    }
    if checker.refuted { Ok(checked) } else { Err(Refused::NoConflict) }
}

/// A clause in the pool; its first two literals are the watched ones.
#[derive(Clone, Copy)]
struct Clause {
    start: u32,
    len: u32,
    is_dead: bool,
}

#[derive(Clone, Copy)]
struct Watch {
    clause: u32,
    /// Another literal of the clause: where it holds, the clause need not be looked at.
    other: Lit,
}

struct Checker {
    pool: Vec<Lit>,
    clauses: Vec<Clause>,
    /// For each literal, the clauses that watch it.
    watches: Vec<Vec<Watch>>,
    /// For each literal, whether it holds.
    holds: Vec<bool>,
    /// The literals that hold, in the order in which they were found.
    trail: Vec<Lit>,
    /// How many of them have been propagated.
    propagated: usize,
    /// Clauses by a hash of their literals, whatever the order of these.
    known: FxHashMap<u64, Vec<u32>>,
    /// For each literal of a variable that the proof brought in, the clauses that have it.
    having: Vec<Vec<u32>>,
    /// How many literals the formula has; those beyond are the proof's.
    given: usize,
    /// Whether the clauses have no model.
    refuted: bool,
}

fn code(lit: Lit) -> usize {
    lit.var() << 1 | usize::from(lit.is_negated())
}

/// The literals of a clause in order, each once.
fn sorted(clause: &[Lit]) -> Vec<Lit> {
    let mut sorted = clause.to_vec();
    sorted.sort_unstable();
    sorted.dedup();
    sorted
}

fn hash(sorted: &[Lit]) -> u64 {
    FxBuildHasher.hash_one(sorted)
}

impl Checker {
    fn new(var_count: usize) -> Self {
        Self {
            pool: Vec::new(),
            clauses: Vec::new(),
            watches: vec![Vec::new(); 2 * var_count],
            holds: vec![false; 2 * var_count],
            trail: Vec::new(),
            propagated: 0,
            known: FxHashMap::default(),
            having: Vec::new(),
            given: 2 * var_count,
            refuted: false,
        }
    }

    fn lits(&self, clause: u32) -> &[Lit] {
        let Clause { start, len, .. } = self.clauses[clause as usize];
        &self.pool[start as usize..(start + len) as usize]
    }

    /// A proof may speak of variables that the clauses do not have.
    fn make_room(&mut self, clause: &[Lit]) {
        let needed = clause.iter().map(|lit| 2 * (lit.var() + 1)).max().unwrap_or(0);
        if needed > self.holds.len() {
            self.holds.resize(needed, false);
            self.watches.resize(needed, Vec::new());
            self.having.resize(needed - self.given, Vec::new());
        }
    }

    /// Makes a literal hold; false where its negation does.
    fn assign(&mut self, lit: Lit) -> bool {
        if self.holds[code(!lit)] {
            return false;
        }
        if !self.holds[code(lit)] {
            self.holds[code(lit)] = true;
            self.trail.push(lit);
        }
        true
    }

    /// Takes back all but the first literals of the trail.
    fn take_back(&mut self, to: usize) {
        for lit in self.trail.drain(to..) {
            self.holds[code(lit)] = false;
        }
        self.propagated = self.propagated.min(to);
    }

    /// Adds a clause that is known to follow, and what it implies.
    fn insert(&mut self, clause: &[Lit]) {
        self.make_room(clause);
        let mut lits = sorted(clause);
        let key = hash(&lits);
        // Literals that can still hold come first: they are watched.
        lits.sort_by_key(|&lit| self.holds[code(!lit)]);
        let id = self.clauses.len() as u32;
        let start = u32::try_from(self.pool.len()).expect("fewer than 2^32 literals");
        self.pool.extend_from_slice(&lits);
        self.clauses.push(Clause { start, len: lits.len() as u32, is_dead: false });
        self.known.entry(key).or_default().push(id);
        for &lit in &lits {
            if let Some(place) = code(lit).checked_sub(self.given) {
                self.having[place].push(id);
            }
        }
        if let [a, b, ..] = lits[..] {
            self.watches[code(a)].push(Watch { clause: id, other: b });
            self.watches[code(b)].push(Watch { clause: id, other: a });
        }
        let is_open = |lit: Option<&Lit>| lit.is_some_and(|&lit| !self.holds[code(!lit)]);
        if !is_open(lits.get(1)) {
            // At most one literal can hold, so it does.
            let implied = lits.first().is_some_and(|&lit| self.assign(lit));
            self.refuted |= !implied || !self.propagate();
        }
    }

    /// Removes one clause with these literals, if there is one.
    fn delete(&mut self, clause: &[Lit]) {
        let wanted = sorted(clause);
        let Some(ids) = self.known.get(&hash(&wanted)) else { return };
        let Some(at) = ids.iter().position(|&id| sorted(self.lits(id)) == wanted) else { return };
        let id = ids[at];
        // What the clause implied for good stays, and so must the clause that says why.
        if self.lits(id).iter().any(|&lit| self.holds[code(lit)]) {
            return;
        }
        self.known.get_mut(&hash(&wanted)).expect("just found").swap_remove(at);
        self.clauses[id as usize].is_dead = true;
    }

    /// Whether a clause begins with a literal of a variable that the proof brought in, and every resolvent on it is a
    /// tautology, as in a definition: then no propagation is needed.
    fn is_blocked(&mut self, clause: &[Lit]) -> bool {
        self.make_room(clause);
        let Some(&pivot) = clause.first() else { return false };
        let Some(place) = code(!pivot).checked_sub(self.given) else { return false };
        self.having[place].iter().all(|&id| {
            let is_dead = self.clauses[id as usize].is_dead;
            is_dead || self.lits(id).iter().any(|&lit| lit != !pivot && clause.contains(&!lit))
        })
    }

    /// Whether a clause follows from some clauses taken in this order, each with at most one literal left. Those that are
    /// not there, or of no use, are passed over: hints are not trusted.
    fn follows_by(&mut self, clause: &[Lit], hints: impl Iterator<Item = u32>) -> bool {
        self.make_room(clause);
        let root = self.trail.len();
        let mut follows = !clause.iter().all(|&lit| self.assign(!lit));
        for id in hints {
            let Some(&Clause { start, len, is_dead: false }) = self.clauses.get(id as usize) else { continue };
            let lits = &self.pool[start as usize..(start + len) as usize];
            let mut open = lits.iter().filter(|&&lit| !self.holds[code(!lit)]);
            match (follows, open.next().copied(), open.next()) {
                (true, ..) => break,
                (_, None, _) => follows = true,
                (_, Some(lit), None) => drop(self.assign(lit)),
                _ => {}
            }
        }
        self.take_back(root);
        follows
    }

    /// Whether a clause follows from those before it, or keeps them satisfiable if they are.
    fn follows(&mut self, clause: &[Lit]) -> bool {
        self.make_room(clause);
        let root = self.trail.len();
        let conflict = !self.deny(clause);
        let follows = conflict || clause.first().is_some_and(|&pivot| self.is_tautology_on(pivot));
        self.take_back(root);
        follows
    }

    /// Assumes that no literal of a clause holds; false where that is a contradiction.
    fn deny(&mut self, clause: &[Lit]) -> bool {
        clause.iter().all(|&lit| self.assign(!lit)) && self.propagate()
    }

    /// With a clause denied: whether every resolvent of it on `pivot` follows.
    fn is_tautology_on(&mut self, pivot: Lit) -> bool {
        let denied = self.trail.len();
        let candidates = match code(!pivot).checked_sub(self.given) {
            Some(place) => self.having[place].clone(),
            None => (0..self.clauses.len() as u32).collect(),
        };
        for id in candidates {
            if self.clauses[id as usize].is_dead || !self.lits(id).contains(&!pivot) {
                continue;
            }
            let rest: Vec<Lit> = self.lits(id).iter().copied().filter(|&lit| lit != !pivot).collect();
            let conflict = !self.deny(&rest);
            self.take_back(denied);
            if !conflict {
                return false;
            }
        }
        true
    }

    /// Propagates; false where a clause has no literal left.
    fn propagate(&mut self) -> bool {
        while let Some(&lit) = self.trail.get(self.propagated) {
            self.propagated += 1;
            if !self.visit(!lit) {
                return false;
            }
        }
        true
    }

    /// Looks at the clauses that watch a literal which has just become false.
    fn visit(&mut self, falsified: Lit) -> bool {
        let mut watches = std::mem::take(&mut self.watches[code(falsified)]);
        let mut kept = 0;
        let mut at = 0;
        let mut is_fine = true;
        while at < watches.len() {
            let watch = watches[at];
            at += 1;
            if self.holds[code(watch.other)] {
                watches[kept] = watch;
                kept += 1;
                continue;
            }
            match self.rewatch(watch.clause, falsified) {
                Seen::Moved => {}
                Seen::Holds(other) => {
                    watches[kept] = Watch { clause: watch.clause, other };
                    kept += 1;
                }
                Seen::Implies(other) => {
                    watches[kept] = Watch { clause: watch.clause, other };
                    kept += 1;
                    if !self.assign(other) {
                        is_fine = false;
                        break;
                    }
                }
            }
        }
        watches.copy_within(at.., kept);
        watches.truncate(kept + watches.len() - at);
        self.watches[code(falsified)] = watches;
        is_fine
    }

    fn rewatch(&mut self, id: u32, falsified: Lit) -> Seen {
        let Clause { start, len, is_dead } = self.clauses[id as usize];
        if is_dead {
            return Seen::Moved;
        }
        let lits = &mut self.pool[start as usize..(start + len) as usize];
        if lits[0] == falsified {
            lits.swap(0, 1);
        }
        let other = lits[0];
        if self.holds[code(other)] {
            return Seen::Holds(other);
        }
        let Some(next) = (2..lits.len()).find(|&next| !self.holds[code(!lits[next])]) else {
            return Seen::Implies(other);
        };
        lits.swap(1, next);
        let watched = lits[1];
        self.watches[code(watched)].push(Watch { clause: id, other });
        Seen::Moved
    }
}

/// What a clause says when a watched literal has become false.
enum Seen {
    /// It watches another literal now, or is gone.
    Moved,
    /// It holds by this literal.
    Holds(Lit),
    /// This literal is the only one left.
    Implies(Lit),
}

#[cfg(test)]
mod tests {
    use super::*;

    fn formula(clauses: &[&[i64]]) -> Formula {
        let mut formula = Formula::new(0);
        clauses.iter().for_each(|clause| formula.push(clause.iter().map(|&lit| Lit::from_dimacs(lit))));
        formula
    }

    fn judge(clauses: &[&[i64]], proof: &str) -> Result<Checked, Refused> {
        check(&formula(clauses), &Proof::from_text(proof).unwrap(), &Budget::unlimited())
    }

    /// The example of the format's documentation, quoted with the SAT 2014 paper: the first clause is a tautology on
    /// its first literal and does not follow.
    const EXAMPLE: [&[i64]; 8] =
        [&[1, 2, -3], &[-1, -2, 3], &[2, 3, -4], &[-2, -3, 4], &[-1, -3, -4], &[1, 3, 4], &[-1, 2, 4], &[1, -2, -4]];

    #[test]
    fn the_documented_example_is_accepted() {
        assert_eq!(judge(&EXAMPLE, "-1 0 d -1 2 4 0 2 0 0"), Ok(Checked { additions: 2, deletions: 1 }));
    }

    #[test]
    fn a_step_that_does_not_follow_is_refused() {
        assert_eq!(judge(&EXAMPLE, "0"), Err(Refused::Step(1)));
        // The first step is a tautology on its literal, the second does not follow.
        assert_eq!(judge(&EXAMPLE, "2 0 0"), Err(Refused::Step(2)));
        assert_eq!(judge(&EXAMPLE, "-1 0"), Err(Refused::NoConflict));
        assert!(judge(&EXAMPLE[1..], "-1 0 d -1 2 4 0 2 0 0").is_err());
        assert_eq!(judge(&[&[1, 2]], ""), Err(Refused::NoConflict));
    }

    #[test]
    fn odd_clauses_mean_what_logic_says() {
        let fine = Ok(Checked { additions: 0, deletions: 0 });
        assert_eq!(judge(&[&[]], ""), fine);
        assert_eq!(judge(&[&[1, 1], &[-1, -1, -1]], ""), fine);
        assert_eq!(judge(&[&[1, -1], &[2]], "0"), Err(Refused::Step(1)));
        // A deleted clause is gone, in any order of its literals.
        assert_eq!(judge(&[&[1, 2], &[1, -2], &[-1, 2], &[-1, -2]], "1 0"), Ok(Checked { additions: 1, deletions: 0 }));
        assert_eq!(judge(&[&[1, 2], &[1, -2], &[-1, 2], &[-1, -2]], "d -2 1 0 1 0"), Err(Refused::Step(2)));
    }

    /// Hints save the search; wrong ones do not make a step follow, nor keep one from following.
    #[test]
    fn hints_are_not_trusted() {
        let all = formula(&[&[1, 2], &[1, -2], &[-1, 2], &[-1, -2]]);
        let lits = |numbers: &[i64]| numbers.iter().map(|&lit| Lit::from_dimacs(lit)).collect::<Vec<_>>();
        for hints in [&[0, 1][..], &[7, 0, 0], &[1]] {
            let mut proof = Proof::new();
            proof.add(lits(&[3, 1, 2]));
            proof.add(lits(&[3, 1, -2]));
            proof.add_with(lits(&[3, 1]), hints);
            proof.add(lits(&[1]));
            proof.add(lits(&[]));
            assert_eq!(check(&all, &proof, &Budget::unlimited()), Ok(Checked { additions: 4, deletions: 0 }));
            let mut other = Proof::new();
            other.add(lits(&[3, 1, 2]));
            other.append(&proof);
            assert!(check(&all, &other, &Budget::unlimited()).is_ok());
            // Without one of the clauses there is a model.
            let fewer = formula(&[&[1, 2], &[1, -2], &[-1, 2]]);
            assert_eq!(check(&fewer, &proof, &Budget::unlimited()), Err(Refused::Step(5)));
        }
    }
}
