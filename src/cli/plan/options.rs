//! The options of `plan`, and how the numbers among them are read.

use clap::Args;
use num_bigint::BigUint;
use num_traits::One;

use crate::circuit::Level;
use crate::cli::input;
use crate::search::number::PRINTED_BITS;
use crate::search::plan::Aim;

#[derive(Args)]
pub(in crate::cli) struct Options {
    /// The problem: .tally, .cnf, .opb, .aag, .aig (also .gz, .xz, .zst), or - for standard input; without it, --space
    /// and what else is known are planned for
    #[arg(required_unless_present = "space", conflicts_with = "space")]
    pub(super) file: Option<String>,
    /// What the plan is to make as good as it can: highest-success, highest-within-bound, least-work, certainty,
    /// best-worst-case, at-least-so-many, nothing-known or count-on-machine [default: by what is known of the count]
    #[arg(long, value_name = "NAME", value_parser = aim)]
    pub(super) aim: Option<Aim>,
    /// N: plan for a start state of so many states, without a problem; a number or a power such as 2^100
    #[arg(long, value_name = "NUMBER", value_parser = number)]
    pub(super) space: Option<BigUint>,
    /// M: plan for this many marked states instead of counting them
    #[arg(long, value_name = "NUMBER", value_parser = number, conflicts_with_all = ["low", "high"])]
    pub(super) count: Option<BigUint>,
    /// At least so many states are marked
    #[arg(long, value_name = "NUMBER", value_parser = number)]
    pub(super) low: Option<BigUint>,
    /// At most so many states are marked
    #[arg(long, value_name = "NUMBER", value_parser = number)]
    pub(super) high: Option<BigUint>,
    /// highest-within-bound: the most iterations
    #[arg(long, value_name = "NUMBER", value_parser = bound)]
    pub(super) within: Option<BigUint>,
    /// What a try costs besides its iterations (preparing, measuring, checking), in units of one iteration
    #[arg(long, value_name = "COST", default_value_t = 1.0, value_parser = cost)]
    pub(super) try_cost: f64,
    /// at-least-so-many, nothing-known, count-on-machine: the failure that is allowed
    #[arg(long, value_name = "CHANCE", default_value_t = 0.01, value_parser = inner_chance)]
    pub(super) failure: f64,
    /// count-on-machine: how near an estimate of M/N must come [default: half a state]
    #[arg(long, value_name = "SHARE", value_parser = inner_chance)]
    pub(super) precision: Option<f64>,
    /// The confidence for which runs are counted
    #[arg(long, value_name = "CHANCE", default_value_t = 0.99, value_parser = inner_chance)]
    pub(super) confidence: f64,
    /// The chance that an iteration loses everything, leaving the evenly mixed state
    #[arg(long, value_name = "CHANCE", value_parser = chance)]
    pub(super) error: Option<f64>,
    /// The same for every gate, multiplied out over the gates of one iteration of the compiled search
    #[arg(long, value_name = "CHANCE", value_parser = chance, conflicts_with_all = ["error", "space"])]
    pub(super) gate_error: Option<f64>,
    /// --gate-error: the gate set of the circuit: wide, toffoli, clifford-t or feedback
    #[arg(long, default_value = "toffoli", value_parser = input::level)]
    pub(super) level: Level,
    /// --error, --gate-error: what one classical guess costs, in units of one iteration
    #[arg(long, value_name = "COST", default_value_t = 1.0, value_parser = cost)]
    pub(super) guess_cost: f64,
    /// Guess some bits where that is faster: no run may have more iterations than this
    #[arg(long, value_name = "ITERATIONS")]
    pub(super) depth: Option<u64>,
    /// Guess some bits where that is faster: so many machines run side by side
    #[arg(long, value_name = "NUMBER")]
    pub(super) machines: Option<std::num::NonZeroU64>,
    /// With a problem: the start state, strings, domains, groups or cheapest [default: cheapest; strings with --any]
    #[arg(long, value_name = "NAME", value_parser = input::start, conflicts_with = "space")]
    pub(super) start: Option<input::Wanted>,
    /// The objective of the problem: its best value with the proof, the thresholds with their tallies, and what a search for
    /// the best value takes
    #[arg(long, conflicts_with_all = ["space", "aim", "count", "low", "high"])]
    pub(super) objective: bool,
    /// Say as well what it takes to see every solution
    #[arg(long)]
    pub(super) find_all: bool,
}

