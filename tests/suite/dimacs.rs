//! The DIMACS reader and the opening of files: the instance collection, one file a case, blocks, packing, round trips.

use std::fs;
use std::io::{self, Read, Write};
use std::path::{Path, PathBuf};

use proptest::prelude::*;
use tallymark::diag::Diagnostic;
use tallymark::id::Id;
use tallymark::problem::{BitId, BitLit, Problem, check};
use tallymark::random::SplitMix64;
use tallymark::source::open::load_from;
use tallymark::source::{Format, dimacs, load};
use tallymark::span::{Position, Sources};

type Outcome = Result<(Problem, Vec<Diagnostic>), Vec<Diagnostic>>;

fn read(bytes: impl Read) -> (Outcome, Sources) {
    let mut sources = Sources::new();
    let outcome = dimacs::read(bytes, "test.cnf", &mut sources);
    (outcome, sources)
}

fn position(diagnostic: &Diagnostic, sources: &Sources) -> Option<Position> {
    diagnostic.span().map(|span| sources.position(span))
}

/// The entries of an index of instances, and its folder.
fn index(folder: &str) -> Option<(Vec<serde_json::Value>, PathBuf)> {
    let folder = Path::new(env!("CARGO_MANIFEST_DIR")).join(folder);
    let text = fs::read_to_string(folder.join("index.json")).ok()?;
    let index: serde_json::Value = serde_json::from_str(&text).expect("the index is JSON");
    Some((index.as_array().expect("a list").clone(), folder))
}

/// Says that a test had nothing to do.
#[expect(clippy::print_stderr, reason = "a skipped test must be seen")]
fn skipped() {
    eprintln!("skipped: the folder of all instances is not beside the project");
}

fn check_instance(entry: &serde_json::Value, folder: &Path) {
    let name = entry["file"].as_str().unwrap();
    let path = folder.join(name);
    let mut sources = Sources::new();
    let loaded = load(path.to_str().unwrap(), &[], &mut sources);
    if entry["expect"] == "error" {
        let errors = loaded.map(|_| ()).expect_err(name);
        let message = entry["reference_message"].as_str().unwrap();
        let line = message.strip_prefix("line ").map(|rest| rest.split(':').next().unwrap().parse().unwrap());
        // The show line of the collection stands in line 2; an empty file has no line.
        let line = line.or_else(|| message.starts_with("show line").then_some(2));
        assert_eq!(position(&errors[0], &sources).map(|position| position.line), line, "{name}: {message}");
        assert!(errors[0].span().is_some() || errors[0].file.as_deref() == path.to_str(), "{name}");
        assert!(errors[0].found.is_some() && errors[0].expected.is_some(), "{name}");
        return;
    }
    let loaded = loaded.unwrap_or_else(|errors| panic!("{name}: {errors:?}"));
    let number = |key: &str| entry[key].as_u64().map(|number| number as usize);
    assert_eq!(loaded.format, Format::Dimacs, "{name}");
    assert_eq!(Some(loaded.problem.bit_count()), number("vars"), "{name}");
    assert_eq!(Some(loaded.problem.clauses.len()), number("clauses"), "{name}");
    let shown = loaded.problem.shown.as_ref().map(|bits| bits.iter().map(|bit| bit.index() as u64 + 1).collect());
    let expected: Option<Vec<u64>> =
        entry["show"].as_array().map(|vars| vars.iter().map(|var| var.as_u64().unwrap()).collect());
    assert_eq!(shown, expected, "{name}");
    assert_eq!(!loaded.warnings.is_empty(), entry["warn"].as_bool().unwrap(), "{name}");
    assert_eq!(loaded.sha256, entry["sha256"].as_str().unwrap(), "{name}");
    assert_eq!(check::check(&loaded.problem), Ok(()), "{name}");
}

