//! Plain lines and CSV rows, cut into fields that know where they stand.

use std::ops::Range;

use super::fault::Kind;

/// What some editors put before the first character.
pub(super) const BYTE_ORDER_MARK: char = '\u{feff}';

/// A piece of the text.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub(super) struct Field<'a> {
    pub(super) text: &'a str,
    pub(super) lo: usize,
}

impl<'a> Field<'a> {
    pub(super) fn range(&self) -> Range<usize> {
        self.lo..self.lo + self.text.len()
    }

    fn trimmed(text: &'a str, lo: usize) -> Self {
        let start = text.trim_start_matches([' ', '\t', '\r', BYTE_ORDER_MARK]);
        Self { text: start.trim_end(), lo: lo + text.len() - start.len() }
    }

    fn unquoted(self) -> Self {
        let inner = self.text.strip_prefix('"').and_then(|text| text.strip_suffix('"'));
        inner.map_or(self, |inner| Self::trimmed(inner, self.lo + 1))
    }
}

/// A bit string and its count.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub(super) struct Entry<'a> {
    pub(super) bits: Field<'a>,
    pub(super) count: Option<Field<'a>>,
    /// Whether other registers may stand beside the search register.
    pub(super) picks: bool,
}

/// Entries, or where and what is wrong.
pub(super) type Entries<'a> = Box<dyn Iterator<Item = Result<Entry<'a>, (Range<usize>, Kind)>> + 'a>;

/// The lines that say something, trimmed.
fn said(text: &str) -> impl Iterator<Item = Field<'_>> {
    let mut at = 0;
    let lines = text.split_inclusive('\n').map(move |line| {
        at += line.len();
        Field::trimmed(line, at - line.len())
    });
    lines.filter(|line| !line.text.is_empty() && !line.text.starts_with('#'))
}

/// Plain lines, for a search register of this width.
pub(super) fn lines(text: &str, width: usize) -> Entries<'_> {
    Box::new(said(text).map(move |line| Ok(line_entry(line, width))))
}

/// A line of one field is a bit string. Of several, where all together are as long as the register, they are it; else
/// the last one is the count.
fn line_entry(line: Field<'_>, width: usize) -> Entry<'_> {
    let is_bits = line.text.chars().all(|c| matches!(c, '0' | '1') || c.is_whitespace());
    let length: usize = line.text.split_whitespace().map(str::len).sum();
    let cut = line.text.rfind(char::is_whitespace).filter(|_| !(is_bits && length == width));
    match cut {
        None => Entry { bits: line, count: None, picks: false },
        Some(cut) => {
            let count = Field { text: &line.text[cut..], lo: line.lo + cut };
            let count = Field::trimmed(count.text, count.lo);
            Entry { bits: Field::trimmed(&line.text[..cut], line.lo), count: Some(count), picks: false }
        }
    }
}

/// CSV rows; a first row whose first cell is no bit string is a heading.
pub(super) fn csv(text: &str) -> Entries<'_> {
    Box::new(said(text).enumerate().filter(|(at, row)| *at > 0 || !is_heading(row.text)).map(|(_, row)| row_entry(row)))
}

fn is_heading(row: &str) -> bool {
    row.trim_start_matches('"').starts_with(char::is_alphabetic)
}

fn row_entry(row: Field<'_>) -> Result<Entry<'_>, (Range<usize>, Kind)> {
    let mut at = row.lo;
    let cells: Vec<Field<'_>> = row
        .text
        .split(',')
        .map(|cell| {
            at += cell.len() + 1;
            Field::trimmed(cell, at - cell.len() - 1).unquoted()
        })
        .collect();
    match cells[..] {
        [bits, count] => Ok(Entry { bits, count: Some(count), picks: true }),
        _ => Err((row.range(), Kind::Cells(cells.len()))),
    }
}
