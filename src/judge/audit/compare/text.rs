//! One gate as a line of OpenQASM 3, as a report quotes it.

use crate::circuit::{Circuit, Gate, Op};

/// The gate as OpenQASM 3 writes it, without the semicolon.
pub fn gate_in_words(circuit: &Circuit, gate: &Gate) -> String {
    let controls = circuit.controls(gate);
    let is_positive = controls.iter().all(|control| !control.is_negated());
    let mut name = match (gate.op(), controls.len()) {
        (Op::X, 1) if is_positive => "cx".to_owned(),
        (Op::X, 2) if is_positive => "ccx".to_owned(),
        (Op::Z, 1) if is_positive => "cz".to_owned(),
        (op, _) => {
            let modifier = |negated: bool| if negated { "negctrl @ " } else { "ctrl @ " };
            let modifiers: String = controls.iter().map(|control| modifier(control.is_negated())).collect();
            modifiers + &format!("{op:?}").to_lowercase()
        }
    };
    if let Some(angle) = circuit.angle(gate) {
        name += &format!("({angle})");
    }
    if let Some(bit) = gate.measured() {
        name = format!("{} = measure", circuit.measured_name(bit));
    }
    let qubits = controls.iter().map(|control| control.qubit()).chain([gate.target()]);
    let qubits: Vec<String> = qubits.map(|qubit| circuit.qubit_name(qubit)).collect();
    let text = format!("{name} {}", qubits.join(", "));
    match gate.condition() {
        Some(condition) => {
            let not = if condition.value() { "" } else { "!" };
            format!("if ({not}{}) {{ {text}; }}", circuit.measured_name(condition.bit()))
        }
        None => text,
    }
}
