//! Writing OpenQASM 3.0.
//!
//! Input:  a circuit and lines for the header. Output: text, streamed; nothing is allocated for a gate.
//! After:  read back, the text gives the same registers, gates and blocks. Regions become comments.
//!
//! Controls are modifiers where the standard library has no gate: `ctrl(n) @` for a run of controls on 1, one
//! `negctrl @` for each control on 0 (the language text is at odds with itself on `negctrl(n)`). Outside
//! oracles a run of the same operation over a whole register is written as one statement on the register.

use std::io::{self, Write};

mod angle;
mod names;
mod parts;

use super::gadget::Gadget;
use crate::circuit::{Circuit, Control, GIVEN, Gate, ITERATIONS, Op, Part, Region, Register};
use crate::id::{ConstraintId, Id};
use names::Names;
use parts::Parts;

/// What makes a text readable.
#[derive(Clone, Copy)]
pub struct Readable<'a> {
    /// Runs of gates that are written by name, the first that fits; those that occur are defined.
    pub gadgets: &'a [Gadget],
    /// What is said of a constraint beside its number.
    pub note: &'a dyn Fn(ConstraintId) -> String,
    /// Whether the gates that serve one constraint are a subroutine, where they are neither measured nor conditional.
    pub subroutines: bool,
}

/// Writes the circuit; `header` lines become comments below the version line.
pub fn write(circuit: &Circuit, header: &[String], out: &mut impl Write) -> io::Result<()> {
    write_readable(circuit, header, &Readable { gadgets: &[], note: &|_| String::new(), subroutines: false }, out)
}

/// Writes the circuit with names for gadgets and words for constraints.
pub fn write_readable(
    circuit: &Circuit,
    header: &[String],
    readable: &Readable<'_>,
    out: &mut impl Write,
) -> io::Result<()> {
    let mut out = io::BufWriter::with_capacity(1 << 16, out);
    writeln!(out, "OPENQASM 3.0;")?;
    for line in header.iter().flat_map(|line| line.lines().chain(line.is_empty().then_some(""))) {
        writeln!(out, "{}", format!("// {line}").trim_end())?;
    }
    writeln!(out, "include \"stdgates.inc\";")?;
    let occurs = |gadget: &&Gadget| {
        (0..circuit.gates().len()).any(|at| gadget.found_in(circuit, &circuit.gates()[at..]).is_some())
    };
    readable.gadgets.iter().filter(occurs).try_for_each(|gadget| gadget.define(keyword, &mut out))?;
    if circuit.blocks().iter().any(|block| block.repeat == GIVEN) {
        writeln!(out, "input int {ITERATIONS};")?;
    }
    for register in &circuit.qubits {
        writeln!(out, "qubit[{}] {};", register.len, register.name)?;
    }
    for register in &circuit.measured {
        writeln!(out, "bit[{}] {};", register.len, register.name)?;
    }
    let parts = if readable.subroutines { Parts::of(circuit) } else { Parts::default() };
    parts.define(circuit, readable, &mut out)?;
    let mut writer = Writer {
        circuit,
        parts: &parts,
        qubits: Names::new(&circuit.qubits),
        bits: Names::new(&circuit.measured),
        regions: circuit.regions.iter().peekable(),
        part: None,
        indent: "",
        readable: *readable,
    };
    for block in circuit.blocks() {
        let gates = block.gates.start as usize..block.gates.end as usize;
        match block.repeat {
            0 => writer.skip(gates),
            1 => writer.gates(&mut out, gates)?,
            repeat => {
                match repeat {
                    GIVEN => writeln!(out, "for int i in [1:{ITERATIONS}] {{")?,
                    repeat => writeln!(out, "for int i in [1:{repeat}] {{")?,
                }
                writer.indent = "  ";
                writer.gates(&mut out, gates)?;
                writer.indent = "";
                writeln!(out, "}}")?;
            }
        }
    }
    out.flush()
}

struct Writer<'a> {
    circuit: &'a Circuit,
    parts: &'a Parts,
    qubits: Names,
    bits: Names,
    /// The regions that begin at or after the next gate, in order.
    regions: std::iter::Peekable<std::slice::Iter<'a, Region>>,
    /// What the gates being written are for.
    part: Option<Part>,
    indent: &'static str,
    readable: Readable<'a>,
}

