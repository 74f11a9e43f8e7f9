//! The verdict on a circuit.

use std::sync::Arc;

use serde::Serialize;

pub use super::proof::Certificate;
use crate::problem::Bits;

/// What was found.
#[derive(Clone, Copy, PartialEq, Eq, Debug, Serialize)]
#[serde(rename_all = "kebab-case")]
pub enum Outcome {
    /// The circuit is the oracle of the problem, on every input.
    Equal,
    /// It is not; there is a witness.
    Differs,
    /// No difference was found, but not every input was covered.
    Undecided,
}

/// How it was found.
#[derive(Clone, Copy, PartialEq, Eq, Debug, Serialize)]
#[serde(rename_all = "kebab-case")]
pub enum How {
    /// A proof by structure, for every input at once and with no input tried. The circuit was read symbolically: every
    /// qubit's value as a function of the input, every conjunction one node however often it is computed. All qubits
    /// came out as they must, and the function that the circuit marks is, node for node, the problem's predicate as the
    /// judge reads it (or its negation, which is a global sign).
    Symbolic,
    /// Every input. Complete: the gates permute basis states up to phases. Either each gate was run on each input; or the
    /// circuit was read symbolically, which showed all but the function that it marks, and the distinct nodes of that
    /// function were evaluated on each input. A note says which.
    Exhaustive,
    /// Every input in superposition, gate by gate, for several drawn strings of measurement outcomes.
    Superposition,
    /// Every input, by a proof that was checked: what the circuit does, read symbolically, is what the problem asks.
    Proof,
    /// Some inputs: all known solutions, their one-bit neighbours, and drawn ones.
    Sample,
}

/// Whether the signs are those of the solutions or of their complement, which is a global sign.
#[derive(Clone, Copy, PartialEq, Eq, Debug, Serialize)]
#[serde(rename_all = "kebab-case")]
pub enum Phases {
    /// Solutions get -1.
    Equal,
    /// Everything but the solutions gets -1.
    Complement,
}

/// An input on which circuit and problem differ.
#[derive(Clone, PartialEq, Eq, Debug)]
pub struct Witness {
    /// The input, over the bits of the problem.
    pub bits: Bits,
    /// What the oracle must do, in words.
    pub expected: String,
    /// What the circuit does, in words.
    pub got: String,
}

/// The verdict.
#[derive(Clone, PartialEq, Eq, Debug)]
pub struct Verdict {
    /// What was found.
    pub outcome: Outcome,
    /// How.
    pub how: How,
    /// How many inputs were covered; the largest number where they are more than 2^128.
    pub inputs: u128,
    /// Whether every work qubit was clean again on all of them.
    pub work_clean: bool,
    /// The signs; `Equal` for a bit oracle that is right.
    pub phases: Phases,
    /// An input on which they differ.
    pub witness: Option<Witness>,
    /// What the verdict rests on, for people: drawn outcomes, seeds, limits.
    pub notes: Vec<String>,
    /// What a verdict by proof rests on, for whoever wants to check it again.
    pub certificate: Option<Arc<Certificate>>,
}
