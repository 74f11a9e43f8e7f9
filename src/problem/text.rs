//! The text form of a problem: one record a line, for logs, tests and bug reports.
//!
//! ```text
//! tallymark problem 1
//! title "Two lamps"
//! kind k0 "Port" "bow" "stern"
//! var v0 yesno "on[1]"
//! var v1 range 1 4 "ping"
//! var v2 kind k0 "sonar"
//! table t0 2 : 0 1 : 1 0
//! e0 = var v0
//! e1 = number 3
//! must e0 "i" "1"
//! clause 1 -2 0
//! shown b0 b2
//! least e1
//! ```
//!
//! Ids are those of the arenas, in order; names stand in quotes, with `\"`, `\\`, `\n` and `\r` inside. `clause` has
//! DIMACS literals. Spans are left out: reading back what was printed gives an equal problem but for them.

use std::fmt::{self, Write as _};

use thiserror::Error;

use crate::id::Id;
use crate::problem::check::{Fault, check};
use crate::problem::expr::{Compare, Expr, ExprId, ExprList, Table};
use crate::problem::{BitId, BitLit, Constraint, Domain, Kind, Objective, Origin, Problem, Sense};

const HEADER: &str = "tallymark problem 1";

/// Why a text is no problem.
#[derive(Clone, PartialEq, Eq, Debug, Error)]
pub enum TextError {
    /// A line that cannot be read.
    #[error("line {line}: expected {expected}")]
    Line {
        /// The line, from 1.
        line: usize,
        /// What was expected.
        expected: String,
    },
    /// The lines are readable, but the problem breaks an invariant.
    #[error("{0}")]
    Unsound(#[from] Fault),
}

impl fmt::Display for Problem {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        writeln!(f, "{HEADER}")?;
        if let Some(title) = &self.title {
            writeln!(f, "title {}", quoted(title))?;
        }
        for (id, kind) in self.kinds.iter() {
            let values: String = kind.values.iter().map(|value| format!(" {}", quoted(value))).collect();
            writeln!(f, "kind {id} {}{values}", quoted(&kind.name))?;
        }
        for (id, var) in self.vars().iter() {
            let domain = match var.domain {
                Domain::YesNo => "yesno".to_owned(),
                Domain::Range { lo, hi } => format!("range {lo} {hi}"),
                Domain::Kind(kind) => format!("kind {kind}"),
            };
            writeln!(f, "var {id} {domain} {}", quoted(&var.name))?;
        }
        for (id, table) in self.exprs.tables().iter() {
            write!(f, "table {id} {}", table.width())?;
            for row in table.rows() {
                write!(f, " :{}", spaced(row))?;
            }
            writeln!(f)?;
        }
        for (id, &expr) in self.exprs.iter() {
            writeln!(f, "{id} = {}", words(self, expr))?;
        }
        for constraint in &self.constraints {
            write!(f, "must {}", constraint.expr)?;
            for (name, value) in &constraint.origin.bindings {
                write!(f, " {} {}", quoted(name), quoted(value))?;
            }
            writeln!(f)?;
        }
        for clause in self.clauses.iter() {
            writeln!(f, "clause{} 0", spaced(clause.iter().map(|lit| lit.to_dimacs())))?;
        }
        if let Some(shown) = &self.shown {
            writeln!(f, "shown{}", spaced(shown))?;
        }
        if let Some(objective) = &self.objective {
            let sense = if objective.sense == Sense::Least { "least" } else { "most" };
            writeln!(f, "{sense} {}", objective.expr)?;
        }
        Ok(())
    }
}