#[test]
fn copied_instances_are_read_or_refused_as_their_index_says() {
    let (entries, folder) = index("tests/instances").expect("copied into the project");
    entries.iter().for_each(|entry| check_instance(entry, &folder));
    assert!(entries.len() >= 70, "{} entries", entries.len());
}

#[test]
fn all_instances_are_read_or_refused_as_their_index_says() {
    match index("../shared/instances") {
        Some((entries, folder)) => entries.iter().for_each(|entry| check_instance(entry, &folder)),
        None => skipped(),
    }
}

// One file, one case.

/// `\n`, `\r`, `\t` and `\xHH` in the input of a case.
fn unescape(text: &str) -> Vec<u8> {
    let mut bytes = Vec::new();
    let mut rest = text.bytes();
    while let Some(byte) = rest.next() {
        let escaped = if byte == b'\\' { rest.next().expect("something after the backslash") } else { 0 };
        bytes.push(match escaped {
            0 => byte,
            b'n' => b'\n',
            b'r' => b'\r',
            b't' => b'\t',
            b'x' => {
                let digits = [rest.next().unwrap(), rest.next().unwrap()];
                u8::from_str_radix(std::str::from_utf8(&digits).unwrap(), 16).unwrap()
            }
            other => panic!("unknown escape {}", char::from(other)),
        });
    }
    bytes
}

/// A message in one line: code, place, what was found.
fn summary(diagnostic: &Diagnostic, sources: &Sources) -> String {
    let place = position(diagnostic, sources).map_or("-".to_owned(), |at| format!("{}:{}", at.line, at.column));
    let found = diagnostic.found.as_ref().map_or(String::new(), |found| format!(" '{}'", found.trim_matches('\'')));
    format!("{} {place}{found}", diagnostic.code)
}

fn outcome_text(outcome: &Outcome, sources: &Sources) -> String {
    let (first, messages) = match outcome {
        Err(errors) => (None, errors),
        Ok((problem, warnings)) => {
            let shown = problem.shown.as_ref().map_or(String::new(), |bits| {
                let vars: Vec<String> = bits.iter().map(|bit| (bit.index() + 1).to_string()).collect();
                format!(", shown {}", vars.join(" "))
            });
            let mut numbers = Vec::new();
            for clause in problem.clauses.iter() {
                numbers.extend(clause.iter().map(|lit| lit.to_dimacs().to_string()));
                numbers.push("0".to_owned());
            }
            (Some(format!("ok {} variables{shown}: {}", problem.bit_count(), numbers.join(" "))), warnings)
        }
    };
    let messages = messages.iter().map(|message| summary(message, sources));
    first.into_iter().chain(messages).collect::<Vec<_>>().join("\n")
}

#[test]
fn cases() {
    let folder = Path::new(env!("CARGO_MANIFEST_DIR")).join("tests/cases/dimacs");
    let mut paths: Vec<PathBuf> = fs::read_dir(folder).unwrap().map(|entry| entry.unwrap().path()).collect();
    paths.sort();
    assert!(paths.len() >= 38, "{} cases", paths.len());
    for path in paths {
        let text = fs::read_to_string(&path).unwrap();
        let (head, rest) = text.split_once("\n---- input\n").expect("an input");
        let (input, expected) = rest.split_once("\n---- expect\n").expect("an expectation");
        assert!(head.starts_with("why: "), "{}", path.display());
        let (outcome, sources) = read(&unescape(input)[..]);
        assert_eq!(outcome_text(&outcome, &sources), expected.trim_end(), "{}", path.display());
    }
}

// Blocks: what is read does not depend on how the bytes come.

/// A reader that hands out a few bytes at a time.
struct Dribble<'a>(&'a [u8], usize);

impl Read for Dribble<'_> {
    fn read(&mut self, buffer: &mut [u8]) -> io::Result<usize> {
        let size = self.1.min(self.0.len()).min(buffer.len());
        buffer[..size].copy_from_slice(&self.0[..size]);
        self.0 = &self.0[size..];
        Ok(size)
    }
}

