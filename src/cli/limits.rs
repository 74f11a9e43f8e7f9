//! Options that limit what a circuit may cost.

use clap::Args;

use crate::circuit::Level;
use crate::cli::render::Failure;
use crate::diag::{Code, Diagnostic};
use crate::make::lower::{Favour, Limits};

#[derive(Args)]
#[group(skip)]
#[command(next_help_heading = "What a circuit may cost")]
pub(super) struct Options {
    /// At most so many qubits; nodes are computed again where they do not fit
    #[arg(long, value_name = "NUMBER")]
    qubits: Option<u64>,
    /// At most so many T gates in the worst case, at clifford-t and feedback
    #[arg(long, value_name = "NUMBER")]
    t_count: Option<u64>,
    /// At most so many layers
    #[arg(long, value_name = "NUMBER")]
    depth: Option<u64>,
    /// What decides among the circuits within the limits: qubits, t, depth or volume (T-count times qubits)
    #[arg(long, default_value = "t", value_parser = favour)]
    favour: Favour,
}

impl Options {
    /// The limits, which the level must know.
    pub(super) fn limits(&self, level: Level) -> Result<Limits, Box<Failure>> {
        if self.t_count.is_some() && level < Level::CliffordT {
            return Err(Failure::usage(no_t_gates(level)));
        }
        Ok(Limits { qubits: self.qubits, t_count: self.t_count, depth: self.depth, favour: self.favour })
    }
}

fn favour(name: &str) -> Result<Favour, String> {
    match name {
        "qubits" => Ok(Favour::Qubits),
        "t" => Ok(Favour::T),
        "depth" => Ok(Favour::Depth),
        "volume" => Ok(Favour::Volume),
        _ => Err("expected qubits, t, depth or volume".to_owned()),
    }
}

fn no_t_gates(level: Level) -> Diagnostic {
    Diagnostic::error(Code("U022"), "circuits of this level hold no T gate")
        .found(format!("--t-count at level {level}"))
        .expected("--level clifford-t or --level feedback")
}
