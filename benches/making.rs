//! From a problem in memory to a written oracle, stage by stage.

use std::hint::black_box;

use divan::{Bencher, counter::ItemsCount};
use tallymark::budget::Budget;
use tallymark::circuit::{Level, Mark, qasm};
use tallymark::id::Id;
use tallymark::make::lower::{Options, lower};
use tallymark::make::network::build;
use tallymark::make::network::pass::simplify;
use tallymark::places::Places;
use tallymark::problem::{BitId, BitLit, Problem};
use tallymark::random::SplitMix64;

fn main() {
    divan::main();
}

const VARIABLES: usize = 20_000;
const CLAUSES: usize = 80_000;

/// Random 3-SAT: three different variables a clause.
fn random_3sat(variables: usize, clauses: usize) -> Problem {
    let mut random = SplitMix64::new(7);
    let mut problem = Problem::new();
    problem.add_numbered_vars(variables);
    for _ in 0..clauses {
        let mut clause: Vec<BitLit> = Vec::with_capacity(3);
        while clause.len() < 3 {
            let bit = BitId::new(random.below(variables as u64) as usize);
            if clause.iter().all(|lit| lit.bit() != bit) {
                clause.push(BitLit::new(bit, random.coin()));
            }
        }
        problem.clauses.push(&clause);
    }
    problem
}

#[divan::bench(sample_count = 5, sample_size = 1)]
fn network_of_3sat(bencher: Bencher) {
    let problem = random_3sat(VARIABLES, CLAUSES);
    let places = Places::as_given(&problem);
    bencher.counter(ItemsCount::new(CLAUSES)).bench(|| build(black_box(&problem), &places));
}

/// All passes on the network of 10^5 clauses.
#[divan::bench(sample_count = 1, sample_size = 1)]
fn passes_of_3sat(bencher: Bencher) {
    let problem = random_3sat(25_000, 100_000);
    let places = Places::as_given(&problem);
    let network = || build(&problem, &places);
    bencher.counter(ItemsCount::new(100_000usize)).with_inputs(network).bench_values(|network| {
        simplify(network, &Budget::unlimited(), |_| Ok::<(), ()>(())).expect("nothing objects")
    });
}

#[divan::bench(args = [Level::Wide, Level::Toffoli, Level::CliffordT, Level::Feedback], sample_count = 5, sample_size = 1)]
fn lower_3sat(bencher: Bencher, level: Level) {
    let problem = random_3sat(VARIABLES, CLAUSES);
    let network = build(&problem, &Places::as_given(&problem));
    let options = Options { level, mark: Mark::Phase };
    bencher
        .counter(ItemsCount::new(CLAUSES))
        .bench(|| lower(black_box(&network), &options, &Budget::unlimited()).unwrap());
}

/// The whole way, with the text written to nowhere.
#[divan::bench(args = [Level::Toffoli, Level::Feedback], sample_count = 5, sample_size = 1)]
fn compile_and_write_3sat(bencher: Bencher, level: Level) {
    let problem = random_3sat(VARIABLES, CLAUSES);
    let places = Places::as_given(&problem);
    let options = Options { level, mark: Mark::Phase };
    bencher.counter(ItemsCount::new(CLAUSES)).bench(|| {
        let network = build(black_box(&problem), &places);
        let circuit = lower(&network, &options, &Budget::unlimited()).unwrap();
        qasm::write::write(&circuit, &[], &mut std::io::sink()).unwrap();
    });
}
