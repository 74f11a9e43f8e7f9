//! Auditing: does a circuit mark exactly the solutions of a problem, and leave everything else as it was?
//!
//! Input: a problem, the places that say which qubit carries which bit, and a circuit from whatever source. Output: a
//! [`Verdict`]. The circuit's gates are interpreted one by one; no sequence of gates is recognised.
//!
//! - Circuits whose gates are X, Z, S, T and inverses with any controls permute basis states up to phases (`basis`). They
//!   are read symbolically, which may decide at once; or every basis state is run, which is complete; where that is too
//!   much, a stated sample is run, and what shows no difference there is proven (`proof`).
//! - Every other circuit is read as a sum over paths (`paths`), with measurement outcomes as free symbols, and then judged
//!   as one that keeps basis states. Where that does not close it is run on a superposition of all inputs
//!   ([`superposition`]).
//! - One circuit is held against another ([`compare`]), or looked at alone ([`alone`]).
//! - The audit is put to the test with circuits that have a fault ([`faults`]).
//! - Where bits are computed, the circuit is held against the problem over the searched ones, and what the places claim is
//!   proven ([`narrowing`]).
//! - A whole search is followed from its start to its measurement ([`search`]).

pub mod alone;
mod basis;
pub mod compare;
mod eighths;
pub mod faults;
mod forms;
mod marked;
pub mod narrowing;
mod oracle;
mod paths;
mod proof;
pub mod search;
mod state;
pub mod superposition;
mod support;
pub mod verdict;

pub use forms::controlled;
pub use marked::marked_values;
pub use search::{SearchVerdict, audit_search};
pub use verdict::{Certificate, How, Outcome, Phases, Verdict, Witness};

use thiserror::Error;

use crate::budget::Budget;
use crate::circuit::Circuit;
use crate::diag::{Code, Diagnostic};
use crate::judge::restate::restate;
use crate::places::{Places, PlacesError};
use crate::problem::{Bits, Problem};

/// How to audit.
#[derive(Clone, PartialEq, Debug)]
pub struct Options {
    /// Whether a phase oracle must be right without any global phase: one that marks the complement is then wrong.
    pub strict_phase: bool,
    /// The phase that an oracle without `mark` gives to solutions, in radians, where it is another than the sign -1.
    pub angle: Option<f64>,
    /// The seed of everything drawn.
    pub seed: u64,
    /// How many threads work.
    pub threads: usize,
    /// Solutions that are known from the tally, over all bits of the problem; a sample includes them.
    pub known: Vec<Bits>,
    /// How many inputs a sample draws, besides the known solutions and their neighbours.
    pub sample: usize,
    /// The largest search register of which every input is tried, whatever that takes.
    pub exhaustive_bits: u32,
    /// Whether a proof is tried where not every input can be.
    pub proof: bool,
    /// Larger ones are tried as well where the circuit is read symbolically and this many row operations are enough: an
    /// operation takes one distinct node of circuit or problem through 2048 inputs, and a core does some 2^27 a second.
    pub exhaustive_work: u64,
    /// How circuits are judged whose gates keep basis states.
    pub way: Way,
}

/// How circuits are judged whose gates keep basis states. Every way is complete; they differ in what they cost and in how
/// much has to be right for the verdict to be.
#[derive(Clone, Copy, PartialEq, Eq, Debug, Default)]
pub enum Way {
    /// By structure where that decides, else by nodes where the circuit can be read symbolically, else by gates.
    #[default]
    Best,
    /// The distinct nodes of the function on every input where the circuit can be read symbolically, else by gates.
    Nodes,
    /// Every gate on every input.
    Gates,
}

impl Default for Options {
    fn default() -> Self {
        Self {
            strict_phase: false,
            angle: None,
            seed: 1,
            threads: 2,
            known: Vec::new(),
            sample: 1 << 14,
            exhaustive_bits: 26,
            proof: true,
            exhaustive_work: 1 << 31,
            way: Way::Best,
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
    /// Two circuits that are to be compared have different inputs.
    #[error("the two circuits have different inputs: {what}")]
    OtherInputs {
        /// Which register.
        what: String,
    },
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
            Self::OtherInputs { .. } => {
                error("P020").expected("two circuits whose registers besides `work` have the same names and sizes")
            }
            Self::ResetOfInput { qubit } => {
                error("A021").found(format!("reset {qubit};")).help("an oracle may reset `work`, nothing else")
            }
            Self::Gate { gate } => error("A022").found(gate.clone()),
            Self::TooLarge { .. } => error("A023"),
        }
    }
}

