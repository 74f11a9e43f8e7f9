//! In which order bits are guessed: several orders are tried, and the one that searches least is kept.
//!
//! By index, forwards and backwards: encoders number inputs first, or last. By greed: the bit is guessed that most literals
//! wait for, those most that wait for little. Then the best set of guesses is made smaller piece by piece: some
//! guesses are dropped and greed completes the rest, as long as there is effort left (large neighbourhood search: P. Shaw,
//! "Using constraint programming and local search methods to solve vehicle routing problems", CP 1998, from memory).

use super::Options;
use super::closure::{Closure, Pace, Step};
use super::ground::{Ground, bit};
use crate::budget::Budget;
use crate::id::Id;
use crate::problem::BitLit;
use crate::random::SplitMix64;

/// Tries in vain after which the search begins anew, and after which it ends.
const ANEW: u32 = 1 << 11;
const MAX_IDLE: u32 = 1 << 14;

/// An order of guesses.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub enum Order {
    /// By index.
    Index,
    /// By index, from the last to the first.
    Backwards,
    /// By greed, improved.
    Greedy,
}

/// The largest part of a set of guesses that is dropped at once.
const MAX_DROPPED: u64 = 12;
/// Bases of the weight of a literal that waits for so many bits.
const BASES: [f64; 4] = [2.0, 3.0, 4.0, 8.0];

/// The steps of the best order found.
pub(super) fn best(ground: &Ground, options: &Options, budget: &Budget) -> (Vec<Step>, Order) {
    let forwards = ground.index_order();
    let mut best = (in_order(ground, &forwards), Order::Index);
    let mut backwards = forwards;
    backwards.sort_by_key(|&bit| (ground.class(bit), std::cmp::Reverse(bit)));
    keep_better(ground, &mut best, in_order(ground, &backwards), Order::Backwards);
    if let Some(guesses) = greedy(ground, options, budget, &best.0) {
        keep_better(ground, &mut best, in_order(ground, &guesses), Order::Greedy);
    }
    best
}

/// Guesses bits in this order wherever one is needed, with thorough tests; bits that the order leaves out come last.
fn in_order(ground: &Ground, order: &[u32]) -> Vec<Step> {
    let mut closure = Closure::new(ground, Pace::Thorough);
    for &bit in order.iter().chain(&ground.index_order()) {
        if !closure.is_known(bit) {
            closure.guess(bit);
        }
    }
    closure.steps
}

/// How much is searched: hidden bits first, because each of them lets several states stand for one solution.
fn price(ground: &Ground, steps: &[Step]) -> (usize, usize) {
    let searched = || steps.iter().filter(|step| step.how == super::How::Searched);
    (searched().filter(|step| !ground.is_shown(step.bit)).count(), searched().count())
}

fn keep_better(ground: &Ground, best: &mut (Vec<Step>, Order), steps: Vec<Step>, order: Order) {
    if price(ground, &steps) < price(ground, &best.0) {
        *best = (steps, order);
    }
}

/// Guesses found by greed and made fewer; `None` where the effort is not enough for one round.
fn greedy(ground: &Ground, options: &Options, budget: &Budget, start: &[Step]) -> Option<Vec<u32>> {
    let unguessed = Closure::new(ground, Pace::Fast);
    let mut search =
        Search { unguessed, ground, random: SplitMix64::new(options.seed), work: 0, effort: options.effort };
    let guesses = |steps: &[Step]| {
        steps.iter().filter(|step| step.how == super::How::Searched).map(|step| step.bit).collect::<Vec<u32>>()
    };
    // One round looks at every literal for each guess.
    let round = ground.tidy.lit_count() as u64 * 4 + 1;
    let determines_nothing = !ground.has_witnesses() && guesses(start).len() == start.len();
    if round > options.effort / 16 || determines_nothing {
        return None;
    }
    let first = search.complete(&[]);
    let mut best = if first.len() < guesses(start).len() { first } else { guesses(start) };
    let mut current = best.clone();
    let mut idle = 0u32;
    while search.work < search.effort && idle < MAX_IDLE && !best.is_empty() && !budget.spent() {
        let most = MAX_DROPPED.min(current.len() as u64);
        let dropped = 1 + search.random.below(most) as usize;
        let mut kept = current.clone();
        for _ in 0..dropped.min(kept.len()) {
            let at = search.random.below(kept.len() as u64) as usize;
            kept.swap_remove(at);
        }
        let next = search.complete(&kept);
        idle = if next.len() < best.len() { 0 } else { idle + 1 };
        // Sideways steps are taken; after many of them in vain the search begins anew.
        if next.len() <= current.len() {
            current = next;
        }
        if current.len() < best.len() {
            best.clone_from(&current);
        }
        if idle > 0 && idle.is_multiple_of(ANEW) {
            current = search.complete(&[]);
        }
    }
    // The class decides before the place: hidden bits are guessed only where shown ones do not do.
    best.sort_by_key(|&bit| ground.class(bit));
    Some(best)
}

