//! Cancelling: a gate and a later one that undoes it go, if all between them commute with the later one.
//!
//! Two gates commute where on every qubit they share both are diagonal (a control, or the target of a phase) or both are
//! a flip (the target of an X). A gate under a condition, a measurement and a reset commute with nothing on their qubits.
//! The gates on each qubit are linked, so that only those are looked at which share a qubit, and at most [`WINDOW`].

use super::{Fate, rebuilt};
use crate::circuit::{Circuit, Gate, Op, PerQubit, QubitId};

/// How many gates are looked at before a gate is kept.
const WINDOW: usize = 48;
/// No gate.
const NONE: u32 = u32::MAX;

/// The circuit without pairs of gates that undo each other.
pub fn cancel(circuit: Circuit) -> Circuit {
    let mut fates = vec![Fate::Kept; circuit.gates().len()];
    for block in circuit.blocks() {
        let mut links = Links::new(&circuit);
        for at in block.gates.start..block.gates.end {
            if let Some(partner) = links.partner(at, &fates) {
                fates[at as usize] = Fate::Dropped;
                fates[partner as usize] = Fate::Dropped;
            } else {
                links.append(at);
            }
        }
    }
    rebuilt(circuit, &fates)
}

/// What a gate does to one of its qubits.
#[derive(Clone, Copy, PartialEq, Eq)]
enum Kind {
    Diagonal,
    Flip,
    Other,
}

fn kind(circuit: &Circuit, gate: &Gate, qubit: QubitId) -> Option<Kind> {
    if gate.target() != qubit {
        let controls = circuit.controls(gate);
        let diagonal = if gate.condition().is_some() { Kind::Other } else { Kind::Diagonal };
        return controls.iter().any(|control| control.qubit() == qubit).then_some(diagonal);
    }
    Some(match gate.op() {
        _ if gate.condition().is_some() => Kind::Other,
        Op::X => Kind::Flip,
        Op::Z | Op::S | Op::Sdg | Op::T | Op::Tdg | Op::P | Op::Rz => Kind::Diagonal,
        Op::H | Op::Ry | Op::Measure | Op::Reset => Kind::Other,
    })
}

/// For each gate and each of its qubits, the gate before it on that qubit.
struct Links<'c> {
    circuit: &'c Circuit,
    last: PerQubit<u32>,
    /// By gate, where its links begin; those of the controls in order, then that of the target.
    starts: Vec<u32>,
    links: Vec<u32>,
    first: u32,
}

impl<'c> Links<'c> {
    fn new(circuit: &'c Circuit) -> Self {
        let last = vec![NONE; circuit.qubit_count()].into();
        Self { circuit, last, starts: Vec::new(), links: Vec::new(), first: 0 }
    }

