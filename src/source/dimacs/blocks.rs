//! The input in blocks: a window of bytes that moves over the file, and places in it for messages.
//!
//! Input: any reader. Output: a buffer in which every blank-ended word that begins before [`Blocks::limit`] is whole,
//! followed by [`PAD`] line ends, so that a scanner may load eight bytes at once and needs no test for the end.
//!
//! Lines are not counted while scanning: the part of the file that left the window is summed up in an [`Anchor`], and
//! the rest is counted when a message needs it. What a message shows depends on the bytes of the file only, not on how
//! the reader hands them out: the window is always filled to the brim, and keeps [`CONTEXT`] bytes to the left.

use std::io::{self, ErrorKind, Read};

use crate::span::Position;

/// Bytes in a block: large enough to make calls cheap, small enough to stay in the second-level cache.
pub(super) const BLOCK: usize = 256 << 10;
/// Bytes of a line that a message shows at most on each side of a place.
const CONTEXT: usize = 120;
/// Line ends after the last byte of the window.
const PAD: usize = 16;

/// What is known at the first byte of the window.
#[derive(Clone, Copy)]
struct Anchor {
    /// Its position.
    at: Position,
    /// Whether its line holds only blanks before it.
    blank: bool,
}

/// The window.
pub(super) struct Blocks<R> {
    input: R,
    buffer: Vec<u8>,
    len: usize,
    /// The next byte to scan.
    pub(super) pos: usize,
    /// Words that begin before this place are whole.
    pub(super) limit: usize,
    /// Whether the window reaches the end of the file.
    pub(super) end: bool,
    anchor: Anchor,
}

/// What stands next in a line.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub(super) enum Word {
    /// A word: the places of its first byte and of the byte after its last.
    Text(usize, usize),
    /// Nothing more in this line.
    LineEnd,
    /// A word that does not fit in a block.
    Giant,
}

/// A place in the file, with the text that a message shows around it.
#[derive(Clone, PartialEq, Eq, Debug)]
pub(super) struct Place {
    /// The text: the line, or the part of it near the place.
    pub(super) text: String,
    /// The position of the first character of the text.
    pub(super) first: Position,
    /// The bytes of the text that are meant.
    pub(super) range: std::ops::Range<usize>,
}

/// Whether the byte separates words.
pub(super) fn is_blank(byte: u8) -> bool {
    matches!(byte, b' ' | b'\n' | b'\t' | b'\r' | 0x0b | 0x0c)
}

impl<R: Read> Blocks<R> {
    /// The window at the start of the file.
    pub(super) fn new(input: R) -> io::Result<Self> {
        let anchor = Anchor { at: Position { line: 1, column: 1 }, blank: true };
        let buffer = vec![b'\n'; CONTEXT + BLOCK + PAD];
        let mut blocks = Self { input, buffer, len: 0, pos: 0, limit: 0, end: false, anchor };
        blocks.fill()?;
        if blocks.bytes().starts_with(b"\xef\xbb\xbf") {
            // A byte order mark is no text; columns count from after it.
            blocks.buffer.copy_within(3..blocks.len + PAD, 0);
            blocks.len -= 3;
            blocks.limit = blocks.limit.saturating_sub(3);
        }
        Ok(blocks)
    }

    /// The window without the padding.
    pub(super) fn bytes(&self) -> &[u8] {
        &self.buffer[..self.len]
    }

    /// The window with the padding.
    pub(super) fn padded(&self) -> &[u8] {
        &self.buffer[..self.len + PAD]
    }

    /// Whether everything was scanned.
    pub(super) fn is_done(&self) -> bool {
        self.end && self.pos >= self.len
    }

    /// Moves the window on, so that it begins a little before [`Blocks::pos`], and fills it.
    pub(super) fn fill(&mut self) -> io::Result<()> {
        let from = self.pos.saturating_sub(CONTEXT);
        self.anchor = self.anchor.after(&self.buffer[..from]);
        self.buffer.copy_within(from..self.len, 0);
        self.len -= from;
        self.pos -= from;
        let room = self.buffer.len() - PAD;
        while !self.end && self.len < room {
            match self.input.read(&mut self.buffer[self.len..room]) {
                Ok(0) => self.end = true,
                Ok(read) => self.len += read,
                Err(fault) if fault.kind() == ErrorKind::Interrupted => {}
                Err(fault) => return Err(fault),
            }
        }
        self.buffer[self.len..self.len + PAD].fill(b'\n');
        self.limit = if self.end {
            self.len
        } else {
            let last = self.buffer[self.pos..self.len].iter().rposition(|&byte| is_blank(byte));
            last.map_or(self.pos, |at| self.pos + at + 1)
        };
        Ok(())
    }

