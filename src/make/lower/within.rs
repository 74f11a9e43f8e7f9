//! Lowering within limits: the best circuit that keeps to them, or the whole front.
//!
//! Input:  a network, what kind of oracle, and [`Limits`].
//! Output: one circuit, or every circuit of which none is better than another in qubits, T gates and depth.
//! After:  with a larger number of qubits the cost that the level pays for never rises.
//!
//! The candidates are the circuit that keeps everything ([`lower`]), the same with copies of searched qubits
//! ([`fan_out`](super::fan_out)), and one for each point of the front of schedules
//! ([`schedule`](super::schedule)). Where only qubits are limited at `feedback`, the schedules' own counts decide, which are
//! counts of moves; otherwise all candidates are written and their gates counted.

use super::replay::Marking;
use super::schedule::cells::{Cells, cells};
use super::schedule::counter;
use super::schedule::front::{Point, front};
use super::schedule::program::Pay;
use super::{LowerError, Options, and_count, ands_of, lower, lower_spread, replay, tidied};
use crate::budget::Budget;
use crate::circuit::figures::{Figures, figures};
use crate::circuit::{Circuit, Level, Mark};
use crate::make::network::Network;

/// How many constraints may share a copy of a searched qubit, in one candidate each.
const SHARED_COPIES: [usize; 5] = [1, 2, 4, 8, 16];

/// Where only qubits are limited, the candidates of larger networks are told apart by their moves.
const MOST_COUNTED: usize = 20_000;

/// What a circuit should be good at.
#[derive(Clone, Copy, PartialEq, Eq, Debug, Default)]
pub enum Favour {
    /// Few qubits.
    Qubits,
    /// Few T gates; at levels without T gates, few ANDs.
    #[default]
    T,
    /// Few layers.
    Depth,
    /// A small product of T gates (or ANDs) and qubits.
    Volume,
}

/// What a circuit must keep to.
#[derive(Clone, Copy, PartialEq, Eq, Debug, Default)]
pub struct Limits {
    /// Qubits of all registers together.
    pub qubits: Option<u64>,
    /// T gates in the worst case; ANDs at levels without T gates.
    pub t_count: Option<u64>,
    /// Layers.
    pub depth: Option<u64>,
    /// What decides among the circuits that keep to the limits.
    pub favour: Favour,
}

/// A circuit with what it costs.
#[derive(Clone, PartialEq, Debug)]
pub struct Lowered {
    /// The oracle.
    pub circuit: Circuit,
    /// ANDs computed or marked, those it undoes not included; with recomputation, as often as they are computed.
    pub and_count: u64,
    /// Costs counted from the gates.
    pub figures: Figures,
}

impl Lowered {
    /// T gates, or ANDs at a level without them.
    fn t(&self, level: Level) -> u64 {
        if level >= Level::CliffordT { self.figures.t_count } else { self.figures.and_gates }
    }

    fn key(&self, level: Level, favour: Favour) -> (u128, u64, u64, u64) {
        let Figures { qubits, depth, .. } = self.figures;
        let (t, paid) = (self.t(level), self.paid(level));
        match favour {
            Favour::Qubits => (qubits.into(), paid, t, depth),
            Favour::T => (paid.into(), t, qubits, depth),
            Favour::Depth => (depth.into(), paid, qubits, t),
            Favour::Volume => (u128::from(qubits) * u128::from(t), paid, qubits, depth),
        }
    }

    /// The T gates applied on average, in units of 2^-20 of one: what a schedule at `feedback` is chosen by.
    fn paid(&self, level: Level) -> u64 {
        if level == Level::Feedback {
            (self.figures.t_count_expected * f64::from(1 << 20)).round() as u64
        } else {
            self.t(level)
        }
    }
}

/// The best oracle of a network that keeps to the limits.
pub fn lower_within(
    network: &Network,
    options: &Options,
    limits: &Limits,
    budget: &Budget,
) -> Result<Lowered, LowerError> {
    // Tidying takes T gates out of schedules without measurement, so there the gates are counted, not the moves.
    let tidied = limits.qubits.is_some() && options.level != Level::Feedback && network.and_count() <= MOST_COUNTED;
    if tidied || limits.t_count.is_some() || limits.depth.is_some() || limits.favour != Favour::T {
        return choose(candidates(network, options, budget)?, options, limits);
    }
    let widest = lower(network, options, budget)?;
    let qubits = limits.qubits.unwrap_or(u64::MAX);
    if widest.qubit_count() as u64 <= qubits {
        return keep_everything(network, widest, options, budget);
    }
    let (cells, points) = points(network, options, Pay::at(options.level), budget)?;
    let fixed = network.searched().len() + usize::from(options.mark == Mark::Bit);
    let needs = |point: &Point| (fixed + point.cost.ancillas) as u64;
    let best = points.iter().rfind(|point| needs(point) <= qubits);
    // At `wide` the circuit that keeps everything may be the one with the fewest qubits.
    let least = points.first().map_or(u64::MAX, needs).min(widest.qubit_count() as u64);
    let best = best.ok_or(LowerError::TooFewQubits { asked: qubits, least })?;
    write(network, &cells, best, options, budget)
}

