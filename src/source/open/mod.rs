//! Opening: from a name on the command line to a problem.
//!
//! The packing is told by the suffix (`.gz`, `.xz`, `.zst`) and checked against the first bytes, the format by the
//! suffix before it (`.cnf`, `.dimacs`, `.opb`, `.aag`, `.aig`, `.tally`); standard input and other suffixes are told by their first line. The
//! bytes as stored are hashed while they stream by.

mod fault;
mod unpack;

use std::fs::File;
use std::io::{self, Cursor, Read};

pub(crate) use fault::read_fault;
use fault::{Failure, Opening};
use sha2::{Digest, Sha256};
use unpack::Packing;

use crate::diag::Diagnostic;
use crate::problem::Problem;
use crate::source::{aiger, dimacs, opb, tally};
use crate::span::Sources;

/// Bytes of text a tally file may have once unpacked: it is read as a whole. No person writes a longer one.
pub const MAX_TALLY_BYTES: u64 = 16 << 20;
/// Bytes an OPB or AIGER file may have once unpacked: it is read as a whole.
pub const MAX_WHOLE_BYTES: u64 = 256 << 20;
/// Bytes that are looked at to tell the format.
const SNIFFED: usize = 4096;
/// The name of standard input in messages.
const STDIN: &str = "<stdin>";

/// The formats.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub enum Format {
    /// The tally language.
    Tally,
    /// DIMACS CNF.
    Dimacs,
    /// OPB: pseudo-Boolean constraints.
    Opb,
    /// AIGER: an and-inverter graph.
    Aiger,
}

impl Format {
    /// The name in reports.
    pub fn name(self) -> &'static str {
        match self {
            Format::Tally => "tally",
            Format::Dimacs => "dimacs",
            Format::Opb => "opb",
            Format::Aiger => "aiger",
        }
    }

    /// The format that a file name tells by its suffix, packed or not.
    pub fn of_name(name: &str) -> Option<Self> {
        format_of_name(Packing::of_name(name).1)
    }
}

/// A problem that was read.
#[derive(Clone, Debug)]
pub struct Loaded {
    /// The problem.
    pub problem: Problem,
    /// What it was written in.
    pub format: Format,
    /// The name of the file as it was given, `<stdin>` for standard input.
    pub file: String,
    /// The SHA-256 digest of the bytes as stored, in hexadecimal.
    pub sha256: String,
    /// What the reader warned about.
    pub warnings: Vec<Diagnostic>,
}

/// Reads the file of this name, or standard input for `-`. `sets` are new values for constants of a tally file.
pub fn load(path: &str, sets: &[(String, String)], sources: &mut Sources) -> Result<Loaded, Vec<Diagnostic>> {
    if path == "-" {
        return load_from(io::stdin().lock(), STDIN, sets, sources);
    }
    match File::open(path).and_then(|file| if file.metadata()?.is_dir() { Err(is_a_folder()) } else { Ok(file) }) {
        Ok(file) => load_from(file, path, sets, sources),
        Err(fault) => Err(vec![Opening::new(path, Failure::CannotOpen(fault.to_string())).into_diagnostic()]),
    }
}

fn is_a_folder() -> io::Error {
    io::Error::new(io::ErrorKind::IsADirectory, "it is a folder")
}

/// Reads a stream as if it were the file of this name.
pub fn load_from(
    input: impl Read,
    name: &str,
    sets: &[(String, String)],
    sources: &mut Sources,
) -> Result<Loaded, Vec<Diagnostic>> {
    let refuse = |failure| vec![Opening::new(name, failure).into_diagnostic()];
    let fault = |fault: io::Error| vec![read_fault(name, &fault)];
    let mut stored = Hashed { input, hash: Sha256::new() };
    let (packing, plain_name) = Packing::of_name(name);
    let head = take_head(&mut stored, unpack::MAGIC_LENGTH).map_err(fault)?;
    match (packing, Packing::of_bytes(&head)) {
        (named, found) if named == found => {}
        (None, Some(found)) => return Err(refuse(Failure::Packed(found))),
        (Some(named), _) if head.is_empty() => return Err(refuse(Failure::Cut(named))),
        (Some(named), found) => return Err(refuse(Failure::NotPacked(named, found))),
        (None, None) => {}
    }
    let stream = Cursor::new(head).chain(&mut stored);
    let mut text = unpack::unpack(stream, packing).map_err(fault)?;
    let start = take_head(&mut text, SNIFFED).map_err(fault)?;
    let format = match format_of_name(plain_name).or_else(|| sniff(&start)) {
        Some(format) => format,
        None => return Err(refuse(Failure::Empty)),
    };
    let text = Cursor::new(start).chain(text);
    let (problem, warnings) = match format {
        Format::Dimacs | Format::Opb | Format::Aiger if !sets.is_empty() => {
            return Err(refuse(Failure::NoConstants(format)));
        }
        Format::Dimacs => dimacs::read(text, name, sources)?,
        Format::Opb => opb::read(&whole_text(text, name, MAX_WHOLE_BYTES)?, name, sources)?,
        Format::Aiger => aiger::read(&whole(text, name, MAX_WHOLE_BYTES)?, name, sources)?,
        Format::Tally => read_tally(text, name, sets, sources)?,
    };
    let sha256 = stored.finish().map_err(fault)?;
    Ok(Loaded { problem, format, file: name.to_owned(), sha256, warnings })
}

