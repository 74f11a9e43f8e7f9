//! Clauses that contain another clause, dropped: what is dropped from a context cannot make a check succeed wrongly.

use std::collections::BTreeMap;

use super::covered::Context;
use crate::problem::BitLit;

/// Literals that are compared at most; what is not looked at stays.
const WORK: usize = 50_000_000;

/// The context without clauses that contain another one, each once, in their order.
pub(super) fn without_subsumed(context: Context) -> Context {
    let clauses: Vec<&[BitLit]> = context.clauses().collect();
    let mut lists: BTreeMap<BitLit, Vec<usize>> = BTreeMap::new();
    for (at, clause) in clauses.iter().enumerate() {
        clause.iter().for_each(|&lit| lists.entry(lit).or_default().push(at));
    }
    let mut order: Vec<usize> = (0..clauses.len()).collect();
    order.sort_by_key(|&at| clauses[at].len());
    let mut gone = vec![false; clauses.len()];
    let mut work = WORK;
    for at in order {
        let Some(rarest) = clauses[at].iter().min_by_key(|lit| lists[lit].len()) else { continue };
        for &other in &lists[rarest] {
            if work == 0 {
                break;
            }
            work = work.saturating_sub(clauses[at].len());
            // Of equal clauses the first one stays.
            let later =
                clauses[other].len() > clauses[at].len() || clauses[other].len() == clauses[at].len() && other > at;
            if !gone[at] && later && clauses[at].iter().all(|lit| clauses[other].contains(lit)) {
                gone[other] = true;
            }
        }
    }
    let mut rest = Context::default();
    clauses.iter().zip(&gone).filter(|&(_, &gone)| !gone).for_each(|(clause, _)| rest.push(clause.iter().copied()));
    rest
}
