//! The comments at the top of a circuit file: what it is, from what, and at what cost.

use crate::circuit::{self, Level, Product};
use crate::judge::count::Counted;
use crate::places::Places;
use crate::report::json::mark_name;
use crate::report::places::domain;
use crate::source::Loaded;

/// At most so many variables are listed in the register map; the rest is in `places.json`.
const MAX_LISTED: usize = 64;

/// The caution that every result carries.
pub const CAUTION: &str = "Verified against the problem as written, not against the world. Where a configuration can hurt someone, the \
     applicable codes and licensed practice decide.";

/// The header of an oracle or of a whole search.
pub fn header(loaded: &Loaded, places: &Places, product: &Product, counted: Option<&Counted>) -> Vec<String> {
    let problem = &loaded.problem;
    let mut lines = vec![
        format!("problem: {}", problem.title.as_deref().unwrap_or("(untitled)")),
        format!("file: {}  sha256: {}", loaded.file, loaded.sha256),
        format!(
            "tallymark {} {} at level {}",
            mark_name(product.mark),
            if product.is_search() { "search" } else { "oracle" },
            product.level
        ),
    ];
    if let Some(counted) = counted {
        lines.push(format!("tally: {}", counted.in_words()));
    }
    lines.push(costs(product));
    lines.push("register map:".to_owned());
    for (qubit, _) in places.searched.iter().enumerate().take(MAX_LISTED) {
        let (var, place) = problem.var_of(places.searched[qubit]);
        let what = &problem.vars()[var];
        let part = if what.width > 1 { format!(" bit {place}") } else { String::new() };
        let values = if place == 0 { format!("  ({})", domain(problem, what.domain)) } else { String::new() };
        lines.push(format!("  {}[{qubit}] = {}{part}{values}", circuit::SEARCH, problem.var_name(var)));
    }
    if places.searched.len() > MAX_LISTED {
        lines.push(format!("  ... {} more, see the places file", places.searched.len() - MAX_LISTED));
    }
    if !places.computed.is_empty() {
        lines.push(format!("  {} more bits are computed from these, see the places file", places.computed.len()));
    }
    lines.push(CAUTION.to_owned());
    // A comment must stay one: names and titles may hold anything.
    lines.iter().map(|line| line.replace(['\n', '\r'], " ")).collect()
}

fn costs(product: &Product) -> String {
    let figures = &product.figures;
    let mut text = format!("cost: {} qubits, {} gates, depth {}", figures.qubits, figures.gates, figures.depth);
    if product.level >= Level::CliffordT {
        text += &format!(", T-count {}, T-depth {}", figures.t_count, figures.t_depth);
    }
    text + &format!(", {} ANDs", product.and_count)
}