impl Writer<'_> {
    fn skip(&mut self, gates: std::ops::Range<usize>) {
        while self.regions.next_if(|region| (region.gates.start as usize) < gates.end).is_some() {}
    }

    fn gates(&mut self, out: &mut impl Write, gates: std::ops::Range<usize>) -> io::Result<()> {
        let mut at = gates.start;
        while at < gates.end {
            while let Some(region) = self.regions.next_if(|region| region.gates.start as usize <= at) {
                self.part = Some(region.part);
                if self.parts.at(region.gates.start).is_none() {
                    self.comment(out, region)?;
                }
            }
            out.write_all(self.indent.as_bytes())?;
            if let Some((end, part)) = self.parts.at(at as u32) {
                self.parts.call(part, &self.qubits, out)?;
                at = end as usize;
                continue;
            }
            let next_region = self.regions.peek().map_or(gates.end, |region| region.gates.start as usize);
            let limit = gates.end.min(next_region.max(at + 1));
            if let Some(len) = self.gadget(out, at..limit)? {
                at += len;
                continue;
            }
            match self.whole_register(at, limit) {
                Some(register) => {
                    self.statement_on_register(out, at, register)?;
                    at += register.len as usize;
                }
                None => {
                    self.gate(out, &self.circuit.gates()[at])?;
                    at += 1;
                }
            }
        }
        Ok(())
    }

    /// Writes the gadget that the run begins with, if there is one, and says how many gates it has.
    fn gadget(&self, out: &mut impl Write, run: std::ops::Range<usize>) -> io::Result<Option<usize>> {
        let run = &self.circuit.gates()[run];
        for gadget in self.readable.gadgets {
            if let Some(qubits) = gadget.found_in(self.circuit, run) {
                let names: Vec<&str> = qubits.iter().map(|qubit| self.qubits.get(qubit.index())).collect();
                writeln!(out, "{} {};", gadget.name, names.join(", "))?;
                return Ok(Some(gadget.gates.len()));
            }
        }
        Ok(None)
    }

    fn comment(&self, out: &mut impl Write, region: &Region) -> io::Result<()> {
        let part = part_name(region.part);
        match region.constraint {
            Some(constraint) => {
                let note = (self.readable.note)(constraint);
                writeln!(out, "{}", format!("{}// {part} {constraint} {note}", self.indent).trim_end())
            }
            None => writeln!(out, "{}// {part}", self.indent),
        }
    }

    /// The register of at least two qubits over which the gates from `at` run in order, all before `limit`. Within an
    /// oracle such a run is a coincidence and stays as it is.
    fn whole_register(&self, at: usize, limit: usize) -> Option<&Register> {
        if matches!(self.part, Some(Part::Compute | Part::Mark | Part::Undo)) {
            return None;
        }
        let gates = self.circuit.gates();
        let first = &gates[at];
        let plain = first.control_count() == 0 && first.condition().is_none() && !first.op().has_angle();
        if !plain || limit - at < 2 || gates[at + 1].op() != first.op() {
            return None;
        }
        let starts_at = |registers: &'_ [Register], index: usize| {
            registers.binary_search_by_key(&(index as u32), |register| register.start).ok()
        };
        let register = &self.circuit.qubits[starts_at(&self.circuit.qubits, first.target().index())?];
        let run = gates[at..limit].get(..register.len as usize).filter(|run| run.len() > 1)?;
        if let Some(bit) = first.measured() {
            let into = &self.circuit.measured[starts_at(&self.circuit.measured, bit.index())?];
            if into.len != register.len {
                return None;
            }
        }
        let in_order = |(place, gate): (usize, &Gate)| {
            gate.op() == first.op()
                && gate.control_count() == 0
                && gate.condition().is_none()
                && gate.target().index() == first.target().index() + place
                && gate.measured().map(Id::index) == first.measured().map(|bit| bit.index() + place)
        };
        run.iter().enumerate().all(in_order).then_some(register)
    }

    fn statement_on_register(&self, out: &mut impl Write, at: usize, register: &Register) -> io::Result<()> {
        let gate = &self.circuit.gates()[at];
        match gate.measured() {
            Some(bit) => {
                let name = self.bits.get(bit.index()).split('[').next().unwrap_or_default();
                writeln!(out, "{name} = measure {};", register.name)
            }
            None => writeln!(out, "{} {};", keyword(gate.op()), register.name),
        }
    }

    fn gate(&self, out: &mut impl Write, gate: &Gate) -> io::Result<()> {
        if let Some(condition) = gate.condition() {
            let not = if condition.value() { "" } else { "!" };
            write!(out, "if ({not}{}) {{ ", self.bits.get(condition.bit().index()))?;
        }
        match gate.measured() {
            Some(bit) => write!(out, "{} = measure ", self.bits.get(bit.index()))?,
            None => self.operation(out, gate)?,
        }
        for control in self.circuit.controls(gate) {
            out.write_all(self.qubits.get(control.qubit().index()).as_bytes())?;
            out.write_all(b", ")?;
        }
        out.write_all(self.qubits.get(gate.target().index()).as_bytes())?;
        out.write_all(if gate.condition().is_some() { b"; }\n" } else { b";\n" })
    }

    /// Modifiers, the gate's name and its angle, with a blank at the end.
    fn operation(&self, out: &mut impl Write, gate: &Gate) -> io::Result<()> {
        let controls = self.circuit.controls(gate);
        let positive = controls.iter().all(|control| !control.is_negated());
        match (gate.op(), controls.len()) {
            (Op::X, 1) if positive => return out.write_all(b"cx "),
            (Op::X, 2) if positive => return out.write_all(b"ccx "),
            (Op::Z, 1) if positive => return out.write_all(b"cz "),
            (Op::Z, 2) if positive => return out.write_all(b"ctrl @ cz "),
            _ => modifiers(out, controls)?,
        }
        out.write_all(keyword(gate.op()).as_bytes())?;
        if let Some(angle) = self.circuit.angle(gate) {
            out.write_all(b"(")?;
            angle::write(out, angle)?;
            out.write_all(b")")?;
        }
        out.write_all(b" ")
    }
}

