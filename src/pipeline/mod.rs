//! The whole compiler on one screen: each stage by name, each result of its own type.
//!
//! ```text
//! Problem ─► Candidates ─► Places ─► Network ─► Circuit ─► oracle file ─► Verdict
//!     └────► Counted ─► Plan ─► whole search ─► search file ─► SearchVerdict
//! ```

mod bounds;
mod certificate;
mod choice;
mod counting;
mod error;
mod files;
mod objective;
mod oracle;
mod planning;
mod start;
mod tally;

use std::path::Path;

use num_bigint::BigUint;
use num_traits::Zero;

use crate::budget::Budget;
use crate::circuit::{Circuit, Figures, Level, Mark, Product};
use crate::judge::audit::{self, Outcome, Verdict};
use crate::judge::count::Counted;
use crate::ledger::{Cost, Entry};
use crate::make::lower::Limits;
use crate::places::Places;
use crate::problem::Problem;
use crate::report::dossier::{Dossier, Judged};
use crate::report::files::WriteError;
use crate::report::places::places_json;
use crate::search::price::StartPrice;
use crate::source::Loaded;

pub use certificate::{Certified, certify, check_certificate, draw, values};
pub use choice::{Candidate, Narrowing, choose};
pub use counting::count;
pub use error::Error;
pub use files::{Iterations, read_circuit, read_circuit_with, write_certificate, write_json, write_obligations};
pub use objective::ladder;
pub use oracle::{
    CheckedPass, check_passes, course, front, gates_of_iteration, oracle, oracle_within, search_from, turned,
};
pub use planning::{advice_on, plan_for};
pub use start::{Priced, places_from, priced, prices};
pub use tally::{Margin, Tallied, tally, tally_alone, tally_for_plan};

use files::{write_and_read, write_curve};
use oracle::{every_level, why_no_oracle};

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

/// The main job: counts, compiles, audits what is on the disk, plans, and writes the folder. `starts` are the prices to report.
pub fn dossier(
    loaded: &Loaded,
    places: &Places,
    starts: Vec<StartPrice>,
    folder: &Path,
    settings: Settings,
    limits: &Limits,
    budget: &Budget,
) -> Result<Dossier, Error> {
    let problem = &loaded.problem;
    let counted = count(problem, places, settings, budget)?;
    write_json(&folder.join("places.json"), &places_json(loaded, places))?;
    let (oracle, levels) = match oracle_within(problem, places, settings, limits, budget) {
        Ok(mut product) => {
            product.bounds = bounds::bounds(problem, places, settings.mark, counted.marked());
            let circuit = write_and_read(&folder.join("oracle.qasm"), loaded, places, &product, &counted)?;
            let verdict = audit(problem, places, &circuit, &audit_options(settings, &counted), budget)?;
            let levels = every_level(problem, places, settings, limits, budget)?;
            (Ok(Judged { product, verdict }), levels)
        }
        Err(Error::Lower(error)) => (Err(why_no_oracle(error)?), Vec::new()),
        Err(error) => return Err(error),
    };
    let (plan, mut advice) = plan_for(problem, places, &counted);
    let search = match (&plan, &oracle) {
        (Some(plan), Ok(_)) if plan.success > 0.0 && plan.success < 1.0 || !plan.iterations.is_zero() => {
            let phase = oracle_within(problem, places, Settings { mark: Mark::Phase, ..settings }, limits, budget)?;
            let product = search_from(&places.start, &phase, &plan.iterations, limits)?;
            let circuit = write_and_read(&folder.join("search.qasm"), loaded, places, &product, &counted)?;
            let verdict = audit::audit_search(problem, places, &circuit, SEARCH_WORK, budget)?;
            write_curve(&folder.join("search.svg"), loaded, &product, &circuit, settings, budget)?;
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
    Ok(Dossier { counted, starts, oracle, levels, plan, search, advice })
}

/// What the ledger keeps of a problem: the main job without its folder. `start` is the name of the start that was wanted.
pub fn ledger_entry(
    loaded: &Loaded,
    places: &Places,
    start: &str,
    settings: Settings,
    budget: &Budget,
) -> Result<Entry, Error> {
    let scratch = tempfile::tempdir().map_err(|error| WriteError { path: std::env::temp_dir(), error })?;
    let found = dossier(loaded, places, Vec::new(), scratch.path(), settings, &Limits::default(), budget)?;
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
        start: start.to_owned(),
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
