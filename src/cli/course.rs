//! Which whole search is written: the options of `compile --whole`, and the course that follows from them.

use clap::Args;
use num_bigint::BigUint;
use num_traits::Zero;

use crate::budget::Budget;
use crate::cli::plan;
use crate::cli::render::Failure;
use crate::diag::{Code, Diagnostic};
use crate::judge::count::Counted;
use crate::pipeline::{self, Settings};
use crate::places::Places;
use crate::search::course::Course;
use crate::search::plan::{Aim, Known, Question, answer};
use crate::source::Loaded;
use crate::span::Sources;

#[derive(Args)]
#[group(skip)]
#[command(next_help_heading = "The search, with --whole")]
pub(super) struct Options {
    /// With --whole: the aim of the plan that the search carries out, as `plan` names them [default: highest-success]
    #[arg(long, value_name = "NAME", requires = "whole", value_parser = plan::aim)]
    aim: Option<Aim>,
    /// With --whole: plan for this many marked states instead of counting them
    #[arg(long, value_name = "NUMBER", requires = "whole", value_parser = plan::number, conflicts_with_all = ["low", "high"])]
    count: Option<BigUint>,
    /// With --whole: at least so many states are marked
    #[arg(long, value_name = "NUMBER", requires = "whole", value_parser = plan::number)]
    low: Option<BigUint>,
    /// With --whole: at most so many states are marked
    #[arg(long, value_name = "NUMBER", requires = "whole", value_parser = plan::number)]
    high: Option<BigUint>,
    /// With --aim highest-within-bound: the most iterations
    #[arg(long, value_name = "NUMBER", requires = "whole", value_parser = plan::number)]
    within: Option<BigUint>,
    /// With --aim at-least-so-many or count-on-machine: the failure that is allowed
    #[arg(long, value_name = "CHANCE", requires = "whole", default_value_t = 0.01, value_parser = plan::inner_chance)]
    failure: f64,
    /// With --aim count-on-machine: how near an estimate of M/N must come [default: half a state]
    #[arg(long, value_name = "SHARE", requires = "whole", value_parser = plan::inner_chance)]
    precision: Option<f64>,
}

/// The course that the options ask for, and the tally where one was needed.
pub(super) fn course(
    loaded: &Loaded,
    places: &Places,
    settings: Settings,
    options: &Options,
    budget: &Budget,
    sources: &Sources,
) -> Result<(Course, Option<Counted>), Box<Failure>> {
    let Some(aim) = options.aim else {
        let (iterations, counted) = planned(loaded, places, settings, options.count.as_ref(), budget, sources)?;
        let number = u64::try_from(&iterations).map_err(|_| pipeline::Error::TooManyIterations(iterations.clone()));
        return Ok((Course::Plain(number.map_err(|error| Failure::stage(&error, sources))?), counted));
    };
    let space = Counted::space(places);
    let mut counted = None;
    let known = match (&options.count, &options.low, &options.high) {
        (Some(count), ..) => Known::Exactly(count.clone()),
        (None, None, None) if matches!(aim, Aim::NothingKnown | Aim::CountOnMachine) => Known::Nothing,
        (None, None, None) => {
            let found = pipeline::count(&loaded.problem, places, settings, budget)
                .map_err(|error| Failure::stage(&error, sources))?;
            let marks = found.marks();
            let known = match found.marked() {
                Some(marked) => Known::Exactly(marked.clone()),
                None => Known::Between(marks.low.clone(), marks.high.clone()),
            };
            counted = Some(found);
            known
        }
        (None, low, high) => {
            Known::Between(low.clone().unwrap_or_default(), high.clone().unwrap_or_else(|| space.clone()))
        }
    };
    let (bound, failure, precision) = (options.within.clone(), options.failure, options.precision);
    let question = Question { aim, bound, failure, precision, ..Question::new(space, known) };
    let refused = |text: String| {
        let diagnostic = Diagnostic::error(Code("C095"), text).help("`tallymark plan` with the same options says more");
        Failure::input(vec![diagnostic], sources)
    };
    let found = answer(&question).map_err(|why| refused(why.to_string()))?;
    let course = Course::of(&found.details);
    let course =
        course.ok_or_else(|| refused("this plan has no circuit: it is too long, or marks nothing".to_owned()))?;
    Ok((course, counted))
}

/// The planned iterations, for a number of marked states that is known from elsewhere or for the tally.
pub(super) fn planned(
    loaded: &Loaded,
    places: &Places,
    settings: Settings,
    count: Option<&BigUint>,
    budget: &Budget,
    sources: &Sources,
) -> Result<(BigUint, Option<Counted>), Box<Failure>> {
    let space = Counted::space(places);
    let (marked, counted) = if let Some(marked) = count {
        (Some(marked.clone()), None)
    } else {
        let counted = pipeline::count(&loaded.problem, places, settings, budget)
            .map_err(|error| Failure::stage(&error, sources))?;
        (counted.marked().cloned(), Some(counted))
    };
    match marked {
        Some(marked) if !marked.is_zero() && marked < space => {
            Ok((crate::search::plan(&space, &marked).iterations, counted))
        }
        Some(_) => Err(Failure::usage(nothing_to_find())),
        None => Err(Failure::unfinished(unknown_count(), sources)),
    }
}

/// The course in a line of the header.
pub(super) fn in_words(course: &Course) -> String {
    match course {
        Course::Plain(iterations) => format!("course: {iterations} iterations"),
        Course::Given => "course: as many iterations as the input says".to_owned(),
        Course::Matched { iterations, phase } => format!("course: {iterations} iterations with the phase {phase}"),
        Course::Sequence(phases) => format!("course: {} iterations with phases of their own", phases.len()),
        Course::Counting(digits) => {
            format!("course: the share of marked states, to {digits} binary digits of its angle")
        }
    }
}

fn nothing_to_find() -> Diagnostic {
    Diagnostic::error(Code("C091"), "no state or every state is marked, so a search finds nothing new")
        .expected("at least one marked and one unmarked state")
        .help("`tallymark plan` says more")
}

fn unknown_count() -> Diagnostic {
    Diagnostic::error(Code("C092"), "the number of marked states is not known, so no iteration count follows")
        .help("allow more time with --time, or give the number with --count")
}
