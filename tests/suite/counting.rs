//! Counting: the instance collection, published numbers, laws, and brute force.
use std::time::Instant;
use tallymark::budget::Budget;
use tallymark::judge::count::{Options, Over, count};
use tallymark::span::Sources;
use tallymark::source::dimacs;

#[test]
fn tmp() {
    let index: serde_json::Value = serde_json::from_str(&std::fs::read_to_string("../../shared/instances/index.json").unwrap()).unwrap();
    for e in index.as_array().unwrap() {
        let n = e["file"].as_str().unwrap();
        if e["expect"] != "ok" { continue }
        let f = std::fs::File::open(format!("../../shared/instances/{n}")).unwrap();
        let (pr, _) = dimacs::read(f, n, &mut Sources::new()).unwrap();
        for (over, key) in [(Over::AllBits, "count"), (Over::Shown, "projected_count")] {
            let Some(want) = e[key].as_str() else { continue };
            if want.len() > 6 && !n.starts_with("edge") { continue }
            let t = Instant::now();
            let c = count(&pr, over, &Options::default(), &Budget::unlimited()).unwrap();
            println!("{n} {over:?} {:?} want {want} {} {:?} {:?} kept {} {} {:?}", c.exact().map(|x| x.to_string()), c.exact().is_some_and(|x| x.to_string() == want), c.method, c.checked_by, c.solutions.len(), c.complete, t.elapsed());
        }
    }
}
