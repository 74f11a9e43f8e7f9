//! Refutations: clauses without a model, with a proof of it.
//!
//! Input: clauses. Output: a DRAT proof, or a model. The engine is varisat, made anew for each proof, with all clauses
//! given before its only call and without assumptions: beyond that its proof writer cannot be used (the guard tests in
//! `varisat.rs`). It cannot be stopped, so with a budget it runs on a thread that is left behind when time is up.

use std::sync::mpsc::{RecvTimeoutError, channel};
use std::time::Duration;

use varisat::{ExtendFormula, Lit as TheirLit, ProofFormat, Solver, Var};

use super::Lit;
use super::drat::Proof;
use super::formula::Formula;
use super::withheld::is_withheld;
use crate::budget::Budget;

/// What came of it.
#[derive(Clone, PartialEq, Eq, Debug)]
pub enum Refutation {
    /// There is no model, and this is why.
    Proof(Proof),
    /// A model: the value of each variable.
    Model(Vec<bool>),
    /// The budget ran out.
    Stopped,
}

/// How often a budget without a deadline is asked whether it was cancelled.
const LOOK: Duration = Duration::from_millis(50);

/// Looks for a model, on a thread of its own, until the budget is spent.
pub fn refute(formula: &Formula, budget: &Budget) -> Refutation {
    if is_withheld() {
        return Refutation::Stopped;
    }
    let (sender, receiver) = channel();
    let owned = formula.clone();
    std::thread::spawn(move || {
        // Nobody listens any more where the budget ran out.
        let _ = sender.send(refute_here(&owned));
    });
    loop {
        if budget.spent() {
            return Refutation::Stopped;
        }
        let wait = budget.time_left().map_or(LOOK, |left| left.min(LOOK));
        match receiver.recv_timeout(wait) {
            Ok(refutation) => return refutation,
            Err(RecvTimeoutError::Timeout) => {}
            Err(RecvTimeoutError::Disconnected) => return Refutation::Stopped,
        }
    }
}

/// Looks for a model on this thread, however long it takes.
pub fn refute_here(formula: &Formula) -> Refutation {
    if is_withheld() {
        return Refutation::Stopped;
    }
    let mut bytes = Vec::new();
    let mut solver = Solver::new();
    solver.write_proof(&mut bytes, ProofFormat::BinaryDrat);
    let mut clause: Vec<TheirLit> = Vec::new();
    for lits in formula.iter() {
        clause.clear();
        clause.extend(lits.iter().map(|lit| TheirLit::from_var(Var::from_index(lit.var()), !lit.is_negated())));
        solver.add_clause(&clause);
    }
    let is_satisfiable = solver.solve().expect("a proof into memory is written");
    let model = is_satisfiable.then(|| {
        let mut values = vec![false; formula.var_count()];
        for lit in solver.model().expect("the answer was yes") {
            if let Some(value) = values.get_mut(lit.var().index()) {
                *value = lit.is_positive();
            }
        }
        values
    });
    solver.close_proof().expect("a proof into memory is written");
    drop(solver);
    match model {
        Some(values) => Refutation::Model(values),
        None => {
            let mut proof = Proof::from_bytes(&bytes).expect("the engine writes the format it names");
            proof.add(std::iter::empty::<Lit>());
            Refutation::Proof(proof)
        }
    }
}
