//! What can go wrong before the first word of a file is read.

use std::io;

use thiserror::Error;

use super::Format;
use super::unpack::{Damage, Packing};
use crate::diag::{Code, Diagnostic};

/// What went wrong.
#[derive(Clone, PartialEq, Eq, Debug, Error)]
pub(super) enum Failure {
    #[error("cannot open the file: {0}")]
    CannotOpen(String),
    #[error("cannot read the file: {0}")]
    CannotRead(String),
    #[error("the file is packed with {}, and its name does not say so", .0.name())]
    Packed(Packing),
    #[error("the file is not packed with {}, as its name says", .0.name())]
    NotPacked(Packing, Option<Packing>),
    #[error("the {} data is cut short", .0.name())]
    Cut(Packing),
    #[error("{0}")]
    Damaged(Damage),
    #[error("nothing to read")]
    Empty,
    #[error("the file is longer than {0} bytes")]
    TooLong(u64),
    #[error("the file is not UTF-8 text (line {line})")]
    NotText { line: usize },
    #[error("{} file has no constants to set", article(*.0))]
    NoConstants(Format),
}

/// The format with its article.
fn article(format: Format) -> &'static str {
    match format {
        Format::Tally => "a tally",
        Format::Dimacs => "a DIMACS",
        Format::Opb => "an OPB",
        Format::Aiger => "an AIGER",
    }
}

/// A failure with the file it is about.
#[derive(Clone, PartialEq, Eq, Debug)]
pub(super) struct Opening<'a> {
    name: &'a str,
    failure: Failure,
}

impl<'a> Opening<'a> {
    pub(super) fn new(name: &'a str, failure: Failure) -> Self {
        Self { name, failure }
    }

    pub(super) fn into_diagnostic(self) -> Diagnostic {
        let diagnostic = Diagnostic::error(self.failure.code(), self.failure.to_string()).in_file(self.name);
        let suffix = |packing: Packing| format!("a name that ends in '{}'", packing.suffix());
        match &self.failure {
            Failure::CannotOpen(_) | Failure::CannotRead(_) | Failure::Damaged(_) => diagnostic,
            Failure::Packed(packing) => diagnostic
                .found(format!("{} data", packing.name()))
                .expected(format!("text, or {}", suffix(*packing)))
                .help("rename the file, or unpack it first"),
            Failure::NotPacked(named, found) => diagnostic
                .found(found.map_or("something else".to_owned(), |packing| format!("{} data", packing.name())))
                .expected(format!("{} data", named.name()))
                .help("rename the file"),
            Failure::Cut(packing) => diagnostic.found("an empty file").expected(format!("{} data", packing.name())),
            Failure::Empty => diagnostic
                .found("an empty file")
                .expected("a DIMACS header 'p cnf VARIABLES CLAUSES' or a tally problem"),
            Failure::TooLong(limit) => diagnostic.expected(format!("at most {limit} bytes")),
            Failure::NotText { .. } => diagnostic.found("bytes that are no UTF-8").expected("UTF-8 text"),
            Failure::NoConstants(_) => diagnostic
                .found("'--set'")
                .expected("a tally file, whose 'known' lines can be set")
                .help("leave out '--set'"),
        }
    }
}

impl Failure {
    fn code(&self) -> Code {
        Code(match self {
            Failure::CannotOpen(_) => "F001",
            Failure::CannotRead(_) => "F002",
            Failure::Packed(_) => "F003",
            Failure::NotPacked(..) => "F004",
            Failure::Cut(_) | Failure::Damaged(Damage::Cut { .. }) => "F005",
            Failure::Damaged(Damage::Broken { .. }) => "F006",
            Failure::TooLong(_) | Failure::Damaged(Damage::TooLong { .. }) => "F007",
            Failure::Empty => "F008",
            Failure::NotText { .. } => "F009",
            Failure::NoConstants(_) => "F010",
        })
    }
}

/// The message for an error that a stream gave: damage of packed data, or an error of the system.
pub(crate) fn read_fault(name: &str, fault: &io::Error) -> Diagnostic {
    let damage = fault.get_ref().and_then(|inner| inner.downcast_ref::<Damage>());
    let failure = match damage {
        Some(damage) => Failure::Damaged(damage.clone()),
        None => Failure::CannotRead(fault.to_string()),
    };
    Opening::new(name, failure).into_diagnostic()
}
