//! Lines and words of a file that may go on in binary.

use std::ops::Range;

use super::fault::{Fault, Kind};

/// The bytes, and how far they were read.
pub(super) struct Lines<'a> {
    pub(super) bytes: &'a [u8],
    pub(super) at: usize,
}

/// A line without its end.
#[derive(Clone, Copy)]
pub(super) struct Line<'a> {
    pub(super) text: &'a [u8],
    pub(super) start: usize,
}

/// A word of a line.
#[derive(Clone, Copy)]
pub(super) struct Word<'a> {
    pub(super) text: &'a [u8],
    pub(super) start: usize,
}

impl<'a> Lines<'a> {
    pub(super) fn new(bytes: &'a [u8]) -> Self {
        Self { bytes, at: 0 }
    }

    /// The next line; `expected` is what the message of a missing one says.
    pub(super) fn line(&mut self, expected: &'static str) -> Result<Line<'a>, Fault> {
        self.next_line().ok_or(Fault { at: self.bytes.len()..self.bytes.len(), kind: Kind::Cut(expected) })
    }

    /// The next line, if there is one.
    pub(super) fn next_line(&mut self) -> Option<Line<'a>> {
        let start = self.at;
        let rest = &self.bytes[start..];
        if rest.is_empty() {
            return None;
        }
        let length = rest.iter().position(|&byte| byte == b'\n').unwrap_or(rest.len());
        self.at = (start + length + 1).min(self.bytes.len());
        Some(Line { text: rest[..length].strip_suffix(b"\r").unwrap_or(&rest[..length]), start })
    }
}

impl<'a> Line<'a> {
    pub(super) fn range(&self) -> Range<usize> {
        self.start..self.start + self.text.len()
    }

    pub(super) fn fault(&self, kind: Kind) -> Fault {
        Fault { at: self.range(), kind }
    }

    /// The words, which single blanks separate; more blanks are forgiven.
    pub(super) fn words(&self) -> impl Iterator<Item = Word<'a>> + use<'a> {
        let (text, start) = (self.text, self.start);
        let mut at = 0;
        text.split(|&byte| byte == b' ' || byte == b'\t').filter_map(move |word| {
            let from = at;
            at += word.len() + 1;
            (!word.is_empty()).then_some(Word { text: word, start: start + from })
        })
    }

    /// Exactly so many numbers.
    pub(super) fn numbers<const N: usize>(&self, expected: &'static str) -> Result<[u64; N], Fault> {
        let mut words = self.words();
        let mut numbers = [0; N];
        for number in &mut numbers {
            let word = words.next().ok_or(self.fault(Kind::Expected(expected)))?;
            *number = word.number().ok_or(word.fault(Kind::Expected(expected)))?;
        }
        words.next().map_or(Ok(numbers), |word| Err(word.fault(Kind::Expected(expected))))
    }
}

impl Word<'_> {
    pub(super) fn fault(&self, kind: Kind) -> Fault {
        Fault { at: self.start..self.start + self.text.len(), kind }
    }

    /// A natural number of 64 bits, digits only.
    pub(super) fn number(&self) -> Option<u64> {
        let good = self.text.iter().all(u8::is_ascii_digit);
        std::str::from_utf8(self.text).ok().filter(|_| good)?.parse().ok()
    }
}
