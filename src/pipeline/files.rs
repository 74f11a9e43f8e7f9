//! The stages that touch the disk: circuits written and read back, values and proofs written.

use std::path::Path;

use super::Error;
use crate::circuit::{Circuit, ITERATIONS, Product, qasm};
use crate::diag::{Code, Diagnostic};
use crate::judge::audit;
use crate::judge::count::Counted;
use crate::places::Places;
use crate::report::files::{WriteError, write_whole};
use crate::report::header::header;
use crate::source::Loaded;
use crate::span::Sources;

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

/// Reads a circuit file.
pub fn read_circuit(path: &Path, sources: &mut Sources) -> Result<Circuit, Vec<Diagnostic>> {
    read_circuit_given(path, None, sources)
}

/// Reads a circuit file; where its number of iterations is an input, it gets this value.
pub fn read_circuit_given(
    path: &Path,
    iterations: Option<u64>,
    sources: &mut Sources,
) -> Result<Circuit, Vec<Diagnostic>> {
    let name = path.display().to_string();
    let text = std::fs::read_to_string(path).map_err(|error| {
        vec![
            Diagnostic::error(Code("F091"), format!("the circuit cannot be read: {error}"))
                .in_file(&name)
                .expected("an OpenQASM file"),
        ]
    })?;
    let given = iterations.and_then(|value| qasm::read::give(&text, ITERATIONS, value));
    qasm::read::read(given.as_ref().unwrap_or(&text), &name, sources)
}

/// Writes a JSON value, whole or not at all.
pub fn write_json(path: &Path, value: &serde_json::Value) -> Result<(), WriteError> {
    write_whole(path, |out| {
        serde_json::to_writer_pretty(&mut *out, value)?;
        out.write_all(b"\n")
    })
}

/// Writes the clauses and the proof of a verdict: `miter.cnf` and `proof.drat`.
pub fn write_certificate(folder: &Path, certificate: &audit::Certificate) -> Result<(), Error> {
    write_whole(&folder.join("miter.cnf"), |mut out| certificate.write_formula(&mut out))?;
    write_whole(&folder.join("proof.drat"), |mut out| certificate.write_proof(&mut out))?;
    Ok(())
}
