//! `tallymark audit FILE CIRCUIT`: judge a circuit against the problem, or a circuit alone.

mod against;
mod alone;
mod case;
mod form;

use std::path::{Path, PathBuf};

use clap::Args;

use self::case::{Case, Judged};
use crate::circuit::registers::{self, Roles};
use crate::circuit::{COUNTED, Circuit, FOUND, SEARCH};
use crate::cli::exit::Exit;
use crate::cli::render::{Failure, show};
use crate::cli::{Global, Outcome, compile, input, progress};
use crate::diag::{Code, Diagnostic};
use crate::id::Id;
use crate::judge::audit::faults::self_test;
use crate::judge::audit::{self, Outcome as Found};
use crate::pipeline::{self, Iterations};
use crate::places::Places;
use crate::problem::BitId;
use crate::report::{self, json};
use crate::source::Loaded;
use crate::span::Sources;

#[derive(Args)]
pub(super) struct Options {
    /// The problem: .tally, .cnf, .opb, .aag, .aig (also .gz, .xz, .zst), or - for standard input; or a circuit (.qasm) alone
    file: String,
    /// The circuit: an OpenQASM file, version 3 or 2.0; one that measures into `found` is judged as a whole search
    circuit: Option<PathBuf>,
    /// The places file of the circuit [default: the one beside it, else bit i is search[i]]
    #[arg(long, value_name = "FILE")]
    places: Option<PathBuf>,
    /// The qubits that are searched, as in q[0:4] (both ends belong to it) or a,q[2] [default: the register search]
    #[arg(long, value_name = "QUBITS")]
    search: Option<String>,
    /// The qubit that a bit oracle writes [default: the register mark]
    #[arg(long, value_name = "QUBIT")]
    mark: Option<String>,
    /// The ancillas, which begin and end as 0 [default: all other qubits]
    #[arg(long, value_name = "QUBITS")]
    work: Option<String>,
    /// Where the searched qubits are after an oracle, in the same order, if a router moved them [default: where they began]
    #[arg(long, value_name = "QUBITS")]
    search_after: Option<String>,
    /// Where the mark is after a bit oracle, if a router moved it [default: where it began]
    #[arg(long, value_name = "QUBIT")]
    mark_after: Option<String>,
    /// The measured bits that hold the result of a whole search [default: the register found]
    #[arg(long, value_name = "BITS")]
    found: Option<String>,
    /// Which bit of the problem each searched qubit carries, as in 3,1,2,0, or a file with such a list
    #[arg(long, value_name = "LIST", conflicts_with = "places")]
    bits: Option<String>,
    /// Judge an oracle that gives solutions this phase and not a sign: radians, or a multiple of pi such as pi/4 or -3pi/8
    #[arg(long, value_name = "ANGLE", allow_hyphen_values = true, value_parser = form::angle)]
    angle: Option<f64>,
    /// Judge an oracle that acts where this qubit is 1 and is the identity, global phase included, where it is 0
    #[arg(long, value_name = "QUBIT")]
    control: Option<String>,
    /// Judge the inverse of the oracle
    #[arg(long)]
    inverse: bool,
    /// Refuse a phase oracle that marks the complement, which is right up to a global sign
    #[arg(long)]
    strict_phase: bool,
    /// Inputs to draw where there are too many to try all
    #[arg(long, value_name = "NUMBER")]
    sample: Option<usize>,
    /// Decide by proof, whatever the number of inputs, and write it: miter.cnf and proof.drat in this folder, and
    /// obligations.cnf and obligations.drat for bits that are computed
    #[arg(long, value_name = "DIR")]
    proof: Option<PathBuf>,
    /// Amplitude updates to spend on a whole search, as a power of two
    #[arg(long, value_name = "POWER", default_value_t = 30, value_parser = clap::value_parser!(u32).range(0..=60))]
    effort: u32,
    /// The number of iterations of a whole search that has it as an input
    #[arg(long, value_name = "NUMBER", requires = "circuit")]
    iterations: Option<u64>,
    /// A circuit known to be good: where the two part is said; without a problem, whether they are the same
    #[arg(long, value_name = "GOOD.qasm")]
    against: Option<PathBuf>,
    /// Put the audit to the test: make so many random single faults in the circuit; each must be caught or do no harm
    #[arg(long, value_name = "NUMBER")]
    self_test: Option<usize>,
}

