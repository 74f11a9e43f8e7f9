//! What can go wrong in a stage, and what the user is told.

use std::path::PathBuf;

use num_bigint::BigUint;
use thiserror::Error;

use crate::diag::{Code, Diagnostic};
use crate::judge::audit::AuditError;
use crate::judge::count;
use crate::judge::count::certificate::Refusal;
use crate::make::lower::LowerError;
use crate::places::PlacesError;
use crate::report::files::WriteError;

/// A stage that could not do its work.
#[derive(Debug, Error)]
pub enum Error {
    /// Two ways of counting do not agree.
    #[error("a fault of tallymark: {0}")]
    Count(#[from] count::Fault),
    /// There is no circuit for this problem.
    #[error(transparent)]
    Lower(#[from] LowerError),
    /// The circuit cannot be judged as it is.
    #[error(transparent)]
    Audit(#[from] AuditError),
    /// The places do not fit the problem.
    #[error(transparent)]
    Places(#[from] PlacesError),
    /// The certificate was not made, or it does not hold.
    #[error("{0}")]
    Certificate(Refusal),
    /// A certificate could not be read.
    #[error("the certificate cannot be read: {error}")]
    Read {
        /// The file.
        path: PathBuf,
        /// What the system said.
        error: std::io::Error,
    },
    /// A result could not be written.
    #[error(transparent)]
    Write(#[from] WriteError),
    /// The loop of a search file counts in 64 bits.
    #[error("{0} iterations are more than a search circuit can loop")]
    TooManyIterations(BigUint),
    /// The problem says nothing of what is best.
    #[error("the problem has no objective")]
    NoObjective,
    /// The budget ran out before a threshold was counted.
    #[error("the time ran out before every threshold was counted")]
    NotCounted,
    /// What the program did contradicts itself.
    #[error("a fault of tallymark: {0}")]
    Fault(String),
}

impl Error {
    /// The message for the user.
    pub fn diagnostic(&self) -> Diagnostic {
        match self {
            Error::Lower(error) => error.diagnostic(),
            Error::Audit(error) => error.diagnostic(),
            Error::Places(error) => Diagnostic::error(Code("P001"), error.to_string())
                .expected("places that name every bit of this problem once")
                .help("give the places file of this circuit with --places"),
            Error::Write(error) => error.diagnostic(),
            Error::Certificate(refusal) if refusal.is_undecided() => {
                Diagnostic::error(Code("A080"), refusal.to_string())
                    .help("give more --time; the count itself needs less than its certificate")
            }
            Error::Read { path, .. } => Diagnostic::error(Code("F095"), self.to_string())
                .in_file(path.display().to_string())
                .expected("a file that `tallymark count --certificate` wrote, or a decision-DNNF in nnf text"),
            Error::TooManyIterations(_) => Diagnostic::error(Code("C090"), self.to_string())
                .help("plan still gives the count; a search of this length will not be run"),
            Error::NoObjective => {
                Diagnostic::error(Code("C093"), self.to_string()).expected("a problem that ends in `least` or `most`")
            }
            Error::NotCounted => Diagnostic::error(Code("C094"), self.to_string()).help("give more --time"),
            Error::Count(_) | Error::Fault(_) | Error::Certificate(_) => {
                Diagnostic::error(Code("A090"), self.to_string())
                    .help("please report it with the input file and the command line")
            }
        }
    }

    /// Whether a budget ran out, rather than anything being wrong.
    pub fn is_unfinished(&self) -> bool {
        match self {
            Error::Lower(error) => error.is_unfinished(),
            Error::NotCounted => true,
            Error::Certificate(refusal) => refusal.is_undecided(),
            _ => false,
        }
    }

    /// Whether tallymark itself is at fault, rather than its input.
    pub fn is_fault(&self) -> bool {
        match self {
            Error::Fault(_) | Error::Count(_) => true,
            Error::Certificate(refusal) => !refusal.is_undecided(),
            _ => false,
        }
    }
}
