//! The tally language: puzzles as people say them.
//!
//! Input: the text of a `.tally` file and the values given by `--set`. Output: a [`Problem`] with warnings, or all
//! independent mistakes, in the order of their places.
//!
//! Stages, each in a file or folder of its own:
//!
//! 1. `token`: characters to tokens. It never fails.
//! 2. `parse`: tokens to statements (`ast`), by the grammar in `grammar/tally.lalrpop`.
//! 3. `check`: names and types of a statement, once for each place in the text.
//! 4. `lower`: expansion of the statement: loops unrolled, constants folded, ranges and indices judged.
//! 5. `declare`, `constrain`: what the statement adds to the scope and to the problem. Stages 3 to 5 run statement by
//!    statement, in the order of the text.
//!
//! # Points on which the language's description is silent
//!
//! - Line ends mean nothing: a statement ends where the next statement word stands. Names are ASCII letters, digits and
//!   `_`, and do not begin with a digit. A title may hold `\"` and `\\`. A comma may follow the last item of a list.
//! - A range whose end is below its start is empty: a loop over it has no turn, a row over it no element. Only a pick
//!   *from* it is an error.
//! - The ranges of a row's indices do not depend on each other: rows are rectangular. Loops may depend on loops outside.
//! - A `known` or `let` with indices takes one expression for all elements, in which the index names are known, or a list
//!   (of lists, one level an index), in which they are not. Without indices a list makes a row indexed from 1.
//! - Lists may be loops wherever lists may stand (`known squares = [i * i for i in 1 to 4]`), also after `one of`. A loop
//!   may run over a list of constants in place (`for p in [2, 3, 5]`).
//! - `exactly`, `at least` and `at most` take any integer, not only constants.
//! - The branches of an `if` have one type; yes/no does not become an integer there. `different` compares yes/no as 1/0.
//!   Values of yes/no have no order among themselves (`a <= b` is `a needs b`). An index is of its dimension's type.
//! - `one of []` fails. A sum is judged as a whole and not in the order of its terms.
//! - An objective takes a yes/no as 1/0. A `must` that is constantly no is a warning and not an error: a count of zero is
//!   an answer. Picks that nothing mentions are a warning.
//! - A `--set` value sees what is declared above its `known`, has the type and the number of indices of the value that it
//!   replaces (its length may differ) and is given once. The value in the file is still checked for names and types.

pub mod ast;
mod check;
mod constrain;
mod declare;
pub mod limits;
mod lower;
pub mod mistakes;
pub mod parse;
pub mod scope;
pub mod token;

use crate::diag::{self, Diagnostic};
use crate::id::Id;
use crate::problem::check::{Fault, check};
use crate::problem::{Expr, Problem};
use crate::span::{FileId, Sources, Span};
use ast::{Ast, Name, Statement};
use declare::{Reader, Setting};
use limits::{MAX_MESSAGES, MAX_TEXT};
use mistakes::{lexical, names, syntax, values};
use parse::Read;
use scope::What;

/// Reads a puzzle. `sets` are the names and values given by `--set`. Ok carries warnings; Err carries every independent
/// mistake (and the warnings) by place, at most [`MAX_MESSAGES`].
pub fn read(
    text: &str,
    name: &str,
    sets: &[(String, String)],
    sources: &mut Sources,
) -> Result<(Problem, Vec<Diagnostic>), Vec<Diagnostic>> {
    if let Some((name, len)) = too_long(text, name, sets) {
        sources.add(name, "");
        return Err(vec![lexical::text_too_long(name, len)]);
    }
    let file = sources.add(name, text);
    let mut out = Vec::new();
    let mut ast = Ast::new(file);
    let tokens = token::lex(text, file, &mut out);
    let statements = parse::parse(text, &tokens, &mut ast, &mut out);
    let settings = read_sets(sets, sources, &mut ast, &mut out);
    ast.file = file;

    let mut reader = Reader::new(ast, out);
    for statement in &statements {
        announce(statement, &mut reader);
    }
    for (name, setting) in settings {
        if let Some(first) = reader.settings.get(name) {
            reader.out.push(names::set_twice(name, setting.span, first.span));
        } else {
            reader.settings.insert(name, setting);
        }
    }
    for statement in &statements {
        match statement {
            Read::Statement(statement, span) => reader.statement(statement, *span),
            Read::Broken(names) => reader.broken(names),
        }
    }
    judge_sets(sets, &mut reader);
    finish(reader, name)
}

