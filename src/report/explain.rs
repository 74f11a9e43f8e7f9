//! How a problem was read: its variables with their bits, its constraints with their places and ranges.

use std::fmt::Write;

use comfy_table::{Table, presets};
use serde_json::{Value, json};

use crate::diag::plural;
use crate::id::{Id, IdVec};
use crate::places::Places;
use crate::problem::check::{Interval, ranges};
use crate::problem::{Compare, ConstraintId, Expr, ExprId, Origin, Problem, Type};
use crate::report::json::bit_name;
use crate::report::places::domain;
use crate::source::Loaded;
use crate::span::Sources;

/// Characters of a constraint's text that a table shows; `--json` has all of it.
const MAX_TEXT: usize = 72;

/// The reading of a problem.
#[derive(Debug)]
pub struct Reading {
    /// The variables, as many as were asked for.
    pub variables: Vec<VariableLine>,
    /// The constraints, as many as were asked for.
    pub constraints: Vec<ConstraintLine>,
    /// The objective.
    pub objective: Option<ConstraintLine>,
    /// How many bits are shown, where not all are.
    pub shown: Option<usize>,
}

/// A variable.
#[derive(Debug)]
pub struct VariableLine {
    name: String,
    domain: String,
    first_bit: usize,
    width: u8,
}

/// A constraint, or the objective.
#[derive(Debug)]
pub struct ConstraintLine {
    number: String,
    line: Option<usize>,
    text: String,
    bindings: String,
    ranges: String,
}

/// Reads at most `most` variables and as many constraints.
pub fn reading(problem: &Problem, sources: &Sources, most: usize) -> Reading {
    let variables = problem.vars().iter().take(most).map(|(id, var)| VariableLine {
        name: problem.var_name(id),
        domain: domain(problem, var.domain),
        first_bit: var.first_bit.index(),
        width: var.width,
    });
    let (ranges, _) = ranges(problem);
    let types = problem.types();
    let expressions = problem.constraints.iter().enumerate().map(|(at, constraint)| {
        constraint_line(problem, sources, (&ranges, &types), at.to_string(), &constraint.origin, constraint.expr)
    });
    let clauses = (0..problem.clauses.len()).map(|at| clause_line(problem, at));
    let objective = problem.objective.as_ref().map(|objective| {
        let origin = Origin { span: objective.span, bindings: Vec::new() };
        constraint_line(problem, sources, (&ranges, &types), "objective".to_owned(), &origin, objective.expr)
    });
    Reading {
        variables: variables.collect(),
        constraints: expressions.chain(clauses).take(most).collect(),
        objective,
        shown: problem.shown.as_ref().map(Vec::len),
    }
}

/// One constraint, as it was read.
pub fn constraint(problem: &Problem, sources: &Sources, id: ConstraintId) -> ConstraintLine {
    let number = id.index().to_string();
    match problem.constraints.get(id.index()) {
        Some(constraint) => {
            let (ranges, types) = (ranges(problem).0, problem.types());
            constraint_line(problem, sources, (&ranges, &types), number, &constraint.origin, constraint.expr)
        }
        None => clause_line(problem, id.index() - problem.constraints.len()),
    }
}

/// A clause as DIMACS would write it.
fn clause_line(problem: &Problem, at: usize) -> ConstraintLine {
    ConstraintLine {
        number: (problem.constraints.len() + at).to_string(),
        line: None,
        text: problem.clauses.get(at).iter().map(|lit| lit.to_dimacs().to_string()).collect::<Vec<_>>().join(" "),
        bindings: String::new(),
        ranges: String::new(),
    }
}

fn constraint_line(
    problem: &Problem,
    sources: &Sources,
    (ranges, types): (&IdVec<ExprId, Interval>, &IdVec<ExprId, Type>),
    number: String,
    origin: &Origin,
    expr: ExprId,
) -> ConstraintLine {
    let text = origin.span.map_or("", |span| sources.text(span));
    let bindings: Vec<String> = origin.bindings.iter().map(|(name, value)| format!("{name} = {value}")).collect();
    ConstraintLine {
        number,
        line: origin.span.map(|span| sources.position(span).line),
        text: text.split_whitespace().collect::<Vec<_>>().join(" "),
        bindings: bindings.join(", "),
        ranges: ranges_of(problem, ranges, types, expr),
    }
}

/// The ranges of the two sides of a comparison, or of a number.
fn ranges_of(problem: &Problem, ranges: &IdVec<ExprId, Interval>, types: &IdVec<ExprId, Type>, expr: ExprId) -> String {
    let range = |id: ExprId| {
        let Interval { lo, hi } = ranges[id];
        if lo == hi { lo.to_string() } else { format!("{lo} to {hi}") }
    };
    match problem.exprs.get(expr) {
        Expr::Compare(compare, a, b) => {
            let sign = match compare {
                Compare::Eq => "=",
                Compare::Ne => "!=",
                Compare::Lt => "<",
                Compare::Le => "<=",
            };
            format!("{} {sign} {}", range(a), range(b))
        }
        _ if types[expr] == Type::Number => range(expr),
        _ => String::new(),
    }
}