/// A file of several blocks, with numbers of all lengths and both signs, and comments, and what it holds.
fn large_file(vars: u64, on_one_line: bool) -> (String, Vec<Vec<i64>>) {
    let mut random = SplitMix64::new(7);
    let mut text = format!("p cnf {vars} 80000\n");
    let mut clauses = Vec::new();
    for at in 0..80_000 {
        let mut clause = Vec::new();
        for _ in 0..random.below(5) {
            let digits = random.below(8) as u32;
            let var = (random.below(10_u64.pow(digits)) + 1).min(vars) as i64;
            clause.push(if random.coin() { -var } else { var });
        }
        clause.iter().for_each(|lit| text += &format!("{lit} "));
        text += if on_one_line { "0 " } else { "0\n" };
        if at % 97 == 0 && !on_one_line {
            text += &format!("c {}\n", "x".repeat(random.below(300) as usize));
        }
        clauses.push(clause);
    }
    (text, clauses)
}

#[test]
fn blocks_do_not_show() {
    for on_one_line in [false, true] {
        let (text, expected) = large_file(1_100_000, on_one_line);
        assert!(text.len() > 3 << 18, "several blocks");
        for step in [usize::MAX, 1009] {
            let (problem, warnings) = read(Dribble(text.as_bytes(), step)).0.unwrap();
            let clauses: Vec<Vec<i64>> =
                problem.clauses.iter().map(|clause| clause.iter().map(|lit| lit.to_dimacs()).collect()).collect();
            assert_eq!(clauses, expected);
            assert_eq!(warnings, []);
        }
    }
}

#[test]
fn places_are_right_far_into_a_file() {
    for on_one_line in [false, true] {
        let (text, _) = large_file(1_100_000, on_one_line);
        let broken = text.clone() + "1 word 0\n";
        let (outcome, sources) = read(broken.as_bytes());
        let error = &outcome.unwrap_err()[0];
        let before = &broken[..broken.len() - "word 0\n".len()];
        let line = before.matches('\n').count() + 1;
        let column = before.len() - before.rfind('\n').unwrap();
        assert_eq!(position(error, &sources), Some(Position { line, column }));
        assert_eq!(sources.text(error.span().unwrap()), "word");
        assert!(sources.file(error.span().unwrap().file).text.len() < 300, "an excerpt, not the file");
    }
}

#[test]
fn long_comments_are_skipped_and_long_words_are_refused() {
    let comment = format!("c {}\np cnf 2 1\n1 0\n", "y".repeat(1 << 20));
    assert_eq!(read(comment.as_bytes()).0.unwrap().0.clauses.len(), 1);
    let word = format!("p cnf 2 1\n{}1 0\n", "0".repeat(1 << 20));
    let (outcome, sources) = read(word.as_bytes());
    assert_eq!(summary(&outcome.unwrap_err()[0], &sources), format!("D008 2:1 '{}…'", "0".repeat(40)));
    let show = format!("c p show{} 2 0\np cnf 2 1\n1 0\n", " 1".repeat(300_000));
    assert_eq!(read(show.as_bytes()).0.unwrap().0.shown.unwrap().len(), 2);
}

#[test]
fn an_error_of_the_input_is_told() {
    struct Broken;
    impl Read for Broken {
        fn read(&mut self, _: &mut [u8]) -> io::Result<usize> {
            Err(io::Error::other("the disk is on fire"))
        }
    }
    let (outcome, _) = read("p cnf 1 1\n".as_bytes().chain(Broken));
    let error = &outcome.unwrap_err()[0];
    assert_eq!((error.code.0, error.message.contains("on fire")), ("F002", true));
}

// Round trips and damage.

