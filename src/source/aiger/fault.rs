//! What can be wrong with an AIGER file.

use std::ops::Range;

use thiserror::Error;

use crate::diag::{Code, Diagnostic};
use crate::span::{Sources, Span};

/// A mistake or a warning, and the bytes it is about.
#[derive(Clone, PartialEq, Eq, Debug)]
pub(super) struct Fault {
    pub(super) at: Range<usize>,
    pub(super) kind: Kind,
}

#[derive(Clone, PartialEq, Eq, Debug, Error)]
pub(super) enum Kind {
    #[error("this is no AIGER header")]
    Header,
    #[error("the graph has latches")]
    Latches,
    #[error("the graph has {0} outputs")]
    Outputs(u64),
    #[error("the graph has properties of version 1.9")]
    Properties,
    #[error("there are more than {1} {0}")]
    Limit(&'static str, u64),
    #[error("the largest variable does not fit the inputs and ANDs")]
    Largest,
    #[error("the file is cut short")]
    Cut(&'static str),
    #[error("this is not what belongs here")]
    Expected(&'static str),
    #[error("the literal is beyond the largest variable")]
    OutOfRange(u64),
    #[error("the variable of literal {0} is defined twice")]
    Twice(u64),
    #[error("the literal {0} is used and never defined")]
    Undefined(u64),
    #[error("the ANDs depend on each other in a circle")]
    Cycle,
    #[error("the operands of an AND are not below it")]
    Order,
    #[error("the name of the input was taken already; it is called {0}")]
    NameTaken(String),
}

/// Bytes of a line that a message shows.
const SHOWN: usize = 200;

impl Fault {
    pub(super) fn diagnostic(self, bytes: &[u8], name: &str, sources: &mut Sources, warning: bool) -> Diagnostic {
        let new = |code| match warning {
            true => Diagnostic::warning(Code(code), self.kind.to_string()),
            false => Diagnostic::error(Code(code), self.kind.to_string()),
        };
        let diagnostic = match &self.kind {
            Kind::Header => new("G001").expected("'aag M I L O A' or 'aig M I L O A', numbers from 0"),
            Kind::Latches => new("G002").expected("no latch: M I 0 1 A").help("unroll the circuit first"),
            Kind::Outputs(_) => new("G003").expected("one output: M I 0 1 A").help("join the outputs, or keep one"),
            Kind::Properties => new("G004").expected("no bad states, constraints, justice or fairness"),
            Kind::Limit(what, limit) => new("G005").expected(format!("at most {limit} {what}")),
            Kind::Largest => new("G006").expected("M = I + A in binary, at least that in ASCII"),
            Kind::Cut(expected) => new("G007").found("the end of the file").expected(*expected),
            Kind::Expected(expected) => new("G008").expected(*expected),
            Kind::OutOfRange(largest) => new("G009").expected(format!("a literal from 0 to {}", 2 * largest + 1)),
            Kind::Twice(_) => new("G010").expected("each variable once, as an input or as an AND"),
            Kind::Undefined(_) => new("G011").expected("an input, the output of an AND, 0 or 1"),
            Kind::Cycle => new("G012").expected("operands that do not depend on the AND itself"),
            Kind::Order => new("G013").expected("differences that lead to literals from 0 up"),
            Kind::NameTaken(_) => new("G014").expected("names of inputs that differ"),
        };
        place(&self.at, bytes, name, sources).map_or(diagnostic.clone().in_file(name), |span| diagnostic.at(span, ""))
    }
}

/// The line of these bytes, where it is text.
fn place(at: &Range<usize>, bytes: &[u8], name: &str, sources: &mut Sources) -> Option<Span> {
    let start = at.start.min(bytes.len());
    // At the end of the file the last line is shown.
    let from = bytes[..start].iter().rposition(|&byte| byte == b'\n').map_or(0, |at| at + 1);
    let length = bytes[from..].iter().position(|&byte| byte == b'\n').unwrap_or(bytes.len() - from);
    let text = std::str::from_utf8(&bytes[from..from + length]).ok().filter(|text| text.len() <= SHOWN)?;
    if text.chars().any(|c| c.is_control() && c != '\r' && c != '\t') {
        return None;
    }
    let line = bytes[..from].iter().filter(|&&byte| byte == b'\n').count() + 1;
    let file = sources.add_excerpt(name, text, line);
    let (lo, hi) = (start - from, at.end.clamp(start, from + length) - from);
    text.is_char_boundary(lo).then(|| Span::new(file, lo, hi))
}
