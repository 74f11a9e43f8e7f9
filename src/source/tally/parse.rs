//! From tokens to statements.
//!
//! Input: the tokens of a text. Output: the statements that could be read, the names of those that could not, and a
//! message for each mistake.
//!
//! The tokens are cut into statements before they are parsed: the word that begins a statement stands nowhere else
//! (`least` and `most` also follow `at`), so line ends mean nothing, brackets may span lines, a missing bracket never
//! swallows the next statement, and each statement has at most one message of its own.

use lalrpop_util::ParseError;

use crate::diag::Diagnostic;
use crate::source::tally::ast::{Ast, Statement};
use crate::source::tally::mistakes::syntax;
use crate::source::tally::token::{Placed, Tok};
use crate::span::Span;

lalrpop_util::lalrpop_mod!(
    #[allow(clippy::all, clippy::pedantic, unused, unreachable_pub, missing_docs)]
    tally
);

/// A statement and its place, or what is left of one.
#[derive(Debug)]
pub enum Read<'t> {
    /// Read.
    Statement(Statement<'t>, Span),
    /// Not read; names that it would have declared.
    Broken(Vec<(&'t str, Span)>),
}

/// Reads all statements of a text.
pub fn parse<'t>(text: &'t str, tokens: &[Placed<'t>], ast: &mut Ast<'t>, out: &mut Vec<Diagnostic>) -> Vec<Read<'t>> {
    let starts = starts(text, tokens);
    let first = starts.first().copied().unwrap_or(tokens.len());
    if first > 0 && !tokens[..first].iter().any(|&(_, token, _)| token == Tok::Error) {
        let (lo, _, hi) = tokens[0];
        out.push(syntax::no_statement(ast.span(lo, hi), &text[lo..hi]));
    }
    let ends = starts.iter().copied().skip(1).chain([tokens.len()]);
    starts.iter().zip(ends).map(|(&start, end)| statement(text, &tokens[start..end], ast, out)).collect()
}

/// Reads a lone expression, the value of a `--set`.
pub fn parse_value<'t>(
    text: &'t str,
    tokens: &[Placed<'t>],
    ast: &mut Ast<'t>,
    out: &mut Vec<Diagnostic>,
) -> Option<Statement<'t>> {
    let all: Vec<Placed<'t>> = [(0, Tok::Value, 0)].into_iter().chain(tokens.iter().copied()).collect();
    match statement(text, &all, ast, out) {
        Read::Statement(statement, _) => Some(statement),
        Read::Broken(_) => None,
    }
}

