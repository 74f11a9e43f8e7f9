//! OPB and AIGER files: one case a file, each solution tried, mutated bytes, and how the formats are told apart.

use std::fmt::Write as _;
use std::fs;
use std::io::Write as _;
use std::path::{Path, PathBuf};

use tallymark::budget::Budget;
use tallymark::diag::Diagnostic;
use tallymark::judge::count::{self, Over};
use tallymark::problem::{Bits, Problem, Sense, check};
use tallymark::random::SplitMix64;
use tallymark::source::open::load_from;
use tallymark::source::{Format, Loaded};
use tallymark::span::Sources;

use super::command::Desk;

fn cases(folder: &str) -> Vec<PathBuf> {
    let folder = Path::new(env!("CARGO_MANIFEST_DIR")).join("tests/cases").join(folder);
    let mut files: Vec<_> = fs::read_dir(folder).unwrap().map(|entry| entry.unwrap().path()).collect();
    files.sort();
    files
}

/// The input and the expectation of a case. `\xNN` is a byte, `\c` at the end takes the last line end away.
fn parts(path: &Path) -> (Vec<u8>, String) {
    let text = fs::read_to_string(path).unwrap();
    let (_, rest) = text.split_once("---- input\n").expect("an input");
    let (input, wanted) = rest.split_once("---- expect\n").expect("an expectation");
    let input = input.strip_suffix("\\c\n").unwrap_or(input);
    let mut bytes = Vec::new();
    let mut pieces = input.split("\\x");
    bytes.extend(pieces.next().unwrap().bytes());
    for piece in pieces {
        bytes.push(u8::from_str_radix(&piece[..2], 16).unwrap());
        bytes.extend(piece[2..].bytes());
    }
    (bytes, wanted.to_owned())
}

/// What a case shows: the count by trying all strings, names of an AIGER file, the best value, all messages.
fn outcome(bytes: &[u8], name: &str) -> String {
    let mut sources = Sources::new();
    let mut text = String::new();
    match load_from(bytes, name, &[], &mut sources) {
        Ok(loaded) => {
            assert_eq!(check::check(&loaded.problem), Ok(()), "{name}");
            text += &tried(&loaded);
            loaded.warnings.iter().for_each(|warning| message(&mut text, "warning", warning, &sources));
        }
        Err(errors) => errors.iter().for_each(|error| message(&mut text, "error", error, &sources)),
    }
    text
}

fn message(text: &mut String, kind: &str, diagnostic: &Diagnostic, sources: &Sources) {
    assert!(diagnostic.span().is_some() || diagnostic.file.is_some(), "{diagnostic:?}");
    let place = diagnostic.span().map(|span| sources.position(span));
    let place = place.map_or_else(String::new, |at| format!(" {}:{}", at.line, at.column));
    _ = writeln!(text, "{kind} {}{place}", diagnostic.code);
}

fn solutions(problem: &Problem) -> Vec<Bits> {
    let all = (0..1u128 << problem.bit_count()).map(|number| Bits::from_number(number, problem.bit_count()));
    all.filter(|bits| problem.holds(bits)).collect()
}

fn tried(loaded: &Loaded) -> String {
    let problem = &loaded.problem;
    let solutions = solutions(problem);
    let mut text = format!("count {}", solutions.len());
    if let Some(objective) = &problem.objective {
        let value = |bits: &Bits| problem.evaluate(&problem.decode(bits).unwrap())[objective.expr];
        let values = solutions.iter().map(value);
        _ = match objective.sense {
            Sense::Least => write!(text, ", least {}", values.min().unwrap()),
            Sense::Most => write!(text, ", most {}", values.max().unwrap()),
        };
    }
    if loaded.format == Format::Aiger {
        text += ":";
        problem.vars().iter().for_each(|(id, _)| _ = write!(text, " {}", problem.var_name(id)));
    }
    text + "\n"
}

