//! `tallymark plan [FILE]`: what to run, for what is known and for what is wanted.

mod options;

use num_bigint::BigUint;
use num_traits::{One, Zero};
use serde_json::{Map, Value};

use crate::circuit::Mark;
use crate::cli::exit::Exit;
use crate::cli::render::Failure;
use crate::cli::{Global, Outcome, input, progress};
use crate::diag::{Code, Diagnostic};
use crate::judge::count::Counted;
use crate::pipeline;
use crate::places::Places;
use crate::report::plan::answer_json;
use crate::report::{json, objective, start, summary};
use crate::search::Advice;
use crate::search::plan::split::Machines;
use crate::search::plan::{self, Aim, Answer, Erring, Known, Question, Unanswerable, noise};
use crate::source::Loaded;
use crate::span::Sources;

pub(super) use options::{Options, aim, inner_chance, number};

pub(super) fn run(global: &Global, options: &Options) -> Outcome {
    match &options.file {
        Some(file) => for_problem(global, options, file),
        None => for_numbers(global, options),
    }
}

/// The start state, and what is known of it.
struct Ground {
    space: BigUint,
    /// All strings of the register.
    strings: BigUint,
    /// How many bits can be guessed.
    bits: u64,
    /// The error of an iteration.
    error: Option<f64>,
}

fn for_numbers(global: &Global, options: &Options) -> Outcome {
    let space = options.space.clone().unwrap_or_default();
    let known = given(options, &space).unwrap_or(Known::Nothing);
    if space.is_zero() {
        return Err(Failure::usage(diagnostic(&Unanswerable::EmptySpace, options, &space)));
    }
    let strings = BigUint::one() << (&space - 1u32).bits();
    let ground = Ground { bits: space.bits() - 1, strings, error: options.error, space };
    let answer =
        answer(options, &ground, known).map_err(|why| Failure::usage(diagnostic(&why, options, &ground.space)))?;
    let object = json::bare_envelope("plan", false);
    Ok(print(global, None, object, Some(&answer), &answer.outline.advice, Exit::Done))
}

fn for_problem(global: &Global, options: &Options, file: &str) -> Outcome {
    let (loaded, sources) = input::load(global, file)?;
    let mut object = json::envelope("plan", &loaded, &sources, false);
    let (budget, line) = progress::budget(global);
    let settings = input::settings(global, options.level, Mark::Phase);
    let stage = |error: pipeline::Error| Failure::stage(&error, &sources);
    let wanted = input::wanted(global, options.start, true);
    if options.objective {
        let places = input::places_from(global, &loaded, wanted, settings, &budget).map_err(stage)?;
        let ladder = pipeline::ladder(&loaded.problem, &places, settings, &budget).map_err(stage)?;
        drop(line);
        if !global.json {
            return Ok((Exit::Done, objective::text(&loaded, &ladder)));
        }
        object.insert("objective".to_owned(), objective::json(&ladder));
        return Ok((Exit::Done, json::print(object)));
    }
    let (places, starts) = input::places_and_prices(global, &loaded, wanted, settings, &budget).map_err(stage)?;
    if !starts.is_empty() {
        object.insert("starts".to_owned(), start::json(&starts));
    }
    let mut ground = ground(&loaded, &places, options.error);
    if let Some(each) = options.gate_error {
        let gates = pipeline::gates_of_iteration(&loaded.problem, &places, settings, &budget).map_err(stage)?;
        ground.error = Some(noise::error_of_gates([(each, gates)]));
        object.insert("gates_of_iteration".to_owned(), gates.into());
    }
    let (mut known, mut advice, mut partial) = (given(options, &ground.space), Vec::new(), false);
    if known.is_none() && needs_tally(options) {
        let counted = pipeline::count(&loaded.problem, &places, settings, &budget).map_err(stage)?;
        object.insert("tally".to_owned(), json::tally_json(&counted));
        advice = pipeline::advice_on(&loaded.problem, &places, &counted);
        partial = counted.marked().is_none();
        known = told_by(&counted, options);
    } else if loaded.problem.bit_count() == 0 {
        advice.push(Advice::nothing_to_search());
    }
    drop(line);
    let exit = if partial { Exit::Unfinished } else { Exit::Done };
    let known = match known {
        Some(known) => known,
        None if partial => return Ok(print(global, Some(&loaded), object, None, &advice, exit)),
        None => Known::Nothing,
    };
    let mut answer = match answer(options, &ground, known) {
        Ok(answer) => answer,
        // What was counted so far does not suffice for this aim.
        Err(_) if partial => return Ok(print(global, Some(&loaded), object, None, &advice, exit)),
        Err(why) => return Err(unanswered(&why, options, &ground, &sources)),
    };
    advice.append(&mut answer.outline.advice);
    advice.extend(start::advice(&starts, wanted.name()));
    answer.outline.advice.clone_from(&advice);
    let (exit, mut text) = print(global, Some(&loaded), object, Some(&answer), &advice, exit);
    if !global.json {
        text += &start::lines(&starts);
    }
    Ok((exit, text))
}

