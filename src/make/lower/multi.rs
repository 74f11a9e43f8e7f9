//! X and Z with many controls, by whatever qubits are idle at that place.
//!
//! Input:  controls, a target, idle qubits that are clean (0) and idle qubits that are dirty (in any state).
//! Output: gates of a level. After: all idle qubits are as they were.
//!
//! All ways but the dirty ones shorten the list of controls, one Toffoli for each, until a single gate of the level is
//! left, and undo that backwards. A Toffoli writes into
//! - a clean ancilla: with measured erasure it costs one AND (C. Gidney, Quantum 2:74, 2018); or
//! - a *conditionally clean* qubit: where an AND of controls is 1 they all are 1, so a flip makes them 0 there, and what
//!   they hold elsewhere does not matter, as that AND is among the remaining controls (T. Khattar, C. Gidney, "Rise of
//!   conditionally clean ancillae", Quantum 9:1752, 2025). Here the target is not 0 everywhere, so it takes a Toffoli up
//!   to phases, which its inverse takes back (D. Maslov, Phys. Rev. A 93:022311, 2016).
//!
//! The dirty ways are Lemma 7.2 and Corollary 7.4 of A. Barenco and others, "Elementary gates for quantum computation",
//! Phys. Rev. A 52:3457 (1995).

use std::collections::VecDeque;

use super::gates::Pen;
use crate::circuit::{Circuit, Control, Level, MeasuredId, Op, QubitId};

/// What is idle.
#[derive(Clone, Copy, Debug, Default)]
pub struct Idle<'a> {
    /// Qubits that are 0.
    pub clean: &'a [QubitId],
    /// Qubits in any state.
    pub dirty: &'a [QubitId],
    /// Measured bits for erasing, as many as clean qubits; used at `feedback` only.
    pub outcomes: &'a [MeasuredId],
}

/// How the controls are brought together.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub enum Way {
    /// A balanced tree of ANDs in clean ancillas: the fewest T gates and layers.
    Tree,
    /// ANDs in the clean ancillas there are, at least two, then layer by layer in conditionally clean controls: the layers
    /// grow as powers of two, so the depth grows as the logarithm.
    Layers,
    /// ANDs in the clean ancillas there are, at least one, then in conditionally clean controls, one after the other.
    Conditional,
    /// A ladder over dirty qubits, two fewer than controls.
    Ladder,
    /// Two halves that borrow each other's qubits; one dirty qubit.
    Halves,
}

/// How many controls one gate may have: the list is shortened to so many.
fn width(level: Level, op: Op) -> usize {
    match (level, op) {
        (Level::Wide, _) => usize::MAX,
        (Level::Toffoli | Level::CliffordT, _) => 2,
        // A Toffoli into a qubit that is not 0 costs 7 T gates, an AND into a clean one 4.
        (_, _) => 1,
    }
}

/// The ways that the idle qubits allow, cheapest first.
pub fn ways(controls: usize, op: Op, idle: Idle<'_>, level: Level) -> Vec<Way> {
    let missing = controls.saturating_sub(width(level, op));
    let clean = idle.clean.len();
    let mut ways = Vec::new();
    ways.extend((clean >= missing).then_some(Way::Tree));
    ways.extend((clean >= 2 && missing > 1).then_some(Way::Layers));
    ways.extend((clean >= 1 && missing > 1).then_some(Way::Conditional));
    let borrowed = clean + idle.dirty.len();
    ways.extend((controls >= 3 && borrowed >= controls - 2).then_some(Way::Ladder));
    ways.extend((controls >= 4 && borrowed >= 1).then_some(Way::Halves));
    ways
}

/// Appends an X or a Z with these controls, all of which hold on 1, by the given way, which must be one of [`ways`].
pub fn append_controlled(
    circuit: &mut Circuit,
    level: Level,
    op: Op,
    (controls, target): (&[QubitId], QubitId),
    idle: Idle<'_>,
    way: Way,
) {
    assert!(matches!(op, Op::X | Op::Z), "{op:?} is neither X nor Z");
    let mut writer = Writer { pen: Pen::new(circuit, level), steps: Vec::new() };
    let borrowed: Vec<QubitId> = idle.dirty.iter().chain(idle.clean).copied().collect();
    match way {
        Way::Tree | Way::Layers | Way::Conditional => {
            // Conditionally clean qubits leave two controls: none is left to gather those in.
            let most = if way == Way::Tree { width(level, op) } else { width(level, op).max(2) };
            let left = writer.shorten(controls, idle.clean, most, way);
            writer.last(op, &left, target);
            writer.lengthen(idle.outcomes);
        }
        Way::Ladder | Way::Halves => writer.between_turns(op, target, |writer| match way {
            Way::Ladder => writer.ladder(controls, target, &borrowed),
            _ => writer.halves(controls, target, borrowed[0]),
        }),
    }
}