/// How many distinct nodes the function has that a circuit marks, where the circuit can be read symbolically: bits and
/// constants are not counted, and a conjunction of any width is one node.
pub fn distinct_nodes(problem: &Problem, places: &Places, circuit: &Circuit) -> Result<Option<usize>, AuditError> {
    if !places.computed.is_empty() {
        places.check(problem)?;
        let restated = restate(problem, places);
        return distinct_nodes(&restated.problem, &restated.places, circuit);
    }
    let roles = oracle::roles(problem, places, circuit)?;
    oracle::check_gates(circuit)?;
    Ok(oracle::keeps_basis_states(circuit).then(|| basis::distinct_nodes(places, circuit, &roles)).flatten())
}

/// Judges a circuit against a problem.
///
/// The circuit has a register `search`, of the size that the places say; a register `mark` of one qubit if it is a bit
/// oracle; and may have a register `work`, whose qubits begin and must end as 0. For every input tried, a phase oracle
/// must multiply the solutions by -1 and nothing else, a bit oracle must flip `mark` on the solutions and give no phase;
/// a global phase is free unless the options are strict. Where the start state is not all strings, only the strings it
/// holds are inputs, and it must hold every solution.
///
/// A verdict `equal` rests on every input. Where the structure does not decide, above [`Options::exhaustive_bits`] and
/// [`Options::exhaustive_work`], or when the budget runs out, a sample is tried, then a proof; where that does not end
/// within the budget, the verdict is `undecided`.
///
/// Where the places compute bits, a string of the search register must be marked where the bits that it stands for are a
/// solution; and what the places claim of these strings must be so.
pub fn audit(
    problem: &Problem,
    places: &Places,
    circuit: &Circuit,
    options: &Options,
    budget: &Budget,
) -> Result<Verdict, AuditError> {
    places.check(problem)?;
    if !narrowing::are_needed(problem, places) {
        return audit_circuit(problem, places, circuit, options, budget);
    }
    let restated = restate(problem, places);
    let mut own = options.clone();
    own.known.iter_mut().for_each(|bits| *bits = restated.restrict(places, bits));
    let mut verdict = audit_circuit(&restated.problem, &restated.places, circuit, &own, budget)?;
    if let Some(witness) = &mut verdict.witness {
        witness.bits = restated.assignment(places, &witness.bits);
    }
    narrowing::add(problem, places, &mut verdict, budget);
    Ok(verdict)
}

/// The same where every bit is searched.
fn audit_circuit(
    problem: &Problem,
    places: &Places,
    circuit: &Circuit,
    options: &Options,
    budget: &Budget,
) -> Result<Verdict, AuditError> {
    let roles = oracle::roles(problem, places, circuit)?;
    oracle::check_gates(circuit)?;
    let lost = support::lost(problem, places, budget);
    if let support::Lost::Solution(bits) = lost {
        return Ok(support::verdict(bits));
    }
    let mut verdict = judge(problem, places, circuit, &roles, options, budget)?;
    if lost == support::Lost::Unknown && verdict.outcome == Outcome::Equal {
        verdict.outcome = Outcome::Undecided;
        verdict.notes.push("whether the start state holds every solution was not decided within the budget".to_owned());
    } else if !places.start.parts().is_empty() {
        verdict.notes.push("relative to the start state: what it does not hold is not judged".to_owned());
    }
    Ok(verdict)
}

fn judge(
    problem: &Problem,
    places: &Places,
    circuit: &Circuit,
    roles: &oracle::Roles,
    options: &Options,
    budget: &Budget,
) -> Result<Verdict, AuditError> {
    let exact = eighths::with_eighths(circuit, options.strict_phase);
    if oracle::keeps_basis_states(&exact) && (options.angle.is_none() || roles.mark.is_some()) {
        return Ok(basis::audit_basis(problem, places, &exact, roles, options, budget));
    }
    match paths::audit_paths(problem, places, circuit, roles, options, budget)? {
        Ok(verdict) => Ok(verdict),
        Err(open) => {
            let run = || superposition::audit_superposition(problem, places, circuit, options, budget);
            // A circuit that is not read is most often wrong on many inputs, so a few come first where not all can.
            let few = match roles.search.len() > superposition::ALL_BITS {
                true => {
                    let near = options.known.first().cloned().unwrap_or_else(|| Bits::zeros(places.search_len()));
                    Some(superposition::audit_near(problem, places, circuit, &near, options, budget)?)
                }
                false => None,
            };
            let mut verdict = few.filter(|few| few.outcome == Outcome::Differs).map_or_else(run, Ok)?;
            verdict.notes.push(format!("run in superposition, since {open}"));
            Ok(verdict)
        }
    }
}
