//! Groups of yes/no bits of which exactly so many hold.
//!
//! Input: a problem. Output: groups that share no bit, those that save most first.

use rustc_hash::FxHashSet;

use crate::id::Id;
use crate::places::Part;
use crate::problem::{BitId, Compare, Domain, Expr, ExprId, Problem};

/// Clauses with more literals are not looked at: their pairs would be too many.
const LONGEST_CLAUSE: usize = 256;

/// A group: its bits in order, and how many of them hold.
#[derive(Clone, PartialEq, Eq, Debug)]
pub(super) struct Group {
    pub(super) bits: Vec<BitId>,
    pub(super) ones: u32,
}

impl Group {
    /// Bits that the group saves: how far the logarithm of its strings is below its length.
    fn saved(&self) -> f64 {
        let n = self.bits.len() as f64;
        let ways: f64 = (0..self.ones).map(|at| ((n - f64::from(at)) / f64::from(at + 1)).log2()).sum();
        n - ways
    }
}

/// The parts of the start for the groups whose bits are all searched.
pub(super) fn groups(problem: &Problem, place: &[Option<u32>]) -> Vec<Part> {
    let mut found = in_constraints(problem);
    found.extend(in_clauses(problem));
    found.retain(|group| group.bits.len() > 1 && group.ones as usize <= group.bits.len());
    found.sort_by(|a, b| b.saved().total_cmp(&a.saved()).then_with(|| a.bits.cmp(&b.bits)));
    let mut taken: FxHashSet<BitId> = FxHashSet::default();
    let mut parts = Vec::new();
    for group in found {
        let qubits: Option<Vec<u32>> = group.bits.iter().map(|&bit| place[bit.index()]).collect();
        let Some(qubits) = qubits.filter(|_| !group.bits.iter().any(|bit| taken.contains(bit))) else { continue };
        taken.extend(&group.bits);
        parts.push(Part::Weight { qubits, ones: group.ones });
    }
    parts
}

/// `exactly K of [...]` over different yes/no variables.
fn in_constraints(problem: &Problem) -> Vec<Group> {
    let group = |constraint: &crate::problem::Constraint| {
        let Expr::Compare(Compare::Eq, a, b) = problem.exprs.get(constraint.expr) else { return None };
        let ones = |id: ExprId| match problem.exprs.get(id) {
            Expr::Number(number) => u32::try_from(number).ok(),
            _ => None,
        };
        let (count, ones) = match (ones(a), ones(b)) {
            (None, Some(ones)) => (a, ones),
            (Some(ones), None) => (b, ones),
            _ => return None,
        };
        Some(Group { bits: counted(problem, count)?, ones })
    };
    problem.constraints.iter().filter_map(group).collect()
}

/// The bits that an expression counts, each once and each a yes/no variable.
pub(super) fn counted(problem: &Problem, id: ExprId) -> Option<Vec<BitId>> {
    let var = |&id: &ExprId| match problem.exprs.get(id) {
        Expr::Var(var) if problem.vars()[var].domain == Domain::YesNo => Some(problem.vars()[var].first_bit),
        _ => None,
    };
    let mut bits: Vec<BitId> = match problem.exprs.get(id) {
        Expr::Count(list) => problem.exprs.items(list).iter().map(var).collect::<Option<_>>()?,
        // A sum of yes/no variables counts them too.
        Expr::Sum(list) => {
            let one = |&id: &ExprId| match problem.exprs.get(id) {
                Expr::AsNumber(truth) => var(&truth),
                _ => None,
            };
            problem.exprs.items(list).iter().map(one).collect::<Option<_>>()?
        }
        _ => return None,
    };
    let len = bits.len();
    bits.sort_unstable();
    bits.dedup();
    (bits.len() == len && len > 0).then_some(bits)
}

/// Clauses of positive literals of which every two are forbidden together by another clause: exactly one holds.
fn in_clauses(problem: &Problem) -> Vec<Group> {
    let mut forbidden: FxHashSet<(BitId, BitId)> = FxHashSet::default();
    for clause in problem.clauses.iter() {
        if let [a, b] = clause
            && a.is_negated()
            && b.is_negated()
        {
            forbidden.insert((a.bit().min(b.bit()), a.bit().max(b.bit())));
        }
    }
    let mut found = Vec::new();
    for clause in problem.clauses.iter() {
        if clause.len() < 2 || clause.len() > LONGEST_CLAUSE || clause.iter().any(|lit| lit.is_negated()) {
            continue;
        }
        let mut bits: Vec<BitId> = clause.iter().map(|lit| lit.bit()).collect();
        bits.sort_unstable();
        bits.dedup();
        let pairs = bits.iter().enumerate().flat_map(|(at, &a)| bits[at + 1..].iter().map(move |&b| (a, b)));
        let mut pairs = pairs.peekable();
        if pairs.peek().is_some() && pairs.all(|pair| forbidden.contains(&pair)) {
            found.push(Group { bits, ones: 1 });
        }
    }
    found
}
