//! `tallymark count FILE`: the tally, its certificate, and what the certificate tells.

use std::path::PathBuf;

use clap::Args;
use serde_json::Value;

use crate::budget::Budget;
use crate::circuit::{Level, Mark};
use crate::cli::exit::Exit;
use crate::cli::render::Failure;
use crate::cli::{Global, Outcome, input, progress};
use crate::diag::{Code, Diagnostic};
use crate::judge::count::hashing::{Accuracy, NotPossible};
use crate::judge::count::{self, Method, Tally, Wanted};
use crate::pipeline::{self, Certified, Error, Margin, Settings, Tallied};
use crate::problem::Bits;
use crate::report::values::{CheckedFile, certificate_json, certificate_line, values_json, values_table};
use crate::report::{json, summary, ways};
use crate::search::plan::tolerance::Slope;
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
    #[command(flatten)]
    how: How,
    /// Check a certificate instead of counting
    #[arg(long, value_name = "FILE", conflicts_with_all = ["certificate", "list", "values", "draw"])]
    check: Option<PathBuf>,
}

/// How near, how surely, by whom.
#[derive(Args)]
struct How {
    /// Give the number itself or proven bounds, never an interval that is only likely
    #[arg(long)]
    exact_only: bool,
    /// An interval will do: the number within a factor of 1 + TOLERANCE
    #[arg(long, value_name = "TOLERANCE", conflicts_with_all = ["exact_only", "for_plan"])]
    within: Option<f64>,
    /// The probability, over the seeds, with which an interval must hold the number
    #[arg(long, value_name = "CONFIDENCE", default_value_t = Accuracy::USUAL.confidence())]
    sure: f64,
    /// Stop when the success of the planned search is, in the worst case, within MARGIN of the best
    #[arg(long, value_name = "MARGIN", conflicts_with = "exact_only", value_parser = margin)]
    for_plan: Option<f64>,
    /// With --for-plan: the iterations with the least expected work, not those with the highest success
    #[arg(long, requires = "for_plan")]
    least_work: bool,
    /// Count by this way only: sweep, inputs, frontier, components, listing or hashing
    #[arg(long, value_name = "WAY", value_parser = way)]
    by: Option<Method>,
    /// Let no second way confirm the first
    #[arg(long)]
    unconfirmed: bool,
    /// Bytes for the cache of the search, such as 500M or 2G
    #[arg(long, value_name = "SIZE", value_parser = size)]
    memory: Option<u64>,
}

impl How {
    /// The options of the count.
    fn options(&self, settings: Settings, keep: usize, exact: bool) -> Result<count::Options, Box<Failure>> {
        let refuse = |error: NotPossible| {
            let expected = "a tolerance such as 0.3 and a confidence such as 0.95";
            Failure::usage(Diagnostic::error(Code("U001"), error.to_string()).expected(expected))
        };
        let tolerance = self.within.unwrap_or(Accuracy::USUAL.tolerance());
        let accuracy = Accuracy::new(tolerance, self.sure).map_err(refuse)?;
        let wanted = match () {
            () if self.exact_only || exact => Wanted::Number,
            () if self.within.is_some() => Wanted::Interval(accuracy),
            () => Wanted::NumberOrInterval(accuracy),
        };
        let Settings { threads, seed, .. } = settings;
        Ok(count::Options { threads, keep, wanted, seed, only: self.by, confirm: !self.unconfirmed })
    }

    fn margin(&self) -> Option<Margin> {
        let slope = if self.least_work { Slope::LeastWork } else { Slope::Peak };
        self.for_plan.map(|margin| Margin { margin, slope, confidence: self.sure })
    }
}

fn margin(text: &str) -> Result<f64, String> {
    match text.parse::<f64>() {
        Ok(margin) if margin > 1e-6 && margin < 1.0 => Ok(margin),
        _ => Err("expected a number above 0.000001 and below 1, such as 0.01".to_owned()),
    }
}

