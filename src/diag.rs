//! Diagnostics as data: what is wrong, where, what was expected and how to mend it.
//!
//! The library returns these; only the command line turns them into text. Every kind of mistake has a stable code:
//! a letter for the room that found it and a number that is never used again.
//!
//! | letter | found by |
//! |---|---|
//! | `F` | files: opening, unpacking, writing |
//! | `D` | the DIMACS reader |
//! | `O` | the OPB reader |
//! | `G` | the AIGER reader |
//! | `T` | the tally language |
//! | `Q` | the OpenQASM reader |
//! | `P` | places, and how they fit a circuit |
//! | `C` | compiling |
//! | `A` | counting, auditing, planning |
//! | `S` | the reader of shots |
//! | `L` | the ledger |
//! | `U` | usage of the command line |

use std::borrow::Cow;

use crate::span::Span;

/// How bad it is.
#[derive(Clone, Copy, PartialEq, Eq, PartialOrd, Ord, Hash, Debug)]
pub enum Severity {
    /// The input is refused.
    Error,
    /// The input is read; the user should know.
    Warning,
}

/// A stable code such as `D007`.
#[derive(Clone, Copy, PartialEq, Eq, PartialOrd, Ord, Hash, Debug)]
pub struct Code(pub &'static str);

impl std::fmt::Display for Code {
    fn fmt(&self, f: &mut std::fmt::Formatter<'_>) -> std::fmt::Result {
        f.write_str(self.0)
    }
}

/// A place with a word on what is there.
#[derive(Clone, PartialEq, Eq, Debug)]
pub struct Label {
    /// The place.
    pub span: Span,
    /// What is there; may be empty.
    pub text: String,
}

/// One message. The first label is the place of the mistake; the others are the places it conflicts with.
#[derive(Clone, PartialEq, Eq, Debug)]
pub struct Diagnostic {
    /// The stable code.
    pub code: Code,
    /// How bad it is.
    pub severity: Severity,
    /// What is wrong, in one sentence without a full stop.
    pub message: String,
    /// Where, the place of the mistake first. Empty for mistakes outside any file.
    pub labels: Vec<Label>,
    /// The file the message is about where no span can be given (it cannot be opened, it is empty).
    pub file: Option<String>,
    /// What was found there.
    pub found: Option<String>,
    /// What was expected there.
    pub expected: Option<String>,
    /// How to mend it.
    pub help: Option<String>,
}

impl Diagnostic {
    /// An error with this code and message.
    pub fn error(code: Code, message: impl Into<String>) -> Self {
        Self {
            code,
            severity: Severity::Error,
            message: message.into(),
            labels: Vec::new(),
            file: None,
            found: None,
            expected: None,
            help: None,
        }
    }

    /// A warning with this code and message.
    pub fn warning(code: Code, message: impl Into<String>) -> Self {
        Self { severity: Severity::Warning, ..Self::error(code, message) }
    }

    /// Adds a place; the first one added is the place of the mistake.
    #[must_use]
    pub fn at(mut self, span: Span, text: impl Into<String>) -> Self {
        self.labels.push(Label { span, text: text.into() });
        self
    }

    /// Names the file where there is no span.
    #[must_use]
    pub fn in_file(mut self, file: impl Into<String>) -> Self {
        self.file = Some(file.into());
        self
    }

    /// Says what was found.
    #[must_use]
    pub fn found(mut self, found: impl Into<String>) -> Self {
        self.found = Some(found.into());
        self
    }

    /// Says what was expected.
    #[must_use]
    pub fn expected(mut self, expected: impl Into<String>) -> Self {
        self.expected = Some(expected.into());
        self
    }

    /// Says how to mend it.
    #[must_use]
    pub fn help(mut self, help: impl Into<String>) -> Self {
        self.help = Some(help.into());
        self
    }

    /// The place of the mistake.
    pub fn span(&self) -> Option<Span> {
        self.labels.first().map(|label| label.span)
    }

    /// Whether the input is refused.
    pub fn is_error(&self) -> bool {
        self.severity == Severity::Error
    }
}

/// Sorts messages by place, so that the output is a function of the input.
pub fn sort(diagnostics: &mut [Diagnostic]) {
    diagnostics.sort_by_key(|diagnostic| (diagnostic.span(), diagnostic.code));
}

/// `one`, or `many` with the number before it: `1 clause`, `3 clauses`.
pub fn plural(number: usize, one: &str, many: &str) -> String {
    let word: Cow<'_, str> = if number == 1 { one.into() } else { many.into() };
    format!("{number} {word}")
}