fn small_problem() -> impl Strategy<Value = Problem> {
    let clause = prop::collection::vec((1_i64..30, any::<bool>()), 0..5);
    (prop::collection::vec(clause, 0..20), prop::option::of(prop::collection::btree_set(0_usize..30, 0..8))).prop_map(
        |(clauses, shown)| {
            let mut problem = Problem::new();
            problem.add_numbered_vars(30);
            for clause in clauses {
                let lits = clause.iter().map(|&(var, positive)| if positive { var } else { -var });
                problem.clauses.push(&lits.map(|lit| BitLit::from_dimacs(lit).unwrap()).collect::<Vec<_>>());
            }
            problem.shown = shown.map(|bits| bits.into_iter().map(BitId::new).collect());
            problem
        },
    )
}

proptest! {
    #![proptest_config(ProptestConfig { cases: 200, failure_persistence: None, ..ProptestConfig::default() })]

    #[test]
    fn what_is_printed_reads_back(problem in small_problem()) {
        let mut text = String::new();
        dimacs::write(&problem, &mut text).unwrap();
        let (again, warnings) = read(text.as_bytes()).0.unwrap();
        prop_assert_eq!(again, problem);
        prop_assert_eq!(warnings, vec![]);
    }

    /// Any bytes give a sound problem or an error with a place in the file, and the same however they come.
    #[test]
    fn damaged_bytes_never_panic(
        problem in small_problem(),
        changes in prop::collection::vec((any::<prop::sample::Index>(), any::<u8>(), 0_u8..3), 0..6),
    ) {
        let mut text = String::new();
        dimacs::write(&problem, &mut text).unwrap();
        let mut bytes = text.into_bytes();
        for (at, byte, kind) in changes {
            let at = at.index(bytes.len());
            let byte = if kind == 2 { b"0123 -\npc%x"[usize::from(byte) % 11] } else { byte };
            match kind {
                0 => bytes.truncate(at.max(1)),
                _ => bytes[at] = byte,
            }
        }
        let (outcome, sources) = read(&bytes[..]);
        prop_assert_eq!(outcome_text(&outcome, &sources), {
            let (outcome, sources) = read(Dribble(&bytes, 1));
            outcome_text(&outcome, &sources)
        });
        match outcome {
            Ok((problem, _)) => prop_assert_eq!(check::check(&problem), Ok(())),
            Err(errors) => {
                let lines = bytes.iter().filter(|&&byte| byte == b'\n').count() + 1;
                prop_assert!(position(&errors[0], &sources).is_none_or(|at| at.line <= lines));
            }
        }
    }
}

// Opening.

const TEXT: &str = "c a small file\np cnf 3 2\n1 -2 0\n3 0\n";

fn gzip(text: &str) -> Vec<u8> {
    let mut encoder = flate2::write::GzEncoder::new(Vec::new(), flate2::Compression::default());
    encoder.write_all(text.as_bytes()).unwrap();
    encoder.finish().unwrap()
}

fn xz(text: &str) -> Vec<u8> {
    let mut encoder = liblzma::write::XzEncoder::new(Vec::new(), 6);
    encoder.write_all(text.as_bytes()).unwrap();
    encoder.finish().unwrap()
}

fn zstd(text: &str) -> Vec<u8> {
    ruzstd::encoding::compress_to_vec(text.as_bytes(), ruzstd::encoding::CompressionLevel::Fastest)
}

type Pack = fn(&str) -> Vec<u8>;
const PACKINGS: [(&str, Pack); 3] = [(".gz", gzip), (".xz", xz), (".zst", zstd)];

fn open(bytes: &[u8], name: &str) -> Result<tallymark::source::Loaded, Box<Diagnostic>> {
    load_from(bytes, name, &[], &mut Sources::new()).map_err(|mut errors| Box::new(errors.remove(0)))
}