/// One expression in words: its operator and its operands.
fn words(problem: &Problem, expr: Expr) -> String {
    let over = |word: &str, list: ExprList| format!("{word}{}", spaced(problem.exprs.items(list)));
    match expr {
        Expr::Truth(truth) => if truth { "yes" } else { "no" }.to_owned(),
        Expr::Number(number) => format!("number {number}"),
        Expr::Var(var) => format!("var {var}"),
        Expr::Not(a) => format!("not {a}"),
        Expr::All(list) => over("all", list),
        Expr::Some(list) => over("some", list),
        Expr::Odd(list) => over("odd", list),
        Expr::Compare(Compare::Eq, a, b) => format!("eq {a} {b}"),
        Expr::Compare(Compare::Ne, a, b) => format!("ne {a} {b}"),
        Expr::Compare(Compare::Lt, a, b) => format!("lt {a} {b}"),
        Expr::Compare(Compare::Le, a, b) => format!("le {a} {b}"),
        Expr::Different(list) => over("different", list),
        Expr::OneOf(list, table) => over(&format!("oneof {table}"), list),
        Expr::AsNumber(a) => format!("asnumber {a}"),
        Expr::Count(list) => over("count", list),
        Expr::Sum(list) => over("sum", list),
        Expr::Product(a, b) => format!("product {a} {b}"),
        Expr::Negate(a) => format!("negate {a}"),
        Expr::Abs(a) => format!("abs {a}"),
        Expr::Quotient(a, by) => format!("quotient {by} {a}"),
        Expr::Remainder(a, by) => format!("remainder {by} {a}"),
        Expr::Smallest(list) => over("smallest", list),
        Expr::Largest(list) => over("largest", list),
        Expr::Choose(a, b, c) => format!("choose {a} {b} {c}"),
        Expr::Element(index, list) => over(&format!("element {index}"), list),
    }
}

fn spaced(items: impl IntoIterator<Item = impl fmt::Display>) -> String {
    items.into_iter().fold(String::new(), |mut text, item| {
        let _ = write!(text, " {item}");
        text
    })
}

fn quoted(text: &str) -> String {
    let mut quoted = String::from("\"");
    for sign in text.chars() {
        match sign {
            '"' | '\\' => quoted.extend(['\\', sign]),
            '\n' => quoted.push_str("\\n"),
            '\r' => quoted.push_str("\\r"),
            sign => quoted.push(sign),
        }
    }
    quoted.push('"');
    quoted
}

impl Problem {
    /// Reads the text form back. What it accepts is a sound problem (see [`check`](super::check)).
    pub fn parse_text(text: &str) -> Result<Problem, TextError> {
        let mut problem = Problem::new();
        let mut lines = text.split('\n').map(|line| line.trim_end_matches('\r')).enumerate();
        if lines.next().map(|(_, line)| line) != Some(HEADER) {
            return Err(TextError::Line { line: 1, expected: format!("`{HEADER}`") });
        }
        for (at, line) in lines.filter(|(_, line)| !line.trim().is_empty()) {
            let read = split(line).and_then(|words| record(&mut problem, &words));
            read.map_err(|expected| TextError::Line { line: at + 1, expected })?;
        }
        match check(&problem) {
            Ok(()) => Ok(problem),
            Err(faults) => Err(faults.into_iter().next().expect("refused with a reason").into()),
        }
    }
}

type Parsed<T = ()> = Result<T, String>;

/// A word of a line: bare, or the text that stood in quotes.
enum Word {
    Bare(String),
    Quoted(String),
}

/// Cuts a line into words.
fn split(line: &str) -> Parsed<Vec<Word>> {
    let mut words = Vec::new();
    let mut signs = line.chars().peekable();
    while let Some(&sign) = signs.peek() {
        if sign == ' ' {
            signs.next();
        } else if sign == '"' {
            signs.next();
            let mut text = String::new();
            loop {
                match signs.next().ok_or("a closing quote")? {
                    '"' => break,
                    '\\' => text.push(match signs.next().ok_or("a sign after `\\`")? {
                        'n' => '\n',
                        'r' => '\r',
                        sign => sign,
                    }),
                    sign => text.push(sign),
                }
            }
            words.push(Word::Quoted(text));
        } else {
            let mut text = String::new();
            while let Some(sign) = signs.next_if(|&sign| sign != ' ' && sign != '"') {
                text.push(sign);
            }
            words.push(Word::Bare(text));
        }
    }
    Ok(words)
}

