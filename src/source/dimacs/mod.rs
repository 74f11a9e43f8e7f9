//! The DIMACS CNF reader.
//!
//! Input:  bytes, as a stream. Output: a [`Problem`] of clauses, or a message with the place.
//! Holds:  the invariants of [`check`](crate::problem::check); clauses are kept as they were read.
//!
//! A file is `p cnf VARIABLES CLAUSES`, then numbers; a 0 closes a clause. Comments are lines whose first word begins
//! with `c`, anywhere, inside a clause too. `c p show ... 0` lines together name the variables that are counted over
//! (the format of the Model Counting Competition); other `c p` and `c t` lines are comments. A line that begins with
//! `%` ends the formula, as in old benchmark files; one 0 may follow.
//!
//! House rules, where careful readers differ: what could hide a damaged file is refused (a missing last 0, a clause
//! before the header, a second header, an extra number in it, text after `%`, `+3`, `-0`); what cannot is read with a
//! warning (a wrong number of clauses). A line end is `\n`; `\r` is a blank.
//!
//! `blocks` hands out the file in blocks, `numbers` is the hot loop, `lines` reads headers and comments, and
//! `mistake` holds the messages. Nothing is allocated for what a header announces before the file was read, beyond
//! `RESERVE`.

mod blocks;
mod lines;
mod mistake;
mod numbers;
mod write;

use std::io::{self, Read};

use blocks::{Blocks, Place, printable};
use mistake::{Complaint, Mistake};
pub use write::write;

use crate::diag::Diagnostic;
use crate::id::Id;
use crate::problem::{BitId, BitLit, Clauses, Problem};
use crate::source::open;
use crate::span::Sources;

/// Variables a file may declare: a variable costs some 80 bytes, used or not.
pub const MAX_VARS: u64 = 1 << 24;
/// Clauses a file may have.
pub const MAX_CLAUSES: u64 = 1 << 30;
/// Literals a file may have: the pool of [`Clauses`] counts them in 32 bits.
pub const MAX_LITERALS: u64 = 1 << 31;
/// Clauses for which memory is reserved on the word of the header.
const RESERVE: u64 = 1 << 20;
/// Characters of a word that a message quotes.
const QUOTED: usize = 40;

/// Reads a DIMACS CNF file. Only the lines that a message shows go into `sources`.
pub fn read(
    input: impl Read,
    name: &str,
    sources: &mut Sources,
) -> Result<(Problem, Vec<Diagnostic>), Vec<Diagnostic>> {
    let stop = match Reader::new(input) {
        Ok(mut reader) => match reader.run() {
            Ok(()) => return reader.finish(name, sources).map_err(|stop| vec![stop.into_diagnostic(name, sources)]),
            Err(stop) => stop,
        },
        Err(fault) => fault.into(),
    };
    Err(vec![stop.into_diagnostic(name, sources)])
}

/// Why reading ended early.
enum Stop {
    Input(io::Error),
    Refused(Box<Complaint>),
}

impl From<io::Error> for Stop {
    fn from(fault: io::Error) -> Self {
        Stop::Input(fault)
    }
}

impl From<Box<Complaint>> for Stop {
    fn from(complaint: Box<Complaint>) -> Self {
        Stop::Refused(complaint)
    }
}

impl Stop {
    fn into_diagnostic(self, name: &str, sources: &mut Sources) -> Diagnostic {
        match self {
            Stop::Input(fault) => open::read_fault(name, &fault),
            Stop::Refused(complaint) => complaint.into_diagnostic(name, sources),
        }
    }
}

/// What the header said.
struct Header {
    vars: u64,
    clauses: u64,
    place: Place,
}

/// Where in the file the reader is.
#[derive(Clone, Copy, PartialEq, Eq)]
enum Part {
    /// No header yet.
    Before,
    /// In the clauses.
    Clauses,
    /// After `%`; whether the 0 after it was met.
    After { zero: bool },
}

struct Reader<R> {
    blocks: Blocks<R>,
    part: Part,
    header: Option<Header>,
    clauses: Clauses,
    /// The variables of the show lines, as read; `None` without such a line.
    shown: Option<Vec<u32>>,
    /// The largest variable of the show lines before the header, with its place.
    shown_early: Option<(u64, Place)>,
    warnings: Vec<Complaint>,
}

impl<R: Read> Reader<R> {
    fn new(input: R) -> io::Result<Self> {
        let blocks = Blocks::new(input)?;
        Ok(Self {
            blocks,
            part: Part::Before,
            header: None,
            clauses: Clauses::new(),
            shown: None,
            shown_early: None,
            warnings: Vec::new(),
        })
    }

    /// Reads to the end of the file.
    fn run(&mut self) -> Result<(), Stop> {
        loop {
            if self.part == Part::Clauses {
                self.take_numbers()?;
            }
            if !self.blocks.refill()? {
                return Err(self.giant());
            }
            if self.blocks.is_done() {
                return Ok(());
            }
            let at = self.blocks.pos;
            match self.blocks.bytes()[at] {
                byte if blocks::is_blank(byte) => self.blocks.pos += 1,
                _ => self.word(at)?,
            }
        }
    }

    /// Takes numbers up to something else or to the end of the window.
    fn take_numbers(&mut self) -> Result<(), Stop> {
        let vars = self.header.as_ref().map_or(0, |header| header.vars);
        let Blocks { pos, limit, .. } = self.blocks;
        self.blocks.pos = numbers::take(self.blocks.padded(), pos, limit, vars, &mut self.clauses);
        self.check_size()
    }

