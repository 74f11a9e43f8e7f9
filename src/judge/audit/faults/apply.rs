//! Applying a fault: a new circuit, new places or a new problem.
//!
//! Input: a [`Fault`] and what it changes. Output: the changed copy, or `None` where the fault does not fit (no such
//! gate, no such control). Holds: registers, blocks and regions are kept; only the one change is made.

use crate::circuit::{Circuit, Condition, Control, Gate, MARK, Op, QubitId, Region, SEARCH};
use crate::id::Id;
use crate::judge::audit::faults::Fault;
use crate::places::Places;
use crate::problem::check::check;
use crate::problem::{Clauses, Expr, ExprId, Problem};

/// The circuit with the fault.
pub fn to_circuit(fault: &Fault, circuit: &Circuit) -> Option<Circuit> {
    let mut copier = Copier { circuit, copy: Circuit::new() };
    circuit.qubits.iter().for_each(|register| {
        copier.copy.add_qubits(&register.name, register.len as usize);
    });
    circuit.measured.iter().for_each(|register| {
        copier.copy.add_measured(&register.name, register.len as usize);
    });
    let mut moved: Vec<u32> = Vec::with_capacity(circuit.gates().len() + 1);
    let mut fits = fault.gate().is_none();
    for (place, block) in circuit.blocks().iter().enumerate() {
        let from = copier.copy.gates().len();
        let mut at = block.gates.start;
        while at < block.gates.end {
            let here = copier.copy.gates().len() as u32;
            if fault.gate() == Some(at) {
                let taken = copier.faulty(fault, at, block.gates.end)?;
                moved.extend((0..taken).map(|_| here));
                (at, fits) = (at + taken, true);
            } else {
                copier.plain(at);
                moved.push(here);
                at += 1;
            }
        }
        let mut times = block.repeat;
        if let Fault::Repeat(changed, new) = *fault
            && changed as usize == place
        {
            (times, fits) = (new, true);
        }
        if times != 1 {
            copier.copy.repeat_from(from, times);
        }
    }
    moved.push(copier.copy.gates().len() as u32);
    if let Fault::Mark(value) = fault {
        copier.mark(value)?;
    }
    let Copier { mut copy, .. } = copier;
    copy.regions = circuit.regions.iter().filter_map(|region| region_after(region, &moved)).collect();
    (fits && !matches!(fault, Fault::SwapPlaces(..)) && !fault.is_of_problem()).then_some(copy)
}

fn region_after(region: &Region, moved: &[u32]) -> Option<Region> {
    let gates = moved[region.gates.start as usize]..moved[region.gates.end as usize];
    (!gates.is_empty()).then(|| Region { gates, ..region.clone() })
}

struct Copier<'c> {
    circuit: &'c Circuit,
    copy: Circuit,
}