fn bare(word: Option<&Word>) -> Parsed<&str> {
    match word {
        Some(Word::Bare(text)) => Ok(text),
        _ => Err("another word".to_owned()),
    }
}

fn text_of(word: Option<&Word>) -> Parsed<&str> {
    match word {
        Some(Word::Quoted(text)) => Ok(text),
        _ => Err("a text in quotes".to_owned()),
    }
}

fn number(word: Option<&Word>) -> Parsed<i64> {
    bare(word)?.parse().map_err(|_| "a number of 64 bits".to_owned())
}

/// An id with this prefix, below `count`.
fn id<I: Id>(text: &str, prefix: &str, count: usize) -> Parsed<I> {
    let index = text.strip_prefix(prefix).and_then(|digits| digits.parse::<usize>().ok());
    index.filter(|&index| index < count).map(I::new).ok_or_else(|| format!("an id `{prefix}…` that is declared above"))
}

/// One record.
fn record(problem: &mut Problem, words: &[Word]) -> Parsed {
    let rest = words.get(1..).unwrap_or(&[]);
    let exprs = problem.exprs.len();
    match bare(words.first())? {
        "title" => {
            problem.title = Some(text_of(rest.first())?.to_owned());
            ended(rest.get(1..).unwrap_or(&[]))
        }
        "kind" => read_kind(problem, rest),
        "var" => read_var(problem, rest),
        "table" => read_table(problem, rest),
        "must" => {
            let expr = id(bare(rest.first())?, "e", exprs)?;
            let pairs = rest[1..].chunks(2);
            let bindings = pairs.map(|pair| Ok((text_of(pair.first())?.into(), text_of(pair.get(1))?.into())));
            let origin = Origin { span: None, bindings: bindings.collect::<Parsed<_>>()? };
            problem.constraints.push(Constraint { expr, origin });
            Ok(())
        }
        "clause" => read_clause(problem, rest),
        "shown" => {
            let bits = problem.bit_count();
            let shown = rest.iter().map(|word| id::<BitId>(bare(Some(word))?, "b", bits));
            problem.shown = Some(shown.collect::<Parsed<_>>()?);
            Ok(())
        }
        word @ ("least" | "most") => {
            let sense = if word == "least" { Sense::Least } else { Sense::Most };
            let expr = id(bare(rest.first())?, "e", exprs)?;
            problem.objective = Some(Objective { sense, expr, span: None });
            ended(rest.get(1..).unwrap_or(&[]))
        }
        first => read_expr(problem, first, rest),
    }
}

fn ended(rest: &[Word]) -> Parsed {
    if rest.is_empty() { Ok(()) } else { Err("the end of the line".to_owned()) }
}

/// The next id of an arena, spelt out.
fn next(word: Option<&Word>, prefix: &str, len: usize) -> Parsed {
    let text = bare(word)?;
    let expected = format!("{prefix}{len}");
    if text == expected { Ok(()) } else { Err(format!("`{expected}`")) }
}

fn read_kind(problem: &mut Problem, rest: &[Word]) -> Parsed {
    next(rest.first(), "k", problem.kinds.len())?;
    let name = text_of(rest.get(1))?.into();
    let values: Vec<Box<str>> = rest[2..].iter().map(|word| Ok(text_of(Some(word))?.into())).collect::<Parsed<_>>()?;
    if values.is_empty() {
        return Err("at least one value".to_owned());
    }
    problem.kinds.push(Kind { name, values });
    Ok(())
}

