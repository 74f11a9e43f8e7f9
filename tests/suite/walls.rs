//! The walls: which room may name which.
//!
//! The whole matrix stands here. The test reads every source file, takes its paths outside comments and strings
//! (`use`, inline `crate::...`, `super::...`, groups, re-exports), resolves them to rooms, and fails on a breach.

use std::collections::BTreeSet;
use std::fs;
use std::path::{Path, PathBuf};

/// The floor: every room may name these, and they name none but each other.
const FLOOR: &[&str] = &["span", "diag", "id", "budget", "random", "columns"];

/// A room, and the rooms it may name besides itself and the floor.
const MATRIX: &[(&str, &[&str])] = &[
    ("span", &[]),
    ("diag", &[]),
    ("id", &[]),
    ("budget", &[]),
    ("random", &[]),
    ("columns", &[]),
    ("problem", &[]),
    ("circuit", &[]),
    ("sat", &[]),
    ("source", &["problem"]),
    ("places", &["problem"]),
    ("structure", &["problem"]),
    // The maker asks engines bounded local questions (a window, the order of moves of a schedule, one of its own passes),
    // never about the whole formula.
    ("make", &["problem", "places", "circuit", "structure", "sat"]),
    // The wall of the house: the judge never names the maker.
    ("judge", &["problem", "places", "circuit", "sat"]),
    ("search", &["problem", "places", "circuit", "make", "judge"]),
    ("ledger", &[]),
    ("report", &["source", "problem", "places", "circuit", "judge", "search", "ledger"]),
    ("pipeline", &["source", "problem", "places", "circuit", "make", "judge", "search", "ledger", "report"]),
    (
        "cli",
        &[
            "structure",
            "ledger",
            "source",
            "problem",
            "places",
            "circuit",
            "make",
            "judge",
            "search",
            "report",
            "pipeline",
        ],
    ),
];

/// What stands at the root of the crate without being a room: macros.
const ROOT_MACROS: &[&str] = &["define_id"];

#[test]
fn every_room_names_only_the_rooms_it_may() {
    let src = Path::new(env!("CARGO_MANIFEST_DIR")).join("src");
    let mut breaches = Vec::new();
    let mut seen = BTreeSet::new();
    for file in rust_files(&src) {
        let module = module_path(&src, &file);
        let Some(room) = module.first() else { continue };
        seen.insert(room.clone());
        let Some((_, may)) = MATRIX.iter().find(|(name, _)| name == room) else {
            breaches.push(format!("{}: the room {room} is not in the matrix", file.display()));
            continue;
        };
        for target in named_rooms(&fs::read_to_string(&file).unwrap(), &module) {
            let allowed = target == *room
                || FLOOR.contains(&target.as_str())
                || ROOT_MACROS.contains(&target.as_str())
                || may.contains(&target.as_str());
            if !allowed {
                breaches.push(format!("{}: {room} names {target}", file.display()));
            }
        }
    }
    assert!(breaches.is_empty(), "walls are broken:\n{}", breaches.join("\n"));
    let rooms: BTreeSet<String> = MATRIX.iter().map(|(name, _)| (*name).to_owned()).collect();
    assert_eq!(seen, rooms, "the matrix and src/ have the same rooms");
}

/// `lib.rs` must only declare modules: a re-export there would let a name through every wall.
#[test]
fn the_root_only_declares_rooms() {
    let lib = fs::read_to_string(Path::new(env!("CARGO_MANIFEST_DIR")).join("src/lib.rs")).unwrap();
    let words = tokens(&lib);
    assert!(!words.iter().any(|word| word == "use"), "lib.rs re-exports something");
}

