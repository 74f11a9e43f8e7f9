//! Tokens: text in, tokens with their places out. The lexer never fails: what is no token becomes [`Tok::Error`] and
//! a message, so that one stray character does not hide the mistakes after it.

use logos::Logos;

use crate::diag::Diagnostic;
use crate::source::tally::mistakes::lexical;
use crate::span::{FileId, Span};

/// A token. It borrows from the text and is copied freely.
#[derive(Logos, Clone, Copy, PartialEq, Eq, Debug)]
#[logos(skip r"[ \t\r\n\f\u{feff}]+")]
#[logos(skip(r"#[^\n]*", allow_greedy = true))]
pub enum Tok<'t> {
    // Words that begin a statement.
    /// `title`
    #[token("title")]
    Title,
    /// `known`
    #[token("known")]
    Known,
    /// `kind`
    #[token("kind")]
    Kind,
    /// `pick`
    #[token("pick")]
    Pick,
    /// `let`
    #[token("let")]
    Let,
    /// `must`
    #[token("must")]
    Must,
    /// `least`: a statement, or the second word of `at least`.
    #[token("least")]
    Least,
    /// `most`: a statement, or the second word of `at most`.
    #[token("most")]
    Most,

    // Words inside statements.
    /// `in`
    #[token("in")]
    In,
    /// `to`
    #[token("to")]
    To,
    /// `for`
    #[token("for")]
    For,
    /// `with`
    #[token("with")]
    With,
    /// `yes`
    #[token("yes")]
    Yes,
    /// `no`
    #[token("no")]
    No,
    /// `and`
    #[token("and")]
    And,
    /// `or`
    #[token("or")]
    Or,
    /// `not`
    #[token("not")]
    Not,
    /// `needs`
    #[token("needs")]
    Needs,
    /// `if`
    #[token("if")]
    If,
    /// `then`
    #[token("then")]
    Then,
    /// `else`
    #[token("else")]
    Else,
    /// `mod`
    #[token("mod")]
    Mod,
    /// `abs`
    #[token("abs")]
    Abs,
    /// `one`
    #[token("one")]
    One,
    /// `of`
    #[token("of")]
    Of,
    /// `all`
    #[token("all")]
    All,
    /// `some`
    #[token("some")]
    Some,
    /// `none`
    #[token("none")]
    None,
    /// `exactly`
    #[token("exactly")]
    Exactly,
    /// `at`
    #[token("at")]
    At,
    /// `number`
    #[token("number")]
    Number,
    /// `sum`
    #[token("sum")]
    Sum,
    /// `smallest`
    #[token("smallest")]
    Smallest,
    /// `largest`
    #[token("largest")]
    Largest,
    /// `different`
    #[token("different")]
    Different,
    /// `odd`
    #[token("odd")]
    Odd,
    /// `even`
    #[token("even")]
    Even,

    // Signs.
    /// `=`
    #[token("=")]
    Eq,
    /// `!=`
    #[token("!=")]
    Ne,
    /// `<`
    #[token("<")]
    Lt,
    /// `<=`
    #[token("<=")]
    Le,
    /// `>`
    #[token(">")]
    Gt,
    /// `>=`
    #[token(">=")]
    Ge,
    /// `+`
    #[token("+")]
    Plus,
    /// `-`
    #[token("-")]
    Minus,
    /// `*`
    #[token("*")]
    Star,
    /// `/`
    #[token("/")]
    Slash,
    /// `(`
    #[token("(")]
    Open,
    /// `)`
    #[token(")")]
    Close,
    /// `[`
    #[token("[")]
    OpenRow,
    /// `]`
    #[token("]")]
    CloseRow,
    /// `,`
    #[token(",")]
    Comma,
    /// `|`
    #[token("|")]
    Bar,

    // Tokens with content.
    /// A name.
    #[regex("[A-Za-z_][A-Za-z0-9_]*")]
    Name(&'t str),
    /// Digits; after [`lex`] they are a number up to 2^63.
    #[regex("[0-9][A-Za-z0-9_]*")]
    Digits(&'t str),
    /// A text with its quotes.
    #[regex(r#""([^"\\\n]|\\[^\n])*""#)]
    Text(&'t str),

    /// A sign that other languages use; [`lex`] replaces it by the one meant, with a message.
    #[regex(r"==|&&|\|\||!|%|<>|->|=>|:=|\.\.|≤|≥|≠|=<|\*\*|\^")]
    Foreign(&'t str),
    /// A quote without its partner on the line.
    #[regex(r#""([^"\\\n]|\\[^\n])*\\?"#, priority = 1)]
    OpenText(&'t str),
    /// What is no token; a message says so.
    Error,
    /// Never in a text: comes before a lone expression, the value of a `--set`.
    Value,
}

/// A token with its place: first byte, token, byte after the last.
pub type Placed<'t> = (usize, Tok<'t>, usize);

/// The tokens of a text. Messages go to `out`.
pub fn lex<'t>(text: &'t str, file: FileId, out: &mut Vec<Diagnostic>) -> Vec<Placed<'t>> {
    let mut tokens = Vec::new();
    for (token, place) in Tok::lexer(text).spanned() {
        let span = Span::new(file, place.start, place.end);
        let token = token.unwrap_or(Tok::Error);
        let kept = match token {
            Tok::Error => {
                // One message for a run of unreadable characters, not one for each.
                let run = matches!(tokens.last(), Some(&(_, Tok::Error, hi)) if hi == place.start);
                if !run {
                    out.push(lexical::stray(span, &text[place.clone()]));
                }
                Tok::Error
            }
            Tok::OpenText(_) => {
                out.push(lexical::open_text(span));
                Tok::Error
            }
            Tok::Digits(digits) => number(digits, span, out),
            Tok::Foreign(sign) => {
                let meant = meant(sign);
                out.push(lexical::foreign(span, sign, meant.map(|(_, word)| word)));
                meant.map_or(Tok::Error, |(token, _)| token)
            }
            token => token,
        };
        tokens.push((place.start, kept, place.end));
    }
    tokens
}

fn number<'t>(digits: &'t str, span: Span, out: &mut Vec<Diagnostic>) -> Tok<'t> {
    if !digits.bytes().all(|byte| byte.is_ascii_digit()) {
        out.push(lexical::number_with_letters(span, digits));
        return Tok::Error;
    }
    // 2^63 itself is kept for the sake of -2^63; alone it is found to be too large later.
    match digits.parse::<u64>() {
        Ok(number) if number <= 1 << 63 => Tok::Digits(digits),
        _ => {
            out.push(lexical::number_too_large(span));
            Tok::Error
        }
    }
}

