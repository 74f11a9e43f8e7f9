//! Places in source files, from the first token to the last error message.
//!
//! A [`Span`] is three words and is copied freely; line and column are computed only when something is printed.

use std::sync::Arc;

use crate::define_id;
use crate::id::IdVec;

define_id! {
    /// A file that was read.
    FileId, "file"
}

/// A half-open range of bytes in a file.
#[derive(Clone, Copy, PartialEq, Eq, PartialOrd, Ord, Hash, Debug)]
pub struct Span {
    /// The file.
    pub file: FileId,
    /// The first byte.
    pub lo: u32,
    /// The byte after the last.
    pub hi: u32,
}

impl Span {
    /// The span of these bytes.
    pub fn new(file: FileId, lo: usize, hi: usize) -> Self {
        Self { file, lo: lo as u32, hi: hi as u32 }
    }

    /// The smallest span that covers both; `other` must lie in the same file.
    pub fn to(self, other: Span) -> Span {
        Span { file: self.file, lo: self.lo.min(other.lo), hi: self.hi.max(other.hi) }
    }
}

/// A line and a column, both counted from 1; columns count characters.
#[derive(Clone, Copy, PartialEq, Eq, PartialOrd, Ord, Hash, Debug)]
pub struct Position {
    /// The line, from 1.
    pub line: usize,
    /// The column, from 1, in characters.
    pub column: usize,
}

/// The text of a file, or the part of it that an error needs to show.
#[derive(Clone, Debug)]
pub struct SourceFile {
    /// The name as the user gave it.
    pub name: Arc<str>,
    /// The text that spans index into.
    pub text: Arc<str>,
    /// The number of the first line of `text` in the file, from 1.
    pub first_line: usize,
    /// The column of the first character of `text`, from 1: an excerpt of a very long line begins inside it.
    pub first_column: usize,
}

/// Every file of a run.
#[derive(Clone, Default, Debug)]
pub struct Sources {
    files: IdVec<FileId, SourceFile>,
}

impl Sources {
    /// No file yet.
    pub fn new() -> Self {
        Self::default()
    }

    /// Adds a whole file.
    pub fn add(&mut self, name: &str, text: impl Into<Arc<str>>) -> FileId {
        self.add_excerpt(name, text, 1)
    }

    /// Adds an excerpt whose first line is line `first_line` of the file. Readers of large files keep only the lines
    /// that an error shows.
    pub fn add_excerpt(&mut self, name: &str, text: impl Into<Arc<str>>, first_line: usize) -> FileId {
        self.add_excerpt_at(name, text, Position { line: first_line, column: 1 })
    }

    /// Adds an excerpt that begins at this position of the file.
    pub fn add_excerpt_at(&mut self, name: &str, text: impl Into<Arc<str>>, first: Position) -> FileId {
        let (first_line, first_column) = (first.line, first.column);
        self.files.push(SourceFile { name: name.into(), text: text.into(), first_line, first_column })
    }

    /// The name of the file that was read first.
    pub fn first_name(&self) -> Option<&str> {
        self.files.iter().next().map(|(_, file)| &*file.name)
    }

    /// The file.
    pub fn file(&self, id: FileId) -> &SourceFile {
        &self.files[id]
    }

    /// Where a span begins.
    pub fn position(&self, span: Span) -> Position {
        let file = &self.files[span.file];
        let mut lo = (span.lo as usize).min(file.text.len());
        while !file.text.is_char_boundary(lo) {
            lo -= 1;
        }
        let before = &file.text[..lo];
        let line_start = before.rfind('\n').map_or(0, |at| at + 1);
        let start_column = if line_start == 0 { file.first_column } else { 1 };
        Position {
            line: file.first_line + before.matches('\n').count(),
            column: start_column + before[line_start..].chars().count(),
        }
    }

    /// The text under a span.
    pub fn text(&self, span: Span) -> &str {
        self.files[span.file].text.get(span.lo as usize..span.hi as usize).unwrap_or("")
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn positions_count_lines_and_characters_from_one() {
        let mut sources = Sources::new();
        let file = sources.add_excerpt("a.tally", "é = 1\nxy", 7);
        assert_eq!(sources.position(Span::new(file, 3, 4)), Position { line: 7, column: 3 });
        assert_eq!(sources.position(Span::new(file, 8, 9)), Position { line: 8, column: 2 });
    }
}
