//! `tallymark ledger check|update DIR`: all problems of a folder against the expected tallies and costs.

use std::path::{Path, PathBuf};

use clap::{Args, Subcommand};
use serde_json::{Value, json};

use crate::circuit::{Level, Mark};
use crate::cli::exit::Exit;
use crate::cli::render::Failure;
use crate::cli::{Global, Outcome, input, progress};
use crate::diag::{Code, Diagnostic, plural};
use crate::ledger::{Entry, FILE_NAME, Finding, Ledger, compare, junit};
use crate::pipeline;
use crate::report::{files, json as contract, summary};
use crate::source::Format;
use crate::span::Sources;

#[derive(Args)]
pub(super) struct Options {
    #[command(subcommand)]
    task: Task,
}

#[derive(Subcommand)]
enum Task {
    /// Do the work of every problem again and hold it against the ledger
    Check {
        #[command(flatten)]
        folder: Folder,
        /// Write the result as JUnit XML too
        #[arg(long, value_name = "FILE")]
        junit: Option<PathBuf>,
        /// Let a cost grow by this many percent
        #[arg(long, value_name = "PERCENT", default_value_t = 0)]
        growth: u64,
    },
    /// Do the work and keep the result as what is expected from now on
    Update {
        #[command(flatten)]
        folder: Folder,
    },
}

#[derive(Args)]
struct Folder {
    /// The folder with the problems and their ledger
    folder: PathBuf,
    /// Also repeat the work of problems whose file and program version are those of the ledger
    #[arg(long)]
    all: bool,
    /// The start state of every problem: strings, domains, groups or cheapest [default: what the ledger has for it, else
    /// strings]
    #[arg(long, value_name = "NAME", value_parser = input::start)]
    start: Option<input::Wanted>,
}

pub(super) fn run(global: &Global, options: &Options) -> Outcome {
    match &options.task {
        Task::Update { folder } => {
            let kept = read_ledger(&folder.folder)?.unwrap_or_default();
            let now = read_folder(global, folder, &kept)?;
            pipeline::write_json(&folder.folder.join(FILE_NAME), &now.to_json())
                .map_err(|error| Failure::stage(&error.into(), &Sources::new()))?;
            Ok((Exit::Done, show(global, "update", &now, &[])))
        }
        Task::Check { folder, junit: xml, growth } => {
            let Some(kept) = read_ledger(&folder.folder)? else {
                return Err(Failure::usage(no_ledger(&folder.folder)));
            };
            let now = read_folder(global, folder, &kept)?;
            let findings = compare(&kept, &now, *growth);
            if let Some(path) = xml {
                let text = junit::junit(&now, &findings);
                files::write_whole(path, |out| out.write_all(text.as_bytes()))
                    .map_err(|error| Failure::stage(&error.into(), &Sources::new()))?;
            }
            let exit = if findings.is_empty() { Exit::Done } else { Exit::No };
            Ok((exit, show(global, "check", &now, &findings)))
        }
    }
}

/// The kept ledger, if the folder has one.
fn read_ledger(folder: &Path) -> Result<Option<Ledger>, Box<Failure>> {
    let path = folder.join(FILE_NAME);
    let failure = |message: String| {
        Failure::usage(
            Diagnostic::error(Code("L001"), message)
                .in_file(path.display().to_string())
                .expected("a ledger that `tallymark ledger update` wrote"),
        )
    };
    match std::fs::read_to_string(&path) {
        Ok(text) => Ledger::from_json(&text).map(Some).map_err(|error| failure(error.to_string())),
        Err(error) if error.kind() == std::io::ErrorKind::NotFound => Ok(None),
        Err(error) => Err(failure(format!("the ledger cannot be read: {error}"))),
    }
}

fn no_ledger(folder: &Path) -> Diagnostic {
    Diagnostic::error(Code("L002"), "the folder has no ledger yet")
        .in_file(folder.join(FILE_NAME).display().to_string())
        .help("`tallymark ledger update` makes one; look at it before you commit it")
}

/// Does the work of every problem of the folder; what the ledger has for the same file and program is taken from there.
fn read_folder(global: &Global, folder: &Folder, kept: &Ledger) -> Result<Ledger, Box<Failure>> {
    let mut now = Ledger::default();
    for name in problems(&folder.folder)? {
        let path = folder.folder.join(&name).display().to_string();
        let (loaded, sources) = input::load(global, &path)?;
        let kept_start = kept.entries.get(&name).and_then(|entry| input::start(&entry.start).ok());
        let start = folder.start.or(kept_start).unwrap_or(input::Wanted::STRINGS);
        let same = |entry: &&Entry| {
            let by_this = entry.version == env!("CARGO_PKG_VERSION") && entry.start == start.name();
            entry.sha256 == loaded.sha256 && by_this
        };
        let entry = match kept.entries.get(&name).filter(|entry| !folder.all && same(entry)) {
            Some(entry) => entry.clone(),
            None => {
                let (budget, line) = progress::budget(global);
                let settings = input::settings(global, Level::Toffoli, Mark::Phase);
                let stage = |error| Failure::stage(&error, &sources);
                let places = input::places_from(global, &loaded, start, settings, &budget).map_err(stage)?;
                let entry = pipeline::ledger_entry(&loaded, &places, start.name(), settings, &budget).map_err(stage)?;
                drop(line);
                entry
            }
        };
        now.entries.insert(name, entry);
    }
    Ok(now)
}

/// The problem files of a folder, sorted by name.
fn problems(folder: &Path) -> Result<Vec<String>, Box<Failure>> {
    let failure = |error: std::io::Error| {
        Failure::usage(
            Diagnostic::error(Code("L003"), format!("the folder cannot be read: {error}"))
                .in_file(folder.display().to_string())
                .expected("a folder with problem files"),
        )
    };
    let mut names = Vec::new();
    for entry in std::fs::read_dir(folder).map_err(failure)? {
        let name = entry.map_err(failure)?.file_name().to_string_lossy().into_owned();
        if Format::of_name(&name).is_some() {
            names.push(name);
        }
    }
    names.sort();
    Ok(names)
}

fn show(global: &Global, task: &str, now: &Ledger, findings: &[Finding]) -> String {
    if !global.json {
        let what = format!("{} in the ledger", plural(now.entries.len(), "problem", "problems"));
        return format!("{what}\n{}", summary::findings(findings));
    }
    let findings: Vec<Value> =
        findings.iter().map(|f| json!({ "file": f.file, "what": f.what, "kept": f.kept, "now": f.now })).collect();
    let object = json!({
        "schema": contract::SCHEMA,
        "command": "ledger",
        "task": task,
        "problem": null,
        "warnings": [],
        "partial": false,
        "holds": findings.is_empty(),
        "findings": findings,
        "problems": now.to_json()["problems"],
    });
    format!("{object:#}\n")
}
