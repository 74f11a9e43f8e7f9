//! An answer of the planner as text and as the `plan` object of the JSON contract.

use std::fmt::Display;

use serde_json::{Map, Value, json};

use crate::report::json::plan_json;
use crate::report::summary::{advice_lines, line, plan_lines};
use crate::search::number::{Wide, in_words};
use crate::search::plan::collect::FindAll;
use crate::search::plan::fixed_point::FixedPoint;
use crate::search::plan::schedule::{Expected, Schedule, Stop};
use crate::search::plan::split::Split;
use crate::search::plan::{Answer, Details, Known, NoiseFigures};

/// Sequences of more phases, and schedules of more widths, are not listed.
const LISTED: usize = 4096;

/// `plan`: the common members, those of the aim, and `noise`, `split` and `find_all` where they were asked for.
pub fn answer_json(answer: &Answer) -> Value {
    let outline = &answer.outline;
    let mut object = to_object(json!({
        "aim": outline.aim,
        "iterations": in_words(&outline.iterations),
        "success": outline.success_low,
        "success_low": outline.success_low,
        "success_high": outline.success_high,
        "expected_oracle_calls": outline.expected_oracle_calls,
    }));
    object.extend(details(&answer.details));
    object.extend(to_object(json!({
        "space": in_words(&answer.space),
        "advice": outline.advice,
        "confidence": answer.confidence,
        "runs_for_confidence": answer.runs,
    })));
    let mut put = |name: &str, value: Option<Value>| value.map(|value| object.insert(name.to_owned(), value));
    put("noise", answer.noise.as_ref().map(plain));
    put("split", answer.split.as_ref().map(plain));
    put("find_all", answer.find_all.as_ref().map(plain));
    Value::Object(object)
}

fn plain(value: impl serde::Serialize) -> Value {
    serde_json::to_value(value).expect("plain data")
}

fn to_object(value: Value) -> Map<String, Value> {
    match value {
        Value::Object(map) => map,
        _ => unreachable!("the figures of a plan are an object"),
    }
}

/// The members of the aim.
fn details(details: &Details) -> Map<String, Value> {
    match details {
        Details::Plain(plan) => {
            let mut object = to_object(plan_json(plan));
            object.insert("marked".to_owned(), in_words(&plan.marked).into());
            object
        }
        Details::Certainty(tuned) => to_object(plain(tuned)),
        Details::Interval(found) => to_object(plain(found)),
        Details::FixedPoint(sequence) => {
            let mut object = to_object(plain(sequence));
            let phases = sequence.phases().filter(|phases| phases.len() <= LISTED);
            object.insert("phases".to_owned(), phases.map(plain).into());
            object
        }
        Details::Schedule(schedule, stop, expected) => {
            let mut object = to_object(plain(stop));
            object.insert("rising_stages".to_owned(), schedule.rising_stages().into());
            object.insert("widths".to_owned(), widths(schedule).into());
            object.insert("expected".to_owned(), expected.map(plain).into());
            object
        }
        Details::Estimation(estimation) => {
            let mut object = to_object(plain(estimation));
            object.insert("iterations_of_a_run".to_owned(), estimation.iterations.to_string().into());
            // The common member is about the whole job.
            object.insert("iterations".to_owned(), estimation.all_iterations.to_string().into());
            object
        }
        Details::NothingMarked => Map::new(),
    }
}

/// The widths of the rising stages and then the one that is repeated, where these are not too many.
fn widths(schedule: &Schedule) -> Option<Vec<String>> {
    let rising = schedule.rising_stages();
    (rising < LISTED as u64).then(|| (0..=rising).map(|stage| schedule.width(stage).to_string()).collect())
}

