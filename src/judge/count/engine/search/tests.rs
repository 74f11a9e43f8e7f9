//! A search that was stopped leaves nothing wrong behind.

use super::*;
use crate::judge::count::engine::Effort;
use crate::judge::count::engine::prepare::prepare;
use crate::problem::Clauses;
use crate::random::SplitMix64;

/// Listens, so that no part is counted by truth table and every part goes through the cache.
struct Listener;

impl Trace for Listener {
    type Node = ();
    const LISTENS: bool = true;

    fn nothing(&mut self) {}
    fn all(&mut self, _: &[BitLit], _: &[()]) {}
    fn either(&mut self, _: BitId, (): (), (): ()) {}
    fn witness(&mut self, _: &[BitLit]) {}
}

const VARS: usize = 15;

/// Clauses of two and three within each third of the variables, and a few across: the search splits, learns and conflicts.
fn formula(random: &mut SplitMix64) -> Vec<Vec<i64>> {
    let mut clauses = Vec::new();
    for at in 0..36 {
        let (from, among) = if at % 9 == 0 { (0, VARS as u64) } else { (at % 3 * 5, 5) };
        let width = 2 + usize::from(random.below(3) > 0);
        let mut vars: Vec<i64> = Vec::new();
        while vars.len() < width {
            let var = (from as u64 + random.below(among)) as i64 + 1;
            if !vars.contains(&var) {
                vars.push(var);
            }
        }
        clauses.push(vars.into_iter().map(|var| if random.coin() { var } else { -var }).collect());
    }
    clauses
}

fn brute(clauses: &[Vec<i64>]) -> u64 {
    let holds = |row: u32, lit: i64| (row >> (lit.unsigned_abs() - 1) & 1 == 1) == (lit > 0);
    let models =
        (0..1u32 << VARS).filter(|&row| clauses.iter().all(|clause| clause.iter().any(|&lit| holds(row, lit))));
    models.count() as u64
}

/// Stopped at every depth from the root on, and at last let through: the number is that of a search without a stop.
#[test]
fn what_a_stopped_search_cached_is_right() {
    let mut random = SplitMix64::new(77);
    let (budget, mut stops) = (Budget::unlimited(), 0);
    for round in 0..400 {
        let drawn = formula(&mut random);
        let wanted = BigUint::from(brute(&drawn));
        let mut clauses = Clauses::new();
        for clause in &drawn {
            let lits: Vec<BitLit> = clause.iter().map(|&lit| BitLit::from_dimacs(lit).unwrap()).collect();
            clauses.push(&lits);
        }
        let prepared = prepare(&clauses, VARS, None, Effort::Models, &budget);
        if prepared.contradiction {
            assert_eq!(wanted, BigUint::ZERO, "round {round}");
            continue;
        }
        let mut listener = Listener;
        let mut search = Search::new(&prepared, 1 << 20, 0, &mut listener, &budget);
        let count = loop {
            match search.run(Vec::new(), u64::MAX) {
                Step::Done(value, ()) => break value.to_big() << prepared.free,
                Step::Stopped(bounds) => {
                    stops += 1;
                    let (low, high) = (bounds.low << prepared.free, bounds.high << prepared.free);
                    assert!(low <= wanted && wanted <= high, "round {round}");
                }
                Step::Conflict(_) => unreachable!("a run answers conflicts at the root with 0"),
            }
            search.max_depth += 1;
        };
        assert_eq!(count, wanted, "round {round}");
    }
    assert!(stops > 300, "only {stops} stops");
}
