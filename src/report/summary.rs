//! Results as text for people: what a command prints and what `summary.txt` holds.

use std::fmt::Write;
use std::path::Path;

use comfy_table::{CellAlignment, Table, presets};

use crate::circuit::{Bounds, GIVEN, Level, Product};
use crate::diag::plural;
use crate::judge::audit::{How, Outcome, Phases, SearchVerdict, Verdict};
use crate::judge::count::Counted;
use crate::ledger::Finding;
use crate::places::Places;
use crate::problem::{Bits, Problem};
use crate::report::dossier::Dossier;
use crate::report::header::CAUTION;
use crate::report::json::{mark_name, t_of_a_rotation};
use crate::report::plan::answer_text;
use crate::report::start;
use crate::report::values::{CheckedFile, certificate_line};
use crate::search::number::in_words;
use crate::search::plan::Answer;
use crate::search::price::PRECISION;
use crate::search::{Advice, Plan};
use crate::source::Loaded;

/// The first lines: title, file, size.
pub(super) fn head(loaded: &Loaded) -> String {
    let problem = &loaded.problem;
    let title = problem.title.as_ref().map_or_else(String::new, |title| format!("{title}\n"));
    let sizes = [
        (problem.vars().len(), "variable", "variables"),
        (problem.bit_count(), "bit", "bits"),
        (problem.constraint_count(), "constraint", "constraints"),
    ];
    let sizes = sizes.map(|(number, one, many)| plural(number, one, many));
    format!("{title}{}: {}\n", loaded.file, sizes.join(", "))
}

/// One `name   value` line of a summary.
pub(super) fn line(name: &str, value: impl std::fmt::Display) -> String {
    format!("{name:<12}{value}\n")
}

/// The tally.
pub fn count(loaded: &Loaded, counted: &Counted, listed: &[&Bits]) -> String {
    let why = match counted.states {
        Some(_) => line("", "not solutions one for one: hidden bits are searched too, or one state stands for several"),
        None => String::new(),
    };
    head(loaded) + &tally_lines(counted) + &why + &solutions(&loaded.problem, listed)
}

/// The verdict on a certificate file, without a count of our own.
pub fn checked(loaded: &Loaded, checked: &CheckedFile) -> String {
    head(loaded) + &certificate_line(checked)
}

/// Solutions, one a line, behind an empty line.
pub fn solutions(problem: &Problem, listed: &[&Bits]) -> String {
    let mut text = if listed.is_empty() { String::new() } else { "\n".to_owned() };
    for bits in listed {
        _ = writeln!(text, "{}  {}", bits, values(problem, bits));
    }
    text
}

fn tally_lines(counted: &Counted) -> String {
    let mut text = line("tally", counted.tally.in_words("solution", "solutions"));
    if let Some(states) = &counted.states {
        text += &line("marked", states.in_words("marked state", "marked states"));
    }
    text + &line("space", format!("{} states", counted.space))
}

/// How many bits are searched, where others are computed.
pub fn narrowing_line(places: &Places) -> String {
    match places.computed.len() {
        0 => String::new(),
        computed => line("narrowing", format!("{} bits searched, {computed} computed from them", places.search_len())),
    }
}

/// A solution in the problem's own terms.
pub(super) fn values(problem: &Problem, bits: &Bits) -> String {
    let Some(values) = problem.decode(bits) else {
        return "(a code outside its domain)".to_owned();
    };
    let named = problem.vars().iter().zip(values);
    let all: Vec<String> = named
        .map(|((id, var), value)| format!("{}={}", problem.var_name(id), problem.value_name(var.domain, value)))
        .collect();
    all.join(" ")
}

/// What a circuit is and costs.
pub fn circuit(product: &Product) -> String {
    let what = if product.is_search() { "search" } else { "oracle" };
    let table = cost_table([product]);
    format!(
        "{} {what} at level {}\n{table}{}{}",
        mark_name(product.mark),
        product.level,
        rotations(product),
        bounds_line(product)
    )
}

/// What no exact oracle can go below, where that is known.
fn bounds_line(product: &Product) -> String {
    product.bounds.filter(|bounds| bounds.t_count > 0).map_or_else(
        String::new,
        |Bounds { degree, and_count, t_count }| {
            let (ands, gates) =
                (plural(and_count as usize, "AND", "ANDs"), plural(t_count as usize, "T gate", "T gates"));
            line("bounds", format!("no exact oracle has fewer than {ands} or {gates} (degree {degree})"))
        },
    )
}

/// What the rotations of a circuit cost, where it has some: no column counts them.
fn rotations(product: &Product) -> String {
    t_of_a_rotation(product).map_or_else(String::new, |each| {
        let number = product.figures.rotations;
        let words = format!("{number}, besides; {each:.0} T gates each where together they may err by {PRECISION}");
        line("rotations", words)
    })
}

/// A table of costs, one circuit a row.
fn cost_table<'a>(products: impl IntoIterator<Item = &'a Product>) -> String {
    let mut table = Table::new();
    table.load_style(presets::NOTHING);
    table.set_header(["level", "qubits", "ANDs", "T", "T-depth", "CX", "depth", "gates"]);
    for product in products {
        let figures = &product.figures;
        let has_t = product.level >= Level::CliffordT;
        let t = |number: u64| if has_t { number.to_string() } else { "-".to_owned() };
        table.add_row([
            product.level.to_string(),
            figures.qubits.to_string(),
            product.and_count.to_string(),
            t(figures.t_count),
            t(figures.t_depth),
            figures.cx_count.to_string(),
            figures.depth.to_string(),
            figures.gates.to_string(),
        ]);
    }
    for column in table.column_iter_mut().skip(1) {
        column.set_cell_alignment(CellAlignment::Right);
    }
    table.trim_fmt() + "\n"
}

