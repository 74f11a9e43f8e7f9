//! Groups of which at most so many hold, spelt out: pair by pair, or every (k + 1) of them.

use rustc_hash::{FxHashMap, FxHashSet};

use super::table::Table;
use super::{Fact, Finding, Tidy};
use crate::problem::BitLit;

/// The longest clause that is tried as "one of them": its pairs are all looked up.
const MAX_GROUP: usize = 256;
/// Pairs that are looked at while a group grows.
const MAX_STEPS: usize = 1 << 16;

pub(super) fn find(tidy: &Tidy, table: &Table) -> Vec<Finding> {
    let mut covered = FxHashSet::default();
    let mut findings = exactly_one(tidy, table, &mut covered);
    findings.extend(at_most_one(tidy, table, &mut covered));
    findings.extend(at_most(tidy));
    findings
}

/// A clause whose literals exclude each other pair by pair.
fn exactly_one(tidy: &Tidy, table: &Table, covered: &mut FxHashSet<u32>) -> Vec<Finding> {
    let mut findings = Vec::new();
    for at in 0..tidy.len() {
        let lits = tidy.get(at);
        if !(2..=MAX_GROUP).contains(&lits.len()) {
            continue;
        }
        if let Some(pairs) = exclusions(table, lits) {
            covered.extend(pairs.iter().copied());
            let clauses = pairs.into_iter().chain([at as u32]).map(|at| tidy.origin(at as usize)).collect();
            findings.push(Finding::new(Fact::ExactlyOne(lits.to_vec()), clauses));
        }
    }
    findings
}

/// The clauses that exclude each pair.
fn exclusions(table: &Table, lits: &[BitLit]) -> Option<Vec<u32>> {
    let pairs = lits.iter().enumerate().flat_map(|(at, &a)| lits[..at].iter().map(move |&b| (a, b)));
    pairs.map(|(a, b)| table.pair(!a, !b)).collect()
}

/// Groups grown one literal after the other from the pairs that belong to no group yet; three literals at least.
fn at_most_one(tidy: &Tidy, table: &Table, covered: &mut FxHashSet<u32>) -> Vec<Finding> {
    let mut findings = Vec::new();
    for at in 0..tidy.len() {
        let [a, b] = *tidy.get(at) else { continue };
        if covered.contains(&(at as u32)) {
            continue;
        }
        let mut lits = vec![!a, !b];
        let mut steps = 0;
        for &clause in tidy.with(a) {
            let candidate = match *tidy.get(clause as usize) {
                [x, y] if x == a => !y,
                [x, _] => !x,
                _ => continue,
            };
            steps += lits.len();
            if steps > MAX_STEPS || lits.len() == MAX_GROUP {
                break;
            }
            let is_new = |lit: BitLit| table.pair(!lit, !candidate).is_some_and(|at| !covered.contains(&at));
            if !lits.contains(&candidate) && lits.iter().all(|&lit| is_new(lit)) {
                lits.push(candidate);
            }
        }
        if lits.len() < 3 {
            continue;
        }
        lits.sort_unstable();
        let pairs = exclusions(table, &lits).expect("each literal was added because its pairs are clauses");
        covered.extend(pairs.iter().copied());
        let clauses = pairs.into_iter().map(|at| tidy.origin(at as usize)).collect();
        findings.push(Finding::new(Fact::AtMost(1, lits), clauses));
    }
    findings
}

/// All clauses of k + 1 literals over a group, k >= 2: no k + 1 of the negations hold together.
fn at_most(tidy: &Tidy) -> Vec<Finding> {
    let mut by_width: FxHashMap<usize, Vec<usize>> = FxHashMap::default();
    for at in 0..tidy.len() {
        by_width.entry(tidy.get(at).len()).or_default().push(at);
    }
    let mut widths: Vec<usize> = by_width.keys().copied().filter(|&width| (3..=8).contains(&width)).collect();
    widths.sort_unstable();
    let mut findings = Vec::new();
    for width in widths {
        // Literals that stand in clauses of this width with the same partners fall into one class by connection.
        let clauses = &by_width[&width];
        for class in connected(tidy, clauses) {
            let mut lits: Vec<BitLit> = class.iter().flat_map(|&at| tidy.get(at)).copied().collect();
            lits.sort_unstable();
            lits.dedup();
            let distinct: FxHashSet<&[BitLit]> = class.iter().map(|&at| tidy.get(at)).collect();
            let is_complete = lits.len() > width && binomial(lits.len(), width) == Some(distinct.len());
            if is_complete && lits.windows(2).all(|pair| pair[0] != !pair[1]) {
                let group = lits.iter().map(|&lit| !lit).collect();
                let shown = class.iter().map(|&at| tidy.origin(at)).collect();
                findings.push(Finding::new(Fact::AtMost(width as u32 - 1, group), shown));
            }
        }
    }
    findings
}

/// Clauses that hang together by common literals, in the order of their first clause.
fn connected(tidy: &Tidy, clauses: &[usize]) -> Vec<Vec<usize>> {
    let mut first_with: FxHashMap<BitLit, usize> = FxHashMap::default();
    let mut parent: Vec<usize> = (0..clauses.len()).collect();
    fn root(parent: &mut [usize], mut at: usize) -> usize {
        while parent[at] != at {
            parent[at] = parent[parent[at]];
            at = parent[at];
        }
        at
    }
    for (at, &clause) in clauses.iter().enumerate() {
        for &lit in tidy.get(clause) {
            let other = *first_with.entry(lit).or_insert(at);
            let (a, b) = (root(&mut parent, at), root(&mut parent, other));
            parent[a.max(b)] = a.min(b);
        }
    }
    let mut classes: Vec<Vec<usize>> = vec![Vec::new(); clauses.len()];
    for (at, &clause) in clauses.iter().enumerate() {
        let root = root(&mut parent, at);
        classes[root].push(clause);
    }
    classes.retain(|class| !class.is_empty());
    classes
}

fn binomial(n: usize, k: usize) -> Option<usize> {
    (0..k).try_fold(1usize, |so_far, at| so_far.checked_mul(n - at).map(|product| product / (at + 1)))
}
