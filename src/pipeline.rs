//! The whole compiler on one screen: each stage by name, each result of its own type.
//!
//! ```text
//! Problem ─► Places ─► Network ─► Circuit ─► oracle file ─► Verdict
//!     └────► Counted ─► Plan ─► whole search ─► search file ─► SearchVerdict
//! ```

use std::path::Path;

use num_bigint::BigUint;
use num_traits::Zero;
use thiserror::Error;

use crate::budget::Budget;
use crate::circuit::{Circuit, Level, Mark, Product, qasm};
use crate::diag::{Code, Diagnostic};
use crate::judge::audit::{self, AuditError, Verdict};
use crate::judge::count::{self, Counted, Over};
use crate::make::lower::{self, LowerError};
use crate::make::network;
use crate::places::{Places, PlacesError};
use crate::problem::Problem;
use crate::report::dossier::{Dossier, Judged};
use crate::report::files::{WriteError, write_whole};
use crate::report::header::header;
use crate::report::places::places_json;
use crate::search::{Advice, Plan, plan, whole};
use crate::source::Loaded;
use crate::span::Sources;

/// What the user asked for.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub struct Settings {
    /// The gate set.
    pub level: Level,
    /// How the oracle marks.
    pub mark: Mark,
    /// Seeds everything that is drawn.
    pub seed: u64,
    /// Threads to use.
    pub threads: usize,
}

/// Solutions that a tally keeps, to be shown and to be tried by an audit that cannot try everything.
pub const KEPT_SOLUTIONS: usize = 1 << 12;

/// Counts the solutions, and the marked states where these are not the same.
pub fn count(problem: &Problem, places: &Places, settings: Settings, budget: &Budget) -> Result<Counted, Error> {
    let options = count::Options { threads: settings.threads, keep: KEPT_SOLUTIONS };
    let tally = count::count(problem, Over::Shown, &options, budget)?;
    let states = match Counted::needs_states(places) {
        true => Some(count::count(problem, Over::AllBits, &options, budget)?),
        false => None,
    };
    Ok(Counted { tally, states, space: Counted::space(places) })
}

/// Compiles the oracle.
pub fn oracle(problem: &Problem, places: &Places, settings: Settings, budget: &Budget) -> Result<Product, Error> {
    let network = network::build(problem, places);
    let options = lower::Options { level: settings.level, mark: settings.mark };
    let circuit = lower::lower(&network, &options, budget)?;
    let and_count = lower::and_count(&network, settings.mark, budget)?;
    Ok(Product::new(circuit, settings.level, settings.mark, and_count))
}

/// Puts a phase oracle into the whole search circuit.
pub fn whole_search(oracle: &Product, iterations: &BigUint) -> Result<Product, Error> {
    let iterations = u64::try_from(iterations).map_err(|_| Error::TooManyIterations(iterations.clone()))?;
    let circuit = whole::whole_search(&oracle.circuit, iterations, oracle.level);
    Ok(Product::new(circuit, oracle.level, oracle.mark, oracle.and_count))
}

/// Judges a circuit that was read from a file.
pub fn audit(
    problem: &Problem,
    places: &Places,
    circuit: &Circuit,
    options: &audit::Options,
    budget: &Budget,
) -> Result<Verdict, Error> {
    places.check(problem)?;
    Ok(audit::audit(problem, places, circuit, options, budget)?)
}

/// Writes the clauses and the proof of a verdict: `miter.cnf` and `proof.drat`.
pub fn write_certificate(folder: &Path, certificate: &audit::Certificate) -> Result<(), Error> {
    write_whole(&folder.join("miter.cnf"), |mut out| certificate.write_formula(&mut out))?;
    write_whole(&folder.join("proof.drat"), |mut out| certificate.write_proof(&mut out))?;
    Ok(())
}

/// The plan for a tally, with advice; `None` where the number of marked states is not known.
pub fn plan_for(problem: &Problem, counted: &Counted) -> (Option<Plan>, Vec<Advice>) {
    let mut advice = Vec::new();
    if problem.bit_count() == 0 {
        advice.push(Advice::nothing_to_search());
    }
    if let Some(count) = counted.tally.exact() {
        advice.push(Advice::already_decided(count));
    }
    if counted.states.is_some() {
        let shown = problem.shown.as_ref().map_or(0, Vec::len);
        advice.push(Advice::hidden_bits_searched(problem.bit_count() - shown));
    }
    let Some(marked) = counted.marked() else {
        advice.push(Advice::marked_unknown());
        return (None, advice);
    };
    let mut plan = plan(&counted.space, marked);
    advice.append(&mut plan.advice);
    plan.advice.clone_from(&advice);
    (Some(plan), advice)
}

