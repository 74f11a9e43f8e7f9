//! Diagonal gates that are written with an angle, as the gates without one that they are.
//!
//! Input: a circuit. Output: the same operator, in which `p` and `rz` by multiples of pi/4 are Z, S, T and their inverses,
//! with the controls and the measured bit they depend on. An `rz` without controls is that but for a global phase.

use std::borrow::Cow;
use std::f64::consts::FRAC_PI_4;

use crate::circuit::{Circuit, Control, Gate, Op, QubitId};
use crate::judge::audit::state::amplitude::multiples;

/// Rewrites a circuit; with `strict`, nothing of which the global phase would be another.
pub(super) fn with_eighths(circuit: &Circuit, strict: bool) -> Cow<'_, Circuit> {
    let is_angle = |gate: &Gate| matches!(gate.op(), Op::P | Op::Rz);
    if !circuit.gates().iter().any(is_angle) {
        return Cow::Borrowed(circuit);
    }
    let mut made = Circuit::with_registers_of(circuit);
    for block in circuit.blocks() {
        let start = made.gates().len();
        for gate in &circuit.gates()[block.gates.start as usize..block.gates.end as usize] {
            if !is_angle(gate) || !turn(circuit, gate, strict, &mut made) {
                made.push_copy(circuit, gate);
            }
        }
        if block.repeat != 1 {
            made.repeat_from(start, block.repeat);
        }
    }
    Cow::Owned(made)
}

/// Writes a gate with an angle without it, if that goes.
fn turn(circuit: &Circuit, gate: &Gate, strict: bool, made: &mut Circuit) -> bool {
    let angle = circuit.angle(gate).expect("a gate with an angle");
    let controls = circuit.controls(gate);
    let Some(eighths) = multiples(angle, FRAC_PI_4) else { return false };
    if gate.op() == Op::Rz {
        // It turns by minus half the angle wherever the controls hold.
        match (controls.split_last(), multiples(-angle / 2.0, FRAC_PI_4)) {
            (None, _) if strict => return false,
            (None, _) => {}
            (Some(_), None) => return false,
            (Some((&last, rest)), Some(half)) => {
                let flip = |made: &mut Circuit| {
                    if last.is_negated() {
                        made.push(Op::X, &[], last.qubit());
                    }
                };
                flip(made);
                push(made, gate, half, rest, last.qubit());
                flip(made);
            }
        }
    }
    push(made, gate, eighths, controls, gate.target());
    true
}

fn push(made: &mut Circuit, gate: &Gate, eighths: u8, controls: &[Control], target: QubitId) {
    let ops: &[Op] = match eighths {
        0 => &[],
        1 => &[Op::T],
        2 => &[Op::S],
        3 => &[Op::S, Op::T],
        4 => &[Op::Z],
        5 => &[Op::Z, Op::T],
        6 => &[Op::Sdg],
        _ => &[Op::Tdg],
    };
    ops.iter().for_each(|&op| made.push_if(gate.condition(), op, controls, target));
}
