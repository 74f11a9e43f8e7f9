//! What can be wrong with an OPB file.

use std::ops::Range;

use thiserror::Error;

use super::MAX_VARS;
use crate::diag::{Code, Diagnostic};
use crate::span::{FileId, Span};

/// A mistake or a warning with its place.
#[derive(Clone, PartialEq, Eq, Debug)]
pub(super) struct Fault {
    pub(super) at: Range<usize>,
    pub(super) kind: Kind,
}

#[derive(Clone, PartialEq, Eq, Debug, Error)]
pub(super) enum Kind {
    #[error("'{0}' does not belong here")]
    Unexpected(String, &'static str),
    #[error("the file ends inside a statement")]
    Unclosed(&'static str),
    #[error("the number is too large")]
    TooLarge,
    #[error("the variable is out of range")]
    OutOfRange { announced: u64 },
    #[error("there are too many variables")]
    TooManyVars,
    #[error("the values of this sum reach beyond 64 bits")]
    WideSum,
    #[error("an objective must come before the constraints, and only once")]
    LateObjective,
    #[error("the first comment does not announce variables and constraints as numbers")]
    Header,
    #[error("the file has no line that announces its variables and constraints")]
    NoHeader,
    #[error("the file announces {announced} {what}, and has {found}")]
    Announced { what: &'static str, announced: u64, found: u64 },
    #[error("{0} is no part of the competition's text")]
    Dialect(&'static str),
}

impl Fault {
    pub(super) fn diagnostic(self, file: FileId, warning: bool) -> Diagnostic {
        let new = |code| match warning {
            true => Diagnostic::warning(Code(code), self.kind.to_string()),
            false => Diagnostic::error(Code(code), self.kind.to_string()),
        };
        let diagnostic = match &self.kind {
            Kind::Unexpected(found, expected) => new("O001").found(format!("'{found}'")).expected(*expected),
            Kind::Unclosed(expected) => new("O002")
                .found("the end of the file")
                .expected(*expected)
                .help("the file was probably cut short; if it is whole, add the ';'"),
            Kind::TooLarge => new("O003")
                .expected("an integer of size 10^29 at most")
                .help("divide the constraint by a common factor if it has one"),
            Kind::OutOfRange { announced } => new("O004").expected(format!("a variable from x1 to x{announced}")),
            Kind::TooManyVars => new("O005").expected(format!("at most {MAX_VARS} variables")),
            Kind::WideSum => new("O006").expected("integers whose sizes add up to less than 2^63"),
            Kind::LateObjective => new("O007").expected("one objective at most, as the first statement"),
            Kind::Header => new("O008").expected("'* #variable= V #constraint= C'"),
            Kind::NoHeader => new("O009")
                .expected("'* #variable= V #constraint= C' as the first line")
                .help("the variables up to the largest one used are taken"),
            Kind::Announced { found, .. } => new("O010")
                .found(found.to_string())
                .help("the statements of the file count; if some are missing, it was cut short"),
            Kind::Dialect(_) => new("O011").expected("'>=', '=' and 'min:'"),
        };
        diagnostic.at(Span::new(file, self.at.start, self.at.end), "")
    }
}
