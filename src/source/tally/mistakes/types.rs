//! Mistakes in types.

use crate::diag::{Code, Diagnostic};
use crate::span::Span;

/// A place and the type of what stands there, in words.
pub(crate) struct Typed {
    pub(crate) span: Span,
    pub(crate) ty: String,
}

/// T022: the second one was met first and set the type.
pub(crate) fn mismatch(found: &Typed, other: &Typed, help: &str) -> Diagnostic {
    Diagnostic::error(Code("T022"), format!("{} and {} do not go together", found.ty, other.ty))
        .at(found.span, format!("this is {}", found.ty))
        .at(other.span, format!("this is {}", other.ty))
        .found(found.ty.clone())
        .expected(other.ty.clone())
        .help(help)
}

/// T023: `by` is the word or sign that wants another type, `declared` where a name got its type.
pub(crate) fn wrong(found: &Typed, wanted: &str, by: (Span, &str), declared: Option<Span>, help: &str) -> Diagnostic {
    let mistake = Diagnostic::error(Code("T023"), format!("{} wants {wanted}, not {}", by.1, found.ty))
        .at(found.span, format!("this is {}", found.ty))
        .at(by.0, format!("wants {wanted}"))
        .found(found.ty.clone())
        .expected(wanted)
        .help(help);
    match declared {
        Some(declared) => mistake.at(declared, "declared here"),
        None => mistake,
    }
}

/// T024.
pub(crate) fn tuple_width(span: Span, found: usize, tuple: Span, wanted: usize) -> Diagnostic {
    let parts = |number| crate::diag::plural(number, "part", "parts");
    Diagnostic::error(Code("T024"), format!("an entry has {}, the tuple has {}", parts(found), parts(wanted)))
        .at(span, parts(found))
        .at(tuple, parts(wanted))
        .found(parts(found))
        .expected(parts(wanted))
        .help("every entry of the list is as long as the tuple on the left")
}

/// T025.
pub(crate) fn shape(span: Span, found: &str, expected: &str, other: Span, other_text: &str) -> Diagnostic {
    Diagnostic::error(Code("T025"), format!("the list has {found}, but needs {expected}"))
        .at(span, found)
        .at(other, other_text)
        .found(found)
        .expected(expected)
        .help("a row with several indices is a list of lists, all of one length: `[[1, 2], [3, 4]]`")
}