fn read_var(problem: &mut Problem, rest: &[Word]) -> Parsed {
    next(rest.first(), "v", problem.vars().len())?;
    let (domain, used) = match bare(rest.get(1))? {
        "yesno" => (Domain::YesNo, 2),
        "range" => {
            let (lo, hi) = (number(rest.get(2))?, number(rest.get(3))?);
            if lo > hi {
                return Err("a range with at least one number".to_owned());
            }
            (Domain::Range { lo, hi }, 4)
        }
        "kind" => (Domain::Kind(id(bare(rest.get(2))?, "k", problem.kinds.len())?), 3),
        _ => return Err("`yesno`, `range` or `kind`".to_owned()),
    };
    let name = text_of(rest.get(used))?;
    ended(&rest[used + 1..])?;
    problem.add_var(name, domain, None);
    Ok(())
}

fn read_table(problem: &mut Problem, rest: &[Word]) -> Parsed {
    next(rest.first(), "t", problem.exprs.tables().len())?;
    let width = usize::try_from(number(rest.get(1))?).ok().filter(|&width| width > 0);
    let width = width.ok_or("a positive width")?;
    let mut rows: Vec<Vec<i64>> = Vec::new();
    for word in &rest[2..] {
        match (bare(Some(word))?, rows.last_mut()) {
            (":", _) => rows.push(Vec::new()),
            (_, Some(row)) => row.push(number(Some(word))?),
            (_, None) => return Err("`:` before a row".to_owned()),
        }
    }
    if rows.iter().any(|row| row.len() != width) {
        return Err(format!("rows of {width}"));
    }
    problem.exprs.add_table(Table::new(width, rows));
    Ok(())
}

fn read_clause(problem: &mut Problem, rest: &[Word]) -> Parsed {
    let mut lits = Vec::new();
    for word in rest {
        let lit = number(Some(word))?;
        match BitLit::from_dimacs(lit) {
            Some(lit) if lit.bit().index() < problem.bit_count() => lits.push(lit),
            None if lit == 0 && lits.len() + 1 == rest.len() => {}
            _ => return Err("literals of the problem's bits and a last 0".to_owned()),
        }
    }
    if lits.len() == rest.len() {
        return Err("a last 0".to_owned());
    }
    problem.clauses.push(&lits);
    Ok(())
}

fn read_expr(problem: &mut Problem, first: &str, rest: &[Word]) -> Parsed {
    let count = problem.exprs.len();
    if first != format!("e{count}") || bare(rest.first())? != "=" {
        return Err(format!(
            "`title`, `kind`, `var`, `table`, `must`, `clause`, `shown`, `least`, `most` or `e{count} =`"
        ));
    }
    let word = bare(rest.get(1))?;
    let operands = &rest[2..];
    // Some operators have a word before their operands.
    let head = operands.first();
    let skip = usize::from(matches!(word, "number" | "var" | "oneof" | "quotient" | "remainder"));
    let of = operands.iter().skip(skip).map(|word| id(bare(Some(word))?, "e", count));
    let of: Vec<ExprId> = of.collect::<Parsed<_>>()?;
    let divisor = || number(head).and_then(|by| if by > 0 { Ok(by) } else { Err("a positive divisor".to_owned()) });
    let expr = match (word, &of[..]) {
        ("yes", []) => Expr::Truth(true),
        ("no", []) => Expr::Truth(false),
        ("number", []) => Expr::Number(number(head)?),
        ("var", []) => Expr::Var(id(bare(head)?, "v", problem.vars().len())?),
        ("not", &[a]) => Expr::Not(a),
        ("eq", &[a, b]) => Expr::Compare(Compare::Eq, a, b),
        ("ne", &[a, b]) => Expr::Compare(Compare::Ne, a, b),
        ("lt", &[a, b]) => Expr::Compare(Compare::Lt, a, b),
        ("le", &[a, b]) => Expr::Compare(Compare::Le, a, b),
        ("asnumber", &[a]) => Expr::AsNumber(a),
        ("product", &[a, b]) => Expr::Product(a, b),
        ("negate", &[a]) => Expr::Negate(a),
        ("abs", &[a]) => Expr::Abs(a),
        ("quotient", &[a]) => Expr::Quotient(a, divisor()?),
        ("remainder", &[a]) => Expr::Remainder(a, divisor()?),
        ("choose", &[a, b, c]) => Expr::Choose(a, b, c),
        ("element", [index, cells @ ..]) if !cells.is_empty() => Expr::Element(*index, problem.exprs.list(cells)),
        ("oneof", of) => {
            let table = id(bare(head)?, "t", problem.exprs.tables().len())?;
            Expr::OneOf(problem.exprs.list(of), table)
        }
        (word, of) => {
            let make = over(word).ok_or("an operator with as many operands as it takes")?;
            make(problem.exprs.list(of))
        }
    };
    problem.exprs.node(expr);
    Ok(())
}

