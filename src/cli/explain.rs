//! `tallymark explain FILE`: how the problem was read.

use clap::Args;

use crate::cli::exit::Exit;
use crate::cli::{Global, Outcome, input};
use crate::report::{explain, json};

#[derive(Args)]
pub(super) struct Options {
    /// The problem: .tally, .cnf, .opb, .aag, .aig (also .gz, .xz, .zst), or - for standard input
    file: String,
    /// Print at most this many variables, and as many constraints
    #[arg(long, value_name = "NUMBER", default_value_t = 200)]
    list: usize,
}

pub(super) fn run(global: &Global, options: &Options) -> Outcome {
    let (loaded, sources) = input::load(global, &options.file)?;
    let reading = explain::reading(&loaded.problem, &sources, options.list);
    if !global.json {
        return Ok((Exit::Done, explain::text(&loaded, &reading)));
    }
    let mut object = json::envelope("explain", &loaded, &sources, false);
    object.insert("variables".to_owned(), reading.variables.iter().map(explain::VariableLine::json).collect());
    object.insert("constraints".to_owned(), reading.constraints.iter().map(explain::ConstraintLine::json).collect());
    object.insert("objective".to_owned(), reading.objective.as_ref().map(explain::ConstraintLine::json).into());
    object.insert("shown".to_owned(), serde_json::to_value(reading.shown).expect("plain data"));
    Ok((Exit::Done, json::print(object)))
}
