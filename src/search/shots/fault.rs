//! What can be wrong with a file of shots.

use thiserror::Error;

use crate::diag::{Code, Diagnostic};
use crate::span::Span;

use super::read::MAX_SHOTS;

/// A mistake in a file of shots, with where it is.
#[derive(Clone, PartialEq, Eq, Debug)]
pub(super) struct Fault {
    pub(super) span: Span,
    pub(super) kind: Kind,
}

/// Each kind of mistake.
#[derive(Clone, PartialEq, Eq, Debug, Error)]
pub(super) enum Kind {
    #[error("the file has no shots")]
    Empty,
    #[error("this is no bit string")]
    NotBits(String),
    #[error("the bit string has another length than the search register")]
    Width { found: String, expected: usize },
    #[error("more than one register has the length of the search register")]
    Ambiguous { found: String, expected: usize },
    #[error("the last part of the line could be a count or another register")]
    CountOrRegister(String),
    #[error("there is no such register")]
    NoRegister { found: usize, wanted: usize },
    #[error("the count is no natural number")]
    Count(String),
    #[error("the counts add up to more shots than can be compared")]
    TooMany,
    #[error("the row has the wrong number of cells")]
    Cells(usize),
    #[error("the map does not have the shape of counts by bit string")]
    Shape { found: String, expected: &'static str },
    #[error("the bit string stands twice in the map")]
    Twice(String),
}

impl Fault {
    pub(super) fn diagnostic(self) -> Diagnostic {
        let message = self.kind.to_string();
        let new = |code| Diagnostic::error(Code(code), message).at(self.span, "");
        match self.kind {
            Kind::Empty => new("S001").expected("bit strings, with or without counts"),
            Kind::NotBits(found) => new("S002").found(found).expected("only 0 and 1, with spaces between registers"),
            Kind::Width { found, expected } => new("S003")
                .found(found)
                .expected(format!("{expected} bits"))
                .help("leading zeros count; a spreadsheet may have removed them"),
            Kind::Ambiguous { found, expected } => new("S004")
                .found(found)
                .expected(format!("one register of {expected} bits"))
                .help("say which register holds the search, counted from the left"),
            Kind::CountOrRegister(found) => new("S011")
                .found(found)
                .expected("a bit string, or a bit string and a count without leading zeros")
                .help("CSV and JSON keep counts and registers apart"),
            Kind::NoRegister { found, wanted } => new("S005")
                .found(crate::diag::plural(found, "register", "registers"))
                .expected(format!("register {wanted}, counted from the left")),
            Kind::Count(found) => new("S006")
                .found(found)
                .expected("how often the string was measured")
                .help("shares and probabilities are not counts: give the numbers of shots"),
            Kind::TooMany => new("S007").expected(format!("at most {MAX_SHOTS} shots in all")),
            Kind::Cells(found) => new("S008")
                .found(crate::diag::plural(found, "cell", "cells"))
                .expected("two cells: the bit string and its count"),
            Kind::Shape { found, expected } => new("S009").found(found).expected(expected),
            Kind::Twice(found) => new("S010").found(found).expected("each bit string once").help(
                "readers of JSON differ on which of two equal keys counts, so neither is taken; add the counts up",
            ),
        }
    }
}
