//! What can be wrong with an OpenQASM text, as data with stable codes, and how each becomes a diagnostic.

use thiserror::Error;

use super::ast::Place;
use crate::diag::{Code, Diagnostic, plural};
use crate::span::{FileId, Span};

/// A mistake.
#[derive(Clone, PartialEq, Debug, Error)]
pub(crate) enum Fault {
    #[error("unexpected {found}")]
    Unexpected { found: String, expected: Vec<String> },
    #[error("the text ends in the middle of a statement")]
    UnexpectedEnd { expected: Vec<String> },
    #[error("this character does not belong to the language: {0:?}")]
    Unreadable(char),
    #[error("this comment is not closed")]
    OpenComment,
    #[error("this text is not closed on its line")]
    OpenText,
    #[error("`{0}` statements are not supported")]
    UnknownStatement(String),
    #[error("this is OpenQASM {0}, the reader knows versions 2.0 and 3")]
    Version(String),
    #[error("the version must be the first statement")]
    LateVersion,
    #[error("this file cannot be included: {0}")]
    Include(String, &'static str),
    #[error("`{0}` is not declared")]
    Undeclared(String),
    #[error("`{name}` is declared twice")]
    Redeclared { name: String, first: Option<Place> },
    #[error("no gate is called `{0}`")]
    UnknownGate(String),
    #[error("`{0}` is defined in {1}, which is not included")]
    NotIncluded(String, &'static str),
    #[error("`{0}` is not in every copy of qelib1.inc, and is not known here")]
    UnsupportedGate(String),
    #[error("`{gate}` acts on {}, not on {found}", plural(*wanted, "qubit", "qubits"))]
    Operands { gate: String, wanted: usize, found: usize },
    #[error("`{gate}` takes {}, not {found}", plural(*wanted, "angle", "angles"))]
    Arguments { gate: String, wanted: usize, found: usize },
    #[error("index {index} is outside `{register}`, which has {}", plural(*len as usize, "element", "elements"))]
    OutsideRegister { register: String, index: i64, len: u32 },
    #[error("{0} is used twice in one gate")]
    Repeated(String),
    #[error("operands of {0} and {1} elements do not fit together")]
    Lengths(u32, u32),
    #[error("`{name}` is {found}, a {wanted} is expected here")]
    WrongName { name: String, found: &'static str, wanted: &'static str },
    #[error("a register has a constant size of at least 1, this one has {0}")]
    Size(String),
    #[error("too large: {what}, at most {most}")]
    Limit { what: &'static str, most: u64 },
    #[error("this number does not fit 64 bits")]
    NumberTooLarge,
    #[error("division by zero")]
    DivisionByZero,
    #[error("a quotient of two integers that is not one")]
    Quotient,
    #[error("an integer is expected here")]
    NotWhole,
    #[error("this is not a finite number")]
    NotFinite,
    #[error("the number of controls is a constant of at least 1")]
    ControlCount,
    #[error("`negctrl` with a number of controls is read in two ways")]
    NegctrlCount,
    #[error("an exponent of `pow` that is not an integer")]
    Pow,
    #[error("a bit is 0 or 1")]
    NotABitValue,
    #[error("{} have no such value", plural(*.0, "bit", "bits"))]
    NotABitsValue(usize),
    #[error("a condition on several bits is not supported")]
    SeveralTests,
    #[error("a condition is one bit, `{0}` has several")]
    WideTest(String),
    #[error("{0} is tested before it is measured")]
    NotMeasured(String),
    #[error("a condition inside a condition is not supported")]
    NestedTest,
    #[error("{0} is measured while a condition on it is in force")]
    TestChanged(String),
    #[error("a measurement without a bit to write")]
    Unwritten,
    #[error("the step of a range is 0")]
    ZeroStep,
    #[error("this range is empty")]
    EmptyRange,
    #[error("registers are declared outside of all brackets")]
    InnerDeclaration,
    #[error("gates and subroutines are defined outside of all brackets")]
    InnerDefinition,
    #[error("no function is called `{0}`")]
    UnknownFunction(String),
    #[error("the wrong number of arguments for `{0}`")]
    FunctionArguments(String),
    #[error("`^` is a power only in version 2")]
    Caret,
    #[error("`{name}` takes {}, not {found}", plural(*wanted, "argument", "arguments"))]
    Parameters { name: String, wanted: usize, found: usize },
    #[error("`{0}` is not a constant")]
    NotConstant(String),
    #[error("this value does not fit its type exactly")]
    Misfit,
    #[error("the gate `{0}` acts on no qubit")]
    NoQubits(String),
    #[error("only gates, loops over them and barriers stand in the definition of a gate")]
    NotInGate,
    #[error("`{0}` is one qubit here and has no elements")]
    IndexInGate(String),
    #[error("definitions call each other too deep")]
    DefinitionsTooDeep,
    #[error("`{0}` is a subroutine: it takes its qubits in brackets, and no modifiers")]
    NotAGate(String),
    #[error("subroutines that are given bits are not supported")]
    BitParameter,
    #[error("qubits are expected here")]
    QubitsExpected,
    #[error("this subroutine returns a bit, and does not end with `return`")]
    NoReturn,
    #[error("there is no value to return or to take")]
    NoValue,
    #[error("only a measurement can be returned")]
    ReturnValue,
    #[error("`return` before the end of a subroutine is not supported")]
    EarlyReturn,
    #[error("`return` outside of a subroutine")]
    OutsideReturn,
    #[error("`{0}` with these angles is understood in two ways")]
    Ambiguous(String),
    #[error("brackets nested too deep")]
    TooDeep,
    #[error("too many mistakes, the rest is not shown")]
    TooMany,
}

impl Fault {
    fn code(&self) -> Code {
        Code(match self {
            Fault::Unexpected { .. } | Fault::UnexpectedEnd { .. } => "Q001",
            Fault::Unreadable(_) | Fault::OpenComment | Fault::OpenText => "Q002",
            Fault::UnknownStatement(_) => "Q003",
            Fault::Version(_) | Fault::LateVersion => "Q004",
            Fault::Include(..) => "Q005",
            Fault::Undeclared(_) => "Q006",
            Fault::Redeclared { .. } => "Q007",
            Fault::UnknownGate(_) => "Q008",
            Fault::NotIncluded(..) => "Q009",
            Fault::UnsupportedGate(_) => "Q010",
            Fault::Operands { .. } => "Q011",
            Fault::Arguments { .. } => "Q012",
            Fault::OutsideRegister { .. } => "Q013",
            Fault::Repeated(_) => "Q014",
            Fault::Lengths(..) => "Q015",
            Fault::WrongName { .. } => "Q016",
            Fault::Size(_) => "Q017",
            Fault::Limit { .. } => "Q018",
            Fault::NumberTooLarge | Fault::DivisionByZero | Fault::Quotient => "Q019",
            Fault::NotWhole | Fault::NotFinite | Fault::Misfit => "Q019",
            Fault::ControlCount | Fault::NegctrlCount | Fault::Pow => "Q020",
            Fault::NotABitValue | Fault::NotABitsValue(_) | Fault::WideTest(_) => "Q021",
            Fault::SeveralTests | Fault::NestedTest | Fault::TestChanged(_) => "Q021",
            Fault::NotMeasured(_) => "Q022",
            Fault::Unwritten => "Q023",
            Fault::ZeroStep | Fault::EmptyRange => "Q024",
            Fault::InnerDeclaration | Fault::InnerDefinition => "Q025",
            Fault::TooDeep | Fault::DefinitionsTooDeep => "Q026",
            Fault::TooMany => "Q027",
            Fault::UnknownFunction(_) | Fault::FunctionArguments(_) | Fault::Caret => "Q029",
            Fault::Parameters { .. } | Fault::QubitsExpected | Fault::BitParameter => "Q030",
            Fault::NotConstant(_) => "Q031",
            Fault::NoQubits(_) | Fault::NotInGate | Fault::IndexInGate(_) => "Q032",
            Fault::NotAGate(_) => "Q033",
            Fault::NoReturn | Fault::NoValue | Fault::ReturnValue => "Q034",
            Fault::EarlyReturn | Fault::OutsideReturn => "Q034",
            Fault::Ambiguous(_) => "Q035",
        })
    }

    fn help(&self) -> Option<String> {
        let text = match self {
            Fault::Unexpected { expected, .. } if expected.iter().any(|token| token == "`;`") => {
                "perhaps a `;` is missing before it"
            }
            Fault::Unexpected { found, .. } if found.starts_with("`if`") || found.starts_with("`for`") => {
                "put it in `{` and `}`"
            }
            Fault::UnknownStatement(word) => return why_unknown(word).map(str::to_owned),
            Fault::LateVersion => "move it to the top, and keep one only",
            Fault::Include(_, known) => return Some(format!("only {known} is known in this version")),
            Fault::NotIncluded(_, file) => return Some(format!("add `include \"{file}\";` after the version")),
            Fault::UnsupportedGate(_) => "define it with `gate`",
            Fault::Undeclared(_) => "declare it before its first use: `qubit[4] q;` or `bit[4] c;`",
            Fault::Quotient => "readers differ on whether it is rounded: write one of them with a point, as in `1.0/2`",
            Fault::Caret => "write `**`",
            Fault::Pow => "a root has more than one value: name the gate that is meant",
            Fault::NegctrlCount => "write `negctrl @` once for each control",
            Fault::WideTest(_) => "a gate may depend on one measured bit: name one element, as in `c[0]`",
            Fault::NestedTest | Fault::SeveralTests => "a gate may depend on one measured bit",
            Fault::Unwritten => "write `c[0] = measure q[0];`",
            Fault::Repeated(_) => "a gate needs distinct qubits",
            Fault::NoReturn | Fault::ReturnValue => "end it with `return measure q;`",
            Fault::Ambiguous(_) => "copies of qelib1.inc differ by a phase of the control: write its definition out",
            _ => return None,
        };
        Some(text.to_owned())
    }

    /// The diagnostic for this mistake at this place.
    pub(super) fn to_diagnostic(&self, file: FileId, place: Place) -> Diagnostic {
        let span = |place: Place| Span { file, lo: place.lo, hi: place.hi };
        let mut diagnostic = Diagnostic::error(self.code(), self.to_string()).at(span(place), "");
        match self {
            Fault::Unexpected { found, expected } => {
                diagnostic = diagnostic.found(found.clone()).expected(alternatives(expected));
            }
            Fault::UnexpectedEnd { expected } => {
                diagnostic = diagnostic.found("the end of the text").expected(alternatives(expected));
            }
            Fault::Redeclared { first: Some(first), .. } => {
                diagnostic = diagnostic.at(span(*first), "first declared here")
            }
            _ => {}
        }
        match self.help() {
            Some(help) => diagnostic.help(help),
            None => diagnostic,
        }
    }
}

/// Why a statement of the language is not read.
fn why_unknown(word: &str) -> Option<&'static str> {
    Some(match word {
        "while" | "break" | "continue" | "end" => "how many gates there are must not depend on the run; use `for`",
        "switch" => "use `if` on one measured bit",
        "input" => "all values must be in the file; --iterations N of `simulate` and `audit` gives a search its number",
        "output" => "what is measured is what comes out",
        "int" | "uint" | "float" | "angle" | "bool" | "complex" | "array" => "only constants are known: write `const`",
        "box" | "delay" | "nop" | "duration" | "stretch" => "time has no meaning here",
        "opaque" | "extern" | "cal" | "defcal" | "defcalgrammar" => "what it does is not in the file",
        _ => return None,
    })
}

/// `a`, `a or b`, `a, b or c`.
fn alternatives(items: &[String]) -> String {
    match items {
        [] => "nothing more".to_owned(),
        [one] => one.clone(),
        [most @ .., last] => format!("{} or {last}", most.join(", ")),
    }
}
