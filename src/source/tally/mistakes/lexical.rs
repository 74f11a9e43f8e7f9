//! Mistakes in characters and words.

use crate::diag::{Code, Diagnostic};
use crate::source::tally::limits::MAX_TEXT;
use crate::span::Span;

/// T001.
pub(crate) fn stray(span: Span, found: &str) -> Diagnostic {
    let help = match found {
        ";" => "statements need no sign at their end: each one begins with its own word",
        "{" | "}" => "lists stand in `[ ]`, groups in `( )`",
        "'" => "a title stands in double quotes",
        _ => "names are made of the letters a to z, digits and `_`; titles and comments may hold anything",
    };
    Diagnostic::error(Code("T001"), format!("`{}` begins no word of the language", found.escape_debug()))
        .at(span, "this character")
        .found(format!("`{}`", found.escape_debug()))
        .expected("a word, a name, a number or a sign")
        .help(help)
}

/// T002.
pub(crate) fn open_text(span: Span) -> Diagnostic {
    Diagnostic::error(Code("T002"), "the text has no closing quote")
        .at(span, "opened here")
        .found("the end of the line")
        .expected("`\"`")
        .help("a text stands on one line; write \\\" for a quote inside it")
}

/// T003.
pub(crate) fn number_with_letters(span: Span, found: &str) -> Diagnostic {
    let digits = found.len() - found.trim_start_matches(|c: char| c.is_ascii_digit()).len();
    Diagnostic::error(Code("T003"), format!("`{found}` is neither a number nor a name"))
        .at(span, "a number with letters")
        .found(format!("`{found}`"))
        .expected("digits only, or a name that begins with a letter")
        .help(format!("for a product write `{} * {}`", &found[..digits], &found[digits..]))
}

/// T004.
pub(crate) fn number_too_large(span: Span) -> Diagnostic {
    Diagnostic::error(Code("T004"), "the number does not fit 64 bits")
        .at(span, "too large")
        .expected(format!("a number up to {}", i64::MAX))
        .help("choose smaller units")
}

/// T005.
pub(crate) fn foreign(span: Span, found: &str, meant: Option<&str>) -> Diagnostic {
    let (expected, help) = match meant {
        Some(word) => (format!("`{word}`"), format!("write `{word}`")),
        None => ("an operator".to_owned(), "there are no powers: write the product out, as in `x * x`".to_owned()),
    };
    Diagnostic::error(Code("T005"), format!("`{found}` is not a sign of this language"))
        .at(span, format!("expected {expected}"))
        .found(format!("`{found}`"))
        .expected(expected)
        .help(help)
}

/// T034.
pub(crate) fn text_too_long(name: &str, len: usize) -> Diagnostic {
    Diagnostic::error(Code("T034"), format!("the text of {len} bytes is too long"))
        .in_file(name)
        .found(format!("{len} bytes"))
        .expected(format!("at most {MAX_TEXT} bytes"))
        .help("rows and loops say much in few words; a problem of this size is better given as a CNF file")
}