fn way(text: &str) -> Result<Method, String> {
    let ways = [Method::Sweep, Method::Inputs, Method::Frontier, Method::Components, Method::Listing, Method::Hashing];
    let named = ways.into_iter().find(|method| method.to_string() == text);
    named.ok_or_else(|| "expected sweep, inputs, frontier, components, listing or hashing".to_owned())
}

fn size(text: &str) -> Result<u64, String> {
    let (digits, shift) = match text.as_bytes().last() {
        Some(b'K') => (&text[..text.len() - 1], 10),
        Some(b'M') => (&text[..text.len() - 1], 20),
        Some(b'G') => (&text[..text.len() - 1], 30),
        _ => (text, 0),
    };
    let bytes = digits.parse::<u64>().ok().and_then(|number| number.checked_mul(1 << shift));
    bytes.filter(|&bytes| bytes > 0).ok_or_else(|| "expected a number of bytes, such as 500M or 2G".to_owned())
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
    let budget = options.how.memory.map_or(budget.clone(), |bytes| budget.with_memory(bytes));
    let keep = if options.list > 0 { pipeline::KEPT_SOLUTIONS.max(options.list) } else { 0 };
    let how = options.how.options(settings, keep, options.certified())?;
    let tallied = tally(global, &options.how, &loaded, &how, &budget);
    let tallied = tallied.map_err(|error| Failure::stage(&error, &sources))?;
    let counted = &tallied.counted;
    let more = More::of(global, options, &loaded, &counted.tally, &budget)
        .map_err(|error| Failure::stage(&error, &sources))?;
    drop(line);
    let exit = if tallied.is_complete() { Exit::Done } else { Exit::Unfinished };
    let partial = exit == Exit::Unfinished;
    let listed: Vec<_> = counted.tally.solutions.iter().take(options.list).collect();
    if !global.json {
        return Ok((
            exit,
            summary::count(&loaded, counted, &[])
                + &ways_lines(&tallied)
                + &summary::solutions(&loaded.problem, &listed)
                + &more.text,
        ));
    }
    let mut object = json::envelope("count", &loaded, &sources, partial);
    object.insert("tally".to_owned(), json::tally_json(counted));
    object.insert("ways".to_owned(), ways::ways_json(&tallied.runs));
    if let Some(plan) = &tallied.plan {
        object.insert("for_plan".to_owned(), ways::for_plan_json(plan));
    }
    let solutions = listed.iter().map(|bits| json::solution_json(&loaded.problem, bits)).collect();
    object.insert("solutions".to_owned(), solutions);
    object.extend(more.json.into_iter().map(|(name, value)| (name.to_owned(), value)));
    Ok((exit, json::print(object)))
}

/// Counts for a search where the options name one, and the solutions alone where they do not.
fn tally(
    global: &Global,
    asked: &How,
    loaded: &Loaded,
    how: &count::Options,
    budget: &Budget,
) -> Result<Tallied, Error> {
    let margin = asked.margin();
    if margin.is_none() && !global.no_narrowing && !global.any {
        return pipeline::tally_alone(&loaded.problem, how, budget);
    }
    let settings = input::settings(global, Level::Toffoli, Mark::Phase);
    let places = input::choose(global, loaded, settings, budget)?;
    match margin {
        Some(margin) => pipeline::tally_for_plan(&loaded.problem, &places, how, margin, budget),
        None => pipeline::tally(&loaded.problem, &places, how, budget),
    }
}

impl Options {
    /// Whether anything is asked for that rests on a certificate.
    fn certified(&self) -> bool {
        self.certificate.is_some() || self.values || self.draw > 0
    }
}

fn ways_lines(tallied: &Tallied) -> String {
    ways::ways_line(&tallied.runs) + &tallied.plan.as_ref().map_or_else(String::new, ways::for_plan_line)
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
        if !options.certified() {
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