impl Copier<'_> {
    fn plain(&mut self, at: u32) {
        let gate = self.circuit.gates()[at as usize];
        self.append(&gate, gate.condition(), gate.op(), self.circuit.controls(&gate));
    }

    fn append(&mut self, gate: &Gate, condition: Option<Condition>, op: Op, controls: &[Control]) {
        if let Some(bit) = gate.measured() {
            self.copy.push_measure(condition, gate.target(), bit);
        } else if let Some(angle) = self.circuit.angle(gate) {
            self.copy.push_angle(condition, op, angle, controls, gate.target());
        } else {
            self.copy.push_if(condition, op, controls, gate.target());
        }
    }

    /// Writes what stands in the place of the gate; returns how many gates of the circuit that covers.
    fn faulty(&mut self, fault: &Fault, at: u32, end: u32) -> Option<u32> {
        let gate = self.circuit.gates()[at as usize];
        let mut controls = self.circuit.controls(&gate).to_vec();
        let (mut condition, mut op) = (gate.condition(), gate.op());
        match *fault {
            Fault::Drop(_) => return Some(1),
            Fault::Double(_) => self.plain(at),
            Fault::Swap(_) => {
                if at + 1 >= end {
                    return None;
                }
                self.plain(at + 1);
                self.plain(at);
                return Some(2);
            }
            Fault::MoveControl(_, place, to) => {
                let to = QubitId::new(to as usize);
                let is_taken = to == gate.target() || controls.iter().any(|control| control.qubit() == to);
                if is_taken || to.index() >= self.circuit.qubit_count() {
                    return None;
                }
                let control = controls.get_mut(place as usize)?;
                *control = Control::new(to, !control.is_negated());
            }
            Fault::FlipControl(_, place) => {
                let control = controls.get_mut(place as usize)?;
                *control = !*control;
            }
            Fault::LoseControl(_, place) if (place as usize) < controls.len() => {
                controls.remove(place as usize);
            }
            Fault::Adjoint(_) => op = adjoint(op)?,
            Fault::FlipCondition(_) => condition = Some(Condition::new(condition?.bit(), !condition?.value())),
            Fault::LoseCondition(_) => {
                condition?;
                condition = None;
            }
            Fault::Reset(_) if op.is_unitary() => {
                self.copy.push_if(condition, Op::Reset, &[], gate.target());
                return Some(1);
            }
            _ => return None,
        }
        self.append(&gate, condition, op, &controls);
        Some(1)
    }

    /// Marks one value of the search register.
    fn mark(&mut self, value: &crate::problem::Bits) -> Option<()> {
        let (search, mark) = (self.copy.register(SEARCH), self.copy.register(MARK));
        if search.len() != value.len() || search.is_empty() {
            return None;
        }
        let mut controls: Vec<Control> =
            search.iter().zip(value.iter()).map(|(&qubit, bit)| Control::new(qubit, bit)).collect();
        if let Some(&mark) = mark.first() {
            self.copy.push(Op::X, &controls, mark);
        } else {
            let target = controls.pop().expect("a search register has qubits");
            let (qubit, is_flipped) = (target.qubit(), target.is_negated());
            if is_flipped {
                self.copy.push(Op::X, &[], qubit);
            }
            self.copy.push(Op::Z, &controls, qubit);
            if is_flipped {
                self.copy.push(Op::X, &[], qubit);
            }
        }
        Some(())
    }
}

/// The inverse of a gate that has one of its own.
pub(super) fn adjoint(op: Op) -> Option<Op> {
    match op {
        Op::S => Some(Op::Sdg),
        Op::Sdg => Some(Op::S),
        Op::T => Some(Op::Tdg),
        Op::Tdg => Some(Op::T),
        _ => None,
    }
}

/// The places with the fault.
pub fn to_places(fault: &Fault, places: &Places) -> Option<Places> {
    let Fault::SwapPlaces(a, b) = *fault else { return None };
    let (a, b) = (a as usize, b as usize);
    (a != b && a.max(b) < places.searched.len()).then(|| {
        let mut changed = places.clone();
        changed.searched.swap(a, b);
        changed
    })
}

/// The problem with the fault; `None` also where the changed problem would be none (an index outside its row).
pub fn to_problem(fault: &Fault, problem: &Problem) -> Option<Problem> {
    let mut changed = problem.clone();
    match *fault {
        Fault::DropConstraint(at) => {
            let at = at as usize;
            if at < problem.constraints.len() {
                changed.constraints.remove(at);
            } else {
                let dropped = at - problem.constraints.len();
                if dropped >= problem.clauses.len() {
                    return None;
                }
                changed.clauses = Clauses::new();
                let kept = problem.clauses.iter().enumerate().filter(|&(place, _)| place != dropped);
                kept.for_each(|(_, clause)| changed.clauses.push(clause));
            }
        }
        Fault::FlipLiteral(clause, place) => {
            let (clause, place) = (clause as usize, place as usize);
            if clause >= problem.clauses.len() || place >= problem.clauses.get(clause).len() {
                return None;
            }
            changed.clauses = Clauses::new();
            for (at, lits) in problem.clauses.iter().enumerate() {
                let mut lits = lits.to_vec();
                if at == clause {
                    lits[place] = !lits[place];
                }
                changed.clauses.push(&lits);
            }
        }
        Fault::Constant(expr, value) => {
            if expr as usize >= problem.exprs.len() {
                return None;
            }
            let id = ExprId::new(expr as usize);
            let Expr::Number(_) = problem.exprs.get(id) else { return None };
            changed.exprs.replace(id, Expr::Number(value));
        }
        _ => return None,
    }
    check(&changed).is_ok().then_some(changed)
}
