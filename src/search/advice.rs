//! Advice: when a quantum search is pointless, or what a figure does not say. Each piece has a stable code.

use num_bigint::BigUint;
use num_traits::{One, Zero};
use serde::Serialize;

use crate::search::price::StartPrice;

/// A piece of advice.
#[derive(Clone, PartialEq, Eq, Debug, Serialize)]
pub struct Advice {
    /// The stable code.
    pub code: &'static str,
    /// The advice, in one or two sentences.
    pub text: String,
}

impl Advice {
    /// Advice with this code and text.
    pub fn new(code: &'static str, text: impl Into<String>) -> Self {
        Self { code, text: text.into() }
    }

    /// The problem has no bits: there is nothing to put into superposition.
    pub fn nothing_to_search() -> Self {
        Self::new("nothing-to-search", "The problem has no bit to choose; its tally is the whole answer.")
    }

    /// Nothing is marked.
    pub fn no_solution() -> Self {
        Self::new("no-solution", "Nothing is marked: no number of iterations finds anything.")
    }

    /// Everything is marked.
    pub fn everything_marked() -> Self {
        Self::new("everything-marked", "Every state is marked: any guess is a solution.")
    }

    /// How many marked states there are could not be found out within the budget.
    pub fn marked_unknown() -> Self {
        Self::new(
            "marked-unknown",
            "The number of marked states is not known, so no iteration count follows. Allow more time with --time, or \
             give the number with --count.",
        )
    }

    /// A marked state may stand for several solutions.
    pub fn one_stands_for_many() -> Self {
        Self::new(
            "one-for-many",
            "One marked state may stand for several solutions, of which the search finds one: the plan counts marked states."
                .to_owned(),
        )
    }

    /// Hidden bits are searched with the shown ones.
    pub fn hidden_bits_searched(hidden: usize) -> Self {
        Self::new(
            "hidden-bits-searched",
            format!(
                "{hidden} hidden bits are searched together with the shown ones: the plan counts marked states, of which \
                 several may stand for one shown solution."
            ),
        )
    }

    /// An exact tally has decided the question that the search would ask.
    pub fn already_decided(count: &BigUint) -> Self {
        let text = if count.is_zero() {
            "The exact tally has already decided that no solution exists."
        } else {
            "The exact tally has already decided that a solution exists; the search is a verified exercise, or a \
             calibration for instances whose count is known from elsewhere."
        };
        Self::new("already-decided", text)
    }

    /// From another start state the whole search is cheaper.
    pub fn cheaper_start(other: &StartPrice, here: &StartPrice) -> Self {
        Self::new(
            "cheaper-start",
            format!(
                "From the start state `{}` the whole search costs {:.0} T gates instead of {:.0}, rotations included: \
                 --start {} takes it, and the oracle is then right on the strings of that state only.",
                other.start, other.t_gates, here.t_gates, other.start
            ),
        )
    }

    /// The lower end of the count is 0.
    pub fn if_there_is_any() -> Self {
        Self::new("if-there-is-any", "The count may be 0: the figures hold if anything is marked at all.")
    }

    /// A certain search rests on the exact count.
    pub fn needs_the_exact_count() -> Self {
        Self::new(
            "needs-the-exact-count",
            "The phases are tuned to this count: with another one, or with rotations that are not exact, success is no \
             longer certain.",
        )
    }

    /// A search with nothing known stops with an error.
    pub fn stopping_shows_nothing(error: f64) -> Self {
        Self::new(
            "stopping-shows-nothing",
            format!(
                "Stopping without a result does not show that there is no solution: where there is one, it has been \
                 missed with a chance of at most {error:.3e}."
            ),
        )
    }

    /// The machine errs so much that guessing is cheaper.
    pub fn noise_wins(error: f64, break_even: f64) -> Self {
        Self::new(
            "noise-wins",
            format!(
                "At an error of {error:.3e} per iteration the search costs more than guessing; it pays below \
                 {break_even:.3e}."
            ),
        )
    }

    /// Even without error, a search costs more than guessing.
    pub fn guessing_is_cheaper() -> Self {
        Self::new("guessing-is-cheaper", "At these costs of a guess and of a try, guessing is cheaper than a search.")
    }

    /// What the numbers alone say against a search.
    pub(super) fn on_numbers(space: &BigUint, marked: &BigUint) -> Vec<Self> {
        let mut advice = Vec::new();
        if marked.is_zero() {
            advice.push(Self::no_solution());
        } else if marked == space {
            advice.push(Self::everything_marked());
        } else if marked * 2u32 >= *space {
            advice.push(Self::new(
                "guess-instead",
                "At least every second state is marked: measuring the start state without any iteration, or guessing, \
                 serves better than a search.",
            ));
        } else if marked * 64u32 >= *space {
            let one_in = (space + marked - BigUint::one()) / marked;
            advice.push(Self::new(
                "many-solutions",
                format!("About one state in {one_in} is marked: a few dozen random guesses find one."),
            ));
        }
        advice
    }
}