/// The answer in lines of text.
pub fn answer_text(answer: &Answer) -> String {
    let outline = &answer.outline;
    let mut text = line("aim", outline.aim.name());
    text += &match &answer.details {
        Details::Plain(plan) => plan_lines(Some(plan)),
        _ => line("marked", known(answer)) + &line("iterations", in_words(&outline.iterations)),
    };
    text += &match &answer.details {
        Details::Plain(_) => String::new(),
        Details::Certainty(tuned) => {
            line("success", "1, with these phases and exactly this count")
                + &line("phase", format!("{:.12} of oracle and reflection; or, instead of tuned phases,", tuned.phase))
                + &line("", format!("one more qubit turned by RY of the same angle (sine {:.12})", tuned.rotation_sine))
        }
        Details::Interval(found) => line(
            "success",
            format!(
                "at least {:.9} ({:.9} at the lower end, {:.9} at the upper)",
                found.worst, found.success_at_low, found.success_at_high
            ),
        ),
        Details::FixedPoint(sequence) => fixed_point(sequence),
        Details::Schedule(schedule, stop, expected) => stages(schedule, stop, *expected),
        Details::Estimation(estimation) => {
            line("register", format!("{} qubits, {} points", estimation.register, in_words(&estimation.points)))
                + &line("runs", format!("{}, of which the middle estimate is taken", estimation.runs))
                + &line("error", format!("at most {:.3e}", estimation.error))
        }
        Details::NothingMarked => line("success", 0),
    };
    if let (Some(calls), false) = (outline.expected_oracle_calls, matches!(answer.details, Details::Plain(_))) {
        text += &line("calls", format!("{calls:.3} oracle calls on average"));
    }
    if let Some(runs) = answer.runs {
        text += &line("runs", format!("{runs} for a solution with confidence {}", answer.confidence));
    }
    text += &answer.noise.as_ref().map_or_else(String::new, |figures| noise(figures, answer.confidence));
    text += &answer.split.as_ref().map_or_else(String::new, split);
    text += &answer.find_all.as_ref().map_or_else(String::new, find_all);
    text + &advice_lines(&outline.advice)
}

fn known(answer: &Answer) -> String {
    let of = format!("of {} states", in_words(&answer.space));
    match &answer.known {
        Known::Exactly(marked) => format!("{} {of}", in_words(marked)),
        Known::Between(low, high) => format!("{} to {} {of}", in_words(low), in_words(high)),
        Known::Nothing => format!("unknown {of}"),
    }
}

fn fixed_point(sequence: &FixedPoint) -> String {
    let promised = sequence.promised_from;
    line("success", format!("at least {} for every share of marked states from {promised} on", 1.0 - sequence.failure))
        + &line("phases", "one pair an iteration; --json lists them")
}

fn stages(schedule: &Schedule, stop: &Stop, expected: Option<Expected>) -> String {
    let stages = format!("{} rising, then {} of the full width", schedule.rising_stages(), stop.saturated_stages);
    let mut text = line("stages", stages);
    let full = schedule.width(schedule.rising_stages());
    text += &line("", format!("each draws its iterations below its width; the full width is {full}"));
    text += &line("", format!("{:.3} iterations on average if nothing is marked", stop.iterations_if_none));
    if let Some(expected) = expected {
        text += &line("runs", format!("{:.3} on average until one succeeds", expected.measurements));
    }
    text
}

fn noise(figures: &NoiseFigures, confidence: f64) -> String {
    let best = figures.highest_success;
    let work = figures.least_work;
    let share = |success: Wide| format!("success {success:.9}");
    let mut text = line("noise", format!("{} per iteration", figures.error));
    text += &line("", format!("highest success after {} iterations: {}", best.iterations, share(best.success)));
    let least = format!("{} iterations: {}, work {:.3}", work.iterations, share(work.success), work.work);
    text += &line("", format!("least work with {least}"));
    if let Some(runs) = figures.runs {
        text += &line("", format!("{runs} runs of the former for a solution with confidence {confidence}"));
    }
    text + &match figures.break_even {
        Some(error) => line("", format!("a search pays below an error of {error:.6e}")),
        None => line("", "a search pays at every error"),
    }
}

fn split(split: &Split) -> String {
    let figures: [(&str, &dyn Display); 2] =
        [("bits guessed", &split.guessed_bits), ("iterations a run", &split.iterations)];
    let first: Vec<String> = figures.iter().map(|(name, value)| format!("{value} {name}")).collect();
    line("split", first.join(", "))
        + &line("", format!("success {:.9} of a run where there is something to find", split.success))
        + &line("", format!("{:.3} rounds, time {:.3}, work {:.3} on average", split.rounds, split.time, split.work))
}

fn find_all(all: &FindAll) -> String {
    let sure = all.successes_for_99_percent;
    line("find all", format!("{:.3} successes on average, at most {sure} for all with confidence 0.99", all.successes))
        + &line("", format!("work {:.3} by repeating one search", all.work_repeating))
        + &line("", format!("work {:.3} by excluding what was found", all.work_excluding))
}
