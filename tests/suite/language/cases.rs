//! Case files: a puzzle with what is expected of it in lines `#: key value`, after the text so that places are easy to
//! read off. Unknown keys are failures.
//!
//! | key | value |
//! |---|---|
//! | `set` | a `--set` to read the file with |
//! | `bits`, `solutions`, `constraints` | numbers |
//! | `error`, `warning` | code, then the places of all labels: `T022 3:6-3:9, 1:7-1:8`; a place in a set is `n@1:1-1:2` |

use std::path::{Path, PathBuf};

use tallymark::diag::Diagnostic;
use tallymark::problem::Problem;
use tallymark::source::tally;
use tallymark::span::{Sources, Span};

/// A case.
pub(super) struct Case {
    pub(super) path: PathBuf,
    pub(super) text: String,
    pub(super) keys: Vec<(String, String)>,
}

/// What reading it gave.
pub(super) struct Outcome {
    pub(super) problem: Option<Problem>,
    /// `error CODE places`, `warning CODE places`, in order.
    pub(super) messages: Vec<String>,
    pub(super) diagnostics: Vec<Diagnostic>,
}

/// All cases of a folder, by name.
pub(super) fn cases(folder: &str) -> Vec<Case> {
    let root = Path::new(env!("CARGO_MANIFEST_DIR")).join(folder);
    let entries = std::fs::read_dir(&root).unwrap_or_else(|error| panic!("{}: {error}", root.display()));
    let mut paths: Vec<PathBuf> = entries.map(|entry| entry.unwrap().path()).collect();
    paths.retain(|path| path.extension().is_some_and(|kind| kind == "tally"));
    paths.sort();
    paths.into_iter().map(read_case).collect()
}

/// One case.
pub(super) fn read_case(path: PathBuf) -> Case {
    let text = std::fs::read_to_string(&path).unwrap();
    let keys = text.lines().filter_map(|line| line.strip_prefix("#:")).map(|line| {
        let line = line.trim();
        let (key, value) = line.split_once(' ').unwrap_or((line, ""));
        let known = ["set", "bits", "solutions", "constraints", "error", "warning"];
        assert!(known.contains(&key), "{}: unknown key `{key}`", path.display());
        (key.to_owned(), value.trim().to_owned())
    });
    let keys = keys.collect();
    Case { path, keys, text }
}

impl Case {
    /// The values of a key.
    pub(super) fn all(&self, key: &str) -> Vec<&str> {
        self.keys.iter().filter(|(name, _)| name == key).map(|(_, value)| value.as_str()).collect()
    }

    /// The number under a key.
    pub(super) fn number(&self, key: &str) -> Option<u64> {
        let values = self.all(key);
        assert!(values.len() <= 1, "{}: `{key}` more than once", self.path.display());
        values.first().map(|value| value.parse().unwrap())
    }

    /// The messages the case expects.
    pub(super) fn messages(&self) -> Vec<String> {
        let messages = self.keys.iter().filter(|(key, _)| key == "error" || key == "warning");
        messages.map(|(key, value)| format!("{key} {value}")).collect()
    }

    /// Reads the puzzle.
    pub(super) fn run(&self) -> Outcome {
        let sets: Vec<(String, String)> = self
            .all("set")
            .into_iter()
            .map(|set| {
                let (name, value) = set.split_once('=').expect("a set has a value");
                (name.to_owned(), value.to_owned())
            })
            .collect();
        let mut sources = Sources::new();
        let (problem, diagnostics) = match tally::read(&self.text, "case", &sets, &mut sources) {
            Ok((problem, warnings)) => (Some(problem), warnings),
            Err(mistakes) => (None, mistakes),
        };
        let messages = diagnostics.iter().map(|diagnostic| message(&sources, diagnostic)).collect();
        Outcome { problem, messages, diagnostics }
    }

    /// With `BLESS=1`, writes the messages found into the case; else compares.
    pub(super) fn expect_messages(&self, found: &[String]) {
        if std::env::var("BLESS").is_ok_and(|bless| bless == "1") {
            let kept =
                self.text.lines().filter(|line| !line.starts_with("#: error") && !line.starts_with("#: warning"));
            let blessed = found.iter().map(|message| format!("#: {message}"));
            let lines: Vec<String> = kept.map(str::to_owned).chain(blessed).collect();
            std::fs::write(&self.path, lines.join("\n") + "\n").unwrap();
            return;
        }
        assert_eq!(self.messages(), found, "{}: expected on the left, found on the right", self.path.display());
    }
}

fn message(sources: &Sources, diagnostic: &Diagnostic) -> String {
    let places: Vec<String> = diagnostic.labels.iter().map(|label| place(sources, label.span)).collect();
    let severity = if diagnostic.is_error() { "error" } else { "warning" };
    format!("{severity} {} {}", diagnostic.code, places.join(", ")).trim_end().to_owned()
}

/// `line:column-line:column`, the second one after the last character; before it the name of a set.
fn place(sources: &Sources, span: Span) -> String {
    let (from, to) = (sources.position(span), sources.position(Span { lo: span.hi, ..span }));
    let file = sources.file(span.file).name.strip_prefix("--set ").map_or(String::new(), |name| format!("{name}@"));
    format!("{file}{}:{}-{}:{}", from.line, from.column, to.line, to.column)
}
