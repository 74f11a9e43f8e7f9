//! `tallymark audit CIRCUIT`: a circuit without a problem, alone or against a good one.

use std::path::Path;

use crate::circuit::Circuit;
use crate::cli::audit::{Options, exit_of};
use crate::cli::render::Failure;
use crate::cli::{Global, Outcome, progress};
use crate::diag::{Code, Diagnostic};
use crate::judge::audit::alone::marks;
use crate::judge::audit::compare::{CompareOptions, compare, parting};
use crate::judge::audit::{self, AuditError};
use crate::pipeline::{self, Iterations};
use crate::report::{alone, json, story};
use crate::span::Sources;

/// Whether a name is that of a circuit file.
pub(super) fn is_circuit(file: &str) -> bool {
    Path::new(file).extension().is_some_and(|extension| extension == "qasm")
}

/// The message where the only file is no circuit.
pub(super) fn no_circuit(file: &str) -> Diagnostic {
    Diagnostic::error(Code("U023"), "there is no circuit to judge")
        .found(file.to_owned())
        .expected("a problem and a circuit, or a circuit file (.qasm) alone")
}

/// Turns of a loop that the input of the file ends: two say what its body does to two different states.
const GIVEN_TURNS: u64 = 2;

/// Reads a circuit file; where its number of iterations is an input, there are two, and that is told.
pub(super) fn read(path: &Path, sources: &mut Sources) -> Result<(Circuit, Option<u64>), Box<Failure>> {
    pipeline::read_circuit_with(path, Iterations::IfAsked(GIVEN_TURNS), sources)
        .map_err(|diagnostics| Failure::input(diagnostics, sources))
}

/// What a circuit marks; or whether it is the same as a good one.
pub(super) fn run(global: &Global, options: &Options) -> Outcome {
    if !is_circuit(&options.file) {
        return Err(Failure::usage(no_circuit(&options.file)));
    }
    if options.self_test.is_some() {
        let diagnostic = Diagnostic::error(Code("U024"), "the self-test needs a problem")
            .expected("a problem and a circuit that is right for it");
        return Err(Failure::usage(diagnostic));
    }
    let mut sources = Sources::new();
    let (circuit, _) = read(Path::new(&options.file), &mut sources)?;
    let good = options.against.as_ref().map(|path| read(path, &mut sources)).transpose()?.map(|(good, _)| good);
    let (budget, line) = progress::budget(global);
    let stage = |error: AuditError| Failure::stage(&error.into(), &sources);
    let settings = audit::Options {
        strict_phase: options.strict_phase,
        seed: global.seed,
        sample: options.sample.unwrap_or(audit::Options::default().sample),
        ..audit::Options::default()
    };
    let mut object = json::envelope_without_problem("audit");
    let (outcome, text) = if let Some(good) = &good {
        let verdict = compare(good, &circuit, &CompareOptions::from(&settings), &budget).map_err(stage)?;
        let witness = verdict.witness.as_ref().map(|witness| &witness.bits);
        let parted = witness.map(|bits| parting(good, &circuit, bits, &budget)).transpose().map_err(stage)?.flatten();
        let mut value = alone::comparison_json(&verdict);
        story::add_json(&mut value, None, parted.as_ref());
        object.insert("audit".to_owned(), value);
        (verdict.outcome, alone::comparison(&verdict) + &story::text(None, parted.as_ref()))
    } else {
        let marks = marks(&circuit, &settings, &budget).map_err(stage)?;
        object.insert("audit".to_owned(), alone::marks_json(&marks));
        (marks.outcome, alone::marks(&marks))
    };
    drop(line);
    object.insert("partial".to_owned(), (outcome == audit::Outcome::Undecided).into());
    Ok((exit_of(outcome), if global.json { json::print(object) } else { text }))
}