pub(super) fn run(global: &Global, options: &Options) -> Outcome {
    let Some(path) = &options.circuit else { return alone::run(global, options) };
    let (mut loaded, mut sources) = input::load(global, &options.file)?;
    let (circuit, given) = match options.iterations {
        Some(number) => pipeline::read_circuit_with(path, Iterations::Given(number), &mut sources)
            .map_err(|diagnostics| Failure::input(diagnostics, &sources))?,
        None => alone::read(path, &mut sources)?,
    };
    let circuit = assigned(options, path, circuit).map_err(|diagnostic| Failure::input(vec![*diagnostic], &sources))?;
    let good = options.against.as_ref().map(|path| alone::read(path, &mut sources)).transpose()?.map(|(good, _)| good);
    let mut places = places(options, path, &mut loaded, &circuit, &sources)?;
    form::check(options, &circuit).map_err(|diagnostic| Failure::input(vec![*diagnostic], &sources))?;
    if options.control.is_some() {
        (loaded.problem, places) = audit::controlled(&loaded.problem, &places);
    }
    let (budget, line) = progress::budget(global);
    let stage = |error: pipeline::Error| Failure::stage(&error, &sources);
    let mut object = json::envelope("audit", &loaded, &sources, false);
    let seeded = audit::Options {
        strict_phase: options.strict_phase,
        angle: form::turn(options),
        seed: global.seed,
        ..audit::Options::default()
    };
    let case = Case {
        global,
        options,
        loaded: &loaded,
        sources: &sources,
        places: &places,
        circuit: &circuit,
        good,
        budget: &budget,
    };
    let is_search = circuit.measured.iter().any(|register| [FOUND, COUNTED].contains(&register.name.as_str()));
    let Judged { outcome, value, mut text } = if is_search { case.search(given)? } else { case.oracle(&seeded)? };
    object.insert("audit".to_owned(), value);
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

/// The circuit with its qubits in the registers of their roles.
fn assigned(options: &Options, path: &Path, circuit: Circuit) -> Result<Circuit, Box<Diagnostic>> {
    let Options { search, mark, work, found, control, search_after, mark_after, .. } = options;
    // The control is the last of the searched qubits.
    let and_control =
        |list: &str| control.as_ref().map_or_else(|| list.to_owned(), |control| format!("{list},{control}"));
    let search = match (search, control) {
        (None, None) => None,
        (list, _) => Some(and_control(list.as_deref().unwrap_or(SEARCH))),
    };
    let search_after = search_after.as_deref().map(and_control);
    let (mark_after, mark) = (mark_after.clone(), mark.clone());
    let roles = Roles { search, mark, work: work.clone(), found: found.clone(), search_after, mark_after };
    if roles.is_empty() {
        return Ok(circuit);
    }
    let registers: Vec<String> = circuit
        .qubits
        .iter()
        .chain(&circuit.measured)
        .map(|register| format!("{}[{}]", register.name, register.len))
        .collect();
    registers::assign(&circuit, &roles).map_err(|error| {
        Box::new(
            Diagnostic::error(Code("P020"), error.to_string())
                .in_file(path.display().to_string())
                .expected("registers and elements of the circuit, such as q[0:4],r[2]")
                .help(format!("the circuit has {}", registers.join(", "))),
        )
    })
}

/// The places of `--bits`: a list, or a file with one.
fn listed_places(list: &str, loaded: &Loaded) -> Result<Places, Box<Diagnostic>> {
    let is_list = |text: &str| text.chars().all(|c| c.is_ascii_digit() || c == ',' || c.is_whitespace());
    let fail = |message: String| {
        let expected = "numbers of bits joined by commas, such as 3,1,2,0";
        Diagnostic::error(Code("P021"), message).expected(expected)
    };
    let text = match is_list(list) {
        true => list.to_owned(),
        false => std::fs::read_to_string(list)
            .map_err(|error| Box::new(fail(format!("the bits cannot be read: {error}")).in_file(list)))?,
    };
    let numbers = text.split([',', ' ', '\n', '\r', '\t']).filter(|number| !number.is_empty());
    let searched = numbers.map(|number| match number.parse::<u32>() {
        Ok(bit) if bit < u32::MAX => Ok(BitId::new(bit as usize)),
        _ => Err(Box::new(fail(format!("`{number}` is not the number of a bit")))),
    });
    let places = Places { searched: searched.collect::<Result<_, _>>()?, ..Places::as_given(&loaded.problem) };
    places.check(&loaded.problem).map_err(|error| Box::new(fail(error.to_string())))?;
    Ok(places)
}

fn places(
    options: &Options,
    circuit_path: &Path,
    loaded: &mut Loaded,
    circuit: &Circuit,
    sources: &Sources,
) -> Result<Places, Box<Failure>> {
    if let Some(list) = &options.bits {
        return listed_places(list, loaded).map_err(|diagnostic| Failure::input(vec![*diagnostic], sources));
    }
    let beside = compile::places_path(circuit_path);
    let folder = circuit_path.with_file_name("places.json");
    // A file beside the circuit speaks of the registers that were written with it.
    let is_own = options.search.is_none();
    let found = options.places.clone().or_else(|| [beside, folder].into_iter().find(|path| is_own && path.exists()));
    if let Some(path) = found {
        let read = input::read_places(&path, loaded);
        let (places, warnings) = read.map_err(|diagnostics| Failure::input(diagnostics, sources))?;
        show(&warnings, sources);
        loaded.warnings.extend(warnings);
        return Ok(places);
    }
    let searched = circuit.register(SEARCH).len() - usize::from(options.control.is_some());
    let bits = loaded.problem.bit_count();
    if searched != bits {
        let diagnostic = Diagnostic::error(Code("P003"), "it is not known which qubit carries which bit")
            .in_file(circuit_path.display().to_string())
            .found(format!("a register `{SEARCH}` of {searched} qubits, and a problem of {bits} bits"))
            .expected("a places file, or one qubit of the register for each bit")
            .help("give the places file with --places, or the qubits with --search");
        return Err(Failure::input(vec![diagnostic], sources));
    }
    Ok(Places::as_given(&loaded.problem))
}