fn check_cases(folder: &str, suffix: &str, least: usize) {
    let files = cases(folder);
    assert!(files.len() >= least, "the cases are there");
    let mut differences = Vec::new();
    for path in files {
        let (bytes, wanted) = parts(&path);
        let found = outcome(&bytes, &format!("case{suffix}"));
        if found != wanted {
            differences.push(format!("{}:\n{found}instead of\n{wanted}", path.display()));
        }
    }
    assert!(differences.is_empty(), "{}", differences.join("\n"));
}

/// Among them the example of the competition's page (2006), whose two solutions and optimum 0 were enumerated outside.
#[test]
fn opb_cases() {
    check_cases("opb", ".opb", 20);
}

/// Among them the half adder of the format's text.
#[test]
fn aiger_cases() {
    check_cases("aiger", ".aag", 20);
}

/// The published example has the solutions that its constraints name: x2 = x3 = x4 = 1, and the rest 0 at the optimum.
#[test]
fn the_optimum_of_the_example() {
    let path = Path::new(env!("CARGO_MANIFEST_DIR")).join("tests/cases/opb/example-of-the-page.case");
    let loaded = load_from(&parts(&path).0[..], "a.opb", &[], &mut Sources::new()).unwrap();
    let objective = loaded.problem.objective.as_ref().unwrap().expr;
    let best: Vec<_> = solutions(&loaded.problem)
        .into_iter()
        .filter(|bits| loaded.problem.evaluate(&loaded.problem.decode(bits).unwrap())[objective] == 0)
        .collect();
    assert_eq!(best, [Bits::from_number(0b01110, 5)]);
}

/// The counter and every room behind it read these problems too.
#[test]
fn what_is_read_is_counted() {
    for path in cases("opb").into_iter().chain(cases("aiger")) {
        let (bytes, _) = parts(&path);
        let suffix = if path.parent().unwrap().ends_with("opb") { "opb" } else { "aag" };
        let Ok(loaded) = load_from(&bytes[..], &format!("a.{suffix}"), &[], &mut Sources::new()) else { continue };
        let options = count::Options { keep: 0, ..count::Options::default() };
        let tally = count::count(&loaded.problem, Over::AllBits, &options, &Budget::unlimited()).unwrap();
        let wanted = solutions(&loaded.problem).len();
        assert_eq!(tally.exact(), Some(&wanted.into()), "{}", path.display());
    }
}

/// Random changes of the bytes of every case: never a panic, and what is read is well formed.
#[test]
fn mutated_bytes() {
    let mut random = SplitMix64::new(11);
    for (folder, suffix) in [("opb", "opb"), ("aiger", "aig")] {
        for path in cases(folder) {
            let (bytes, _) = parts(&path);
            for _ in 0..200 {
                let mut mutated = bytes.clone();
                for _ in 0..=random.below(3) {
                    let at = random.below(mutated.len() as u64) as usize;
                    match random.below(4) {
                        0 => mutated[at] = random.below(256) as u8,
                        1 => mutated[at] = b"0123456789 \n-~x;=<>c"[random.below(20) as usize],
                        2 => mutated.insert(at, b"1 \n"[random.below(3) as usize]),
                        _ => mutated.truncate(at + 1),
                    }
                }
                let mut sources = Sources::new();
                match load_from(&mutated[..], &format!("a.{suffix}"), &[], &mut sources) {
                    Ok(loaded) => assert_eq!(check::check(&loaded.problem), Ok(())),
                    Err(errors) => {
                        assert!(!errors.is_empty());
                        let places = errors.iter().filter_map(Diagnostic::span);
                        places.for_each(|span| assert!(sources.position(span).line > 0));
                    }
                }
            }
        }
    }
}

