//! What a certificate tells beyond the count: its verdict, tallies by value, drawn solutions; as JSON and as text.

use std::fmt::Write;

use comfy_table::{CellAlignment, Table, presets};
use num_bigint::BigUint;
use serde_json::{Value, json};

use crate::judge::count::certificate::PickValues;
use crate::problem::{Domain, Problem, VarId};
use crate::report::summary::line;

/// A certificate file and what its check says.
#[derive(Clone, PartialEq, Eq, Debug)]
pub struct CheckedFile {
    /// The file, as the user named it.
    pub file: String,
    /// `decision-dnnf` or `refutation`; nothing where the file is neither.
    pub kind: Option<&'static str>,
    /// Nodes or steps.
    pub size: usize,
    /// The count that it proves, or why it proves none.
    pub verdict: Result<BigUint, Refused>,
}

/// Why a certificate proves nothing.
#[derive(Clone, PartialEq, Eq, Debug)]
pub struct Refused {
    /// In words.
    pub reason: String,
    /// Whether the check was not finished.
    pub undecided: bool,
}

/// `certificate`.
pub fn certificate_json(checked: &CheckedFile) -> Value {
    let refused = checked.verdict.as_ref().err();
    json!({
        "file": checked.file,
        "kind": checked.kind,
        "size": checked.size,
        "verdict": match refused {
            None => "holds",
            Some(refused) if refused.undecided => "undecided",
            Some(_) => "refused",
        },
        "count": checked.verdict.as_ref().ok().map(BigUint::to_string),
        "reason": refused.map(|refused| &refused.reason),
    })
}

/// The line on a certificate.
pub fn certificate_line(checked: &CheckedFile) -> String {
    let what = match checked.kind {
        Some("refutation") => format!("a refutation of {} steps", checked.size),
        Some(_) => format!("a decision-DNNF of {} nodes", checked.size),
        None => "no certificate".to_owned(),
    };
    let verdict = match &checked.verdict {
        Ok(count) => format!("holds: {count} ({what}, every clause and every branch checked)"),
        Err(refused) if refused.undecided => format!("undecided: {}", refused.reason),
        Err(refused) => format!("REFUSED: {}", refused.reason),
    };
    line("certificate", format!("{}: {verdict}", checked.file))
}

/// The name of the value at a place of a domain.
fn value_name(problem: &Problem, var: VarId, place: usize) -> String {
    let domain = problem.vars()[var].domain;
    let first = match domain {
        Domain::Range { lo, .. } => lo,
        Domain::YesNo | Domain::Kind(_) => 0,
    };
    problem.value_name(domain, first + place as i64)
}

/// Picks that take the same value in every solution, each with its value.
fn backbone<'a>(problem: &'a Problem, values: &'a [PickValues]) -> impl Iterator<Item = (String, String)> + 'a {
    let only = |pick: &PickValues| Some((problem.var_name(pick.var), value_name(problem, pick.var, pick.only()?)));
    values.iter().filter_map(only)
}

/// Values that a pick takes in no solution, of picks that are not in the backbone.
fn never<'a>(problem: &'a Problem, values: &'a [PickValues]) -> impl Iterator<Item = (String, String)> + 'a {
    let open = values.iter().filter(|pick| pick.only().is_none());
    open.flat_map(move |pick| {
        let name = problem.var_name(pick.var);
        pick.never().into_iter().map(move |place| (name.clone(), value_name(problem, pick.var, place)))
    })
}

/// `values`.
pub fn values_json(problem: &Problem, values: &[PickValues]) -> Value {
    let pick = |pick: &PickValues| {
        let counts = pick.counts.as_ref().map(|counts| {
            let named = counts.iter().enumerate().map(
                |(place, count)| json!({ "value": value_name(problem, pick.var, place), "count": count.to_string() }),
            );
            named.collect::<Vec<_>>()
        });
        json!({ "name": problem.var_name(pick.var), "counts": counts })
    };
    let named = |(name, value): (String, String)| json!({ "name": name, "value": value });
    json!({
        "picks": values.iter().map(pick).collect::<Vec<_>>(),
        "backbone": backbone(problem, values).map(named).collect::<Vec<_>>(),
        "never": never(problem, values).map(named).collect::<Vec<_>>(),
    })
}

/// The tallies by value as a table, with the backbone and the values never taken.
pub fn values_table(problem: &Problem, values: &[PickValues]) -> String {
    let mut table = Table::new();
    table.load_style(presets::NOTHING);
    table.set_header(["pick", "value", "solutions"]);
    for pick in values {
        let name = problem.var_name(pick.var);
        match &pick.counts {
            None => _ = table.add_row([&*name, "(too many values)", ""]),
            Some(counts) => {
                for (place, count) in counts.iter().enumerate() {
                    let name = if place == 0 { &*name } else { "" };
                    table.add_row([name, &value_name(problem, pick.var, place), &count.to_string()]);
                }
            }
        }
    }
    if let Some(column) = table.column_mut(2) {
        column.set_cell_alignment(CellAlignment::Right);
    }
    let mut text = format!("\n{}\n", table.trim_fmt());
    let listed = |pairs: Vec<(String, String)>| {
        pairs.into_iter().map(|(name, value)| format!("{name}={value}")).collect::<Vec<_>>().join(" ")
    };
    for (title, pairs) in
        [("always", listed(backbone(problem, values).collect())), ("never", listed(never(problem, values).collect()))]
    {
        if !pairs.is_empty() {
            _ = write!(text, "{}", line(title, pairs));
        }
    }
    text
}
