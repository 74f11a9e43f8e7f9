//! The reflection about any start state, as a sign, as an angle, or under a control.
//!
//! The inverse of the preparation takes the start to |0…0>, flips take that to all ones, and there a phase is given; then
//! everything is undone. The phase is a sign flip under controls, or an angle on an ancilla that holds the AND of all.

use super::emit::OUTCOME;
use super::gates::Pen;
use super::prepare::{append_preparation, append_unpreparation};
use crate::circuit::{Circuit, Control, Level, MeasuredId, Op, Part, QubitId};
use crate::id::Id;
use crate::places::Start;

/// What the start state is multiplied by.
#[derive(Clone, Copy, PartialEq, Debug)]
pub enum Form {
    /// -1.
    Sign,
    /// `e^(i angle)`.
    Angle(f64),
    /// -1 where this qubit is 1.
    Controlled(QubitId),
}

/// How many qubits a sign flip may depend on at this level.
fn sign_width(level: Level) -> usize {
    match level {
        Level::Wide => usize::MAX,
        Level::Toffoli | Level::CliffordT => 3,
        Level::Feedback => 2,
    }
}

/// How many clean ancillas the reflection about a start of `n` qubits takes.
pub fn about_work(n: usize, level: Level, form: Form) -> usize {
    match form {
        Form::Sign => n.saturating_sub(sign_width(level)),
        Form::Controlled(_) => (n + 1).saturating_sub(sign_width(level)),
        Form::Angle(_) if level == Level::Wide => usize::from(n > 1),
        Form::Angle(_) => n - 1,
    }
}

/// Appends the reflection: `1 - (1 - f) |s><s|`, f what the form says. The qubits of `work` are clean, at least
/// [`about_work`] of them, and clean again afterwards.
pub fn append_reflection_about(
    circuit: &mut Circuit,
    search: &[QubitId],
    work: &[QubitId],
    start: &Start,
    level: Level,
    form: Form,
) {
    assert!(!search.is_empty(), "a reflection is about a state of at least one qubit");
    let from = circuit.gates().len();
    let ancillas = &work[..about_work(search.len(), level, form)];
    let outcomes = if level == Level::Feedback { outcomes(circuit, ancillas.len()) } else { Vec::new() };
    append_unpreparation(circuit, search, start, level);
    search.iter().for_each(|&qubit| circuit.push(Op::X, &[], qubit));
    let mut operands: std::collections::VecDeque<Control> = search.iter().copied().map(Control::on).collect();
    if let Form::Controlled(control) = form {
        operands.push_back(Control::on(control));
    }
    let mut computed = Vec::with_capacity(ancillas.len());
    for &ancilla in ancillas {
        let width = if level == Level::Wide { operands.len() } else { 2 };
        let taken: Vec<Control> = operands.drain(..width).collect();
        Pen::new(circuit, level).and(&taken, ancilla);
        operands.push_back(Control::on(ancilla));
        computed.push((taken, ancilla));
    }
    let operands: Vec<Control> = operands.into();
    match form {
        Form::Angle(angle) => circuit.push_angle(None, Op::P, angle, &[], operands[0].qubit()),
        Form::Sign | Form::Controlled(_) => Pen::new(circuit, level).sign(&operands),
    }
    for (at, (taken, ancilla)) in computed.iter().enumerate().rev() {
        Pen::new(circuit, level).erase(taken, *ancilla, outcomes.get(at).copied());
    }
    search.iter().for_each(|&qubit| circuit.push(Op::X, &[], qubit));
    append_preparation(circuit, search, start, level);
    circuit.note(from, Part::Reflect, None);
}

/// The measured bits of the oracle's corrections serve again where there are enough; else the reflection gets its own.
fn outcomes(circuit: &mut Circuit, count: usize) -> Vec<MeasuredId> {
    const OWN: &str = "reflected";
    let fits =
        |name: &str, register: &crate::circuit::Register| register.name == name && register.len as usize >= count;
    let found = circuit.measured.iter().find(|register| fits(OUTCOME, register) || fits(OWN, register));
    match found {
        Some(register) => (0..count).map(|at| MeasuredId::new(register.start as usize + at)).collect(),
        None if count == 0 => Vec::new(),
        None => circuit.add_measured(OWN, count),
    }
}