/// The scanner finds what it must find: each way of naming a room, and no mention in a comment or a string.
#[test]
fn the_scanner_sees_every_way_of_naming_a_room() {
    let module: Vec<String> = ["judge", "audit", "search"].map(str::to_owned).to_vec();
    let rooms = |text: &str| named_rooms(text, &module).into_iter().collect::<Vec<_>>();
    assert_eq!(rooms("use crate::make::lower;"), ["make"]);
    assert_eq!(rooms("use crate::{diag, make as m, problem::{Bits, code}};"), ["diag", "make", "problem"]);
    assert_eq!(rooms("fn f() { crate::make::lower::run() }"), ["make"]);
    assert_eq!(rooms("pub use super::super::super::make::lower;"), ["make"]);
    assert_eq!(rooms("use super::verdict; use self::x;"), ["judge"]);
    assert_eq!(rooms("mod tests { use super::*; use super::super::super::super::make; }"), ["judge", "make"]);
    assert_eq!(rooms("use super::{super::{super::{make}}};"), ["make"]);
    assert_eq!(rooms("x!(<$crate::make::T as crate :: problem :: Q>::y)"), ["make", "problem"]);
    assert_eq!(
        rooms("// crate::make\n/* crate::make /* nested */ */ \"crate::make\" r#\"crate::make\"# '\"'"),
        [""; 0]
    );
    assert_eq!(rooms("use crate as root;"), ["(the whole crate)"]);
    assert_eq!(rooms("use crate::*;"), ["(the whole crate)"]);
    assert_eq!(rooms("use tallymark::make;"), ["make"]);
}

fn rust_files(folder: &Path) -> Vec<PathBuf> {
    let mut files = Vec::new();
    for entry in fs::read_dir(folder).unwrap() {
        let path = entry.unwrap().path();
        if path.is_dir() {
            files.extend(rust_files(&path));
        } else if path.extension().is_some_and(|extension| extension == "rs") {
            files.push(path);
        }
    }
    files.sort();
    files
}

/// `src/judge/audit/mod.rs` is `judge::audit`; the roots `lib.rs` and `main.rs` are the empty path.
fn module_path(src: &Path, file: &Path) -> Vec<String> {
    let relative = file.strip_prefix(src).unwrap().with_extension("");
    let mut path: Vec<String> = relative.iter().map(|part| part.to_str().unwrap().to_owned()).collect();
    if path.last().is_some_and(|last| last == "mod" || (path.len() == 1 && (last == "lib" || last == "main"))) {
        path.pop();
    }
    path
}

/// The rooms that the text names, as the first segments of resolved paths.
fn named_rooms(text: &str, module: &[String]) -> BTreeSet<String> {
    let words = tokens(text);
    let mut rooms = BTreeSet::new();
    // The modules opened inside the file, with the depth of braces at which each ends.
    let (mut inner, mut depth) = (Vec::<(String, usize)>::new(), 0usize);
    let mut at = 0;
    while at < words.len() {
        let word = words[at].as_str();
        let fresh = at == 0 || words[at - 1] != "::";
        match word {
            "mod" if words.get(at + 2).is_some_and(|next| next == "{") => inner.push((words[at + 1].clone(), depth)),
            "{" => depth += 1,
            "}" => {
                depth = depth.saturating_sub(1);
                if inner.last().is_some_and(|(_, ends)| *ends == depth) {
                    inner.pop();
                }
            }
            "crate" | "super" | "self" | "tallymark" if fresh && is_path(&words, at) => {
                let mut here = module.to_vec();
                here.extend(inner.iter().map(|(name, _)| name.clone()));
                at = resolve(&words, at, here, &mut rooms);
                continue;
            }
            _ => {}
        }
        at += 1;
    }
    rooms
}

/// `crate` in `pub(crate)` is no path; `crate as` is one that names everything.
fn is_path(words: &[String], at: usize) -> bool {
    words.get(at + 1).is_some_and(|next| next == "::" || (words[at] == "crate" && next == "as"))
}

