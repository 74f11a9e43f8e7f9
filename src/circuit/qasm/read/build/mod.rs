//! Statements to a circuit: what the names mean, whether operands are in range, what is repeated how often.
//!
//! One mistake a statement is reported; a statement with a mistake adds nothing, and reading goes on behind it.

mod call;
mod constant;
mod define;
mod emit;
mod flow;
mod gates;
mod operand;
mod scope;
mod subroutine;

use std::ops::Range;

use rustc_hash::FxHashSet;

use self::constant::Value;
use self::operand::Lanes;
use self::scope::{Meaning, Scope, Sort};
use super::MAX_MISTAKES;
use super::ast::{Ast, Expr, Index, Kind, Name, Operand, Place, Source, Statement, Type};
use super::fault::Fault;
use super::parse::Parsed;
use crate::circuit::{Circuit, Condition, MeasuredId, Op, QubitId};
use crate::id::Id;

/// Qubits, or measured bits, of one file.
const MAX_REGISTER_ELEMENTS: u64 = 1 << 24;
/// Gates of one file, after broadcasts and loops that must be unrolled.
const MAX_GATES: u64 = 1 << 25;
/// Turns of all loops that must be unrolled.
const MAX_TURNS: u64 = 1 << 20;
/// Controls of all these gates together.
const MAX_CONTROLS: u64 = 1 << 28;
/// Calls of gates and subroutines that the file defines.
const MAX_EXPANSIONS: u64 = 1 << 23;
/// How deep such calls go, brackets included.
const MAX_DEPTH: usize = 64;

type Checked<T = ()> = Result<T, (Place, Fault)>;

/// The circuit, and what is wrong with it.
pub(super) fn build(parsed: &Parsed<'_>) -> (Circuit, Vec<(Place, Fault)>) {
    let mut builder = Builder {
        ast: &parsed.ast,
        circuit: Circuit::new(),
        scope: Scope::default(),
        excused: parsed.excused.iter().copied().collect(),
        listed: Vec::new(),
        gates: Vec::new(),
        subroutines: Vec::new(),
        destination: None,
        checking: false,
        deepest: 0,
        calls: 0,
        expansions: 0,
        measured: Vec::new(),
        has_library: false,
        condition: None,
        depth: 0,
        repeating: false,
        controls: 0,
        turns: 0,
        faults: Vec::new(),
        scratches: Vec::new(),
    };
    for (at, statement) in parsed.statements.iter().enumerate() {
        if let (Kind::Version(_), true) = (&statement.kind, at > 0) {
            builder.faults.push((statement.place, Fault::LateVersion));
            continue;
        }
        builder.statement(statement);
        if builder.faults.len() > MAX_MISTAKES {
            break;
        }
    }
    (builder.circuit, builder.faults)
}

struct Builder<'a, 'p> {
    ast: &'p Ast<'a>,
    circuit: Circuit,
    scope: Scope<'a>,
    /// Names that a statement with a mistake may have declared.
    excused: FxHashSet<&'a str>,
    /// Elements of aliases that are no plain ranges.
    listed: Vec<u32>,
    gates: Vec<define::Defined<'a, 'p>>,
    subroutines: Vec<subroutine::Known<'a, 'p>>,
    /// Where the value of the subroutine at hand goes, and the place of that.
    destination: Option<(Lanes, Place)>,
    /// Whether a definition is checked: nothing is appended, and angles have no values.
    checking: bool,
    /// How deep the definition at hand goes.
    deepest: usize,
    /// How many calls of definitions it makes.
    calls: u64,
    /// Calls of definitions so far.
    expansions: u64,
    /// For each measured bit, whether it was measured.
    measured: Vec<bool>,
    has_library: bool,
    /// The condition in force.
    condition: Option<Condition>,
    /// How many brackets are open.
    depth: usize,
    /// Whether the gates are those of a repeated block, in which there is no other.
    repeating: bool,
    /// Controls of all gates so far.
    controls: u64,
    /// Turns of all loops that are unrolled.
    turns: u64,
    faults: Vec<(Place, Fault)>,
    scratches: Vec<call::Scratch>,
}

impl<'a, 'p> Builder<'a, 'p> {
    fn statement(&mut self, statement: &'p Statement<'a>) {
        if let Err((place, fault)) = self.meaning(statement) {
            self.report(place, fault);
        }
    }

    fn report(&mut self, place: Place, fault: Fault) {
        let excused = match &fault {
            Fault::Undeclared(name) | Fault::UnknownGate(name) => self.excused.contains(name.as_str()),
            _ => false,
        };
        // A mistake in a definition is met again by every call.
        if !excused && !self.faults.iter().any(|known| known.0 == place && known.1 == fault) {
            self.faults.push((place, fault));
        }
    }