/// A random graph in ASCII, with ANDs in any order, and in binary: one meaning.
#[test]
fn both_forms_of_a_graph_mean_the_same() {
    let mut random = SplitMix64::new(5);
    for _ in 0..50 {
        let (inputs, ands) = (1 + random.below(5), 1 + random.below(20));
        let mut rows = Vec::new();
        let mut binary = Vec::new();
        for var in inputs + 1..=inputs + ands {
            let (a, b) = (random.below(2 * var), random.below(2 * var));
            let (left, right) = (a.max(b), a.min(b));
            rows.push(format!("{} {left} {right}\n", 2 * var));
            for mut difference in [2 * var - left, left - right] {
                while difference >= 0x80 {
                    binary.push(difference as u8 | 0x80);
                    difference >>= 7;
                }
                binary.push(difference as u8);
            }
        }
        let largest = inputs + ands;
        let output = 2 * largest + random.below(2);
        for at in (1..rows.len()).rev() {
            rows.swap(at, random.below(at as u64 + 1) as usize);
        }
        let names: String = (1..=inputs).map(|var| format!("{}\n", 2 * var)).collect();
        let ascii = format!("aag {largest} {inputs} 0 1 {ands}\n{names}{output}\n{}", rows.concat());
        let head = format!("aig {largest} {inputs} 0 1 {ands}\n{output}\n");
        let packed = [head.as_bytes(), &binary].concat();
        let read = |bytes: &[u8], name| load_from(bytes, name, &[], &mut Sources::new()).unwrap().problem;
        let (ascii, packed) = (read(ascii.as_bytes(), "a.aag"), read(&packed, "<stdin>"));
        assert_eq!(solutions(&ascii), solutions(&packed));
    }
}

#[test]
fn formats_are_told_by_suffix_and_first_word() {
    const OPB: &str = "* #variable= 1 #constraint= 1\n+1 x1 >= 1 ;\n";
    const AIG: &str = "aag 1 1 0 1 0\n2\n2\n";
    let format = |bytes: &[u8], name: &str| {
        let sets: &[(String, String)] = &[];
        load_from(bytes, name, sets, &mut Sources::new()).map(|loaded| loaded.format).map_err(|errors| errors[0].code.0)
    };
    for (text, suffix, wanted) in [(OPB, "opb", Format::Opb), (AIG, "aag", Format::Aiger), (AIG, "aig", Format::Aiger)]
    {
        assert_eq!(format(text.as_bytes(), "<stdin>"), Ok(wanted));
        assert_eq!(format(text.as_bytes(), &format!("a.{suffix}")), Ok(wanted));
        let mut encoder = flate2::write::GzEncoder::new(Vec::new(), flate2::Compression::default());
        encoder.write_all(text.as_bytes()).unwrap();
        assert_eq!(format(&encoder.finish().unwrap(), &format!("a.{suffix}.gz")), Ok(wanted));
        let sets = [("cells".to_owned(), "8".to_owned())];
        let refused = load_from(text.as_bytes(), &format!("a.{suffix}"), &sets, &mut Sources::new());
        assert_eq!(refused.unwrap_err()[0].code.0, "F010");
    }
    assert_eq!(format(b"min: +1 x1 ;\n", "<stdin>"), Ok(Format::Opb));
    assert_eq!(format(b"+1 x1 >= 1 ;\n", "<stdin>"), Ok(Format::Opb));
}

#[test]
fn the_commands_take_them() {
    let desk = Desk::new();
    desk.file("p.opb", "* #variable= 3 #constraint= 1\n+1 x1 +2 x2 +3 x3 = 3 ;\n");
    desk.file("p.aag", "aag 3 2 0 1 1\n2\n4\n6\n6 2 5\ni0 sun\n");
    desk.file("cut.aag", "aag 3 2 0 1 1\n2\n4\n");
    for (file, format, count) in [("p.opb", "opb", "2"), ("p.aag", "aiger", "1")] {
        let (exit, object) = desk.json(&["dossier", file]);
        assert_eq!((exit, &object["problem"]["format"]), (0, &format.into()), "{object:#}");
        assert_eq!((&object["tally"]["count"], &object["audit"]["verdict"]), (&count.into(), &"equal".into()));
    }
    let (_, object) = desk.json(&["count", "p.aag", "--list", "1"]);
    assert_eq!(
        (&object["solutions"][0]["values"]["sun"], &object["solutions"][0]["values"]["x2"]),
        (&"yes".into(), &"no".into())
    );
    assert_eq!(desk.exit(&["count", "cut.aag"]), 2);
}
