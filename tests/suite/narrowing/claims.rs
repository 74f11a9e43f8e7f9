//! The judge on what places claim: right ones pass, wrong ones are found, by trying everything and by the solver alike.

use tallymark::budget::Budget;
use tallymark::circuit::{Level, Mark};
use tallymark::id::Id;
use tallymark::judge::audit::narrowing::{Obligations, Way, obligations};
use tallymark::judge::audit::{Options as AuditOptions, Outcome, audit};
use tallymark::judge::restate::restate;
use tallymark::make::lower;
use tallymark::make::narrow::{Options, narrow};
use tallymark::make::network;
use tallymark::places::{Claim, Computed, Formula, Places, Start};
use tallymark::problem::{BitId, Bits, Problem};
use tallymark::random::SplitMix64;

use super::families::{self, Counting, Encoder};
use super::obligations::random_clauses;
use crate::suite::random_problem::random_problem;

fn narrowed(problem: &Problem, one_for_many: bool) -> Places {
    let options = Options { one_for_many, seed: 1, effort: 1 << 16 };
    narrow(problem, &options, &Budget::unlimited()).places
}

/// Both ways of settling, which must agree where both settle.
pub(super) fn settle(problem: &Problem, places: &Places) -> Obligations {
    let [tried, solved] = [Way::Best, Way::Solver].map(|way| obligations(problem, places, way, &Budget::unlimited()));
    match (&tried, &solved) {
        (Obligations::Hold(_), Obligations::Broken(bits, why))
        | (Obligations::Broken(bits, why), Obligations::Hold(_)) => {
            panic!("the ways disagree at {bits}: {why}\n{places:?}\n{:?}", problem.clauses)
        }
        _ => tried,
    }
}

#[test]
fn restated_problems_are_the_problems_over_what_is_searched() {
    let mut random = SplitMix64::new(3);
    for seed in 0..200 {
        let problem = random_problem(seed);
        // Any bits may be computed from any others by any formulas: the meaning must be the same.
        let mut order: Vec<usize> = (0..problem.bit_count()).collect();
        (1..order.len()).for_each(|at| order.swap(at, random.below(at as u64 + 1) as usize));
        let searched = random.below(order.len() as u64 + 1) as usize;
        let formula = |random: &mut SplitMix64, known: &[usize]| {
            let mut pick = || match known.len() {
                0 => Formula::Constant(random.coin()),
                len => Formula::literal(BitId::new(known[random.below(len as u64) as usize]), random.coin()),
            };
            let parts = vec![pick(), pick(), pick()];
            match random.below(3) {
                0 => Formula::And(parts),
                1 => Formula::Or(parts),
                _ => Formula::Xor(parts),
            }
        };
        let computed = (searched..order.len())
            .map(|at| Computed { bit: order[at] as u32, formula: formula(&mut random, &order[..at]) })
            .collect();
        let bits = order[..searched].iter().map(|&bit| BitId::new(bit)).collect();
        let places = Places { start: Start::AllStrings, searched: bits, computed, claim: Claim::OneForMany };
        places.check(&problem).expect("places of this problem");
        let restated = restate(&problem, &places);
        for value in 0..1u128 << searched {
            let own = Bits::from_number(value, searched);
            let all = restated.assignment(&places, &own);
            assert_eq!(restated.problem.holds(&own), problem.holds(&all), "seed {seed} at {own}");
            assert_eq!(restated.restrict(&places, &all), own);
        }
    }
}

#[test]
fn places_of_the_maker_pass() {
    let mut random = SplitMix64::new(23);
    for _ in 0..120 {
        let problem = random_clauses(&mut random);
        for one_for_many in [false, true] {
            let places = narrowed(&problem, one_for_many);
            let settled = settle(&problem, &places);
            assert!(matches!(settled, Obligations::Hold(_)), "{settled:?} {places:?} {:?}", problem.clauses);
        }
    }
    for (problem, one_for_many) in [
        (families::product(8, 143 * 251).finish(), false),
        (families::sat_with_count(20, 2.0, 8, Counting::Sequential, 1).finish_shown(), false),
        (families::sat_with_count(16, 2.0, 8, Counting::Sorting, 1).finish_shown(), false),
        (families::parities(20, 12, 8, 1).finish(), false),
        (families::random_3sat(50, 200, 1), true),
    ] {
        let settled = obligations(&problem, &narrowed(&problem, one_for_many), Way::Solver, &Budget::unlimited());
        assert!(matches!(settled, Obligations::Hold(_)), "{settled:?}");
    }
}

