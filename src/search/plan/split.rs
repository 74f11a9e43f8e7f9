//! Shallow machines: guess some bits, search the rest.
//!
//! Input: N, M, the most iterations that one run may have, the error of an iteration, how many machines run side by
//! side, and the cost of a try. Output: how many bits to guess and how many iterations to run, so that the time until
//! the first success is least.
//!
//! With s bits fixed, the space falls apart into `S = 2^s` parts of N/S states. The M solutions are taken to lie in M
//! different parts while M is at most S, one each, and evenly in all parts beyond: that is the even case; crowding
//! makes it slower. The machines take the parts one after the other, each part once, then all again. A run succeeds
//! with `p` in a part that has a solution, else never.
//!
//! A sweep over all S parts has j successes with the chance of a binomial; the first of j, in random places, comes at
//! place `(S + 1) / (j + 1)` on average. So with `q = 1 - p` a sweep takes
//! `S q^M + (S + 1) ((1 - q^{M+1}) / ((M + 1) p) - q^M)` runs on average until its success or its end, and sweeps are
//! repeated until one succeeds (derived here).
//!
//! # References
//! - C. Zalka: "Grover's quantum searching algorithm is optimal", Physical Review A 60 (1999) 2746 (introduction read):
//!   on several machines nothing is better than splitting the space; S machines are sqrt(S) times as fast.

use num_bigint::BigUint;
use num_traits::{One, Zero};
use serde::Serialize;

use super::noise::Noisy;
use crate::search::number::{Wide, seek};

/// What the machines can do.
#[derive(Clone, Copy, PartialEq, Debug)]
pub struct Machines {
    /// How many run side by side, at least one.
    pub machines: u64,
    /// The most iterations of one run; `None` without limit.
    pub depth: Option<u64>,
    /// The chance that an iteration loses everything.
    pub error: f64,
    /// The cost of a try besides its iterations, in units of one iteration; above 0.
    pub try_cost: f64,
}

/// A plan with guessed bits.
#[derive(Clone, Copy, PartialEq, Debug, Serialize)]
pub struct Split {
    /// s: how many bits are guessed.
    pub guessed_bits: u64,
    /// k: how many iterations a run has.
    pub iterations: u64,
    /// The success of a run in a part that has a solution.
    pub success: Wide,
    /// Rounds, of one run on every machine, until the first success, on average.
    pub rounds: Wide,
    /// The time until then, in units of one iteration.
    pub time: Wide,
    /// The work of all machines until then, in units of one iteration.
    pub work: Wide,
}

/// The split with the least time, of all numbers of guessed bits up to `bits` (how many bits the space has that can be
/// fixed); `None` where nothing is marked. The error's floor is taken among the states of a part.
pub fn split(space: &BigUint, marked: &BigUint, bits: u64, machines: &Machines) -> Option<Split> {
    assert!(machines.machines > 0 && machines.try_cost > 0.0, "at least one machine, and tries that cost something");
    if marked.is_zero() {
        return None;
    }
    let whole = best_at(space, marked, 0, machines);
    let reach = Noisy::new(space, marked, space, machines.error).last().min(machines.depth.unwrap_or(u64::MAX));
    // In a part that is far beyond what a run reaches, the success goes with the share, so that guessing one bit more
    // halves what is searched and doubles how often: the time stays the same. Parts within 2^40 of the reach are tried.
    let near = 2 * u64::from((reach | 1).ilog2()) + 40;
    let first = (space.bits() - marked.bits()).saturating_sub(near).max(1);
    let mut best = whole;
    for guessed in first..=bits.min(space.bits() - 1) {
        let next = best_at(space, marked, guessed, machines);
        if next.time < best.time {
            best = next;
        } else if next.time > best.time * Wide::new(FAR) {
            break;
        }
    }
    Some(best)
}

/// Beyond the best split the time rises with every bit; at so many times the best the rest is not tried.
const FAR: f64 = 1024.0;

/// The best k for this many guessed bits.
fn best_at(space: &BigUint, marked: &BigUint, guessed: u64, machines: &Machines) -> Split {
    let parts = BigUint::one() << guessed;
    // In a part that has a solution there is one, or, where there are more solutions than parts, the same share as in
    // all.
    let (part, inside) = match *marked <= parts {
        true => ((space >> guessed).max(BigUint::one()), BigUint::one()),
        false => (space.clone(), marked.clone()),
    };
    let noisy = Noisy::new(&part, &inside, &part, machines.error);
    let sweep = Sweep::new(&parts, marked, machines.machines);
    let figures = |k: u64| {
        let success = noisy.success(k);
        let rounds = sweep.rounds(success);
        let time = Wide::new(k as f64 + machines.try_cost) * rounds;
        Split {
            guessed_bits: guessed,
            iterations: k,
            success,
            rounds,
            time,
            work: time * Wide::new(machines.machines as f64),
        }
    };
    let last = noisy.last().min(machines.depth.unwrap_or(u64::MAX));
    figures(seek::least(0, last, |k| figures(k).time))
}

/// How the machines go through the parts.
enum Sweep {
    /// In every round so many machines are on parts that have a solution.
    Together(Wide),
    /// There are more parts than machines.
    InTurn { parts: Wide, marked: Wide, machines: Wide },
}

impl Sweep {
    fn new(parts: &BigUint, marked: &BigUint, machines: u64) -> Self {
        let each = BigUint::from(machines) / parts;
        match () {
            () if marked > parts => Sweep::Together(Wide::new(machines as f64)),
            () if !each.is_zero() => Sweep::Together(Wide::of(&(each * marked))),
            () => {
                Sweep::InTurn { parts: Wide::of(parts), marked: Wide::of(marked), machines: Wide::new(machines as f64) }
            }
        }
    }

