//! Refutations: varisat's proof that clauses have no model.
//!
//! DRAT is written by a fresh solver, before any clause, and without assumptions: the library panics otherwise (guard
//! tests in `varisat.rs`). The call cannot be stopped.

use varisat::{ExtendFormula, Lit as TheirLit, ProofFormat, Solver, Var};

use super::Lit;

/// A refutation in DRAT text, variable *v* as the number *v* + 1; `None` where the clauses have a model.
pub fn refute(clauses: impl IntoIterator<Item = Vec<Lit>>) -> Option<String> {
    let mut proof = Vec::new();
    let mut solver = Solver::new();
    solver.write_proof(&mut proof, ProofFormat::Drat);
    for clause in clauses {
        let theirs = |lit: Lit| TheirLit::from_var(Var::from_index(lit.var()), !lit.is_negated());
        solver.add_clause(&clause.into_iter().map(theirs).collect::<Vec<_>>());
    }
    // Errors come from the writer, and writing to memory has none.
    let refuted = !solver.solve().ok()?;
    solver.close_proof().ok()?;
    drop(solver);
    refuted.then(|| String::from_utf8(proof).ok()).flatten()
}