fn read_tally(
    text: impl Read,
    name: &str,
    sets: &[(String, String)],
    sources: &mut Sources,
) -> Result<(Problem, Vec<Diagnostic>), Vec<Diagnostic>> {
    tally::read(&whole_text(text, name, MAX_TALLY_BYTES)?, name, sets, sources)
}

/// All bytes of a stream that has at most so many.
fn whole(text: impl Read, name: &str, limit: u64) -> Result<Vec<u8>, Vec<Diagnostic>> {
    let mut bytes = Vec::new();
    text.take(limit + 1).read_to_end(&mut bytes).map_err(|fault| vec![read_fault(name, &fault)])?;
    if bytes.len() as u64 > limit {
        return Err(vec![Opening::new(name, Failure::TooLong(limit)).into_diagnostic()]);
    }
    Ok(bytes)
}

/// The same as text.
fn whole_text(text: impl Read, name: &str, limit: u64) -> Result<String, Vec<Diagnostic>> {
    String::from_utf8(whole(text, name, limit)?).map_err(|fault| {
        let good = &fault.as_bytes()[..fault.utf8_error().valid_up_to()];
        let line = good.iter().filter(|&&byte| byte == b'\n').count() + 1;
        vec![Opening::new(name, Failure::NotText { line }).into_diagnostic()]
    })
}

/// The format that the name tells.
fn format_of_name(name: &str) -> Option<Format> {
    let ends = |suffix: &str| unpack::strip_suffix(name, suffix).is_some();
    match () {
        () if ends(".cnf") || ends(".dimacs") => Some(Format::Dimacs),
        () if ends(".opb") => Some(Format::Opb),
        () if ends(".aag") || ends(".aig") => Some(Format::Aiger),
        () if ends(".tally") => Some(Format::Tally),
        () => None,
    }
}

/// The format that the first line tells: a DIMACS comment, header, or number; an OPB comment, objective or signed
/// number; an AIGER header; `None` for nothing but blanks.
fn sniff(start: &[u8]) -> Option<Format> {
    let start = start.strip_prefix(b"\xef\xbb\xbf").unwrap_or(start);
    let start = start.trim_ascii_start();
    let first = start.split(u8::is_ascii_whitespace).next().filter(|word| !word.is_empty())?;
    let is_number = first[0] == b'-' || first[0].is_ascii_digit();
    Some(match first {
        b"aag" | b"aig" => Format::Aiger,
        b"min:" | b"max:" => Format::Opb,
        b"c" | b"p" => Format::Dimacs,
        _ if first[0] == b'*' || first[0] == b'+' => Format::Opb,
        _ if is_number => Format::Dimacs,
        _ => Format::Tally,
    })
}

/// The first bytes, fewer at the end of the stream.
fn take_head(input: &mut impl Read, length: usize) -> io::Result<Vec<u8>> {
    let mut head = Vec::with_capacity(length);
    input.by_ref().take(length as u64).read_to_end(&mut head)?;
    Ok(head)
}

/// A stream that hashes what goes by.
struct Hashed<R> {
    input: R,
    hash: Sha256,
}

impl<R: Read> Hashed<R> {
    /// Reads what is left and gives the digest.
    fn finish(mut self) -> io::Result<String> {
        io::copy(&mut self, &mut io::sink())?;
        Ok(self.hash.finalize().iter().map(|byte| format!("{byte:02x}")).collect())
    }
}

impl<R: Read> Read for Hashed<R> {
    fn read(&mut self, buffer: &mut [u8]) -> io::Result<usize> {
        let read = self.input.read(buffer)?;
        self.hash.update(&buffer[..read]);
        Ok(read)
    }
}
