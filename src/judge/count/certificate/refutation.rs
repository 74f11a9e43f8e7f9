//! A proof that there is no solution: clauses, each of which follows from those before it, the last one empty.
//!
//! The proof is written by varisat on a thread that is left behind when the budget runs out, and checked by the crate's
//! own checker of DRAT proofs, which shares nothing with the solvers.

use super::{Formula, Refusal};
use crate::budget::Budget;
use crate::id::Id;
use crate::problem::BitLit;
use crate::sat::check::Refused;
use crate::sat::drat::Proof;
use crate::sat::refute::{Refutation, refute};
use crate::sat::{self, Lit};

/// A proof in DRAT text; `None` where there is a solution or the budget ran out.
pub(super) fn find(formula: &Formula, budget: &Budget) -> Option<String> {
    let Refutation::Proof(proof) = refute(&clauses_of(formula), budget) else { return None };
    let mut text = Vec::new();
    proof.write_text(&mut text).ok()?;
    String::from_utf8(text).ok()
}

/// Checks a proof.
pub(super) fn check(formula: &Formula, steps: &[Vec<BitLit>], budget: &Budget) -> Result<(), Refusal> {
    let mut proof = Proof::new();
    steps.iter().for_each(|step| proof.add(step.iter().map(solver_literal)));
    match sat::check::check(&clauses_of(formula), &proof, budget) {
        Ok(_) => Ok(()),
        Err(Refused::Step(step)) => Err(Refusal::Step { step }),
        Err(Refused::NoConflict) => Err(Refusal::NoContradiction),
        Err(Refused::Stopped) => Err(Refusal::OutOfTime),
    }
}

fn clauses_of(formula: &Formula) -> sat::Formula {
    let mut clauses = sat::Formula::new(formula.var_count);
    formula.clauses.iter().for_each(|clause| clauses.push(clause.iter().map(solver_literal)));
    clauses
}

fn solver_literal(lit: &BitLit) -> Lit {
    Lit::new(lit.bit().index(), !lit.is_negated())
}
