//! `tallymark compile FILE`: the oracle, or with `--whole` the search circuit.

use std::path::{Path, PathBuf};

use clap::Args;

use crate::circuit::{Level, Mark, Product, qasm};
use crate::cli::exit::Exit;
use crate::cli::render::Failure;
use crate::cli::{Global, Outcome, course, input, progress};
use crate::diag::{Code, Diagnostic};
use crate::judge::count::Counted;
use crate::pipeline::{self, Settings};
use crate::places::{Part, Places};
use crate::report::header::header;
use crate::report::places::places_json;
use crate::report::{files, json, summary};
use crate::search::course::Course;
use crate::source::Loaded;

#[derive(Args)]
pub(super) struct Options {
    /// The problem: .tally, .cnf, .opb, .aag, .aig (also .gz, .xz, .zst), or - for standard input
    file: String,
    /// The gate set: wide, toffoli, clifford-t or feedback
    #[arg(long, default_value = "toffoli", value_parser = input::level)]
    level: Level,
    /// How the oracle marks: phase or bit
    #[arg(long, default_value = "phase", value_parser = input::mark)]
    mark: Mark,
    /// The whole search: prepare, iterate, measure
    #[arg(long)]
    whole: bool,
    /// The start state: strings (all of them), domains (of each variable its own values), groups (besides, exactly so many
    /// of some), or cheapest (of these, by the T gates of the whole search)
    #[arg(long, value_name = "NAME", default_value = "strings", value_parser = input::start)]
    start: input::Wanted,
    #[command(flatten)]
    search: course::Options,
    /// Where the circuit goes; - is standard output. The places file is written beside it [default: -]
    #[arg(short, long, value_name = "FILE")]
    output: Option<String>,
}

pub(super) fn run(global: &Global, options: &Options) -> Outcome {
    let (loaded, sources) = input::load(global, &options.file)?;
    input::refuse_empty(&loaded, &sources)?;
    if options.whole && options.mark == Mark::Bit {
        return Err(Failure::usage(whole_needs_phase()));
    }
    let (budget, line) = progress::budget(global);
    let settings = input::settings(global, options.level, options.mark);
    let stage = |error| Failure::stage(&error, &sources);
    let places = input::places_from(&loaded, options.start, settings, &budget).map_err(stage)?;
    let (mut counted, mut chosen) = (None, None);
    if options.whole {
        let (course, tally) = course::course(&loaded, &places, settings, &options.search, &budget, &sources)?;
        (chosen, counted) = (Some(course), tally);
    }
    let mark = if chosen.as_ref().is_some_and(Course::needs_bit_oracle) { Mark::Bit } else { options.mark };
    let settings = Settings { mark, ..settings };
    let mut product = pipeline::oracle(&loaded.problem, &places, settings, &budget).map_err(stage)?;
    if let Some(course) = &chosen {
        product = match (course, places.start.parts()) {
            (Course::Plain(iterations), []) => pipeline::whole_search(&product, &(*iterations).into()),
            (course, _) => pipeline::course(&product, &places.start, course),
        }
        .map_err(stage)?;
    }
    drop(line);
    let mut header = header(&loaded, &places, &product, counted.as_ref());
    let said = [global.restrict.in_words(), chosen.as_ref().map(course::in_words), start_in_words(&places)];
    said.into_iter().flatten().for_each(|line| header.insert(3, line));
    let figures = summary::circuit(&product);
    match options.output.as_deref() {
        None if global.json => {}
        None | Some("-") if global.json => return Err(Failure::usage(one_output())),
        None | Some("-") => {
            let mut text = Vec::new();
            qasm::write::write(&product.circuit, &header, &mut text).expect("memory takes everything");
            return Ok((Exit::Done, String::from_utf8(text).expect("OpenQASM is text")));
        }
        Some(path) => write(Path::new(path), &loaded, &places, &product, &header)
            .map_err(|error| Failure::stage(&error.into(), &sources))?,
    }
    if !global.json {
        return Ok((Exit::Done, figures));
    }
    let mut object = json::envelope("compile", &loaded, &sources, false);
    object.insert("narrowing".to_owned(), json::narrowing_json(&loaded.problem));
    object.insert("circuit".to_owned(), json::circuit_json(&product));
    object.insert("start".to_owned(), start_in_words(&places).into());
    object.insert("course".to_owned(), chosen.as_ref().map(course::in_words).into());
    object.insert("file".to_owned(), options.output.clone().into());
    Ok((Exit::Done, json::print(object)))
}

/// The start state, where it is not all strings.
fn start_in_words(places: &Places) -> Option<String> {
    let parts = places.start.parts();
    let of = |part: &Part| match part {
        Part::Below { qubits, size } => format!("{size} codes on {} qubits", qubits.len()),
        Part::Weight { qubits, ones } => format!("{ones} of {} qubits", qubits.len()),
    };
    let list = || parts.iter().map(of).collect::<Vec<_>>().join(", ");
    (!parts.is_empty()).then(|| format!("start state: {} states: {}", Counted::space(places), list()))
}

fn write(
    path: &Path,
    loaded: &Loaded,
    places: &Places,
    product: &Product,
    header: &[String],
) -> Result<(), files::WriteError> {
    files::write_whole(path, |mut out| qasm::write::write(&product.circuit, header, &mut out))?;
    pipeline::write_json(&places_path(path), &places_json(loaded, places))
}

/// `S.places.json` beside `S.qasm`.
pub(super) fn places_path(circuit: &Path) -> PathBuf {
    circuit.with_extension("places.json")
}

fn whole_needs_phase() -> Diagnostic {
    Diagnostic::error(Code("U003"), "a whole search is built on a phase oracle")
        .found("--whole --mark bit")
        .expected("--whole with --mark phase")
}

fn one_output() -> Diagnostic {
    Diagnostic::error(Code("U004"), "the circuit and the JSON object cannot share standard output")
        .found("--json -o -")
        .expected("-o with the name of a file")
}
