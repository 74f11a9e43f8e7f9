//! What every command begins with: the problem, the places, the settings.

use std::path::Path;

use crate::budget::Budget;
use crate::circuit::{Level, Mark};
use crate::cli::Global;
use crate::cli::render::{Failure, show};
use crate::diag::{Code, Diagnostic};
use crate::make::lower::LowerError;
use crate::make::start::Choice;
use crate::pipeline::{self, Narrowing, Settings};
use crate::places::Places;
use crate::report;
use crate::search::price::{PRECISION, StartPrice};
use crate::source::{self, Loaded};
use crate::span::Sources;

/// Reads the problem; warnings go to standard error unless JSON carries them.
pub(super) fn load(global: &Global, file: &str) -> Result<(Loaded, Sources), Box<Failure>> {
    let mut sources = Sources::new();
    match source::load(file, &global.set, &mut sources) {
        Ok(mut loaded) => {
            global.restrict.apply(&mut loaded, &mut sources)?;
            if !global.json {
                show(&loaded.warnings, &sources);
            }
            Ok((loaded, sources))
        }
        Err(diagnostics) => Err(Failure::input(diagnostics, &sources)),
    }
}

/// The settings that the options give.
pub(super) fn settings(global: &Global, level: Level, mark: Mark) -> Settings {
    let machine = || std::thread::available_parallelism().map_or(1, usize::from);
    Settings { level, mark, seed: global.seed, threads: global.threads.map_or_else(machine, usize::from) }
}

/// The level of this name.
pub(super) fn level(name: &str) -> Result<Level, String> {
    Level::ALL.into_iter().find(|level| level.name() == name).ok_or_else(|| {
        let names: Vec<_> = Level::ALL.iter().map(|level| level.name()).collect();
        format!("expected one of {}", names.join(", "))
    })
}

/// The way of marking of this name.
pub(super) fn mark(name: &str) -> Result<Mark, String> {
    match name {
        "phase" => Ok(Mark::Phase),
        "bit" => Ok(Mark::Bit),
        _ => Err("expected phase or bit".to_owned()),
    }
}

/// Which start state is wanted.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub(super) enum Wanted {
    /// This one.
    Choice(Choice),
    /// The one whose search is the cheapest.
    Cheapest,
}

impl Wanted {
    /// All strings.
    pub(super) const STRINGS: Self = Self::Choice(Choice::Strings);

    /// The name on the command line.
    pub(super) fn name(self) -> &'static str {
        match self {
            Wanted::Choice(choice) => choice.name(),
            Wanted::Cheapest => "cheapest",
        }
    }
}

/// The start state of this name.
pub(super) fn start(name: &str) -> Result<Wanted, String> {
    let found = Choice::ALL.into_iter().find(|choice| choice.name() == name).map(Wanted::Choice);
    let found = found.or_else(|| (name == "cheapest").then_some(Wanted::Cheapest));
    found.ok_or_else(|| "expected strings, domains, groups or cheapest".to_owned())
}

/// What is wanted where nothing is said: the cheapest for a whole search. An oracle alone marks all strings, since whoever
/// puts it after a layer of Hadamard gates would not see that the start was another; and `--any` is about strings.
pub(super) fn wanted(global: &Global, asked: Option<Wanted>, is_search: bool) -> Wanted {
    asked.unwrap_or(if is_search && !global.any { Wanted::Cheapest } else { Wanted::STRINGS })
}

/// The places of a search from the start state that is wanted. From all strings, bits that others determine are computed
/// as the options want it; the other starts are made of the bits as given.
pub(super) fn places_from(
    global: &Global,
    loaded: &Loaded,
    wanted: Wanted,
    settings: Settings,
    budget: &Budget,
) -> Result<Places, pipeline::Error> {
    match wanted {
        Wanted::Choice(Choice::Strings) => choose(global, loaded, settings, budget),
        Wanted::Choice(choice) => Ok(pipeline::places_from(&loaded.problem, choice)),
        Wanted::Cheapest => Ok(places_and_prices(global, loaded, wanted, settings, budget)?.0),
    }
}

