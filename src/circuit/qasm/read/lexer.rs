//! Text to tokens. The lexer never fails: what it cannot read becomes [`Tok::Unreadable`], and statements of the
//! language that this reader does not know become one [`Tok::Skipped`] each, so that the parser goes on behind them.

use logos::Logos;

use super::ast::Place;
use super::fault::Fault;

/// How deep brackets of all kinds may be nested; deeper ones are an error, so that nothing recurses without bound.
pub(super) const MAX_NESTING: usize = 64;

/// A token; names and numbers are slices of the text.
#[derive(Clone, Copy, PartialEq, Debug, Logos)]
#[logos(skip r"[ \t\r\n\f]+")]
#[logos(skip(r"//[^\n]*", allow_greedy = true))]
#[logos(skip r"/\*([^*]|\*+[^*/])*\*+/")]
pub(super) enum Tok<'a> {
    #[token("OPENQASM")]
    OpenQasm,
    #[token("include")]
    Include,
    #[token("qubit")]
    Qubit,
    #[token("bit")]
    Bit,
    #[token("qreg")]
    Qreg,
    #[token("creg")]
    Creg,
    #[token("measure")]
    Measure,
    #[token("reset")]
    Reset,
    #[token("barrier")]
    Barrier,
    #[token("if")]
    If,
    #[token("else")]
    Else,
    #[token("for")]
    For,
    #[token("in")]
    In,
    #[token("int")]
    Int,
    #[token("uint")]
    Uint,
    #[token("float")]
    Float,
    #[token("angle")]
    Angle,
    #[token("gate")]
    Gate,
    #[token("def")]
    Def,
    #[token("let")]
    Let,
    #[token("const")]
    Const,
    #[token("return")]
    Return,
    #[token("ctrl")]
    Ctrl,
    #[token("negctrl")]
    Negctrl,
    #[token("inv")]
    Inv,
    #[token("pow")]
    Pow,
    #[token("true")]
    True,
    #[token("false")]
    False,
    #[regex("extern|while|switch|case|default|box|delay|nop|cal|defcal|defcalgrammar|break|continue|end")]
    #[regex("bool|complex|duration|stretch|array|input|output|opaque|readonly|mutable|void")]
    Reserved(&'a str),
    #[regex(r"[\p{L}\p{Nl}_][\p{L}\p{Nl}\p{Nd}_]*")]
    Name(&'a str),
    #[regex(r"[0-9](_?[0-9])*")]
    #[regex(r"0[xX][0-9a-fA-F](_?[0-9a-fA-F])*")]
    #[regex(r"0[bB][01](_?[01])*")]
    #[regex(r"0[oO][0-7](_?[0-7])*")]
    Whole(&'a str),
    #[regex(r"([0-9](_?[0-9])*\.([0-9](_?[0-9])*)?|\.[0-9](_?[0-9])*)([eE][+-]?[0-9](_?[0-9])*)?")]
    #[regex(r"[0-9](_?[0-9])*[eE][+-]?[0-9](_?[0-9])*")]
    Real(&'a str),
    #[regex(r#""[^"\n]*""#)]
    #[regex(r"'[^'\n]*'")]
    Text(&'a str),
    #[token(";")]
    Semicolon,
    #[token(",")]
    Comma,
    #[token(":")]
    Colon,
    #[token("@")]
    At,
    #[token("(")]
    Open,
    #[token(")")]
    Close,
    #[token("[")]
    OpenSquare,
    #[token("]")]
    CloseSquare,
    #[token("{")]
    OpenCurly,
    #[token("}")]
    CloseCurly,
    #[token("->")]
    Arrow,
    #[token("=")]
    Assign,
    #[token("==")]
    Equals,
    #[token("!=")]
    Differs,
    #[token("!")]
    Not,
    #[token("+")]
    Plus,
    #[token("-")]
    Minus,
    #[token("*")]
    Star,
    #[token("/")]
    Slash,
    #[token("%")]
    Percent,
    #[token("**")]
    Power,
    #[token("^")]
    Caret,
    #[token("++")]
    Join,
    #[regex(r"&&|\|\||<=|>=|[<>&|]")]
    Logic(&'a str),
    /// Operators of the language that this reader has no use for; they are known so that a message can name them.
    #[regex(r"<<|>>|\+=|-=|\*=|/=|[~.]")]
    Operator(&'a str),
    /// `pragma`, and everything to the end of its line.
    #[regex(r"#?pragma", skip_line)]
    Pragma,
    /// Not a token of the language.
    Unreadable,
    /// A statement that this reader does not know, reported already.
    Skipped,
}

impl Tok<'_> {
    /// Whether this is a word of the language only since version 3.
    fn is_word_of_version_3(self) -> bool {
        use Tok::{Angle, Bit, Const, Ctrl, Def, Else, Float, For, In, Int, Inv, Let, Negctrl, Qubit, Return, Uint};
        match self {
            Qubit | Bit | Else | For | In | Int | Uint | Float | Angle | Def | Let | Const | Return => true,
            Ctrl | Negctrl | Inv | Tok::Pow | Tok::True | Tok::False => true,
            Tok::Reserved(word) => word != "opaque",
            _ => false,
        }
    }
}

fn skip_line<'a>(lexer: &mut logos::Lexer<'a, Tok<'a>>) -> logos::Skip {
    let rest = lexer.remainder();
    lexer.bump(rest.find('\n').unwrap_or(rest.len()));
    logos::Skip
}

/// A token with its place.
pub(super) type Spanned<'a> = (u32, Tok<'a>, u32);

/// The tokens of a text, and what was wrong on the way.
pub(super) struct Tokens<'a, 'f> {
    lexer: logos::Lexer<'a, Tok<'a>>,
    /// Read already, not yet given.
    ahead: Option<Spanned<'a>>,
    /// Whether the next token begins a statement.
    at_start: bool,
    depth: usize,
    ended: bool,
    /// Whether the text is in version 2, which has fewer words of its own.
    is_old: bool,
    faults: &'f mut Vec<(Place, Fault)>,
    /// Names declared by statements that were skipped: using them is not another mistake.
    excused: &'f mut Vec<&'a str>,
}

impl<'a, 'f> Tokens<'a, 'f> {
    /// The tokens of this text.
    pub(super) fn new(text: &'a str, faults: &'f mut Vec<(Place, Fault)>, excused: &'f mut Vec<&'a str>) -> Self {
        let lexer = Tok::lexer(text);
        Self { lexer, ahead: None, at_start: true, depth: 0, ended: false, is_old: false, faults, excused }
    }

    fn raw(&mut self) -> Option<Spanned<'a>> {
        if let Some(token) = self.ahead.take() {
            return Some(token);
        }
        let result = self.lexer.next()?;
        let span = self.lexer.span();
        let (lo, hi) = (span.start as u32, span.end as u32);
        match result {
            // A closed comment was skipped by the lexer, an open one it takes for a slash and a star.
            Ok(Tok::Slash) if self.lexer.remainder().starts_with('*') => Some(self.unreadable(lo, hi)),
            Ok(token) => Some((lo, token, hi)),
            Err(()) => Some(self.unreadable(lo, hi)),
        }
    }

    /// The next token, in the words of the text's version.
    fn word(&mut self) -> Option<Spanned<'a>> {
        let (lo, token, hi) = self.raw()?;
        let text = self.lexer.source();
        if token == Tok::OpenQasm && self.at_start {
            let version = text[hi as usize..].trim_start();
            self.is_old = version.starts_with("2.0") || version.starts_with("2;");
        }
        let is_later = self.is_old && token.is_word_of_version_3();
        Some((lo, if is_later { Tok::Name(&text[lo as usize..hi as usize]) } else { token }, hi))
    }

    /// Reports what cannot be read. An unfinished comment takes the rest of the text with it.
    fn unreadable(&mut self, lo: u32, hi: u32) -> Spanned<'a> {
        let text = &self.lexer.source()[lo as usize..];
        let fault = if text.starts_with("/*") {
            self.lexer.bump(self.lexer.remainder().len());
            Fault::OpenComment
        } else if text.starts_with('"') {
            Fault::OpenText
        } else {
            Fault::Unreadable(text.chars().next().unwrap_or_default())
        };
        let hi = if fault == Fault::OpenComment { lo + 2 } else { hi };
        self.faults.push((Place { lo, hi }, fault));
        (lo, Tok::Unreadable, hi)
    }

    /// Skips the statement that begins with this word.
    fn skip_statement(&mut self, lo: u32, word: &'a str, hi: u32) -> Spanned<'a> {
        self.faults.push((Place { lo, hi }, Fault::UnknownStatement(word.to_owned())));
        let has_block = matches!(word, "while" | "switch" | "box" | "cal" | "defcal" | "case" | "default");
        let (mut depth, mut end, mut last_name) = (0usize, hi, None);
        while let Some(token) = self.raw() {
            match token.1 {
                Tok::OpenCurly => depth += 1,
                Tok::CloseCurly if depth == 0 => {
                    self.ahead = Some(token);
                    break;
                }
                Tok::CloseCurly => depth -= 1,
                Tok::Name(name) if depth == 0 && last_name.is_none() => last_name = Some(name),
                _ => {}
            }
            end = token.2;
            let closed = depth == 0 && has_block && token.1 == Tok::CloseCurly;
            if closed || depth == 0 && token.1 == Tok::Semicolon {
                break;
            }
        }
        self.excused.extend(last_name);
        (lo, Tok::Skipped, end)
    }

    /// Counts brackets; too many end the text.
    fn nest(&mut self, token: Spanned<'a>) -> Option<Spanned<'a>> {
        match token.1 {
            Tok::Open | Tok::OpenSquare | Tok::OpenCurly => self.depth += 1,
            Tok::Close | Tok::CloseSquare | Tok::CloseCurly => self.depth = self.depth.saturating_sub(1),
            _ => {}
        }
        if self.depth <= MAX_NESTING {
            return Some(token);
        }
        self.ended = true;
        self.faults.push((Place { lo: token.0, hi: token.2 }, Fault::TooDeep));
        None
    }
}

impl<'a> Iterator for Tokens<'a, '_> {
    type Item = Spanned<'a>;

    fn next(&mut self) -> Option<Spanned<'a>> {
        if self.ended {
            return None;
        }
        let mut token = self.word()?;
        // An annotation precedes a statement and takes its whole line.
        while self.at_start && token.1 == Tok::At {
            if self.ahead.is_none() {
                skip_line(&mut self.lexer);
            }
            token = self.word()?;
        }
        if self.at_start {
            let text = self.lexer.source();
            match token {
                (lo, Tok::Reserved(word), hi) => token = self.skip_statement(lo, word, hi),
                (lo, Tok::Int | Tok::Uint | Tok::Float | Tok::Angle, hi) => {
                    token = self.skip_statement(lo, &text[lo as usize..hi as usize], hi)
                }
                _ => {}
            }
        }
        self.at_start = matches!(token.1, Tok::Semicolon | Tok::OpenCurly | Tok::CloseCurly | Tok::Skipped);
        self.nest(token)
    }
}
