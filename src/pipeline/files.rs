//! The stages that touch the disk: circuits written and read back, values and proofs written.

use std::path::Path;

use super::{Error, Settings};
use crate::budget::Budget;
use crate::circuit::{Circuit, ITERATIONS, Level, Product, SEARCH, qasm};
use crate::diag::{Code, Diagnostic};
use crate::judge::audit::{self, narrowing};
use crate::judge::count::Counted;
use crate::places::Places;
use crate::problem::Problem;
use crate::report::files::{WriteError, write_whole};
use crate::report::header::header;
use crate::report::simulation::svg;
use crate::search::simulate;
use crate::source::Loaded;
use crate::span::Sources;

/// The largest search whose curve a dossier shows: with gates that keep basis states, and with others, where values may
/// have to be followed one by one.
const CURVE_BITS: usize = 22;
const CURVE_BITS_ONE_BY_ONE: usize = 16;

/// Writes a circuit file and reads it back from the disk, so that what is judged is what the user gets.
pub(super) fn write_and_read(
    path: &Path,
    loaded: &Loaded,
    places: &Places,
    product: &Product,
    counted: &Counted,
) -> Result<Circuit, Error> {
    let header = header(loaded, places, product, Some(counted));
    write_whole(path, |mut out| qasm::write::write(&product.circuit, &header, &mut out))?;
    read_circuit(path, &mut Sources::new()).map_err(|diagnostics| {
        let first = diagnostics.first().map_or("no message", |diagnostic| &diagnostic.message);
        Error::Fault(format!("the circuit file just written does not read back: {first}"))
    })
}

/// Writes the success by iteration of a search file that was read, as a picture, where following it is a matter of moments.
pub(super) fn write_curve(
    path: &Path,
    loaded: &Loaded,
    product: &Product,
    circuit: &Circuit,
    settings: Settings,
    budget: &Budget,
) -> Result<(), Error> {
    let most = if product.level <= Level::Toffoli { CURVE_BITS } else { CURVE_BITS_ONE_BY_ONE };
    if circuit.register(SEARCH).len() > most {
        return Ok(());
    }
    let options = simulate::Options { seed: settings.seed, threads: settings.threads, ..simulate::Options::default() };
    match simulate::simulate(circuit, &options, budget) {
        Ok(found) if !found.curve.is_empty() && !found.partial => {
            let title = loaded.problem.title.as_deref().unwrap_or(&loaded.file);
            let picture = svg(&found, &format!("{title}: success by iteration"));
            Ok(write_whole(path, |out| out.write_all(picture.as_bytes()))?)
        }
        _ => Ok(()),
    }
}

/// What to do where a file has its number of iterations as an input.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub enum Iterations {
    /// Such a file is refused.
    OfTheFile,
    /// The input gets this value; a file without the input is refused.
    Given(u64),
    /// The input, where there is one, gets this value.
    IfAsked(u64),
}

/// Reads a circuit file.
pub fn read_circuit(path: &Path, sources: &mut Sources) -> Result<Circuit, Vec<Diagnostic>> {
    Ok(read_circuit_with(path, Iterations::OfTheFile, sources)?.0)
}

/// Reads a circuit file whose number of iterations may be an input; with what the input got, where there is one.
pub fn read_circuit_with(
    path: &Path,
    iterations: Iterations,
    sources: &mut Sources,
) -> Result<(Circuit, Option<u64>), Vec<Diagnostic>> {
    let name = path.display().to_string();
    let text = std::fs::read_to_string(path).map_err(|error| {
        vec![
            Diagnostic::error(Code("F091"), format!("the circuit cannot be read: {error}"))
                .in_file(&name)
                .expected("an OpenQASM file"),
        ]
    })?;
    let value = match iterations {
        Iterations::OfTheFile => None,
        Iterations::Given(value) | Iterations::IfAsked(value) => Some(value),
    };
    let given = value.and_then(|value| qasm::read::give(&text, ITERATIONS, value));
    if matches!(iterations, Iterations::Given(_)) && given.is_none() {
        let message = "the circuit has its number of iterations, which is no input of it";
        let diagnostic = Diagnostic::error(Code("U025"), message).in_file(&name).found("--iterations");
        return Err(vec![diagnostic.expected(format!("a file with `input int {ITERATIONS};`, or no --iterations"))]);
    }
    let circuit = qasm::read::read(given.as_ref().unwrap_or(&text), &name, sources)?;
    Ok((circuit, value.filter(|_| given.is_some())))
}

/// Writes a JSON value, whole or not at all.
pub fn write_json(path: &Path, value: &serde_json::Value) -> Result<(), WriteError> {
    write_whole(path, |out| {
        serde_json::to_writer_pretty(&mut *out, value)?;
        out.write_all(b"\n")
    })
}

/// Proves what places claim of computed bits, and writes the clauses and the proof: `obligations.cnf` and
/// `obligations.drat`. Gives what came of it, in words.
pub fn write_obligations(folder: &Path, problem: &Problem, places: &Places, budget: &Budget) -> Result<String, Error> {
    let proven = match narrowing::prove(problem, places, budget) {
        Ok(Some(proven)) => proven,
        Ok(None) => {
            return Ok("the claims about computed bits are not one formula: no proof of them is written".to_owned());
        }
        Err(why) => return Ok(format!("the claims about computed bits are not proven: {why}")),
    };
    write_whole(&folder.join("obligations.cnf"), |mut out| proven.write_formula(&mut out))?;
    write_whole(&folder.join("obligations.drat"), |mut out| proven.write_proof(&mut out))?;
    let (clauses, steps) = (proven.formula.len(), proven.proof.len());
    Ok(format!(
        "the claims about computed bits: {clauses} clauses without a model, a proof of {steps} steps was checked"
    ))
}

/// Writes the clauses and the proof of a verdict: `miter.cnf` and `proof.drat`.
pub fn write_certificate(folder: &Path, certificate: &audit::Certificate) -> Result<(), Error> {
    write_whole(&folder.join("miter.cnf"), |mut out| certificate.write_formula(&mut out))?;
    write_whole(&folder.join("proof.drat"), |mut out| certificate.write_proof(&mut out))?;
    Ok(())
}
