//! One table of the instances and problems: what is searched, what the oracle costs, and what the whole search costs beside
//! the plain way, with every pass of the network checked.
//!
//! The plain way: every variable is searched, clause by clause; a clause of k literals takes k - 1 ANDs, and their conjunction
//! one less than there are clauses. A problem of the language is taken in the judge's clause form, all of whose variables
//! are searched. An iteration is the oracle and the reflection, of n - 1 ANDs, and an AND is four T gates (C. Gidney, "Halving
//! the cost of quantum addition", 2018); iterations go with the root of N / M.
#![expect(clippy::print_stdout, reason = "the table is what it is run for")]

use std::path::{Path, PathBuf};
use std::time::Duration;

use tallymark::budget::Budget;
use tallymark::circuit::{Level, Mark};
use tallymark::judge::clauses::encode;
use tallymark::judge::count::{self, Over};
use tallymark::judge::restate::restate;
use tallymark::make::network::build;
use tallymark::make::network::pass::check::{Shown, check};
use tallymark::make::network::pass::simplify;
use tallymark::pipeline::{Narrowing, Settings, choose};
use tallymark::places::{Claim, Places};
use tallymark::problem::Problem;
use tallymark::source::open::load;
use tallymark::span::Sources;

/// The logarithm to base 2 of a number of solutions, where it is found in some seconds.
pub(super) fn log2_count(problem: &Problem) -> Option<f64> {
    let options = count::Options { threads: 2, keep: 0, ..count::Options::default() };
    let budget = Budget::unlimited().within(Duration::from_secs(10));
    let tally = count::count(problem, Over::AllBits, &options, &budget).expect("the ways of counting agree");
    let exact = tally.exact()?;
    let shift = exact.bits().saturating_sub(53);
    let top: u64 = (exact >> shift).try_into().expect("53 bits");
    (top > 0).then(|| (top as f64).log2() + shift as f64)
}

/// A way to search: qubits searched, ANDs of the oracle, and the logarithm to base 2 of M where that is known.
struct Search {
    bits: usize,
    ands: usize,
    marked: Option<f64>,
}

impl Search {
    /// The logarithms of the iterations and of the T gates of all of them, up to what all searches share.
    fn iterations(&self) -> Option<f64> {
        Some((self.bits as f64 - self.marked?) / 2.0)
    }

    fn t_gates(&self) -> Option<f64> {
        let each = 4 * (self.ands + self.bits.saturating_sub(1));
        Some(self.iterations()? + (each.max(1) as f64).log2())
    }
}

fn plain(problem: &Problem, marked: Option<f64>) -> Search {
    let cnf = encode(problem);
    let ors: usize = cnf.clauses.iter().map(|clause| clause.len().saturating_sub(1)).sum();
    Search { bits: cnf.var_count, ands: (ors + cnf.clauses.len()).saturating_sub(1), marked }
}

/// The passes of a network with the least that was shown of any of them.
#[derive(Default)]
struct Passes {
    every_input: usize,
    refuted: usize,
    random: usize,
}

impl Passes {
    /// The ANDs after all passes, each of them checked.
    fn run(&mut self, problem: &Problem, places: &Places, name: &str) -> usize {
        let budget = Budget::unlimited();
        let network = simplify(build(problem, places), &budget, |step| {
            match check(step.before, step.passed, 1, &budget)? {
                Shown::EveryInput => self.every_input += 1,
                Shown::Refuted => self.refuted += 1,
                Shown::RandomInputs => self.random += 1,
            }
            Ok(())
        });
        network
            .unwrap_or_else(|fault: tallymark::make::network::pass::check::Difference| panic!("{name}: {fault}"))
            .and_count()
    }
}

/// The geometric mean of ratios.
#[derive(Default)]
struct Mean {
    logarithms: f64,
    number: u32,
}

impl Mean {
    fn add(&mut self, ratio: f64) {
        if ratio > 0.0 {
            self.logarithms += ratio.ln();
            self.number += 1;
        }
    }

    fn of(&self) -> f64 {
        (self.logarithms / f64::from(self.number.max(1))).exp()
    }
}

struct Table {
    passes: Passes,
    structured: Mean,
    random: Mean,
}

