//! The form of the oracle that is judged: by a sign, an angle or a flipped mark; controlled; inverse.

use std::f64::consts::{PI, TAU};

use serde_json::{Value, json};

use crate::circuit::{Circuit, MARK};
use crate::cli::audit::Options;
use crate::diag::{Code, Diagnostic};
use crate::id::Id;
use crate::judge::audit::Witness;
use crate::problem::{BitId, Problem};

/// Angles that differ by less are the same.
const TOLERANCE: f64 = 1e-9;

/// Reads an angle: `0.3`, `pi`, `-pi/2`, `3pi/4`, `3*pi/4`.
pub(super) fn angle(text: &str) -> Result<f64, String> {
    let expected = || format!("`{text}` is not an angle such as 0.5, pi/4 or -3pi/8");
    let (sign, rest) = text.strip_prefix('-').map_or((1.0, text), |rest| (-1.0, rest));
    let number = |text: &str| text.trim().parse::<f64>().ok().filter(|number| number.is_finite());
    let value = match rest.split_once("pi") {
        None => number(rest),
        Some((times, under)) => {
            let times = times.trim().trim_end_matches('*');
            let times = if times.is_empty() { Some(1.0) } else { number(times) };
            let under = match under.trim() {
                "" => Some(1.0),
                under => under.strip_prefix('/').and_then(number).filter(|&under| under != 0.0),
            };
            times.zip(under).map(|(times, under)| times * PI / under)
        }
    };
    let value = sign * value.ok_or_else(expected)?;
    let rest = value.rem_euclid(TAU);
    match rest < TOLERANCE || TAU - rest < TOLERANCE {
        true => Err(format!("`{text}` is a multiple of a full turn, which marks nothing")),
        false => Ok(value),
    }
}

/// The phase that solutions must have, where it is no sign.
pub(super) fn turn(options: &Options) -> Option<f64> {
    options.angle.map(|angle| if options.inverse { -angle } else { angle })
}

/// A mark that is flipped has no angle.
pub(super) fn check(options: &Options, circuit: &Circuit) -> Result<(), Box<Diagnostic>> {
    if options.angle.is_none() || circuit.register(MARK).is_empty() {
        return Ok(());
    }
    let diagnostic =
        Diagnostic::error(Code("U011"), "a circuit with a register `mark` marks by flipping it, not by an angle")
            .expected("--angle with a circuit without `mark`");
    Err(Box::new(diagnostic))
}

/// The form as data.
pub(super) fn json(options: &Options, circuit: &Circuit) -> Value {
    let mark = match (options.angle, circuit.register(MARK).is_empty()) {
        (_, false) => "bit",
        (Some(_), _) => "angle",
        (None, _) => "phase",
    };
    json!({ "mark": mark, "angle": options.angle, "control": options.control, "inverse": options.inverse })
}

/// Whether an input is one on which a controlled oracle acts: else no constraint of the problem is the reason.
pub(super) fn acts_on(options: &Options, problem: &Problem, witness: &Witness) -> bool {
    options.control.is_none() || witness.bits.get(BitId::new(problem.bit_count() - 1))
}
