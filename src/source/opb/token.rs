//! Words of an OPB file.

use std::ops::Range;

use super::MAX_NUMBER;

/// A word.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub(super) enum Token {
    /// An integer; `None` where it is larger than [`MAX_NUMBER`](super::MAX_NUMBER).
    Number(Option<i128>),
    /// `x` and a number from 1, `~` before it.
    Literal {
        var: Option<u64>,
        negated: bool,
    },
    /// `>=`, `=`, `<=`.
    AtLeast,
    Equal,
    AtMost,
    /// `min:`, `max:`.
    Least,
    Most,
    /// `;`.
    End,
    /// Anything else.
    Other,
}

/// A comment line, from its `*` to the end of the line.
pub(super) type Comment = Range<usize>;

/// The words, and the first comment if it comes before all words.
pub(super) fn tokens(text: &str) -> (Vec<(Token, Range<usize>)>, Option<Comment>) {
    let bytes = text.as_bytes();
    let (mut at, mut line_start) = (0, true);
    let (mut words, mut first) = (Vec::new(), None);
    if text.starts_with('\u{feff}') {
        at = '\u{feff}'.len_utf8();
    }
    while at < bytes.len() {
        match bytes[at] {
            b'\n' => (at, line_start) = (at + 1, true),
            byte if byte.is_ascii_whitespace() => at += 1,
            b'*' if line_start => {
                let end = bytes[at..].iter().position(|&byte| byte == b'\n').map_or(bytes.len(), |length| at + length);
                if words.is_empty() && first.is_none() {
                    first = Some(at..end);
                }
                at = end;
            }
            _ => {
                let end = end_of(bytes, at);
                words.push((token(&text[at..end]), at..end));
                (at, line_start) = (end, false);
            }
        }
    }
    (words, first)
}

/// Where the word that begins here ends: a sign such as `;` or `>=` ends itself, all else at a blank or a sign.
fn end_of(bytes: &[u8], at: usize) -> usize {
    let length = match bytes[at] {
        b';' | b'=' => 1,
        b'<' | b'>' => 1 + usize::from(bytes.get(at + 1) == Some(&b'=')),
        _ => {
            let ends = |&byte: &u8| byte.is_ascii_whitespace() || matches!(byte, b';' | b'=' | b'<' | b'>');
            bytes[at..].iter().position(ends).unwrap_or(bytes.len() - at)
        }
    };
    at + length
}

fn token(word: &str) -> Token {
    match word {
        ";" => Token::End,
        ">=" => Token::AtLeast,
        "=" => Token::Equal,
        "<=" => Token::AtMost,
        "min:" => Token::Least,
        "max:" => Token::Most,
        _ => number(word).or_else(|| literal(word)).unwrap_or(Token::Other),
    }
}

fn number(word: &str) -> Option<Token> {
    let digits = word.strip_prefix(['+', '-']).unwrap_or(word);
    let good = !digits.is_empty() && digits.bytes().all(|byte| byte.is_ascii_digit());
    good.then(|| Token::Number(word.parse().ok().filter(|number: &i128| number.unsigned_abs() <= MAX_NUMBER)))
}

fn literal(word: &str) -> Option<Token> {
    let (negated, name) = word.strip_prefix('~').map_or((false, word), |name| (true, name));
    let digits = name.strip_prefix('x')?;
    let good = !digits.is_empty() && !digits.starts_with('0') && digits.bytes().all(|byte| byte.is_ascii_digit());
    good.then(|| Token::Literal { var: digits.parse().ok(), negated })
}
