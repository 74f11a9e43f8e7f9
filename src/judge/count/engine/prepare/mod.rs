//! Preparation: the formula made smaller before the search, without changing its (projected) count.
//!
//! Input:  clauses, and which variables are shown (all, where nothing is said).
//! Output: [`Prepared`]: clauses of at least two literals over compact variables, the [`Class`] of each variable, and
//!         the number of shown variables that no clause speaks of.
//!
//! The steps, and why each keeps the number of assignments of the shown variables that extend to a model:
//!
//! | step | keeps the count because |
//! |---|---|
//! | tautologies, repeated literals and clauses, units, subsumption, strengthening, failed literals | the models stay the same |
//! | equal literals merged | a model restricted to the representatives extends in exactly one way |
//! | definitions found | nothing is changed: a shown variable that others define needs no counting, since its value follows |
//! | resolution of variables that do not count | it projects the models on the other variables: exactly what a projected count does, and a defined variable is projected away without two models becoming one |
//!
//! Every step is tested against brute force, alone and in the whole sequence.

mod define;
mod eliminate;
mod equal;
mod form;
mod probe;
mod subsume;

use super::lit::Lit;
use crate::budget::Budget;
use crate::id::Id;
use crate::problem::{BitId, BitLit, Clauses};
use form::{Form, State};

/// What a variable is for the count.
#[derive(Clone, Copy, PartialEq, Eq, PartialOrd, Ord, Debug)]
pub(crate) enum Class {
    /// Its value tells models apart.
    Counted,
    /// The counted variables determine its value in every model: it may be decided or not, the count is the same.
    Determined,
    /// Not shown and not determined: it may only be decided where no counted variable is left.
    Hidden,
}

/// How much preparation may change.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub enum Effort {
    /// Everything that keeps the count.
    Count,
    /// Only what keeps the models and leaves each clause as it is, or drops it, or shortens it by a fixed literal: so
    /// that a certificate over the given clauses can be written, and followed clause by clause.
    Models,
}

/// A formula ready for the search.
#[derive(Debug)]
pub(crate) struct Prepared {
    /// Clauses of at least two literals over different variables.
    pub(crate) clauses: Vec<Vec<Lit>>,
    /// For a variable, what it is.
    pub(crate) class: Vec<Class>,
    /// For a variable, its literal in the given formula.
    pub(crate) names: Vec<BitLit>,
    /// Literals that hold in every model, of the given formula.
    pub(crate) fixed: Vec<BitLit>,
    /// Shown variables that occur in no clause any more, and whose value is free.
    pub(crate) free: usize,
    /// Whether a contradiction was found.
    pub(crate) contradiction: bool,
}

/// Rounds of all steps; more found nothing on the instances tried.
const ROUNDS: usize = 4;

/// Prepares a formula.
pub(crate) fn prepare(
    clauses: &Clauses,
    var_count: usize,
    shown: Option<&[BitId]>,
    effort: Effort,
    budget: &Budget,
) -> Prepared {
    let mut form = Form::new(clauses, var_count, shown);
    form.tidy();
    for _ in 0..ROUNDS {
        if form.contradiction || budget.spent() {
            break;
        }
        let mut changed = subsume::subsume(&mut form, effort);
        changed |= probe::probe(&mut form, effort);
        if effort == Effort::Count && !form.contradiction {
            changed |= equal::merge_equal(&mut form);
            define::find_definitions(&mut form);
            changed |= eliminate::eliminate(&mut form);
        }
        if !changed {
            break;
        }
    }
    finish(form)
}

/// Numbers the variables that are left.
fn finish(form: Form) -> Prepared {
    let mut used = vec![false; form.class.len()];
    for lit in form.clauses.iter().flatten() {
        used[lit.var()] = true;
    }
    let mut prepared = Prepared {
        clauses: Vec::new(),
        class: Vec::new(),
        names: Vec::new(),
        fixed: Vec::new(),
        free: 0,
        contradiction: form.contradiction,
    };
    let mut new = vec![0u32; form.class.len()];
    for var in 0..form.class.len() {
        let name = BitLit::new(BitId::new(var), true);
        match form.state[var] {
            State::Fixed(value) => prepared.fixed.push(if value { name } else { !name }),
            State::Open if used[var] => {
                new[var] = prepared.class.len() as u32;
                prepared.class.push(form.class[var]);
                prepared.names.push(name);
            }
            State::Open => prepared.free += usize::from(form.class[var] == Class::Counted),
            State::Same(_) | State::Gone => {}
        }
    }
    let rename = |lit: &Lit| Lit::new(new[lit.var()], lit.is_negated());
    prepared.clauses = form.clauses.iter().map(|clause| clause.iter().map(rename).collect()).collect();
    prepared
}

#[cfg(test)]
mod tests;
