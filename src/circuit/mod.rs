//! Circuits: gates over qubits and measured bits, as plain data.
//!
//! A [`Circuit`] is a list of blocks; a block is a run of gates that is applied a number of times (the loop of a search).
//! A [`Gate`] is 24 bytes; its controls lie in a pool. Every unitary gate may have any number of controls of either
//! polarity, and every gate may depend on one measured bit. Which of these a level allows is said in [`level`].
//!
//! The text form is OpenQASM: [`qasm::write`] and [`qasm::read`], neither of which imports the other.

pub mod bounds;
mod copy;
pub mod figures;
pub mod level;
pub mod product;
pub mod qasm;
pub mod registers;
pub mod tidy;

use std::num::NonZeroU32;
use std::ops::Range;

pub use bounds::Bounds;
pub use figures::Figures;
pub use level::Level;
pub use product::Product;

use crate::define_id;
use crate::id::{ConstraintId, Id, IdVec};

define_id! {
    /// A qubit; registers number theirs one after the other.
    QubitId, "q"
}
define_id! {
    /// A measured bit; registers number theirs one after the other.
    MeasuredId, "m"
}

/// What a gate does to its target (where all its controls hold).
#[derive(Clone, Copy, PartialEq, Eq, PartialOrd, Ord, Hash, Debug)]
#[repr(u8)]
pub enum Op {
    /// Flips the target.
    X,
    /// Multiplies by -1 where the target is 1.
    Z,
    /// Multiplies by i where the target is 1.
    S,
    /// The inverse of `S`.
    Sdg,
    /// Multiplies by e^(i pi/4) where the target is 1.
    T,
    /// The inverse of `T`.
    Tdg,
    /// The Hadamard gate.
    H,
    /// Multiplies by e^(i angle) where the target is 1.
    P,
    /// exp(-i angle Z / 2).
    Rz,
    /// exp(-i angle Y / 2).
    Ry,
    /// Measures the target in the computational basis into a bit.
    Measure,
    /// Puts the target into |0>.
    Reset,
}

impl Op {
    /// Whether this is a unitary gate.
    pub fn is_unitary(self) -> bool {
        !matches!(self, Op::Measure | Op::Reset)
    }

    /// The phase where the target is 1, in multiples of pi/4, of a diagonal gate without an angle. The judge has a table
    /// of its own, since it judges what is made with this one.
    pub fn eighths(self) -> Option<u8> {
        match self {
            Op::T => Some(1),
            Op::S => Some(2),
            Op::Z => Some(4),
            Op::Sdg => Some(6),
            Op::Tdg => Some(7),
            _ => None,
        }
    }

    /// The gates that turn by so many multiples of pi/4, fewer than 8.
    pub fn turning(eighths: u8) -> &'static [Op] {
        const TURNS: [&[Op]; 8] =
            [&[], &[Op::T], &[Op::S], &[Op::S, Op::T], &[Op::Z], &[Op::Z, Op::T], &[Op::Sdg], &[Op::Tdg]];
        TURNS[usize::from(eighths)]
    }

    /// Whether this has an angle.
    pub fn has_angle(self) -> bool {
        matches!(self, Op::P | Op::Rz | Op::Ry)
    }
}

/// A control: the gate acts where the qubit is 1, or where it is 0.
#[derive(Clone, Copy, PartialEq, Eq, PartialOrd, Ord, Hash)]
pub struct Control(u32);

impl Control {
    /// The control that holds where `qubit` is `value`.
    pub fn new(qubit: QubitId, value: bool) -> Self {
        assert!(qubit.index() < 1 << 31, "fewer than 2^31 qubits");
        Self((qubit.index() as u32) << 1 | u32::from(!value))
    }

    /// The control that holds where the qubit is 1.
    pub fn on(qubit: QubitId) -> Self {
        Self::new(qubit, true)
    }

    /// The qubit.
    pub fn qubit(self) -> QubitId {
        QubitId::new((self.0 >> 1) as usize)
    }

    /// Whether the control holds where the qubit is 0.
    pub fn is_negated(self) -> bool {
        self.0 & 1 == 1
    }
}

impl std::ops::Not for Control {
    type Output = Self;
    fn not(self) -> Self {
        Self(self.0 ^ 1)
    }
}

impl std::fmt::Debug for Control {
    fn fmt(&self, f: &mut std::fmt::Formatter<'_>) -> std::fmt::Result {
        write!(f, "{}{}", if self.is_negated() { "!" } else { "" }, self.qubit())
    }
}

/// A measured bit and the value it must have for a gate to be applied.
#[derive(Clone, Copy, PartialEq, Eq, Hash, Debug)]
pub struct Condition(NonZeroU32);

impl Condition {
    /// The gate is applied where `bit` was measured as `value`.
    pub fn new(bit: MeasuredId, value: bool) -> Self {
        let packed = (bit.index() as u32 + 1) << 1 | u32::from(value);
        Self(NonZeroU32::new(packed).expect("not zero: the index is raised by one"))
    }

