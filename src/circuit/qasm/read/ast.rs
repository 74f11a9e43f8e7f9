//! What was written, before it means anything: statements with their places.
//!
//! Operands, modifiers and expressions lie flat in pools ([`Ast`]); an expression is a run of [`Step`]s in postfix
//! order, so that nothing here recurses but blocks, whose nesting the lexer limits.

use std::ops::Range;

/// A range of bytes of the text.
#[derive(Clone, Copy, PartialEq, Eq, PartialOrd, Ord, Debug)]
pub(super) struct Place {
    pub(super) lo: u32,
    pub(super) hi: u32,
}

/// A name where it stands.
#[derive(Clone, Copy, Debug)]
pub(super) struct Name<'a> {
    pub(super) text: &'a str,
    pub(super) place: Place,
}

/// One step of a constant expression in postfix order.
#[derive(Clone, Copy, PartialEq, Debug)]
pub(super) enum Step<'a> {
    Whole(i64),
    Real(f64),
    Name(&'a str),
    Add,
    Subtract,
    Multiply,
    Divide,
    Remainder,
    Power,
    /// `^`: a power in version 2, something else in version 3.
    Caret,
    Negate,
    /// A function, applied to so many values.
    Apply(&'a str, u32),
    /// An element of a register, in [`Ast::elements`]: it is no constant.
    Element(u32),
}

/// An expression: a run of steps.
#[derive(Clone, Copy, Debug)]
pub(super) struct Expr {
    pub(super) start: u32,
    pub(super) end: u32,
    pub(super) place: Place,
}

/// Which elements of a register.
#[derive(Clone, Copy, Debug)]
pub(super) enum Index {
    Whole,
    At(Expr),
    Span(Span),
    /// In [`Ast::members`].
    Set(Start),
}

/// A run in a pool; like a range, but to be copied.
#[derive(Clone, Copy, Debug)]
pub(super) struct Start {
    pub(super) start: u32,
    pub(super) end: u32,
}

/// `start:stop` or `start:step:stop`; both ends belong to it.
#[derive(Clone, Copy, Debug)]
pub(super) struct Span {
    pub(super) start: Expr,
    pub(super) step: Option<Expr>,
    pub(super) stop: Expr,
}

/// A register, or elements of it.
#[derive(Clone, Copy, Debug)]
pub(super) struct Operand<'a> {
    pub(super) name: &'a str,
    pub(super) index: Index,
    pub(super) place: Place,
}

/// A modifier of a gate.
#[derive(Clone, Copy, Debug)]
pub(super) enum Change {
    Ctrl(Option<Expr>),
    Negctrl(Option<Expr>),
    Inv,
    Pow(Expr),
}

/// A modifier where it stands.
#[derive(Clone, Copy, Debug)]
pub(super) struct Modifier {
    pub(super) change: Change,
    pub(super) place: Place,
}

/// A gate call.
#[derive(Clone, Debug)]
pub(super) struct Call<'a> {
    pub(super) gate: Name<'a>,
    /// In [`Ast::modifiers`], outermost first.
    pub(super) modifiers: Range<u32>,
    /// In [`Ast::arguments`].
    pub(super) arguments: Range<u32>,
    /// In [`Ast::operands`].
    pub(super) operands: Range<u32>,
}

/// What measured bits are compared with.
#[derive(Clone, Copy, Debug)]
pub(super) enum Compared<'a> {
    Truth(bool),
    Number(Expr),
    Text(&'a str, Place),
}

/// Measured bits, and what they must be (or, `negated`, must not be); without a value, true.
#[derive(Clone, Copy, Debug)]
pub(super) struct Test<'a> {
    pub(super) bits: Operand<'a>,
    pub(super) value: Option<Compared<'a>>,
    pub(super) negated: bool,
}

/// `if`, with what is done where the test holds and where it does not.
#[derive(Clone, Debug)]
pub(super) struct If<'a> {
    pub(super) test: Test<'a>,
    pub(super) then: Vec<Statement<'a>>,
    pub(super) otherwise: Vec<Statement<'a>>,
}

/// What a loop runs over.
#[derive(Clone, Copy, Debug)]
pub(super) enum Over {
    Span(Span),
    /// In [`Ast::members`].
    Set(Start),
}

/// `for` over integers.
#[derive(Clone, Debug)]
pub(super) struct For<'a> {
    pub(super) variable: Name<'a>,
    pub(super) over: Over,
    pub(super) body: Vec<Statement<'a>>,
    /// The steps of all expressions in the body.
    pub(super) steps: Range<u32>,
}

/// The type of a constant.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub(super) enum Type {
    Int,
    Uint,
    Float,
    Angle,
}

/// `gate`.
#[derive(Clone, Debug)]
pub(super) struct GateDefinition<'a> {
    pub(super) name: Name<'a>,
    pub(super) angles: Vec<Name<'a>>,
    pub(super) qubits: Vec<Name<'a>>,
    pub(super) body: Vec<Statement<'a>>,
}

/// What a subroutine is given.
#[derive(Clone, Copy, Debug)]
pub(super) enum Given {
    Qubits(Option<Expr>),
    Constant(Type, Option<Expr>),
    Bits,
}

/// `def`.
#[derive(Clone, Debug)]
pub(super) struct Subroutine<'a> {
    pub(super) name: Name<'a>,
    pub(super) parameters: Vec<(Given, Name<'a>)>,
    pub(super) returns: bool,
    pub(super) body: Vec<Statement<'a>>,
}

