//! Which faults a circuit can have, and which one is next.
//!
//! Input: a circuit with its problem and places, and a seed. Output: faults, one at a time. First a [`Kind`] is drawn
//! among those that the circuit can have, each as likely as the others, so that rare kinds (a lost correction) are
//! tried as often as common ones; then a place for it, and the rest of what the fault needs.

use crate::circuit::{Circuit, Condition, FOUND, Gate, MeasuredId, Op, QubitId, SEARCH, WORK};
use crate::id::Id;
use crate::judge::audit::faults::{Fault, apply};
use crate::places::Places;
use crate::problem::{Bits, Expr, ExprId, Problem};
use crate::random::SplitMix64;

/// Kinds of faults, as people make them.
#[derive(Clone, Copy, PartialEq, Eq, PartialOrd, Ord, Hash, Debug)]
pub enum Kind {
    /// A gate is dropped.
    GateDropped,
    /// A gate is doubled.
    GateDoubled,
    /// A control is moved to another qubit.
    ControlMoved,
    /// A control holds on the other value.
    ControlFlipped,
    /// A control is lost.
    ControlLost,
    /// Two neighbouring gates are swapped.
    GatesSwapped,
    /// T stands for its inverse, or S for its.
    WrongTurn,
    /// A correction after a measurement is missing.
    CorrectionMissing,
    /// A correction after a measurement is applied at the wrong time.
    CorrectionWrong,
    /// The H before a measurement is lost.
    HadamardLost,
    /// A `reset` stands for a step that erases a work qubit.
    ResetForErasing,
    /// Two bits of the register map are exchanged.
    MapPermuted,
    /// A code outside the domains is marked.
    MarkOutside,
    /// A search runs another number of iterations.
    WrongIterations,
    /// A constraint of the problem is changed.
    ConstraintChanged,
}

impl Kind {
    /// All kinds.
    pub const ALL: [Kind; 15] = [
        Kind::GateDropped,
        Kind::GateDoubled,
        Kind::ControlMoved,
        Kind::ControlFlipped,
        Kind::ControlLost,
        Kind::GatesSwapped,
        Kind::WrongTurn,
        Kind::CorrectionMissing,
        Kind::CorrectionWrong,
        Kind::HadamardLost,
        Kind::ResetForErasing,
        Kind::MapPermuted,
        Kind::MarkOutside,
        Kind::WrongIterations,
        Kind::ConstraintChanged,
    ];

    /// Its name in a report.
    pub fn name(self) -> &'static str {
        match self {
            Kind::GateDropped => "gate-dropped",
            Kind::GateDoubled => "gate-doubled",
            Kind::ControlMoved => "control-moved",
            Kind::ControlFlipped => "control-flipped",
            Kind::ControlLost => "control-lost",
            Kind::GatesSwapped => "gates-swapped",
            Kind::WrongTurn => "wrong-turn",
            Kind::CorrectionMissing => "correction-missing",
            Kind::CorrectionWrong => "correction-wrong",
            Kind::HadamardLost => "h-lost",
            Kind::ResetForErasing => "reset-for-erasing",
            Kind::MapPermuted => "map-permuted",
            Kind::MarkOutside => "mark-outside",
            Kind::WrongIterations => "wrong-iterations",
            Kind::ConstraintChanged => "constraint-changed",
        }
    }
}

/// Draws faults of one circuit.
pub struct Drawer<'c> {
    problem: &'c Problem,
    places: &'c Places,
    circuit: &'c Circuit,
    /// For each kind that there is, the places where it can be: gates, blocks, variables or changes of the problem.
    sites: Vec<(Kind, Vec<u32>)>,
    random: SplitMix64,
}

/// How many drawn faults may fail to fit before a kind is given up for this turn.
const TRIES: usize = 64;

impl<'c> Drawer<'c> {
    /// A drawer for a circuit of this problem.
    pub fn new(problem: &'c Problem, places: &'c Places, circuit: &'c Circuit, seed: u64) -> Self {
        let mut drawer = Self { problem, places, circuit, sites: Vec::new(), random: SplitMix64::new(seed) };
        for kind in Kind::ALL {
            let sites = drawer.sites_of(kind);
            if !sites.is_empty() {
                drawer.sites.push((kind, sites));
            }
        }
        drawer
    }

