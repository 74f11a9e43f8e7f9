//! Mistakes in names and rows.

use crate::diag::{Code, Diagnostic};
use crate::span::Span;

/// T014. `later` is where the name is declared, if it is declared after its use; `like` a name that is alike.
pub(crate) fn unknown(span: Span, name: &str, later: Option<Span>, like: Option<&str>) -> Diagnostic {
    let mistake = Diagnostic::error(Code("T014"), format!("`{name}` is not declared"))
        .at(span, "not known here")
        .found(format!("`{name}`"))
        .expected("a name that is declared above");
    match (later, like) {
        (Some(later), _) => {
            mistake.at(later, "declared only here").help("move the declaration up: names come before use")
        }
        (None, Some(like)) => mistake.help(format!("did you mean `{like}`?")),
        (None, None) => {
            mistake.help(format!("declare it above with `pick {name}`, `known {name} = …` or `let {name} = …`"))
        }
    }
}

/// T014: the name of an index, in a list whose places are the indices.
pub(crate) fn index_in_list(span: Span, name: &str, index: Span) -> Diagnostic {
    Diagnostic::error(Code("T014"), format!("the index `{name}` is not known inside the list"))
        .at(span, "not known here")
        .at(index, "index of the row")
        .found(format!("`{name}`"))
        .expected("elements in the order of the index")
        .help(format!("write one expression for all elements, such as `{name} * 2`, or a list without `{name}`"))
}

/// T015.
pub(crate) fn twice(name: &str, again: Span, first: Span) -> Diagnostic {
    Diagnostic::error(Code("T015"), format!("`{name}` is declared twice"))
        .at(again, "declared again here")
        .at(first, "declared first here")
        .found(format!("a second `{name}`"))
        .expected("a new name")
        .help("names of picks, knowns, lets, kinds and the values of kinds share one list: choose another one")
}

/// T016.
pub(crate) fn hides(name: &str, index: Span, other: Span) -> Diagnostic {
    Diagnostic::error(Code("T016"), format!("the index `{name}` would hide another `{name}`"))
        .at(index, "index name")
        .at(other, "this name is in use here")
        .found(format!("`{name}`"))
        .expected("a name that stands for nothing else")
        .help("give the index another name")
}

/// T017.
pub(crate) fn second(what: &str, again: Span, first: Span) -> Diagnostic {
    Diagnostic::error(Code("T017"), format!("there is a second {what}"))
        .at(again, format!("second {what}"))
        .at(first, format!("first {what}"))
        .found(format!("a second {what}"))
        .expected(format!("at most one {what}"))
        .help("keep one of them")
}

/// T018: a row used as a value.
pub(crate) fn row_as_value(span: Span, name: &str, declared: Span, indices: usize) -> Diagnostic {
    let places = ["i", "j", "k", "l"][..indices.min(4)].join(", ");
    Diagnostic::error(Code("T018"), format!("`{name}` is a row and not a single value"))
        .at(span, "needs its indices")
        .at(declared, "declared as a row here")
        .found("a row")
        .expected(format!("`{name}[{places}]`"))
        .help(format!("choose an element, or run over all of them: `[{name}[{places}] for …]`"))
}

/// T018: a value used as a row.
pub(crate) fn value_as_row(span: Span, name: &str, declared: Option<Span>) -> Diagnostic {
    let mistake = Diagnostic::error(Code("T018"), format!("`{name}` is a single value and has no elements"))
        .at(span, "indices on a single value")
        .found("indices")
        .expected(format!("`{name}` alone"))
        .help("leave the brackets out, or declare a row");
    match declared {
        Some(declared) => mistake.at(declared, "declared here"),
        None => mistake,
    }
}

/// T019.
pub(crate) fn index_count(span: Span, name: &str, found: usize, wanted: usize, declared: Span) -> Diagnostic {
    let places = |number| crate::diag::plural(number, "index", "indices");
    Diagnostic::error(Code("T019"), format!("`{name}` has {}, not {found}", places(wanted)))
        .at(span, places(found))
        .at(declared, format!("declared with {}", places(wanted)))
        .found(places(found))
        .expected(places(wanted))
        .help("several indices stand in one pair of brackets: `row[i, j]`")
}

/// T020.
pub(crate) fn no_source(span: Span, found: &str, declared: Option<Span>) -> Diagnostic {
    let mistake = Diagnostic::error(Code("T020"), format!("there is nothing to run over in {found}"))
        .at(span, found)
        .found(found)
        .expected("a range `a to b`, a kind, or a row of constants with one index")
        .help("write a range such as `1 to 4`, or the name of a kind");
    match declared {
        Some(declared) => mistake.at(declared, "declared here"),
        None => mistake,
    }
}

/// T020: a pick has a range or a kind.
pub(crate) fn no_domain(span: Span, declared: Option<Span>) -> Diagnostic {
    let mistake = Diagnostic::error(Code("T020"), "a pick or an index goes over a range or a kind, not over a row")
        .at(span, "a row")
        .found("a row")
        .expected("a range `a to b` or a kind")
        .help("for single values write a range and a `must x one of [ … ]`");
    match declared {
        Some(declared) => mistake.at(declared, "declared here"),
        None => mistake,
    }
}

/// T021.
pub(crate) fn kind_as_value(span: Span, name: &str, declared: Span) -> Diagnostic {
    Diagnostic::error(Code("T021"), format!("`{name}` is a kind and not a value"))
        .at(span, "a kind")
        .at(declared, "declared here")
        .found("a kind")
        .expected("a value of the kind, or a pick from it")
        .help(format!("name one of its values, or run over them with `for v in {name}`"))
}

/// T036.
pub(crate) fn set_unknown(name: &str, span: Span, knowns: &[&str]) -> Diagnostic {
    let help = match knowns {
        [] => "the file has no `known` at all".to_owned(),
        knowns => format!("the knowns of the file are {}", knowns.join(", ")),
    };
    Diagnostic::error(Code("T036"), format!("`--set {name}`: the file declares no `{name}`"))
        .at(span, "the value given")
        .found(format!("`{name}`"))
        .expected("the name of a `known`")
        .help(help)
}

/// T037.
pub(crate) fn set_not_known(name: &str, span: Span, declared: Span) -> Diagnostic {
    Diagnostic::error(Code("T037"), format!("`--set {name}`: `{name}` is no `known`"))
        .at(span, "the value given")
        .at(declared, "declared here")
        .found("a name that is not declared by `known`")
        .expected("the name of a `known`")
        .help("only knowns can be set; to fix a pick add a `must` to the file")
}

/// T038.
pub(crate) fn set_twice(name: &str, again: Span, first: Span) -> Diagnostic {
    Diagnostic::error(Code("T038"), format!("`--set {name}` is given twice"))
        .at(again, "given again")
        .at(first, "given first")
        .found("a second value")
        .expected("one value for each name")
        .help("keep one of them")
}