/// The main job: counts, compiles, audits what is on the disk, plans, and writes the folder.
pub fn dossier(
    loaded: &Loaded,
    places: &Places,
    folder: &Path,
    settings: Settings,
    budget: &Budget,
) -> Result<Dossier, Error> {
    let problem = &loaded.problem;
    let counted = count(problem, places, settings, budget)?;
    write_json(&folder.join("places.json"), &places_json(loaded, places))?;
    let (oracle, levels) = match oracle(problem, places, settings, budget) {
        Ok(product) => {
            let circuit = write_and_read(&folder.join("oracle.qasm"), loaded, places, &product, &counted)?;
            let verdict = audit(problem, places, &circuit, &audit_options(settings, &counted), budget)?;
            let levels = every_level(problem, places, settings, budget)?;
            (Ok(Judged { product, verdict }), levels)
        }
        Err(Error::Lower(error)) => (Err(why_no_oracle(error)?), Vec::new()),
        Err(error) => return Err(error),
    };
    let (plan, mut advice) = plan_for(problem, &counted);
    let search = match (&plan, &oracle) {
        (Some(plan), Ok(_)) if plan.success > 0.0 && plan.success < 1.0 || !plan.iterations.is_zero() => {
            let phase = self::oracle(problem, places, Settings { mark: Mark::Phase, ..settings }, budget)?;
            let product = whole_search(&phase, &plan.iterations)?;
            let circuit = write_and_read(&folder.join("search.qasm"), loaded, places, &product, &counted)?;
            let verdict = audit::audit_search(problem, places, &circuit, SEARCH_WORK, budget)?;
            Some(Judged { product, verdict })
        }
        _ => None,
    };
    if let Err(reason) = &oracle
        && !advice.contains(reason)
    {
        advice.push(reason.clone());
    }
    Ok(Dossier { counted, oracle, levels, plan, search, advice })
}

/// A problem without an oracle is an answer with advice; a budget that ran out is not.
fn why_no_oracle(error: LowerError) -> Result<Advice, Error> {
    match error {
        LowerError::NoBits => Ok(Advice::nothing_to_search()),
        LowerError::NothingMarked => Ok(Advice::no_solution()),
        LowerError::EverythingMarked => Ok(Advice::everything_marked()),
        LowerError::OutOfTime => Err(error.into()),
    }
}

/// Amplitude updates that the audit of a search file may spend: some tenths of a second.
const SEARCH_WORK: u64 = 1 << 27;

/// The options of an audit that follows a count.
pub fn audit_options(settings: Settings, counted: &Counted) -> audit::Options {
    audit::Options {
        seed: settings.seed,
        threads: settings.threads,
        known: counted.marks().solutions.clone(),
        ..audit::Options::default()
    }
}

fn every_level(problem: &Problem, places: &Places, settings: Settings, budget: &Budget) -> Result<Vec<Product>, Error> {
    Level::ALL.iter().map(|&level| oracle(problem, places, Settings { level, ..settings }, budget)).collect()
}

/// Writes a circuit file and reads it back from the disk, so that what is judged is what the user gets.
fn write_and_read(
    path: &Path,
    loaded: &Loaded,
    places: &Places,
    product: &Product,
    counted: &Counted,
) -> Result<Circuit, Error> {
    let header = header(loaded, places, product, Some(counted));
    write_whole(path, |mut out| qasm::write::write(&product.circuit, &header, &mut out))?;
    read_circuit(path, &mut Sources::new()).map_err(|diagnostics| {
        let first = diagnostics.first().map_or("no message", |diagnostic| &diagnostic.message);
        Error::Fault(format!("the circuit file just written does not read back: {first}"))
    })
}

/// Reads a circuit file.
pub fn read_circuit(path: &Path, sources: &mut Sources) -> Result<Circuit, Vec<Diagnostic>> {
    let name = path.display().to_string();
    let text = std::fs::read_to_string(path).map_err(|error| {
        vec![
            Diagnostic::error(Code("F091"), format!("the circuit cannot be read: {error}"))
                .in_file(&name)
                .expected("an OpenQASM file"),
        ]
    })?;
    qasm::read::read(&text, &name, sources)
}

/// Writes a JSON value, whole or not at all.
pub fn write_json(path: &Path, value: &serde_json::Value) -> Result<(), WriteError> {
    write_whole(path, |out| {
        serde_json::to_writer_pretty(&mut *out, value)?;
        out.write_all(b"\n")
    })
}

/// A stage that could not do its work.
#[derive(Debug, Error)]
pub enum Error {
    /// Two ways of counting do not agree.
    #[error("a fault of tallymark: {0}")]
    Count(#[from] count::Fault),
    /// There is no circuit for this problem.
    #[error(transparent)]
    Lower(#[from] LowerError),
    /// The circuit cannot be judged as it is.
    #[error(transparent)]
    Audit(#[from] AuditError),
    /// The places do not fit the problem.
    #[error(transparent)]
    Places(#[from] PlacesError),
    /// A result could not be written.
    #[error(transparent)]
    Write(#[from] WriteError),
    /// The loop of a search file counts in 64 bits.
    #[error("{0} iterations are more than a search circuit can loop")]
    TooManyIterations(BigUint),
    /// What the program did contradicts itself.
    #[error("a fault of tallymark: {0}")]
    Fault(String),
}

impl Error {
    /// The message for the user.
    pub fn diagnostic(&self) -> Diagnostic {
        match self {
            Error::Lower(error) => error.diagnostic(),
            Error::Audit(error) => error.diagnostic(),
            Error::Places(error) => Diagnostic::error(Code("P001"), error.to_string())
                .expected("places that name every bit of this problem once")
                .help("give the places file of this circuit with --places"),
            Error::Write(error) => error.diagnostic(),
            Error::TooManyIterations(_) => Diagnostic::error(Code("C090"), self.to_string())
                .help("plan still gives the count; a search of this length will not be run"),
            Error::Count(_) | Error::Fault(_) => Diagnostic::error(Code("A090"), self.to_string())
                .help("please report it with the input file and the command line"),
        }
    }

    /// Whether a budget ran out, rather than anything being wrong.
    pub fn is_unfinished(&self) -> bool {
        matches!(self, Error::Lower(LowerError::OutOfTime))
    }

    /// Whether tallymark itself is at fault, rather than its input.
    pub fn is_fault(&self) -> bool {
        matches!(self, Error::Fault(_) | Error::Count(_))
    }
}
