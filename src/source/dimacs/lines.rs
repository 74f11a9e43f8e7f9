//! Lines that are read as lines: the header, comments, and show lines among them.

use std::io::Read;

use super::blocks::Word;
use super::mistake::{Complaint, Mistake};
use super::{Header, MAX_CLAUSES, MAX_VARS, Part, Reader, Stop, numbers, quote};

/// The end of a show line or an element of it.
enum ShowItem {
    Var(u64),
    Close,
}

impl<R: Read> Reader<R> {
    /// `p cnf VARIABLES CLAUSES`, from its first byte to the end of the line.
    pub(super) fn header(&mut self, start: usize) -> Result<(), Stop> {
        self.blocks.pos = start + 1;
        let mut place = self.blocks.place(start, start + 1);
        // The header is all there is in its line.
        place.range.end = place.text.trim_ascii_end().len();
        self.format()?;
        let vars = self.header_number("number of variables", "variables", MAX_VARS)?;
        let clauses = self.header_number("number of clauses", "clauses", MAX_CLAUSES)?;
        match self.blocks.word()? {
            Word::Text(start, end) => return Err(self.refuse(start, end, Mistake::HeaderLong)),
            Word::Giant => return Err(self.giant()),
            Word::LineEnd => {}
        }
        self.check_early(vars, &place)?;
        self.clauses = crate::problem::Clauses::with_capacity(
            clauses.min(super::RESERVE) as usize,
            4 * clauses.min(super::RESERVE) as usize,
        );
        self.header = Some(Header { vars, clauses, place });
        self.part = Part::Clauses;
        Ok(())
    }

    fn format(&mut self) -> Result<(), Stop> {
        match self.blocks.word()? {
            Word::Text(start, end) if &self.blocks.bytes()[start..end] == b"cnf" => Ok(()),
            Word::Text(start, end) => Err(self.refuse(start, end, Mistake::Format)),
            Word::LineEnd => Err(self.line_ends(Mistake::HeaderEnds("format"))),
            Word::Giant => Err(self.giant()),
        }
    }

    fn header_number(&mut self, what: &'static str, many: &'static str, limit: u64) -> Result<u64, Stop> {
        let (start, end) = match self.blocks.word()? {
            Word::Text(start, end) => (start, end),
            Word::LineEnd => return Err(self.line_ends(Mistake::HeaderEnds(what))),
            Word::Giant => return Err(self.giant()),
        };
        let word = &self.blocks.bytes()[start..end];
        match numbers::parse(word) {
            Some(_) if word[0] == b'-' => Err(self.refuse(start, end, |text| Mistake::HeaderNegative(what, text))),
            Some(number) if number.unsigned_abs() <= limit => Ok(number.unsigned_abs()),
            Some(_) => Err(self.refuse(start, end, |found| Mistake::Limit { what: many, limit, found })),
            None => Err(self.refuse(start, end, |text| Mistake::HeaderWord(what, text))),
        }
    }

    /// The show lines before the header name variables that it declares.
    fn check_early(&mut self, vars: u64, header: &super::Place) -> Result<(), Stop> {
        match self.shown_early.take() {
            Some((var, place)) if var > vars => {
                let mistake = Mistake::ShowOutOfRange { var: var.to_string(), vars: vars as usize };
                Err(Complaint::at(mistake, place).against(Some(header)).into())
            }
            _ => Ok(()),
        }
    }

    /// A line whose first word begins with `c`.
    pub(super) fn comment(&mut self, start: usize) -> Result<(), Stop> {
        self.blocks.pos = start;
        if self.next_is(b"c")? {
            let Word::Text(from, to) = self.blocks.word()? else { return Ok(self.blocks.skip_line()?) };
            let second = &self.blocks.bytes()[from..to];
            if second == b"ind" {
                self.warn_other_show(from, to);
            } else if second == b"p" && self.next_is(b"show")? {
                return self.show_line();
            }
        }
        Ok(self.blocks.skip_line()?)
    }

    /// Some solvers read `c ind` lines as show lines; once a file is enough.
    fn warn_other_show(&mut self, start: usize, end: usize) {
        if !self.warnings.iter().any(|warning| warning.mistake == Mistake::OtherShow) {
            let place = self.blocks.place(start, end);
            self.warnings.push(*Complaint::at(Mistake::OtherShow, place));
        }
    }

    /// Takes the next word of the line and says whether it is this one.
    fn next_is(&mut self, expected: &[u8]) -> Result<bool, Stop> {
        let word = self.blocks.word()?;
        Ok(matches!(word, Word::Text(start, end) if &self.blocks.bytes()[start..end] == expected))
    }

    /// What follows `c p show`: variables and a 0, in this line.
    fn show_line(&mut self) -> Result<(), Stop> {
        self.shown.get_or_insert_default();
        while let ShowItem::Var(var) = self.show_item()? {
            self.shown.get_or_insert_default().push(var as u32);
        }
        match self.blocks.word()? {
            Word::LineEnd => Ok(()),
            Word::Text(start, end) => Err(self.refuse(start, end, Mistake::ShowLong)),
            Word::Giant => Err(self.giant()),
        }
    }

    fn show_item(&mut self) -> Result<ShowItem, Stop> {
        let (start, end) = match self.blocks.word()? {
            Word::Text(start, end) => (start, end),
            Word::LineEnd => return Err(self.line_ends(Mistake::ShowUnclosed)),
            Word::Giant => return Err(self.giant()),
        };
        let word = &self.blocks.bytes()[start..end];
        let var = match numbers::parse(word) {
            Some(number) if word[0] != b'-' => number.unsigned_abs(),
            _ => return Err(self.refuse(start, end, Mistake::NotVariable)),
        };
        let limit = self.header.as_ref().map_or(MAX_VARS, |header| header.vars);
        if var > limit {
            return Err(self.show_out_of_range(start, end, limit));
        }
        if self.header.is_none() && self.shown_early.as_ref().is_none_or(|(largest, _)| var > *largest) {
            self.shown_early = Some((var, self.blocks.place(start, end)));
        }
        Ok(if var == 0 { ShowItem::Close } else { ShowItem::Var(var) })
    }

    fn show_out_of_range(&mut self, start: usize, end: usize, limit: u64) -> Stop {
        let var = quote(&self.blocks.bytes()[start..end]);
        let place = self.blocks.place(start, end);
        match &self.header {
            Some(header) => {
                let mistake = Mistake::ShowOutOfRange { var, vars: limit as usize };
                Complaint::at(mistake, place).against(Some(&header.place)).into()
            }
            None => Complaint::at(Mistake::Limit { what: "variables", limit, found: var }, place).into(),
        }
    }

    /// A mistake at the end of the line.
    fn line_ends(&mut self, mistake: Mistake) -> Stop {
        let at = self.blocks.pos;
        let place = self.blocks.place(at, at);
        Complaint::at(mistake, place).into()
    }
}