    fn meaning(&mut self, statement: &'p Statement<'a>) -> Checked {
        let place = statement.place;
        match &statement.kind {
            Kind::Version(version) => self.version(version, place),
            Kind::Include(file) => self.include(file, place),
            Kind::Qubits(name, size) => self.register(Sort::Qubit, *name, *size, place).map(|_| ()),
            Kind::Bits(name, size, from) => self.bits(*name, *size, from.as_ref(), place),
            Kind::Let(name, joined) => self.alias(*name, joined),
            Kind::Const(kind, size, name, value) => self.constant(*kind, *size, *name, *value),
            Kind::Gate(definition) => self.define_gate(definition),
            Kind::Subroutine(definition) => self.define_subroutine(definition),
            Kind::Call(call) => self.call(call, place),
            Kind::Write(into, from) => self.write(into.as_ref(), from, place),
            Kind::Return(value) => self.leave(value.as_ref(), place),
            Kind::ReturnValue => Err((place, Fault::OutsideReturn)),
            Kind::Reset(operand) => self.reset(*operand, place),
            Kind::Barrier(operands) => self.check_barrier(operands),
            Kind::If(choice) => self.choose(choice),
            Kind::For(repeat) => self.repeat(repeat, place),
            Kind::Nothing => Ok(()),
        }
    }

    fn version(&mut self, version: &str, place: Place) -> Checked {
        match version.split('.').next() {
            Some("3") => Ok(()),
            _ if matches!(version, "2.0" | "2") => {
                self.scope.is_old = true;
                Ok(())
            }
            _ => Err((place, Fault::Version(version.to_owned()))),
        }
    }

