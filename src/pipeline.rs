//! The whole compiler on one screen: each stage by name, each result of its own type.
//!
//! ```text
//! Problem ─► Places ─► Network ─► Circuit ─► oracle file ─► Verdict
//!     └────► Counted ─► Plan ─► whole search ─► search file ─► SearchVerdict
//! ```

use std::path::{Path, PathBuf};

use num_bigint::BigUint;
use num_traits::Zero;
use thiserror::Error;

use crate::budget::Budget;
use crate::circuit::{Circuit, Figures, Level, Mark, Product, qasm};
use crate::diag::{Code, Diagnostic};
use crate::judge::audit::{self, AuditError, Outcome, Verdict};
use crate::judge::count::certificate::text::Mistake;
use crate::judge::count::certificate::{self, Certificate, Drawer, Formula, PickValues, Refusal};
use crate::judge::count::{self, Counted, Over, Tally};
use crate::ledger::{Cost, Entry};
use crate::make::lower::{self, LowerError};
use crate::make::network;
use crate::places::{Places, PlacesError};
use crate::problem::{Bits, Problem};
use crate::random::SplitMix64;
use crate::report::dossier::{Dossier, Judged};
use crate::report::files::{WriteError, write_whole};
use crate::report::header::header;
use crate::report::places::places_json;
use crate::report::values::{CheckedFile, Refused};
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

/// A certificate of a tally that was checked.
#[derive(Debug)]
pub struct Certified {
    /// What it speaks of.
    pub formula: Formula,
    /// The certificate.
    pub certificate: Certificate,
    /// The count that it proves.
    pub count: BigUint,
}

/// Makes a certificate of a tally of the shown solutions, writes it where a file is named, and checks it as it was
/// written.
pub fn certify(problem: &Problem, tally: &Tally, file: Option<&Path>, budget: &Budget) -> Result<Certified, Error> {
    let formula = Formula::of(problem, Over::Shown);
    let mut certificate = certificate::certify(&formula, budget).ok_or(Error::Certificate(Refusal::OutOfTime))?;
    if let Some(file) = file {
        write_whole(file, |out| certificate::text::write(&certificate, out))?;
        let read = read_certificate(file, &formula)?;
        certificate = read.map_err(|mistake| Error::Fault(format!("a certificate just written: {mistake}")))?;
    }
    let count = certificate::check(&formula, &certificate, budget).map_err(Error::Certificate)?;
    if count < tally.low || count > tally.high {
        return Err(Error::Fault(format!("the certificate proves {count}, the tally is {}", tally.low)));
    }
    Ok(Certified { formula, certificate, count })
}

/// Checks a certificate file, from wherever it comes.
pub fn check_certificate(problem: &Problem, file: &Path, budget: &Budget) -> Result<CheckedFile, Error> {
    let formula = Formula::of(problem, Over::Shown);
    let name = file.display().to_string();
    let refused = |reason: String, undecided| Err(Refused { reason, undecided });
    Ok(match read_certificate(file, &formula)? {
        Err(mistake) => CheckedFile { file: name, kind: None, size: 0, verdict: refused(mistake.to_string(), false) },
        Ok(certificate) => {
            let verdict = certificate::check(&formula, &certificate, budget)
                .or_else(|refusal| refused(refusal.to_string(), refusal.is_undecided()));
            CheckedFile { file: name, kind: Some(certificate.kind()), size: certificate.size(), verdict }
        }
    })
}

fn read_certificate(file: &Path, formula: &Formula) -> Result<Result<Certificate, Mistake>, Error> {
    let text = std::fs::read(file).map_err(|error| Error::Read { path: file.to_owned(), error })?;
    Ok(certificate::text::read(&String::from_utf8_lossy(&text), formula.var_count))
}

/// In how many solutions each pick takes each value.
pub fn values(problem: &Problem, certified: &Certified, budget: &Budget) -> Result<Vec<PickValues>, Error> {
    certificate::values(problem, &certified.formula, &certified.certificate, budget).map_err(Error::Certificate)
}

