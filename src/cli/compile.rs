//! `tallymark compile FILE`: the oracle, or with `--whole` the search circuit.

use std::path::{Path, PathBuf};

use clap::Args;

use crate::circuit::{Figures, Level, Mark, Product};
use crate::cli::exit::Exit;
use crate::cli::render::Failure;
use crate::cli::{Global, Outcome, course, input, limits, progress, texts, turns};
use crate::diag::{Code, Diagnostic};
use crate::judge::count::Counted;
use crate::pipeline::{self, CheckedPass, Settings};
use crate::places::{Part, Places};
use crate::report::header::header;
use crate::report::places::places_json;
use crate::report::{self, files, json, summary};
use crate::search::course::Course;
use crate::source::Loaded;
use crate::span::Sources;

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
    /// of some), or cheapest (of these, by the T gates of the whole search) [default: cheapest with --whole; strings for an oracle alone, and with --any]
    #[arg(long, value_name = "NAME", value_parser = input::start)]
    start: Option<input::Wanted>,
    /// List all circuits found of which none is better than another; with -o a picture of them in SVG
    #[arg(long, conflicts_with_all = ["whole", "qubits", "t_count", "depth"])]
    front: bool,
    /// Compare the network before every pass with the one after it, by running inputs and by refutation
    #[arg(long)]
    check_passes: bool,
    /// Where the circuit goes; - is standard output. The places file is written beside it [default: -]
    #[arg(short, long, value_name = "FILE")]
    output: Option<String>,
    #[command(flatten)]
    limits: limits::Options,
    #[command(flatten)]
    turns: turns::Options,
    #[command(flatten)]
    texts: texts::Options,
    #[command(flatten)]
    search: course::Options,
}

pub(super) fn run(global: &Global, options: &Options) -> Outcome {
    let (loaded, sources) = input::load(global, &options.file)?;
    input::refuse_empty(&loaded, &sources)?;
    if options.whole && options.mark == Mark::Bit {
        return Err(Failure::usage(whole_needs_phase()));
    }
    let limits = options.limits.limits(options.level)?;
    let (budget, line) = progress::budget(global);
    let settings = input::settings(global, options.level, options.mark);
    let stage = |error| Failure::stage(&error, &sources);
    let places =
        input::places_from(global, &loaded, input::wanted(global, options.start, options.whole), settings, &budget)
            .map_err(stage)?;
    if options.front {
        let front = pipeline::front(&loaded.problem, &places, settings, &budget).map_err(stage)?;
        drop(line);
        return show_front(global, options, &loaded, &sources, &front);
    }
    let (mut counted, mut chosen) = (None, None);
    if options.whole {
        let (course, tally) = course::course(&loaded, &places, settings, &options.search, &budget, &sources)?;
        (chosen, counted) = (Some(course), tally);
    }
    let mark = if chosen.as_ref().is_some_and(Course::needs_bit_oracle) { Mark::Bit } else { options.mark };
    let settings = Settings { mark, ..settings };
    let turn = options.turns.turn(options.mark, options.whole)?;
    let mut product = match turn {
        Some(turn) => pipeline::turned(&loaded.problem, &places, settings, turn, &limits, &budget),
        None => pipeline::oracle_within(&loaded.problem, &places, settings, &limits, &budget),
    }
    .map_err(stage)?;
    let passes = match options.check_passes {
        true => pipeline::check_passes(&loaded.problem, &places, global.seed, &budget).map_err(stage)?,
        false => Vec::new(),
    };
    if let Some(course) = &chosen {
        product = match course {
            Course::Plain(iterations) => pipeline::search_from(&places.start, &product, &(*iterations).into(), &limits),
            course => pipeline::course(&product, &places.start, course),
        }
        .map_err(stage)?;
    }
    drop(line);
    options.texts.check(&product)?;
    let mut header = header(&loaded, &places, &product, counted.as_ref());
    let said = [global.restrict.in_words(), chosen.as_ref().map(course::in_words), start_in_words(&places)];
    said.into_iter().flatten().for_each(|line| header.insert(3, line));
    header.extend(passes.iter().map(checked));
    let lines: String = passes.iter().map(|pass| format!("\n{}", checked(pass))).collect();
    let figures = summary::circuit(&product) + &lines;
    match options.output.as_deref() {
        None if global.json => {}
        None | Some("-") if global.json => return Err(Failure::usage(one_output())),
        None | Some("-") => {
            // Straight to where it goes: a large circuit is a larger text.
            let mut out = std::io::stdout().lock();
            let written = options.texts.write(&product, &header, (&loaded, &sources), &mut out);
            let exit = match written {
                // A reader that went away is a quiet success.
                Err(error) if error.kind() != std::io::ErrorKind::BrokenPipe => Exit::Input,
                _ => Exit::Done,
            };
            return Ok((exit, String::new()));
        }
        Some(path) => {
            let path = Path::new(path);
            files::write_whole(path, |out| options.texts.write(&product, &header, (&loaded, &sources), out))
                .and_then(|()| pipeline::write_json(&places_path(path), &places_json(&loaded, &places)))
                .map_err(|error| Failure::stage(&error.into(), &sources))?;
        }
    }
    if !global.json {
        return Ok((Exit::Done, figures));
    }
    let mut object = json::envelope("compile", &loaded, &sources, false);
    object.insert("narrowing".to_owned(), json::narrowing_json(&loaded.problem, &places));
    object.insert("circuit".to_owned(), json::circuit_json(&product));
    if options.check_passes {
        let pass = |pass: &CheckedPass| {
            serde_json::json!({
                "name": pass.name,
                "ands_before": pass.before,
                "ands_after": pass.after,
                "shown": pass.shown.to_string(),
            })
        };
        object.insert("passes".to_owned(), passes.iter().map(pass).collect());
    }
    object.insert("start".to_owned(), start_in_words(&places).into());
    object.insert("course".to_owned(), chosen.as_ref().map(course::in_words).into());
    object.insert("file".to_owned(), options.output.clone().into());
    Ok((Exit::Done, json::print(object)))
}

fn checked(pass: &CheckedPass) -> String {
    let CheckedPass { name, before, after, shown } = pass;
    format!("pass {name}: {before} to {after} ANDs, {shown}")
}

fn show_front(global: &Global, options: &Options, loaded: &Loaded, sources: &Sources, front: &[Product]) -> Outcome {
    let figures: Vec<Figures> = front.iter().map(|product| product.figures).collect();
    if let Some(path) = options.output.as_deref().filter(|path| *path != "-") {
        let picture = report::front::picture(options.level, &figures);
        files::write_whole(Path::new(path), |out| out.write_all(picture.as_bytes()))
            .map_err(|error| Failure::stage(&error.into(), sources))?;
    }
    if !global.json {
        return Ok((Exit::Done, report::front::table(options.level, &figures)));
    }
    let mut object = json::envelope("compile", loaded, sources, false);
    object.insert("front".to_owned(), report::front::json(options.level, &figures));
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
