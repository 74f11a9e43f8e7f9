//! Writing OpenQASM 2.0 (A. Cross, L. Bishop, J. Smolin, J. Gambetta, "Open quantum assembly language",
//! arXiv:1707.03429).
//!
//! Input:  a circuit whose gates have at most two controls. Output: text, streamed.
//! After:  read back, the text gives the same operation; a CCZ becomes a CCX between Hadamard gates, and a control on 0
//!         stands between two flips.
//!
//! The language compares whole registers in a condition, so every measured bit that a gate depends on is a register of
//! its own. It has no loops, so blocks are written out as often as they are applied.

use std::io::{self, Write};

use thiserror::Error;

use super::write;
use crate::circuit::{Circuit, Control, Gate, MeasuredId, Op};
use crate::id::Id;

/// At most so many gates are written; a loop may stand for any number.
const MOST_GATES: u64 = 1 << 32;

/// What OpenQASM 2.0 cannot say.
#[derive(Clone, Copy, PartialEq, Eq, Debug, Error)]
pub enum Unsayable {
    /// There are no modifiers: a gate has at most two controls.
    #[error("a gate has {0} controls, and OpenQASM 2.0 has none with more than 2")]
    ManyControls(usize),
    /// A controlled gate that the standard library of the language does not have.
    #[error("a {0:?} gate has a control, and OpenQASM 2.0 has no such gate")]
    ControlledGate(Op),
    /// There are no loops.
    #[error("without a loop the circuit has {0} gates")]
    TooLong(u64),
}

/// Whether the language can say this circuit.
pub fn can_say(circuit: &Circuit) -> Result<(), Unsayable> {
    let mut total = 0u64;
    for block in circuit.blocks() {
        let once = u64::from(block.gates.end - block.gates.start);
        total = total.saturating_add(once.saturating_mul(block.repeat));
    }
    if total > MOST_GATES {
        return Err(Unsayable::TooLong(total));
    }
    circuit.gates().iter().try_for_each(can_say_gate)
}

fn can_say_gate(gate: &Gate) -> Result<(), Unsayable> {
    match (gate.op(), gate.control_count()) {
        (_, 0) | (Op::X | Op::Z, 1 | 2) => Ok(()),
        (Op::X | Op::Z, many) => Err(Unsayable::ManyControls(many)),
        (op, _) => Err(Unsayable::ControlledGate(op)),
    }
}

/// Writes a circuit that [`can_say`] accepts; `header` lines become comments below the version line.
pub fn write(circuit: &Circuit, header: &[String], out: &mut impl Write) -> io::Result<()> {
    let mut out = io::BufWriter::with_capacity(1 << 16, out);
    writeln!(out, "OPENQASM 2.0;")?;
    for line in header.iter().flat_map(|line| line.lines()) {
        writeln!(out, "{}", format!("// {line}").trim_end())?;
    }
    writeln!(out, "include \"qelib1.inc\";")?;
    for register in &circuit.qubits {
        writeln!(out, "qreg {}[{}];", register.name, register.len)?;
    }
    let bits = bits(circuit);
    for (name, len) in bits.registers {
        writeln!(out, "creg {name}[{len}];")?;
    }
    let mut writer = Writer { circuit, bits: bits.names, out };
    for block in circuit.blocks() {
        for _ in 0..block.repeat {
            for gate in &circuit.gates()[block.gates.start as usize..block.gates.end as usize] {
                writer.gate(gate)?;
            }
        }
    }
    writer.out.flush()
}

/// The registers of measured bits, and the register and the place of each bit.
struct MeasuredBits {
    registers: Vec<(String, u32)>,
    names: Vec<(String, u32)>,
}

/// A register with a bit that a gate depends on falls into registers of one bit.
fn bits(circuit: &Circuit) -> MeasuredBits {
    let mut asked = vec![false; circuit.measured_count()];
    circuit.gates().iter().filter_map(Gate::condition).for_each(|condition| asked[condition.bit().index()] = true);
    let mut bits = MeasuredBits { registers: Vec::new(), names: Vec::new() };
    for register in &circuit.measured {
        let places = register.start..register.start + register.len;
        if asked[places.start as usize..places.end as usize].contains(&true) {
            for at in 0..register.len {
                let name = format!("{}_{at}", register.name);
                bits.registers.push((name.clone(), 1));
                bits.names.push((name, 0));
            }
        } else {
            bits.registers.push((register.name.clone(), register.len));
            bits.names.extend((0..register.len).map(|at| (register.name.clone(), at)));
        }
    }
    bits
}

struct Writer<'a, W: Write> {
    circuit: &'a Circuit,
    bits: Vec<(String, u32)>,
    out: W,
}