fn over(word: &str) -> Option<fn(ExprList) -> Expr> {
    Some(match word {
        "all" => Expr::All,
        "some" => Expr::Some,
        "odd" => Expr::Odd,
        "different" => Expr::Different,
        "count" => Expr::Count,
        "sum" => Expr::Sum,
        "smallest" => Expr::Smallest,
        "largest" => Expr::Largest,
        _ => return None,
    })
}

#[cfg(test)]
mod tests {
    use super::*;

    const SAMPLE: &str = r#"tallymark problem 1
title "Say \"one\"\nor \\two"
kind k0 "Port" "bow" "stern"
var v0 yesno "on[1]"
var v1 range -3 4 "ping"
var v2 kind k0 "sonar"
table t0 2 : -1 0 : 2 1
table t1 1
e0 = var v0
e1 = var v1
e2 = var v2
e3 = number -9
e4 = oneof t0 e1 e2
e5 = some
e6 = element e2 e1 e3
e7 = remainder 5 e6
e8 = choose e0 e7 e1
e9 = lt e8 e3
e10 = yes
e11 = all e4 e5 e9 e10
e12 = quotient 3 e8
must e11 "i" "1" "c" "bow"
must e4
clause 1 -2 0
clause 0
shown b0 b3
most e12
"#;

    #[test]
    fn what_is_printed_reads_back_equal() {
        let problem = Problem::parse_text(SAMPLE).unwrap();
        assert_eq!(problem.to_string(), SAMPLE);
        assert_eq!(Problem::parse_text(&problem.to_string()).unwrap(), problem);
    }

    #[test]
    fn a_text_that_is_no_problem_is_refused_with_its_line() {
        let refused =
            |from: &str, to: &str| Problem::parse_text(&SAMPLE.replacen(from, to, 1)).unwrap_err().to_string();
        assert_eq!(refused("problem 1", "problem 2"), "line 1: expected `tallymark problem 1`");
        assert_eq!(refused("var v1", "var v7"), "line 5: expected `v1`");
        assert_eq!(refused("range -3 4", "range 4 -3"), "line 5: expected a range with at least one number");
        assert_eq!(refused("e4 = oneof t0", "e4 = oneof t9"), "line 13: expected an id `t…` that is declared above");
        assert_eq!(refused("e5 = some", "e5 = some e5"), "line 14: expected an id `e…` that is declared above");
        assert_eq!(refused("clause 0", "clause 1"), "line 25: expected a last 0");
        assert_eq!(refused("clause 0", "clause 99 0"), "line 25: expected literals of the problem's bits and a last 0");
        assert!(refused("must e4", "must e1").contains("a constraint is not yes/no"));
        assert!(refused("oneof t0 e1 e2", "oneof t1 e1 e2").starts_with("malformed problem"));
        assert!(refused("element e2 e1 e3", "element e1 e1 e3").starts_with("the index of e6 reaches"));
    }

    #[test]
    fn a_cut_text_never_panics() {
        for at in 0..SAMPLE.len() {
            let _ = Problem::parse_text(&SAMPLE[..at]);
            let _ = Problem::parse_text(&format!("{}{}", &SAMPLE[..at], &SAMPLE[at + 1..]));
        }
    }
}
