//! The oracle as steps that every level can write: flips, CNOTs, ANDs into clean ancillas, and the mark.
//!
//! Input:  a plan. Output: compute steps and mark steps; the undo steps are the compute steps backwards.
//! After:  outside the runs of one constraint no qubit is flipped or holds another's content.
//!
//! At the `wide` level controls keep their polarity. Elsewhere a control on 0 is a flip before and after; within a run
//! of one constraint a qubit stays flipped until something needs it otherwise.

use super::conjugation::{Conjugation, Operand, conjugate};
use super::plan::{Home, Plan, Term};
use super::{LowerError, Options};
use crate::budget::Budget;
use crate::circuit::{Control, Level, PerQubit, QubitId};
use crate::id::{ConstraintId, Id};
use crate::make::network::{Lit, Node, NodeId};

/// How many nodes are lowered between two looks at the clock.
const NODES_BETWEEN_LOOKS: usize = 4096;

/// Controls in the pool of [`Steps`].
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub(super) struct ControlRange {
    start: u32,
    len: u32,
}

/// One step.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub(super) enum Step {
    /// X.
    Flip(QubitId),
    /// CNOT from the first to the second.
    Cnot(QubitId, QubitId),
    /// The AND of at least two controls into an ancilla that is 0.
    And(ControlRange, QubitId),
    /// X on a qubit of unknown content, with at least two controls.
    Toggle(ControlRange, QubitId),
    /// -1 where all controls hold; at least one.
    Sign(ControlRange),
}

/// A run of steps that serve one constraint.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub(super) struct Run {
    pub(super) start: usize,
    pub(super) constraint: Option<ConstraintId>,
}

/// The steps of an oracle.
#[derive(Default)]
pub(super) struct Steps {
    pub(super) compute: Vec<Step>,
    pub(super) runs: Vec<Run>,
    pub(super) mark: Vec<Step>,
    controls: Vec<Control>,
}

impl Steps {
    /// Puts the compute steps of a range on other qubits. No two steps share controls in the pool.
    pub(super) fn move_qubits(&mut self, range: std::ops::Range<usize>, moved: impl Fn(QubitId) -> QubitId) {
        for step in &mut self.compute[range] {
            let controls = match step {
                Step::Flip(qubit) => {
                    *qubit = moved(*qubit);
                    continue;
                }
                Step::Cnot(source, target) => {
                    (*source, *target) = (moved(*source), moved(*target));
                    continue;
                }
                Step::And(controls, target) | Step::Toggle(controls, target) => {
                    *target = moved(*target);
                    *controls
                }
                Step::Sign(controls) => *controls,
            };
            let pool = controls.start as usize..(controls.start + controls.len) as usize;
            self.controls[pool].iter_mut().for_each(|c| *c = Control::new(moved(c.qubit()), !c.is_negated()));
        }
    }

    /// The controls of a step.
    pub(super) fn controls(&self, range: ControlRange) -> &[Control] {
        &self.controls[range.start as usize..(range.start + range.len) as usize]
    }
}

/// Plans the steps.
pub(super) fn steps(plan: &Plan<'_>, options: &Options, budget: &Budget) -> Result<Steps, LowerError> {
    let mut worker = Worker {
        plan,
        polarity_is_free: options.level == Level::Wide,
        steps: Steps::default(),
        open: Vec::new(),
        flipped: plan.per_qubit(false),
        touched: Vec::new(),
    };
    let total = plan.network.nodes().len();
    for id in plan.network.nodes().ids() {
        if id.index().is_multiple_of(NODES_BETWEEN_LOOKS) {
            if budget.spent() {
                return Err(LowerError::OutOfTime);
            }
            budget.report("lowering", id.index() as u64, Some(total as u64));
        }
        if worker.is_computed(id) {
            worker.enter(plan.owners[id]);
            worker.compute(id);
        }
    }
    worker.restore();
    worker.steps.compute = std::mem::take(&mut worker.open);
    worker.mark()?;
    worker.steps.mark = std::mem::take(&mut worker.open);
    Ok(worker.steps)
}

struct Worker<'a> {
    plan: &'a Plan<'a>,
    polarity_is_free: bool,
    steps: Steps,
    /// The steps of the part being built.
    open: Vec<Step>,
    /// Whether a qubit is flipped now.
    flipped: PerQubit<bool>,
    /// Qubits that were flipped since the last restore.
    touched: Vec<QubitId>,
}

