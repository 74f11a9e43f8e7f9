//! Which ways of counting ran and how long, and what a plan makes of an interval; as JSON and as text.

use serde_json::{Value, json};

use crate::judge::count::Run;
use crate::report::summary::line;
use crate::search::number::in_words;
use crate::search::plan::tolerance::{ForPlan, Reported};

/// `ways`: in the order in which they ran.
pub fn ways_json(runs: &[Run]) -> Value {
    let way = |run: &Run| {
        json!({
            "method": run.method,
            "low": run.low.to_string(),
            "high": run.high.to_string(),
            "confidence": run.confidence,
            "seconds": run.time.as_secs_f64(),
        })
    };
    runs.iter().map(way).collect()
}

/// `for_plan`.
pub fn for_plan_json(met: &ForPlan) -> Value {
    json!({
        "margin": met.margin,
        "reached": met.is_reached(),
        "tolerance": met.tolerance,
        "iterations": met.reported.iterations.to_string(),
        "worst": met.reported.worst,
        "best": met.reported.best,
    })
}

/// The line on the ways that ran.
pub fn ways_line(runs: &[Run]) -> String {
    let one = |run: &Run| format!("{} {:.3} s", run.method, run.time.as_secs_f64());
    line("ways", runs.iter().map(one).collect::<Vec<_>>().join(", "))
}

/// The line on a plan's margin.
pub fn for_plan_line(met: &ForPlan) -> String {
    let Reported { iterations, worst, best } = &met.reported;
    let reached = if met.is_reached() { "within" } else { "NOT within" };
    let text = format!(
        "{} iterations, success at least {worst:.6} of {best:.6}: {reached} the margin {} (tolerance {:.4})",
        in_words(iterations),
        met.margin,
        met.tolerance,
    );
    line("for a plan", text)
}