impl VariableLine {
    /// As data.
    pub fn json(&self) -> Value {
        json!({ "name": self.name, "domain": self.domain, "first_bit": self.first_bit, "bits": self.width })
    }

    fn bits(&self) -> String {
        match self.width {
            0 => "-".to_owned(),
            1 => self.first_bit.to_string(),
            width => format!("{}..{}", self.first_bit, self.first_bit + usize::from(width) - 1),
        }
    }
}

impl ConstraintLine {
    /// In one line of prose.
    pub fn in_words(&self) -> String {
        let place = self.line.map_or_else(String::new, |line| format!(", line {line}"));
        let bindings = if self.bindings.is_empty() { String::new() } else { format!(", for {}", self.bindings) };
        format!("constraint {}{place}: {}{bindings}", self.number, self.text)
    }

    /// As data.
    pub fn json(&self) -> Value {
        json!({
            "number": self.number,
            "line": self.line,
            "text": self.text,
            "bindings": self.bindings,
            "ranges": self.ranges,
        })
    }
}

/// The reading as text.
pub fn text(loaded: &Loaded, reading: &Reading) -> String {
    let problem = &loaded.problem;
    let mut text = String::new();
    if let Some(title) = &problem.title {
        _ = writeln!(text, "{title}");
    }
    _ = writeln!(text, "\n{}", count_line(problem.vars().len(), reading.variables.len(), "variable", "variables"));
    let mut variables = table(["name", "values", "bits"]);
    for variable in &reading.variables {
        variables.add_row([&variable.name, &variable.domain, &variable.bits()]);
    }
    _ = writeln!(text, "{}", variables.trim_fmt());
    if let Some(shown) = reading.shown {
        _ = writeln!(text, "\n{} of {} shown", plural(shown, "bit is", "bits are"), problem.bit_count());
    }
    let total = problem.constraint_count();
    _ = writeln!(text, "\n{}", count_line(total, reading.constraints.len(), "constraint", "constraints"));
    let mut constraints = table(["number", "line", "text", "for", "ranges"]);
    let mut above = "";
    for line in reading.constraints.iter().chain(&reading.objective) {
        let place = line.line.map_or_else(String::new, |line| line.to_string());
        // One statement may give many constraints: its text stands once.
        let shown = if line.text == above { "\"".to_owned() } else { shorten(&line.text) };
        constraints.add_row([&line.number, &place, &shown, &line.bindings, &line.ranges]);
        above = &line.text;
    }
    _ = writeln!(text, "{}", constraints.trim_fmt());
    text
}

/// What the clauses say, which bits are computed from which, at most `most` of them, and what was decided against.
pub fn narrowing(problem: &Problem, structure: &str, taken: &Priced, other: Option<&Priced>, most: usize) -> String {
    let mut text = String::new();
    if !structure.is_empty() {
        _ = writeln!(text, "\nThe clauses spell {structure}");
    }
    let places = taken.places;
    if let Some(other) = other {
        let words = |priced: &Priced| format!("{} bits searched, {}", priced.places.search_len(), in_ands(priced.ands));
        _ = writeln!(text, "\nTaken: {}; the other way: {}", words(taken), words(other));
    }
    if places.computed.is_empty() {
        return text;
    }
    _ = writeln!(
        text,
        "\n{}",
        count_line(places.computed.len(), most.min(places.computed.len()), "computed bit", "computed bits")
    );
    let mut computed = table(["bit", "name", "is"]);
    for of in places.computed.iter().take(most) {
        computed.add_row([&format!("b{}", of.bit), &bit_name(problem, of.bit), &shorten(&of.formula.to_string())]);
    }
    _ = writeln!(text, "{}", computed.trim_fmt());
    text
}

/// Places with the ANDs of oracle and reflection together, where they were counted.
#[derive(Clone, Copy, Debug)]
pub struct Priced<'a> {
    /// The places.
    pub places: &'a Places,
    /// The ANDs of one iteration.
    pub ands: Option<u64>,
}

fn in_ands(ands: Option<u64>) -> String {
    ands.map_or_else(|| "no oracle".to_owned(), |ands| format!("{} an iteration", plural(ands as usize, "AND", "ANDs")))
}

/// The beginning of a long text.
fn shorten(text: &str) -> String {
    match text.char_indices().nth(MAX_TEXT) {
        Some((end, _)) => format!("{} ...", text[..end].trim_end()),
        None => text.to_owned(),
    }
}

fn count_line(total: usize, listed: usize, one: &str, many: &str) -> String {
    let all = plural(total, one, many);
    if listed < total { format!("{all}, the first {listed} of them:") } else { format!("{all}:") }
}

fn table<const N: usize>(header: [&str; N]) -> Table {
    let mut table = Table::new();
    table.load_style(presets::NOTHING);
    table.set_header(header);
    table
}
