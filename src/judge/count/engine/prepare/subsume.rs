//! Subsumption and strengthening: a clause that another one implies goes; a literal that a resolution removes goes.
//!
//! N. Eén, A. Biere, "Effective preprocessing in SAT through variable and clause elimination", SAT 2005, section 4
//! (signatures, and self-subsuming resolution).

use super::Effort;
use super::form::Form;
use crate::judge::count::engine::lit::Lit;

/// Literals that one round may compare.
const WORK: usize = 20_000_000;

/// Removes subsumed clauses and literals; says whether there were any.
pub(super) fn subsume(form: &mut Form, effort: Effort) -> bool {
    let lists = form.occurrences();
    let mut signs: Vec<u64> = form.clauses.iter().map(|clause| signature(clause)).collect();
    let mut gone = vec![false; form.clauses.len()];
    let mut order: Vec<usize> = (0..form.clauses.len()).collect();
    order.sort_by_key(|&at| form.clauses[at].len());
    let mut work = WORK;
    let mut changed = false;
    for at in order {
        if gone[at] || work == 0 {
            continue;
        }
        // The clause itself (no literal flipped), then each literal flipped: what contains the flipped clause loses that
        // literal.
        let flips = if effort == Effort::Count { form.clauses[at].len() } else { 0 };
        for flip in std::iter::once(None).chain((0..flips).map(Some)) {
            let mut clause = form.clauses[at].clone();
            let Some(flipped) = flip.map_or(Some(None), |flip| {
                clause.get_mut(flip).map(|lit| {
                    *lit = !*lit;
                    Some(*lit)
                })
            }) else {
                break;
            };
            clause.sort_unstable();
            let sign = signature(&clause);
            let Some(&rarest) = clause.iter().min_by_key(|lit| lists[lit.index()].len()) else { break };
            for &other in &lists[rarest.index()] {
                let other = other as usize;
                work = work.saturating_sub(1);
                if other == at || gone[other] || sign & !signs[other] != 0 || clause.len() > form.clauses[other].len() {
                    continue;
                }
                work = work.saturating_sub(form.clauses[other].len());
                if !is_subset(&clause, &form.clauses[other]) {
                    continue;
                }
                changed = true;
                match flipped {
                    None => gone[other] = true,
                    Some(lit) => {
                        form.clauses[other].retain(|&own| own != lit);
                        signs[other] = signature(&form.clauses[other]);
                    }
                }
            }
        }
    }
    if changed {
        let mut at = 0;
        form.clauses.retain(|_| {
            at += 1;
            !gone[at - 1]
        });
        form.tidy();
    }
    changed
}

fn signature(clause: &[Lit]) -> u64 {
    clause.iter().fold(0, |sign, lit| sign | 1 << (lit.index().wrapping_mul(0x9e37_79b9) >> 7 & 63))
}

/// Whether a sorted list is part of another.
fn is_subset(small: &[Lit], large: &[Lit]) -> bool {
    let mut rest = large.iter();
    small.iter().all(|lit| rest.any(|other| other == lit))
}