impl<W: Write> Writer<'_, W> {
    fn gate(&mut self, gate: &Gate) -> io::Result<()> {
        self.flips(gate)?;
        self.between_flips(gate)?;
        self.flips(gate)
    }

    /// Flips the controls that hold on 0.
    fn flips(&mut self, gate: &Gate) -> io::Result<()> {
        for control in self.circuit.controls(gate).iter().filter(|control| control.is_negated()) {
            writeln!(self.out, "x {};", self.name(control))?;
        }
        Ok(())
    }

    fn between_flips(&mut self, gate: &Gate) -> io::Result<()> {
        let target = self.circuit.qubit_name(gate.target());
        let controls = self.circuit.controls(gate);
        if let Some(bit) = gate.measured() {
            self.condition(gate)?;
            let (name, at) = &self.bits[MeasuredId::index(bit)];
            return writeln!(self.out, "measure {target} -> {name}[{at}];");
        }
        if let (Op::Z, [a, b]) = (gate.op(), controls) {
            let (a, b) = (self.name(a), self.name(b));
            for text in [format!("h {target};"), format!("ccx {a},{b},{target};"), format!("h {target};")] {
                self.condition(gate)?;
                writeln!(self.out, "{text}")?;
            }
            return Ok(());
        }
        self.condition(gate)?;
        let prefix = ["", "c", "cc"][controls.len()];
        write!(self.out, "{prefix}{}", keyword(gate.op()))?;
        if let Some(angle) = self.circuit.angle(gate) {
            write!(self.out, "({angle:?})")?;
        }
        write!(self.out, " ")?;
        for control in controls {
            let name = self.name(control);
            write!(self.out, "{name},")?;
        }
        writeln!(self.out, "{target};")
    }

    fn name(&self, control: &Control) -> String {
        self.circuit.qubit_name(control.qubit())
    }

    fn condition(&mut self, gate: &Gate) -> io::Result<()> {
        match gate.condition() {
            Some(condition) => {
                let (name, _) = &self.bits[condition.bit().index()];
                write!(self.out, "if({name}=={}) ", u8::from(condition.value()))
            }
            None => Ok(()),
        }
    }
}

fn keyword(op: Op) -> &'static str {
    if op == Op::P { "u1" } else { write::keyword(op) }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::circuit::Condition;

    #[test]
    fn every_kind_of_statement_is_written_as_the_language_has_it() {
        let mut circuit = Circuit::new();
        let q = circuit.add_qubits("search", 3);
        let m = circuit.add_measured("outcome", 2);
        let found = circuit.add_measured("found", 3);
        let on = Control::on;
        circuit.push(Op::Reset, &[], q[0]);
        circuit.push(Op::X, &[on(q[0]), on(q[1])], q[2]);
        circuit.push(Op::Z, &[on(q[0]), on(q[1])], q[2]);
        circuit.push(Op::Z, &[on(q[0])], q[1]);
        circuit.push_measure(None, q[1], m[1]);
        circuit.push_if(Some(Condition::new(m[1], true)), Op::X, &[on(q[0])], q[1]);
        circuit.push_angle(None, Op::P, 0.5, &[], q[0]);
        circuit.push_measure(None, q[2], found[2]);
        let mut out = Vec::new();
        assert_eq!(can_say(&circuit), Ok(()));
        write(&circuit, &["two\nlines".to_owned()], &mut out).unwrap();
        let expected = "\
OPENQASM 2.0;
// two
// lines
include \"qelib1.inc\";
qreg search[3];
creg outcome_0[1];
creg outcome_1[1];
creg found[3];
reset search[0];
ccx search[0],search[1],search[2];
h search[2];
ccx search[0],search[1],search[2];
h search[2];
cz search[0],search[1];
measure search[1] -> outcome_1[0];
if(outcome_1==1) cx search[0],search[1];
u1(0.5) search[0];
measure search[2] -> found[2];
";
        assert_eq!(String::from_utf8(out).unwrap(), expected);
    }

    #[test]
    fn what_the_language_lacks_is_refused() {
        let mut circuit = Circuit::new();
        let q = circuit.add_qubits("search", 4);
        let on = Control::on;
        circuit.push(Op::X, &[on(q[0]), on(q[1]), on(q[2])], q[3]);
        assert_eq!(can_say(&circuit), Err(Unsayable::ManyControls(3)));
        let mut circuit = Circuit::new();
        let q = circuit.add_qubits("search", 4);
        circuit.push(Op::X, &[!on(q[0])], q[3]);
        let mut out = Vec::new();
        write(&circuit, &[], &mut out).unwrap();
        assert!(String::from_utf8(out).unwrap().ends_with("x search[0];\ncx search[0],search[3];\nx search[0];\n"));
        circuit = Circuit::new();
        let q = circuit.add_qubits("search", 1);
        circuit.push(Op::X, &[], q[0]);
        circuit.repeat_from(0, 1 << 40);
        assert_eq!(can_say(&circuit), Err(Unsayable::TooLong(1 << 40)));
    }
}