    /// Fills the window once [`Blocks::limit`] is reached. False where the next word does not fit in a block.
    pub(super) fn refill(&mut self) -> io::Result<bool> {
        if self.pos >= self.limit && !self.end {
            self.fill()?;
        }
        Ok(self.pos < self.limit || self.end)
    }

    /// Whether only blanks stand before this place in its line.
    pub(super) fn begins_line(&self, at: usize) -> bool {
        let before = &self.buffer[..at];
        match before.iter().rposition(|&byte| byte == b'\n' || !is_blank(byte)) {
            Some(last) => before[last] == b'\n',
            None => self.anchor.blank,
        }
    }

    /// The place after the word that begins here.
    pub(super) fn word_end(&self, start: usize) -> usize {
        let length = self.padded()[start..].iter().position(|&byte| is_blank(byte));
        start + length.expect("the padding is blank")
    }

    /// Takes the next word of this line. Its places hold until the next call that moves the window.
    pub(super) fn word(&mut self) -> io::Result<Word> {
        loop {
            if !self.refill()? {
                return Ok(Word::Giant);
            }
            if self.is_done() {
                return Ok(Word::LineEnd);
            }
            match self.buffer[self.pos] {
                b'\n' => return Ok(Word::LineEnd),
                byte if is_blank(byte) => self.pos += 1,
                _ => {
                    let start = self.pos;
                    self.pos = self.word_end(start).min(self.len);
                    return Ok(Word::Text(start, self.pos));
                }
            }
        }
    }

    /// Skips the rest of this line, however long it is.
    pub(super) fn skip_line(&mut self) -> io::Result<()> {
        loop {
            if let Some(at) = self.buffer[self.pos..self.len].iter().position(|&byte| byte == b'\n') {
                self.pos += at + 1;
                return Ok(());
            }
            self.pos = self.len;
            if self.end {
                return Ok(());
            }
            self.fill()?;
        }
    }

    /// The place of these bytes of the window, which lie at or before `pos`, with its line. May move the window.
    pub(super) fn place(&mut self, start: usize, end: usize) -> Place {
        let (size, ahead) = (end - start, self.pos - start);
        self.pos = start;
        if self.len < end + CONTEXT {
            // A reader that fails now only makes the excerpt shorter: there is a message to give already.
            let _ = self.fill();
        }
        let (start, end) = (self.pos, (self.pos + size).min(self.len));
        self.pos = start + ahead;
        let line_start = self.buffer[..start].iter().rposition(|&byte| byte == b'\n').map_or(0, |at| at + 1);
        let from = (line_start.max(start.saturating_sub(CONTEXT))..start)
            .find(|&at| !is_continuation(self.buffer[at]))
            .unwrap_or(start);
        let left = printable(&self.buffer[from..start]);
        let shown_end = end.min(start + CONTEXT);
        let mut text = left.clone() + &printable(&self.buffer[start..shown_end]);
        let range = left.len()..text.len();
        let right = &self.buffer[shown_end..self.len.min(shown_end + CONTEXT)];
        let right = right.split(|&byte| byte == b'\n').next().unwrap_or_default();
        text += printable(right).trim_end_matches(['\r', '\u{fffd}']);
        Place { text, first: self.anchor.after(&self.buffer[..from]).at, range }
    }

    /// The place of the last word of the file.
    pub(super) fn last_place(&mut self) -> Place {
        let last = self.bytes().iter().rposition(|&byte| !is_blank(byte)).map_or(0, |at| at + 1);
        let start = self.buffer[..last].iter().rposition(|&byte| is_blank(byte)).map_or(0, |at| at + 1);
        self.place(start, last)
    }
}

impl Anchor {
    /// The anchor after these bytes.
    fn after(self, bytes: &[u8]) -> Self {
        let lines = bytes.iter().filter(|&&byte| byte == b'\n').count();
        let line_start = bytes.iter().rposition(|&byte| byte == b'\n').map(|at| at + 1);
        let rest = &bytes[line_start.unwrap_or(0)..];
        let (column, blank) = line_start.map_or((self.at.column, self.blank), |_| (1, true));
        Self {
            at: Position {
                line: self.at.line + lines,
                column: column + rest.iter().filter(|&&byte| !is_continuation(byte)).count(),
            },
            blank: blank && rest.iter().all(|&byte| is_blank(byte)),
        }
    }
}

/// Whether the byte is not the first of a character.
fn is_continuation(byte: u8) -> bool {
    byte & 0xc0 == 0x80
}

/// The bytes as text that is safe to print: what is not UTF-8 and control characters become replacement characters.
pub(super) fn printable(bytes: &[u8]) -> String {
    let replaced = |c: char| if c.is_control() && c != '\t' && c != '\r' { char::REPLACEMENT_CHARACTER } else { c };
    String::from_utf8_lossy(bytes).chars().map(replaced).collect()
}
