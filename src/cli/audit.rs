//! `tallymark audit FILE CIRCUIT`: judge a circuit against the problem.

use std::path::PathBuf;

use clap::Args;

use crate::circuit::{Circuit, FOUND, Level, Mark, SEARCH};
use crate::cli::exit::Exit;
use crate::cli::render::Failure;
use crate::cli::{Global, Outcome, compile, input, progress};
use crate::diag::{Code, Diagnostic};
use crate::judge::audit::{self, Outcome as Found};
use crate::pipeline;
use crate::places::Places;
use crate::report::{json, summary};
use crate::source::Loaded;
use crate::span::Sources;

#[derive(Args)]
pub(super) struct Options {
    /// The problem: .tally, .cnf, .opb, .aag, .aig (also .gz, .xz, .zst), or - for standard input
    file: String,
    /// The circuit: an OpenQASM 3 file; one that measures into `found` is judged as a whole search
    circuit: PathBuf,
    /// The places file of the circuit [default: the one beside it, else bit i is search[i]]
    #[arg(long, value_name = "FILE")]
    places: Option<PathBuf>,
    /// Refuse a phase oracle that marks the complement, which is right up to a global sign
    #[arg(long)]
    strict_phase: bool,
    /// Inputs to draw where there are too many to try all
    #[arg(long, value_name = "NUMBER")]
    sample: Option<usize>,
    /// Amplitude updates to spend on a whole search, as a power of two
    #[arg(long, value_name = "POWER", default_value_t = 30, value_parser = clap::value_parser!(u32).range(0..=60))]
    effort: u32,
}

pub(super) fn run(global: &Global, options: &Options) -> Outcome {
    let (loaded, mut sources) = input::load(global, &options.file)?;
    let circuit = pipeline::read_circuit(&options.circuit, &mut sources)
        .map_err(|diagnostics| Failure::input(diagnostics, &sources))?;
    let places = places(options, &loaded, &circuit, &sources)?;
    let (budget, line) = progress::budget(global);
    let stage = |error: pipeline::Error| Failure::stage(&error, &sources);
    let mut object = json::envelope("audit", &loaded, &sources, false);
    let (outcome, text) = if circuit.measured.iter().any(|register| register.name == FOUND) {
        places.check(&loaded.problem).map_err(|error| stage(error.into()))?;
        let verdict = audit::audit_search(&loaded.problem, &places, &circuit, 1 << options.effort, &budget)
            .map_err(|error| stage(error.into()))?;
        object.insert("audit".to_owned(), json::search_json(&verdict));
        (verdict.outcome, summary::search_verdict(&verdict))
    } else {
        let settings = input::settings(global, Level::Toffoli, Mark::Phase);
        let defaults = audit::Options::default();
        let mut judged = audit::Options {
            strict_phase: options.strict_phase,
            seed: global.seed,
            threads: settings.threads,
            sample: options.sample.unwrap_or(defaults.sample),
            ..defaults
        };
        if loaded.problem.bit_count() > judged.exhaustive_bits as usize {
            let counted = pipeline::count(&loaded.problem, &places, settings, &budget).map_err(stage)?;
            judged.known.clone_from(&counted.marks().solutions);
        }
        let verdict = pipeline::audit(&loaded.problem, &places, &circuit, &judged, &budget).map_err(stage)?;
        object.insert("audit".to_owned(), json::audit_json(&loaded.problem, &verdict));
        (verdict.outcome, summary::verdict(&loaded.problem, &verdict))
    };
    drop(line);
    let exit = exit_of(outcome);
    object.insert("partial".to_owned(), (exit == Exit::Unfinished).into());
    Ok((exit, if global.json { json::print(object) } else { text }))
}

fn exit_of(outcome: Found) -> Exit {
    match outcome {
        Found::Equal => Exit::Done,
        Found::Differs => Exit::No,
        Found::Undecided => Exit::Unfinished,
    }
}

fn places(options: &Options, loaded: &Loaded, circuit: &Circuit, sources: &Sources) -> Result<Places, Box<Failure>> {
    let beside = compile::places_path(&options.circuit);
    let folder = options.circuit.with_file_name("places.json");
    let found = options.places.clone().or_else(|| [beside, folder].into_iter().find(|path| path.exists()));
    if let Some(path) = found {
        return input::read_places(&path).map_err(|diagnostics| Failure::input(diagnostics, sources));
    }
    let (searched, bits) = (circuit.register(SEARCH).len(), loaded.problem.bit_count());
    if searched != bits {
        let diagnostic = Diagnostic::error(Code("P003"), "it is not known which qubit carries which bit")
            .in_file(options.circuit.display().to_string())
            .found(format!("a register `{SEARCH}` of {searched} qubits, and a problem of {bits} bits"))
            .expected("a places file, or one qubit of the register for each bit")
            .help("give the places file with --places");
        return Err(Failure::input(vec![diagnostic], sources));
    }
    Ok(Places::as_given(&loaded.problem))
}
