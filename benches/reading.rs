//! How fast DIMACS files are read from memory, in numbers a second (closing zeros included).

use divan::Bencher;
use divan::counter::{BytesCount, ItemsCount};
use tallymark::random::SplitMix64;
use tallymark::source::dimacs;
use tallymark::span::Sources;

fn main() {
    divan::main();
}

/// Random 3-SAT: four numbers a clause.
fn random_file(vars: u64, clauses: u64) -> String {
    let mut random = SplitMix64::new(1);
    let mut text = format!("p cnf {vars} {clauses}\n");
    for _ in 0..clauses {
        for _ in 0..3 {
            let sign = if random.coin() { "-" } else { "" };
            text += &format!("{sign}{} ", random.below(vars) + 1);
        }
        text += "0\n";
    }
    text
}

/// One million clauses over so many variables.
#[divan::bench(args = [200, 1_000_000], sample_count = 15, sample_size = 1)]
fn random_3_sat(bencher: Bencher<'_, '_>, vars: u64) {
    const CLAUSES: u64 = 1_000_000;
    let text = random_file(vars, CLAUSES);
    bencher
        .counter(ItemsCount::new(4 * CLAUSES))
        .counter(BytesCount::of_str(&text))
        .bench(|| dimacs::read(text.as_bytes(), "bench.cnf", &mut Sources::new()).expect("a good file"));
}