    /// The kinds of faults that the circuit can have.
    pub fn kinds(&self) -> impl Iterator<Item = Kind> + '_ {
        self.sites.iter().map(|&(kind, _)| kind)
    }

    /// The next fault; `None` where the circuit can have none.
    pub fn draw(&mut self) -> Option<(Kind, Fault)> {
        for _ in 0..TRIES {
            let kind = self.below(self.sites.len())?;
            let place = self.below(self.sites[kind].1.len())?;
            let (kind, site) = (self.sites[kind].0, self.sites[kind].1[place]);
            if let Some(fault) = self.at(kind, site)
                && self.fits(&fault)
            {
                return Some((kind, fault));
            }
        }
        None
    }

    fn fits(&self, fault: &Fault) -> bool {
        match fault {
            Fault::SwapPlaces(..) => apply::to_places(fault, self.places).is_some(),
            _ if fault.is_of_problem() => apply::to_problem(fault, self.problem).is_some(),
            _ => apply::to_circuit(fault, self.circuit).is_some(),
        }
    }

    fn below(&mut self, bound: usize) -> Option<usize> {
        (bound > 0).then(|| self.random.below(bound as u64) as usize)
    }

    fn sites_of(&self, kind: Kind) -> Vec<u32> {
        let is_search = self.circuit.measured.iter().any(|register| register.name == FOUND);
        let gates = |holds: &dyn Fn(usize, &Gate) -> bool| -> Vec<u32> {
            let all = self.circuit.gates().iter().enumerate();
            all.filter(|&(at, gate)| holds(at, gate)).map(|(at, _)| at as u32).collect()
        };
        let is_plain = |gate: &Gate| gate.op().is_unitary() && gate.condition().is_none();
        match kind {
            Kind::GateDropped | Kind::GateDoubled => gates(&|_, gate| is_plain(gate)),
            Kind::ControlMoved | Kind::ControlFlipped | Kind::ControlLost => gates(&|_, gate| gate.control_count() > 0),
            Kind::GatesSwapped => gates(&|at, _| self.may_swap(at)),
            Kind::WrongTurn => gates(&|_, gate| apply::adjoint(gate.op()).is_some()),
            Kind::CorrectionMissing | Kind::CorrectionWrong => gates(&|_, gate| gate.condition().is_some()),
            Kind::HadamardLost => gates(&|at, gate| gate.op() == Op::H && self.is_before_measurement(at)),
            Kind::ResetForErasing => self.steps_on_work(),
            Kind::MapPermuted if is_search || self.places.search_len() < 2 => Vec::new(),
            Kind::MapPermuted => (0..self.places.search_len() as u32).collect(),
            Kind::MarkOutside if is_search => Vec::new(),
            Kind::MarkOutside => self.loose_variables(),
            Kind::WrongIterations if !is_search => Vec::new(),
            Kind::WrongIterations => {
                let blocks = self.circuit.blocks().iter().enumerate();
                blocks.filter(|(_, block)| block.repeat > 1).map(|(at, _)| at as u32).collect()
            }
            Kind::ConstraintChanged if is_search => Vec::new(),
            Kind::ConstraintChanged => (0..self.problem.constraint_count() as u32).collect(),
        }
    }

    /// Whether the gate and the next one are in one block, different, and share a qubit or a measured bit: gates that
    /// share nothing may be swapped at no harm, always.
    fn may_swap(&self, at: usize) -> bool {
        let gates = self.circuit.gates();
        let Some(next) = gates.get(at + 1) else { return false };
        let gate = &gates[at];
        let in_one_block = self
            .circuit
            .blocks()
            .iter()
            .any(|block| block.gates.contains(&(at as u32)) && at as u32 + 1 < block.gates.end);
        let bits = |gate: &Gate| [gate.measured(), gate.condition().map(Condition::bit)].into_iter().flatten();
        let qubits = self.qubits(gate);
        let shares = self.qubits(next).iter().any(|qubit| qubits.contains(qubit))
            || bits(gate).any(|bit: MeasuredId| bits(next).any(|other| other == bit));
        let is_same = gate.op() == next.op()
            && gate.target() == next.target()
            && gate.condition() == next.condition()
            && gate.measured() == next.measured()
            && self.circuit.controls(gate) == self.circuit.controls(next)
            && self.circuit.angle(gate) == self.circuit.angle(next);
        in_one_block && shares && !is_same
    }

    fn qubits(&self, gate: &Gate) -> Vec<QubitId> {
        let controls = self.circuit.controls(gate).iter().map(|control| control.qubit());
        controls.chain([gate.target()]).collect()
    }

    /// Whether the next gate on the target is its measurement, of another register than the final one.
    fn is_before_measurement(&self, at: usize) -> bool {
        let gates = self.circuit.gates();
        let target = gates[at].target();
        let next = gates[at + 1..].iter().find(|gate| self.qubits(gate).contains(&target));
        next.is_some_and(|gate| gate.op() == Op::Measure)
    }

    /// Steps of erasing or computing a work qubit.
    fn steps_on_work(&self) -> Vec<u32> {
        let work = self.circuit.register(WORK);
        let gates = self.circuit.gates().iter().enumerate();
        let on_work = gates.filter(|(_, gate)| matches!(gate.op(), Op::X | Op::H) && work.contains(&gate.target()));
        on_work.map(|(at, _)| at as u32).collect()
    }

    /// Variables that leave codes unused.
    fn loose_variables(&self) -> Vec<u32> {
        let vars = self.problem.vars().as_slice().iter().enumerate();
        let is_loose = |width: u8, last: u64| width > 0 && width < 63 && last + 1 < 1 << width;
        vars.filter(|(_, var)| is_loose(var.width, self.problem.size(var.domain))).map(|(at, _)| at as u32).collect()
    }

    /// A fault of this kind at this site.
    fn at(&mut self, kind: Kind, site: u32) -> Option<Fault> {
        Some(match kind {
            Kind::GateDropped | Kind::CorrectionMissing | Kind::HadamardLost => Fault::Drop(site),
            Kind::GateDoubled => Fault::Double(site),
            Kind::ControlMoved => Fault::MoveControl(site, self.control(site)?, self.any_qubit()?),
            Kind::ControlFlipped => Fault::FlipControl(site, self.control(site)?),
            Kind::ControlLost => Fault::LoseControl(site, self.control(site)?),
            Kind::GatesSwapped => Fault::Swap(site),
            Kind::WrongTurn => Fault::Adjoint(site),
            Kind::CorrectionWrong if self.random.coin() => Fault::FlipCondition(site),
            Kind::CorrectionWrong => Fault::LoseCondition(site),
            Kind::ResetForErasing => Fault::Reset(site),
            Kind::MapPermuted => Fault::SwapPlaces(site, self.below(self.places.search_len())? as u32),
            Kind::MarkOutside => Fault::Mark(self.outside(site)),
            Kind::WrongIterations => {
                let turns = self.circuit.blocks()[site as usize].repeat;
                Fault::Repeat(site, if self.random.coin() { turns + 1 } else { turns - 1 })
            }
            Kind::ConstraintChanged => self.constraint(site)?,
        })
    }

    fn control(&mut self, gate: u32) -> Option<u32> {
        let count = self.circuit.gates()[gate as usize].control_count();
        self.below(count).map(|place| place as u32)
    }

    fn any_qubit(&mut self) -> Option<u32> {
        let count = self.circuit.qubit_count();
        self.below(count).map(|qubit| qubit as u32)
    }

    /// A value of the search register in which this variable has a code outside its domain.
    fn outside(&mut self, var: u32) -> Bits {
        let var = &self.problem.vars().as_slice()[var as usize];
        let first = self.problem.size(var.domain) + 1;
        let code = first + self.random.below((1u64 << var.width) - first);
        let range = var.first_bit.index()..var.first_bit.index() + usize::from(var.width);
        debug_assert_eq!(self.circuit.register(SEARCH).len(), self.places.search_len());
        let searched = self.places.searched.iter().map(|bit| match range.contains(&bit.index()) {
            true => code >> (bit.index() - range.start) & 1 == 1,
            false => self.random.coin(),
        });
        searched.collect()
    }

    /// A change of one constraint: it is dropped, or a literal of it is negated, or a constant of it is another.
    fn constraint(&mut self, at: u32) -> Option<Fault> {
        let expressions = self.problem.constraints.len();
        let place = at as usize;
        if self.random.below(4) == 0 {
            return Some(Fault::DropConstraint(at));
        }
        if place >= expressions {
            let clause = place - expressions;
            let literal = self.below(self.problem.clauses.get(clause).len())?;
            return Some(Fault::FlipLiteral(clause as u32, literal as u32));
        }
        let constants = self.constants(self.problem.constraints[place].expr);
        let Some(chosen) = self.below(constants.len()) else { return Some(Fault::DropConstraint(at)) };
        let (expr, value) = constants[chosen];
        let value = if self.random.coin() { value.checked_add(1)? } else { value.checked_sub(1)? };
        Some(Fault::Constant(expr.index() as u32, value))
    }

    /// The integer constants that an expression uses.
    fn constants(&self, root: ExprId) -> Vec<(ExprId, i64)> {
        let exprs = &self.problem.exprs;
        let (mut seen, mut stack, mut found) = (vec![false; exprs.len()], vec![root], Vec::new());
        while let Some(id) = stack.pop() {
            if std::mem::replace(&mut seen[id.index()], true) {
                continue;
            }
            match exprs.get(id) {
                Expr::Number(value) => found.push((id, value)),
                expr => stack.extend(exprs.operands(expr)),
            }
        }
        found
    }
}
