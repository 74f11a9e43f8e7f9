//! Statements of an OPB file, with their places; nothing is built yet.

use std::ops::Range;

use super::fault::{Fault, Kind};
use super::token::{Token, tokens};
use super::{MAX_MESSAGES, MAX_VARS};

/// A variable, counted from 1, or its negation.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub(super) struct Literal {
    pub(super) var: u64,
    pub(super) negated: bool,
}

/// A weighed product.
#[derive(Clone, PartialEq, Eq, Debug)]
pub(super) struct Term {
    pub(super) weight: i128,
    pub(super) literals: Vec<Literal>,
}

/// How a sum compares with the number right of it.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub(super) enum Relation {
    AtLeast,
    Equal,
    AtMost,
}

/// A constraint.
#[derive(Clone, PartialEq, Eq, Debug)]
pub(super) struct Row {
    pub(super) terms: Vec<Term>,
    pub(super) relation: Relation,
    pub(super) bound: i128,
    pub(super) at: Range<usize>,
}

/// What to make small, or large where `most` says so.
#[derive(Clone, PartialEq, Eq, Debug)]
pub(super) struct Goal {
    pub(super) terms: Vec<Term>,
    pub(super) most: bool,
    pub(super) at: Range<usize>,
}

/// The statements.
#[derive(Clone, PartialEq, Eq, Debug, Default)]
pub(super) struct Body {
    /// How many variables there are.
    pub(super) vars: u64,
    pub(super) goal: Option<Goal>,
    pub(super) rows: Vec<Row>,
}

/// The statements, what is wrong with them, and what should be known.
#[derive(Clone, PartialEq, Eq, Debug, Default)]
pub(super) struct Parsed {
    pub(super) body: Body,
    pub(super) faults: Vec<Fault>,
    pub(super) warnings: Vec<Fault>,
}

/// What the first comment announces.
#[derive(Clone, Copy, Default)]
struct Announced {
    vars: Option<u64>,
    rows: Option<u64>,
    products: Option<u64>,
}

const TERM: &str = "an integer with its literals, '>=' or '='";
const SUM: &str = "an integer with its literals, or ';'";
const LITERAL: &str = "a literal such as x1 or ~x1";

pub(super) fn parse(text: &str) -> Parsed {
    let (words, comment) = tokens(text);
    let mut parser =
        Parser { text, words: &words, next: 0, announced: Announced::default(), parsed: Parsed::default() };
    match &comment {
        Some(at) => parser.header(at.clone()),
        None => parser.warn(0..text.len().min(1), Kind::NoHeader),
    }
    while parser.next < words.len() && parser.parsed.faults.len() < MAX_MESSAGES {
        if let Err(fault) = parser.statement() {
            parser.parsed.faults.push(fault);
            parser.skip_statement();
        }
    }
    parser.finish(comment.unwrap_or(0..0))
}

struct Parser<'a> {
    text: &'a str,
    words: &'a [(Token, Range<usize>)],
    next: usize,
    announced: Announced,
    parsed: Parsed,
}