/// Where the value of measured bits comes from.
#[derive(Clone, Debug)]
pub(super) enum Source<'a> {
    Measure(Operand<'a>),
    Call(Call<'a>),
}

/// A statement.
#[derive(Clone, Debug)]
pub(super) enum Kind<'a> {
    Version(&'a str),
    Include(&'a str),
    Qubits(Name<'a>, Option<Expr>),
    /// The register, its size, and what is written into it at once.
    Bits(Name<'a>, Option<Expr>, Option<Source<'a>>),
    /// A name for elements of registers, in [`Ast::operands`].
    Let(Name<'a>, Range<u32>),
    Const(Type, Option<Expr>, Name<'a>, Expr),
    Gate(Box<GateDefinition<'a>>),
    Subroutine(Box<Subroutine<'a>>),
    Call(Call<'a>),
    /// The bits that are written, if any, and from what.
    Write(Option<Operand<'a>>, Source<'a>),
    /// `return`: nothing, or a measurement.
    Return(Option<Operand<'a>>),
    /// `return` of something else.
    ReturnValue,
    Reset(Operand<'a>),
    Barrier(Range<u32>),
    If(Box<If<'a>>),
    For(Box<For<'a>>),
    /// Something that was reported already.
    Nothing,
}

/// A statement where it stands.
#[derive(Clone, Debug)]
pub(super) struct Statement<'a> {
    pub(super) kind: Kind<'a>,
    pub(super) place: Place,
}

/// The pools that statements point into.
#[derive(Default, Debug)]
pub(super) struct Ast<'a> {
    pub(super) steps: Vec<Step<'a>>,
    pub(super) arguments: Vec<Expr>,
    pub(super) operands: Vec<Operand<'a>>,
    pub(super) modifiers: Vec<Modifier>,
    pub(super) elements: Vec<Operand<'a>>,
    pub(super) members: Vec<Expr>,
}

impl<'a> Ast<'a> {
    /// An expression of one step.
    pub(super) fn leaf(&mut self, step: Step<'a>, lo: u32, hi: u32) -> Expr {
        let start = self.steps.len() as u32;
        self.steps.push(step);
        Expr { start, end: start + 1, place: Place { lo, hi } }
    }

    /// An operator after its operands, the first of which is `first`.
    pub(super) fn apply(&mut self, step: Step<'a>, first: Expr, lo: u32, hi: u32) -> Expr {
        self.steps.push(step);
        Expr { start: first.start, end: self.steps.len() as u32, place: Place { lo, hi } }
    }

    /// An element of a register, as an expression.
    pub(super) fn element(&mut self, operand: Operand<'a>) -> Expr {
        self.elements.push(operand);
        let step = Step::Element(self.elements.len() as u32 - 1);
        self.leaf(step, operand.place.lo, operand.place.hi)
    }

    /// A function of these values, which were read just before.
    pub(super) fn function(&mut self, name: &'a str, values: &[Expr], lo: u32, hi: u32) -> Expr {
        let start = values.first().map_or(self.steps.len() as u32, |first| first.start);
        self.steps.push(Step::Apply(name, values.len() as u32));
        Expr { start, end: self.steps.len() as u32, place: Place { lo, hi } }
    }

    /// A set of expressions.
    pub(super) fn set(&mut self, members: &[Expr]) -> Start {
        let start = self.members.len() as u32;
        self.members.extend_from_slice(members);
        Start { start, end: self.members.len() as u32 }
    }

    /// A whole number; `None` where it is beyond 64 bits.
    pub(super) fn whole(&mut self, text: &str, lo: u32, hi: u32) -> (Expr, bool) {
        let digits = text.replace('_', "");
        let value = match digits.get(..2) {
            Some("0x" | "0X") => i64::from_str_radix(&digits[2..], 16),
            Some("0b" | "0B") => i64::from_str_radix(&digits[2..], 2),
            Some("0o" | "0O") => i64::from_str_radix(&digits[2..], 8),
            _ => digits.parse(),
        };
        let fits = value.is_ok();
        (self.leaf(Step::Whole(value.unwrap_or(0)), lo, hi), fits)
    }

    /// A real number; not finite where it is beyond the range of doubles.
    pub(super) fn real(&mut self, text: &str, lo: u32, hi: u32) -> Expr {
        let value = text.replace('_', "").parse().unwrap_or(f64::INFINITY);
        self.leaf(Step::Real(value), lo, hi)
    }

    /// Appends an operand to the run that began with `run`.
    pub(super) fn operand(&mut self, run: Option<Range<u32>>, operand: Operand<'a>) -> Range<u32> {
        append(&mut self.operands, run, operand)
    }

    /// Appends an argument to the run that began with `run`.
    pub(super) fn argument(&mut self, run: Option<Range<u32>>, argument: Expr) -> Range<u32> {
        append(&mut self.arguments, run, argument)
    }

    /// Appends a modifier to the run that began with `run`.
    pub(super) fn modifier(&mut self, run: Option<Range<u32>>, modifier: Modifier) -> Range<u32> {
        append(&mut self.modifiers, run, modifier)
    }
}

fn append<T>(pool: &mut Vec<T>, run: Option<Range<u32>>, item: T) -> Range<u32> {
    let start = run.map_or(pool.len() as u32, |run| run.start);
    pool.push(item);
    start..pool.len() as u32
}
