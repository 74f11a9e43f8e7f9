//! Mistakes in the order of words.

use crate::diag::{Code, Diagnostic};
use crate::source::tally::ast::{Comparison, Logic, Op};
use crate::source::tally::limits::MAX_NESTING;
use crate::source::tally::token::is_reserved;
use crate::span::Span;

/// T006.
pub(crate) fn unexpected(span: Span, found: &str, expected: String, help: Option<String>) -> Diagnostic {
    let help = help.unwrap_or_else(|| format!("put {expected} before `{found}`, or take `{found}` out"));
    Diagnostic::error(Code("T006"), format!("`{found}` cannot stand here"))
        .at(span, format!("expected {expected}"))
        .found(format!("`{found}`"))
        .expected(expected)
        .help(help)
}

/// T007.
pub(crate) fn no_statement(span: Span, found: &str) -> Diagnostic {
    Diagnostic::error(Code("T007"), "the text does not begin with a statement")
        .at(span, "belongs to no statement")
        .found(format!("`{found}`"))
        .expected("`title`, `known`, `kind`, `pick`, `let`, `must`, `least` or `most`")
        .help("what must hold begins with `must`; comments begin with `#`")
}

/// T008.
pub(crate) fn reserved(span: Span, word: &str) -> Diagnostic {
    let proposal = [format!("{word}_"), format!("the_{word}")].into_iter().find(|name| !is_reserved(name));
    Diagnostic::error(Code("T008"), format!("`{word}` is a word of the language and cannot be a name"))
        .at(span, "a reserved word")
        .found(format!("`{word}`"))
        .expected("a name")
        .help(format!("use another name, such as `{}`", proposal.unwrap_or_default()))
}

/// T009.
pub(crate) fn mixed_logic(first: Op<Logic>, other: Op<Logic>) -> Diagnostic {
    let word = |op: Op<Logic>| if op.what == Logic::And { "and" } else { "or" };
    Diagnostic::error(Code("T009"), "`and` and `or` stand side by side without brackets")
        .at(other.span, format!("`{}` here", word(other)))
        .at(first.span, format!("`{}` here", word(first)))
        .found(format!("`{}` after `{}`", word(other), word(first)))
        .expected("brackets that say which belongs together")
        .help("write `(a and b) or c`, or `a and (b or c)`")
}

/// T010.
pub(crate) fn mixed_chain(first: Op<Comparison>, other: Op<Comparison>) -> Diagnostic {
    let sign = |op: Op<Comparison>| match op.what {
        Comparison::Eq => "=",
        Comparison::Ne => "!=",
        Comparison::Lt => "<",
        Comparison::Le => "<=",
        Comparison::Gt => ">",
        Comparison::Ge => ">=",
    };
    Diagnostic::error(Code("T010"), "the comparisons of this chain do not go one way")
        .at(other.span, format!("`{}` here", sign(other)))
        .at(first.span, format!("`{}` here", sign(first)))
        .found(format!("`{}` after `{}`", sign(other), sign(first)))
        .expected("only `<` and `<=`, only `>` and `>=`, or only `=`")
        .help("split it with `and`; for values that are all different write `different [a, b, c]`")
}

/// T011.
pub(crate) fn tuple(span: Span) -> Diagnostic {
    Diagnostic::error(Code("T011"), "a tuple cannot stand here")
        .at(span, "a tuple")
        .found("a tuple")
        .expected("a single value")
        .help("a tuple stands only left of `one of` and in its list: `(a, b) one of [(1, 2), (3, 4)]`")
}

/// T012.
pub(crate) fn list(span: Span) -> Diagnostic {
    Diagnostic::error(Code("T012"), "a list cannot stand here")
        .at(span, "a list")
        .found("a list")
        .expected("a single value")
        .help("put a word before it (`sum [ … ]`, `all of [ … ]`), or `one of` between a value and the list")
}

/// T013.
pub(crate) fn too_early(span: Span, last: &str, expected: String, opened: Option<(Span, &str)>) -> Diagnostic {
    let mistake = Diagnostic::error(Code("T013"), format!("the statement ends too early, after `{last}`"))
        .at(span, format!("expected {expected} after this"))
        .found("the end of the statement")
        .expected(expected);
    match opened {
        Some((opened, bracket)) => {
            let close = if bracket == "(" { ")" } else { "]" };
            mistake.at(opened, "opened here").help(format!("close the bracket with `{close}`"))
        }
        None => mistake.help("complete the statement; the next one begins with its own word"),
    }
}

/// T032.
pub(crate) fn too_deep(span: Span, depth: u32) -> Diagnostic {
    Diagnostic::error(Code("T032"), "the expression is nested too deeply")
        .at(span, format!("{depth} levels"))
        .found(format!("{depth} levels"))
        .expected(format!("at most {MAX_NESTING} levels"))
        .help("name parts of it with `let`")
}

/// T039.
pub(crate) fn unreadable_set(name: &str, value: &str) -> Diagnostic {
    Diagnostic::error(Code("T039"), format!("`--set {name}={value}` has no value that can be read"))
        .found(format!("`{value}`"))
        .expected("a constant expression")
        .help("write the value as the file would: `--set cells=8`, `--set 'draw=[1, 2]'`")
}
