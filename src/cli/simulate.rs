//! `tallymark simulate FILE`: run a search on this machine's memory, and sample it.

use std::path::{Path, PathBuf};

use clap::Args;
use num_bigint::BigUint;

use crate::budget::Budget;
use crate::circuit::{Circuit, Level, Mark, qasm};
use crate::cli::exit::Exit;
use crate::cli::render::Failure;
use crate::cli::{Global, Outcome, compile, course, input, plan, progress};
use crate::diag::{Code, Diagnostic};
use crate::make::lower::Limits;
use crate::pipeline::{self, Iterations};
use crate::places::Places;
use crate::report::simulation::{self as report, Terms};
use crate::report::{files, json};
use crate::search::simulate::{self, SimulateError, Simulation, Way};
use crate::source::Loaded;
use crate::span::Sources;

#[derive(Args)]
pub(super) struct Options {
    /// A search file (.qasm); or a problem, of which the planned search is written and then read like any other
    file: String,
    /// With a search file: the problem to read the results in
    #[arg(long, value_name = "FILE")]
    problem: Option<String>,
    /// The places file of the search [default: S.places.json beside S.qasm, else bit i is search[i]]
    #[arg(long, value_name = "FILE")]
    places: Option<PathBuf>,
    /// With a problem: the start state, strings, domains, groups or cheapest [default: cheapest; strings with --any]
    #[arg(long, value_name = "NAME", value_parser = input::start)]
    start: Option<input::Wanted>,
    /// So many iterations instead of the planned number; in a search file, the value of its input
    #[arg(long, value_name = "NUMBER", value_parser = plan::number)]
    iterations: Option<BigUint>,
    /// With a problem: the gate set, wide, toffoli, clifford-t or feedback
    #[arg(long, default_value = "toffoli", value_parser = input::level)]
    level: Level,
    /// How to follow it: classes (any number of iterations in one pass), steps (a pass an iteration) or gates (every
    /// gate on the basis states there are) [default: the first that fits]
    #[arg(long, value_name = "NAME", value_parser = way)]
    way: Option<Way>,
    /// Draw so many results
    #[arg(long, value_name = "NUMBER", default_value_t = 0)]
    draw: u64,
    /// Write the drawn results as lines that `shots` reads
    #[arg(long, value_name = "FILE", requires = "draw")]
    results: Option<PathBuf>,
    /// Write the success by iteration as a picture
    #[arg(long, value_name = "FILE")]
    svg: Option<PathBuf>,
    /// Use at most so many GiB
    #[arg(long, value_name = "GIB", default_value_t = 24.0)]
    memory: f64,
    /// Print this many results
    #[arg(long, value_name = "NUMBER", default_value_t = 20)]
    list: usize,
}

pub(super) fn run(global: &Global, options: &Options) -> Outcome {
    let (budget, progress) = progress::budget(global);
    let budget = budget.with_memory((options.memory.clamp(0.0, 1e6) * (1u64 << 30) as f64) as u64);
    let is_circuit = options.file.ends_with(".qasm");
    let (circuit, terms, sources) =
        if is_circuit { from_circuit(global, options)? } else { from_problem(global, options, &budget)? };
    let threads = input::settings(global, options.level, Mark::Phase).threads;
    let wanted = simulate::Options { way: options.way, draw: options.draw, seed: global.seed, threads };
    let found =
        simulate::simulate(&circuit, &wanted, &budget).map_err(|error| refused(&error, &options.file, &sources))?;
    drop(progress);
    let written = write(options, &found);
    written.map_err(|error| Failure::stage(&error.into(), &sources))?;
    let exit = if found.partial { Exit::Unfinished } else { Exit::Done };
    let in_terms = terms.as_ref().map(|(loaded, places)| Terms { problem: &loaded.problem, places });
    if !global.json {
        return Ok((exit, report::text(&found, in_terms, options.list)));
    }
    let mut object = match &terms {
        Some((loaded, _)) => json::envelope("simulate", loaded, &sources, found.partial),
        None => json::bare_envelope("simulate", found.partial),
    };
    object.insert("simulation".to_owned(), report::json(&found, in_terms, options.list));
    Ok((exit, json::print(object)))
}

