//! `tallymark explain FILE`: how the problem was read.

use clap::Args;

use crate::circuit::{Level, Mark};
use crate::cli::exit::Exit;
use crate::cli::render::Failure;
use crate::cli::{Global, Outcome, input, progress};
use crate::report::{explain, json};
use crate::{pipeline, structure};

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
    let (budget, line) = progress::budget(global);
    let settings = input::settings(global, Level::Toffoli, Mark::Phase);
    let (taken, other) = pipeline::choose(&loaded.problem, input::narrowing(global), settings, &budget)
        .map_err(|error| Failure::stage(&error, &sources))?;
    drop(line);
    let structure = structure::read(&loaded.problem.clauses, loaded.problem.bit_count()).in_words();
    if !global.json {
        let text = explain::text(&loaded, &reading);
        let one = explain::Priced { places: &taken.places, ands: taken.ands };
        let two = other.as_ref().map(|other| explain::Priced { places: &other.places, ands: other.ands });
        let narrowing = explain::narrowing(&loaded.problem, &structure, &one, two.as_ref(), options.list);
        return Ok((Exit::Done, text + &narrowing));
    }
    let mut object = json::envelope("explain", &loaded, &sources, false);
    object.insert("variables".to_owned(), reading.variables.iter().map(explain::VariableLine::json).collect());
    object.insert("constraints".to_owned(), reading.constraints.iter().map(explain::ConstraintLine::json).collect());
    object.insert("objective".to_owned(), reading.objective.as_ref().map(explain::ConstraintLine::json).into());
    object.insert("shown".to_owned(), serde_json::to_value(reading.shown).expect("plain data"));
    object.insert("structure".to_owned(), structure.into());
    object.insert("narrowing".to_owned(), json::narrowing_json(&loaded.problem, &taken.places));
    Ok((Exit::Done, json::print(object)))
}
