//! A JSON object of counts by bit string.
//!
//! Read here rather than by the general JSON reader, which keeps no places and takes the last of two equal names in
//! silence.

use std::collections::BTreeSet;
use std::ops::Range;

use super::cells::{BYTE_ORDER_MARK, Entries, Entry, Field};
use super::fault::Kind;

/// The entries of the object; after a mistake in its shape nothing more is read.
pub(super) fn entries(text: &str) -> Entries<'_> {
    let mut scanner = Scanner { text, at: 0, seen: BTreeSet::new() };
    let mut entries = Vec::new();
    if let Err(fault) = scanner.object(&mut entries) {
        entries.push(Err(fault));
    }
    Box::new(entries.into_iter())
}

type Fault = (Range<usize>, Kind);

struct Scanner<'a> {
    text: &'a str,
    at: usize,
    seen: BTreeSet<&'a str>,
}

const OBJECT: &str = "an object such as {\"0101\": 17}";
const NAME: &str = "a bit string in quotes";
const COUNT: &str = "a colon and a natural number";

impl<'a> Scanner<'a> {
    fn object(&mut self, entries: &mut Vec<Result<Entry<'a>, Fault>>) -> Result<(), Fault> {
        self.expect("{", OBJECT)?;
        if !self.accept("}") {
            loop {
                entries.push(self.member()?);
                if self.accept("}") {
                    break;
                }
                self.expect(",", "a comma or the end of the object")?;
            }
        }
        self.skip();
        if self.at == self.text.len() { Ok(()) } else { self.shape("the end of the file") }
    }

    /// A name and its count; the inner error is about the entry alone, and reading goes on after it.
    fn member(&mut self) -> Result<Result<Entry<'a>, Fault>, Fault> {
        self.expect("\"", NAME)?;
        let rest = &self.text[self.at..];
        let Some(length) = rest.find(['"', '\n']).filter(|&length| rest[length..].starts_with('"')) else {
            return self.shape("a quote at the end of the bit string");
        };
        let name = Field { text: &rest[..length], lo: self.at };
        self.at += length + 1;
        self.expect(":", COUNT)?;
        self.skip();
        let rest = &self.text[self.at..];
        let length = rest.find(|c: char| !c.is_ascii_alphanumeric() && !"+-.".contains(c)).unwrap_or(rest.len());
        if length == 0 {
            return self.shape(COUNT);
        }
        let count = Field { text: &rest[..length], lo: self.at };
        self.at += length;
        if !self.seen.insert(name.text) {
            return Ok(Err((name.range(), Kind::Twice(name.text.to_owned()))));
        }
        Ok(Ok(Entry { bits: name, count: Some(count), picks: true }))
    }

    fn skip(&mut self) {
        let rest = &self.text[self.at..];
        self.at += rest.len() - rest.trim_start_matches([' ', '\t', '\r', '\n', BYTE_ORDER_MARK]).len();
    }

    fn accept(&mut self, token: &str) -> bool {
        self.skip();
        let found = self.text[self.at..].starts_with(token);
        self.at += if found { token.len() } else { 0 };
        found
    }

    fn expect(&mut self, token: &str, expected: &'static str) -> Result<(), Fault> {
        if self.accept(token) { Ok(()) } else { self.shape(expected) }
    }

    fn shape<T>(&self, expected: &'static str) -> Result<T, Fault> {
        let next = self.text[self.at..].chars().next();
        let found = next.map_or_else(|| "the end of the file".to_owned(), |c| format!("`{}`", c.escape_default()));
        let length = next.map_or(0, char::len_utf8);
        Err((self.at..self.at + length, Kind::Shape { found, expected }))
    }
}
