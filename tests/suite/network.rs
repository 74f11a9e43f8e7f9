//! The passes of the network: the same predicate, node for node what the map says, at the published numbers of ANDs.

mod facts;
mod formulas;
mod ratios;

use tallymark::budget::Budget;
use tallymark::id::Id;
use tallymark::make::network::pass::check::check;
use tallymark::make::network::pass::{Passed, simplify};
use tallymark::make::network::{Network, build};
use tallymark::places::Places;
use tallymark::problem::{BitId, BitLit, Bits, Problem};
use tallymark::random::SplitMix64;
use tallymark::span::Sources;

/// The network of a problem after all passes, each of them checked.
fn network_of(problem: &Problem) -> Network {
    let budget = Budget::unlimited();
    let network = build(problem, &Places::as_given(problem));
    let simplified = simplify(network, &budget, |step| {
        let shown = check(step.before, step.passed, 1, &budget);
        shown.map(|_| ()).map_err(|difference| format!("{}: {difference}", step.name))
    });
    simplified.unwrap_or_else(|fault| panic!("{fault}\n{problem}"))
}

/// The network after all passes, unchecked.
fn simplified(problem: &Problem) -> Network {
    let network = build(problem, &Places::as_given(problem));
    simplify(network, &Budget::unlimited(), |_| Ok::<(), ()>(())).unwrap()
}

fn read(text: &str) -> Problem {
    let read = tallymark::source::tally::read(text, "case.tally", &[], &mut Sources::new());
    read.unwrap_or_else(|faults| panic!("{faults:#?}")).0
}

/// ANDs of the plain construction, clause by clause: k - 1 for a clause of k literals, and one to join it.
fn plain(problem: &Problem) -> usize {
    let ors: usize = problem.clauses.iter().map(|clause| clause.len().saturating_sub(1)).sum();
    (ors + problem.clauses.len()).saturating_sub(1)
}

fn assert_same(problem: &Problem, network: &Network, what: &str) {
    let n = problem.bit_count();
    for input in 0..1u128 << n {
        let bits = Bits::from_number(input, n);
        assert_eq!(network.holds(&bits), problem.holds(&bits), "{what} at {bits}\n{network}");
    }
}

/// Random clauses of `size` different variables.
fn random_sat(variables: usize, clauses: usize, size: usize, seed: u64) -> Problem {
    let mut random = SplitMix64::new(seed);
    let mut problem = Problem::new();
    problem.add_numbered_vars(variables);
    for _ in 0..clauses {
        let mut clause: Vec<BitLit> = Vec::with_capacity(size);
        while clause.len() < size {
            let bit = BitId::new(random.below(variables as u64) as usize);
            if clause.iter().all(|lit| lit.bit() != bit) {
                clause.push(BitLit::new(bit, random.coin()));
            }
        }
        problem.clauses.push(&clause);
    }
    problem
}

/// A pass that changes the root, or names a node that computes something else, does not go unseen.
#[test]
fn a_pass_that_breaks_its_word_is_found() {
    let budget = Budget::unlimited();
    for n in [6, 40] {
        let inputs: String = (0..n).map(|at| format!(" b{at}")).collect();
        let (a, b) = (n + 1, n + 2);
        let text = |op: &str, second: &str| {
            format!(
                "search{inputs}\nn{a} = and n1 n2\nn{b} = {op} n3 n{a}\nconjunct c0 {second}n{b}\nroot {second}n{b}\n"
            )
        };
        let network = |op: &str, second: &str| text(op, second).parse::<Network>().unwrap();
        let same = network("and", "").nodes().ids().map(|id| Some(tallymark::make::network::Lit::new(id, false)));
        let same: Vec<_> = same.collect();
        let before = network("and", "");
        let passed = |network: Network, map: Vec<_>| Passed { network, map: map.into() };
        assert!(check(&before, &passed(before.clone(), same.clone()), 1, &budget).is_ok());
        for (op, second) in [("xor", ""), ("and", "!")] {
            let nothing = vec![None; same.len()];
            let difference = check(&before, &passed(network(op, second), nothing), 1, &budget).unwrap_err();
            let bits: Bits = difference.input.iter().copied().collect();
            assert_ne!(before.holds(&bits), network(op, second).holds(&bits), "{difference}");
        }
        let mut wrong = same.clone();
        wrong[a] = same[1];
        let difference = check(&before, &passed(before.clone(), wrong), 1, &budget).unwrap_err();
        assert_eq!(difference.what, format!("node n{a}"));
    }
}

/// The engine finds what random inputs miss: an AND of 40 literals is almost never seen to hold.
#[test]
fn a_rare_difference_is_found_by_the_engine() {
    let n = 40;
    let inputs: String = (0..n).map(|at| format!(" b{at}")).collect();
    let chain = |last: usize| -> Network {
        let mut text = format!("search{inputs}\n");
        for at in 0..last - 1 {
            let left = if at == 0 { 1 } else { n + at };
            text += &format!("n{} = and n{left} n{}\n", n + at + 1, at + 2);
        }
        (text + &format!("root n{}\n", n + last - 1)).parse().unwrap()
    };
    let (all, most) = (chain(n), chain(n - 1));
    let map = vec![None; all.nodes().len()].into();
    let difference = check(&all, &Passed { network: most, map }, 1, &Budget::unlimited()).unwrap_err();
    assert_eq!(difference.input.iter().filter(|&&bit| bit).count(), n - 1);
}
