//! batsat: the second engine, which asks the budget while it works and stops when it is spent.

use batsat::interface::SolverInterface;
use batsat::{Callbacks, Lit as TheirLit, Solver, SolverOpts, lbool};

use super::parity::Parities;
use super::withheld::is_withheld;
use super::{Answer, Engine, Lit};
use crate::budget::Budget;

/// Calls of the library between two looks at the clock.
const CALLS_A_LOOK: u64 = 16;

/// The engine.
pub struct Batsat {
    solver: Solver<Watch>,
    parities: Parities,
    clause: Vec<TheirLit>,
}

/// Tells the library when to stop. It is asked once a conflict or decision, far more often than the clock needs.
struct Watch {
    budget: Budget,
    calls: std::cell::Cell<u64>,
    /// Calls after which it stops whatever the clock says.
    most: u64,
    stopped: std::cell::Cell<bool>,
}

impl Callbacks for Watch {
    fn stop(&self) -> bool {
        let calls = self.calls.get().wrapping_add(1);
        self.calls.set(calls);
        if calls >= self.most || (calls.is_multiple_of(CALLS_A_LOOK) && self.budget.spent()) {
            self.stopped.set(true);
        }
        self.stopped.get()
    }
}

impl std::fmt::Debug for Batsat {
    fn fmt(&self, f: &mut std::fmt::Formatter<'_>) -> std::fmt::Result {
        f.debug_struct("Batsat").finish_non_exhaustive()
    }
}

impl Batsat {
    /// Stops every later call of [`Engine::solve`] after so many conflicts and decisions: a limit that does not depend
    /// on the machine.
    pub fn limit(&mut self, steps: u64) {
        self.solver.cb_mut().most = steps;
    }

    /// Adds an equation, at any time: the sum of these variables is odd, or even. It is propagated as a whole with the
    /// others, by elimination.
    pub fn add_parity(&mut self, vars: &[usize], odd: bool) {
        let vars: Vec<_> = vars.iter().map(|&var| self.solver.var_of_int(var as u32)).collect();
        if !self.parities.add(&vars, odd) {
            self.add_clause(&[]);
        }
    }

    fn theirs(&mut self, lit: Lit) -> TheirLit {
        // Makes the variables up to this one.
        let var = self.solver.var_of_int(lit.var() as u32);
        TheirLit::new(var, !lit.is_negated())
    }

    fn take(&mut self, lits: &[Lit]) -> Vec<TheirLit> {
        let mut clause = std::mem::take(&mut self.clause);
        clause.clear();
        for &lit in lits {
            clause.push(self.theirs(lit));
        }
        clause
    }
}

impl Engine for Batsat {
    fn new() -> Self {
        let watch = Watch { budget: Budget::unlimited(), calls: 0.into(), most: u64::MAX, stopped: false.into() };
        Self { solver: Solver::new(SolverOpts::default(), watch), parities: Parities::default(), clause: Vec::new() }
    }

    fn add_clause(&mut self, clause: &[Lit]) {
        let mut clause = self.take(clause);
        // False says that the clauses have no model any more; the next call says so again.
        let _ = self.solver.add_clause_reuse(&mut clause);
        self.clause = clause;
    }

    fn solve(&mut self, assumptions: &[Lit], budget: &Budget) -> Answer {
        let is_bounded = self.solver.cb_mut().most < u64::MAX;
        if budget.spent() || !is_bounded && is_withheld() {
            return Answer::Stopped;
        }
        let watch = self.solver.cb_mut();
        watch.budget = budget.clone();
        watch.calls.set(0);
        watch.stopped.set(false);
        let assumptions = self.take(assumptions);
        let answer = self.solver.solve_limited_th(&mut self.parities, &assumptions);
        self.clause = assumptions;
        match answer {
            answer if answer == lbool::TRUE => Answer::Sat,
            answer if answer == lbool::FALSE => Answer::Unsat,
            _ => Answer::Stopped,
        }
    }

    fn value(&self, var: usize) -> bool {
        self.solver.get_model().get(var).is_some_and(|&value| value == lbool::TRUE)
    }
}

#[cfg(test)]
mod tests {
    use std::time::Duration;

    use super::*;

    /// Nine pigeons and eight holes keep the engine busy for much longer than the budget, and the budget is kept.
    #[test]
    fn stops_inside_a_call_and_goes_on_afterwards() {
        let mut engine = Batsat::new();
        let (pigeons, holes) = (12, 11);
        let sits = |pigeon: usize, hole: usize, value| Lit::new(pigeon * holes + hole, value);
        for pigeon in 0..pigeons {
            engine.add_clause(&(0..holes).map(|hole| sits(pigeon, hole, true)).collect::<Vec<_>>());
        }
        for hole in 0..holes {
            for pigeon in 0..pigeons {
                for other in 0..pigeon {
                    engine.add_clause(&[sits(pigeon, hole, false), sits(other, hole, false)]);
                }
            }
        }
        let budget = Budget::unlimited().within(Duration::from_millis(20));
        assert_eq!(engine.solve(&[], &budget), Answer::Stopped);
        // Under these assumptions the answer is near: the last pigeon has no hole.
        let nowhere: Vec<Lit> = (0..holes).map(|hole| sits(pigeons - 1, hole, false)).collect();
        assert_eq!(engine.solve(&nowhere, &Budget::unlimited()), Answer::Unsat);
    }
}
