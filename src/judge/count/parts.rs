//! Parts: clauses fall into groups without common variables, whose numbers of solutions multiply.
//!
//! Input:  the clause form, and the bits that are counted over. Output: a [`Split`]: the parts with variables of their
//! own, the counted bits that no clause mentions (each doubles the number), and whether there is an empty clause.
//! Tautologies are dropped. A group without counted bits becomes a part too: it has one solution or none.

use crate::id::Id;
use crate::judge::clauses::Cnf;
use crate::problem::{BitId, BitLit};
use crate::sat::Lit;

/// A group of clauses, over variables numbered from 0.
#[derive(Clone, Debug, Default)]
pub(super) struct Part {
    /// The variables of the clause form, in increasing order: the problem's bits come first.
    pub(super) vars: Vec<usize>,
    /// How many of them are bits of the problem.
    pub(super) bit_count: usize,
    /// The variables (by their place in `vars`) that are counted over, in increasing order.
    pub(super) counted: Vec<usize>,
    lits: Vec<Lit>,
    ends: Vec<usize>,
}

impl Part {
    /// The clauses.
    pub(super) fn clauses(&self) -> impl Iterator<Item = &[Lit]> {
        let starts = std::iter::once(0).chain(self.ends.iter().copied());
        starts.zip(&self.ends).map(|(start, &end)| &self.lits[start..end])
    }
}

/// The clause form in parts.
#[derive(Clone, Debug, Default)]
pub(super) struct Split {
    /// The parts, those with few variables first.
    pub(super) parts: Vec<Part>,
    /// Counted bits in no clause.
    pub(super) free: Vec<BitId>,
    /// Whether there is an empty clause.
    pub(super) contradiction: bool,
}

const NONE: usize = usize::MAX;

impl Split {
    pub(super) fn of(cnf: &Cnf, bit_count: usize, counted: &[BitId]) -> Self {
        let real = || cnf.clauses.iter().filter(|clause| !is_tautology(clause));
        let mut groups = Groups::new(cnf.var_count);
        let mut used = vec![false; cnf.var_count];
        for clause in real() {
            for lit in clause {
                used[lit.bit().index()] = true;
                groups.join(clause[0].bit().index(), lit.bit().index());
            }
        }
        let mut is_counted = vec![false; cnf.var_count];
        counted.iter().for_each(|bit| is_counted[bit.index()] = true);
        let mut parts: Vec<Part> = Vec::new();
        let mut part_of = vec![NONE; cnf.var_count];
        let mut place_of = vec![NONE; cnf.var_count];
        for var in (0..cnf.var_count).filter(|&var| used[var]) {
            let root = groups.root(var);
            if part_of[root] == NONE {
                part_of[root] = parts.len();
                parts.push(Part::default());
            }
            part_of[var] = part_of[root];
            let part = &mut parts[part_of[root]];
            place_of[var] = part.vars.len();
            part.vars.push(var);
            part.bit_count += usize::from(var < bit_count);
            if is_counted[var] {
                part.counted.push(place_of[var]);
            }
        }
        for clause in real().filter(|clause| !clause.is_empty()) {
            let part = &mut parts[part_of[clause[0].bit().index()]];
            part.lits.extend(clause.iter().map(|lit| Lit::new(place_of[lit.bit().index()], !lit.is_negated())));
            part.ends.push(part.lits.len());
        }
        parts.sort_by_key(|part| part.vars.len());
        let free = counted.iter().copied().filter(|bit| !used[bit.index()]).collect();
        Self { parts, free, contradiction: cnf.clauses.iter().any(<[BitLit]>::is_empty) }
    }
}

fn is_tautology(clause: &[BitLit]) -> bool {
    if clause.len() <= 8 {
        return clause.iter().enumerate().any(|(at, &lit)| clause[..at].contains(&!lit));
    }
    let mut sorted = clause.to_vec();
    sorted.sort_unstable();
    // The two literals of a bit follow each other.
    sorted.dedup();
    sorted.windows(2).any(|pair| pair[0].bit() == pair[1].bit())
}

/// Disjoint sets: R. E. Tarjan, "Efficiency of a good but not linear set union algorithm", JACM 22, 1975 (from memory);
/// the smaller root wins, so that the result is a function of the clauses.
struct Groups {
    parent: Vec<usize>,
}

impl Groups {
    fn new(size: usize) -> Self {
        Self { parent: (0..size).collect() }
    }

    fn root(&mut self, mut at: usize) -> usize {
        while self.parent[at] != at {
            self.parent[at] = self.parent[self.parent[at]];
            at = self.parent[at];
        }
        at
    }

    fn join(&mut self, a: usize, b: usize) {
        let (a, b) = (self.root(a), self.root(b));
        self.parent[a.max(b)] = a.min(b);
    }
}