/// Draws solutions, each with the same probability, one after the other and with repetition.
pub fn draw(problem: &Problem, certified: &Certified, number: usize, seed: u64) -> Result<Vec<Bits>, Error> {
    let Some(graph) = certified.certificate.graph() else { return Ok(Vec::new()) };
    let drawer = Drawer::new(&certified.formula, graph).map_err(Error::Certificate)?;
    let mut random = SplitMix64::new(seed);
    let drawn: Vec<Bits> = (0..number).map_while(|_| drawer.draw(&mut random)).collect();
    match drawn.iter().find(|bits| !problem.holds(bits)) {
        Some(bits) => Err(Error::Fault(format!("{bits} was drawn, which is no solution"))),
        None => Ok(drawn),
    }
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

/// How many gates one iteration of the search has: of the oracle and of the reflection together.
pub fn gates_of_iteration(
    problem: &Problem,
    places: &Places,
    settings: Settings,
    budget: &Budget,
) -> Result<u64, Error> {
    let phase = oracle(problem, places, Settings { mark: Mark::Phase, ..settings }, budget)?;
    let gates = |iterations: u32| whole_search(&phase, &iterations.into()).map(|search| search.figures.gates);
    Ok(gates(2)?.saturating_sub(gates(1)?))
}

/// Writes the clauses and the proof of a verdict: `miter.cnf` and `proof.drat`.
pub fn write_certificate(folder: &Path, certificate: &audit::Certificate) -> Result<(), Error> {
    write_whole(&folder.join("miter.cnf"), |mut out| certificate.write_formula(&mut out))?;
    write_whole(&folder.join("proof.drat"), |mut out| certificate.write_proof(&mut out))?;
    Ok(())
}

/// What a tally says to every plan.
pub fn advice_on(problem: &Problem, counted: &Counted) -> Vec<Advice> {
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
    if counted.marked().is_none() {
        advice.push(Advice::marked_unknown());
    }
    advice
}

/// The plan for a tally, with advice; `None` where the number of marked states is not known.
pub fn plan_for(problem: &Problem, counted: &Counted) -> (Option<Plan>, Vec<Advice>) {
    let mut advice = advice_on(problem, counted);
    let Some(marked) = counted.marked() else { return (None, advice) };
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
            if verdict.iterations_checked > 0 && BigUint::from(verdict.iterations) != plan.iterations {
                let (wanted, found) = (&plan.iterations, verdict.iterations);
                return Err(Error::Fault(format!("the search file has {found} iterations, planned were {wanted}")));
            }
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

/// What the ledger keeps of a problem: the main job without its folder.
pub fn ledger_entry(loaded: &Loaded, places: &Places, settings: Settings, budget: &Budget) -> Result<Entry, Error> {
    let scratch = tempfile::tempdir().map_err(|error| WriteError { path: std::env::temp_dir(), error })?;
    let found = dossier(loaded, places, scratch.path(), settings, budget)?;
    let cost = |product: &Product| {
        let Figures { qubits, t_count, depth, gates, .. } = product.figures;
        (product.level.name().to_owned(), Cost { qubits, and_count: product.and_count, t_count, depth, gates })
    };
    let verdict = |judged: &Judged<Verdict>| match judged.verdict.outcome {
        Outcome::Equal => "equal",
        Outcome::Differs => "differs",
        Outcome::Undecided => "undecided",
    };
    Ok(Entry {
        sha256: loaded.sha256.clone(),
        version: env!("CARGO_PKG_VERSION").to_owned(),
        count: found.counted.tally.exact().map(BigUint::to_string),
        marked: found.counted.marked().map(BigUint::to_string),
        space: found.counted.space.to_string(),
        verdict: found.oracle.as_ref().map_or_else(|advice| advice.code, verdict).to_owned(),
        costs: found.levels.iter().map(cost).collect(),
    })
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
    /// The certificate was not made, or it does not hold.
    #[error("{0}")]
    Certificate(Refusal),
    /// A certificate could not be read.
    #[error("the certificate cannot be read: {error}")]
    Read {
        /// The file.
        path: PathBuf,
        /// What the system said.
        error: std::io::Error,
    },
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
            Error::Certificate(refusal) if refusal.is_undecided() => {
                Diagnostic::error(Code("A080"), refusal.to_string())
                    .help("give more --time; the count itself needs less than its certificate")
            }
            Error::Read { path, .. } => Diagnostic::error(Code("F092"), self.to_string())
                .in_file(path.display().to_string())
                .expected("a file that `tallymark count --certificate` wrote, or a decision-DNNF in nnf text"),
            Error::TooManyIterations(_) => Diagnostic::error(Code("C090"), self.to_string())
                .help("plan still gives the count; a search of this length will not be run"),
            Error::Count(_) | Error::Fault(_) | Error::Certificate(_) => {
                Diagnostic::error(Code("A090"), self.to_string())
                    .help("please report it with the input file and the command line")
            }
        }
    }

    /// Whether a budget ran out, rather than anything being wrong.
    pub fn is_unfinished(&self) -> bool {
        match self {
            Error::Lower(error) => matches!(error, LowerError::OutOfTime),
            Error::Certificate(refusal) => refusal.is_undecided(),
            _ => false,
        }
    }

    /// Whether tallymark itself is at fault, rather than its input.
    pub fn is_fault(&self) -> bool {
        match self {
            Error::Fault(_) | Error::Count(_) => true,
            Error::Certificate(refusal) => !refusal.is_undecided(),
            _ => false,
        }
    }
}