impl Worker<'_> {
    fn is_computed(&self, id: NodeId) -> bool {
        let gate = matches!(self.plan.network.nodes()[id], Node::And(..) | Node::Xor(..));
        gate && self.plan.homes[id] != Home::None
    }

    fn enter(&mut self, constraint: Option<ConstraintId>) {
        if self.steps.runs.last().is_none_or(|run| run.constraint != constraint) {
            self.restore();
            self.steps.runs.push(Run { start: self.open.len(), constraint });
        }
    }

    fn compute(&mut self, id: NodeId) {
        match (self.plan.homes[id], self.plan.network.nodes()[id]) {
            (Home::TakenOver(qubit, _, other), _) => {
                let (sources, _) = self.plan.expand(other);
                self.add_all(&sources, qubit);
            }
            (Home::Own(qubit), Node::Xor(a, b)) => {
                let mut sources = self.plan.expand(a).0;
                sources.extend(self.plan.expand(b).0);
                super::plan::keep_odd(&mut sources);
                self.add_all(&sources, qubit);
            }
            (Home::Own(qubit), _) => {
                self.apply_and(id, |worker, controls| match *worker.steps.controls(controls) {
                    [one] => worker.copy(one, qubit),
                    _ => worker.open.push(Step::And(controls, qubit)),
                });
                if self.plan.complemented[id] {
                    self.open.push(Step::Flip(qubit));
                }
            }
            (Home::None, _) => {}
        }
    }

    /// Collects the operands of an AND, applies `act` to the controls that hold where it holds, and puts all back.
    fn apply_and(&mut self, id: NodeId, act: impl FnOnce(&mut Self, ControlRange)) {
        let operand = |lit: &Lit| {
            let (qubits, complemented) = self.plan.expand(*lit);
            Operand { qubits, value: !complemented }
        };
        let found = conjugate(self.plan.operands(id).iter().map(operand).collect());
        if !found.contradictory {
            self.conjugated(&found, act);
        }
    }

    fn conjugated(&mut self, found: &Conjugation, act: impl FnOnce(&mut Self, ControlRange)) {
        for &(source, target) in &found.cnots {
            self.cnot(source, target);
        }
        let mut controls = found.controls.clone();
        if !self.polarity_is_free {
            for control in &mut controls {
                self.flip_to(control.qubit(), control.is_negated());
                *control = Control::on(control.qubit());
            }
        }
        let controls = self.pool(&controls);
        act(self, controls);
        for &(source, target) in found.cnots.iter().rev() {
            self.cnot(source, target);
        }
    }

    fn pool(&mut self, controls: &[Control]) -> ControlRange {
        let start = u32::try_from(self.steps.controls.len()).expect("fewer than 2^32 controls");
        self.steps.controls.extend_from_slice(controls);
        ControlRange { start, len: controls.len() as u32 }
    }

    /// CNOTs into the target; it is not a control of anything yet.
    fn add_all(&mut self, sources: &[QubitId], target: QubitId) {
        for &source in sources {
            self.cnot(source, target);
        }
    }

    fn cnot(&mut self, source: QubitId, target: QubitId) {
        self.flip_to(source, false);
        self.flip_to(target, false);
        self.open.push(Step::Cnot(source, target));
    }

    /// The target changes where the control holds.
    fn copy(&mut self, control: Control, target: QubitId) {
        self.open.push(Step::Cnot(control.qubit(), target));
        if control.is_negated() {
            self.open.push(Step::Flip(target));
        }
    }

    fn flip_to(&mut self, qubit: QubitId, wanted: bool) {
        if self.flipped[qubit] != wanted {
            self.flipped[qubit] = wanted;
            self.touched.push(qubit);
            self.open.push(Step::Flip(qubit));
        }
    }

    /// Flips back whatever is flipped.
    fn restore(&mut self) {
        let mut touched = std::mem::take(&mut self.touched);
        for qubit in touched.drain(..) {
            if std::mem::replace(&mut self.flipped[qubit], false) {
                self.open.push(Step::Flip(qubit));
            }
        }
        self.touched = touched;
    }

    /// Marks: the sign or the mark is flipped once for each term of the root that holds, and once more if the root is
    /// complemented.
    fn mark(&mut self) -> Result<(), LowerError> {
        let plan = self.plan;
        if plan.terms.is_empty() {
            let marked = plan.root_complemented;
            return Err(if marked { LowerError::EverythingMarked } else { LowerError::NothingMarked });
        }
        let mut complemented = plan.root_complemented;
        for &term in &plan.terms {
            match (term, plan.mark) {
                (Term::Held(qubit), Some(mark)) => self.cnot(qubit, mark),
                (Term::Held(qubit), None) => {
                    // A complemented root is a sign more: -Z is Z between two flips.
                    let flip = std::mem::take(&mut complemented);
                    self.flip_to(qubit, false);
                    self.sign_between_flips(qubit, flip);
                }
                (Term::Direct(id), Some(mark)) => {
                    self.apply_and(id, |worker, controls| match *worker.steps.controls(controls) {
                        [one] => worker.copy(one, mark),
                        _ => worker.open.push(Step::Toggle(controls, mark)),
                    });
                }
                (Term::Direct(id), None) => self.apply_and(id, Self::sign),
            }
        }
        self.restore();
        match (complemented, plan.mark) {
            (false, _) => {}
            (true, Some(mark)) => self.open.push(Step::Flip(mark)),
            (true, None) => {
                // Z X Z X = -1, on any qubit.
                let qubit = QubitId::new(0);
                self.sign_between_flips(qubit, false);
                self.sign_between_flips(qubit, true);
            }
        }
        Ok(())
    }

    fn sign_between_flips(&mut self, qubit: QubitId, flip: bool) {
        let controls = self.pool(&[Control::on(qubit)]);
        if flip {
            self.open.push(Step::Flip(qubit));
        }
        self.open.push(Step::Sign(controls));
        if flip {
            self.open.push(Step::Flip(qubit));
        }
    }

    /// -1 where the controls hold. The last of them becomes the target of a Z, so it is one that must be 1.
    fn sign(&mut self, controls: ControlRange) {
        let list = &mut self.steps.controls[controls.start as usize..];
        if let Some(at) = list.iter().rposition(|control| !control.is_negated()) {
            let last = list.len() - 1;
            list.swap(at, last);
            self.open.push(Step::Sign(controls));
            return;
        }
        let last = list.last_mut().expect("at least one control");
        *last = !*last;
        let qubit = last.qubit();
        self.open.extend([Step::Flip(qubit), Step::Sign(controls), Step::Flip(qubit)]);
    }
}
