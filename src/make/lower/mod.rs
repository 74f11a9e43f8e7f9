//! Lowering: from a network to an oracle circuit.
//!
//! Input:  a [`Network`], a [`Level`] and a [`Mark`].
//! Output: a [`Circuit`] with registers `search`, `mark` (bit oracles only) and `work` (where there are ancillas).
//! After:  the circuit is the oracle of the network's root, sign included, with all ancillas clean again.
//!
//! 1. [`plan`] decides which nodes get an ancilla. ANDs do, except the last one of a phase oracle (and, where the level
//!    has the gates, of a bit oracle) and, at the `wide` level, those that one other AND uses. XORs get one only where a
//!    long one is used several times; a XOR that alone uses an AND takes over that AND's ancilla.
//! 2. [`steps`] computes the planned nodes in order: a XOR under an AND is collected on one of its own qubits by CNOTs
//!    and put back afterwards ([`conjugation`]). Then it marks, and the compute steps are undone in reverse order.
//! 3. [`emit`] writes the steps with the gates of the level: at `clifford-t` an AND and its inverse cost 4 T each, at
//!    `feedback` the inverse is a measurement and a correction and costs none (C. Gidney, "Halving the cost of quantum
//!    addition", Quantum 2:74, 2018).

mod about;
mod conjugation;
mod emit;
mod fan_out;
mod forms;
mod gates;
mod multi;
mod plan;
mod prepare;
mod reflection;
mod replay;
mod schedule;
mod steps;
mod within;

use thiserror::Error;

use crate::budget::Budget;
use crate::circuit::{Circuit, Gate, Level, Mark, Op, Part, tidy};
use crate::diag::{Code, Diagnostic};
use crate::make::network::{Lit, Network};

pub use about::{Form, about_work, append_reflection_about};
pub use forms::{Turn, lower_turn};
pub use gates::gadgets;
pub use multi::{Idle, Way, append_controlled, ways};
pub use prepare::{Turn as Rotation, append_preparation, append_unpreparation, preparation};
pub use reflection::{append_reflection, least_reflection_work, reflection_work};
pub use within::{Favour, Limits, Lowered, front_of, lower_within};

/// What kind of oracle is wanted.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub struct Options {
    /// The gate set.
    pub level: Level,
    /// Whether the oracle flips a sign or a qubit.
    pub mark: Mark,
}

/// Why there is no circuit.
#[derive(Clone, Copy, PartialEq, Eq, Debug, Error)]
pub enum LowerError {
    /// The problem has no bits.
    #[error("there are no bits to search")]
    NoBits,
    /// The constraints contradict each other, and folding constants shows it.
    #[error("no assignment satisfies the constraints: the oracle would mark nothing")]
    NothingMarked,
    /// The constraints always hold, and folding constants shows it.
    #[error("every state that would be searched is marked: an oracle would mark everything")]
    EverythingMarked,
    /// The budget ran out; half an oracle is of no use.
    #[error("the time for compiling ran out")]
    OutOfTime,
    /// No circuit was found with so few qubits.
    #[error("no circuit was found with {asked} qubits; the least that was found has {least}")]
    TooFewQubits {
        /// The limit.
        asked: u64,
        /// What would do.
        least: u64,
    },
    /// No circuit within the limit of qubits was found with so few T gates.
    #[error("no circuit within the limit of qubits was found with a T-count of {asked}; the least is {least}")]
    TooFewT {
        /// The limit.
        asked: u64,
        /// What would do.
        least: u64,
    },
    /// No circuit within the other limits was found with so few layers.
    #[error("no circuit within the other limits was found with a depth of {asked}; the least is {least}")]
    TooShallow {
        /// The limit.
        asked: u64,
        /// What would do.
        least: u64,
    },
}

