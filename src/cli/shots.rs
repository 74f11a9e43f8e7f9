//! `tallymark shots FILE RESULTS`: measured bit strings back to answers, checked, and compared with the plan.

use std::io::Read;
use std::path::PathBuf;

use clap::Args;
use num_bigint::BigUint;

use crate::circuit::{Level, Mark};
use crate::cli::exit::Exit;
use crate::cli::render::Failure;
use crate::cli::{Global, Outcome, input, plan, progress};
use crate::diag::{Code, Diagnostic};
use crate::judge::count::Counted;
use crate::pipeline;
use crate::places::Places;
use crate::report::{json, shots as report};
use crate::search::shots::{self, Format, Order, Predicted, Shots};
use crate::search::{Advice, plan as planned};
use crate::source::Loaded;
use crate::span::Sources;

#[derive(Args)]
pub(super) struct Options {
    /// The problem: .tally, .cnf, .opb, .aag, .aig (also .gz, .xz, .zst), or - for standard input
    file: String,
    /// What was measured: plain lines, CSV or a JSON object of bit strings and counts; or - for standard input
    results: String,
    /// The places file of the circuit that was run [default: bit i is search[i]]
    #[arg(long, value_name = "FILE")]
    places: Option<PathBuf>,
    /// Which end of a string is search[0]: last (as OpenQASM prints a register) or first
    #[arg(long, value_name = "END", default_value = "last", value_parser = order)]
    zero: Order,
    /// How the results are laid out: lines, csv or json [default: recognised]
    #[arg(long, value_name = "LAYOUT", value_parser = format)]
    format: Option<Format>,
    /// Which of several registers in a string is the search, counted from 1 on the left [default: by its length]
    #[arg(long, value_name = "NUMBER")]
    register: Option<usize>,
    /// The iterations that were run [default: those of the plan]
    #[arg(long, value_name = "NUMBER", value_parser = plan::number)]
    iterations: Option<BigUint>,
    /// Compare with the plan for this many marked states instead of counting them
    #[arg(long, value_name = "NUMBER", value_parser = plan::number)]
    count: Option<BigUint>,
    /// The confidence of the interval and of the test
    #[arg(long, value_name = "CHANCE", default_value_t = 0.99, value_parser = plan::inner_chance)]
    confidence: f64,
    /// Print this many answers, the most frequent first
    #[arg(long, value_name = "NUMBER", default_value_t = 20)]
    list: usize,
}

pub(super) fn run(global: &Global, options: &Options) -> Outcome {
    if options.file == "-" && options.results == "-" {
        return Err(Failure::usage(one_input()));
    }
    let (loaded, mut sources) = input::load(global, &options.file)?;
    input::refuse_empty(&loaded, &sources)?;
    let places = input::places(options.places.as_deref(), &loaded, &sources)?;
    let shots = read(options, &places, &mut sources)?;
    let checked =
        shots::check(&loaded.problem, &places, &shots).map_err(|error| Failure::stage(&error.into(), &sources))?;
    let (predicted, counted) = predict(global, options, &loaded, &places, &sources)?;
    let known = predicted.is_some();
    let predicted = predicted.unwrap_or_else(|| anything(options));
    let comparison = shots::compare(checked.hits, checked.total, &predicted, options.confidence);
    let exit = match () {
        () if comparison.contradicts => Exit::No,
        () if !known => Exit::Unfinished,
        () => Exit::Done,
    };
    let advice = if known { Vec::new() } else { vec![Advice::marked_unknown()] };
    let found = report::Found { checked: &checked, predicted: known.then_some(&predicted), comparison: &comparison };
    if !global.json {
        return Ok((exit, report::text(&loaded, &found, &advice, options.list)));
    }
    let mut object = json::envelope("shots", &loaded, &sources, exit == Exit::Unfinished);
    if let Some(counted) = &counted {
        object.insert("tally".to_owned(), json::tally_json(counted));
    }
    object.insert("shots".to_owned(), report::json(&loaded.problem, &found, options.list));
    object.insert("advice".to_owned(), serde_json::to_value(&advice).expect("plain data"));
    Ok((exit, json::print(object)))
}

fn read(options: &Options, places: &Places, sources: &mut Sources) -> Result<Shots, Box<Failure>> {
    let mut bytes = Vec::new();
    let read = match options.results.as_str() {
        "-" => std::io::stdin().lock().read_to_end(&mut bytes),
        path => std::fs::File::open(path).and_then(|mut file| file.read_to_end(&mut bytes)),
    };
    let text = read.map_err(|error| error.to_string()).and_then(|_| {
        String::from_utf8(bytes).map_err(|error| format!("not UTF-8 from byte {} on", error.utf8_error().valid_up_to()))
    });
    let text = text.map_err(|error| {
        let message = format!("the results cannot be read: {error}");
        let diagnostic = Diagnostic::error(Code("F093"), message)
            .in_file(&options.results)
            .expected("a text of bit strings, with or without counts");
        Failure::input(vec![diagnostic], sources)
    })?;
    let reading = shots::Options {
        width: places.search_len(),
        order: options.zero,
        format: options.format,
        register: options.register,
    };
    shots::read(&text, &options.results, sources, &reading).map_err(|messages| Failure::input(messages, sources))
}

/// What the plan says, where the number of marked states is known.
fn predict(
    global: &Global,
    options: &Options,
    loaded: &Loaded,
    places: &Places,
    sources: &Sources,
) -> Result<(Option<Predicted>, Option<Counted>), Box<Failure>> {
    let space = Counted::space(places);
    let predicted = |marked: &BigUint| {
        let iterations = options.iterations.clone().unwrap_or_else(|| planned::peak::first_peak(&space, marked));
        Predicted::after(&space, marked, iterations)
    };
    if let Some(marked) = &options.count {
        return match *marked <= space {
            true => Ok((Some(predicted(marked)), None)),
            false => Err(Failure::usage(too_many(marked, &space))),
        };
    }
    let (budget, line) = progress::budget(global);
    let settings = input::settings(global, Level::Toffoli, Mark::Phase);
    let counted =
        pipeline::count(&loaded.problem, places, settings, &budget).map_err(|error| Failure::stage(&error, sources))?;
    drop(line);
    Ok((counted.marked().map(predicted), Some(counted)))
}

/// The prediction that nothing contradicts.
fn anything(options: &Options) -> Predicted {
    Predicted { low: 0.0, high: 1.0, iterations: options.iterations.clone().unwrap_or_default(), floor: None }
}

fn too_many(marked: &BigUint, space: &BigUint) -> Diagnostic {
    Diagnostic::error(Code("U002"), "more states are marked than there are")
        .found(format!("--count {marked}"))
        .expected(format!("at most {space}, the size of the start state"))
}

fn one_input() -> Diagnostic {
    Diagnostic::error(Code("U010"), "the problem and the results cannot both come from standard input")
        .found("- -")
        .expected("at least one of them in a file")
}

fn order(text: &str) -> Result<Order, String> {
    match text {
        "last" => Ok(Order::ZeroLast),
        "first" => Ok(Order::ZeroFirst),
        _ => Err("expected last or first".to_owned()),
    }
}

fn format(text: &str) -> Result<Format, String> {
    match text {
        "lines" => Ok(Format::Lines),
        "csv" => Ok(Format::Csv),
        "json" => Ok(Format::Json),
        _ => Err("expected lines, csv or json".to_owned()),
    }
}
