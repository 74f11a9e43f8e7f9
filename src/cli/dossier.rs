//! `tallymark dossier FILE`: the main job.

use std::path::{Path, PathBuf};

use clap::Args;

use crate::circuit::{Level, Mark};
use crate::cli::exit::Exit;
use crate::cli::render::Failure;
use crate::cli::{Global, Outcome, input, limits, progress};
use crate::judge::audit::Outcome as Found;
use crate::pipeline;
use crate::places::Places;
use crate::report::dossier::Dossier;
use crate::report::{files, json, objective, start, summary};
use crate::source::Loaded;
use crate::span::Sources;

#[derive(Args)]
pub(super) struct Options {
    /// The problem: .tally, .cnf, .opb, .aag, .aig (also .gz, .xz, .zst), or - for standard input
    file: String,
    /// The gate set of the circuits: wide, toffoli, clifford-t or feedback
    #[arg(long, default_value = "toffoli", value_parser = input::level)]
    level: Level,
    /// How the oracle marks: phase or bit; the search always has a phase oracle
    #[arg(long, default_value = "phase", value_parser = input::mark)]
    mark: Mark,
    /// The start state: strings (all of them), domains (of each variable its own values), groups (besides, exactly so many
    /// of some), or cheapest (of these, by the T gates of the whole search) [default: cheapest; strings with --any]
    #[arg(long, value_name = "NAME", value_parser = input::start)]
    start: Option<input::Wanted>,
    /// The objective too: its best value with the proof, the thresholds with their tallies, and what a search for the best
    /// value takes
    #[arg(long)]
    objective: bool,
    /// The folder to write [default: out/NAME]
    #[arg(short, long, value_name = "DIR")]
    output: Option<PathBuf>,
    #[command(flatten)]
    limits: limits::Options,
}

pub(super) fn run(global: &Global, options: &Options) -> Outcome {
    let (loaded, sources) = input::load(global, &options.file)?;
    let folder = options.output.clone().unwrap_or_else(|| Path::new("out").join(name(&options.file)));
    let limits = options.limits.limits(options.level)?;
    let (budget, line) = progress::budget(global);
    let settings = input::settings(global, options.level, options.mark);
    let stage = |error| Failure::stage(&error, &sources);
    let wanted = input::wanted(global, options.start, true);
    let (places, starts) = input::places_and_prices(global, &loaded, wanted, settings, &budget).map_err(stage)?;
    let mut dossier =
        pipeline::dossier(&loaded, &places, starts, &folder, settings, &limits, &budget).map_err(stage)?;
    dossier.advice.extend(start::advice(&dossier.starts, wanted.name()));
    let ladder = match options.objective {
        true => Some(pipeline::ladder(&loaded.problem, &places, settings, &budget).map_err(stage)?),
        false => None,
    };
    drop(line);
    let exit = exit_of(&dossier);
    let mut report = report(&loaded, &sources, &places, &dossier, exit);
    let mut text = summary::dossier(&loaded, &places, &dossier, &folder);
    if let Some(ladder) = &ladder {
        report["objective"] = objective::json(ladder);
        text = format!("{}\n{text}", objective::text(&loaded, ladder));
    }
    write(&folder, &report, &text).map_err(|error| Failure::stage(&error.into(), &sources))?;
    Ok((exit, if global.json { format!("{report:#}\n") } else { text }))
}

fn write(folder: &Path, report: &serde_json::Value, text: &str) -> Result<(), files::WriteError> {
    pipeline::write_json(&folder.join("report.json"), report)?;
    files::write_whole(&folder.join("summary.txt"), |out| out.write_all(text.as_bytes()))
}

/// The name of the problem without its folder and endings: `buoy-payload`.
fn name(file: &str) -> String {
    let base = Path::new(file).file_name().map_or_else(|| "stdin".into(), |name| name.to_string_lossy());
    let stem = base.split('.').find(|part| !part.is_empty()).unwrap_or("problem");
    if stem == "-" { "stdin".to_owned() } else { stem.to_owned() }
}

/// A circuit of our own that differs is a fault of ours, not an answer.
fn exit_of(dossier: &Dossier) -> Exit {
    let oracle = dossier.oracle.as_ref().ok().map(|judged| judged.verdict.outcome);
    let search = dossier.search.as_ref().map(|judged| judged.verdict.outcome);
    if [oracle, search].contains(&Some(Found::Differs)) {
        Exit::Fault
    } else if oracle == Some(Found::Undecided) || dossier.counted.is_partial() {
        Exit::Unfinished
    } else {
        Exit::Done
    }
}

fn report(loaded: &Loaded, sources: &Sources, places: &Places, dossier: &Dossier, exit: Exit) -> serde_json::Value {
    let mut object = json::envelope("dossier", loaded, sources, exit == Exit::Unfinished);
    let mut put = |key: &str, value: serde_json::Value| object.insert(key.to_owned(), value);
    let oracle = dossier.oracle.as_ref().ok();
    put("tally", json::tally_json(&dossier.counted));
    put("narrowing", json::narrowing_json(&loaded.problem, places));
    put("circuit", oracle.map(|judged| json::circuit_json(&judged.product)).into());
    put("audit", oracle.map(|judged| json::audit_json(&loaded.problem, &judged.verdict)).into());
    put("levels", dossier.levels.iter().map(json::circuit_json).collect());
    put("plan", dossier.plan.as_ref().map(json::plan_json).into());
    put(
        "search",
        dossier.search.as_ref().map(|judged| json::search_product_json(&judged.product, &judged.verdict)).into(),
    );
    put("starts", start::json(&dossier.starts));
    put("advice", serde_json::to_value(&dossier.advice).expect("plain data"));
    object.into()
}

#[cfg(test)]
mod tests {
    #[test]
    fn folders_are_named_after_problems() {
        let names = ["problems/buoy-payload.tally", "a/b.cnf.gz", "-", "..", ".tally"].map(super::name);
        assert_eq!(names, ["buoy-payload", "b", "stdin", "stdin", "tally"]);
    }
}
