//! Damaged and senseless texts: whatever is read, there is an answer and never a panic.

use std::panic::{AssertUnwindSafe, catch_unwind};

use tallymark::random::SplitMix64;
use tallymark::source::tally::limits::{MAX_NESTING, MAX_TEXT};
use tallymark::source::tally::{self, token::RESERVED};
use tallymark::span::Sources;

use super::cases::cases;

/// Reads a text; a panic names it. Every message has a place inside its text.
fn read(text: &str) -> Vec<&'static str> {
    let read = catch_unwind(AssertUnwindSafe(|| {
        let mut sources = Sources::new();
        let result = tally::read(text, "damaged", &[], &mut sources);
        let accepted = result.is_ok();
        let messages = result.map_or_else(|mistakes| mistakes, |(_, warnings)| warnings);
        assert_eq!(accepted, !messages.iter().any(|message| message.is_error()));
        for label in messages.iter().flat_map(|message| &message.labels) {
            assert!(label.span.lo <= label.span.hi && label.span.hi as usize <= text.len(), "{label:?}");
        }
        messages.iter().map(|message| message.code.0).collect()
    }));
    read.unwrap_or_else(|_| panic!("this text panics:\n{text}"))
}

#[test]
fn senseless_texts_never_panic() {
    let names = ["a", "b", "i", "Port", "bow", "x1", "0", "1", "3", "17", "9223372036854775807"];
    let signs = ["=", "!=", "<", "<=", ">", ">=", "+", "-", "*", "/", "(", ")", "[", "]", ",", "|", "\n", "\"t\""];
    let strange = ["é", "==", "§", "\"", "9x", "#", "\\", "\u{0}"];
    let words: Vec<&str> = RESERVED.iter().chain(&names).chain(&names).chain(&signs).chain(&signs).copied().collect();
    let mut random = SplitMix64::new(1);
    for _ in 0..4000 {
        let len = 1 + random.below(40);
        let mut text = String::from("kind Port = bow | stern\npick a pick b in 1 to 3 pick x1[i in 1 to 3] in Port\n");
        for _ in 0..len {
            let odd = random.below(60) == 0;
            let from: &[&str] = if odd { &strange } else { &words };
            text.push_str(from[random.below(from.len() as u64) as usize]);
            text.push(' ');
        }
        read(&text);
    }
}

#[test]
fn damaged_texts_never_panic() {
    let texts: Vec<String> =
        ["problems", super::GOOD].iter().flat_map(|folder| cases(folder)).map(|case| case.text).collect();
    let mut random = SplitMix64::new(2);
    for text in &texts {
        for _ in 0..60 {
            let mut bytes = text.clone().into_bytes();
            for _ in 0..1 + random.below(3) {
                let at = random.below(bytes.len() as u64) as usize;
                match random.below(4) {
                    0 => bytes.truncate(at + 1),
                    1 => drop(bytes.remove(at)),
                    2 => bytes[at] = b"()[]=<+-*,1i \n\"#|"[random.below(17) as usize],
                    _ => {
                        let end = (at + random.below(30) as usize).min(bytes.len());
                        let part: Vec<u8> = bytes[at..end].to_vec();
                        let to = random.below(bytes.len() as u64) as usize;
                        bytes.splice(to..to, part);
                    }
                }
                if bytes.is_empty() {
                    break;
                }
            }
            read(&String::from_utf8_lossy(&bytes));
        }
    }
}

#[test]
fn deep_and_long_texts_are_refused_or_read_but_never_overflow_the_stack() {
    let deep = 100_000;
    let nested = [
        format!("pick a must {}a{}", "(".repeat(deep), ")".repeat(deep)),
        format!("pick a must {}a", "not ".repeat(deep)),
        format!("must {}1 = 1", "-".repeat(deep)),
        format!("must {}yes", "if yes then no else ".repeat(deep)),
        format!("must {}yes{}", "all of [".repeat(deep), "]".repeat(deep)),
        format!("known a = {}1{}", "[".repeat(deep), "]".repeat(deep)),
        format!("must {}1{} = 1", "abs(".repeat(deep), ")".repeat(deep)),
        format!("pick a[i in 1 to 2] in 1 to 2 must {}1{} = 1", "a[".repeat(deep), "]".repeat(deep)),
    ];
    for text in &nested[1..] {
        assert!(read(text).contains(&"T032"), "{}", &text[..40]);
    }
    // Brackets alone are no nesting: they leave no node.
    assert!(!read(&nested[0]).contains(&"T032"));
    for long in [
        format!("pick a must {}a", "a needs ".repeat(deep)),
        format!("pick a must {}a", "a and ".repeat(deep)),
        format!("pick a must 0 <= a{}", " + a".repeat(deep)),
        format!("pick a must 0 <= a{}", " * 1".repeat(deep)),
        format!("pick a must 0 <= a{}", " <= 1".repeat(deep)),
        format!("pick a must odd [{}]", "a, ".repeat(deep)),
    ] {
        assert!(read(&long).iter().all(|code| *code == "T040" || *code == "T031"), "{}", &long[..40]);
    }
    // The deepest that is allowed is read on the stack of a test thread.
    let fits = format!("pick a must {}a", "not ".repeat(MAX_NESTING as usize - 1));
    assert_eq!(read(&fits), [""; 0]);
}

#[test]
fn limits_of_size_have_their_errors() {
    assert_eq!(read(&" ".repeat(MAX_TEXT + 1)), ["T034"]);
    assert_eq!(read(&"pick\n".repeat(300)).len(), 100);
}