    fn library_name(&self) -> &'static str {
        if self.scope.is_old { "qelib1.inc" } else { "stdgates.inc" }
    }

    fn include(&mut self, file: &str, place: Place) -> Checked {
        let file = file.trim_matches(['"', '\'']);
        if file != self.library_name() {
            return Err((place, Fault::Include(file.to_owned(), self.library_name())));
        }
        self.has_library = true;
        let taken = self.scope.global_names(|name| gates::library(name, self.scope.is_old).is_some());
        match taken.first() {
            Some(&(name, first)) => Err((place, Fault::Redeclared { name: name.to_owned(), first: Some(first) })),
            None => Ok(()),
        }
    }

    /// An integer.
    fn integer(&self, expr: Expr) -> Checked<i64> {
        constant::whole(self.ast, &self.scope, expr).map_err(|fault| (expr.place, fault))
    }

    /// Whether a name may be declared here.
    fn check_name(&self, name: Name<'a>) -> Checked {
        let text = name.text;
        let first = self.scope.declared(text, self.depth > 0);
        let is_library = self.has_library && gates::library(text, self.scope.is_old).is_some();
        let is_built_in = gates::built_in(text, self.scope.is_old).is_some() || matches!(text, "pi" | "π");
        match first.is_some() || self.depth == 0 && is_library || is_built_in {
            true => Err((name.place, Fault::Redeclared { name: text.to_owned(), first })),
            false => Ok(()),
        }
    }

    /// Declares a register, and says whether that was possible. Where the size is wrong the name is known all the same, so
    /// that one mistake is one message.
    fn register(&mut self, sort: Sort, name: Name<'a>, size: Option<Expr>, place: Place) -> Checked<bool> {
        if self.depth > 0 {
            self.excused.insert(name.text);
            return Err((place, Fault::InnerDeclaration));
        }
        self.check_name(name)?;
        match self.place_register(sort, name, size) {
            Ok(()) => Ok(true),
            Err(mistake) => self.excuse(name, mistake).map(|()| false),
        }
    }

    /// Reports why a name has no meaning; using it is then no further mistake.
    fn excuse(&mut self, name: Name<'a>, (place, fault): (Place, Fault)) -> Checked {
        self.report(place, fault);
        self.excused.insert(name.text);
        Ok(())
    }

    fn place_register(&mut self, sort: Sort, name: Name<'a>, size: Option<Expr>) -> Checked {
        let (len, at) = match size {
            None => (1, name.place),
            Some(expr) => (self.integer(expr)?, expr.place),
        };
        let start = match sort {
            Sort::Qubit => self.circuit.qubit_count(),
            Sort::Bit => self.circuit.measured_count(),
        } as u64;
        let len = u64::try_from(len).ok().filter(|&len| len > 0).ok_or((at, Fault::Size(len.to_string())))?;
        if len > MAX_REGISTER_ELEMENTS - start {
            let what = if sort == Sort::Qubit { "the number of qubits" } else { "the number of bits" };
            return Err((at, Fault::Limit { what, most: MAX_REGISTER_ELEMENTS }));
        }
        match sort {
            Sort::Qubit => self.circuit.add_qubits(name.text, len as usize).len(),
            Sort::Bit => self.circuit.add_measured(name.text, len as usize).len(),
        };
        if sort == Sort::Bit {
            self.measured.resize((start + len) as usize, false);
        }
        let lanes = Lanes::run(start as u32, len as u32);
        self.scope.declare(name, Meaning::Elements(sort, lanes), false);
        Ok(())
    }

    fn bits(&mut self, name: Name<'a>, size: Option<Expr>, from: Option<&'p Source<'a>>, place: Place) -> Checked {
        let is_known = self.register(Sort::Bit, name, size, place)?;
        match from {
            Some(from) if is_known => {
                let into = Operand { name: name.text, index: Index::Whole, place: name.place };
                self.write(Some(&into), from, place)
            }
            _ => Ok(()),
        }
    }

    /// A name for elements of one or more registers.
    fn alias(&mut self, name: Name<'a>, joined: &Range<u32>) -> Checked {
        self.check_name(name)?;
        match self.joined(name, joined) {
            Ok((sort, lanes)) => {
                self.scope.declare(name, Meaning::Elements(sort, lanes), self.depth > 0);
                Ok(())
            }
            Err(mistake) => self.excuse(name, mistake),
        }
    }

    fn joined(&mut self, name: Name<'a>, joined: &Range<u32>) -> Checked<(Sort, Lanes)> {
        let operands = &self.ast.operands[joined.start as usize..joined.end as usize];
        let (sort, _) = self.whole_operand(&operands[0])?;
        let lanes = match operands {
            [one] => self.resolve(sort, one)?,
            _ => {
                let mut all = Vec::new();
                for operand in operands {
                    let lanes = self.resolve(sort, operand)?;
                    all.extend(self.elements(lanes));
                }
                self.list(&all, name.place)?
            }
        };
        Ok((sort, lanes))
    }

    fn constant(&mut self, kind: Type, size: Option<Expr>, name: Name<'a>, value: Expr) -> Checked {
        self.check_name(name)?;
        match self.constant_value(kind, size, value) {
            Ok(value) => {
                self.scope.declare(name, Meaning::Value(value), self.depth > 0);
                Ok(())
            }
            Err(mistake) => self.excuse(name, mistake),
        }
    }

    fn constant_value(&mut self, kind: Type, size: Option<Expr>, value: Expr) -> Checked<Value> {
        let size = size.map(|size| self.integer(size)).transpose()?;
        let fail = |fault| (value.place, fault);
        let value = constant::value(self.ast, &self.scope, value).map_err(fail)?;
        constant::cast(value, kind, size).map_err(fail)
    }

    /// Bits that are written by a measurement, or by a subroutine that ends with one.
    fn write(&mut self, into: Option<&Operand<'a>>, from: &'p Source<'a>, place: Place) -> Checked {
        match (from, into) {
            (Source::Measure(_), None) => Err((place, Fault::Unwritten)),
            (Source::Measure(from), Some(into)) => {
                let qubits = self.resolve(Sort::Qubit, from)?;
                let bits = self.resolve(Sort::Bit, into)?;
                self.measure(qubits, bits, into.place, place)
            }
            (Source::Call(call), into) => match self.scope.get(call.gate.text) {
                Some(Meaning::Subroutine(number)) => self.enter(number, call, into, place),
                _ => {
                    self.gate(call.gate)?;
                    Err((call.gate.place, Fault::NoValue))
                }
            },
        }
    }

    fn measure(&mut self, qubits: Lanes, bits: Lanes, into: Place, place: Place) -> Checked {
        if qubits.len != bits.len {
            return Err((place, Fault::Lengths(qubits.len, bits.len)));
        }
        self.room(u64::from(qubits.len), 0, place)?;
        let tested = self.condition.map(|condition| condition.bit().index() as u32);
        if let Some(bit) = self.elements(bits).find(|&bit| Some(bit) == tested) {
            let name = self.circuit.measured_name(MeasuredId::new(bit as usize));
            return Err((into, Fault::TestChanged(name)));
        }
        for at in 0..qubits.len {
            let (qubit, bit) = (self.element(qubits, at) as usize, self.element(bits, at) as usize);
            self.circuit.push_measure(self.condition, QubitId::new(qubit), MeasuredId::new(bit));
            self.measured[bit] = true;
        }
        Ok(())
    }

    fn reset(&mut self, operand: Operand<'a>, place: Place) -> Checked {
        let qubits = self.resolve(Sort::Qubit, &operand)?;
        self.room(u64::from(qubits.len), 0, place)?;
        for at in 0..qubits.len {
            let qubit = QubitId::new(self.element(qubits, at) as usize);
            self.circuit.push_if(self.condition, Op::Reset, &[], qubit);
        }
        Ok(())
    }

    fn check_barrier(&mut self, operands: &Range<u32>) -> Checked {
        let operands = &self.ast.operands[operands.start as usize..operands.end as usize];
        operands.iter().try_for_each(|operand| self.resolve(Sort::Qubit, operand).map(|_| ()))
    }

    /// Whether so many more gates, with so many controls together, are within the limits.
    fn room(&mut self, gates: u64, controls: u64, place: Place) -> Checked {
        if (self.circuit.gates().len() as u64).saturating_add(gates) > MAX_GATES {
            return Err((place, Fault::Limit { what: "the number of gates", most: MAX_GATES }));
        }
        self.controls = self.controls.saturating_add(controls);
        if self.controls > MAX_CONTROLS {
            return Err((place, Fault::Limit { what: "the number of controls", most: MAX_CONTROLS }));
        }
        Ok(())
    }
}