type Read = (Circuit, Option<(Loaded, Places)>, Sources);

/// A search file, from wherever it comes.
fn from_circuit(global: &Global, options: &Options) -> Result<Read, Box<Failure>> {
    let (terms, mut sources) = match &options.problem {
        None => (None, Sources::new()),
        Some(problem) => {
            let (loaded, sources) = input::load(global, problem)?;
            let beside = compile::places_path(Path::new(&options.file));
            let path = options.places.clone().or_else(|| beside.exists().then_some(beside));
            let places = input::places(path.as_deref(), &loaded, &sources)?;
            (Some((loaded, places)), sources)
        }
    };
    let given = options.iterations.as_ref().and_then(|iterations| u64::try_from(iterations).ok());
    let given = given.map_or(Iterations::OfTheFile, Iterations::Given);
    let circuit = pipeline::read_circuit_with(Path::new(&options.file), given, &mut sources);
    Ok((circuit.map_err(|messages| Failure::input(messages, &sources))?.0, terms, sources))
}

/// The planned search of a problem, written as text and read back: what is followed is the file.
fn from_problem(global: &Global, options: &Options, budget: &Budget) -> Result<Read, Box<Failure>> {
    let (loaded, mut sources) = input::load(global, &options.file)?;
    input::refuse_empty(&loaded, &sources)?;
    let settings = input::settings(global, options.level, Mark::Phase);
    let (places, product) = {
        let stage = |error: pipeline::Error| Failure::stage(&error, &sources);
        let places = input::places_from(global, &loaded, input::wanted(global, options.start, true), settings, budget)
            .map_err(stage)?;
        let oracle = pipeline::oracle(&loaded.problem, &places, settings, budget).map_err(stage)?;
        let iterations = match &options.iterations {
            Some(iterations) => iterations.clone(),
            None => course::planned(&loaded, &places, settings, None, budget, &sources)?.0,
        };
        let product = pipeline::search_from(&places.start, &oracle, &iterations, &Limits::default());
        (places, product.map_err(stage)?)
    };
    let mut text = Vec::new();
    qasm::write::write(&product.circuit, &[], &mut text).expect("memory takes everything");
    let text = String::from_utf8(text).expect("OpenQASM is text");
    let circuit = qasm::read::read(&text, "the search", &mut sources);
    let circuit = circuit.map_err(|messages| Failure::input(messages, &sources))?;
    Ok((circuit, Some((loaded, places)), sources))
}

fn write(options: &Options, found: &Simulation) -> Result<(), files::WriteError> {
    if let Some(path) = &options.results {
        files::write_whole(path, |out| out.write_all(report::shot_lines(found).as_bytes()))?;
    }
    if let Some(path) = &options.svg {
        let title = format!("success by iteration: {}", options.file);
        files::write_whole(path, |out| out.write_all(report::svg(found, &title).as_bytes()))?;
    }
    Ok(())
}

fn refused(error: &SimulateError, file: &str, sources: &Sources) -> Box<Failure> {
    let new = |code| Diagnostic::error(Code(code), error.to_string()).in_file(file);
    let diagnostic = match error {
        SimulateError::NoSearch => new("P011").expected("a register `search`"),
        SimulateError::NoResult => {
            new("S020").expected("a search that measures at its end").help("`tallymark compile --whole` writes one")
        }
        SimulateError::TooLarge { .. } => new("S021").help("`tallymark plan` gives the success at any size"),
        SimulateError::NotFollowed { .. } => new("S022").help("leave out --way, or use --way gates"),
        SimulateError::Spent => return Failure::unfinished(new("S023").help("give more --time"), sources),
    };
    Failure::input(vec![diagnostic], sources)
}

fn way(name: &str) -> Result<Way, String> {
    let all = [Way::Classes, Way::Steps, Way::Gates];
    all.into_iter().find(|way| way.name() == name).ok_or_else(|| "expected classes, steps or gates".to_owned())
}