/// Where statements begin. A statement word right after a word that wants a name, on the same line, is a reserved word
/// in the place of a name and not a new statement.
fn starts(text: &str, tokens: &[Placed<'_>]) -> Vec<usize> {
    let begins = |at: usize| {
        let (lo, token, _) = tokens[at];
        if !token.begins_statement() {
            return false;
        }
        let Some(&(_, before, hi)) = at.checked_sub(1).map(|at| &tokens[at]) else { return true };
        let same_line = !text[hi..lo].contains('\n');
        let bound = before == Tok::At && matches!(token, Tok::Least | Tok::Most);
        !(bound || same_line && wants_name(before))
    };
    (0..tokens.len()).filter(|&at| begins(at)).collect()
}

fn wants_name(token: Tok<'_>) -> bool {
    matches!(token, Tok::Pick | Tok::Known | Tok::Kind | Tok::Let | Tok::For | Tok::Bar | Tok::Eq | Tok::Comma)
}

fn statement<'t>(text: &'t str, tokens: &[Placed<'t>], ast: &mut Ast<'t>, out: &mut Vec<Diagnostic>) -> Read<'t> {
    let broken = || {
        let names = tokens.iter().filter_map(|&(lo, token, hi)| match token {
            Tok::Name(name) => Some((name, lo, hi)),
            _ => None,
        });
        // A kind declares its values too; every other statement declares at most the name after its first word.
        let names: Vec<_> = match tokens[0].1 {
            Tok::Kind => names.collect(),
            Tok::Known | Tok::Pick | Tok::Let => names.take(1).collect(),
            _ => Vec::new(),
        };
        names
    };
    let whole = ast.span(tokens[0].0, tokens[tokens.len() - 1].2);
    let place = |names: Vec<(&'t str, usize, usize)>, ast: &Ast<'t>| {
        Read::Broken(names.into_iter().map(|(name, lo, hi)| (name, ast.span(lo, hi))).collect())
    };
    // What could not be read as a token has its message already.
    if tokens.iter().any(|&(_, token, _)| token == Tok::Error) {
        return place(broken(), ast);
    }
    match tally::StatementParser::new().parse(ast, tokens.iter().copied()) {
        Ok(statement) => Read::Statement(statement, whole),
        Err(error) => {
            let mistake = explain(text, tokens, ast, error);
            out.push(mistake);
            place(broken(), ast)
        }
    }
}

fn explain<'t>(
    text: &'t str,
    tokens: &[Placed<'t>],
    ast: &Ast<'t>,
    error: ParseError<usize, Tok<'t>, ()>,
) -> Diagnostic {
    match error {
        ParseError::UnrecognizedToken { token: (lo, token, hi), expected } => {
            let span = ast.span(lo, hi);
            let found = &text[lo..hi];
            let only_name = expected == ["NAME"];
            if only_name && found.starts_with(|c: char| c.is_ascii_alphabetic()) {
                return syntax::reserved(span, found);
            }
            syntax::unexpected(span, found, group(&expected), hint(token, &expected))
        }
        ParseError::ExtraToken { token: (lo, _, hi) } => {
            syntax::unexpected(ast.span(lo, hi), &text[lo..hi], "the next statement".to_owned(), None)
        }
        ParseError::UnrecognizedEof { expected, .. } => {
            let (lo, _, hi) = tokens[tokens.len() - 1];
            let opened = opened(tokens).map(|(lo, hi)| (ast.span(lo, hi), &text[lo..hi]));
            syntax::too_early(ast.span(lo, hi), &text[lo..hi], group(&expected), opened)
        }
        // The lexer never fails and the grammar raises no errors of its own.
        ParseError::InvalidToken { location } => syntax::unexpected(ast.span(location, location), "", group(&[]), None),
        ParseError::User { .. } => syntax::unexpected(ast.span(0, 0), "", group(&[]), None),
    }
}

/// The innermost bracket that is still open at the end.
fn opened(tokens: &[Placed<'_>]) -> Option<(usize, usize)> {
    let mut open = Vec::new();
    for &(lo, token, hi) in tokens {
        match token {
            Tok::Open | Tok::OpenRow => open.push((lo, hi)),
            Tok::Close | Tok::CloseRow => drop(open.pop()),
            _ => {}
        }
    }
    open.pop()
}

/// What helps with the slips that people make most.
fn hint(found: Tok<'_>, expected: &[String]) -> Option<String> {
    let wants = |what: &str| expected.iter().any(|name| name.trim_matches('"') == what);
    let text = match found {
        Tok::Not if wants("INT") => "put the `not …` in brackets",
        Tok::If if wants("INT") => "put the `if …` in brackets",
        _ if expected == ["\"of\""] => {
            "the words are `all of`, `some of`, `none of`, `number of`, `one of`, \
                                        `exactly 2 of`, `at least 2 of`, `at most 2 of`"
        }
        _ if expected == ["\"[\""] => "the word wants a list: `sum [a, b]` or `sum [row[i] for i in 1 to 3]`",
        Tok::In if wants("one") => "a value is tested with `one of`: `x one of [1, 2]`",
        Tok::Eq if wants("in") => "a pick has a domain: `pick x in 1 to 4`; a fixed value is a `known`",
        _ if wants("else") && !wants("INT") => "every `if … then …` has an `else …`",
        Tok::Name(_) | Tok::Digits(_) | Tok::Open if wants("+") => "is an operator missing?",
        Tok::Close | Tok::CloseRow if wants("+") => "this bracket closes nothing; is one too many?",
        _ => return None,
    };
    Some(text.to_owned())
}

/// The expected tokens in words: what begins an expression and what joins two of them is said in one word each.
fn group(expected: &[String]) -> String {
    let names: Vec<&str> = expected.iter().map(|name| name.trim_matches('"')).collect();
    let has = |name: &str| names.contains(&name);
    let mut words: Vec<String> = Vec::new();
    let starts_expression = has("INT");
    let joins = has("one") && has("+") || has("*") && has("+");
    if starts_expression {
        words.push("an expression".to_owned());
    }
    let opens = ["INT", "NAME", "(", "[", "-", "not", "if", "yes", "no", "abs", "all", "some", "none", "exactly", "at"];
    let opens = opens.iter().chain(&["number", "sum", "smallest", "largest", "different", "odd", "even"]);
    let opens: Vec<&str> = opens.copied().collect();
    let operators = ["+", "-", "*", "/", "mod", "=", "!=", "<", "<=", ">", ">=", "and", "or", "needs", "one"];
    for name in names {
        let in_expression = starts_expression && opens.contains(&name);
        let in_operator = joins && operators.contains(&name);
        if in_expression || in_operator {
            continue;
        }
        words.push(match name {
            "NAME" => "a name".to_owned(),
            "TEXT" => "a text in quotes".to_owned(),
            "VALUE" => continue,
            other => format!("`{other}`"),
        });
    }
    if joins {
        words.push("an operator".to_owned());
    }
    match words.len() {
        0 => "the next statement".to_owned(),
        1 => words.remove(0),
        _ => {
            let last = words.pop().unwrap_or_default();
            format!("{} or {last}", words.join(", "))
        }
    }
}
