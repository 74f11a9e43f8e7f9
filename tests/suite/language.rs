use tallymark::source::tally;
use tallymark::span::Sources;
#[test]
fn scratch() {
    for entry in std::fs::read_dir("problems").unwrap() {
        let path = entry.unwrap().path();
        if path.extension().unwrap() != "tally" {
            continue;
        }
        let text = std::fs::read_to_string(&path).unwrap();
        let mut sources = Sources::new();
        match tally::read(&text, path.to_str().unwrap(), &[], &mut sources) {
            Ok((p, w)) => {
                println!(
                    "{} bits {} constraints {} exprs {}",
                    path.display(),
                    p.bit_count(),
                    p.constraint_count(),
                    p.exprs.len()
                );
                for d in w {
                    println!("  {:?}", d);
                }
                if p.bit_count() <= 24 {
                    let t = std::time::Instant::now();
                    let n = (0..1u128 << p.bit_count())
                        .filter(|&x| p.holds(&tallymark::problem::Bits::from_number(x, p.bit_count())))
                        .count();
                    println!("   count {n} {:?}", t.elapsed());
                }
            }
            Err(e) => {
                for d in e {
                    println!(
                        "{} {:?} {} {:?} {:?}",
                        path.display(),
                        d.code,
                        d.message,
                        d.span().map(|s| sources.position(s)),
                        d.help
                    )
                }
            }
        }
    }
}
