//! Other forms of an oracle: any angle in place of the sign, under a control, and the inverse.
//!
//! Input:  a network, a level, and a [`Turn`].
//! Output: a circuit that multiplies by e^(i angle) where the predicate holds (and the qubit of register `control` is 1).
//! After:  there is no other phase, not even a global one: under a control it would count.
//!
//! The root is computed once, its phase is turned, and it is erased; so the control is on the turn alone. The inverse of
//! a turn is the turn by the opposite angle, the inverse of a sign or of a bit oracle is itself.

use std::f64::consts::PI;

use super::replay::{self, Marking};
use super::schedule::cells::cells;
use super::schedule::counter;
use super::schedule::front::{front, keep_all};
use super::schedule::program::Pay;
use super::{Limits, LowerError, Options};
use crate::budget::Budget;
use crate::circuit::figures::figures;
use crate::circuit::{Level, Mark};
use crate::make::lower::Lowered;
use crate::make::network::Network;

/// What happens where the predicate holds.
#[derive(Clone, Copy, PartialEq, Debug)]
pub struct Turn {
    /// The phase, in radians.
    pub angle: f64,
    /// Whether it is under a control, the one qubit of register `control`.
    pub controlled: bool,
}

impl Turn {
    /// The sign under a control.
    pub fn controlled_sign() -> Self {
        Self { angle: PI, controlled: true }
    }

    /// The turn that undoes this one.
    #[must_use]
    pub fn inverse(self) -> Self {
        Self { angle: if self.angle == PI { PI } else { -self.angle }, ..self }
    }
}

/// The oracle that turns the phase, with as few T gates as the limit of qubits allows. Of the limits only that one is
/// looked at.
pub fn lower_turn(
    network: &Network,
    level: Level,
    turn: Turn,
    limits: &Limits,
    budget: &Budget,
) -> Result<Lowered, LowerError> {
    super::refuse_trivial(network)?;
    let mut cells = cells(network, false);
    counter::group(&mut cells);
    let marking = Marking::Turn(turn);
    let own = marking.qubits();
    let fixed = network.searched().len() + usize::from(turn.controlled);
    let everything = keep_all(&cells);
    let asked = limits.qubits.unwrap_or(u64::MAX);
    let needs = |ancillas: usize| (fixed + ancillas + own) as u64;
    let points = if needs(everything.cost.ancillas) <= asked {
        vec![everything]
    } else {
        front(&cells, Pay::at(level), budget)?
    };
    let least = points.first().map_or(0, |point| needs(point.cost.ancillas));
    let best = points.iter().rfind(|point| needs(point.cost.ancillas) <= asked);
    let point = best.ok_or(LowerError::TooFewQubits { asked, least })?;
    let size = (network.searched().len(), point.cost.ancillas + own);
    let options = Options { level, mark: Mark::Phase };
    let circuit = replay::replay(&cells, &point.moves, size, &options, marking, budget)?;
    let figures = figures(&circuit);
    let and_count = point.cost.worst + own as u64;
    Ok(Lowered { circuit, and_count, figures })
}
