//! The forms of an oracle besides the sign and the flipped mark: by an angle, controlled, inverse.
//!
//! A controlled oracle is an oracle of "the control holds and the problem does", with the control as one more searched
//! qubit: without the control the circuit must be the identity, and its phase against the other half is part of that.

use crate::id::Id;
use crate::places::Places;
use crate::problem::{BitId, BitLit, Domain, Problem};

/// The problem with one more bit that must hold, after all others, and the places with it at the end of the register.
pub fn controlled(problem: &Problem, places: &Places) -> (Problem, Places) {
    let (mut problem, mut places) = (problem.clone(), places.clone());
    let bit = BitId::new(problem.bit_count());
    problem.add_var("control", Domain::YesNo, None);
    problem.clauses.push_lit(BitLit::new(bit, true));
    problem.clauses.end_clause();
    problem.shown.iter_mut().for_each(|shown| shown.push(bit));
    places.searched.push(bit);
    (problem, places)
}
