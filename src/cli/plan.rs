//! `tallymark plan FILE`: iterations and success probability.

use clap::Args;
use num_bigint::BigUint;

use crate::circuit::{Level, Mark};
use crate::cli::exit::Exit;
use crate::cli::render::Failure;
use crate::cli::{Global, Outcome, input, progress};
use crate::diag::{Code, Diagnostic};
use crate::judge::count::Counted;
use crate::pipeline;
use crate::places::Places;
use crate::report::{json, summary};
use crate::search::{Advice, Plan};

#[derive(Args)]
pub(super) struct Options {
    /// The problem: .tally, .cnf (also .gz, .xz, .zst), or - for standard input
    file: String,
    /// Plan for this many marked states instead of counting them
    #[arg(long, value_name = "NUMBER", value_parser = number)]
    count: Option<BigUint>,
}

pub(super) fn run(global: &Global, options: &Options) -> Outcome {
    let (loaded, sources) = input::load(global, &options.file)?;
    let places = Places::as_given(&loaded.problem);
    let mut object = json::envelope("plan", &loaded, &sources, false);
    let (plan, advice): (Option<Plan>, Vec<Advice>) = if let Some(marked) = &options.count {
        let space = Counted::space(&places);
        if *marked > space {
            return Err(Failure::usage(too_many(marked, &space)));
        }
        let plan = crate::search::plan(&space, marked);
        let advice = plan.advice.clone();
        (Some(plan), advice)
    } else {
        let (budget, line) = progress::budget(global);
        let settings = input::settings(global, Level::Toffoli, Mark::Phase);
        let counted = pipeline::count(&loaded.problem, &places, settings, &budget)
            .map_err(|error| Failure::stage(&error, &sources))?;
        drop(line);
        object.insert("tally".to_owned(), json::tally_json(&counted));
        pipeline::plan_for(&loaded.problem, &counted)
    };
    let exit = if plan.is_some() { Exit::Done } else { Exit::Unfinished };
    if !global.json {
        return Ok((exit, summary::plan(&loaded, plan.as_ref(), &advice)));
    }
    object.insert("partial".to_owned(), plan.is_none().into());
    object.insert("plan".to_owned(), plan.as_ref().map(json::plan_json).into());
    object.insert("advice".to_owned(), serde_json::to_value(&advice).expect("plain data"));
    Ok((exit, json::print(object)))
}

fn too_many(marked: &BigUint, space: &BigUint) -> Diagnostic {
    Diagnostic::error(Code("U002"), "more states are marked than there are")
        .found(format!("--count {marked}"))
        .expected(format!("at most {space}, the size of the start state"))
}

/// A natural number of any size.
pub(super) fn number(text: &str) -> Result<BigUint, String> {
    text.parse().map_err(|_| "expected a natural number".to_owned())
}
