//! The OPB reader: pseudo-Boolean constraints, the text of the pseudo-Boolean competitions.
//!
//! Input:  text. Output: a [`Problem`] over yes/no variables `x1` to `xV`, or messages with places.
//! Holds:  the invariants of [`check`](crate::problem::check); a sum whose values reach beyond 64 bits is refused,
//!         unless lowering weights to what the bound can tell apart makes it fit.
//!
//! ```text
//! * #variable= 3 #constraint= 2
//! min: +1 x1 +2 ~x2 ;
//! +1 x1 +4 x1 x3 -2 x2 >= 2 ;
//! +1 x1 +1 x2 = 1 ;
//! ```
//!
//! A line that begins with `*` is a comment; the first one may announce how many variables and constraints there are. A
//! term is an integer and one or more literals, whose product it weighs; `~` negates. A constraint has `>=` or `=`.
//!
//! House rules: what could hide a damaged file is refused (a missing last `;`, a variable beyond the announced number,
//! a term without its integer); what cannot is read with a warning (another number of constraints or products, no
//! announcement, and `<=` and `max:`, which only looser dialects have).
//!
//! # References
//! - O. Roussel, V. Manquinho: "Input/output format and solver requirements for the competitions of pseudo-Boolean
//!   solvers" (2006 page read; products and `~` from memory of the later text).

mod build;
mod fault;
mod parse;
mod token;

use crate::diag::Diagnostic;
use crate::problem::Problem;
use crate::span::Sources;

/// Variables a file may have.
pub const MAX_VARS: u64 = 1 << 20;
/// The size that a number may have: as many of them as a file can hold add up within 128 bits.
const MAX_NUMBER: u128 = 10u128.pow(29);
/// After so many mistakes reading stops.
const MAX_MESSAGES: usize = 20;

/// Reads an OPB file.
pub fn read(text: &str, name: &str, sources: &mut Sources) -> Result<(Problem, Vec<Diagnostic>), Vec<Diagnostic>> {
    let file = sources.add(name, text);
    let parsed = parse::parse(text);
    let mut faults = parsed.faults;
    if faults.is_empty() {
        let (problem, found) = build::build(file, &parsed.body);
        faults = found;
        if faults.is_empty() {
            let warnings = parsed.warnings.into_iter().map(|warning| warning.diagnostic(file, true)).collect();
            return Ok((problem, warnings));
        }
    }
    Err(faults.into_iter().take(MAX_MESSAGES).map(|fault| fault.diagnostic(file, false)).collect())
}
