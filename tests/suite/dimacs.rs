//! tmp
use tallymark::source::dimacs;
use tallymark::span::Sources;
#[test]
fn tmp() {
    for e in std::fs::read_dir("../../shared/instances").unwrap() {
        let p = e.unwrap().path();
        if p.extension().unwrap() != "cnf" {
            continue;
        }
        let mut s = Sources::new();
        let f = std::fs::File::open(&p).unwrap();
        let n = p.file_name().unwrap().to_str().unwrap().to_owned();
        match dimacs::read(f, &n, &mut s) {
            Ok((pr, w)) => {
                println!(
                    "{n}: ok {} {} {:?} {:?}",
                    pr.bit_count(),
                    pr.clauses.len(),
                    pr.shown.map(|s| s.len()),
                    w.iter().map(|w| (&w.message, w.span().map(|x| s.position(x)))).collect::<Vec<_>>()
                )
            }
            Err(d) => {
                for d in d {
                    println!(
                        "{n}: {} {} {:?} found {:?} expected {:?} {:?}",
                        d.code,
                        d.message,
                        d.span().map(|x| s.position(x)),
                        d.found,
                        d.expected,
                        d.labels.iter().map(|l| s.text(l.span)).collect::<Vec<_>>()
                    )
                }
            }
        }
    }
}
