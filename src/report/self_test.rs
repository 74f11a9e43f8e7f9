//! The self-test of the audit, as text and as data.

use comfy_table::{CellAlignment, Table, presets};
use serde_json::{Value, json};

use crate::circuit::Circuit;
use crate::judge::audit::compare::gate_in_words;
use crate::judge::audit::faults::{Fault, Found, Kind, SelfTest, Trial};
use crate::report::summary::line;

/// Faults that are listed one by one.
const LISTED: usize = 32;

/// Kinds of results, in the order of the columns.
fn column(found: &Found) -> usize {
    match found {
        Found::Caught => 0,
        Found::Refused(_) => 1,
        Found::Harmless => 2,
        Found::Missed(_) => 3,
        Found::Unproven(_) => 4,
    }
}

const COLUMNS: [&str; 5] = ["caught", "refused", "harmless", "missed", "unproven"];

fn counts<'t>(trials: impl IntoIterator<Item = &'t Trial>) -> [usize; 5] {
    let mut counts = [0; 5];
    trials.into_iter().for_each(|trial| counts[column(&trial.found)] += 1);
    counts
}

/// The kinds that were drawn, with their counts.
fn by_kind(test: &SelfTest) -> Vec<(Kind, [usize; 5])> {
    let of = |kind: Kind| counts(test.trials.iter().filter(move |trial| trial.kind == kind));
    let all = Kind::ALL.into_iter().map(|kind| (kind, of(kind)));
    all.filter(|(_, counts)| counts.iter().sum::<usize>() > 0).collect()
}

/// The faults that the audit failed on: as text form, in words and why.
fn failures(test: &SelfTest) -> impl Iterator<Item = (&Trial, &str)> {
    test.trials.iter().filter_map(|trial| match &trial.found {
        Found::Missed(why) | Found::Unproven(why) => Some((trial, why.as_str())),
        _ => None,
    })
}

/// A fault with the gate that it changes.
fn in_words(fault: &Fault, circuit: &Circuit) -> String {
    match fault.gate().and_then(|at| circuit.gates().get(at as usize)) {
        Some(gate) => format!("{fault} (`{}`)", gate_in_words(circuit, gate)),
        None => fault.to_string(),
    }
}

/// As text.
pub fn text(test: &SelfTest, circuit: &Circuit) -> String {
    let outcome = match (test.passed(), test.is_complete) {
        (false, _) => "FAILED",
        (true, true) => "passed",
        (true, false) => "not finished",
    };
    let all = counts(&test.trials);
    let said: Vec<String> = COLUMNS.iter().zip(all).map(|(name, count)| format!("{count} {name}")).collect();
    let mut text = line("self-test", format!("{outcome}: {} faults, {}", test.trials.len(), said.join(", ")));
    let mut table = Table::new();
    table.load_style(presets::NOTHING);
    table.set_header(std::iter::once("fault").chain(COLUMNS));
    for (kind, counts) in by_kind(test) {
        let cells = counts.iter().map(usize::to_string);
        table.add_row(std::iter::once(kind.name().to_owned()).chain(cells));
    }
    for column in table.column_iter_mut().skip(1) {
        column.set_cell_alignment(CellAlignment::Right);
    }
    text += &(table.trim_fmt() + "\n");
    for (trial, why) in failures(test).take(LISTED) {
        let name = COLUMNS[column(&trial.found)];
        text += &line(name, format!("{}: {why}", in_words(&trial.fault, circuit)));
    }
    text
}

/// As data.
pub fn json(test: &SelfTest, circuit: &Circuit) -> Value {
    let named = |counts: [usize; 5]| -> Value {
        COLUMNS.iter().zip(counts).map(|(&name, count)| (name.to_owned(), Value::from(count))).collect()
    };
    let kinds: serde_json::Map<String, Value> =
        by_kind(test).into_iter().map(|(kind, counts)| (kind.name().to_owned(), named(counts))).collect();
    let failures: Vec<Value> = failures(test)
        .map(|(trial, why)| {
            json!({
                "fault": trial.fault.to_string(),
                "kind": trial.kind.name(),
                "result": COLUMNS[column(&trial.found)],
                "text": in_words(&trial.fault, circuit),
                "why": why,
            })
        })
        .collect();
    json!({
        "faults": test.trials.len(),
        "passed": test.passed() && test.is_complete,
        "results": named(counts(&test.trials)),
        "kinds": kinds,
        "failures": failures,
    })
}
