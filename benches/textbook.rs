//! Oracles against the textbook way, on all files with at most 60 bits.
//!
//! The textbook way, fixed here: each clause into an ancilla of its own by a chain of Toffolis (a clause of k literals
//! takes k - 1, and as many ancillas), a chain of Toffolis over those ancillas, the last of which marks, and the mirror
//! image; 7 T gates a Toffoli. A problem in the language is taken in its plain clause form, all of whose variables would be
//! searched. Files under 20 ANDs are left out.
//!
//! Folders: `problems`, and the one that `TALLYMARK_INSTANCES` names. Run with `cargo bench --bench textbook`.

#![allow(clippy::print_stdout, reason = "a bench prints its table")]

use std::collections::BTreeMap;
use std::path::{Path, PathBuf};

use tallymark::budget::Budget;
use tallymark::circuit::{Level, Mark};
use tallymark::judge::clauses::encode;
use tallymark::make::lower::{Limits, Lowered, Options, lower_within};
use tallymark::make::network::build;
use tallymark::places::Places;
use tallymark::problem::Problem;
use tallymark::source::load;
use tallymark::span::Sources;

const MOST_BITS: usize = 60;
const FEWEST_ANDS: u64 = 20;
/// Files of more clauses are left to the deep checks.
const MOST_CLAUSES: usize = 40_000;

/// What the textbook way costs.
struct Textbook {
    ands: u64,
    t_count: u64,
    ancillas: u64,
}

fn textbook(problem: &Problem) -> Textbook {
    let clauses = encode(problem).clauses;
    let inner: u64 = clauses.iter().map(|clause| clause.len().saturating_sub(1) as u64).sum();
    let (held, m) =
        (clauses.iter().map(|clause| clause.len().max(1).max(2) as u64 - 1).sum::<u64>(), clauses.len() as u64);
    let chain = m.saturating_sub(1);
    let ands = inner + chain;
    // The last Toffoli marks and has no mirror image.
    Textbook { ands, t_count: 7 * (2 * ands).saturating_sub(1), ancillas: held + chain.saturating_sub(1) }
}

fn main() {
    let mut files = files(Path::new(env!("CARGO_MANIFEST_DIR")).join("problems"));
    if let Some(folder) = std::env::var_os("TALLYMARK_INSTANCES") {
        files.extend(files_of(PathBuf::from(folder)));
    }
    println!(
        "{:44} {:>5} {:>8} {:>8} {:>7} {:>7} {:>7} {:>7} {:>8}",
        "file", "bits", "textbook", "feedback", "ratio", "cliff-t", "half", "quarter", "ancillas"
    );
    let mut ratios: BTreeMap<&str, Vec<(f64, String)>> = BTreeMap::new();
    for path in files {
        let name = path.file_name().unwrap_or_default().to_string_lossy().into_owned();
        let Ok(loaded) = load(&path.to_string_lossy(), &[], &mut Sources::new()) else { continue };
        let problem = &loaded.problem;
        if problem.bit_count() > MOST_BITS || problem.bit_count() == 0 || problem.clauses.len() > MOST_CLAUSES {
            continue;
        }
        let plain = textbook(problem);
        if plain.ands < FEWEST_ANDS {
            continue;
        }
        let network = build(problem, &Places::as_given(problem));
        let with = |level, qubits: Option<u64>| {
            let limits = Limits { qubits, ..Limits::default() };
            lower_within(&network, &Options { level, mark: Mark::Phase }, &limits, &Budget::unlimited())
        };
        let (Ok(feedback), Ok(unitary)) = (with(Level::Feedback, None), with(Level::CliffordT, None)) else { continue };
        let bits = problem.bit_count() as u64;
        let part = |part: u64| with(Level::Feedback, Some(bits + plain.ancillas / part)).ok();
        let ratio = |lowered: &Lowered, to: u64| lowered.figures.t_count as f64 / to as f64;
        let mut note = |key, value: f64| ratios.entry(key).or_default().push((value, name.clone()));
        note("feedback / textbook", ratio(&feedback, plain.t_count));
        note("clifford-t / textbook", ratio(&unitary, plain.t_count));
        note("ancillas / textbook", (feedback.figures.qubits - bits) as f64 / plain.ancillas as f64);
        let (half, quarter) = (part(2), part(4));
        if let Some(half) = &half {
            note("half the ancillas / textbook", ratio(half, plain.t_count));
        }
        if let Some(quarter) = &quarter {
            note("a quarter / own best", ratio(quarter, feedback.figures.t_count));
        }
        let show =
            |found: &Option<Lowered>| found.as_ref().map_or("-".to_owned(), |one| one.figures.t_count.to_string());
        println!(
            "{name:44} {bits:>5} {:>8} {:>8} {:>7.3} {:>7.3} {:>7} {:>7} {:>8}",
            plain.t_count,
            feedback.figures.t_count,
            ratio(&feedback, plain.t_count),
            ratio(&unitary, plain.t_count),
            show(&half),
            show(&quarter),
            format!("{}/{}", feedback.figures.qubits - bits, plain.ancillas),
        );
    }
    for (what, values) in &ratios {
        let mean = (values.iter().map(|(value, _)| value.max(1e-9).ln()).sum::<f64>() / values.len() as f64).exp();
        let worst = values.iter().max_by(|a, b| a.0.total_cmp(&b.0)).expect("at least one file");
        println!("{what}: {} files, geometric mean {mean:.3}, largest {:.3} ({})", values.len(), worst.0, worst.1);
    }
}

/// The problem files of a folder, by name.
fn files(folder: PathBuf) -> Vec<PathBuf> {
    let Ok(entries) = std::fs::read_dir(&folder) else { return Vec::new() };
    let mut files: Vec<PathBuf> = entries.filter_map(|entry| Some(entry.ok()?.path())).collect();
    files.retain(|path| path.extension().is_some_and(|ending| ["cnf", "tally"].iter().any(|known| ending == *known)));
    files.sort();
    files
}

/// The files that its index calls good.
fn files_of(folder: PathBuf) -> Vec<PathBuf> {
    let index = std::fs::read_to_string(folder.join("index.json")).unwrap_or_default();
    let index: serde_json::Value = serde_json::from_str(&index).unwrap_or_default();
    let good =
        |entry: &serde_json::Value| (entry["expect"] == "ok").then(|| Some(folder.join(entry["file"].as_str()?)))?;
    index.as_array().map_or_else(Vec::new, |list| list.iter().filter_map(good).collect())
}
