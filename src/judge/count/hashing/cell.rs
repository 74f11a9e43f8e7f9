//! The members of a cell, up to a limit: models that differ in the counted variables, by batsat with parities.

use super::hash::Solved;
use crate::budget::Budget;
use crate::judge::count::engine::{Class, Prepared};
use crate::sat::{Answer, Batsat, Engine, Lit};

/// The formula whose models are hashed.
#[derive(Debug)]
pub(super) struct Formula {
    clauses: Vec<Vec<Lit>>,
    /// The variables that tell models apart: the bits of the hash.
    pub(super) counted: Vec<usize>,
}

/// A model that the solver gave and that breaks a clause or an equation.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub(super) struct WrongModel;

/// Conflicts and decisions of one call of the solver: a limit for where no deadline is set, some tens of seconds.
const STEPS: u64 = 1 << 22;

/// How many members were found.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub(super) enum Size {
    /// So many, and there are no more.
    Exactly(u64),
    /// As many as were looked for, or more.
    Large,
    /// The budget ran out, or a call took too long.
    Stopped,
}

impl Formula {
    pub(super) fn of(prepared: &Prepared) -> Self {
        let clauses = prepared
            .clauses
            .iter()
            .map(|clause| clause.iter().map(|lit| Lit::new(lit.var(), !lit.is_negated())).collect());
        let counted = (0..prepared.class.len()).filter(|&var| prepared.class[var] == Class::Counted);
        Self { clauses: clauses.collect(), counted: counted.collect() }
    }

    /// Counts the members of a cell up to a limit.
    pub(super) fn cell(&self, cell: &Solved, limit: u64, budget: &Budget) -> Result<Size, WrongModel> {
        let mut engine = Batsat::new();
        engine.limit(STEPS);
        self.clauses.iter().for_each(|clause| engine.add_clause(clause));
        let parities: Vec<(Vec<usize>, bool)> =
            cell.equations.iter().map(|sum| (sum.bits().map(|bit| self.counted[bit]).collect(), sum.odd)).collect();
        parities.iter().for_each(|(vars, odd)| engine.add_parity(vars, *odd));
        // The others follow from these by the equations: a member is blocked by few literals.
        let free: Vec<usize> = cell.free(self.counted.len()).into_iter().map(|bit| self.counted[bit]).collect();
        let mut found = 0;
        let mut block = Vec::new();
        while found < limit {
            match engine.solve(&[], budget) {
                Answer::Unsat => return Ok(Size::Exactly(found)),
                Answer::Stopped => return Ok(Size::Stopped),
                Answer::Sat => self.check(&engine, &parities)?,
            }
            found += 1;
            block.clear();
            block.extend(free.iter().map(|&var| Lit::new(var, !engine.value(var))));
            engine.add_clause(&block);
        }
        Ok(Size::Large)
    }

    fn check(&self, engine: &Batsat, parities: &[(Vec<usize>, bool)]) -> Result<(), WrongModel> {
        let holds = |lit: &Lit| engine.value(lit.var()) != lit.is_negated();
        let sum = |vars: &[usize]| vars.iter().filter(|&&var| engine.value(var)).count() % 2 == 1;
        let right = self.clauses.iter().all(|clause| clause.iter().any(holds))
            && parities.iter().all(|(vars, odd)| sum(vars) == *odd);
        right.then_some(()).ok_or(WrongModel)
    }
}
