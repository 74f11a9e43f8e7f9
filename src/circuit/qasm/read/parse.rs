//! Tokens to statements, by the grammar `grammar/qasm.lalrpop`; its complaints in readable words.

use lalrpop_util::{ErrorRecovery, ParseError};

use super::ast::{Ast, Place, Statement};
use super::fault::Fault;
use super::lexer::{Tok, Tokens};

lalrpop_util::lalrpop_mod!(
    #[allow(clippy::all, clippy::pedantic, unused, unreachable_pub, missing_docs)]
    grammar,
    "/qasm.rs"
);

/// What a text says.
pub(super) struct Parsed<'a> {
    pub(super) ast: Ast<'a>,
    pub(super) statements: Vec<Statement<'a>>,
    pub(super) faults: Vec<(Place, Fault)>,
    /// Names declared by statements that could not be read.
    pub(super) excused: Vec<&'a str>,
}

/// Reads the statements of a text; those that are not statements are left out and reported.
pub(super) fn parse(text: &str) -> Parsed<'_> {
    let (mut lexical, mut excused) = (Vec::new(), Vec::new());
    let (mut ast, mut faults, mut errors) = (Ast::default(), Vec::new(), Vec::new());
    let tokens = Tokens::new(text, &mut lexical, &mut excused).map(Ok::<_, ()>);
    let result = grammar::ProgramParser::new().parse(&mut ast, &mut faults, &mut errors, tokens);
    let statements = result.unwrap_or_else(|error| {
        errors.push(ErrorRecovery { error, dropped_tokens: Vec::new() });
        Vec::new()
    });
    let ended = lexical.iter().any(|(_, fault)| matches!(fault, Fault::TooDeep | Fault::OpenComment));
    for error in errors {
        // Names in a statement that was not understood may be declarations: using them is not another mistake.
        for token in &error.dropped_tokens {
            if let Tok::Name(name) = token.1 {
                excused.push(name);
            }
        }
        faults.extend(readable(text, error.error, ended));
    }
    faults.append(&mut lexical);
    Parsed { ast, statements, faults, excused }
}

fn readable(text: &str, error: ParseError<u32, Tok<'_>, ()>, ended: bool) -> Option<(Place, Fault)> {
    match error {
        // What cannot be read was reported by the lexer.
        ParseError::UnrecognizedToken { token: (_, Tok::Unreadable, _), .. } => None,
        ParseError::UnrecognizedToken { token: (lo, _, hi), expected } => {
            let found = format!("`{}`", &text[lo as usize..hi as usize]);
            Some((Place { lo, hi }, Fault::Unexpected { found, expected: words(&expected) }))
        }
        ParseError::ExtraToken { token: (lo, _, hi) } => {
            let found = format!("`{}`", &text[lo as usize..hi as usize]);
            Some((Place { lo, hi }, Fault::Unexpected { found, expected: Vec::new() }))
        }
        ParseError::UnrecognizedEof { .. } if ended => None,
        ParseError::UnrecognizedEof { location, expected } => {
            let place = Place { lo: location, hi: location };
            Some((place, Fault::UnexpectedEnd { expected: words(&expected) }))
        }
        ParseError::InvalidToken { location } => {
            Some((Place { lo: location, hi: location + 1 }, Fault::Unreadable('?')))
        }
        ParseError::User { .. } => None,
    }
}

/// Token names of the grammar as a reader would say them: few, and each once.
fn words(expected: &[String]) -> Vec<String> {
    let has = |token: &str| expected.iter().any(|name| name == &format!("\"{token}\""));
    let mut words = Vec::new();
    let mut say = |word: &str| {
        if !words.iter().any(|known| known == word) {
            words.push(word.to_owned());
        }
    };
    let statement = has("qubit") || has("reset");
    let operator = has("+");
    for name in expected {
        match name.trim_matches('"') {
            "OPENQASM" | "include" | "qubit" | "bit" | "qreg" | "creg" | "measure" | "reset" | "barrier" | "if"
            | "for" | "ctrl" | "negctrl" | "inv" | "pow" | "let" | "const" | "gate" | "def" | "return" | "skipped"
            | "name"
                if statement =>
            {
                say("a statement");
            }
            "+" | "-" | "*" | "/" | "%" | "**" | "^" if operator => say("an operator"),
            "whole" | "real" => say("a number"),
            "-" => {}
            "name" => say("a name"),
            "text" => say("a file name in quotes"),
            "reserved" | "operator" | "logic" | "unreadable" | "skipped" => {}
            "int" | "uint" if !has("float") => say("`int` or `uint`"),
            "int" | "uint" | "float" | "angle" => say("a type"),
            token => say(&format!("`{token}`")),
        }
    }
    // `;` first: it is what is most often missing.
    words.sort_by_key(|word| word != "`;`");
    words
}