    /// The rounds until the first success, on average.
    fn rounds(&self, success: Wide) -> Wide {
        match *self {
            Sweep::Together(useful) => Wide::ONE / at_least_one(success, useful),
            Sweep::InTurn { parts, marked, machines } => {
                let hit = at_least_one(success, marked);
                let runs = parts * Wide::ONE.less(hit) + (parts + Wide::ONE) * early(success, marked);
                // The runs are dealt out to the machines; the last round is half used on average.
                (runs / hit + Wide::new(0.5) * machines.less(Wide::ONE)) / machines
            }
        }
    }
}

/// `1 - (1 - p)^n`.
fn at_least_one(p: Wide, n: Wide) -> Wide {
    if p >= Wide::ONE {
        return Wide::ONE;
    }
    let expected = p * n;
    if expected < Wide::new(1e-12) {
        return expected;
    }
    let each = if p < Wide::new(1e-12) { p } else { Wide::new(-(-p.to_f64()).ln_1p()) };
    Wide::new(-(-(each * n).to_f64().min(1e4)).exp_m1())
}

/// `(1 - q^{M+1}) / ((M + 1) p) - q^M`: the mean of `1 / (j + 1)` over the sweeps with j successes, j at least 1.
fn early(p: Wide, m: Wide) -> Wide {
    let more = m + Wide::ONE;
    if p * more < Wide::new(1e-3) {
        // The terms for j = 1 and 2, with q^{M-1} and so on to second order.
        let first = p * m * Wide::new(0.5);
        return first * Wide::ONE.less(p * m.less(Wide::ONE) * Wide::new(2.0 / 3.0));
    }
    (at_least_one(p, more) / (more * p)).less(Wide::ONE.less(at_least_one(p, m)))
}

#[cfg(test)]
mod tests {
    use super::*;

    const ONE_MACHINE: Machines = Machines { machines: 1, depth: None, error: 0.0, try_cost: 1.0 };

    fn big(number: u64) -> BigUint {
        BigUint::from(number)
    }

    fn best(bits: u32, machines: Machines) -> Split {
        split(&(BigUint::one() << bits), &big(1), u64::from(bits), &machines).unwrap()
    }

    #[test]
    fn without_limits_one_machine_guesses_nothing_and_many_split_the_space() {
        let one = best(40, ONE_MACHINE);
        assert_eq!(one.guessed_bits, 0);
        assert!((one.time.to_f64() / (0.690025 * f64::from(1 << 20)) - 1.0).abs() < 1e-3, "{}", one.time);
        for log in [4u32, 8, 12] {
            let many = best(40, Machines { machines: 1 << log, ..ONE_MACHINE });
            assert!(many.guessed_bits.abs_diff(u64::from(log)) <= 1, "{many:?}");
            let gain = (one.time / many.time).to_f64() / 2f64.powi(log as i32).sqrt();
            assert!((0.9..1.2).contains(&gain), "{log}: sqrt of the machines, not {gain}");
        }
    }

    #[test]
    fn a_limit_on_the_depth_is_kept_and_costs() {
        let free = best(30, ONE_MACHINE);
        let shallow = best(30, Machines { depth: Some(100), ..ONE_MACHINE });
        assert!(shallow.iterations <= 100 && shallow.time > free.time);
        let noisy = best(30, Machines { error: 1e-3, ..ONE_MACHINE });
        assert!(noisy.iterations < free.iterations && noisy.time > free.time);
        let none = best(10, Machines { depth: Some(0), ..ONE_MACHINE });
        assert_eq!(none.iterations, 0);
        // Every string once, in order: (1024 + 1) / 2 tries.
        assert!((none.time.to_f64() - 512.5).abs() < 1e-9, "{none:?}");
    }

    /// The mean of a sweep against drawing without putting back, term by term.
    #[test]
    fn rounds_by_enumeration() {
        for (parts, marked, p) in
            [(8u64, 1u64, 0.3f64), (8, 3, 0.3), (16, 2, 1.0), (16, 5, 1e-5), (4, 4, 0.9), (2, 1, 1e-4)]
        {
            // chance[t][g]: t parts tried, g of them good, all in vain; hypergeometric draws.
            let (mut runs, mut alive) = (0.0, vec![0.0; marked as usize + 1]);
            alive[0] = 1.0;
            for tried in 0..parts {
                runs += alive.iter().sum::<f64>();
                let mut next = vec![0.0; marked as usize + 1];
                for good in 0..=marked.min(tried) {
                    let hit = (marked - good) as f64 / (parts - tried) as f64;
                    if good < marked {
                        next[good as usize + 1] += alive[good as usize] * hit * (1.0 - p);
                    }
                    next[good as usize] += alive[good as usize] * (1.0 - hit);
                }
                alive = next;
            }
            let wanted = runs / (1.0 - alive.iter().sum::<f64>());
            let found = Sweep::new(&big(parts), &big(marked), 1).rounds(Wide::new(p)).to_f64();
            assert!((found / wanted - 1.0).abs() < 1e-6, "{marked} in {parts} at {p}: {found} not {wanted}");
        }
    }

    #[test]
    fn edges_and_large_spaces() {
        assert_eq!(split(&big(8), &big(0), 3, &ONE_MACHINE), None);
        assert_eq!(split(&big(1), &big(1), 0, &ONE_MACHINE).unwrap().time, Wide::ONE);
        let deep = Machines { machines: 1000, depth: Some(1 << 20), error: 1e-6, try_cost: 2.0 };
        let huge = best(1100, deep);
        assert!(huge.iterations <= 1 << 20 && huge.time.log2() > 1000.0);
    }
}