/// The token that a sign of another language stands for, and how it is written here.
fn meant(sign: &str) -> Option<(Tok<'static>, &'static str)> {
    Some(match sign {
        "==" | ":=" => (Tok::Eq, "="),
        "&&" => (Tok::And, "and"),
        "||" => (Tok::Or, "or"),
        "!" => (Tok::Not, "not"),
        "%" => (Tok::Mod, "mod"),
        "<>" | "≠" => (Tok::Ne, "!="),
        "->" | "=>" => (Tok::Needs, "needs"),
        ".." => (Tok::To, "to"),
        "≤" | "=<" => (Tok::Le, "<="),
        "≥" => (Tok::Ge, ">="),
        _ => return None,
    })
}

/// The reserved words, in the order of the tokens.
pub const RESERVED: [&str; 37] = [
    "title",
    "known",
    "kind",
    "pick",
    "let",
    "must",
    "least",
    "most",
    "in",
    "to",
    "for",
    "with",
    "yes",
    "no",
    "and",
    "or",
    "not",
    "needs",
    "if",
    "then",
    "else",
    "mod",
    "abs",
    "one",
    "of",
    "all",
    "some",
    "none",
    "exactly",
    "at",
    "number",
    "sum",
    "smallest",
    "largest",
    "different",
    "odd",
    "even",
];

impl Tok<'_> {
    /// Whether the token begins a statement (`least` and `most` also follow `at`).
    pub fn begins_statement(self) -> bool {
        use Tok::{Kind, Known, Least, Let, Most, Must, Pick, Title};
        matches!(self, Title | Known | Kind | Pick | Let | Must | Least | Most)
    }
}

/// Whether a word is reserved.
pub fn is_reserved(word: &str) -> bool {
    RESERVED.contains(&word)
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::span::Sources;

    fn tokens(text: &str) -> (Vec<Tok<'_>>, Vec<&'static str>) {
        let file = Sources::new().add("t", text);
        let mut out = Vec::new();
        let tokens = lex(text, file, &mut out).into_iter().map(|(_, token, _)| token).collect();
        (tokens, out.iter().map(|d| d.code.0).collect())
    }

    #[test]
    fn every_reserved_word_is_a_token_of_its_own_and_no_name() {
        for word in RESERVED {
            let (tokens, messages) = tokens(word);
            assert!(matches!(tokens[..], [token] if !matches!(token, Tok::Name(_))), "{word}");
            assert!(messages.is_empty());
            assert!(is_reserved(word));
        }
    }

    #[test]
    fn comments_and_line_ends_are_nothing_and_longer_words_are_names() {
        let (found, messages) = tokens("pick picked # no \"text\"\r\n<= 12");
        assert_eq!(found, [Tok::Pick, Tok::Name("picked"), Tok::Le, Tok::Digits("12")]);
        assert!(messages.is_empty());
    }

    #[test]
    fn what_is_no_token_is_reported_and_the_rest_is_read() {
        let (found, messages) = tokens("must ??? a == 3x + 99999999999999999999 \"open");
        assert_eq!(found[..2], [Tok::Must, Tok::Error]);
        assert!(found.contains(&Tok::Name("a")) && found.contains(&Tok::Eq) && found.contains(&Tok::Plus));
        assert_eq!(messages, ["T001", "T005", "T003", "T004", "T002"]);
    }
}