fn ground(loaded: &Loaded, places: &Places, error: Option<f64>) -> Ground {
    let bits = loaded.problem.bit_count() as u64;
    Ground { space: Counted::space(places), strings: BigUint::one() << places.search_len(), bits, error }
}

/// What the options say of the count.
fn given(options: &Options, space: &BigUint) -> Option<Known> {
    match (&options.count, &options.low, &options.high) {
        (Some(count), ..) => Some(Known::Exactly(count.clone())),
        (None, None, None) => None,
        (None, low, high) => {
            let (low, high) = (low.clone().unwrap_or_default(), high.clone().unwrap_or_else(|| space.clone()));
            Some(Known::Between(low, high))
        }
    }
}

/// Counting is spared where nothing rests on it.
fn needs_tally(options: &Options) -> bool {
    !matches!(options.aim, Some(Aim::NothingKnown | Aim::CountOnMachine)) || options.extras_need_count()
}

/// What a tally says; an interval only where an aim for intervals is named.
fn told_by(counted: &Counted, options: &Options) -> Option<Known> {
    match (counted.marked(), options.aim) {
        (Some(marked), _) => Some(Known::Exactly(marked.clone())),
        (None, Some(Aim::BestWorstCase | Aim::AtLeastSoMany)) => {
            let marks = counted.marks();
            Some(Known::Between(marks.low.clone(), marks.high.clone()))
        }
        (None, _) => None,
    }
}

fn answer(options: &Options, ground: &Ground, known: Known) -> Result<Answer, Unanswerable> {
    let usual = known.usual_aim(&ground.space);
    let guessing = options.depth.is_some() || options.machines.is_some();
    let machines = Machines {
        machines: options.machines.map_or(1, u64::from),
        depth: options.depth,
        error: ground.error.unwrap_or(0.0),
        try_cost: options.try_cost,
    };
    let erring = |error| Erring { error, strings: ground.strings.clone(), guess_cost: options.guess_cost };
    plan::answer(&Question {
        space: ground.space.clone(),
        known,
        aim: options.aim.unwrap_or(usual),
        bound: options.within.clone(),
        try_cost: options.try_cost,
        failure: options.failure,
        precision: options.precision,
        confidence: options.confidence,
        erring: ground.error.map(erring),
        machines: guessing.then_some((machines, ground.bits)),
        find_all: options.find_all,
    })
}

fn print(
    global: &Global,
    loaded: Option<&Loaded>,
    mut object: Map<String, Value>,
    answer: Option<&Answer>,
    advice: &[Advice],
    exit: Exit,
) -> (Exit, String) {
    if !global.json {
        return (exit, summary::plan(loaded, answer, advice));
    }
    object.insert("partial".to_owned(), (exit == Exit::Unfinished).into());
    object.insert("plan".to_owned(), answer.map(answer_json).into());
    object.insert("advice".to_owned(), serde_json::to_value(advice).expect("plain data"));
    (exit, json::print(object))
}

fn unanswered(why: &Unanswerable, options: &Options, ground: &Ground, sources: &Sources) -> Box<Failure> {
    Failure::input(vec![diagnostic(why, options, &ground.space)], sources)
}

/// The message for a question without an answer.
fn diagnostic(why: &Unanswerable, options: &Options, space: &BigUint) -> Diagnostic {
    let new = |code| Diagnostic::error(Code(code), why.to_string());
    match why {
        Unanswerable::OutsideSpace => {
            Diagnostic::error(Code("U002"), "the marked states are not among those of the start state")
                .found(found(options))
                .expected(format!("at most {}, the size of the start state, and no empty interval", words(space)))
        }
        Unanswerable::EmptySpace => new("U005").found("--space 0").expected("at least one state"),
        Unanswerable::NeedsCount(_) => new("U006")
            .expected("--count M")
            .help("best-worst-case, at-least-so-many, nothing-known and count-on-machine do without it"),
        Unanswerable::NeedsBound => new("U007").expected("--within ITERATIONS"),
        Unanswerable::FixedPoint(_) => new("U008")
            .expected("--low M with M at least 1, or --count M")
            .help("with nothing known, --aim nothing-known serves"),
        Unanswerable::FreeTries => new("U009").found("--try-cost 0").expected("a cost above 0"),
    }
}

fn found(options: &Options) -> String {
    let named = [("--count", &options.count), ("--low", &options.low), ("--high", &options.high)];
    let given = named.iter().filter_map(|(name, value)| Some(format!("{name} {}", words(value.as_ref()?))));
    given.collect::<Vec<_>>().join(" ")
}

fn words(number: &BigUint) -> String {
    crate::search::number::in_words(number)
}
