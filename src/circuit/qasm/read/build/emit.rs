//! Gates of the library in the gates of a [`Circuit`], by exact identities.
//!
//! Controls stand on the inner gate only where the outer ones undo each other. A power is one gate where the gate has
//! a finite order or an angle.

use std::f64::consts::{FRAC_PI_2, FRAC_PI_4, PI};

use super::gates::{Action, General};
use crate::circuit::{Circuit, Condition, Control, Op, QubitId};
use crate::id::Id;

/// A gate with everything it acts on.
pub(super) struct Application<'a> {
    pub(super) action: Action,
    /// How often; negative for the inverse.
    pub(super) power: i64,
    /// As many as the gate has.
    pub(super) angles: [f64; 4],
    pub(super) condition: Option<Condition>,
    pub(super) controls: &'a [Control],
    pub(super) targets: &'a [QubitId],
}

/// At most so many gates does an application become, for each repetition of a general gate.
pub(super) const MOST_PIECES: u64 = 16;

/// How often a gate is repeated because no single gate is its power.
pub(super) fn repetitions(action: Action, power: i64) -> u64 {
    if matches!(action, Action::General(_)) { power.unsigned_abs() } else { 1 }
}

/// Appends the gate.
pub(super) fn apply(circuit: &mut Circuit, gate: &Application<'_>) {
    let mut pen = Pen { circuit, condition: gate.condition };
    let (controls, power) = (gate.controls, gate.power);
    let angle = gate.angles[0] * power as f64;
    let eighths = |unit: i64| (power.rem_euclid(8) * unit).rem_euclid(8) as u8;
    let is_odd = power % 2 != 0;
    match (gate.action, gate.targets) {
        (Action::GlobalPhase, _) => pen.global_phase(angle, controls),
        (Action::General(general), &[target]) => {
            let mut matrix = Matrix::new(general, gate.angles);
            if power < 0 {
                matrix = matrix.inverse();
            }
            (0..power.unsigned_abs()).for_each(|_| pen.matrix(matrix, controls, target));
        }
        (Action::Plain(op @ (Op::P | Op::Rz | Op::Ry)), &[target]) if power != 0 => {
            pen.angle(op, angle, controls, target);
        }
        (Action::Plain(op), &[target]) => match op.eighths() {
            Some(unit) => pen.turn(eighths(unit.into()), controls, target),
            None if is_odd => pen.put(op, controls, target),
            None => {}
        },
        (Action::Y, &[target]) if is_odd => {
            pen.put(Op::Sdg, &[], target);
            pen.put(Op::X, controls, target);
            pen.put(Op::S, &[], target);
        }
        (Action::RootX, &[target]) if eighths(2) != 0 => {
            pen.put(Op::H, &[], target);
            pen.turn(eighths(2), controls, target);
            pen.put(Op::H, &[], target);
        }
        (Action::Rx, &[target]) if power != 0 => {
            pen.put(Op::H, &[], target);
            pen.angle(Op::Rz, angle, controls, target);
            pen.put(Op::H, &[], target);
        }
        (Action::Swap, &[target, other]) if is_odd => {
            let mut inner = controls.to_vec();
            inner.push(Control::on(target));
            pen.put(Op::X, &[Control::on(other)], target);
            pen.put(Op::X, &inner, other);
            pen.put(Op::X, &[Control::on(other)], target);
        }
        _ => {}
    }
}

/// e^(i phase) P(phi) Ry(theta) P(lambda).
#[derive(Clone, Copy, Debug)]
struct Matrix {
    theta: f64,
    phi: f64,
    lambda: f64,
    phase: f64,
}

impl Matrix {
    fn new(general: General, angles: [f64; 4]) -> Self {
        let [a, b, c, d] = angles;
        let (theta, phi, lambda, phase) = match general {
            General::Standard => (a, b, c, a / 2.0),
            General::Special => (a, b, c, -(b + c) / 2.0),
            General::SpecialHalf => (FRAC_PI_2, a, b, -(a + b) / 2.0),
            General::Plain | General::Either => (a, b, c, 0.0),
            General::PlainHalf => (FRAC_PI_2, a, b, 0.0),
            General::WithPhase => (a, b, c, d),
        };
        Self { theta, phi, lambda, phase }
    }

