//! The tally together with the start state it is searched from: N and M as the plan needs them.

use num_bigint::BigUint;
use num_traits::One;

use crate::judge::count::Tally;
use crate::places::{Claim, Part, Places};

/// How many solutions, how many states, and how many of these are marked.
#[derive(Clone, PartialEq, Debug)]
pub struct Counted {
    /// The solutions, on the shown bits where the problem shows only some.
    pub tally: Tally,
    /// The marked states, where they are not the solutions one for one.
    pub states: Option<Tally>,
    /// N: the states of the start state.
    pub space: BigUint,
}

impl Counted {
    /// N of these places.
    pub fn space(places: &Places) -> BigUint {
        let parts = places.start.parts();
        let free = places.search_len() - parts.iter().map(|part| part.qubits().len()).sum::<usize>();
        parts.iter().map(strings_of).product::<BigUint>() << free
    }

    /// Whether the states have to be counted apart from the solutions.
    pub fn needs_states(places: &Places) -> bool {
        places.claim != Claim::OneForOne
    }

    /// The tally of the marked states.
    pub fn marks(&self) -> &Tally {
        self.states.as_ref().unwrap_or(&self.tally)
    }

    /// M, where it is known exactly.
    pub fn marked(&self) -> Option<&BigUint> {
        self.marks().exact()
    }

    /// Whether the budget ran out before both numbers were known.
    pub fn is_partial(&self) -> bool {
        self.tally.exact().is_none() || self.marked().is_none()
    }

    /// `410 solutions (sweep, confirmed by listing)`, and the marked states where they differ.
    pub fn in_words(&self) -> String {
        let mut text = self.tally.in_words("solution", "solutions");
        if let Some(states) = &self.states {
            text += &format!("; {} among {} states", states.in_words("marked state", "marked states"), self.space);
        }
        text
    }
}

/// How many strings of its qubits a part of a start state allows.
fn strings_of(part: &Part) -> BigUint {
    match part {
        Part::Below { size, .. } => BigUint::from(*size),
        Part::Weight { qubits, ones } => {
            let n = qubits.len() as u64;
            (0..u64::from(*ones)).fold(BigUint::one(), |so_far, at| so_far * (n - at) / (at + 1))
        }
    }
}
