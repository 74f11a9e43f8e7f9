//! Grouping clauses on a pivot: `(a or B)(not a or C) = B xor a(B xor C)` and `(a or B)(a or C) = a or BC`, recursively.
//!
//! Takes the clauses of a network; gives a network in which the clauses that share a pivot are one conjunct. Where p
//! clauses have the pivot and q its complement, p + q ANDs go away (with q = 0, p - 1), and what is left of the clauses is
//! grouped in the same way.
//!
//! Holds after: no two conjuncts that are clauses share a literal whose grouping would save an AND.
//!
//! [`plan`] chooses the pivots.

mod plan;

use super::Passed;
use super::copy::Copy;
use super::view::{self, Clause, View};
use crate::make::network::Lit;
use crate::make::network::build::Conjuncts;
use crate::make::network::builder::Builder;
use plan::Term;

/// The pass.
pub(super) fn pivots(view: View<'_>) -> Option<Passed> {
    let mut copy = Copy::new(view.network);
    let clauses = view.clauses();
    let mut conjuncts = Conjuncts::default();
    let mut open: Vec<Vec<Lit>> = Vec::with_capacity(clauses.len());
    for Clause { lits, .. } in clauses {
        let mut lits: Vec<Lit> = lits.iter().map(|&lit| copy.lit(lit)).collect();
        // Different old literals may be one new literal.
        open.push(if view::tidy(&mut lits) { lits } else { vec![Lit::YES] });
    }
    let plan = plan::plan(&open);
    for (term, first) in &plan {
        let lit = build(&mut copy.builder, term);
        conjuncts.add(lit, clauses[*first].constraint);
    }
    Some(copy.finish(conjuncts))
}

fn build(builder: &mut Builder, term: &Term) -> Lit {
    match term {
        Term::Clause(lits) => {
            let fails: Vec<Lit> = lits.iter().map(|&lit| !lit).collect();
            !builder.all(&fails)
        }
        Term::Pivot { pivot, without, with } => {
            let (without, with) = (conjunction(builder, without), conjunction(builder, with));
            builder.choose(*pivot, with, without)
        }
    }
}

fn conjunction(builder: &mut Builder, terms: &[Term]) -> Lit {
    let lits: Vec<Lit> = terms.iter().map(|term| build(builder, term)).collect();
    builder.all(&lits)
}
