//! scratch
use tallymark::id::Id;
use tallymark::make::network::{Network, build, pass};
use tallymark::places::Places;
use tallymark::problem::{BitId, BitLit, Bits, Problem};
use tallymark::random::SplitMix64;

fn random_3sat(variables: usize, clauses: usize, seed: u64) -> Problem {
    let mut random = SplitMix64::new(seed);
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
fn check(a: &Network, b: &Network, n: usize) {
    let mut random = SplitMix64::new(5);
    for _ in 0..200 {
        let bits: Bits = (0..n).map(|_| random.coin()).collect();
        assert_eq!(a.holds(&bits), b.holds(&bits));
    }
}
#[test]
fn probe() {
    for (n, seeds) in [(30, 20), (250, 7)] {
        let mut ratios = Vec::new();
        for seed in 0..seeds {
            let p = random_3sat(n, 4 * n, seed);
            let net = build(&p, &Places::as_given(&p));
            let t = std::time::Instant::now();
            let new = pass::simplify(net.clone(), |name, a, b| println!("  {name} {} {}", a.and_count(), b.network.and_count()));
            println!("{n} {seed} {:.3} {:?}", new.and_count() as f64 / (12 * n - 1) as f64, t.elapsed());
            ratios.push(new.and_count() as f64 / (12 * n - 1) as f64);
            check(&net, &new, n);
        }
        ratios.sort_by(f64::total_cmp);
        println!("MEDIAN {n} {:.3}", ratios[ratios.len() / 2]);
    }
}
