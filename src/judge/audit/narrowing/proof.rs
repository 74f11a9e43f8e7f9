//! The obligations as one formula without a model, with a proof of that for whoever wants to check it again.

use std::io::{self, Write};

use super::refuted::settle;
use super::{Obligations, are_needed};
use crate::budget::Budget;
use crate::places::Places;
use crate::problem::Problem;
use crate::sat::check::check;
use crate::sat::drat::Proof;
use crate::sat::formula::Formula;
use crate::sat::refute::{Refutation, refute};

/// Clauses without a model and the proof of that, which was checked.
#[derive(Clone, PartialEq, Eq, Debug)]
pub struct Proven {
    /// A model would be a solution in which a computed bit is not what its formula gives, and may not be, or may not become
    /// it. Variable `i` of the file, from 1, is bit `i - 1` of the problem.
    pub formula: Formula,
    /// Why there is none.
    pub proof: Proof,
}

impl Proven {
    /// Writes the clauses as DIMACS CNF.
    pub fn write_formula(&self, out: &mut dyn Write) -> io::Result<()> {
        let comments = [
            "What places claim of a problem, negated: there is no model just if the claim holds.",
            "The first variables are the bits of the problem, in order.",
        ];
        self.formula.write_dimacs(&comments.map(str::to_owned), out)
    }

    /// Writes the proof as DRAT text.
    pub fn write_proof(&self, out: &mut dyn Write) -> io::Result<()> {
        self.proof.write_text(out)
    }
}

/// Proves the obligations. `Ok(None)` where there are none, or where they are not one formula: a hidden bit is searched, or a
/// bit is replaced together with others. An error says what did not hold or was not reached.
pub fn prove(problem: &Problem, places: &Places, budget: &Budget) -> Result<Option<Proven>, String> {
    if !are_needed(problem, places) {
        return Ok(None);
    }
    let mut found = None;
    match settle(problem, places, budget, &mut found) {
        Obligations::Hold(_) => {}
        Obligations::Broken(bits, why) => return Err(format!("the claim fails at {bits}: {why}")),
        Obligations::Open(why) => return Err(why),
    }
    let Some(formula) = found else { return Ok(None) };
    match refute(&formula, budget) {
        Refutation::Stopped => Err("the budget ran out".to_owned()),
        Refutation::Model(_) => Err("the two solvers do not agree".to_owned()),
        Refutation::Proof(proof) => match check(&formula, &proof, budget) {
            Ok(_) => Ok(Some(Proven { formula, proof })),
            Err(refused) => Err(format!("the proof was refused: {refused:?}")),
        },
    }
}