/// The circuits found of which none is better than another in qubits, T gates and depth at once; fewest qubits first.
pub fn front_of(network: &Network, options: &Options, budget: &Budget) -> Result<Vec<Lowered>, LowerError> {
    let mut all = candidates(network, options, budget)?;
    all.sort_by_key(|one| one.key(options.level, Favour::Qubits));
    let level = options.level;
    let mut front: Vec<Lowered> = Vec::new();
    for one in all {
        let better = |other: &Lowered| {
            other.figures.qubits <= one.figures.qubits
                && other.t(level) <= one.t(level)
                && other.paid(level) <= one.paid(level)
                && other.figures.depth <= one.figures.depth
        };
        if !front.iter().any(better) {
            front.push(one);
        }
    }
    Ok(front)
}

fn points(network: &Network, options: &Options, pay: Pay, budget: &Budget) -> Result<(Cells, Vec<Point>), LowerError> {
    let direct = options.mark == Mark::Phase || options.level != Level::Feedback;
    let mut cells = cells(network, direct);
    counter::group(&mut cells);
    let points = front(&cells, pay, budget)?;
    Ok((cells, points))
}

/// Everything that was found, written.
fn candidates(network: &Network, options: &Options, budget: &Budget) -> Result<Vec<Lowered>, LowerError> {
    let mut all = vec![keep_everything(network, lower(network, options, budget)?, options, budget)?];
    for share in SHARED_COPIES {
        let circuit = lower_spread(network, options, share, budget)?;
        let figures = figures(&circuit);
        all.push(Lowered { circuit, and_count: all[0].and_count, figures });
    }
    let pays: &[Pay] = if options.level == Level::Feedback { &[Pay::Expected, Pay::Worst] } else { &[Pay::Unitary] };
    for &pay in pays {
        let (cells, points) = points(network, options, pay, budget)?;
        for point in &points {
            all.push(write(network, &cells, point, options, budget)?);
        }
    }
    Ok(all)
}

fn keep_everything(
    network: &Network,
    circuit: Circuit,
    options: &Options,
    budget: &Budget,
) -> Result<Lowered, LowerError> {
    let figures = figures(&circuit);
    let and_count = match options.level {
        Level::Toffoli => ands_of(&circuit),
        _ => and_count(network, options.mark, budget)?,
    };
    Ok(Lowered { circuit, and_count, figures })
}

fn write(
    network: &Network,
    cells: &Cells,
    point: &Point,
    options: &Options,
    budget: &Budget,
) -> Result<Lowered, LowerError> {
    let size = (network.searched().len(), point.cost.ancillas);
    let circuit = replay::replay(cells, &point.moves, size, options, Marking::of(options.mark), budget)?;
    let circuit = tidied(circuit, options.level);
    let figures = figures(&circuit);
    // A cell that is marked directly into a qubit is one AND more; a sign is none.
    let toggled = if options.mark == Mark::Bit { cells.direct().count() as u64 } else { 0 };
    Ok(Lowered { circuit, and_count: point.cost.worst + toggled, figures })
}

fn choose(mut all: Vec<Lowered>, options: &Options, limits: &Limits) -> Result<Lowered, LowerError> {
    let level = options.level;
    let asked = |limit: Option<u64>| limit.unwrap_or(u64::MAX);
    let least = |all: &[Lowered], of: &dyn Fn(&Lowered) -> u64| all.iter().map(of).min().unwrap_or(0);
    let fewest = least(&all, &|one| one.figures.qubits);
    all.retain(|one| one.figures.qubits <= asked(limits.qubits));
    if all.is_empty() {
        return Err(LowerError::TooFewQubits { asked: asked(limits.qubits), least: fewest });
    }
    let fewest = least(&all, &|one| one.t(level));
    all.retain(|one| one.t(level) <= asked(limits.t_count));
    if all.is_empty() {
        return Err(LowerError::TooFewT { asked: asked(limits.t_count), least: fewest });
    }
    let fewest = least(&all, &|one| one.figures.depth);
    all.retain(|one| one.figures.depth <= asked(limits.depth));
    all.into_iter()
        .min_by_key(|one| one.key(level, limits.favour))
        .ok_or(LowerError::TooShallow { asked: asked(limits.depth), least: fewest })
}
