//! Auditing: does a circuit mark exactly the solutions of a problem, and leave everything else as it was?
//!
//! Input: a problem, the places that say which qubit carries which bit, and a circuit from whatever source. Output: a
//! [`Verdict`]. The circuit's gates are interpreted one by one; no sequence of gates is recognised.
//!
//! - Circuits whose gates are X, Z, S, T and inverses with any controls permute basis states up to phases, so running
//!   every basis state is complete (`basis`); where that is too much, a stated sample is run, and what shows no
//!   difference there is proven (`proof`).
//! - Every other circuit is run on a superposition of all inputs ([`superposition`]).
//! - A whole search is followed from its start to its measurement ([`search`]).

mod basis;
mod oracle;
mod proof;
pub mod search;
mod state;
pub mod superposition;
pub mod verdict;

pub use search::{SearchVerdict, audit_search};
pub use verdict::{Certificate, How, Outcome, Phases, Verdict, Witness};

use thiserror::Error;

use crate::budget::Budget;
use crate::circuit::Circuit;
use crate::diag::{Code, Diagnostic};
use crate::places::{Places, PlacesError};
use crate::problem::{Bits, Problem};

/// How to audit.
#[derive(Clone, PartialEq, Eq, Debug)]
pub struct Options {
    /// Whether a phase oracle must be right without any global phase: one that marks the complement is then wrong.
    pub strict_phase: bool,
    /// The seed of everything drawn.
    pub seed: u64,
    /// How many threads work.
    pub threads: usize,
    /// Solutions that are known from the tally, over all bits of the problem; a sample includes them.
    pub known: Vec<Bits>,
    /// How many inputs a sample draws, besides the known solutions and their neighbours.
    pub sample: usize,
    /// The largest search register of which every input is tried.
    pub exhaustive_bits: u32,
    /// Whether a proof is tried where not every input can be.
    pub proof: bool,
}

impl Default for Options {
    fn default() -> Self {
        Self {
            strict_phase: false,
            seed: 1,
            threads: 2,
            known: Vec::new(),
            sample: 1 << 14,
            exhaustive_bits: 26,
            proof: true,
        }
    }
}

/// A circuit that cannot be judged against a problem.
#[derive(Clone, PartialEq, Eq, Debug, Error)]
pub enum AuditError {
    /// The places do not fit the problem.
    #[error(transparent)]
    Places(#[from] PlacesError),
    /// A problem without bits has no oracle.
    #[error("the problem has no bits, so there is nothing that an oracle could mark")]
    NothingToSearch,
    /// There is no register of this name.
    #[error("the circuit has no register `{0}`")]
    NoRegister(&'static str),
    /// A register has another size than it must have.
    #[error("the register `{name}` has {found} qubits, and {expected} are expected")]
    RegisterSize {
        /// The register.
        name: &'static str,
        /// Its size.
        found: usize,
        /// The size it must have.
        expected: usize,
    },
    /// A register that the contract does not know.
    #[error("the circuit has a register `{0}`, and only `search`, `mark` and `work` have a meaning here")]
    UnknownRegister(String),
    /// A `reset` of a qubit whose value is an input.
    #[error("the circuit resets {qubit}, which would destroy an input")]
    ResetOfInput {
        /// The qubit, as it is written.
        qubit: String,
    },
    /// A gate that no way of auditing here covers.
    #[error("the audit does not cover this gate: {gate}")]
    Gate {
        /// The gate in words.
        gate: String,
    },
    /// The circuit is larger than any way of auditing here takes.
    #[error("the circuit is too large to audit: {what}")]
    TooLarge {
        /// What is too large, with the limit.
        what: String,
    },
}

impl AuditError {
    /// The message for people.
    pub fn diagnostic(&self) -> Diagnostic {
        let error = |code| Diagnostic::error(Code(code), self.to_string());
        match self {
            Self::Places(_) => error("P010").help("give the places file that was written beside this circuit"),
            Self::NothingToSearch => error("A020"),
            Self::NoRegister(name) => error("P011").expected(format!("a register `{name}`")),
            Self::RegisterSize { found, expected, .. } => error("P012")
                .found(found.to_string())
                .expected(expected.to_string())
                .help("give the places file of this circuit, or the problem it was made for"),
            Self::UnknownRegister(name) => {
                error("P013").found(name.clone()).expected("`search`, `mark` or `work`").help("rename the register")
            }
            Self::ResetOfInput { qubit } => {
                error("A021").found(format!("reset {qubit};")).help("an oracle may reset `work`, nothing else")
            }
            Self::Gate { gate } => error("A022").found(gate.clone()),
            Self::TooLarge { .. } => error("A023"),
        }
    }
}

/// Judges a circuit against a problem.
///
/// The circuit has a register `search`, of the size that the places say; a register `mark` of one qubit if it is a bit
/// oracle; and may have a register `work`, whose qubits begin and must end as 0. For every input tried, a phase oracle
/// must multiply the solutions by -1 and nothing else, a bit oracle must flip `mark` on the solutions and give no phase;
/// a global phase is free unless the options are strict.
///
/// A verdict `equal` rests on every input. Above [`Options::exhaustive_bits`], or when the budget runs out, a sample is
/// tried, then a proof; where that does not end within the budget, the verdict is `undecided`.
pub fn audit(
    problem: &Problem,
    places: &Places,
    circuit: &Circuit,
    options: &Options,
    budget: &Budget,
) -> Result<Verdict, AuditError> {
    let roles = oracle::roles(problem, places, circuit)?;
    oracle::check_gates(circuit)?;
    if !oracle::keeps_basis_states(circuit) {
        return superposition::audit_superposition(problem, places, circuit, options, budget);
    }
    Ok(basis::audit_basis(problem, places, circuit, &roles, options, budget))
}
