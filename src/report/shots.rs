//! What shots showed, as text and as the `shots` object: the answers, and the hit rate against the plan.

use std::fmt::Write;

use serde_json::{Value, json};

use crate::problem::Problem;
use crate::report::json::values_json;
use crate::report::summary::{advice_lines, head, line, values};
use crate::search::Advice;
use crate::search::number::in_words;
use crate::search::shots::{Answer, Checked, Comparison, Predicted};
use crate::source::Loaded;

/// What shots showed.
#[derive(Clone, Copy, Debug)]
pub struct Found<'a> {
    /// The answers.
    pub checked: &'a Checked,
    /// What was predicted, where the number of marked states is known.
    pub predicted: Option<&'a Predicted>,
    /// The rate against it.
    pub comparison: &'a Comparison,
}

/// `shots`, with at most `list` answers.
pub fn json(problem: &Problem, found: &Found<'_>, list: usize) -> Value {
    let Found { checked, predicted, comparison } = found;
    let one = |answer: &Answer| {
        json!({
            "measured": answer.measured.to_string(),
            "bits": answer.bits.to_string(),
            "count": answer.count,
            "holds": answer.holds,
            "values": values_json(problem, &answer.bits),
        })
    };
    json!({
        "shots": checked.total,
        "hits": checked.hits,
        "solutions": checked.solutions,
        "strings": checked.answers.len(),
        "answers": checked.answers.iter().take(list).map(one).collect::<Vec<_>>(),
        "predicted": predicted.map(|predicted| json!({
            "iterations": in_words(&predicted.iterations),
            "success_low": predicted.low,
            "success_high": predicted.high,
            "floor": predicted.floor,
        })),
        "comparison": comparison,
    })
}

/// The same in lines of text.
pub fn text(loaded: &Loaded, found: &Found<'_>, advice: &[Advice], list: usize) -> String {
    let Found { checked, predicted, comparison } = found;
    let mut text = head(loaded);
    let solutions = if checked.solutions == 1 { "different solution" } else { "different solutions" };
    text +=
        &line("shots", format!("{}, of which {} hit {} {solutions}", checked.total, checked.hits, checked.solutions));
    let Comparison { rate, rate_low, rate_high, confidence, .. } = comparison;
    text += &line("rate", format!("{rate:.6}, between {rate_low:.6} and {rate_high:.6} with confidence {confidence}"));
    match predicted {
        Some(predicted) => text += &prediction(predicted, comparison),
        None => text += &line("plan", "none: the number of marked states is not known"),
    }
    text += &advice_lines(advice);
    if list > 0 {
        text.push('\n');
    }
    let shown = checked.answers.iter().take(list);
    let width = checked.answers.first().map_or(0, |answer| answer.count.to_string().len());
    for answer in shown {
        let mark = if answer.holds { "holds" } else { "fails" };
        _ = writeln!(
            text,
            "{:>width$}  {mark}  {}  {}",
            answer.count,
            answer.bits,
            values(&loaded.problem, &answer.bits)
        );
    }
    if checked.answers.len() > list {
        _ = writeln!(text, "and {} other strings", checked.answers.len() - list);
    }
    text
}

fn prediction(predicted: &Predicted, comparison: &Comparison) -> String {
    let iterations = in_words(&predicted.iterations);
    let mut text = line("plan", format!("success {:.9} after {iterations} iterations", predicted.high));
    let verdict = if comparison.contradicts { "CONTRADICT the plan" } else { "do not contradict the plan" };
    text += &line("verdict", format!("the results {verdict} (p-value {})", p_value(comparison.p_value)));
    let range = match (comparison.error_low, comparison.error_high) {
        (Some(low), Some(high)) => format!(", between {low:.6} and {high:.6}"),
        (Some(low), None) => format!(", at least {low:.6}"),
        _ => String::new(),
    };
    text + &match comparison.error_per_iteration {
        Some(error) => line("noise", format!("an error of {error:.6} per iteration would explain the rate{range}")),
        None if predicted.iterations.bits() == 0 => line("noise", "no iteration was run that could err"),
        None => line("noise", "no error per iteration explains the rate"),
    }
}

/// A p-value: as a decimal fraction while that says something.
fn p_value(value: f64) -> String {
    match value {
        0.0 => "below 1e-300".to_owned(),
        0.001.. => format!("{value:.3}"),
        _ => format!("{value:.1e}"),
    }
}
