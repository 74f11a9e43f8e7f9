//! `tallymark compile FILE`: the oracle, or with `--whole` the search circuit.

use std::path::{Path, PathBuf};

use clap::Args;
use num_bigint::BigUint;
use num_traits::Zero;

use crate::budget::Budget;
use crate::circuit::{Figures, Level, Mark, Product};
use crate::cli::exit::Exit;
use crate::cli::render::Failure;
use crate::cli::{Global, Outcome, input, limits, plan, progress, texts, turns};
use crate::diag::{Code, Diagnostic};
use crate::judge::count::Counted;
use crate::pipeline::{self, CheckedPass, Settings};
use crate::places::Places;
use crate::report::header::header;
use crate::report::places::places_json;
use crate::report::{self, files, json, summary};
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
    #[command(flatten)]
    limits: limits::Options,
    /// List all circuits found of which none is better than another; with -o a picture of them in SVG
    #[arg(long, conflicts_with_all = ["whole", "qubits", "t_count", "depth"])]
    front: bool,
    /// The whole search: prepare, iterate, measure
    #[arg(long)]
    whole: bool,
    /// With --whole: plan for this many marked states instead of counting them
    #[arg(long, value_name = "NUMBER", requires = "whole", value_parser = plan::number)]
    count: Option<BigUint>,
    #[command(flatten)]
    turns: turns::Options,
    #[command(flatten)]
    texts: texts::Options,
    /// Compare the network before every pass with the one after it, by running inputs and by refutation
    #[arg(long)]
    check_passes: bool,
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
    let limits = options.limits.limits(options.level)?;
    let (budget, line) = progress::budget(global);
    let settings = input::settings(global, options.level, options.mark);
    let stage = |error| Failure::stage(&error, &sources);
    let places = input::choose(global, &loaded, settings, &budget).map_err(stage)?;
    if options.front {
        let front = pipeline::front(&loaded.problem, &places, settings, &budget).map_err(stage)?;
        drop(line);
        return show_front(global, options, &loaded, &sources, &front);
    }
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
    let mut counted = None;
    if options.whole {
        let iterations;
        (iterations, counted) = planned(&loaded, &places, settings, options.count.as_ref(), &budget, &sources)?;
        product = pipeline::whole_search_within(&product, &iterations, &limits).map_err(stage)?;
    }
    drop(line);
    options.texts.check(&product)?;
    let mut header = header(&loaded, &places, &product, counted.as_ref());
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

/// `S.places.json` beside `S.qasm`.
pub(super) fn places_path(circuit: &Path) -> PathBuf {
    circuit.with_extension("places.json")
}

/// The planned iterations, for a number of marked states that is known from elsewhere or for the tally.
pub(super) fn planned(
    loaded: &Loaded,
    places: &Places,
    settings: Settings,
    count: Option<&BigUint>,
    budget: &Budget,
    sources: &Sources,
) -> Result<(BigUint, Option<Counted>), Box<Failure>> {
    let space = Counted::space(places);
    let (marked, counted) = if let Some(marked) = count {
        (Some(marked.clone()), None)
    } else {
        let counted = pipeline::count(&loaded.problem, places, settings, budget)
            .map_err(|error| Failure::stage(&error, sources))?;
        (counted.marked().cloned(), Some(counted))
    };
    match marked {
        Some(marked) if !marked.is_zero() && marked < space => {
            Ok((crate::search::plan(&space, &marked).iterations, counted))
        }
        Some(_) => Err(Failure::usage(nothing_to_find())),
        None => Err(Failure::unfinished(unknown_count(), sources)),
    }
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

fn nothing_to_find() -> Diagnostic {
    Diagnostic::error(Code("C091"), "no state or every state is marked, so a search finds nothing new")
        .expected("at least one marked and one unmarked state")
        .help("`tallymark plan` says more; compile without --whole gives the oracle")
}

fn unknown_count() -> Diagnostic {
    Diagnostic::error(Code("C092"), "the number of marked states is not known, so no iteration count follows")
        .help("allow more time with --time, or give the number with --count")
}
