//! Options for other forms of an oracle: angle, control, inverse.

use std::f64::consts::PI;

use clap::Args;

use crate::circuit::Mark;
use crate::cli::render::Failure;
use crate::diag::{Code, Diagnostic};
use crate::make::lower::Turn;

#[derive(Args)]
#[group(skip)]
#[command(next_help_heading = "The form of the oracle")]
pub(super) struct Options {
    /// Multiply by e^(i ANGLE) in place of the sign: radians, or such as pi/4 or -3*pi/8
    #[arg(long, value_name = "ANGLE", allow_hyphen_values = true, value_parser = angle)]
    phase: Option<f64>,
    /// Act only where the qubit of a register `control` is 1
    #[arg(long)]
    controlled: bool,
    /// The inverse of the oracle
    #[arg(long)]
    inverse: bool,
}

impl Options {
    /// The turn that the options ask for; none for a plain oracle, which is its own inverse.
    pub(super) fn turn(&self, mark: Mark, whole: bool) -> Result<Option<Turn>, Box<Failure>> {
        if self.phase.is_none() && !self.controlled {
            return Ok(None);
        }
        if mark == Mark::Bit || whole {
            return Err(Failure::usage(needs_phase()));
        }
        let turn = Turn { angle: self.phase.unwrap_or(PI), controlled: self.controlled };
        Ok(Some(if self.inverse { turn.inverse() } else { turn }))
    }
}

/// `0.25`, `pi`, `-pi/4`, `3*pi/8`.
pub(super) fn angle(text: &str) -> Result<f64, String> {
    read(text.trim())
        .filter(|angle| angle.is_finite())
        .ok_or_else(|| "expected an angle in radians, such as 0.25, pi/4 or -3*pi/8".to_owned())
}

fn read(text: &str) -> Option<f64> {
    if let Some(rest) = text.strip_prefix('-') {
        return read(rest.trim_start()).map(|angle| -angle);
    }
    let (above, below) = text.split_once('/').unwrap_or((text, "1"));
    let (factor, rest) = above.split_once('*').unwrap_or(("1", above));
    let number = |text: &str| text.trim().parse::<f64>().ok();
    let unit = if rest.trim() == "pi" { PI } else { number(rest)? };
    Some(number(factor)? * unit / number(below)?)
}

fn needs_phase() -> Diagnostic {
    Diagnostic::error(Code("U012"), "an angle and a control belong to a phase oracle alone")
        .found("--phase or --controlled with --mark bit, --whole or --front")
        .expected("--phase or --controlled with --mark phase")
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn angles_are_numbers_or_parts_of_pi() {
        for (text, expected) in [
            ("0.25", 0.25),
            ("pi", PI),
            ("-pi/4", -PI / 4.0),
            ("3*pi/8", 3.0 * PI / 8.0),
            ("1/2", 0.5),
            ("- 2*pi", -2.0 * PI),
        ] {
            assert_eq!(angle(text), Ok(expected), "{text}");
        }
        for text in ["", "pie", "pi/0", "2pi", "1e400"] {
            assert!(angle(text).is_err(), "{text}");
        }
    }
}