    /// The limits, checked once a block.
    fn check_size(&mut self) -> Result<(), Stop> {
        let sizes = [
            ("clauses", self.clauses.len() as u64, MAX_CLAUSES),
            ("literals", self.clauses.lit_count() as u64, MAX_LITERALS),
        ];
        match sizes.into_iter().find(|&(_, size, limit)| size > limit) {
            None => Ok(()),
            Some((what, size, limit)) => {
                let found = format!("{size} so far");
                let place = self.blocks.place(self.blocks.pos, self.blocks.pos);
                Err(Complaint::at(Mistake::Limit { what, limit, found }, place).into())
            }
        }
    }

    /// A word that the hot loop left: a comment, a header, an end marker, a large number, a mistake.
    fn word(&mut self, start: usize) -> Result<(), Stop> {
        let end = self.blocks.word_end(start);
        let word = &self.blocks.bytes()[start..end];
        let begins_line = self.blocks.begins_line(start);
        match word[0] {
            b'c' if begins_line => return self.comment(start),
            b'c' if word.len() == 1 && self.part != Part::Before => {
                return Err(self.refuse(start, end, Mistake::InnerComment));
            }
            _ => {}
        }
        match self.part {
            Part::After { zero: false } if word == b"0" => {
                self.part = Part::After { zero: true };
                self.blocks.pos = end;
                Ok(())
            }
            Part::After { .. } => Err(self.refuse(start, end, Mistake::AfterEnd)),
            Part::Before if word == b"p" && begins_line => self.header(start),
            Part::Before if numbers::parse(word).is_some() => Err(self.refuse(start, end, Mistake::ClauseBeforeHeader)),
            Part::Before => Err(self.refuse(start, end, Mistake::NotHeader)),
            Part::Clauses if word == b"p" && begins_line => {
                let place = self.blocks.place(start, end);
                let first = self.header.as_ref().map(|header| &header.place);
                Err(Complaint::at(Mistake::SecondHeader, place).against(first).into())
            }
            Part::Clauses if word == b"%" && begins_line => {
                if self.is_open() {
                    return Err(self.refuse(start, end, |_| Mistake::Unclosed));
                }
                self.part = Part::After { zero: false };
                self.blocks.pos = end;
                Ok(())
            }
            Part::Clauses => self.number(start, end, begins_line),
        }
    }

    /// A number that the hot loop did not take, or what stands in the place of one.
    fn number(&mut self, start: usize, end: usize, begins_line: bool) -> Result<(), Stop> {
        let word = &self.blocks.bytes()[start..end];
        let vars = self.header.as_ref().map_or(0, |header| header.vars);
        match numbers::parse(word) {
            Some(0) if word[0] != b'-' => self.clauses.end_clause(),
            Some(number) if number != 0 && number.unsigned_abs() <= vars => {
                self.clauses.push_lit(BitLit::from_dimacs(number).expect("at most MAX_VARS"));
            }
            Some(number) if number != 0 => {
                let literal = quote(word);
                let place = self.blocks.place(start, end);
                let header = self.header.as_ref().map(|header| &header.place);
                let mistake = Mistake::OutOfRange { literal, vars: vars as usize };
                return Err(Complaint::at(mistake, place).against(header).into());
            }
            _ if begins_line && is_xor(word) => return Err(self.refuse(start, end, Mistake::Xor)),
            _ => return Err(self.refuse(start, end, Mistake::NotLiteral)),
        }
        self.blocks.pos = end;
        Ok(())
    }

    /// Whether the last clause has no closing 0 yet.
    fn is_open(&self) -> bool {
        let closed: usize = self.clauses.iter().map(<[BitLit]>::len).sum();
        closed < self.clauses.lit_count()
    }

    /// A mistake that quotes the word at this place.
    fn refuse(&mut self, start: usize, end: usize, mistake: impl FnOnce(String) -> Mistake) -> Stop {
        let mistake = mistake(quote(&self.blocks.bytes()[start..end]));
        let place = self.blocks.place(start, end);
        Complaint::at(mistake, place).into()
    }

    /// A word that does not fit in a block.
    fn giant(&mut self) -> Stop {
        let start = self.blocks.pos;
        let end = self.blocks.bytes().len();
        self.refuse(start, end, Mistake::NotLiteral)
    }

    /// The problem, once the whole file was read.
    fn finish(mut self, name: &str, sources: &mut Sources) -> Result<(Problem, Vec<Diagnostic>), Stop> {
        if self.is_open() {
            let place = self.blocks.last_place();
            return Err(Complaint::at(Mistake::Unclosed, place).into());
        }
        let Some(header) = self.header else {
            return Err(Box::new(Complaint { mistake: Mistake::NoHeader, place: None, other: None }).into());
        };
        let (announced, found) = (header.clauses as usize, self.clauses.len());
        if announced != found {
            let mistake = Mistake::ClauseCount { announced, found };
            self.warnings.push(*Complaint::at(mistake, header.place));
        }
        let mut problem = Problem::new();
        problem.add_numbered_vars(header.vars as usize);
        problem.clauses = self.clauses;
        problem.shown = self.shown.map(|mut vars| {
            vars.sort_unstable();
            vars.dedup();
            vars.into_iter().map(|var| BitId::new(var as usize - 1)).collect()
        });
        let warnings = self.warnings.into_iter().map(|warning| warning.into_diagnostic(name, sources)).collect();
        Ok((problem, warnings))
    }
}

/// Whether the word begins an XOR line: `x1`, `x-1`.
fn is_xor(word: &[u8]) -> bool {
    word[0].eq_ignore_ascii_case(&b'x') && (word.len() == 1 || numbers::parse(&word[1..]).is_some())
}

/// The word as a message quotes it.
fn quote(word: &[u8]) -> String {
    let text = printable(&word[..word.len().min(4 * QUOTED)]);
    let mut short: String = text.chars().take(QUOTED).collect();
    if short.len() < text.len() {
        short.push('…');
    }
    short
}