impl Options {
    /// Whether something is asked that rests on the exact count, whatever the aim.
    pub(super) fn extras_need_count(&self) -> bool {
        self.find_all
            || self.error.is_some()
            || self.gate_error.is_some()
            || self.depth.is_some()
            || self.machines.is_some()
    }
}

/// Numbers of more bits are beyond any plan.
const MAX_BITS: u64 = 1 << 16;

/// A natural number: digits, or a power such as `2^100`.
pub(in crate::cli) fn number(text: &str) -> Result<BigUint, String> {
    let wrong = || "expected a natural number, or a power of two such as 2^100".to_owned();
    let value = match text.split_once('^') {
        Some(("2", power)) => {
            let power: u64 = power.parse().map_err(|_| wrong())?;
            if power >= MAX_BITS {
                return Err(too_long());
            }
            BigUint::one() << power
        }
        Some(_) => return Err(wrong()),
        // Four decimal digits are more than thirteen bits; longer texts are not even read.
        None if text.len() as u64 > MAX_BITS / 3 => return Err(too_long()),
        None if !text.bytes().all(|byte| byte.is_ascii_digit()) => return Err(wrong()),
        None => text.parse().map_err(|_| wrong())?,
    };
    if value.bits() > MAX_BITS { Err(too_long()) } else { Ok(value) }
}

fn too_long() -> String {
    format!("expected a number below 2^{MAX_BITS}")
}

/// A count of iterations that can still be told to its last digit.
fn bound(text: &str) -> Result<BigUint, String> {
    let short = number(text)?;
    let fits = short.bits() <= PRINTED_BITS;
    fits.then_some(short).ok_or_else(|| format!("expected a number below 2^{PRINTED_BITS}"))
}

/// The aim of this name.
pub(in crate::cli) fn aim(name: &str) -> Result<Aim, String> {
    Aim::ALL.into_iter().find(|aim| aim.name() == name).ok_or_else(|| {
        let names: Vec<_> = Aim::ALL.iter().map(|aim| aim.name()).collect();
        format!("expected one of {}", names.join(", "))
    })
}

fn cost(text: &str) -> Result<f64, String> {
    let cost = text.parse().ok().filter(|cost| (0.0..=1e15).contains(cost));
    cost.ok_or_else(|| "expected a cost from 0 up, such as 2.5".to_owned())
}

/// A chance from 0 to 1, both included.
fn chance(text: &str) -> Result<f64, String> {
    let chance = text.parse().ok().filter(|chance| (0.0..=1.0).contains(chance));
    chance.ok_or_else(|| "expected a number from 0 to 1".to_owned())
}

/// A chance between 0 and 1, both excluded.
pub(in crate::cli) fn inner_chance(text: &str) -> Result<f64, String> {
    let chance = text.parse().ok().filter(|&chance: &f64| (1e-300..1.0).contains(&chance));
    chance.ok_or_else(|| "expected a number between 0 and 1".to_owned())
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn numbers_and_powers() {
        assert_eq!(number("2^10"), Ok(BigUint::from(1024u32)));
        assert_eq!(number("1000"), Ok(BigUint::from(1000u32)));
        for wrong in ["", "-1", "+1", "3^2", "2^", "2^-1", "2^65536", "1e3"] {
            assert!(number(wrong).is_err(), "{wrong}");
        }
    }
}
