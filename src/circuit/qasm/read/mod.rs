//! Reads OpenQASM 3: text in, a [`Circuit`] or diagnostics out.
//!
//! In three steps: [`lexer`] and [`parse`] give statements ([`ast`]), [`build`] gives them their meaning. The reader
//! knows the gates that this crate writes and a good margin: registers, the gates of `stdgates.inc` that keep a circuit
//! in the set of [`crate::circuit::Op`], `ctrl`, `negctrl` and `inv`, broadcast, constant angles, measurement, `reset`,
//! `if` on one measured bit, `for` with constant bounds. A loop whose body does not use its variable stays a loop
//! ([`crate::circuit::Block`]). All else is an error with its place and reason; nothing is skipped silently but
//! comments, pragmas and annotations, which the standard allows to ignore.
//!
//! After: every operand is in range and no gate uses a qubit twice; a bit that is tested was measured before; gates
//! that are not in the set are written by exact identities (`y` is `sdg x s`), with no global phase lost, so that
//! their controlled forms are right too.
//!
//! # References
//! - A. Cross, A. Javadi-Abhari, T. Alexander and others: _OpenQASM 3: A broader and deeper quantum assembly language_,
//!   ACM Transactions on Quantum Computing 3(3), 2022.

mod ast;
mod build;
mod fault;
mod lexer;
mod parse;

use crate::circuit::Circuit;
use crate::diag::{self, Diagnostic};
use crate::span::Sources;

/// At most so many mistakes of one file are reported.
const MAX_MISTAKES: usize = 100;

/// Reads an OpenQASM 3 text; `name` is what messages call the file.
pub fn read(text: &str, name: &str, sources: &mut Sources) -> Result<Circuit, Vec<Diagnostic>> {
    if text.len() > u32::MAX as usize {
        let message = "a circuit file of 4 GiB or more cannot be read";
        return Err(vec![Diagnostic::error(diag::Code("Q028"), message).in_file(name)]);
    }
    let file = sources.add(name, text);
    let mut parsed = parse::parse(text);
    let (circuit, faults) = build::build(&parsed);
    parsed.faults.extend(faults);
    let mut faults = parsed.faults;
    if faults.is_empty() {
        return Ok(circuit);
    }
    faults.sort_by_key(|(place, _)| *place);
    if faults.len() > MAX_MISTAKES {
        faults.truncate(MAX_MISTAKES);
        let last = faults[MAX_MISTAKES - 1].0;
        faults.push((last, fault::Fault::TooMany));
    }
    Err(faults.iter().map(|(place, fault)| fault.to_diagnostic(file, *place)).collect())
}