/// The same, and what a search costs from each start there is, the cheapest first; no prices where nothing is to be compared.
pub(super) fn places_and_prices(
    global: &Global,
    loaded: &Loaded,
    wanted: Wanted,
    settings: Settings,
    budget: &Budget,
) -> Result<(Places, Vec<StartPrice>), pipeline::Error> {
    let strings = choose(global, loaded, settings, budget)?;
    if strings.search_len() == 0 && wanted == Wanted::Cheapest {
        return Ok((strings, Vec::new()));
    }
    Ok(match wanted {
        Wanted::Cheapest => {
            let priced = match pipeline::priced(&loaded.problem, &strings, settings, PRECISION, budget) {
                // Nothing to search for: whoever wants a circuit is told so, and all others have their answer.
                Err(pipeline::Error::Lower(LowerError::EverythingMarked | LowerError::NothingMarked)) => Vec::new(),
                // What is left to do without it says what the budget allowed.
                Err(_) if budget.spent() => Vec::new(),
                priced => priced?,
            };
            let prices = priced.iter().map(|one| one.price.clone()).collect();
            (priced.into_iter().next().map_or(strings, |cheapest| cheapest.places), prices)
        }
        Wanted::Choice(choice) => {
            let prices = pipeline::prices(&loaded.problem, &strings, settings, budget);
            let is_plain = choice == Choice::Strings;
            (if is_plain { strings } else { pipeline::places_from(&loaded.problem, choice) }, prices)
        }
    })
}

/// A circuit over no bits is not written.
pub(super) fn refuse_empty(loaded: &Loaded, sources: &Sources) -> Result<(), Box<Failure>> {
    if loaded.problem.bit_count() > 0 {
        return Ok(());
    }
    let diagnostic = Diagnostic::error(Code("C001"), "the problem has no bits, so there is nothing to search")
        .in_file(&loaded.file)
        .expected("a problem with something to choose")
        .help("`tallymark count` and `tallymark plan` answer for it");
    Err(Failure::input(vec![diagnostic], sources))
}

/// Decides what is searched, as the options want it.
pub(super) fn choose(
    global: &Global,
    loaded: &Loaded,
    settings: Settings,
    budget: &Budget,
) -> Result<Places, pipeline::Error> {
    Ok(pipeline::choose(&loaded.problem, narrowing(global), settings, budget)?.0.places)
}

/// Which narrowing the options want.
pub(super) fn narrowing(global: &Global) -> Narrowing {
    match (global.no_narrowing, global.any) {
        (true, _) => Narrowing::Off,
        (false, true) => Narrowing::OneForMany,
        (false, false) => Narrowing::OneForOne,
    }
}

/// The places in this file, which must fit the problem; without a file, bit i is search[i].
pub(super) fn places(path: Option<&Path>, loaded: &Loaded, sources: &Sources) -> Result<Places, Box<Failure>> {
    let Some(path) = path else { return Ok(Places::as_given(&loaded.problem)) };
    let (places, warnings) = read_places(path, loaded).map_err(|diagnostics| Failure::input(diagnostics, sources))?;
    show(&warnings, sources);
    places.check(&loaded.problem).map_err(|error| Failure::stage(&error.into(), sources))?;
    Ok(places)
}

/// The places in this file, with a warning where they were written for another file; what they say of variables must fit.
pub(super) fn read_places(path: &Path, loaded: &Loaded) -> Result<(Places, Vec<Diagnostic>), Vec<Diagnostic>> {
    let name = path.display().to_string();
    let text = std::fs::read_to_string(path).map_err(|error| {
        vec![Diagnostic::error(Code("F092"), format!("the places cannot be read: {error}")).in_file(&name)]
    })?;
    let places = Places::from_json(&text).map_err(|error| {
        vec![Diagnostic::error(Code("P002"), error.to_string()).in_file(&name).expected("a places file of tallymark")]
    })?;
    let warning = report::places::other_file(&text, loaded).map(|warning| warning.in_file(&name));
    report::places::check(&text, loaded, &places).map_err(|diagnostic| vec![(*diagnostic).in_file(&name)])?;
    Ok((places, warning.into_iter().collect()))
}
