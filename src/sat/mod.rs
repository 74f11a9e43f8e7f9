//! Two SAT engines behind one face.
//!
//! Input: clauses over variables numbered from 0. Output: an [`Answer`] under assumptions, and a model.
//! The engines share no code, so that an answer of one is confirmed by the other.
//!
//! | | [`Varisat`] | [`Batsat`] |
//! |---|---|---|
//! | can be stopped inside a call | no | yes |
//! | takes parities | no | yes, propagated by elimination |
//! | used for | listing without a deadline | deadlines, confirming, cells of a hash |
//!
//! A budget is asked by `Varisat` only before a call begins. Whoever gives it a budget with a deadline must be ready to
//! wait for the call, or run the engine on a thread that may be left behind, as [`refute`] does. Neither engine's unsatisfiable cores are
//! offered: varisat 0.2.2 can give an incomplete one (see the guard tests in `varisat.rs`).

mod batsat;
pub mod check;
pub mod drat;
pub mod formula;
mod parity;
pub mod refute;
mod varisat;
pub mod withheld;

use std::ops::Not;

pub use self::batsat::Batsat;
pub use self::formula::Formula;
pub use self::varisat::Varisat;
use crate::budget::Budget;

/// A variable or its negation: `variable << 1 | negated`.
///
/// ```
/// use tallymark::sat::Lit;
/// let lit = Lit::new(3, false);
/// assert_eq!((lit.var(), lit.is_negated(), !lit), (3, true, Lit::new(3, true)));
/// ```
#[derive(Clone, Copy, PartialEq, Eq, PartialOrd, Ord, Hash, Debug)]
pub struct Lit(u32);

impl Lit {
    /// The literal that holds where the variable is `value`. The variable must be below 2^30.
    pub fn new(var: usize, value: bool) -> Self {
        assert!(var < 1 << 30, "variable {var} of an engine");
        Self((var as u32) << 1 | u32::from(!value))
    }

    /// The variable.
    pub fn var(self) -> usize {
        (self.0 >> 1) as usize
    }

    /// Whether the literal holds where the variable is false.
    pub fn is_negated(self) -> bool {
        self.0 & 1 == 1
    }

    /// The literal of a DIMACS number, which is not 0: variable 1 of a file is variable 0 here.
    pub fn from_dimacs(number: i64) -> Self {
        assert!(number != 0, "0 ends a clause");
        Self::new(number.unsigned_abs() as usize - 1, number > 0)
    }

    /// The DIMACS number of the literal.
    pub fn to_dimacs(self) -> i64 {
        let number = self.var() as i64 + 1;
        if self.is_negated() { -number } else { number }
    }
}

impl Not for Lit {
    type Output = Self;
    fn not(self) -> Self {
        Self(self.0 ^ 1)
    }
}

/// What an engine says about its clauses under assumptions.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub enum Answer {
    /// There is a model; [`Engine::value`] reads it.
    Sat,
    /// There is none.
    Unsat,
    /// The budget ran out before it was known.
    Stopped,
}

/// A SAT engine.
pub trait Engine {
    /// An engine without clauses.
    fn new() -> Self
    where
        Self: Sized;

    /// Adds a clause, at any time. Repeated literals, tautologies and the empty clause mean what logic says.
    fn add_clause(&mut self, clause: &[Lit]);

    /// Looks for a model of all clauses in which all assumptions hold. Assumptions are for this call only.
    fn solve(&mut self, assumptions: &[Lit], budget: &Budget) -> Answer;

    /// The value of a variable in the last model; false for a variable in no clause and no assumption. Only after
    /// [`Answer::Sat`], and only until the next call that takes the engine mutably.
    fn value(&self, var: usize) -> bool;
}
