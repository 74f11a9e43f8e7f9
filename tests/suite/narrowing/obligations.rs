//! The obligations of narrowing by brute force over all assignments, with the reference evaluator.

use std::collections::BTreeMap;

use tallymark::budget::Budget;
use tallymark::id::Id;
use tallymark::make::narrow::{Narrowed, Options, held, narrow};
use tallymark::make::network;
use tallymark::places::Claim;
use tallymark::problem::{BitId, Bits, Problem};
use tallymark::random::SplitMix64;

use super::families::{self, Counting, Encoder};

const EFFORT: u64 = 1 << 18;

/// Checks every obligation, and that held clauses hold and the network is the predicate. Gives how many bits are computed.
pub(super) fn check(problem: &Problem, one_for_many: bool, seed: u64) -> Narrowed {
    let options = Options { one_for_many, seed, effort: EFFORT };
    let narrowed = narrow(problem, &options, &Budget::unlimited());
    let places = &narrowed.places;
    places.check(problem).expect("places of this problem");
    let (bits, searched) = (problem.bit_count(), places.search_len());
    assert!(bits <= 20, "few enough to try all");
    let (network, held) = (network::build(problem, places), held(problem, places));
    let mut marked = vec![false; 1 << searched];
    for x in 0..1u64 << searched {
        let search = Bits::from_number(x.into(), searched);
        let all = places.assignment(&search);
        marked[x as usize] = problem.holds(&all);
        assert_eq!(network.holds(&all), marked[x as usize], "the network at {search}");
        for (at, clause) in problem.clauses.iter().enumerate().filter(|(at, _)| held[*at]) {
            assert!(clause.iter().any(|lit| all.get(lit.bit()) != lit.is_negated()), "clause {at} at {search}");
        }
    }
    let shown: Vec<BitId> = problem.shown.clone().unwrap_or_else(|| problem.bits().collect());
    let project = |all: &Bits| -> Vec<bool> { shown.iter().map(|&bit| all.get(bit)).collect() };
    // For each shown solution, the marked states whose own solution shows it.
    let mut stands_for: BTreeMap<Vec<bool>, usize> = BTreeMap::new();
    for x in (0..1u64 << searched).filter(|&x| marked[x as usize]) {
        let all = places.assignment(&Bits::from_number(x.into(), searched));
        *stands_for.entry(project(&all)).or_default() += 1;
    }
    for value in 0..1u64 << bits {
        let solution = Bits::from_number(value.into(), bits);
        if !problem.holds(&solution) {
            continue;
        }
        let x: u64 = places.searched.iter().enumerate().map(|(at, &bit)| u64::from(solution.get(bit)) << at).sum();
        assert!(marked[x as usize], "{solution} is a solution whose searched part is not marked");
        let states = stands_for.get(&project(&solution)).copied().unwrap_or(0);
        match places.claim {
            Claim::OneForOne => assert_eq!(states, 1, "{solution}"),
            Claim::ManyForOne => assert!(states >= 1, "{solution}"),
            Claim::OneForMany => assert!(one_for_many, "one solution stands for many only where that is allowed"),
        }
    }
    narrowed
}

/// Clauses at random, with a parity and a projection now and then.
pub(super) fn random_clauses(random: &mut SplitMix64) -> Problem {
    let bits = 4 + random.below(7) as usize;
    let mut encoder = Encoder::new(bits);
    for _ in 0..random.below(4 * bits as u64) {
        let length = 1 + random.below(4);
        let clause: Vec<i64> = (0..length)
            .map(|_| {
                let var = 1 + random.below(bits as u64) as i64;
                if random.coin() { var } else { -var }
            })
            .collect();
        // Single literals would fix most bits.
        if clause.len() > 1 || random.below(6) == 0 {
            encoder.clause(&clause);
        }
    }
    if random.coin() {
        let inputs = encoder.inputs();
        encoder.odd(&inputs[..3], random.coin());
    }
    let mut problem = encoder.finish();
    if random.coin() {
        problem.shown = Some(problem.bits().filter(|_| random.coin()).collect());
    }
    problem
}

#[test]
fn random_problems_keep_every_obligation() {
    let mut random = SplitMix64::new(17);
    let mut computed = [0, 0];
    for seed in 0..300 {
        let problem = random_clauses(&mut random);
        for one_for_many in [false, true] {
            computed[usize::from(one_for_many)] += check(&problem, one_for_many, seed).places.computed.len();
        }
    }
    assert!(computed[0] > 300 && computed[1] > computed[0], "{computed:?}");
}

#[test]
fn encodings_keep_every_obligation() {
    for seed in 0..4 {
        for counting in [Counting::Sequential, Counting::Totalizer, Counting::ExactlyBothWays] {
            let encoder = families::sat_with_count(5, 1.0, 2, counting, seed);
            if encoder.inputs().len() + 5 <= 20 {
                let problem = encoder.finish_shown();
                if problem.bit_count() <= 20 {
                    let narrowed = check(&problem, false, seed);
                    assert_eq!(narrowed.places.claim, Claim::OneForOne, "{counting:?}");
                    assert!(narrowed.places.search_len() <= 5, "{counting:?}");
                }
            }
        }
        let problem = families::random_circuit(6, 12, seed).finish();
        assert!(check(&problem, false, seed).places.search_len() <= 6);
        assert!(check(&families::parities(8, 3, 5, seed).finish(), false, seed).places.search_len() <= 5);
    }
    assert_eq!(check(&families::queens(4), false, 1).places.search_len(), 9);
}

#[test]
fn bits_are_searched_where_nothing_determines_them() {
    let mut encoder = Encoder::new(3);
    encoder.clause(&[1, 2, 3]);
    let problem = encoder.finish();
    assert_eq!(check(&problem, false, 1).places.search_len(), 3);
    // Where one solution is enough, none is needed: all bits that have only one polarity take it.
    let narrowed = check(&problem, true, 1);
    assert_eq!(narrowed.places.search_len(), 0);
    assert!(narrowed.places.assignment(&Bits::zeros(0)).iter().any(|bit| bit));
    assert_eq!(BitId::new(0).index(), 0);
}
