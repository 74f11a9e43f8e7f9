//! Options that ask more of a problem than its file does: variables fixed, a threshold of the objective, answers left out.

use std::path::PathBuf;

use clap::Args;

use crate::cli::render::Failure;
use crate::diag::{Code, Diagnostic};
use crate::problem::{Domain, Problem, VarId};
use crate::search::shots;
use crate::source::Loaded;
use crate::span::Sources;

#[derive(Args, Clone)]
#[group(skip)]
#[command(next_help_heading = "To ask more of the problem")]
pub(super) struct Options {
    /// Give a variable a value, and search the others; may be repeated
    #[arg(long, global = true, value_name = "NAME=VALUE", value_parser = super::setting)]
    pub(super) fix: Vec<(String, String)>,
    /// Only solutions whose objective is at least as good as this
    #[arg(long, global = true, value_name = "VALUE", allow_negative_numbers = true)]
    pub(super) threshold: Option<i64>,
    /// Leave out the answers in this file of measured strings; may be repeated
    #[arg(long, global = true, value_name = "FILE")]
    pub(super) except: Vec<PathBuf>,
}

impl Options {
    /// What was asked, for the header of a circuit; nothing where nothing was.
    pub(super) fn in_words(&self) -> Option<String> {
        let fixed = self.fix.iter().map(|(name, value)| format!("{name} = {value}"));
        let threshold = self.threshold.iter().map(|value| format!("objective at least as good as {value}"));
        let except = self.except.iter().map(|path| format!("without the answers in {}", path.display()));
        let all: Vec<String> = fixed.chain(threshold).chain(except).collect();
        (!all.is_empty()).then(|| format!("restricted: {}", all.join("; ")))
    }

    /// Asks it of a problem that was read: variables first, then the threshold, then answers of the problem so restricted.
    pub(super) fn apply(&self, loaded: &mut Loaded, sources: &mut Sources) -> Result<(), Box<Failure>> {
        let usage = |diagnostic| Failure::input(vec![diagnostic], &Sources::new());
        if !self.fix.is_empty() {
            let values = self.fix.iter().map(|(name, value)| fixed(&loaded.problem, name, value));
            let values = values.collect::<Result<Vec<_>, _>>()?;
            loaded.problem = loaded.problem.fixed(&values);
        }
        if let Some(value) = self.threshold {
            let restricted = loaded.problem.at_least_as_good(value);
            loaded.problem = restricted.ok_or_else(|| usage(no_objective(value)))?;
        }
        for path in &self.except {
            let name = path.display().to_string();
            let text = std::fs::read_to_string(path).map_err(|error| {
                usage(Diagnostic::error(Code("F094"), format!("the answers cannot be read: {error}")).in_file(&name))
            })?;
            let reading = shots::Options::new(loaded.problem.bit_count());
            let read = shots::read(&text, &name, sources, &reading);
            let read = read.map_err(|messages| Failure::input(messages, sources))?;
            let answers: Vec<_> =
                read.counts.into_iter().map(|one| one.0).filter(|bits| loaded.problem.holds(bits)).collect();
            loaded.problem = loaded.problem.without(&answers);
        }
        Ok(())
    }
}

fn fixed(problem: &Problem, name: &str, value: &str) -> Result<(VarId, i64), Box<Failure>> {
    let found = format!("--fix {name}={value}");
    let Some(var) = problem.var_named(name) else {
        let diagnostic = Diagnostic::error(Code("U020"), format!("the problem has no variable `{name}`"))
            .found(found)
            .expected("the name of a variable as `tallymark explain` lists them");
        return Err(Failure::usage(diagnostic));
    };
    let domain = problem.vars()[var].domain;
    let number = problem.value_named(domain, value).ok_or_else(|| {
        let expected = match domain {
            Domain::YesNo => "yes or no".to_owned(),
            Domain::Range { lo, hi } => format!("a number from {lo} to {hi}"),
            Domain::Kind(kind) => {
                problem.kinds[kind].values.iter().map(|value| &**value).collect::<Vec<_>>().join(", ")
            }
        };
        let message = format!("`{name}` cannot be {value}");
        Failure::usage(Diagnostic::error(Code("U021"), message).found(found).expected(expected))
    })?;
    Ok((var, number))
}

fn no_objective(value: i64) -> Diagnostic {
    Diagnostic::error(Code("C093"), "the problem has no objective")
        .found(format!("--threshold {value}"))
        .expected("a problem that ends in `least` or `most`")
}
