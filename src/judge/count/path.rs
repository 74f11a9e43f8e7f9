//! The path of a depth-first search over the counted variables, which are fixed in order.

use num_bigint::BigUint;
use num_traits::One;

use super::list::{Search, WrongModel};
use super::parts::Part;
use super::propagate::Propagator;
use crate::sat::{Engine, Lit};

/// How a counted variable came by its value.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
enum Step {
    /// Assumed; the other value is not searched yet.
    Open,
    /// Assumed; the other value was searched before.
    Flipped,
    /// It follows from the values before; the other value is impossible.
    Implied,
}

/// What came of the next flip.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub(super) enum Flip {
    /// There is none any more.
    None,
    /// There is one, and it was left alone.
    Left,
    /// The path was flipped; an engine must tell whether it has solutions.
    Possible,
    /// The path was flipped, and has no solutions.
    Impossible,
}

/// The variables fixed so far.
#[derive(Debug)]
pub(super) struct Path {
    steps: Vec<Step>,
    /// The literals of the steps that are not implied.
    assumed: Vec<Lit>,
    /// What follows from the literals assumed, where the search is pruned.
    known: Option<Propagator>,
}

impl Path {
    /// Nothing fixed.
    pub(super) fn new(part: &Part, search: Search) -> Self {
        let known = if search == Search::Pruned { Propagator::new(part) } else { None };
        Self { steps: Vec::new(), assumed: Vec::new(), known }
    }

    /// The literals for the engine.
    pub(super) fn assumed(&self) -> &[Lit] {
        &self.assumed
    }

    /// Whether nothing is fixed.
    pub(super) fn is_empty(&self) -> bool {
        self.steps.is_empty()
    }

    /// Fixes the rest of the counted variables as in the engine's model.
    pub(super) fn descend(&mut self, part: &Part, engine: &impl Engine) -> Result<(), WrongModel> {
        for &var in &part.counted[self.steps.len()..] {
            let value = engine.value(var);
            match self.known.as_ref().and_then(|known| known.value(var)) {
                Some(implied) if implied != value => return Err(WrongModel),
                Some(_) => self.steps.push(Step::Implied),
                None => {
                    self.steps.push(Step::Open);
                    self.assumed.push(Lit::new(var, value));
                    if !self.assume(Lit::new(var, value)) {
                        return Err(WrongModel);
                    }
                }
            }
        }
        Ok(())
    }

    /// Goes back to the last variable whose other value was not searched, and flips it unless told to `stop` there.
    pub(super) fn flip_next(&mut self, stop: bool) -> Flip {
        while let Some(&step) = self.steps.last() {
            match step {
                Step::Open if stop => return Flip::Left,
                Step::Open => {
                    let lit = self.take_back();
                    self.steps.push(Step::Flipped);
                    self.assumed.push(!lit);
                    return if self.assume(!lit) { Flip::Possible } else { Flip::Impossible };
                }
                Step::Flipped => {
                    self.take_back();
                }
                Step::Implied => {
                    self.steps.pop();
                }
            }
        }
        Flip::None
    }

    /// How many assignments to the counted variables were not searched: for each open step those under its flip, and,
    /// where the last call was `stopped`, those under the path itself.
    pub(super) fn unsearched(&self, counted: usize, stopped: bool) -> BigUint {
        let levels = self.steps.iter().enumerate().filter(|&(_, &step)| step == Step::Open);
        let flips: BigUint = levels.map(|(level, _)| BigUint::one() << (counted - 1 - level)).sum();
        if stopped { flips + (BigUint::one() << (counted - self.steps.len())) } else { flips }
    }

    fn assume(&mut self, lit: Lit) -> bool {
        self.known.as_mut().is_none_or(|known| known.assume(lit))
    }

    /// Takes back the last step, which is assumed.
    fn take_back(&mut self) -> Lit {
        self.steps.pop();
        if let Some(known) = &mut self.known {
            known.undo();
        }
        self.assumed.pop().expect("the step was assumed")
    }
}
