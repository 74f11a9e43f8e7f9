//! The counting engine over families of growing size: wall time, decisions, conflicts and hits of the cache.
//!
//! `cargo bench --bench counting -- [WORDS]`: families whose name contains one of the words; a word that is the path of a
//! DIMACS file counts that file. With no word, all families. `--dynamic`, `--guided` and `--inputs` name the order to use
//! instead of the race, `--memory=BYTES` limits the cache.

#![allow(clippy::print_stdout, reason = "a bench prints")]

#[allow(dead_code, unreachable_pub, reason = "shared with the tests")]
#[path = "../tests/suite/engine/families.rs"]
mod families;

use std::time::{Duration, Instant};

use families::Formula;
use tallymark::budget::Budget;
use tallymark::id::Id;
use tallymark::judge::count::engine::{Options, OrderKind, count};
use tallymark::problem::BitId;

const LIMIT: Duration = Duration::from_secs(120);

fn main() {
    let words: Vec<String> = std::env::args().skip(1).filter(|word| !word.starts_with("--bench")).collect();
    let mut options = Options::default();
    for word in &words {
        match word.as_str() {
            "--dynamic" => options.order = Some(OrderKind::Dynamic),
            "--guided" => options.order = Some(OrderKind::Guided),
            "--inputs" => options.order = Some(OrderKind::Inputs),
            word => {
                if let Some(bytes) = word.strip_prefix("--memory=") {
                    options.memory = bytes.parse().expect("a number of bytes");
                }
            }
        }
    }
    let words: Vec<String> = words.into_iter().filter(|word| !word.starts_with("--")).collect();
    for word in words.iter().filter(|word| word.ends_with(".cnf")) {
        measure(word, &read(word), &options);
    }
    let wanted = |name: &str| words.is_empty() || words.iter().any(|word| name.contains(word.as_str()));
    for (name, formula) in all() {
        if wanted(&name) {
            measure(&name, &formula(), &options);
        }
    }
}

type Make = Box<dyn Fn() -> Formula>;

fn all() -> Vec<(String, Make)> {
    let mut list: Vec<(String, Make)> = Vec::new();
    for n in 8..=12 {
        list.push((format!("queens-{n}"), Box::new(move || families::queens(n))));
    }
    for (side, colours) in [(6, 3), (8, 3), (10, 3), (4, 4), (5, 4), (6, 4), (7, 4)] {
        list.push((format!("grid-{side}-{colours}"), Box::new(move || families::grid(side, side, colours))));
    }
    for (vars, ratio) in [(100, 4), (150, 4), (50, 3), (75, 3), (90, 3), (100, 3), (50, 2), (60, 2), (70, 2)] {
        for seed in 1..=3 {
            let make = move || families::random(vars, vars * ratio, 3, seed);
            list.push((format!("random-{vars}-{ratio}-{seed}"), Box::new(make)));
        }
    }
    for (n, bits) in [(16, 8), (20, 8), (24, 8), (16, 16), (20, 16), (24, 16)] {
        list.push((format!("subset-{n}-{bits}"), Box::new(move || families::subset_sum(n, bits, 1).0)));
    }
    for (bits, number) in [(8, 60491), (10, 1_030_189), (12, 16_687_189), (8, 27720), (12, 2_042_040)] {
        list.push((format!("product-{bits}-{number}"), Box::new(move || families::product(bits, number))));
    }
    list
}

fn measure(name: &str, formula: &Formula, options: &Options) {
    let start = Instant::now();
    let budget = Budget::unlimited().within(LIMIT);
    let answer = count(&formula.clauses, formula.vars, formula.shown.as_deref(), options, &budget);
    let time = start.elapsed().as_secs_f64() * 1e3;
    let text = if answer.decided { answer.low.to_string() } else { format!("{}..{}", answer.low, answer.high) };
    let s = &answer.stats;
    println!(
        "{name:<28} {time:>10.2} ms  vars {:>5}/{:<5} clauses {:>6}  {:<8} decisions {:>9} conflicts {:>8} leaves {:>9} hits {:>8}/{:<9} = {text}",
        s.counted,
        s.vars,
        s.clauses,
        s.order.map_or("-".to_owned(), |order| format!("{order:?}")),
        s.decisions,
        s.conflicts,
        s.leaves,
        s.hits,
        s.lookups,
    );
}

/// A bare reader of well-formed files: the bench measures the engine and not the reader.
fn read(path: &str) -> Formula {
    let text = std::fs::read_to_string(path).expect("a readable file");
    let mut formula = Formula::default();
    let mut clause = Vec::new();
    for line in text.lines() {
        let words: Vec<&str> = line.split_whitespace().collect();
        match words[..] {
            ["p", "cnf", vars, _] => formula.vars = vars.parse().expect("a number"),
            ["c", "p", "show", ref shown @ ..] => {
                let bits = shown.iter().filter_map(|word| word.parse::<usize>().ok()).filter(|&var| var > 0);
                formula.shown.get_or_insert_default().extend(bits.map(|var| BitId::new(var - 1)));
            }
            ["%"] => break,
            ["c", ..] | [] => {}
            _ => {
                for number in words.iter().map(|word| word.parse::<i64>().expect("a number")) {
                    if number == 0 {
                        formula.add(&std::mem::take(&mut clause));
                    } else {
                        clause.push(number);
                    }
                }
            }
        }
    }
    formula
}
