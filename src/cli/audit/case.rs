//! A circuit against a problem: as a whole search, or as an oracle.

use std::time::Duration;

use serde_json::Value;

use super::{Options, against, form};
use crate::budget::Budget;
use crate::circuit::{Circuit, Level, Mark};
use crate::cli::render::Failure;
use crate::cli::{Global, input};
use crate::judge::audit::compare::parting;
use crate::judge::audit::{self, Outcome, Verdict};
use crate::pipeline;
use crate::places::Places;
use crate::report::{json, story, summary};
use crate::source::Loaded;
use crate::span::Sources;

/// The longest that an audit looks for solutions to begin with.
const MOST_COUNTING: Duration = Duration::from_secs(4);

/// What is judged, and by what.
pub(super) struct Case<'a> {
    pub(super) global: &'a Global,
    pub(super) options: &'a Options,
    pub(super) loaded: &'a Loaded,
    pub(super) sources: &'a Sources,
    pub(super) places: &'a Places,
    pub(super) circuit: &'a Circuit,
    /// A circuit known to be good.
    pub(super) good: Option<Circuit>,
    pub(super) budget: &'a Budget,
}

/// What came out, as `audit` and as text.
pub(super) struct Judged {
    pub(super) outcome: Outcome,
    pub(super) value: Value,
    pub(super) text: String,
}

impl Case<'_> {
    fn stage(&self, error: impl Into<pipeline::Error>) -> Box<Failure> {
        Failure::stage(&error.into(), self.sources)
    }

    /// Judges a whole search; `given` is the number that its input got, where it has one.
    pub(super) fn search(&self, given: Option<u64>) -> Result<Judged, Box<Failure>> {
        let Self { loaded, places, circuit, budget, .. } = self;
        places.check(&loaded.problem).map_err(|error| self.stage(error))?;
        let mut verdict = audit::audit_search(&loaded.problem, places, circuit, 1 << self.options.effort, budget)
            .map_err(|error| self.stage(error))?;
        if let Some(number) = given {
            let note = format!("how many iterations are run is an input of the file; it was judged with {number}");
            verdict.notes.push(note);
        }
        let (mut value, mut text) = (json::search_json(&verdict), summary::search_verdict(&verdict));
        if let Some(good) = &self.good {
            let compared = against::searches(good, circuit, budget).map_err(|error| self.stage(error))?;
            against::add_json(&mut value, &compared);
            text += &against::text(&compared);
        }
        Ok(Judged { outcome: verdict.outcome, value, text })
    }

    /// Judges an oracle.
    pub(super) fn oracle(&self, asked: &audit::Options) -> Result<Judged, Box<Failure>> {
        let Self { options, loaded, places, circuit, budget, .. } = self;
        let mut verdict = self.verdict(asked)?;
        if let Some(folder) = options.proof.as_ref().filter(|_| !places.computed.is_empty()) {
            let said = pipeline::write_obligations(folder, &loaded.problem, places, budget);
            verdict.notes.push(said.map_err(|error| self.stage(error))?);
        }
        let mut value = json::audit_json(&loaded.problem, &verdict);
        value["form"] = form::json(options, circuit);
        let of_problem = |witness: &&audit::Witness| form::acts_on(options, &loaded.problem, witness);
        let witness = verdict.witness.as_ref().filter(of_problem);
        let reason = witness.map(|witness| story::reason(&loaded.problem, self.sources, witness));
        let parted = match (&self.good, &verdict.witness) {
            (Some(good), Some(witness)) => {
                let search = places.searched.iter().map(|&bit| witness.bits.get(bit)).collect();
                parting(good, circuit, &search, budget).map_err(|error| self.stage(error))?
            }
            _ => None,
        };
        if let (Some(folder), Some(certificate)) = (&options.proof, &verdict.certificate) {
            pipeline::write_certificate(folder, certificate).map_err(|error| self.stage(error))?;
        }
        story::add_json(&mut value, reason.as_ref(), parted.as_ref());
        let text = summary::verdict(&loaded.problem, &verdict) + &story::text(reason.as_ref(), parted.as_ref());
        Ok(Judged { outcome: verdict.outcome, value, text })
    }

    /// The verdict on an oracle; where only a sample was affordable, of one with solutions in it.
    fn verdict(&self, asked: &audit::Options) -> Result<Verdict, Box<Failure>> {
        let Self { options, loaded, places, budget, .. } = self;
        let settings = input::settings(self.global, Level::Toffoli, Mark::Phase);
        let sample = options.sample.unwrap_or(asked.sample);
        let mut judged = audit::Options { threads: settings.threads, sample, ..asked.clone() };
        if options.proof.is_some() {
            (judged.way, judged.exhaustive_bits) = (audit::Way::Gates, 0);
        }
        let judge = |judged: &audit::Options| {
            pipeline::audit(&loaded.problem, places, self.circuit, judged, budget).map_err(|error| self.stage(error))
        };
        let verdict = judge(&judged)?;
        if verdict.outcome != Outcome::Undecided || loaded.problem.bit_count() <= judged.exhaustive_bits as usize {
            return Ok(verdict);
        }
        let share = budget.time_left().map_or(MOST_COUNTING, |left| MOST_COUNTING.min(left / 8));
        let counting = (*budget).clone().within(share);
        let counted = pipeline::count(&loaded.problem, places, settings, &counting);
        judged.known.clone_from(&counted.map_err(|error| self.stage(error))?.marks().solutions);
        if budget.spent() {
            return Ok(verdict);
        }
        let second = judge(&judged)?;
        // What ran out of time says less than what came before it.
        let is_better = second.outcome != Outcome::Undecided || second.inputs >= verdict.inputs;
        Ok(if is_better { second } else { verdict })
    }
}