struct Search<'a> {
    /// What is known without a guess.
    unguessed: Closure<'a>,
    ground: &'a Ground,
    random: SplitMix64,
    work: u64,
    effort: u64,
}

impl Search<'_> {
    /// Guesses these bits, then by greed until everything is known. Gives all guesses that were needed.
    fn complete(&mut self, kept: &[u32]) -> Vec<u32> {
        let ground = self.ground;
        let mut closure = self.unguessed.clone();
        let mut guesses: Vec<u32> = Vec::with_capacity(kept.len() + 16);
        for &bit in kept {
            if !closure.is_known(bit) {
                closure.guess(bit);
                guesses.push(bit);
            }
        }
        let base = BASES[self.random.below(BASES.len() as u64) as usize];
        let mut stamps = vec![0u32; ground.bit_count()];
        let mut stamp = 0;
        // Where one guess a round would take too long, several are made.
        let round = ground.tidy.lit_count() as u64 * 4 + 1;
        let rounds = (self.effort / 8 / round).max(1);
        let batch = (ground.bit_count() as u64).div_ceil(rounds).max(1) as usize;
        while !closure.is_complete() {
            let mut scores = self.scores(&closure, base, &mut stamps, &mut stamp);
            scores.sort_by(|a, b| b.0.total_cmp(&a.0).then(a.1.cmp(&b.1)));
            for &(_, bit) in scores.iter().take(batch) {
                if !closure.is_known(bit) {
                    closure.guess(bit);
                    guesses.push(bit);
                }
            }
        }
        self.work += closure.work;
        guesses
    }

    /// Every unknown bit of the lowest class there is, by how much waits for it.
    fn scores(&mut self, closure: &Closure, base: f64, stamps: &mut [u32], stamp: &mut u32) -> Vec<(f64, u32)> {
        let ground = self.ground;
        let tidy = &ground.tidy;
        let unknown: Vec<u32> = (0..ground.bit_count() as u32).filter(|&bit| !closure.is_known(bit)).collect();
        let mut scores = vec![0.0f64; ground.bit_count()];
        let mut waited: Vec<u32> = Vec::new();
        for &own in &unknown {
            let mut wait_for = |clauses: &[u32], work: &mut u64| {
                *stamp += 1;
                waited.clear();
                for &at in clauses {
                    *work += 1;
                    if closure.open(at) < 2 {
                        continue;
                    }
                    for lit in tidy.get(at as usize) {
                        let other = lit.bit().index();
                        *work += 1;
                        if other as u32 != own && !closure.is_known(other as u32) && stamps[other] != *stamp {
                            stamps[other] = *stamp;
                            waited.push(other as u32);
                        }
                    }
                }
                let weight = base.powi(-(waited.len().min(100) as i32));
                waited.iter().for_each(|&other| scores[other as usize] += weight);
            };
            let lit = BitLit::new(bit(own), true);
            if ground.may_witness(own) {
                wait_for(tidy.with(lit), &mut self.work);
                wait_for(tidy.with(!lit), &mut self.work);
            } else {
                for &at in tidy.with(lit).iter().chain(tidy.with(!lit)) {
                    self.work += 1;
                    scores[own as usize] += base.powi(1 - closure.open(at).min(100) as i32);
                }
            }
            for &row in ground.rows_of(own) {
                scores[own as usize] += base.powi(1 - closure.row_open(row).min(100) as i32);
            }
        }
        let class = unknown.iter().map(|&bit| ground.class(bit)).min().unwrap_or(0);
        let noise = &mut self.random;
        let scored = unknown.into_iter().filter(|&bit| ground.class(bit) == class);
        scored.map(|bit| (scores[bit as usize] * (0.8 + 0.4 * noise.unit()), bit)).collect()
    }
}
