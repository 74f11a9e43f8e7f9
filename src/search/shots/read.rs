//! Reading shots: plain lines, CSV, or a JSON map.
//!
//! Input: the text, how wide the search register is, and how its bits are written. Output: [`Shots`], or messages with
//! line and column.
//!
//! - *Lines*: a bit string and, separated by spaces, how often it was measured; without a number, once. Empty lines and
//!   lines that begin with `#` are skipped.
//! - *CSV*: two cells a row, bit string and count, with or without a heading, quotes allowed.
//! - *JSON*: one object, bit strings as names, counts as values.
//!
//! The same string on several lines or rows adds up. Spaces within a string separate registers: either all together are
//! the search register, or exactly one of them has its length, or the caller says which. On plain lines, where a number
//! of zeros and ones could be a count as well, a register is left out only where the caller says which one counts.

use std::collections::BTreeMap;

use super::cells::{self, Entry, Field};
use super::fault::{Fault, Kind};
use super::{Shots, map};
use crate::diag::Diagnostic;
use crate::problem::Bits;
use crate::span::{FileId, Sources, Span};

/// Which end of a written string is bit 0.
#[derive(Clone, Copy, PartialEq, Eq, Debug, Default)]
pub enum Order {
    /// Bit 0 is the rightmost character, as OpenQASM prints a register.
    #[default]
    ZeroLast,
    /// Bit 0 is the leftmost character.
    ZeroFirst,
}

/// How a file of shots is laid out.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub enum Format {
    /// A bit string, or a bit string and a count, per line.
    Lines,
    /// Two cells per row.
    Csv,
    /// An object of counts by bit string.
    Json,
}

/// How to read a file of shots.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub struct Options {
    /// How many bits the search register has.
    pub width: usize,
    /// Which end is bit 0.
    pub order: Order,
    /// The layout; recognised by the first characters where it is not given.
    pub format: Option<Format>,
    /// Which of the registers that spaces separate holds the search, counted from 1 on the left; found by its length
    /// where it is not given.
    pub register: Option<usize>,
}

impl Options {
    /// Bit 0 last, layout and register recognised.
    pub fn new(width: usize) -> Self {
        Self { width, order: Order::default(), format: None, register: None }
    }
}

/// More shots are refused: no run has so many, and the exact test of a rate takes the root of their number in steps.
pub const MAX_SHOTS: u64 = 1_000_000_000_000;
/// After so many mistakes reading stops.
const MAX_MESSAGES: usize = 20;

/// Reads shots; the text becomes a file of `sources`, to which the messages point.
pub fn read(text: &str, name: &str, sources: &mut Sources, options: &Options) -> Result<Shots, Vec<Diagnostic>> {
    let file = sources.add(name, text);
    let mut reader = Reader { file, options, counts: BTreeMap::new(), total: 0, faults: Vec::new() };
    let entries = match options.format.unwrap_or_else(|| recognise(text)) {
        Format::Lines => cells::lines(text, options.width),
        Format::Csv => cells::csv(text),
        Format::Json => map::entries(text),
    };
    for entry in entries {
        match entry {
            Ok(entry) => reader.take(entry),
            Err((at, kind)) => reader.fault(at, kind),
        }
        if reader.faults.len() == MAX_MESSAGES {
            break;
        }
    }
    reader.finish(text)
}

fn recognise(text: &str) -> Format {
    let text = text.trim_start_matches(cells::BYTE_ORDER_MARK).trim_start();
    let first = text.lines().find(|line| !line.trim().is_empty() && !line.starts_with('#'));
    match first {
        Some(line) if line.starts_with(['{', '[']) => Format::Json,
        Some(line) if line.contains(',') => Format::Csv,
        _ => Format::Lines,
    }
}

/// A count as people and programs write it: digits only, no needless zero before them.
fn count(text: &str) -> Option<u64> {
    let plain = text.bytes().all(|byte| byte.is_ascii_digit()) && (text.len() == 1 || !text.starts_with('0'));
    text.parse().ok().filter(|_| plain)
}

struct Reader<'a> {
    file: FileId,
    options: &'a Options,
    counts: BTreeMap<Bits, u64>,
    total: u64,
    faults: Vec<Fault>,
}

impl Reader<'_> {
    fn fault(&mut self, at: std::ops::Range<usize>, kind: Kind) {
        self.faults.push(Fault { span: Span::new(self.file, at.start, at.end), kind });
    }

    fn take(&mut self, entry: Entry<'_>) {
        let count = match entry.count.map(|field| (field, count(field.text))) {
            None => 1,
            Some((_, Some(count))) => count,
            // `0101 00` on a plain line is more likely another register than a count of nothing.
            Some((field, None)) if !entry.picks && field.text.bytes().all(|byte| matches!(byte, b'0' | b'1')) => {
                let found = format!("{} {}", entry.bits.text, field.text);
                return self.fault(field.range(), Kind::CountOrRegister(found));
            }
            Some((field, None)) => return self.fault(field.range(), Kind::Count(field.text.to_owned())),
        };
        let digits = match self.digits(&entry.bits, entry.picks) {
            Ok(digits) => digits,
            Err(kind) => return self.fault(entry.bits.range(), kind),
        };
        let Some(total) = self.total.checked_add(count).filter(|&total| total <= MAX_SHOTS) else {
            return self.fault(entry.bits.range(), Kind::TooMany);
        };
        self.total = total;
        if count > 0 {
            let in_order: String = match self.options.order {
                Order::ZeroLast => digits,
                Order::ZeroFirst => digits.chars().rev().collect(),
            };
            *self.counts.entry(Bits::parse(&in_order).expect("only zeros and ones")).or_default() += count;
        }
    }

    /// The characters of the search register; registers may be left out only where `picks` says so.
    fn digits(&self, field: &Field<'_>, picks: bool) -> Result<String, Kind> {
        let found = || field.text.to_owned();
        if field.text.is_empty() || !field.text.chars().all(|c| matches!(c, '0' | '1') || c.is_whitespace()) {
            return Err(Kind::NotBits(found()));
        }
        let width = self.options.width;
        let registers: Vec<&str> = field.text.split_whitespace().collect();
        if let Some(wanted) = self.options.register {
            let register = wanted.checked_sub(1).and_then(|at| registers.get(at));
            let register = register.ok_or(Kind::NoRegister { found: registers.len(), wanted })?;
            let found = (*register).to_owned();
            return if found.len() == width { Ok(found) } else { Err(Kind::Width { found, expected: width }) };
        }
        let joined: String = registers.concat();
        if joined.len() == width {
            return Ok(joined);
        }
        let fitting: Vec<&str> = registers.iter().copied().filter(|register| register.len() == width).collect();
        match fitting[..] {
            [one] if picks => Ok(one.to_owned()),
            [_, _, ..] if picks => Err(Kind::Ambiguous { found: found(), expected: width }),
            _ => Err(Kind::Width { found: format!("{} ({} bits)", found(), joined.len()), expected: width }),
        }
    }

    fn finish(mut self, text: &str) -> Result<Shots, Vec<Diagnostic>> {
        if self.faults.is_empty() && self.total == 0 {
            self.fault(0..text.len().min(1), Kind::Empty);
        }
        if !self.faults.is_empty() {
            return Err(self.faults.into_iter().map(Fault::diagnostic).collect());
        }
        Ok(Shots { width: self.options.width, counts: self.counts.into_iter().collect(), total: self.total })
    }
}
