//! `tallymark count FILE`: the tally, its certificate, and what the certificate tells.

use std::path::PathBuf;

use clap::Args;
use serde_json::Value;

use crate::budget::Budget;
use crate::circuit::{Level, Mark};
use crate::cli::exit::Exit;
use crate::cli::render::Failure;
use crate::cli::{Global, Outcome, input, progress};
use crate::judge::count::Tally;
use crate::pipeline::{self, Certified, Error};
use crate::problem::Bits;
use crate::report::values::{CheckedFile, certificate_json, certificate_line, values_json, values_table};
use crate::report::{json, summary};
use crate::source::Loaded;
use crate::span::Sources;

#[derive(Args)]
pub(super) struct Options {
    /// The problem: .tally, .cnf, .opb, .aag, .aig (also .gz, .xz, .zst), or - for standard input
    file: String,
    /// Print this many solutions, lowest first
    #[arg(long, value_name = "NUMBER", default_value_t = 0)]
    list: usize,
    /// In how many solutions each pick takes each of its values
    #[arg(long)]
    values: bool,
    /// Draw this many solutions, each with the same probability (--seed)
    #[arg(long, value_name = "NUMBER", default_value_t = 0)]
    draw: usize,
    /// Write a certificate of the count: a decision-DNNF, or a refutation where there is no solution
    #[arg(long, value_name = "FILE")]
    certificate: Option<PathBuf>,
    /// Check a certificate instead of counting
    #[arg(long, value_name = "FILE", conflicts_with_all = ["certificate", "list", "values", "draw"])]
    check: Option<PathBuf>,
}

pub(super) fn run(global: &Global, options: &Options) -> Outcome {
    let (loaded, sources) = input::load(global, &options.file)?;
    let (budget, line) = progress::budget(global);
    if let Some(file) = &options.check {
        let checked = pipeline::check_certificate(&loaded.problem, file, &budget)
            .map_err(|error| Failure::stage(&error, &sources))?;
        drop(line);
        return Ok(show_check(global, &loaded, &sources, &checked));
    }
    let settings = input::settings(global, Level::Toffoli, Mark::Phase);
    let places = input::choose(global, &loaded, settings, &budget).map_err(|error| Failure::stage(&error, &sources))?;
    let counted = pipeline::count(&loaded.problem, &places, settings, &budget)
        .map_err(|error| Failure::stage(&error, &sources))?;
    let more = More::of(global, options, &loaded, &counted.tally, &budget)
        .map_err(|error| Failure::stage(&error, &sources))?;
    drop(line);
    let exit = if counted.tally.exact().is_some() { Exit::Done } else { Exit::Unfinished };
    let partial = exit == Exit::Unfinished;
    let listed: Vec<_> = counted.tally.solutions.iter().take(options.list).collect();
    if !global.json {
        return Ok((exit, summary::count(&loaded, &counted, &listed) + &more.text));
    }
    let mut object = json::envelope("count", &loaded, &sources, partial);
    object.insert("tally".to_owned(), json::tally_json(&counted));
    let solutions = listed.iter().map(|bits| json::solution_json(&loaded.problem, bits)).collect();
    object.insert("solutions".to_owned(), solutions);
    object.extend(more.json.into_iter().map(|(name, value)| (name.to_owned(), value)));
    Ok((exit, json::print(object)))
}

/// What was asked for beyond the tally, as text and as fields of the object.
#[derive(Default)]
struct More {
    text: String,
    json: Vec<(&'static str, Value)>,
}

impl More {
    fn of(global: &Global, options: &Options, loaded: &Loaded, tally: &Tally, budget: &Budget) -> Result<Self, Error> {
        let mut more = Self::default();
        if options.certificate.is_none() && !options.values && options.draw == 0 {
            return Ok(more);
        }
        let problem = &loaded.problem;
        let certified = pipeline::certify(problem, tally, options.certificate.as_deref(), budget)?;
        if let Some(file) = &options.certificate {
            let checked = checked_file(&certified, file.display().to_string());
            more.text += &certificate_line(&checked);
            more.json.push(("certificate", certificate_json(&checked)));
        }
        if options.values {
            let values = pipeline::values(problem, &certified, budget)?;
            more.text += &values_table(problem, &values);
            more.json.push(("values", values_json(problem, &values)));
        }
        if options.draw > 0 {
            let drawn = pipeline::draw(problem, &certified, options.draw, global.seed)?;
            more.text += &summary::solutions(problem, &drawn.iter().collect::<Vec<&Bits>>());
            more.json.push(("drawn", drawn.iter().map(|bits| json::solution_json(problem, bits)).collect()));
        }
        Ok(more)
    }
}

fn checked_file(certified: &Certified, file: String) -> CheckedFile {
    let certificate = &certified.certificate;
    let verdict = Ok(certified.count.clone());
    CheckedFile { file, kind: Some(certificate.kind()), size: certificate.size(), verdict }
}

fn show_check(global: &Global, loaded: &Loaded, sources: &Sources, checked: &CheckedFile) -> (Exit, String) {
    let exit = match &checked.verdict {
        Ok(_) => Exit::Done,
        Err(refused) if refused.undecided => Exit::Unfinished,
        Err(_) => Exit::No,
    };
    if !global.json {
        return (exit, summary::checked(loaded, checked));
    }
    let mut object = json::envelope("count", loaded, sources, exit == Exit::Unfinished);
    object.insert("certificate".to_owned(), certificate_json(checked));
    (exit, json::print(object))
}
