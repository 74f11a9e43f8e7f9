//! Statements to a circuit: what the names mean, whether operands are in range, what is repeated how often.
//!
//! One mistake a statement is reported; a statement with a mistake adds nothing, and reading goes on behind it.

mod call;
mod constant;
mod flow;
mod gates;
mod operand;

use rustc_hash::{FxHashMap, FxHashSet};

use self::constant::Variables;
use self::operand::{Declared, Sort};
use super::MAX_MISTAKES;
use super::ast::{Ast, Expr, Kind, Name, Operand, Place, Statement};
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

type Checked<T = ()> = Result<T, (Place, Fault)>;

/// The circuit, and what is wrong with it.
pub(super) fn build(parsed: &Parsed<'_>) -> (Circuit, Vec<(Place, Fault)>) {
    let mut builder = Builder {
        ast: &parsed.ast,
        circuit: Circuit::new(),
        names: FxHashMap::default(),
        excused: parsed.excused.iter().copied().collect(),
        variables: Variables::default(),
        measured: Vec::new(),
        has_library: false,
        condition: None,
        depth: 0,
        repeating: false,
        controls: 0,
        turns: 0,
        faults: Vec::new(),
        scratch: call::Scratch::default(),
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
    names: FxHashMap<&'a str, Declared>,
    /// Names that a statement with a mistake may have declared.
    excused: FxHashSet<&'a str>,
    variables: Variables<'a>,
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
    scratch: call::Scratch,
}

impl<'a, 'p> Builder<'a, 'p> {
    fn statement(&mut self, statement: &'p Statement<'a>) {
        if let Err((place, fault)) = self.meaning(statement) {
            let excused = matches!(&fault, Fault::Undeclared(name) | Fault::UnknownGate(name) if self.excused.contains(name.as_str()));
            if !excused {
                self.faults.push((place, fault));
            }
        }
    }

    fn meaning(&mut self, statement: &'p Statement<'a>) -> Checked {
        let place = statement.place;
        match &statement.kind {
            Kind::Version(version) => match version.split('.').next() {
                Some("3") => Ok(()),
                _ => Err((place, Fault::Version((*version).to_owned()))),
            },
            Kind::Include(file) => match file.trim_matches(['"', '\'']) {
                "stdgates.inc" => {
                    self.has_library = true;
                    Ok(())
                }
                other => Err((place, Fault::Include(other.to_owned()))),
            },
            Kind::Qubits(name, size) => self.declare(Sort::Qubit, *name, *size, place).map(|_| ()),
            Kind::Bits(name, size, from) => self.bits(*name, *size, *from, place),
            Kind::Call(call) => self.call(call, place),
            Kind::Measure(from, Some(into)) => self.measure(*from, *into, place),
            Kind::Measure(_, None) => Err((place, Fault::Unwritten)),
            Kind::Reset(operand) => self.reset(*operand, place),
            Kind::Barrier(operands) => {
                let operands = &self.ast.operands[operands.start as usize..operands.end as usize];
                operands.iter().try_for_each(|operand| self.resolve(Sort::Qubit, operand).map(|_| ()))
            }
            Kind::If(choice) => self.choose(choice),
            Kind::For(repeat) => self.repeat(repeat, place),
            Kind::Nothing => Ok(()),
        }
    }

    /// Declares a register. Where the size is wrong the name is known all the same, so that one mistake is one message.
    fn declare(&mut self, sort: Sort, name: Name<'a>, size: Option<Expr>, place: Place) -> Checked<Declared> {
        if self.depth > 0 {
            self.excused.insert(name.text);
            return Err((place, Fault::InnerDeclaration));
        }
        let first = self.names.get(name.text).map(|declared| declared.place);
        if first.is_some() || self.has_library && gates::library(name.text).is_some() {
            return Err((name.place, Fault::Redeclared { name: name.text.to_owned(), first }));
        }
        let declared = self.place_register(sort, name, size);
        if declared.is_err() {
            self.excused.insert(name.text);
        }
        declared
    }

    fn place_register(&mut self, sort: Sort, name: Name<'a>, size: Option<Expr>) -> Checked<Declared> {
        let (len, at) = match size {
            None => (1, name.place),
            Some(expr) => {
                let len = constant::whole(self.ast, &self.variables, expr).map_err(|fault| (expr.place, fault))?;
                (len, expr.place)
            }
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
        let declared = Declared { sort, start: start as u32, len: len as u32, place: name.place };
        self.names.insert(name.text, declared);
        Ok(declared)
    }

    fn bits(&mut self, name: Name<'a>, size: Option<Expr>, from: Option<Operand<'a>>, place: Place) -> Checked {
        self.declare(Sort::Bit, name, size, place)?;
        match from {
            None => Ok(()),
            Some(from) => {
                let into = Operand { name: name.text, index: super::ast::Index::Whole, place: name.place };
                self.measure(from, into, place)
            }
        }
    }

    fn measure(&mut self, from: Operand<'a>, into: Operand<'a>, place: Place) -> Checked {
        let qubits = self.resolve(Sort::Qubit, &from)?;
        let bits = self.resolve(Sort::Bit, &into)?;
        if qubits.len != bits.len {
            return Err((place, Fault::Lengths(qubits.len, bits.len)));
        }
        self.room(u64::from(qubits.len), 0, place)?;
        let tested = self.condition.map(|condition| condition.bit().index() as u32);
        if let Some(bit) = bits.iter().find(|&bit| Some(bit) == tested) {
            let name = self.circuit.measured_name(MeasuredId::new(bit as usize));
            return Err((into.place, Fault::TestChanged(name)));
        }
        for (qubit, bit) in qubits.iter().zip(bits.iter()) {
            self.circuit.push_measure(self.condition, QubitId::new(qubit as usize), MeasuredId::new(bit as usize));
            self.measured[bit as usize] = true;
        }
        Ok(())
    }

    fn reset(&mut self, operand: Operand<'a>, place: Place) -> Checked {
        let qubits = self.resolve(Sort::Qubit, &operand)?;
        self.room(u64::from(qubits.len), 0, place)?;
        for qubit in qubits.iter() {
            self.circuit.push_if(self.condition, Op::Reset, &[], QubitId::new(qubit as usize));
        }
        Ok(())
    }

    /// Whether so many more gates, with so many controls together, are within the limits.
    fn room(&mut self, gates: u64, controls: u64, place: Place) -> Checked {
        if self.circuit.gates().len() as u64 + gates > MAX_GATES {
            return Err((place, Fault::Limit { what: "the number of gates", most: MAX_GATES }));
        }
        self.controls += controls;
        if self.controls > MAX_CONTROLS {
            return Err((place, Fault::Limit { what: "the number of controls", most: MAX_CONTROLS }));
        }
        Ok(())
    }
}