impl Table {
    fn rows(&mut self, path: &Path, family: &str) {
        let name = path.file_name().unwrap_or_default().to_string_lossy().into_owned();
        let problem = load(&path.to_string_lossy(), &[], &mut Sources::new()).expect("a good file").problem;
        let solutions = log2_count(&problem);
        let plain = plain(&problem, solutions);
        let as_given = Places::as_given(&problem);
        let given = self.passes.run(&problem, &as_given, &name);
        assert!(given <= plain.ands, "{name}: {given} ANDs of {}", plain.ands);
        let ratio = given as f64 / plain.ands as f64;
        match family {
            "random-ksat" => self.random.add(ratio),
            "edge" | "quirk" => {}
            _ => self.structured.add(ratio),
        }
        for narrowing in [Narrowing::OneForOne, Narrowing::OneForMany] {
            let settings = Settings { level: Level::Toffoli, mark: Mark::Phase, seed: 1, threads: 1 };
            let chosen = choose(&problem, narrowing, settings, &Budget::unlimited()).expect("a choice").0.places;
            let marked = match chosen.claim {
                Claim::OneForOne if problem.shown.is_none() => solutions,
                _ => log2_count(&restate(&problem, &chosen).problem),
            };
            let ands = if chosen == as_given { given } else { self.passes.run(&problem, &chosen, &name) };
            let narrow = Search { bits: chosen.search_len(), ands, marked };
            let given = Search { bits: problem.bit_count(), ands: given, marked: solutions };
            let less =
                |a: Option<f64>, b: Option<f64>| a.zip(b).map_or("?".to_owned(), |(a, b)| format!("{:.1}", a - b));
            println!(
                "{name:32} {:4} {:>5} {:>5} {:>7} {:>6} {:>6} {:>6} {ratio:>6.3} {:>8}",
                if narrowing == Narrowing::OneForOne { "one" } else { "any" },
                given.bits,
                narrow.bits,
                less(given.iterations(), narrow.iterations()),
                given.ands,
                narrow.ands,
                plain.ands,
                less(narrow.t_gates(), plain.t_gates()),
            );
        }
    }
}

/// `cargo test --release -- --ignored table_of_searches --nocapture`.
#[test]
#[ignore = "prints a table and takes minutes; TALLYMARK_INSTANCES names a folder with more files"]
fn table_of_searches() {
    println!(
        "{:32} mode  bits after    gain   ANDs narrow  plain  ratio  log2 of T / plain T",
        "instance (gain: log2 of iterations)"
    );
    let mut table = Table { passes: Passes::default(), structured: Mean::default(), random: Mean::default() };
    for (path, family) in files() {
        table.rows(&path, &family);
    }
    let Table { passes, structured, random } = table;
    println!(
        "ANDs to plain ANDs: structured {:.3} ({}), random {:.3}",
        structured.of(),
        structured.number,
        random.of()
    );
    println!(
        "passes: {} equal on every input, {} refuted, {} on random inputs only",
        passes.every_input, passes.refuted, passes.random
    );
    assert!(structured.of() <= 1.0 / 3.0);
}

/// The problems, and the good files of the folder of instances.
fn files() -> Vec<(PathBuf, String)> {
    let problems = Path::new(env!("CARGO_MANIFEST_DIR")).join("problems");
    let mut files: Vec<(PathBuf, String)> = std::fs::read_dir(&problems)
        .expect("the problems")
        .filter_map(|entry| Some(entry.ok()?.path()))
        .filter(|path| path.extension().is_some_and(|ending| ending == "cnf" || ending == "tally"))
        .map(|path| (path, "problem".to_owned()))
        .collect();
    files.sort();
    assert!(files.len() > 9, "the problems");
    if let Some(folder) = std::env::var_os("TALLYMARK_INSTANCES").map(PathBuf::from) {
        let index = std::fs::read_to_string(folder.join("index.json")).expect("an index");
        let index: serde_json::Value = serde_json::from_str(&index).expect("an index");
        for entry in index.as_array().expect("a list").iter().filter(|entry| entry["expect"] == "ok") {
            let [file, family] = ["file", "family"].map(|key| entry[key].as_str().expect("a name"));
            files.push((folder.join(file), family.to_owned()));
        }
    }
    files
}