    fn qubits(&self, at: u32) -> impl Iterator<Item = QubitId> + 'c {
        let gate = &self.circuit.gates()[at as usize];
        let controls = self.circuit.controls(gate).iter().map(|control| control.qubit());
        controls.chain([gate.target()])
    }

    fn append(&mut self, at: u32) {
        if self.starts.is_empty() {
            self.first = at;
        }
        // Gates that were dropped leave a gap.
        self.starts.resize((at - self.first) as usize, NONE);
        self.starts.push(self.links.len() as u32);
        for qubit in self.qubits(at) {
            self.links.push(std::mem::replace(&mut self.last[qubit], at));
        }
    }

    /// The gate before `at` on this qubit.
    fn before(&self, at: u32, qubit: QubitId) -> u32 {
        let start = self.starts[(at - self.first) as usize] as usize;
        let place = self.qubits(at).position(|other| other == qubit).expect("the gate is on the qubit");
        self.links[start + place]
    }

    /// The last gate that the gate undoes, with only gates between that commute with it.
    fn partner(&self, at: u32, fates: &[Fate]) -> Option<u32> {
        let gate = &self.circuit.gates()[at as usize];
        if gate.condition().is_some() || !gate.op().is_unitary() || gate.op().has_angle() {
            return None;
        }
        if !self.may_have_partner(at, fates) {
            return None;
        }
        let mut heads: Vec<(QubitId, u32)> = self.qubits(at).map(|qubit| (qubit, self.last[qubit])).collect();
        for _ in 0..WINDOW {
            let latest = heads.iter().map(|&(_, head)| head).filter(|&head| head != NONE).max()?;
            let dropped = fates[latest as usize] == Fate::Dropped;
            if !dropped && self.undoes(at, latest) {
                return Some(latest);
            }
            if !dropped && !self.commute(gate, &self.circuit.gates()[latest as usize]) {
                return None;
            }
            for (qubit, head) in heads.iter_mut().filter(|(_, head)| *head == latest) {
                *head = self.before(latest, *qubit);
            }
        }
        None
    }

    /// Whether the gates on its target alone allow a partner: most often they are few, and say no.
    fn may_have_partner(&self, at: u32, fates: &[Fate]) -> bool {
        let gate = &self.circuit.gates()[at as usize];
        let target = gate.target();
        let own = kind(self.circuit, gate, target);
        let mut head = self.last[target];
        for _ in 0..WINDOW {
            if head == NONE {
                return false;
            }
            if fates[head as usize] != Fate::Dropped {
                if self.undoes(at, head) {
                    return true;
                }
                let other = kind(self.circuit, &self.circuit.gates()[head as usize], target);
                if own != other || own == Some(Kind::Other) {
                    return false;
                }
            }
            head = self.before(head, target);
        }
        true
    }

    fn commute(&self, gate: &Gate, other: &Gate) -> bool {
        let controls = self.circuit.controls(gate).iter().map(|control| control.qubit());
        controls.chain([gate.target()]).all(|qubit| {
            let kinds = (kind(self.circuit, gate, qubit), kind(self.circuit, other, qubit));
            match kinds {
                (_, None) => true,
                (Some(Kind::Other), _) | (_, Some(Kind::Other)) => false,
                (one, another) => one == another,
            }
        })
    }

    fn undoes(&self, at: u32, earlier: u32) -> bool {
        let (gate, other) = (&self.circuit.gates()[at as usize], &self.circuit.gates()[earlier as usize]);
        let opposite = match gate.op() {
            Op::S => Op::Sdg,
            Op::Sdg => Op::S,
            Op::T => Op::Tdg,
            Op::Tdg => Op::T,
            op => op,
        };
        let same_kind = other.op() == opposite && other.condition().is_none();
        if !same_kind || gate.control_count() != other.control_count() {
            return false;
        }
        let (mine, theirs) = (self.circuit.controls(gate), self.circuit.controls(other));
        if gate.target() == other.target() {
            return mine == theirs || mine.iter().all(|control| theirs.contains(control));
        }
        // A controlled Z is symmetric in its qubits, where all of them must be 1.
        gate.op() == Op::Z
            && mine.iter().chain(theirs).all(|control| !control.is_negated())
            && self.qubits(at).all(|qubit| self.qubits(earlier).any(|their| their == qubit))
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::circuit::{Condition, Control};

    fn kept(push: impl FnOnce(&mut Circuit, &[QubitId])) -> usize {
        let mut circuit = Circuit::new();
        let q = circuit.add_qubits("search", 4);
        push(&mut circuit, &q);
        cancel(circuit).gates().len()
    }

    #[test]
    fn pairs_go_across_gates_that_commute() {
        let on = Control::on;
        // CNOTs onto one target commute, and so do those from one source; a CNOT from the target does not.
        let through = |middle: fn(&mut Circuit, &[QubitId])| {
            kept(|c, q| {
                c.push(Op::X, &[on(q[0])], q[1]);
                middle(c, q);
                c.push(Op::X, &[on(q[0])], q[1]);
            })
        };
        assert_eq!(through(|c, q| c.push(Op::X, &[Control::on(q[2])], q[1])), 1);
        assert_eq!(through(|c, q| c.push(Op::X, &[Control::on(q[0])], q[2])), 1);
        assert_eq!(through(|c, q| c.push(Op::T, &[], q[0])), 1);
        assert_eq!(through(|c, q| c.push(Op::X, &[], q[1])), 1);
        assert_eq!(through(|c, q| c.push(Op::X, &[Control::on(q[1])], q[2])), 3);
        assert_eq!(through(|c, q| c.push(Op::X, &[], q[0])), 3);
        assert_eq!(through(|c, q| c.push(Op::H, &[], q[1])), 3);
        assert_eq!(through(|c, q| c.push(Op::Reset, &[], q[0])), 3);
    }

    #[test]
    fn nested_pairs_go_and_conditions_stay() {
        let on = Control::on;
        let nested = kept(|c, q| {
            c.push(Op::H, &[], q[0]);
            c.push(Op::T, &[], q[0]);
            c.push(Op::Z, &[on(q[0])], q[1]);
            c.push(Op::Z, &[on(q[1])], q[0]);
            c.push(Op::Tdg, &[], q[0]);
            c.push(Op::H, &[], q[0]);
        });
        assert_eq!(nested, 0);
        let mut circuit = Circuit::new();
        let q = circuit.add_qubits("search", 1);
        let m = circuit.add_measured("outcome", 1);
        circuit.push(Op::X, &[], q[0]);
        circuit.push_if(Some(Condition::new(m[0], true)), Op::Z, &[], q[0]);
        circuit.push(Op::X, &[], q[0]);
        assert_eq!(cancel(circuit).gates().len(), 3);
    }

    #[test]
    fn regions_follow_and_blocks_stay_apart() {
        use crate::circuit::Part;
        let mut circuit = Circuit::new();
        let q = circuit.add_qubits("search", 2);
        circuit.push(Op::X, &[], q[0]);
        circuit.push(Op::H, &[], q[1]);
        circuit.note(0, Part::Compute, None);
        circuit.push(Op::X, &[], q[0]);
        circuit.note(2, Part::Mark, None);
        circuit.push(Op::H, &[], q[1]);
        circuit.note(3, Part::Undo, None);
        circuit.repeat_from(3, 5);
        let tidy = cancel(circuit);
        assert_eq!(tidy.regions.iter().map(|region| region.gates.clone()).collect::<Vec<_>>(), [0..1, 1..2]);
        assert_eq!(tidy.blocks().iter().map(|block| block.repeat).collect::<Vec<_>>(), [1, 5]);
    }
}