/// The verdict on an oracle.
pub fn verdict(problem: &Problem, verdict: &Verdict) -> String {
    let how = match verdict.how {
        How::Symbolic => "by structure, all inputs at once",
        How::Exhaustive => "every input",
        How::Superposition => "every input in superposition, measurement outcomes drawn",
        How::Proof => "by proof",
        How::Sample => "known solutions, their neighbours, and drawn inputs",
    };
    let outcome = match verdict.outcome {
        Outcome::Equal => "equal",
        Outcome::Differs => "DIFFERS",
        Outcome::Undecided => "undecided: no difference found",
    };
    let inputs = match verdict.inputs {
        u128::MAX => format!("2^{} inputs", problem.bit_count()),
        inputs => format!("{inputs} inputs"),
    };
    let mut text = line("audit", format!("{outcome} ({how}; {inputs})"));
    if verdict.phases == Phases::Complement {
        text += &line("", "the complement is marked, which is a global sign");
    }
    if let Some(witness) = &verdict.witness {
        text += &line("witness", values(problem, &witness.bits));
        text += &line("expected", &witness.expected);
        text += &line("got", &witness.got);
    }
    for note in &verdict.notes {
        text += &line("", note);
    }
    text
}

/// The verdict on a whole search.
pub fn search_verdict(verdict: &SearchVerdict) -> String {
    let outcome = match verdict.outcome {
        Outcome::Equal => "equal",
        Outcome::Differs => "DIFFERS",
        Outcome::Undecided => "undecided",
    };
    let iterations = match verdict.iterations {
        GIVEN => "as many as given".to_owned(),
        iterations => iterations.to_string(),
    };
    let share = format!("{} of {iterations} iterations simulated", verdict.iterations_checked);
    let mut text = line("search", format!("{outcome} ({share}, success {:.9})", verdict.success));
    for note in &verdict.notes {
        text += &line("", note);
    }
    text
}

/// The plan, or why there is none. `loaded` is missing where the plan rests on numbers alone.
pub fn plan(loaded: Option<&Loaded>, answer: Option<&Answer>, advice: &[Advice]) -> String {
    let head = loaded.map_or_else(String::new, head);
    head + &answer.map_or_else(|| plan_lines(None) + &advice_lines(advice), answer_text)
}

pub(super) fn plan_lines(plan: Option<&Plan>) -> String {
    let Some(plan) = plan else {
        return line("plan", "none: the number of marked states is not known");
    };
    let exact = plan.success_exact.as_ref().map_or_else(String::new, |(n, d)| format!(" = {n}/{d}"));
    let mut text = line("marked", format!("{} of {} states", in_words(&plan.marked), in_words(&plan.space)));
    text += &line("iterations", in_words(&plan.iterations));
    text += &line("success", format!("{:.9}{exact}", plan.success));
    if let Some(calls) = plan.expected_oracle_calls {
        text += &line("calls", format!("{calls:.3} oracle calls on average, when failures are repeated"));
    }
    text
}

pub(super) fn advice_lines(advice: &[Advice]) -> String {
    advice.iter().map(|advice| line("advice", format!("{} [{}]", advice.text, advice.code))).collect()
}

/// What a ledger does not allow, as a table.
pub fn findings(findings: &[Finding]) -> String {
    if findings.is_empty() {
        return "it holds\n".to_owned();
    }
    let mut table = Table::new();
    table.load_style(presets::NOTHING);
    table.set_header(["problem", "what", "kept", "now"]);
    for finding in findings {
        table.add_row([&finding.file, &finding.what, &finding.kept, &finding.now]);
    }
    format!("IT DOES NOT HOLD\n{}\n", table.trim_fmt())
}

/// The summary of the main job.
pub fn dossier(loaded: &Loaded, places: &Places, dossier: &Dossier, folder: &Path) -> String {
    let mut text = head(loaded) + &tally_lines(&dossier.counted) + &narrowing_line(places);
    match &dossier.oracle {
        Ok(judged) => {
            let figures = &judged.product.figures;
            let mark = mark_name(judged.product.mark);
            text += &line("oracle", format!("{mark}, level {}, {} qubits", judged.product.level, figures.qubits));
            text += &bounds_line(&judged.product);
            text += &verdict(&loaded.problem, &judged.verdict);
        }
        Err(advice) => text += &line("oracle", format!("none: {}", advice.text)),
    }
    text += &plan_lines(dossier.plan.as_ref());
    if let Some(judged) = &dossier.search {
        text += &search_verdict(&judged.verdict);
        text += &rotations(&judged.product);
    }
    text += &start::lines(&dossier.starts);
    text += &advice_lines(&dossier.advice);
    if !dossier.levels.is_empty() {
        _ = write!(text, "\nThe oracle at every level\n{}", cost_table(&dossier.levels));
    }
    _ = write!(text, "\n{CAUTION}\nWritten to {}\n", folder.display());
    text
}