/// Other formulas, other claims: what the brute-force way finds broken, the solver finds broken.
#[test]
fn wrong_places_are_found() {
    let mut random = SplitMix64::new(29);
    let (mut broken, mut whole) = (0, 0);
    for _ in 0..300 {
        let problem = random_clauses(&mut random);
        let mut places = narrowed(&problem, random.coin());
        let Some(len) = (places.computed.len() as u64).checked_sub(1) else { continue };
        let at = random.below(len + 1) as usize;
        match random.below(3) {
            0 => places.claim = [Claim::OneForOne, Claim::ManyForOne][random.below(2) as usize],
            1 => {
                let formula = places.computed[at].formula.clone();
                places.computed[at].formula = Formula::Not(Box::new(formula));
            }
            _ => places.computed[at].formula = Formula::Constant(random.coin()),
        }
        match settle(&problem, &places) {
            Obligations::Broken(..) => broken += 1,
            Obligations::Hold(_) => whole += 1,
            Obligations::Open(why) => panic!("{why}"),
        }
    }
    assert!(broken > 50 && whole > 10, "{broken} broken, {whole} whole");
}

fn problem_of(clauses: &[&[i64]], bits: usize) -> Problem {
    let mut encoder = Encoder::new(bits);
    clauses.iter().for_each(|clause| encoder.clause(clause));
    encoder.finish()
}

#[test]
fn each_kind_of_wrong_place_is_told() {
    let bit = |at: usize| Formula::Bit(BitId::new(at));
    // Bit 2 is the conjunction of bits 0 and 1.
    let gate: [&[i64]; 3] = [&[-3, 1], &[-3, 2], &[3, -1, -2]];
    let places = |formula: Formula, claim| Places {
        start: Start::AllStrings,
        searched: vec![BitId::new(0), BitId::new(1)],
        computed: vec![Computed { bit: 2, formula }],
        claim,
    };
    let and = Formula::And(vec![bit(0), bit(1)]);
    let right = places(and.clone(), Claim::OneForOne);
    let problem = problem_of(&gate, 3);
    assert!(matches!(settle(&problem, &right), Obligations::Hold(_)));
    let wrong = places(Formula::Or(vec![bit(0), bit(1)]), Claim::OneForOne);
    assert!(matches!(settle(&problem, &wrong), Obligations::Broken(..)));
    // Without the last clause bit 2 may be 0 all the same: one state stands for two solutions.
    let loose = problem_of(&gate[..2], 3);
    assert!(matches!(settle(&loose, &right), Obligations::Broken(..)));
    assert!(matches!(settle(&loose, &places(and.clone(), Claim::OneForMany)), Obligations::Hold(_)));
    // A clause more that the formula fails: the searched part of a solution is not marked.
    let more = problem_of(&[&gate[..2], &[&[-1, -3]]].concat(), 3);
    assert!(matches!(settle(&more, &places(and, Claim::OneForMany)), Obligations::Broken(..)));
}

#[test]
fn circuits_with_computed_bits_are_judged_by_what_they_compute() {
    let mut random = SplitMix64::new(31);
    let mut judged = 0;
    for seed in 0..60 {
        let problem = random_clauses(&mut random);
        let one_for_many = random.coin();
        let places = narrowed(&problem, one_for_many);
        let mark = if random.coin() { Mark::Bit } else { Mark::Phase };
        let options = lower::Options { level: Level::Toffoli, mark };
        let network = network::build(&problem, &places);
        let Ok(circuit) = lower::lower(&network, &options, &Budget::unlimited()) else { continue };
        let judge = |problem: &Problem, places: &Places| {
            audit(problem, places, &circuit, &AuditOptions::default(), &Budget::unlimited()).expect("an oracle").outcome
        };
        assert_eq!(judge(&problem, &places), Outcome::Equal, "seed {seed}");
        judged += 1;
        // A circuit for other formulas is found, unless the other formulas are as good.
        let mut other = places.clone();
        let Some(computed) = other.computed.first_mut() else { continue };
        computed.formula = Formula::Not(Box::new(computed.formula.clone()));
        let same = (0..1u128 << places.search_len()).all(|x| {
            let search = Bits::from_number(x, places.search_len());
            problem.holds(&places.assignment(&search)) == problem.holds(&other.assignment(&search))
        });
        let obliged = matches!(settle(&problem, &other), Obligations::Hold(_));
        assert_eq!(judge(&problem, &other) == Outcome::Equal, same && obliged, "seed {seed}");
    }
    assert!(judged > 30, "{judged}");
}
