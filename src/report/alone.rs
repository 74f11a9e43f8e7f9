//! Circuits without a problem: what one marks, and how two compare, as text and as data.

use serde_json::{Value, json};

use crate::judge::audit::alone::{Form, Marks};
use crate::judge::audit::{How, Outcome, Verdict};
use crate::report::summary::line;

/// What a circuit marks, as text.
pub fn marks(marks: &Marks) -> String {
    let form = match marks.form {
        Form::Phase => "by a sign",
        Form::Bit => "by flipping mark",
    };
    let outcome = match marks.outcome {
        Outcome::Equal => "an oracle",
        Outcome::Differs => "NO ORACLE",
        Outcome::Undecided => "undecided",
    };
    let mut text = line("audit", format!("{outcome} ({}; {} inputs)", how(marks.how), marks.inputs));
    text += &line("marks", format!("{} of {} values of search, {form}", marks.marked, marks.inputs));
    for value in &marks.first {
        text += &line("", value);
    }
    if marks.marked > marks.first.len() as u128 {
        text += &line("", "and more");
    }
    if let Some((value, why)) = &marks.fault {
        text += &line("witness", value);
        text += &line("got", why);
    }
    marks.notes.iter().for_each(|note| text += &line("", note));
    text
}

/// The same as data.
pub fn marks_json(marks: &Marks) -> Value {
    let witness = marks
        .fault
        .as_ref()
        .map(|(value, why)| json!({ "bits": value.to_string(), "values": null, "expected": "an oracle", "got": why }));
    json!({
        "verdict": marks.outcome,
        "how": marks.how,
        "inputs": marks.inputs.to_string(),
        "work_clean": marks.work_clean,
        "mark": marks.form,
        "marked": marks.marked.to_string(),
        "first": marks.first.iter().map(ToString::to_string).collect::<Vec<_>>(),
        "witness": witness,
        "notes": marks.notes,
    })
}

/// How two circuits compare, as text.
pub fn comparison(verdict: &Verdict) -> String {
    let outcome = match verdict.outcome {
        Outcome::Equal => "equal",
        Outcome::Differs => "DIFFERS",
        Outcome::Undecided => "undecided: no difference found",
    };
    let mut text = line("compare", format!("{outcome} ({}; {} inputs)", how(verdict.how), verdict.inputs));
    if let Some(witness) = &verdict.witness {
        text += &line("witness", &witness.bits);
        text += &line("expected", &witness.expected);
        text += &line("got", &witness.got);
    }
    verdict.notes.iter().for_each(|note| text += &line("", note));
    text
}

/// The same as data.
pub fn comparison_json(verdict: &Verdict) -> Value {
    let witness = verdict.witness.as_ref().map(|witness| {
        json!({
            "bits": witness.bits.to_string(),
            "values": null,
            "expected": witness.expected,
            "got": witness.got,
        })
    });
    json!({
        "verdict": verdict.outcome,
        "how": verdict.how,
        "inputs": verdict.inputs.to_string(),
        "work_clean": verdict.work_clean,
        "witness": witness,
        "notes": verdict.notes,
    })
}

fn how(how: How) -> &'static str {
    match how {
        How::Exhaustive => "every input, gate by gate",
        How::Superposition => "every input in superposition",
        How::Proof => "by proof",
        How::Symbolic => "by structure",
        How::Sample => "drawn inputs",
    }
}