    /// The measured bit.
    pub fn bit(self) -> MeasuredId {
        MeasuredId::new((self.0.get() >> 1) as usize - 1)
    }

    /// The value it must have.
    pub fn value(self) -> bool {
        self.0.get() & 1 == 1
    }
}

/// A gate.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub struct Gate {
    controls: u32,
    /// The index of an angle or of a measured bit, by `op`.
    argument: u32,
    target: QubitId,
    condition: Option<Condition>,
    control_count: u32,
    op: Op,
}

const _: () = assert!(size_of::<Gate>() <= 24);

impl Gate {
    /// What it does.
    pub fn op(&self) -> Op {
        self.op
    }

    /// The qubit it acts on.
    pub fn target(&self) -> QubitId {
        self.target
    }

    /// The measured bit it depends on, if it does.
    pub fn condition(&self) -> Option<Condition> {
        self.condition
    }

    /// How many controls.
    pub fn control_count(&self) -> usize {
        self.control_count as usize
    }

    /// The bit a measurement writes.
    pub fn measured(&self) -> Option<MeasuredId> {
        (self.op == Op::Measure).then(|| MeasuredId::new(self.argument as usize))
    }
}

/// A named run of qubits or of measured bits.
#[derive(Clone, PartialEq, Eq, Debug)]
pub struct Register {
    /// Its name.
    pub name: String,
    /// Its first qubit or bit.
    pub start: u32,
    /// Its size, at least 1.
    pub len: u32,
}

/// What a run of gates is for.
#[derive(Clone, Copy, PartialEq, Eq, Hash, Debug)]
pub enum Part {
    /// Prepares the start state.
    Prepare,
    /// Computes values into work qubits.
    Compute,
    /// Marks: flips the sign or the mark qubit.
    Mark,
    /// Undoes what was computed.
    Undo,
    /// Reflects about the start state.
    Reflect,
    /// Measures the result.
    Measure,
}

/// A run of gates with its purpose.
#[derive(Clone, PartialEq, Eq, Debug)]
pub struct Region {
    /// The gates.
    pub gates: Range<u32>,
    /// What they are for.
    pub part: Part,
    /// The constraint they serve, where it is one.
    pub constraint: Option<ConstraintId>,
}

/// A run of gates that is applied `repeat` times.
#[derive(Clone, PartialEq, Eq, Debug)]
pub struct Block {
    /// The gates.
    pub gates: Range<u32>,
    /// How often.
    pub repeat: u64,
}

/// The register that controls counted iterations, digit 0 first.
pub const COUNT: &str = "count";
/// The measured register of a counting.
pub const COUNTED: &str = "counted";

/// The `repeat` of a block that is applied as often as the input [`ITERATIONS`] of the file says when it is run.
pub const GIVEN: u64 = u64::MAX;
/// The name of that input.
pub const ITERATIONS: &str = "iterations";

/// A circuit.
#[derive(Clone, PartialEq, Debug, Default)]
pub struct Circuit {
    /// Registers of qubits in order; they cover all qubits.
    pub qubits: Vec<Register>,
    /// Registers of measured bits in order; they cover all measured bits.
    pub measured: Vec<Register>,
    /// What runs of gates are for; empty for a circuit that was read.
    pub regions: Vec<Region>,
    gates: Vec<Gate>,
    controls: Vec<Control>,
    angles: Vec<f64>,
    blocks: Vec<Block>,
}

/// The name of the register that is searched.
pub const SEARCH: &str = "search";
/// The name of the one-qubit register that a bit oracle writes.
pub const MARK: &str = "mark";
/// The name of the register of clean ancillas.
pub const WORK: &str = "work";
/// The name of the measured register of a whole search.
pub const FOUND: &str = "found";

impl Circuit {
    /// A circuit without qubits and gates.
    pub fn new() -> Self {
        Self::default()
    }

    /// Adds a register of qubits and returns its qubits; `len` is at least 1.
    pub fn add_qubits(&mut self, name: &str, len: usize) -> Vec<QubitId> {
        let start = self.qubit_count();
        self.qubits.push(Register { name: name.to_owned(), start: start as u32, len: len as u32 });
        (start..start + len).map(QubitId::new).collect()
    }

    /// Adds a register of measured bits and returns its bits; `len` is at least 1.
    pub fn add_measured(&mut self, name: &str, len: usize) -> Vec<MeasuredId> {
        let start = self.measured_count();
        self.measured.push(Register { name: name.to_owned(), start: start as u32, len: len as u32 });
        (start..start + len).map(MeasuredId::new).collect()
    }

    /// How many qubits.
    pub fn qubit_count(&self) -> usize {
        self.qubits.last().map_or(0, |last| (last.start + last.len) as usize)
    }

