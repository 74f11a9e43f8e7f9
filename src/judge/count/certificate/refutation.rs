//! A proof that there is no solution: clauses, each of which follows by propagation, the last one empty.
//!
//! The proof is written by varisat on a thread that is left behind when the budget runs out, and checked forwards:
//! a clause follows if its negation leads to a conflict by unit propagation ("reverse unit propagation": E. Goldberg,
//! Y. Novikov, "Verification of proofs of unsatisfiability for CNF formulas", DATE 2003, from memory). Clauses that only
//! keep satisfiability (the RAT of DRAT) are refused: varisat writes none.

use super::unit::Unit;
use super::{Formula, Refusal, plain};
use crate::budget::Budget;
use crate::id::Id;
use crate::problem::BitLit;
use crate::sat::refute::{Refutation, refute};
use crate::sat::{self, Lit};

/// Steps between two looks at the budget.
const CHECKED: usize = 64;

/// A proof in DRAT text; `None` where there is a solution or the budget ran out.
pub(super) fn find(formula: &Formula, budget: &Budget) -> Option<String> {
    let mut theirs = sat::Formula::new(formula.var_count);
    for clause in formula.clauses.iter() {
        theirs.push(clause.iter().map(|lit| Lit::new(lit.bit().index(), !lit.is_negated())));
    }
    let Refutation::Proof(proof) = refute(&theirs, budget) else { return None };
    let mut text = Vec::new();
    proof.write_text(&mut text).ok()?;
    String::from_utf8(text).ok()
}

/// Checks a proof.
pub(super) fn check(formula: &Formula, steps: &[Vec<BitLit>], budget: &Budget) -> Result<(), Refusal> {
    let mut unit = Unit::new(formula.var_count);
    let given = formula.clauses.iter().filter_map(plain);
    if !given.into_iter().all(|clause| unit.add(&clause)) || !unit.draw() {
        return Ok(());
    }
    for (at, step) in steps.iter().enumerate() {
        if at % CHECKED == 0 && budget.spent() {
            return Err(Refusal::OutOfTime);
        }
        if !unit.refutes(step.iter().map(|&lit| !lit)) {
            return Err(Refusal::Step { step: at + 1 });
        }
        let added = plain(step).is_none_or(|clause| unit.add(&clause));
        if !added || !unit.draw() {
            return Ok(());
        }
    }
    Err(Refusal::NoContradiction)
}
