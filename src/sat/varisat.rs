//! varisat: the first engine.
//!
//! What we rely on, with a guard test each: assumptions replace the ones before; verdicts and models are right; the
//! model covers every variable up to the highest mentioned; repeated literals, tautologies and empty clauses are fine.
//! What we avoid, with a guard test each that tells when the library changed: its unsatisfiable cores may be
//! incomplete, and its DRAT writer panics on assumptions and on clauses added after the first call.
//!
//! It has no interrupt, and its solver cannot move between threads: make it in the thread that uses it.

use varisat::{ExtendFormula, Lit as TheirLit, Solver, Var};

use super::withheld::is_withheld;
use super::{Answer, Engine, Lit};
use crate::budget::Budget;

/// The engine.
pub struct Varisat {
    solver: Solver<'static>,
    /// The last model, by variable; shorter where the highest variables were never mentioned.
    model: Vec<bool>,
    /// Room for a clause in the library's literals.
    clause: Vec<TheirLit>,
    /// Whether its questions are small from the start.
    is_local: bool,
}

impl std::fmt::Debug for Varisat {
    fn fmt(&self, f: &mut std::fmt::Formatter<'_>) -> std::fmt::Result {
        f.debug_struct("Varisat").finish_non_exhaustive()
    }
}

impl Varisat {
    /// An engine for questions of bounded size that are about no assignment of a problem.
    pub fn local() -> Self {
        Self { is_local: true, ..Self::new() }
    }
}

fn theirs(lit: Lit) -> TheirLit {
    TheirLit::from_var(Var::from_index(lit.var()), !lit.is_negated())
}

impl Engine for Varisat {
    fn new() -> Self {
        Self { solver: Solver::new(), model: Vec::new(), clause: Vec::new(), is_local: false }
    }

    fn add_clause(&mut self, clause: &[Lit]) {
        self.clause.clear();
        self.clause.extend(clause.iter().copied().map(theirs));
        self.solver.add_clause(&self.clause);
    }

    fn solve(&mut self, assumptions: &[Lit], budget: &Budget) -> Answer {
        if budget.spent() || !self.is_local && is_withheld() {
            return Answer::Stopped;
        }
        self.clause.clear();
        self.clause.extend(assumptions.iter().copied().map(theirs));
        self.solver.assume(&self.clause);
        // Errors come from proof writers only, and none is attached.
        if !self.solver.solve().expect("no proof is written") {
            return Answer::Unsat;
        }
        let model = self.solver.model().expect("the answer was yes");
        self.model.clear();
        for lit in model {
            let at = lit.var().index();
            if self.model.len() <= at {
                self.model.resize(at + 1, false);
            }
            self.model[at] = lit.is_positive();
        }
        Answer::Sat
    }

    fn value(&self, var: usize) -> bool {
        self.model.get(var).copied().unwrap_or(false)
    }
}

#[cfg(test)]
mod tests {
    use std::panic::{AssertUnwindSafe, catch_unwind};

    use varisat::ProofFormat;

    use super::*;

    fn lits(numbers: &[isize]) -> Vec<TheirLit> {
        numbers.iter().map(|&number| TheirLit::from_dimacs(number)).collect()
    }

    fn core(solver: &Solver<'_>) -> Vec<isize> {
        let mut core: Vec<isize> = solver.failed_core().expect("unsat").iter().map(|lit| lit.to_dimacs()).collect();
        core.sort_unstable();
        core
    }

    /// The third answer is right and its core is not: {-4} alone is satisfiable. Once this fails, the library was
    /// mended, and cores may be offered.
    #[test]
    fn guard_cores_may_be_incomplete() {
        let mut solver = Solver::new();
        solver.add_clause(&lits(&[-1]));
        solver.assume(&lits(&[1, 2]));
        assert!(!solver.solve().unwrap());
        assert_eq!(core(&solver), [1]);
        solver.add_clause(&lits(&[-2]));
        solver.assume(&lits(&[-2]));
        assert!(solver.solve().unwrap());
        solver.add_clause(&lits(&[-3, 4]));
        solver.assume(&lits(&[3, -4]));
        assert!(!solver.solve().unwrap());
        assert_eq!(core(&solver), [-4]);
        solver.assume(&lits(&[-4]));
        assert!(solver.solve().unwrap());
    }

    #[test]
    fn guard_assumptions_persist_and_are_replaced() {
        let mut solver = Solver::new();
        solver.add_clause(&lits(&[1, 2]));
        solver.assume(&lits(&[-1, -2]));
        assert!(!solver.solve().unwrap());
        assert!(!solver.solve().unwrap(), "they persist");
        solver.assume(&lits(&[-1]));
        assert!(solver.solve().unwrap(), "they are replaced");
        assert_eq!(solver.model().unwrap(), lits(&[-1, 2]));
    }

    #[test]
    fn guard_the_model_covers_every_variable_to_the_highest() {
        let mut solver = Solver::new();
        solver.add_clause(&lits(&[5]));
        assert!(solver.solve().unwrap());
        assert_eq!(solver.model().unwrap(), lits(&[-1, -2, -3, -4, 5]));
        solver.assume(&lits(&[7]));
        assert!(solver.solve().unwrap());
        assert_eq!(solver.model().unwrap().len(), 7);
    }

    #[test]
    fn guard_odd_clauses_are_fine() {
        let mut solver = Solver::new();
        solver.add_clause(&lits(&[1, 1, -2, 1]));
        solver.add_clause(&lits(&[2, -2]));
        solver.assume(&lits(&[-1]));
        assert!(solver.solve().unwrap());
        assert_eq!(solver.model().unwrap(), lits(&[-1, -2]));
        solver.add_clause(&[]);
        solver.assume(&[]);
        assert!(!solver.solve().unwrap());
    }

    /// DRAT proofs are for one call without assumptions only.
    #[test]
    fn guard_drat_panics_on_assumptions_and_late_clauses() {
        let panics = |use_solver: fn(&mut Solver<'_>)| {
            let mut solver = Solver::new();
            solver.write_proof(std::io::sink(), ProofFormat::Drat);
            solver.add_clause(&lits(&[1, 2]));
            catch_unwind(AssertUnwindSafe(|| use_solver(&mut solver))).is_err()
        };
        let results = [
            panics(|solver| solver.assume(&[])),
            panics(|solver| {
                solver.solve().unwrap();
                solver.add_clause(&lits(&[-1]));
            }),
            panics(|solver| assert!(solver.solve().unwrap())),
        ];
        assert_eq!(results, [true, true, false]);
    }

    #[test]
    fn a_spent_budget_stops_before_the_call() {
        let budget = Budget::unlimited();
        budget.cancel();
        assert_eq!(Varisat::new().solve(&[], &budget), Answer::Stopped);
    }
}