/// Follows a path tree from place `at`, which names something inside `here`; returns the place after it.
fn resolve(words: &[String], mut at: usize, mut here: Vec<String>, rooms: &mut BTreeSet<String>) -> usize {
    loop {
        match words.get(at).map(String::as_str) {
            Some("crate" | "tallymark") => here.clear(),
            Some("super") => {
                here.pop();
            }
            Some("self") => {}
            Some("{") => {
                at += 1;
                while words.get(at).is_some_and(|word| word != "}") {
                    at = resolve(words, at, here.clone(), rooms);
                    while words.get(at).is_some_and(|word| word != "," && word != "}") {
                        at += 1;
                    }
                    if words.get(at).is_some_and(|word| word == ",") {
                        at += 1;
                    }
                }
                return at + 1;
            }
            Some("*") if here.is_empty() => {
                rooms.insert("(the whole crate)".to_owned());
                return at + 1;
            }
            Some(name) => here.push(name.to_owned()),
            None => return at,
        }
        if words.get(at + 1).is_none_or(|next| next != "::") {
            rooms.insert(here.first().cloned().unwrap_or_else(|| "(the whole crate)".to_owned()));
            return at + 1;
        }
        at += 2;
    }
}

/// Identifiers, `::` and single characters, without comments, strings, characters and lifetimes.
fn tokens(text: &str) -> Vec<String> {
    let bytes = text.as_bytes();
    let mut words = Vec::new();
    let mut at = 0;
    while at < bytes.len() {
        let rest = &text[at..];
        if rest.starts_with("//") {
            at += rest.find('\n').unwrap_or(rest.len());
        } else if rest.starts_with("/*") {
            at += block_comment(rest);
        } else if let Some(len) = string_literal(rest) {
            at += len;
        } else if rest.starts_with('\'') {
            at += char_or_lifetime(rest);
        } else if rest.starts_with("::") {
            words.push("::".to_owned());
            at += 2;
        } else {
            let first = rest.chars().next().unwrap();
            let len = if first.is_alphanumeric() || first == '_' {
                rest.find(|c: char| !c.is_alphanumeric() && c != '_').unwrap_or(rest.len())
            } else {
                first.len_utf8()
            };
            if !first.is_whitespace() && first != '$' {
                words.push(rest[..len].to_owned());
            }
            at += len;
        }
    }
    words
}

fn block_comment(text: &str) -> usize {
    let (mut depth, mut at) = (0usize, 0);
    loop {
        let rest = &text.as_bytes()[at..];
        if rest.starts_with(b"/*") {
            (depth, at) = (depth + 1, at + 2);
        } else if rest.starts_with(b"*/") {
            (depth, at) = (depth - 1, at + 2);
        } else {
            at += 1;
        }
        if depth == 0 || at >= text.len() {
            return at.min(text.len());
        }
    }
}

/// The length of a string literal at the start of the text, raw and byte strings included.
fn string_literal(text: &str) -> Option<usize> {
    let prefix = ["br", "b", "r", "c", ""]
        .into_iter()
        .find(|prefix| text.strip_prefix(prefix).is_some_and(|rest| rest.trim_start_matches('#').starts_with('"')))?;
    let rest = &text[prefix.len()..];
    let hashes = rest.len() - rest.trim_start_matches('#').len();
    if hashes > 0 || prefix.ends_with('r') {
        let end = format!("\"{}", "#".repeat(hashes));
        let body = prefix.len() + hashes + 1;
        return Some(text[body..].find(&end).map_or(text.len(), |found| body + found + end.len()));
    }
    let mut at = prefix.len() + 1;
    while at < text.len() && text.as_bytes()[at] != b'"' {
        at += if text.as_bytes()[at] == b'\\' { 2 } else { 1 };
    }
    Some((at + 1).min(text.len()))
}

fn char_or_lifetime(text: &str) -> usize {
    let mut chars = text.char_indices().skip(1);
    match (chars.next(), chars.next()) {
        (Some((_, '\\')), Some((escape, _))) => {
            text[escape + 1..].find('\'').map_or(text.len(), |end| escape + end + 2)
        }
        (Some(_), Some((end, '\''))) => end + 1,
        _ => 1,
    }
}
