//! Mistakes in values, found while the text is expanded. `turn` says for which values of the indices (it may be empty).

use crate::diag::{Code, Diagnostic};
use crate::problem::check::Interval;
use crate::source::tally::limits::{MAX_ROW, MAX_STEPS};
use crate::span::Span;

/// T026. `culprit` is a name in the expression that is picked.
pub(crate) fn not_constant(span: Span, what: &str, culprit: Option<(&str, Span, Span)>) -> Diagnostic {
    let mistake = Diagnostic::error(Code("T026"), format!("{what} must be constant"))
        .at(span, "depends on what is picked")
        .found("an expression that depends on a pick")
        .expected("an expression of constants, knowns and indices")
        .help("take the value from a `known`; what depends on a pick is a `let`");
    match culprit {
        Some((name, used, declared)) if used != span => {
            mistake.at(used, format!("`{name}` is not constant")).at(declared, "declared here")
        }
        Some((_, _, declared)) => mistake.at(declared, "declared here"),
        None => mistake,
    }
}

/// T027.
pub(crate) fn divisor(span: Span, op: Span, found: &str, turn: &str) -> Diagnostic {
    Diagnostic::error(Code("T027"), format!("the divisor is {found}{turn}"))
        .at(span, found)
        .at(op, "divides by it")
        .found(found)
        .expected("a constant of at least 1")
        .help("divide by a positive constant; to ask for divisibility write `a mod 3 = 0`")
}

/// T028.
pub(crate) fn empty_pick(span: Span, lo: i64, hi: i64) -> Diagnostic {
    Diagnostic::error(Code("T028"), format!("the range from {lo} to {hi} has no value to pick"))
        .at(span, "an empty range")
        .found(format!("{lo} to {hi}"))
        .expected("a range with at least one value")
        .help("the smaller end comes first")
}

/// T029.
pub(crate) fn of_nothing(span: Span, word: &str, turn: &str) -> Diagnostic {
    Diagnostic::error(Code("T029"), format!("the list is empty{turn}, so there is no {word} value"))
        .at(span, "an empty list")
        .found("an empty list")
        .expected("at least one element")
        .help("add an element that is always there, such as 0")
}

/// T030. `found` says which values the index takes, `row` which it may take.
pub(crate) fn outside(index: Span, name: &str, found: &str, row: &str, declared: Span, turn: &str) -> Diagnostic {
    Diagnostic::error(Code("T030"), format!("an index of `{name}` {found}{turn}, outside {row}"))
        .at(index, found)
        .at(declared, format!("goes over {row}"))
        .found(format!("an index that {found}{turn}"))
        .expected(format!("an index within {row}"))
        .help("leave such elements out with a constant condition (`with i > 1`), or narrow what is picked")
}

/// T031.
pub(crate) fn too_wide(span: Span, range: Interval, turn: &str) -> Diagnostic {
    let reach = if range.lo == range.hi {
        format!("is {}", range.lo)
    } else {
        format!("reaches from {} to {}", range.lo, range.hi)
    };
    Diagnostic::error(Code("T031"), format!("the expression {reach}{turn}, beyond 64 bits"))
        .at(span, reach.clone())
        .found(format!("an expression that {reach}"))
        .expected(format!("values from {} to {}", i64::MIN, i64::MAX))
        .help("narrow what is picked, or choose larger units")
}

/// T033.
pub(crate) fn too_many_steps(span: Span) -> Diagnostic {
    Diagnostic::error(Code("T033"), "the text expands to too much")
        .at(span, "expanding this went over the limit")
        .found(format!("more than {MAX_STEPS} steps"))
        .expected(format!("at most {MAX_STEPS} steps of expansion"))
        .help("make the ranges smaller")
}

/// T035.
pub(crate) fn too_long(span: Span, found: &str) -> Diagnostic {
    Diagnostic::error(Code("T035"), format!("the row has {found} elements"))
        .at(span, "too long")
        .found(format!("{found} elements"))
        .expected(format!("at most {MAX_ROW} elements"))
        .help("make the ranges smaller")
}

/// T040, a warning.
pub(crate) fn never_holds(span: Span, turn: &str) -> Diagnostic {
    Diagnostic::warning(Code("T040"), format!("this can never hold{turn}, so there is no solution"))
        .at(span, "always no")
        .found("a condition that is no whatever is picked")
        .expected("a condition that depends on what is picked")
        .help("check the constants in it")
}

/// T041, a warning.
pub(crate) fn unused(span: Span, name: &str) -> Diagnostic {
    Diagnostic::warning(Code("T041"), format!("no constraint mentions `{name}`"))
        .at(span, "picked, but free")
        .found("a pick that no `must` and no objective depends on")
        .expected("a `must` about it")
        .help("every value of it counts as a solution of its own; remove the pick if that is not meant")
}

/// T042, a warning.
pub(crate) fn nothing_picked(name: &str) -> Diagnostic {
    Diagnostic::warning(Code("T042"), "nothing is picked, so there is nothing to search")
        .in_file(name)
        .found("no `pick` with more than one value")
        .expected("at least one `pick`")
        .help("declare what is to be chosen with `pick`")
}

/// T099: our own fault.
pub(crate) fn broken_problem(span: Option<Span>, what: &str) -> Diagnostic {
    let fault = Diagnostic::error(super::BROKEN_PROBLEM, format!("a fault of tallymark itself: {what}"))
        .expected("a sound problem")
        .help("please report this with the file that caused it");
    match span {
        Some(span) => fault.at(span, ""),
        None => fault,
    }
}
