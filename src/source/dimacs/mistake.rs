//! What can be wrong with a DIMACS file: one variant a mistake, and one place that turns it into a message.

use thiserror::Error;

use super::blocks::Place;
use crate::diag::{Code, Diagnostic, plural};
use crate::span::{Sources, Span};

/// A mistake in the file. The texts in the variants are what was found.
#[derive(Clone, PartialEq, Eq, Debug, Error)]
pub(super) enum Mistake {
    #[error("no 'p cnf' header was found")]
    NoHeader,
    #[error("'{0}' stands where the 'p cnf' header was expected")]
    NotHeader(String),
    #[error("clause before the 'p cnf' header")]
    ClauseBeforeHeader(String),
    #[error("second header")]
    SecondHeader,
    #[error("format '{0}' is not supported")]
    Format(String),
    #[error("the header has no {0}")]
    HeaderEnds(&'static str),
    #[error("the {0} in the header is negative")]
    HeaderNegative(&'static str, String),
    #[error("'{1}' is not a number")]
    HeaderWord(&'static str, String),
    #[error("the header has more than two numbers")]
    HeaderLong(String),
    #[error("too many {what}: the limit is {limit}")]
    Limit { what: &'static str, limit: u64, found: String },
    #[error("'{0}' is not a literal")]
    NotLiteral(String),
    #[error("'{0}' begins an XOR line, which is not supported")]
    Xor(String),
    #[error("a comment inside a line")]
    InnerComment(String),
    #[error("literal {literal} is out of range: the header declares {}", plural(*vars, "variable", "variables"))]
    OutOfRange { literal: String, vars: usize },
    #[error("the formula ends inside a clause")]
    Unclosed,
    #[error("text after the end marker '%'")]
    AfterEnd(String),
    #[error("'{0}' is not a variable")]
    NotVariable(String),
    #[error("variable {var} is out of range: the header declares {}", plural(*vars, "variable", "variables"))]
    ShowOutOfRange { var: String, vars: usize },
    #[error("the show line has no closing 0")]
    ShowUnclosed,
    #[error("the show line goes on after its closing 0")]
    ShowLong(String),
    #[error("the header announces {}, the file has {found}", plural(*announced, "clause", "clauses"))]
    ClauseCount { announced: usize, found: usize },
    #[error("'c ind' is a comment here")]
    OtherShow,
}

/// A mistake with its places: where it is, and what it conflicts with.
#[derive(Clone, PartialEq, Eq, Debug)]
pub(super) struct Complaint {
    pub(super) mistake: Mistake,
    pub(super) place: Option<Place>,
    pub(super) other: Option<Place>,
}

impl Complaint {
    /// A mistake at this place.
    pub(super) fn at(mistake: Mistake, place: Place) -> Box<Self> {
        Box::new(Self { mistake, place: Some(place), other: None })
    }

    /// The same mistake, which conflicts with this place.
    pub(super) fn against(mut self: Box<Self>, other: Option<&Place>) -> Box<Self> {
        self.other = other.cloned();
        self
    }

    /// The message. The lines it shows go into `sources`.
    pub(super) fn into_diagnostic(self, name: &str, sources: &mut Sources) -> Diagnostic {
        let text = self.mistake.to_string();
        let mut diagnostic = match self.mistake {
            Mistake::ClauseCount { .. } | Mistake::OtherShow => Diagnostic::warning(self.mistake.code(), text),
            _ => Diagnostic::error(self.mistake.code(), text),
        };
        diagnostic.found = self.mistake.found();
        diagnostic.expected = self.mistake.expected();
        diagnostic.help = self.mistake.help().map(str::to_owned);
        let (here, there) = self.mistake.labels();
        for (place, label) in [(self.place, here), (self.other, there)] {
            if let Some(place) = place {
                let file = sources.add_excerpt_at(name, place.text, place.first);
                diagnostic = diagnostic.at(Span::new(file, place.range.start, place.range.end), label);
            }
        }
        if diagnostic.labels.is_empty() { diagnostic.in_file(name) } else { diagnostic }
    }
}

impl Mistake {
    fn code(&self) -> Code {
        Code(match self {
            Mistake::NoHeader | Mistake::NotHeader(_) => "D001",
            Mistake::ClauseBeforeHeader(_) => "D002",
            Mistake::SecondHeader => "D003",
            Mistake::Format(_) => "D004",
            Mistake::HeaderEnds(_) | Mistake::HeaderNegative(..) | Mistake::HeaderWord(..) => "D005",
            Mistake::HeaderLong(_) => "D006",
            Mistake::Limit { .. } => "D007",
            Mistake::NotLiteral(_) => "D008",
            Mistake::Xor(_) => "D009",
            Mistake::OutOfRange { .. } => "D010",
            Mistake::Unclosed => "D011",
            Mistake::AfterEnd(_) => "D012",
            Mistake::NotVariable(_) => "D013",
            Mistake::ShowOutOfRange { .. } => "D014",
            Mistake::ShowUnclosed => "D015",
            Mistake::ShowLong(_) => "D016",
            Mistake::InnerComment(_) => "D017",
            Mistake::ClauseCount { .. } => "D018",
            Mistake::OtherShow => "D019",
        })
    }

    fn found(&self) -> Option<String> {
        let quoted = |text: &str| Some(format!("'{text}'"));
        match self {
            Mistake::NoHeader => Some("the end of the file".to_owned()),
            Mistake::Unclosed => Some("the end of the formula".to_owned()),
            Mistake::HeaderEnds(_) | Mistake::ShowUnclosed => Some("the end of the line".to_owned()),
            Mistake::SecondHeader => quoted("p"),
            Mistake::NotHeader(text) | Mistake::ClauseBeforeHeader(text) | Mistake::Format(text) => quoted(text),
            Mistake::HeaderLong(text) => quoted(text),
            Mistake::HeaderNegative(_, text) | Mistake::HeaderWord(_, text) => quoted(text),
            Mistake::NotLiteral(text) | Mistake::Xor(text) | Mistake::InnerComment(text) => quoted(text),
            Mistake::AfterEnd(text) | Mistake::NotVariable(text) | Mistake::ShowLong(text) => quoted(text),
            Mistake::OutOfRange { literal, .. } => quoted(literal),
            Mistake::ShowOutOfRange { var, .. } => quoted(var),
            Mistake::Limit { found, .. } => Some(found.clone()),
            Mistake::ClauseCount { found, .. } => Some(plural(*found, "clause", "clauses")),
            Mistake::OtherShow => None,
        }
    }

    fn expected(&self) -> Option<String> {
        Some(match self {
            Mistake::NoHeader | Mistake::NotHeader(_) | Mistake::ClauseBeforeHeader(_) => {
                "a header 'p cnf VARIABLES CLAUSES'".to_owned()
            }
            Mistake::SecondHeader => "one header in a file".to_owned(),
            Mistake::Format(_) => "'cnf'".to_owned(),
            Mistake::HeaderEnds(what) | Mistake::HeaderNegative(what, _) | Mistake::HeaderWord(what, _) => {
                format!("the {what}, a number from 0")
            }
            Mistake::HeaderLong(_) => "the end of the line after the number of clauses".to_owned(),
            Mistake::Limit { what, limit, .. } => format!("at most {limit} {what}"),
            Mistake::NotLiteral(_) | Mistake::Xor(_) | Mistake::InnerComment(_) => {
                "a variable number, the same with '-', or the closing 0".to_owned()
            }
            Mistake::OutOfRange { vars: 0, .. } => "the closing 0: there are no variables".to_owned(),
            Mistake::OutOfRange { vars, .. } => format!("a literal from -{vars} to {vars}"),
            Mistake::Unclosed => "the closing 0 of the last clause".to_owned(),
            Mistake::AfterEnd(_) => "nothing but one 0 and comments".to_owned(),
            Mistake::NotVariable(_) => "a variable number or the closing 0".to_owned(),
            Mistake::ShowOutOfRange { vars: 0, .. } => "the closing 0: there are no variables".to_owned(),
            Mistake::ShowOutOfRange { vars, .. } => format!("a variable from 1 to {vars}"),
            Mistake::ShowUnclosed => "a variable number or the closing 0, in the same line".to_owned(),
            Mistake::ShowLong(_) => "the end of the line after the closing 0".to_owned(),
            Mistake::ClauseCount { announced, .. } => plural(*announced, "clause", "clauses"),
            Mistake::OtherShow => return None,
        })
    }

    fn help(&self) -> Option<&'static str> {
        Some(match self {
            Mistake::SecondHeader => "the file looks like two files joined; keep one of them",
            Mistake::Format(_) => "read as CNF, the file would mean something else; convert it to CNF first",
            Mistake::Xor(_) => "XOR lines are an extension of some solvers; write the XOR as clauses",
            Mistake::InnerComment(_) => "put the comment on a line of its own",
            Mistake::Unclosed => "the file was probably cut short; if it is whole, add the 0",
            Mistake::AfterEnd(_) => "delete the '%' if the formula goes on",
            Mistake::ShowUnclosed => "close the line with 0 and begin the next with 'c p show'",
            Mistake::ClauseCount { announced, found } if announced > found => {
                "the clauses of the file count; if some are missing, it was cut short"
            }
            Mistake::ClauseCount { .. } => "the clauses of the file count; correct the header",
            Mistake::OtherShow => "to count over some variables only, write 'c p show ... 0'",
            _ => return None,
        })
    }

    /// What stands at the place and at the one it conflicts with.
    fn labels(&self) -> (&'static str, &'static str) {
        match self {
            Mistake::SecondHeader => ("", "the first header"),
            Mistake::Unclosed => ("the last word of the formula", ""),
            Mistake::OutOfRange { .. } | Mistake::ShowOutOfRange { .. } => ("", "declared here"),
            _ => ("", ""),
        }
    }
}