/// An AND that was written.
struct Step {
    operands: [QubitId; 2],
    target: QubitId,
    clean: bool,
}

struct Writer<'c> {
    pen: Pen<'c>,
    steps: Vec<Step>,
}

impl Writer<'_> {
    /// Brings the controls down to `most`.
    fn shorten(&mut self, controls: &[QubitId], clean: &[QubitId], most: usize, way: Way) -> Vec<QubitId> {
        let mut left: VecDeque<QubitId> = controls.iter().copied().collect();
        let mut clean = clean.iter();
        if way == Way::Layers {
            return self.layers(left, clean.copied().collect(), most);
        }
        if way == Way::Tree {
            while left.len() > most {
                let (Some(a), Some(b), Some(&target)) = (left.pop_front(), left.pop_front(), clean.next()) else {
                    unreachable!("a clean ancilla for each control too many");
                };
                self.step([a, b], target, true);
                left.push_back(target);
            }
            return left.into();
        }
        // The first ones go into clean ancillas as a chain, whose last link `gate` stands for all of them.
        let mut clean_now = Vec::new();
        let mut gate = left.pop_front().expect("at least one control");
        while left.len() + 1 > most
            && let Some(&target) = clean.next()
        {
            let next = left.pop_front().expect("more than one control");
            self.step([gate, next], target, true);
            clean_now.extend([gate, next]);
            gate = target;
        }
        let rest: Vec<QubitId> = left.into();
        self.conditional(gate, rest, clean_now, most)
    }

    /// Shortens the list of `gate` and `rest`; where `gate` is 1, the qubits of `ones` are 1.
    ///
    /// Two neighbours of the list are gathered in a qubit that is clean where all before them are 1; they are then 1
    /// where those and their AND are. On the way out one such qubit is left for each place, and on the way back it
    /// gathers the last two of the list.
    fn conditional(&mut self, gate: QubitId, rest: Vec<QubitId>, ones: Vec<QubitId>, most: usize) -> Vec<QubitId> {
        let mut list = vec![gate];
        let mut spare = vec![ones];
        let mut rest = VecDeque::from(rest);
        while list.len() + rest.len() > most && rest.len() >= 2 {
            let target = spare.last_mut().and_then(Vec::pop).expect("two of them are clean at each place");
            let (Some(a), Some(b)) = (rest.pop_front(), rest.pop_front()) else { break };
            self.step([a, b], target, false);
            list.push(target);
            spare.push(vec![a, b]);
        }
        list.extend(rest);
        while list.len() > most {
            let (Some(b), Some(a)) = (list.pop(), list.pop()) else { break };
            // `a` stands at place list.len(): what is clean where all before it are 1.
            let target = spare[list.len() - 1].pop().expect("one is left at each place");
            self.step([a, b], target, false);
            list.push(target);
        }
        list
    }

    /// Shortens the list layer by layer. A layer is a balanced tree over as many controls as there are clean qubits for;
    /// where its root is 1, all below it are, so they are clean for the next layer but one, which stays for the end. A
    /// layer needs the controls of the one before only after the lowest level there, and the rest of it level by level:
    /// each begins one AND after the other. At last the roots are gathered from the end in what was left of the layers.
    fn layers(&mut self, mut rest: VecDeque<QubitId>, clean: Vec<QubitId>, most: usize) -> Vec<QubitId> {
        let mut roots = Vec::new();
        let mut spare = Vec::new();
        let mut free = VecDeque::from(clean);
        while !rest.is_empty() {
            let first = roots.is_empty();
            let size = rest.len().min(free.len() + 1);
            let mut layer: VecDeque<QubitId> = rest.drain(..size).collect();
            let mut ones = layer.clone();
            while let (Some(a), Some(b)) = (layer.pop_front(), layer.pop_front()) {
                let target = free.pop_front().expect("one for each control but one");
                self.step([a, b], target, first);
                layer.push_back(target);
                ones.push_back(target);
                if layer.len() == 1 {
                    break;
                }
            }
            roots.extend(if size > 1 { ones.pop_back() } else { ones.pop_front() });
            ones.append(&mut free);
            spare.push(ones.pop_back());
            free = ones;
        }
        while roots.len() > most {
            let (Some(b), Some(a)) = (roots.pop(), roots.pop()) else { break };
            // Clean where all the roots before `a` are 1.
            let target = spare[roots.len() - 1].expect("one is left of each layer");
            self.step([a, b], target, false);
            roots.push(target);
        }
        roots
    }

    fn step(&mut self, operands: [QubitId; 2], target: QubitId, clean: bool) {
        let controls = operands.map(Control::on);
        if clean {
            self.pen.and(&controls, target);
        } else {
            self.pen.push(Op::X, &[], target);
            self.pen.toffoli_up_to_phases(operands, target);
        }
        self.steps.push(Step { operands, target, clean });
    }

    /// Undoes the steps.
    fn lengthen(&mut self, outcomes: &[MeasuredId]) {
        let mut outcomes = outcomes.iter().copied();
        for Step { operands, target, clean } in std::mem::take(&mut self.steps).into_iter().rev() {
            if clean {
                self.pen.erase(&operands.map(Control::on), target, outcomes.next());
            } else {
                // It is its own inverse.
                self.pen.toffoli_up_to_phases(operands, target);
                self.pen.push(Op::X, &[], target);
            }
        }
    }

    fn last(&mut self, op: Op, controls: &[QubitId], target: QubitId) {
        let controls: Vec<Control> = controls.iter().map(|&qubit| Control::on(qubit)).collect();
        match op {
            Op::Z => self.pen.sign(&[controls.as_slice(), &[Control::on(target)]].concat()),
            _ if controls.len() < 2 => self.pen.push(Op::X, &controls, target),
            _ => self.pen.toggle(&controls, target),
        }
    }

    /// A Z is an X between two Hadamard gates.
    fn between_turns(&mut self, op: Op, target: QubitId, x: impl FnOnce(&mut Self)) {
        let turned = op == Op::Z;
        (0..usize::from(turned)).for_each(|_| self.pen.push(Op::H, &[], target));
        x(self);
        (0..usize::from(turned)).for_each(|_| self.pen.push(Op::H, &[], target));
    }

    fn toffoli(&mut self, a: QubitId, b: QubitId, target: QubitId) {
        self.pen.toggle(&[Control::on(a), Control::on(b)], target);
    }

    /// Lemma 7.2: 4(c - 2) Toffolis over c - 2 dirty qubits.
    fn ladder(&mut self, controls: &[QubitId], target: QubitId, dirty: &[QubitId]) {
        let c = controls.len();
        match *controls {
            [a] => return self.pen.cx(a, target),
            [a, b] => return self.toffoli(a, b, target),
            _ => {}
        }
        // Rung i writes the AND of control i + 2 and the qubit below into the qubit above.
        let above = |i: usize| if i == c - 2 { target } else { dirty[i] };
        for round in 0..2 {
            let top = c - 2 - round;
            (1..=top).rev().for_each(|i| self.toffoli(controls[i + 1], dirty[i - 1], above(i)));
            self.toffoli(controls[0], controls[1], dirty[0]);
            (1..=top).for_each(|i| self.toffoli(controls[i + 1], dirty[i - 1], above(i)));
        }
    }

    /// Corollary 7.4: 8(c - 3) Toffolis over one dirty qubit, for at least five controls; ten for four.
    fn halves(&mut self, controls: &[QubitId], target: QubitId, dirty: QubitId) {
        let split = if controls.len() == 4 { 2 } else { controls.len().div_ceil(2).max(3) };
        let (first, second) = controls.split_at(split);
        let upper: Vec<QubitId> = second.iter().copied().chain([dirty]).collect();
        let idle_first: Vec<QubitId> = second.iter().copied().chain([target]).collect();
        for _ in 0..2 {
            self.ladder(first, dirty, &idle_first);
            self.ladder(&upper, target, first);
        }
    }
}