fn part_name(part: Part) -> &'static str {
    match part {
        Part::Prepare => "prepare",
        Part::Compute => "compute",
        Part::Mark => "mark",
        Part::Undo => "undo",
        Part::Reflect => "reflect",
        Part::Measure => "measure",
    }
}

/// The name of a gate in the standard library of OpenQASM 3.
pub(super) fn keyword(op: Op) -> &'static str {
    match op {
        Op::X => "x",
        Op::Z => "z",
        Op::S => "s",
        Op::Sdg => "sdg",
        Op::T => "t",
        Op::Tdg => "tdg",
        Op::H => "h",
        Op::P => "p",
        Op::Rz => "rz",
        Op::Ry => "ry",
        Op::Measure => "measure",
        Op::Reset => "reset",
    }
}

fn modifiers(out: &mut impl Write, controls: &[Control]) -> io::Result<()> {
    for run in controls.chunk_by(|a, b| !a.is_negated() && !b.is_negated()) {
        match (run[0].is_negated(), run.len()) {
            (true, _) => out.write_all(b"negctrl @ ")?,
            (false, 1) => out.write_all(b"ctrl @ ")?,
            (false, len) => write!(out, "ctrl({len}) @ ")?,
        }
    }
    Ok(())
}

#[cfg(test)]
mod tests {
    use std::f64::consts::PI;

    use super::*;
    use crate::circuit::Condition;

    fn text(circuit: &Circuit, header: &[&str]) -> String {
        let mut out = Vec::new();
        let header: Vec<String> = header.iter().map(|&line| line.to_owned()).collect();
        write(circuit, &header, &mut out).unwrap();
        String::from_utf8(out).unwrap()
    }

    #[test]
    fn every_kind_of_statement_is_written_as_the_standard_has_it() {
        let mut circuit = Circuit::new();
        let q = circuit.add_qubits("search", 3);
        let w = circuit.add_qubits("work", 1);
        let m = circuit.add_measured("outcome", 1);
        let found = circuit.add_measured("found", 3);
        let on = Control::on;
        q.iter().for_each(|&q| circuit.push(Op::Reset, &[], q));
        circuit.push(Op::Reset, &[], w[0]);
        circuit.note(0, Part::Prepare, None);
        let from = circuit.gates().len();
        circuit.push(Op::X, &[on(q[0])], q[1]);
        circuit.push(Op::X, &[on(q[0]), on(q[1])], w[0]);
        circuit.push(Op::Z, &[on(q[0]), on(q[1])], q[2]);
        circuit.push(Op::X, &[!on(q[0]), on(q[1]), on(q[2])], w[0]);
        circuit.push(Op::Z, &[!on(q[0]), !on(q[1])], q[2]);
        circuit.note(from, Part::Compute, Some(crate::id::ConstraintId::new(4)));
        circuit.push_measure(None, w[0], m[0]);
        circuit.push_if(Some(Condition::new(m[0], true)), Op::Z, &[on(q[0])], q[1]);
        circuit.push_if(Some(Condition::new(m[0], false)), Op::X, &[], q[1]);
        circuit.repeat_from(from, 3);
        let from = circuit.gates().len();
        circuit.push_angle(None, Op::Rz, -3.0 * PI / 4.0, &[], q[0]);
        circuit.push_angle(None, Op::P, PI, &[on(q[1])], q[0]);
        circuit.push_angle(None, Op::Ry, 0.1, &[], q[0]);
        q.iter().zip(&found).for_each(|(&q, &bit)| circuit.push_measure(None, q, bit));
        circuit.note(from, Part::Measure, None);
        let expected = "\
OPENQASM 3.0;
// two
//
// lines
include \"stdgates.inc\";
qubit[3] search;
qubit[1] work;
bit[1] outcome;
bit[3] found;
// prepare
reset search;
reset work[0];
for int i in [1:3] {
  // compute c4
  cx search[0], search[1];
  ccx search[0], search[1], work[0];
  ctrl @ cz search[0], search[1], search[2];
  negctrl @ ctrl(2) @ x search[0], search[1], search[2], work[0];
  negctrl @ negctrl @ z search[0], search[1], search[2];
  outcome[0] = measure work[0];
  if (outcome[0]) { cz search[0], search[1]; }
  if (!outcome[0]) { x search[1]; }
}
// measure
rz(-3*pi/4) search[0];
ctrl @ p(pi) search[1], search[0];
ry(0.1) search[0];
found = measure search;
";
        assert_eq!(text(&circuit, &["two\n\nlines"]), expected);
    }
}
