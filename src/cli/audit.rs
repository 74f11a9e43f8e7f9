//! `tallymark audit FILE CIRCUIT`: judge a circuit against the problem, or a circuit alone.

mod alone;

use std::path::{Path, PathBuf};

use clap::Args;

use crate::circuit::{Circuit, FOUND, Level, Mark, SEARCH};
use crate::cli::exit::Exit;
use crate::cli::render::Failure;
use crate::cli::{Global, Outcome, compile, input, progress};
use crate::diag::{Code, Diagnostic};
use crate::judge::audit::compare::parting;
use crate::judge::audit::faults::self_test;
use crate::judge::audit::{self, Outcome as Found};
use crate::pipeline;
use crate::places::Places;
use crate::report::{self, json, story, summary};
use crate::source::Loaded;
use crate::span::Sources;

#[derive(Args)]
pub(super) struct Options {
    /// The problem: .tally, .cnf (also .gz, .xz, .zst), or - for standard input; or a circuit (.qasm) alone
    file: String,
    /// The circuit: an OpenQASM 3 file; one that measures into `found` is judged as a whole search
    circuit: Option<PathBuf>,
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
    /// A circuit known to be good: where the two part is said; without a problem, whether they are the same
    #[arg(long, value_name = "GOOD.qasm")]
    against: Option<PathBuf>,
    /// Put the audit to the test: make so many random single faults in the circuit; each must be caught or do no harm
    #[arg(long, value_name = "NUMBER")]
    self_test: Option<usize>,
}

pub(super) fn run(global: &Global, options: &Options) -> Outcome {
    let Some(path) = &options.circuit else { return alone::run(global, options) };
    let (loaded, mut sources) = input::load(global, &options.file)?;
    let circuit = alone::read(path, &mut sources)?;
    let good = options.against.as_ref().map(|path| alone::read(path, &mut sources)).transpose()?;
    let places = places(options, path, &loaded, &circuit, &sources)?;
    let (budget, line) = progress::budget(global);
    let stage = |error: pipeline::Error| Failure::stage(&error, &sources);
    let mut object = json::envelope("audit", &loaded, &sources, false);
    let seeded = audit::Options { strict_phase: options.strict_phase, seed: global.seed, ..audit::Options::default() };
    let (outcome, mut text) = if circuit.measured.iter().any(|register| register.name == FOUND) {
        places.check(&loaded.problem).map_err(|error| stage(error.into()))?;
        let verdict = audit::audit_search(&loaded.problem, &places, &circuit, 1 << options.effort, &budget)
            .map_err(|error| stage(error.into()))?;
        object.insert("audit".to_owned(), json::search_json(&verdict));
        (verdict.outcome, summary::search_verdict(&verdict))
    } else {
        let settings = input::settings(global, Level::Toffoli, Mark::Phase);
        let sample = options.sample.unwrap_or(seeded.sample);
        let mut judged = audit::Options { threads: settings.threads, sample, ..seeded.clone() };
        if loaded.problem.bit_count() > judged.exhaustive_bits as usize {
            let counted = pipeline::count(&loaded.problem, &places, settings, &budget).map_err(stage)?;
            judged.known.clone_from(&counted.marks().solutions);
        }
        let verdict = pipeline::audit(&loaded.problem, &places, &circuit, &judged, &budget).map_err(stage)?;
        let mut value = json::audit_json(&loaded.problem, &verdict);
        let reason = verdict.witness.as_ref().map(|witness| story::reason(&loaded.problem, &sources, witness));
        let parted = match (&good, &verdict.witness) {
            (Some(good), Some(witness)) => {
                let search = places.searched.iter().map(|&bit| witness.bits.get(bit)).collect();
                parting(good, &circuit, &search, &budget).map_err(|error| stage(error.into()))?
            }
            _ => None,
        };
        story::add_json(&mut value, reason.as_ref(), parted.as_ref());
        object.insert("audit".to_owned(), value);
        let text = summary::verdict(&loaded.problem, &verdict) + &story::text(reason.as_ref(), parted.as_ref());
        (verdict.outcome, text)
    };
    let mut exit = exit_of(outcome);
    if let (Some(count), Found::Equal) = (options.self_test, outcome) {
        let test = self_test(&loaded.problem, &places, &circuit, count, &seeded, &budget)
            .map_err(|error| stage(error.into()))?;
        object.insert("self_test".to_owned(), report::self_test::json(&test, &circuit));
        text += &report::self_test::text(&test, &circuit);
        exit = match (test.passed(), test.is_complete) {
            (false, _) => Exit::No,
            (true, true) => Exit::Done,
            (true, false) => Exit::Unfinished,
        };
    }
    drop(line);
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

fn places(
    options: &Options,
    circuit_path: &Path,
    loaded: &Loaded,
    circuit: &Circuit,
    sources: &Sources,
) -> Result<Places, Box<Failure>> {
    let beside = compile::places_path(circuit_path);
    let folder = circuit_path.with_file_name("places.json");
    let found = options.places.clone().or_else(|| [beside, folder].into_iter().find(|path| path.exists()));
    if let Some(path) = found {
        return read_places(&path).map_err(|diagnostics| Failure::input(diagnostics, sources));
    }
    let (searched, bits) = (circuit.register(SEARCH).len(), loaded.problem.bit_count());
    if searched != bits {
        let diagnostic = Diagnostic::error(Code("P003"), "it is not known which qubit carries which bit")
            .in_file(circuit_path.display().to_string())
            .found(format!("a register `{SEARCH}` of {searched} qubits, and a problem of {bits} bits"))
            .expected("a places file, or one qubit of the register for each bit")
            .help("give the places file with --places");
        return Err(Failure::input(vec![diagnostic], sources));
    }
    Ok(Places::as_given(&loaded.problem))
}

fn read_places(path: &Path) -> Result<Places, Vec<Diagnostic>> {
    let name = path.display().to_string();
    let text = std::fs::read_to_string(path).map_err(|error| {
        vec![Diagnostic::error(Code("F092"), format!("the places cannot be read: {error}")).in_file(&name)]
    })?;
    Places::from_json(&text).map_err(|error| {
        vec![Diagnostic::error(Code("P002"), error.to_string()).in_file(&name).expected("a places file of tallymark")]
    })
}
