//! `tallymark count FILE`: the tally.

use clap::Args;

use crate::circuit::{Level, Mark};
use crate::cli::exit::Exit;
use crate::cli::render::Failure;
use crate::cli::{Global, Outcome, input, progress};
use crate::pipeline;
use crate::places::Places;
use crate::report::{json, summary};

#[derive(Args)]
pub(super) struct Options {
    /// The problem: .tally, .cnf, .opb, .aag, .aig (also .gz, .xz, .zst), or - for standard input
    file: String,
    /// Print this many solutions, lowest first
    #[arg(long, value_name = "NUMBER", default_value_t = 0)]
    list: usize,
}

pub(super) fn run(global: &Global, options: &Options) -> Outcome {
    let (loaded, sources) = input::load(global, &options.file)?;
    let (budget, line) = progress::budget(global);
    let settings = input::settings(global, Level::Toffoli, Mark::Phase);
    let places = Places::as_given(&loaded.problem);
    let counted = pipeline::count(&loaded.problem, &places, settings, &budget)
        .map_err(|error| Failure::stage(&error, &sources))?;
    drop(line);
    let exit = if counted.tally.exact().is_some() { Exit::Done } else { Exit::Unfinished };
    let partial = exit == Exit::Unfinished;
    let listed: Vec<_> = counted.tally.solutions.iter().take(options.list).collect();
    if !global.json {
        return Ok((exit, summary::count(&loaded, &counted, &listed)));
    }
    let mut object = json::envelope("count", &loaded, &sources, partial);
    object.insert("tally".to_owned(), json::tally_json(&counted));
    let solutions = listed.iter().map(|bits| json::solution_json(&loaded.problem, bits)).collect();
    object.insert("solutions".to_owned(), solutions);
    Ok((exit, json::print(object)))
}
