//! A circuit that keeps basis states, for one that was read as a sum over paths.
//!
//! It computes the nodes of the function and of what must be 0 into work qubits, marks, and undoes that; other phases are
//! turned on a work qubit that holds their function for that time. What must be 0 is left in work qubits of its own. So it is an oracle just if the circuit that was read is one, and every way of
//! judging circuits that keep basis states serves for both.

use super::end::Read;
use crate::circuit::{Circuit, Control, MARK, Op, QubitId, SEARCH, WORK};
use crate::judge::audit::basis::form::Form;
use crate::judge::reading::graph::{Node, Signal};

/// Writes the circuit; the phase of the function is a sign.
pub(in crate::judge::audit) fn plain_circuit(read: &Read, search: usize, has_mark: bool) -> Circuit {
    let others = read.others.iter().map(|(form, _)| form);
    let roots = read.zeros.iter().chain([&read.function]).chain(others).flat_map(|form| form.terms.iter().copied());
    let needed = read.graph.needed(roots);
    let nodes: Vec<usize> =
        (0..needed.len()).filter(|&node| needed[node] && !read.graph.operands(node).is_empty()).collect();
    let mut circuit = Circuit::new();
    let mut inputs = circuit.add_qubits(SEARCH, search);
    let mark = has_mark.then(|| circuit.add_qubits(MARK, 1)[0]);
    inputs.extend(mark);
    let global = (read.global.unwrap_or(0) + if has_mark || !read.function.flip { 0 } else { 4 }) % 8;
    let zeros: Vec<&Form> = read.zeros.iter().filter(|zero| zero.as_constant() != Some(false)).collect();
    let needs_one = global != 0 || !read.others.is_empty();
    let count = nodes.len() + zeros.len() + usize::from(needs_one);
    let work = if count == 0 { Vec::new() } else { circuit.add_qubits(WORK, count) };
    let mut places = vec![None; needed.len()];
    inputs.iter().enumerate().for_each(|(at, &qubit)| places[at + 1] = Some(qubit));
    nodes.iter().zip(&work).for_each(|(&node, &qubit)| places[node] = Some(qubit));
    let mut writer = Writer { read, circuit, places };
    nodes.iter().for_each(|&node| writer.node(node));
    for (zero, &qubit) in zeros.into_iter().zip(&work[nodes.len()..]) {
        writer.add(zero, qubit);
    }
    match mark {
        Some(mark) => writer.add(&read.function, mark),
        None => read.function.terms.iter().for_each(|&term| writer.circuit.push(Op::Z, &[], writer.qubit(term))),
    }
    if let (true, Some(&one)) = (needs_one, work.last()) {
        let constant = (Form::constant(true), global);
        for (form, eighths) in read.others.iter().chain((global != 0).then_some(&constant)) {
            writer.add(form, one);
            (0..*eighths).for_each(|_| writer.circuit.push(Op::T, &[], one));
            writer.add(form, one);
        }
    }
    nodes.iter().rev().for_each(|&node| writer.node(node));
    writer.circuit
}

struct Writer<'r> {
    read: &'r Read,
    circuit: Circuit,
    places: Vec<Option<QubitId>>,
}

impl Writer<'_> {
    fn qubit(&self, signal: Signal) -> QubitId {
        self.places[signal.node()].expect("a node that is needed")
    }

    /// Adds a form to a qubit.
    fn add(&mut self, form: &Form, target: QubitId) {
        for &term in &form.terms {
            self.circuit.push(Op::X, &[Control::on(self.qubit(term))], target);
        }
        if form.flip {
            self.circuit.push(Op::X, &[], target);
        }
    }

    /// Computes a node into its qubit, or undoes that.
    fn node(&mut self, node: usize) {
        let target = self.places[node].expect("a node that is needed");
        let operands = self.read.graph.operands(node);
        let control = |operand: &Signal| Control::new(self.qubit(*operand), !operand.is_negated());
        let controls: Vec<Control> = operands.iter().map(control).collect();
        match self.read.graph.nodes()[node] {
            Node::Odd { .. } => controls.iter().for_each(|&control| self.circuit.push(Op::X, &[control], target)),
            _ => self.circuit.push(Op::X, &controls, target),
        }
    }
}