    /// How many measured bits.
    pub fn measured_count(&self) -> usize {
        self.measured.last().map_or(0, |last| (last.start + last.len) as usize)
    }

    /// The qubits of the register with this name, none where there is no such register.
    pub fn register(&self, name: &str) -> Vec<QubitId> {
        let found = self.qubits.iter().find(|register| register.name == name);
        found.map_or_else(Vec::new, |r| (r.start..r.start + r.len).map(|at| QubitId::new(at as usize)).collect())
    }

    /// Appends a gate without an angle that is not a measurement.
    pub fn push(&mut self, op: Op, controls: &[Control], target: QubitId) {
        self.push_if(None, op, controls, target);
    }

    /// Appends a gate that depends on a measured bit.
    pub fn push_if(&mut self, condition: Option<Condition>, op: Op, controls: &[Control], target: QubitId) {
        assert!(!op.has_angle() && op != Op::Measure, "{op:?} has an argument");
        self.append(condition, op, controls, target, 0);
    }

    /// Appends a gate with an angle.
    pub fn push_angle(
        &mut self,
        condition: Option<Condition>,
        op: Op,
        angle: f64,
        controls: &[Control],
        target: QubitId,
    ) {
        assert!(op.has_angle(), "{op:?} has no angle");
        self.angles.push(angle);
        self.append(condition, op, controls, target, self.angles.len() as u32 - 1);
    }

    /// Appends a measurement.
    pub fn push_measure(&mut self, condition: Option<Condition>, target: QubitId, into: MeasuredId) {
        self.append(condition, Op::Measure, &[], target, into.index() as u32);
    }

    fn append(&mut self, condition: Option<Condition>, op: Op, controls: &[Control], target: QubitId, argument: u32) {
        debug_assert!(controls.iter().all(|control| control.qubit() != target), "a control is the target");
        let start = u32::try_from(self.controls.len()).expect("fewer than 2^32 controls");
        let control_count = controls.len() as u32;
        self.controls.extend_from_slice(controls);
        self.gates.push(Gate { controls: start, argument, target, condition, control_count, op });
        let end = self.gates.len() as u32;
        match self.blocks.last_mut() {
            Some(block) if block.repeat == 1 => block.gates.end = end,
            _ => self.blocks.push(Block { gates: end - 1..end, repeat: 1 }),
        }
    }

    /// Makes the gates from place `from` to the end one block that is applied `repeat` times. The gates must all have
    /// been appended since the last repeated block.
    pub fn repeat_from(&mut self, from: usize, repeat: u64) {
        let end = self.gates.len() as u32;
        let from = from as u32;
        if from == end {
            return;
        }
        let last = self.blocks.last_mut().expect("there are gates");
        assert!(last.repeat == 1 && last.gates.start <= from, "blocks do not overlap");
        last.gates.end = from;
        if last.gates.is_empty() {
            self.blocks.pop();
        }
        self.blocks.push(Block { gates: from..end, repeat });
    }

    /// Notes what the gates from place `from` to the end are for.
    pub fn note(&mut self, from: usize, part: Part, constraint: Option<ConstraintId>) {
        let gates = from as u32..self.gates.len() as u32;
        if !gates.is_empty() {
            self.regions.push(Region { gates, part, constraint });
        }
    }

    /// The gates, each once however often its block is applied.
    pub fn gates(&self) -> &[Gate] {
        &self.gates
    }

    /// The blocks in order; together they cover all gates.
    pub fn blocks(&self) -> &[Block] {
        &self.blocks
    }

    /// The controls of a gate.
    pub fn controls(&self, gate: &Gate) -> &[Control] {
        &self.controls[gate.controls as usize..gate.controls as usize + gate.control_count()]
    }

    /// The angle of a gate that has one, in radians.
    pub fn angle(&self, gate: &Gate) -> Option<f64> {
        gate.op.has_angle().then(|| self.angles[gate.argument as usize])
    }

    /// The name of a qubit as OpenQASM writes it.
    pub fn qubit_name(&self, qubit: QubitId) -> String {
        element_name(&self.qubits, qubit.index())
    }

    /// The name of a measured bit as OpenQASM writes it.
    pub fn measured_name(&self, bit: MeasuredId) -> String {
        element_name(&self.measured, bit.index())
    }
}

fn element_name(registers: &[Register], index: usize) -> String {
    let at = registers.partition_point(|register| register.start as usize <= index) - 1;
    format!("{}[{}]", registers[at].name, index - registers[at].start as usize)
}

/// Something for every qubit.
pub type PerQubit<T> = IdVec<QubitId, T>;

/// How an oracle marks.
#[derive(Clone, Copy, PartialEq, Eq, Hash, Debug)]
pub enum Mark {
    /// By a sign.
    Phase,
    /// By flipping the `mark` qubit.
    Bit,
}