impl Parser<'_> {
    fn warn(&mut self, at: Range<usize>, kind: Kind) {
        self.parsed.warnings.push(Fault { at, kind });
    }

    /// `* #variable= V #constraint= C`, and whatever else is announced after it.
    fn header(&mut self, at: Range<usize>) {
        let line = &self.text[at.clone()];
        if !line.contains("#variable=") {
            return self.warn(at, Kind::NoHeader);
        }
        let number = |name: &str| {
            let after = line.split_once(name)?.1.trim_start();
            let end = after.find(|c: char| !c.is_ascii_digit()).unwrap_or(after.len());
            after[..end].parse().ok()
        };
        self.announced =
            Announced { vars: number("#variable="), rows: number("#constraint="), products: number("#product=") };
        if self.announced.vars.is_none() || self.announced.rows.is_none() {
            self.parsed.faults.push(Fault { at, kind: Kind::Header });
        } else if self.announced.vars > Some(MAX_VARS) {
            self.parsed.faults.push(Fault { at, kind: Kind::TooManyVars });
        }
    }

    fn peek(&self) -> Option<Token> {
        self.words.get(self.next).map(|word| word.0)
    }

    /// A fault at the next word.
    fn unexpected(&self, expected: &'static str) -> Fault {
        match self.words.get(self.next) {
            Some((_, at)) => {
                let found = self.text[at.clone()].chars().take(40).collect();
                Fault { at: at.clone(), kind: Kind::Unexpected(found, expected) }
            }
            None => Fault { at: self.words.last().map_or(0..0, |word| word.1.clone()), kind: Kind::Unclosed(expected) },
        }
    }

    fn skip_statement(&mut self) {
        let end = self.words[self.next..].iter().position(|word| word.0 == Token::End);
        self.next = end.map_or(self.words.len(), |length| self.next + length + 1);
    }

    fn statement(&mut self) -> Result<(), Fault> {
        let start = self.words[self.next].1.clone();
        if let Some(sense @ (Token::Least | Token::Most)) = self.peek() {
            if self.parsed.body.goal.is_some() || !self.parsed.body.rows.is_empty() {
                return Err(Fault { at: start, kind: Kind::LateObjective });
            }
            self.next += 1;
            if sense == Token::Most {
                self.dialect(start.clone(), "'max:'");
            }
            let terms = self.terms()?;
            let end = self.end(SUM)?;
            self.parsed.body.goal = Some(Goal { terms, most: sense == Token::Most, at: start.start..end });
            return Ok(());
        }
        let terms = self.terms()?;
        let relation = match self.peek() {
            _ if terms.is_empty() => return Err(self.unexpected("an integer with its literals")),
            Some(Token::AtLeast) => Relation::AtLeast,
            Some(Token::Equal) => Relation::Equal,
            Some(Token::AtMost) => Relation::AtMost,
            _ => return Err(self.unexpected(TERM)),
        };
        if relation == Relation::AtMost {
            self.dialect(self.words[self.next].1.clone(), "'<='");
        }
        self.next += 1;
        let bound = match self.peek() {
            Some(Token::Number(number)) => self.number(number)?,
            _ => return Err(self.unexpected("an integer")),
        };
        let end = self.end("';'")?;
        self.parsed.body.rows.push(Row { terms, relation, bound, at: start.start..end });
        Ok(())
    }

    /// Each dialect is warned about once.
    fn dialect(&mut self, at: Range<usize>, what: &'static str) {
        let kind = Kind::Dialect(what);
        if !self.parsed.warnings.iter().any(|warning| warning.kind == kind) {
            self.warn(at, kind);
        }
    }

    /// The `;`, and where it ends.
    fn end(&mut self, expected: &'static str) -> Result<usize, Fault> {
        if self.peek() != Some(Token::End) {
            return Err(self.unexpected(expected));
        }
        self.next += 1;
        Ok(self.words[self.next - 1].1.end)
    }

    fn number(&mut self, number: Option<i128>) -> Result<i128, Fault> {
        let at = self.words[self.next].1.clone();
        self.next += 1;
        number.ok_or(Fault { at, kind: Kind::TooLarge })
    }

    fn terms(&mut self) -> Result<Vec<Term>, Fault> {
        let mut terms = Vec::new();
        while let Some(Token::Number(weight)) = self.peek() {
            let weight = self.number(weight)?;
            let mut literals = Vec::new();
            while let Some(Token::Literal { var, negated }) = self.peek() {
                literals.push(Literal { var: self.variable(var)?, negated });
            }
            if literals.is_empty() {
                return Err(self.unexpected(LITERAL));
            }
            terms.push(Term { weight, literals });
        }
        Ok(terms)
    }

    fn variable(&mut self, var: Option<u64>) -> Result<u64, Fault> {
        let at = self.words[self.next].1.clone();
        self.next += 1;
        let kind = match (var, self.announced.vars) {
            (Some(var), Some(announced)) if var <= announced => return Ok(var),
            (_, Some(announced)) => Kind::OutOfRange { announced },
            (Some(var), None) if var <= MAX_VARS => {
                self.parsed.body.vars = self.parsed.body.vars.max(var);
                return Ok(var);
            }
            _ => Kind::TooManyVars,
        };
        Err(Fault { at, kind })
    }

    fn finish(mut self, header: Range<usize>) -> Parsed {
        self.parsed.body.vars = self.announced.vars.unwrap_or(self.parsed.body.vars);
        let rows = self.parsed.body.rows.len() as u64;
        if let Some(announced) = self.announced.rows.filter(|&announced| announced != rows) {
            self.warn(header.clone(), Kind::Announced { what: "constraints", announced, found: rows });
        }
        let products = self.products();
        if let Some(announced) = self.announced.products.filter(|&announced| announced != products) {
            self.warn(header, Kind::Announced { what: "different products", announced, found: products });
        }
        self.parsed
    }

    /// Different products of several literals.
    fn products(&self) -> u64 {
        if self.announced.products.is_none() {
            return 0;
        }
        let goal = self.parsed.body.goal.iter().flat_map(|goal| &goal.terms);
        let terms = goal.chain(self.parsed.body.rows.iter().flat_map(|row| &row.terms));
        let product = |term: &Term| {
            let mut literals: Vec<_> = term.literals.iter().map(|literal| (literal.var, literal.negated)).collect();
            literals.sort_unstable();
            literals
        };
        let long = terms.filter(|term| term.literals.len() > 1).map(product);
        long.collect::<std::collections::BTreeSet<_>>().len() as u64
    }
}
