//! Narrowing: which bits are searched, and what the others are of them.
//!
//! Input: a [`Problem`]. Output: [`Narrowed`]: places with a formula for each computed bit; [`held`] then names the clauses that
//! hold by construction, so that the oracle need not check them. After: each computed bit follows those that its formula mentions;
//! setting it to its formula in a solution that agrees with the bits before it gives a solution; and unless the claim
//! says otherwise it is what every solution has. The judge proves that again (`judge/audit/narrowing`); it trusts nothing
//! said here.
//!
//! A variable that an equation determines is computed from it ([`equations`]). A bit is computed where all that is known before it leaves no choice ([`unique`]), where a parity does ([`ground`]), or, if
//! one solution may stand for many, by the one-sided rule ([`closure`]): when all clauses with *not y* have only known
//! other literals, *y* is the conjunction of their rests, and these clauses hold from then on; or its dual. For a hidden bit
//! of a projection that is always enough, since its value is not part of a solution.
//!
//! Everything here is local: a bit is judged by the clauses it stands in, in windows of at most [`table::MAX_BITS`] bits.
//! Nothing is decided by a model or by a solver, and effort is measured in steps, not in seconds.

mod closure;
mod equations;
mod function;
mod ground;
mod held;
mod orders;
mod synthesis;
mod table;
mod unique;

use crate::budget::Budget;
use crate::id::Id;
use crate::places::{Claim, Computed, Places, Start};
use crate::problem::{BitId, Problem};

use closure::{How, Step};
use function::Ranks;
use ground::Ground;

pub use equations::{Settled, settled};
pub use held::held;
pub use orders::Order;

/// How to narrow.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub struct Options {
    /// Whether one solution is enough: then a computed bit need not be the only one possible.
    pub one_for_many: bool,
    /// Seeds the orders that are drawn.
    pub seed: u64,
    /// Steps to spend on looking for better orders; a step looks at one literal.
    pub effort: u64,
}

impl Options {
    /// Steps that take some tenths of a second of a core.
    pub const EFFORT: u64 = 1 << 26;
}

impl Default for Options {
    fn default() -> Self {
        Self { one_for_many: false, seed: 1, effort: Self::EFFORT }
    }
}

/// What narrowing gives.
#[derive(Clone, PartialEq, Eq, Debug)]
pub struct Narrowed {
    /// What is searched, and what is computed from it.
    pub places: Places,
    /// The order in which bits were guessed that led here.
    pub order: Order,
}

/// Narrows a problem. Bits of variables in expressions are searched, unless clauses determine them or an equation does.
pub fn narrow(problem: &Problem, options: &Options, budget: &Budget) -> Narrowed {
    let ground = Ground::new(problem, options.one_for_many);
    let (steps, order) = orders::best(&ground, options, budget);
    let ranks = Ranks::new(&steps);
    let made = function::formulas(&ground, &steps, &ranks);
    let bits = steps.iter().filter(|step| step.how != How::Searched).map(|step| step.bit);
    let computed = bits.zip(made).map(|(bit, formula)| Computed { bit, formula }).collect();
    let mut searched: Vec<BitId> =
        steps.iter().filter(|step| step.how == How::Searched).map(|step| BitId::new(step.bit as usize)).collect();
    searched.sort_unstable();
    let mut places = Places { start: Start::AllStrings, searched, computed, claim: Claim::OneForOne };
    equations::solve_equations(problem, &mut places);
    places.claim = claim(&ground, &steps, &places);
    Narrowed { places, order }
}

/// What a marked state stands for after these steps. Bits of expressions are sure, and so is what equations make of them.
fn claim(ground: &Ground, steps: &[Step], places: &Places) -> Claim {
    let is_lost = |step: &&Step| !step.is_sure && ground.is_shown(step.bit);
    if steps.iter().any(|step| is_lost(&step)) {
        return Claim::OneForMany;
    }
    let is_extra = |bit: &BitId| !ground.is_shown(bit.index() as u32);
    if places.searched.iter().any(is_extra) { Claim::ManyForOne } else { Claim::OneForOne }
}
