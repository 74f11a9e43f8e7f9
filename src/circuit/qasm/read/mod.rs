//! Reads OpenQASM 3 and 2.0: text in, a [`Circuit`] or diagnostics out.
//!
//! In three steps: [`lexer`] and [`parse`] give statements ([`ast`]), [`build`] gives them their meaning. The reader
//! knows what describes a circuit with a fixed list of gates: registers and aliases, constants and arithmetic, the gates
//! of the language and of its library, `gate` definitions, all modifiers with integer exponents, broadcast,
//! measurement, `reset`, `if` on one measured bit, `for` with constant values, and `def` subroutines whose value, if
//! any, is a measurement. A loop whose body does not use its variable stays a loop ([`crate::circuit::Block`]); all
//! else is written out, under limits. What depends on the run (`while`, `switch`, `input`, classical variables), on
//! time, or on what is not in the file is an error with its place and reason; nothing is skipped silently but comments,
//! pragmas and annotations, which the standard allows to ignore.
//!
//! After: every operand is in range and no gate uses a qubit twice; a bit that is tested was measured before (in
//! version 2 it may be unmeasured, and is 0); gates that are not in the set are written by exact identities (`y` is
//! `sdg x s`), with no global phase lost in version 3, so that their controlled forms are right too. In version 2 nothing
//! can be controlled, and gates are meant up to a global phase. Qubits are taken to begin in |0> where a circuit is
//! followed from its start: version 2 says so, version 3 leaves it to the file.
//!
//! Where careful readers differ, the text is refused with the way to say it plainly: a rounded quotient of integers,
//! `negctrl(n)`, `cu3` with a phase on its control, names that some copies of `qelib1.inc` have. A condition on several
//! bits is refused, because a gate of a [`Circuit`] depends on one.
//!
//! # References
//! - A. Cross, A. Javadi-Abhari, T. Alexander and others: _OpenQASM 3: A broader and deeper quantum assembly language_,
//!   ACM Transactions on Quantum Computing 3(3), 2022.
//! - A. Cross, L. Bishop, J. Smolin, J. Gambetta: _Open quantum assembly language_, arXiv:1707.03429, 2017.

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

/// The text with a value for its input `name`, which then is a constant: `None` where it has no such input on a line of
/// its own.
pub fn give(text: &str, name: &str, value: u64) -> Option<String> {
    let is_input = |line: &&str| {
        let line = line.trim();
        let declared = line.strip_prefix("input ").and_then(|rest| rest.strip_suffix(';'));
        declared.is_some_and(|rest| rest.rsplit(char::is_whitespace).next() == Some(name))
    };
    let line = text.lines().find(is_input)?;
    let declared = line.trim().strip_prefix("input ")?.strip_suffix(';')?;
    Some(text.replacen(line, &format!("const {declared} = {value};"), 1))
}

/// Reads an OpenQASM text, version 3 or 2.0; `name` is what messages call the file.
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