impl LowerError {
    /// The message with its stable code.
    pub fn diagnostic(&self) -> Diagnostic {
        let limit = |code, option, least| {
            Diagnostic::error(Code(code), self.to_string()).help(format!("give at least {option} {least}"))
        };
        let (code, help) = match self {
            Self::TooFewQubits { least, .. } => return limit("C005", "--qubits", least),
            Self::TooFewT { least, .. } => return limit("C006", "--t-count", least),
            Self::TooShallow { least, .. } => return limit("C007", "--depth", least),
            Self::NoBits => ("C001", "every variable has one value only: `count` says whether the constraints hold"),
            Self::NothingMarked => ("C002", "there is nothing to search for; `count` gives the tally, which is 0"),
            Self::EverythingMarked => {
                ("C003", "any values of the searched bits make a solution; --no-narrowing searches computed bits too")
            }
            Self::OutOfTime => ("C004", "give more time with --time"),
        };
        let expected = match self {
            Self::OutOfTime => "more time",
            _ => "a problem of which some bit strings are solutions and some are not",
        };
        Diagnostic::error(Code(code), self.to_string()).expected(expected).help(help)
    }

    /// Whether a budget was too small, rather than there being no circuit at all.
    pub fn is_unfinished(&self) -> bool {
        !matches!(self, Self::NoBits | Self::NothingMarked | Self::EverythingMarked)
    }
}

/// The oracle of a network.
pub fn lower(network: &Network, options: &Options, budget: &Budget) -> Result<Circuit, LowerError> {
    refuse_trivial(network)?;
    let plan = plan::plan(network, options);
    let steps = steps::steps(&plan, options, budget)?;
    Ok(tidied(emit::emit(&plan, &steps, &[], options, budget)?, options.level))
}

/// The oracle of a network with copies of searched qubits, each of which serves so many constraints.
fn lower_spread(network: &Network, options: &Options, share: usize, budget: &Budget) -> Result<Circuit, LowerError> {
    let plan = plan::plan(network, options);
    let mut steps = steps::steps(&plan, options, budget)?;
    let spread = fan_out::fan_out(&mut steps, plan.search, plan.first_work + plan.work, share);
    Ok(tidied(emit::emit(&plan, &steps, &spread, options, budget)?, options.level))
}

/// Circuits of more gates are left as they are: while it is tidied, a gate takes some 60 bytes more.
const MOST_TIDIED: usize = 100_000_000;

/// The circuit without gates that undo each other, and at `clifford-t` with rotations merged.
fn tidied(circuit: Circuit, level: Level) -> Circuit {
    match level {
        Level::Wide => circuit,
        _ if circuit.gates().len() > MOST_TIDIED => circuit,
        Level::Toffoli | Level::Feedback => tidy::cancel(circuit),
        Level::CliffordT => tidy::cancel(tidy::fold(tidy::cancel(circuit))),
    }
}

/// Where there is nothing to search or to tell there is no circuit.
fn refuse_trivial(network: &Network) -> Result<(), LowerError> {
    match network.root() {
        _ if network.searched().is_empty() => Err(LowerError::NoBits),
        Lit::NO => Err(LowerError::NothingMarked),
        Lit::YES => Err(LowerError::EverythingMarked),
        _ => Ok(()),
    }
}

/// The ANDs that an oracle computes or marks, those it undoes not included, measured on the gates of the network's
/// `toffoli` oracle: an X or a Z with *c* controls stands for *c* - 1 of them. So a CZ, which marks an AND of two
/// without computing it, is none, and four times this number is the T count at `feedback`.
///
/// The gates of `clifford-t` and `feedback` no longer show which of them make up an AND, so all levels are measured here.
pub fn and_count(network: &Network, mark: Mark, budget: &Budget) -> Result<u64, LowerError> {
    Ok(ands_of(&lower(network, &Options { level: Level::Toffoli, mark }, budget)?))
}

/// The ANDs of an oracle at the `toffoli` level.
fn ands_of(oracle: &Circuit) -> u64 {
    let ands = |gate: &Gate| match gate.op() {
        Op::X | Op::Z => gate.control_count().saturating_sub(1) as u64,
        _ => 0,
    };
    let counted = oracle.regions.iter().filter(|region| matches!(region.part, Part::Compute | Part::Mark));
    counted.flat_map(|r| &oracle.gates()[r.gates.start as usize..r.gates.end as usize]).map(ands).sum()
}
