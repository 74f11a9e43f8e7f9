//! An objective as text and as the `objective` object: its best value, the thresholds, the search for it.

use std::fmt::Write;

use num_bigint::BigUint;
use num_traits::Zero;
use serde_json::{Value, json};

use crate::problem::Sense;
use crate::report::summary::{head, line};
use crate::search::plan::ladder::{Ladder, Optimal};
use crate::source::Loaded;

/// At most so many thresholds in text.
const ROWS: usize = 40;

fn sense(ladder: &Ladder) -> &'static str {
    match ladder.sense {
        Sense::Least => "least",
        Sense::Most => "most",
    }
}

/// `objective`.
pub fn json(ladder: &Ladder) -> Value {
    let first = ladder.rungs.first();
    let proof = ladder.optimal.map(|optimal| match optimal {
        Optimal::Range => json!({ "kind": "range" }),
        Optimal::Refuted { steps } => json!({ "kind": "refutation", "steps": steps }),
    });
    let rungs = ladder.rungs.iter().map(|rung| json!({ "threshold": rung.value, "count": rung.as_good.to_string() }));
    json!({
        "sense": sense(ladder),
        "best": first.map(|rung| rung.value),
        "multiplicity": first.map(|rung| rung.as_good.to_string()),
        "proof": proof,
        "solutions": ladder.solutions.to_string(),
        "thresholds": rungs.collect::<Vec<_>>(),
        "cut": ladder.is_cut,
        "search": ladder.search,
    })
}

/// The same in lines of text.
pub fn text(loaded: &Loaded, ladder: &Ladder) -> String {
    let mut text = head(loaded);
    let Some(best) = ladder.rungs.first() else {
        return text + &line("objective", "no solution, so nothing is best");
    };
    let number = if best.as_good == BigUint::from(1u32) { "one solution" } else { "so many solutions" };
    let many = if best.as_good == BigUint::from(1u32) { String::new() } else { format!(" ({})", best.as_good) };
    text += &line("objective", format!("{} {}, reached by {number}{many}", sense(ladder), best.value));
    text += &line(
        "proof",
        match ladder.optimal {
            Some(Optimal::Refuted { steps }) => {
                format!("no solution is better: a refutation of {steps} steps, checked")
            }
            _ => "the objective never takes a better value: its range ends here".to_owned(),
        },
    );
    if let Some(search) = &ladder.search {
        let expected = format!("{:.3} iterations in all, {:.3} thresholds", search.iterations, search.thresholds);
        text += &line("search", format!("{expected}; bound {:.1}, cut-off {:.1}", search.bound, search.cut_off));
    }
    _ = writeln!(text, "\n threshold  solutions at least as good");
    let mut before = BigUint::zero();
    for rung in ladder.rungs.iter().take(ROWS) {
        _ = writeln!(text, "{:>10}  {} (+{})", rung.value, rung.as_good, &rung.as_good - &before);
        before.clone_from(&rung.as_good);
    }
    if ladder.rungs.len() > ROWS || ladder.is_cut {
        _ = writeln!(text, "and worse values, up to all {} solutions", ladder.solutions);
    }
    text
}