#[test]
fn packed_files_are_unpacked_by_suffix() {
    let plain = open(TEXT.as_bytes(), "a.cnf").unwrap();
    for (suffix, pack) in PACKINGS {
        for name in ["a.cnf", "a.dimacs", "a", "A.CNF"] {
            let packed = pack(TEXT);
            let loaded = open(&packed, &format!("{name}{suffix}")).unwrap();
            assert_eq!((&loaded.problem, loaded.format), (&plain.problem, Format::Dimacs));
            assert_ne!(loaded.sha256, plain.sha256, "the digest is of the bytes as stored");
        }
        // Two packed parts in a row are one text.
        let (first, second) = TEXT.split_at(20);
        let parts = [pack(first), pack(second)].concat();
        assert_eq!(open(&parts, &format!("a.cnf{suffix}")).unwrap().problem, plain.problem);
    }
}

#[test]
fn packing_and_name_must_agree() {
    for (suffix, pack) in PACKINGS {
        let packed = pack(TEXT);
        for name in ["a.cnf", "<stdin>", "a.tally", "a"] {
            assert_eq!(open(&packed, name).unwrap_err().code.0, "F003");
        }
        assert_eq!(open(TEXT.as_bytes(), &format!("a.cnf{suffix}")).unwrap_err().code.0, "F004");
        assert_eq!(open(b"", &format!("a.cnf{suffix}")).unwrap_err().code.0, "F005");
    }
    assert_eq!(open(&gzip(TEXT), "a.cnf.xz").unwrap_err().code.0, "F004");
}

/// Every cut and every flipped bit of packed bytes is an error or changes nothing that is read.
#[test]
fn damaged_packing_is_an_error() {
    let plain = open(TEXT.as_bytes(), "a.cnf").unwrap().problem;
    for (suffix, pack) in PACKINGS {
        let packed = pack(TEXT);
        let name = format!("a.cnf{suffix}");
        for length in 0..packed.len() {
            let error = open(&packed[..length], &name).unwrap_err();
            assert!(["F004", "F005", "F006"].contains(&error.code.0), "{name} cut to {length}: {error:?}");
        }
        for at in 0..packed.len() {
            let mut damaged = packed.clone();
            damaged[at] ^= 0x10;
            if let Ok(loaded) = open(&damaged, &name) {
                assert_eq!(loaded.problem, plain, "{name} at {at}");
            }
        }
    }
}

#[test]
fn the_format_is_told_by_the_suffix_or_the_first_line() {
    let format = |text: &str, name: &str| open(text.as_bytes(), name).map(|loaded| loaded.format);
    assert_eq!(format(TEXT, "<stdin>").unwrap(), Format::Dimacs);
    assert_eq!(format("\n  p cnf 1 0\n", "a.txt").unwrap(), Format::Dimacs);
    // Numbers and other headers belong to DIMACS too, whose reader says what is wrong with them.
    assert_eq!(format("1 2 0\n", "<stdin>").unwrap_err().code.0, "D002");
    assert_eq!(format("p wcnf 1 1 1\n", "<stdin>").unwrap_err().code.0, "D004");
    assert_eq!(format(" \n", "<stdin>").unwrap_err().code.0, "F008");
    assert_eq!(format(" \n", "a.cnf").unwrap_err().code.0, "D001");
    assert_eq!(format("pick lamp\n", "a.txt").unwrap(), Format::Tally);
    assert_eq!(format("pick lamp\n", "a.tally").unwrap(), Format::Tally);
}

#[test]
fn files_that_cannot_be_read_are_told() {
    let load = |path: &str, sets: &[(String, String)]| {
        load(path, sets, &mut Sources::new()).map(|_| ()).map_err(|errors| errors[0].code.0)
    };
    assert_eq!(load("no/such/file.cnf", &[]), Err("F001"));
    assert_eq!(load(env!("CARGO_MANIFEST_DIR"), &[]), Err("F001"));
    let sets = [("cells".to_owned(), "8".to_owned())];
    let file = concat!(env!("CARGO_MANIFEST_DIR"), "/tests/instances/edge-zero-zero.cnf");
    assert_eq!(load(file, &sets), Err("F010"));
    assert_eq!(open(b"pick caf\xe9\n", "a.tally").unwrap_err().code.0, "F009");
}
