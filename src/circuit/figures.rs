//! Figures: what a circuit costs, counted from its gates. No formula of any construction is used here.

use serde::Serialize;

use crate::circuit::{Circuit, GIVEN, Gate, Op, PerQubit};
use crate::id::Id;

/// Counts over a circuit, every block as often as it is applied.
#[derive(Clone, Copy, PartialEq, Debug, Default, Serialize)]
pub struct Figures {
    /// Qubits.
    pub qubits: u64,
    /// Gates of every kind, measurements and resets included.
    pub gates: u64,
    /// T gates and their inverses; those that depend on a measured bit count in full (the worst case).
    pub t_count: u64,
    /// T gates applied on average: a gate under conditions counts by the chance that they hold, where a qubit measured
    /// right after a Hadamard gate gives 1 in half of all cases, and any other measurement in all.
    pub t_count_expected: f64,
    /// Layers that hold a T gate, when every gate starts as soon as its qubits and its measured bit are ready.
    pub t_depth: u64,
    /// CNOT gates: X with one control.
    pub cx_count: u64,
    /// X and Z gates with two controls or more, each counted as the two-input ANDs it stands for (controls less one).
    pub and_gates: u64,
    /// Layers, when every gate starts as soon as its qubits and its measured bit are ready.
    pub depth: u64,
    /// Gates with an angle.
    pub rotations: u64,
    /// Measurements.
    pub measurements: u64,
}

/// Counts the gates of a circuit.
///
/// Depths of a repeated block are those of the block on its own times the number of repetitions, added to what stands
/// before and after: exact where a block begins and ends on a layer that all its qubits share, as the loop of a search
/// does (it ends with Hadamards on the whole search register), and an upper bound otherwise.
pub fn figures(circuit: &Circuit) -> Figures {
    let mut total = Figures { qubits: circuit.qubit_count() as u64, ..Figures::default() };
    for block in circuit.blocks() {
        let mut one = Figures::default();
        let mut layers = Layers::new(circuit);
        let mut chances = Chances::new(circuit);
        for gate in &circuit.gates()[block.gates.start as usize..block.gates.end as usize] {
            count(&mut one, gate);
            if matches!(gate.op(), Op::T | Op::Tdg) {
                one.t_count_expected += chances.of(gate);
            }
            chances.follow(gate);
            layers.place(circuit, gate);
        }
        // A block whose number is given when it is run counts once.
        let turns = if block.repeat == GIVEN { 1 } else { block.repeat };
        // A file may repeat a block up to 2^63 times: the count then stays at the largest number.
        let add = |total: &mut u64, one: u64| *total = total.saturating_add(one.saturating_mul(turns));
        add(&mut total.gates, one.gates);
        add(&mut total.t_count, one.t_count);
        total.t_count_expected += one.t_count_expected * block.repeat as f64;
        add(&mut total.cx_count, one.cx_count);
        add(&mut total.and_gates, one.and_gates);
        add(&mut total.rotations, one.rotations);
        add(&mut total.measurements, one.measurements);
        add(&mut total.depth, layers.depth);
        add(&mut total.t_depth, layers.t_depth);
    }
    total
}

fn count(figures: &mut Figures, gate: &Gate) {
    figures.gates += 1;
    match gate.op() {
        Op::T | Op::Tdg => figures.t_count += 1,
        Op::X if gate.control_count() == 1 => figures.cx_count += 1,
        Op::X | Op::Z if gate.control_count() >= 2 => figures.and_gates += gate.control_count() as u64 - 1,
        Op::P | Op::Rz | Op::Ry => figures.rotations += 1,
        Op::Measure => figures.measurements += 1,
        _ => {}
    }
}

/// The chance that each measured bit is 1.
struct Chances {
    bits: Vec<f64>,
    /// For each qubit, the chance that its last gate was a Hadamard gate.
    turned: PerQubit<Option<f64>>,
}

impl Chances {
    fn new(circuit: &Circuit) -> Self {
        Self { bits: vec![1.0; circuit.measured_count()], turned: vec![None; circuit.qubit_count()].into() }
    }

    /// The chance that a gate is applied.
    fn of(&self, gate: &Gate) -> f64 {
        gate.condition().map_or(1.0, |condition| match condition.value() {
            true => self.bits[condition.bit().index()],
            false => 1.0,
        })
    }

    fn follow(&mut self, gate: &Gate) {
        let turned = (gate.op() == Op::H).then(|| self.of(gate));
        if let Some(bit) = gate.measured() {
            self.bits[bit.index()] = self.turned[gate.target()].map_or(1.0, |chance| chance / 2.0);
        }
        self.turned[gate.target()] = turned;
    }
}

/// As-soon-as-possible scheduling: for each qubit and measured bit, the layer after its last use.
struct Layers {
    /// Per qubit: the next free layer, and the next free T layer.
    qubits: PerQubit<(u64, u64)>,
    measured: Vec<(u64, u64)>,
    depth: u64,
    t_depth: u64,
}

impl Layers {
    fn new(circuit: &Circuit) -> Self {
        Self {
            qubits: vec![(0, 0); circuit.qubit_count()].into(),
            measured: vec![(0, 0); circuit.measured_count()],
            depth: 0,
            t_depth: 0,
        }
    }

    fn place(&mut self, circuit: &Circuit, gate: &Gate) {
        let is_t = u64::from(matches!(gate.op(), Op::T | Op::Tdg));
        let mut start = self.qubits[gate.target()];
        let mut wait = |other: (u64, u64)| start = (start.0.max(other.0), start.1.max(other.1));
        circuit.controls(gate).iter().for_each(|control| wait(self.qubits[control.qubit()]));
        if let Some(condition) = gate.condition() {
            wait(self.measured[condition.bit().index()]);
        }
        if let Some(bit) = gate.measured() {
            wait(self.measured[bit.index()]);
        }
        let end = (start.0 + 1, start.1 + is_t);
        self.qubits[gate.target()] = end;
        for control in circuit.controls(gate) {
            self.qubits[control.qubit()] = end;
        }
        if let Some(bit) = gate.measured() {
            self.measured[bit.index()] = end;
        }
        self.depth = self.depth.max(end.0);
        self.t_depth = self.t_depth.max(end.1);
    }
}