    fn inverse(self) -> Self {
        Self { theta: -self.theta, phi: -self.lambda, lambda: -self.phi, phase: -self.phase }
    }
}

struct Pen<'c> {
    circuit: &'c mut Circuit,
    condition: Option<Condition>,
}

impl Pen<'_> {
    fn put(&mut self, op: Op, controls: &[Control], target: QubitId) {
        self.circuit.push_if(self.condition, op, controls, target);
    }

    fn angle(&mut self, op: Op, angle: f64, controls: &[Control], target: QubitId) {
        self.circuit.push_angle(self.condition, op, angle, controls, target);
    }

    /// A phase in multiples of pi/4.
    fn turn(&mut self, eighths: u8, controls: &[Control], target: QubitId) {
        Op::turning(eighths).iter().for_each(|&op| self.put(op, controls, target));
    }

    /// A phase that was computed: by named gates where it is a multiple of pi/4 up to the rounding of doubles.
    fn phase(&mut self, angle: f64, controls: &[Control], target: QubitId) {
        let times = (angle / FRAC_PI_4).round();
        if (angle - times * FRAC_PI_4).abs() <= 4.0 * f64::EPSILON * angle.abs().max(1.0) && times.abs() < 1e9 {
            self.turn((times as i64).rem_euclid(8) as u8, controls, target);
        } else {
            self.angle(Op::P, angle, controls, target);
        }
    }

    /// e^(i angle) where the controls hold: a phase of one of them. Without controls it is given to both values of the
    /// first qubit, so that a global phase is kept.
    fn global_phase(&mut self, angle: f64, controls: &[Control]) {
        let positive = controls.iter().rposition(|control| !control.is_negated());
        let Some(at) = positive.or(controls.len().checked_sub(1)) else {
            if self.circuit.qubit_count() > 0 {
                self.both(angle, &[], QubitId::new(0));
            }
            return;
        };
        let target = controls[at].qubit();
        let rest: Vec<Control> = controls.iter().copied().filter(|control| control.qubit() != target).collect();
        if positive.is_some() {
            self.phase(angle, &rest, target);
        } else {
            self.put(Op::X, &[], target);
            self.phase(angle, &rest, target);
            self.put(Op::X, &[], target);
        }
    }

    fn both(&mut self, angle: f64, controls: &[Control], target: QubitId) {
        for _ in 0..2 {
            self.phase(angle, controls, target);
            self.put(Op::X, &[], target);
        }
    }

    fn matrix(&mut self, matrix: Matrix, controls: &[Control], target: QubitId) {
        let Matrix { theta, phi, lambda, phase } = matrix;
        if theta == 0.0 && phase != 0.0 && phase == -(phi + lambda) / 2.0 {
            self.angle(Op::Rz, phi + lambda, controls, target);
        } else if theta == 0.0 {
            self.phase(phi + lambda, controls, target);
            self.some_global_phase(phase, controls);
        } else if theta.abs() == PI {
            // Ry(pi) = X Z, Ry(-pi) = -X Z; a global phase beside X is a phase on both sides of it.
            let phase = if theta < 0.0 { phase + PI } else { phase };
            self.phase(lambda + PI + phase, controls, target);
            self.put(Op::X, controls, target);
            self.phase(phi + phase, controls, target);
        } else {
            self.phase(lambda, controls, target);
            self.angle(Op::Ry, theta, controls, target);
            self.phase(phi, controls, target);
            self.some_global_phase(phase, controls);
        }
    }

    fn some_global_phase(&mut self, phase: f64, controls: &[Control]) {
        if phase != 0.0 {
            self.global_phase(phase, controls);
        }
    }
}