fn too_long<'a>(text: &'a str, name: &'a str, sets: &'a [(String, String)]) -> Option<(&'a str, usize)> {
    let texts = sets.iter().map(|(name, value)| (name.as_str(), value.len()));
    std::iter::once((name, text.len())).chain(texts).find(|&(_, len)| len > MAX_TEXT)
}

/// Reads the values of `--set`, each as a file of its own.
fn read_sets<'t>(
    sets: &'t [(String, String)],
    sources: &mut Sources,
    ast: &mut Ast<'t>,
    out: &mut Vec<Diagnostic>,
) -> Vec<(&'t str, Setting)> {
    let mut settings = Vec::new();
    for (name, value) in sets {
        let file: FileId = sources.add(&format!("--set {name}"), value.as_str());
        ast.file = file;
        let before = out.len();
        let tokens = token::lex(value, file, out);
        let statement = parse::parse_value(value, &tokens, ast, out);
        let node = match statement {
            Some(Statement::Value(node)) => Some(node),
            _ => None,
        };
        let span = Span::new(file, 0, value.len());
        if node.is_none() {
            let reason = out.drain(before..).next();
            let mistake = syntax::unreadable_set(name, value);
            // The reason's place says more than the whole value.
            let place = reason.as_ref().and_then(Diagnostic::span).unwrap_or(span);
            out.push(mistake.at(place, reason.map_or_else(String::new, |reason| reason.message)));
        }
        settings.push((name.as_str(), Setting { value: node, span }));
    }
    settings
}

/// Notes which names the text declares somewhere.
fn announce<'t>(statement: &Read<'t>, reader: &mut Reader<'t>) {
    let Read::Statement(statement, _) = statement else { return };
    let declared: Vec<Name<'t>> = match statement {
        Statement::Known(definition) | Statement::Let(definition) => vec![definition.name],
        Statement::Kind(name, values) => std::iter::once(*name).chain(values.iter().copied()).collect(),
        Statement::Pick(name, ..) => vec![*name],
        _ => Vec::new(),
    };
    declared.into_iter().for_each(|name| reader.scope.announce(name));
}

/// Reports the settings that name no `known`.
fn judge_sets(sets: &[(String, String)], reader: &mut Reader<'_>) {
    for (name, _) in sets {
        let Some(setting) = reader.settings.remove(name.as_str()) else { continue };
        match reader.scope.find(name) {
            None => reader.out.push(names::set_unknown(name, setting.span, &reader.scope.knowns())),
            Some(entity) => {
                let entity = reader.scope.get(entity);
                let known = match &entity.what {
                    What::Row(row) => row.maker == scope::Maker::Known,
                    What::Broken => true,
                    What::Kind(_) | What::Value(..) => false,
                };
                if !known {
                    reader.out.push(names::set_not_known(name, setting.span, entity.name.span));
                }
            }
        }
    }
}

/// The problem, or what stands against it.
fn finish(reader: Reader<'_>, name: &str) -> Result<(Problem, Vec<Diagnostic>), Vec<Diagnostic>> {
    let Reader { build, mut out, picks, .. } = reader;
    let sound = !out.iter().any(Diagnostic::is_error);
    let problem = build.finish();
    if sound {
        let mut mentioned = vec![false; problem.vars().len()];
        for (_, &expr) in problem.exprs.iter() {
            if let Expr::Var(var) = expr {
                mentioned[var.index()] = true;
            }
        }
        let mut next = 0;
        for pick in picks {
            // Picks are declared in the order of their variables.
            let vars = next..next + pick.cells.len();
            next = vars.end;
            let searched = problem.vars().as_slice()[vars.clone()].iter().any(|var| var.width > 0);
            if searched && !mentioned[vars].contains(&true) {
                out.push(values::unused(pick.name.span, pick.name.text));
            }
        }
        if problem.bit_count() == 0 {
            out.push(values::nothing_picked(name));
        }
        for fault in check(&problem).err().unwrap_or_default() {
            let place = match &fault {
                Fault::TooWide { expr, .. } | Fault::OutsideRow { expr, .. } => problem.exprs.span(*expr),
                Fault::Malformed(_) => None,
            };
            out.push(values::broken_problem(place, &fault.to_string()));
        }
    }
    diag::sort(&mut out);
    out.dedup();
    if out.iter().any(Diagnostic::is_error) {
        out.truncate(MAX_MESSAGES);
        return Err(out);
    }
    Ok((problem, out))
}
