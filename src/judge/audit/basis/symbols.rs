//! Reading a circuit symbolically: what each qubit holds as a function of the input, for all inputs at once.
//!
//! Input: a circuit whose gates keep basis states. Output: the [`Function`] that it marks, as a node of the judge's graph;
//! or the reason why the reading does not close ([`Open`]), which says nothing about the circuit.
//!
//! Each qubit's value is a [`Form`] over the bits of the problem; a gate with controls adds the conjunction of their values.
//! Equal conjunctions are one node, so whatever is computed and uncomputed with the same operands cancels, gate by gate
//! and whatever stands between. The phase is a sum ([`Turns`]). The reading closes if in the end every search qubit
//! holds its own bit, every work qubit 0, and `mark` its own bit or a function of the others beside it; then all of that
//! is shown for every input, and only the function is left to be compared.
//!
//! A reading with [`Products::MultipliedOut`] takes a conjunction apart where one operand is an exclusive or of two terms.
//! It sees through borrowed qubits, `c (d xor p) = cd xor cp`, but has more nodes: it is for where the plain one fails.

use crate::budget::Budget;
use crate::circuit::{Circuit, Control, Gate, Op, QubitId};
use crate::id::Id;
use crate::judge::audit::basis::form::Form;
use crate::judge::audit::basis::turns::Turns;
use crate::judge::audit::oracle::{Roles, eighths};
use crate::judge::reading::graph::{Graph, Signal};
use crate::places::Places;

/// The most operands of the graph: some hundreds of megabytes.
const MAX_OPERANDS: usize = 1 << 24;
/// The most terms that are looked at: some seconds.
const MAX_WORK: u64 = 1 << 30;
/// Gates between two looks at the budget.
const GATES_A_LOOK: u32 = 1 << 12;

/// What a circuit does, where everything else was shown: it takes an input `x` to itself with the phase
/// `global pi/4 + pi f(x)`, or, with a mark, it adds `f(x)` to `mark` and gives the phase `global pi/4`.
#[derive(Clone, Debug)]
pub(crate) struct Function {
    /// The graph over the bits of the problem.
    pub(crate) graph: Graph,
    /// The function.
    pub(crate) root: Signal,
    /// The constant phase in multiples of pi/4, below 8.
    pub(crate) global: u8,
}

/// Why a reading does not close.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub(crate) enum Open {
    /// By its structure this qubit is not what it must be at the end, or not a constant where it is reset.
    Qubit(QubitId),
    /// By its structure the phase is not a sign, or depends on more than it may.
    Phase,
    /// The graph grew beyond its limit, or the budget ran out.
    Limit,
}

/// How conjunctions of exclusive ors are read.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub(crate) enum Products {
    /// As they are.
    Kept,
    /// Multiplied out where one operand has two terms and all others one.
    MultipliedOut,
}

/// Reads a circuit.
pub(crate) fn read(
    circuit: &Circuit,
    places: &Places,
    roles: &Roles,
    products: Products,
    budget: &Budget,
) -> Result<Function, Open> {
    Reader::new(circuit, places, roles, products).read(roles, budget)
}

struct Reader<'a> {
    circuit: &'a Circuit,
    places: &'a Places,
    products: Products,
    graph: Graph,
    /// What each qubit holds.
    values: Vec<Form>,
    turns: Turns,
    /// How many terms were looked at.
    work: u64,
}

impl<'a> Reader<'a> {
    fn new(circuit: &'a Circuit, places: &'a Places, roles: &Roles, products: Products) -> Self {
        let bits = places.search_len();
        // The bit after those of the problem is what `mark` holds at first.
        let graph = Graph::over(bits + 1);
        let mut values = vec![Form::default(); circuit.qubit_count()];
        for (&qubit, bit) in roles.search.iter().zip(&places.searched) {
            values[qubit.index()] = Form::term(graph.bit(bit.index()));
        }
        if let Some(mark) = roles.mark {
            values[mark.index()] = Form::term(graph.bit(bits));
        }
        Self { circuit, places, products, graph, values, turns: Turns::default(), work: 0 }
    }

    fn read(mut self, roles: &Roles, budget: &Budget) -> Result<Function, Open> {
        let mut until_look = 0;
        for block in self.circuit.blocks() {
            for _ in 0..block.repeat {
                for gate in &self.circuit.gates()[block.gates.start as usize..block.gates.end as usize] {
                    if until_look == 0 {
                        until_look = GATES_A_LOOK;
                        if budget.spent() {
                            return Err(Open::Limit);
                        }
                    }
                    until_look -= 1;
                    self.gate(gate)?;
                }
            }
        }
        self.close(roles)
    }

    fn gate(&mut self, gate: &Gate) -> Result<(), Open> {
        let target = gate.target();
        match gate.op() {
            Op::X => {
                let product = self.product(gate, None);
                let value = &mut self.values[target.index()];
                self.work += (product.terms.len() + value.terms.len()) as u64;
                value.add(&product);
            }
            Op::Reset if self.values[target.index()].as_constant().is_some() => {
                self.values[target.index()] = Form::default();
            }
            Op::Reset => return Err(Open::Qubit(target)),
            op => {
                let product = self.product(gate, Some(target));
                self.turns.add(&product, eighths(op).expect("a gate that keeps basis states"));
            }
        }
        match self.graph.operand_count() > MAX_OPERANDS || self.work > MAX_WORK {
            true => Err(Open::Limit),
            false => Ok(()),
        }
    }

    /// The conjunction of the controls of a gate, and of its target where it is diagonal.
    fn product(&mut self, gate: &Gate, target: Option<QubitId>) -> Form {
        let circuit = self.circuit;
        let controls = circuit.controls(gate).iter().copied().chain(target.map(Control::on));
        let mut factors: Vec<(Signal, Control)> = Vec::with_capacity(gate.control_count() + 1);
        for control in controls {
            let value = &self.values[control.qubit().index()];
            self.work += value.terms.len() as u64 + 1;
            match value.signal(&mut self.graph) ^ control.is_negated() {
                Signal::NO => return Form::constant(false),
                Signal::YES => {}
                signal => factors.push((signal, control)),
            }
        }
        factors.sort_unstable_by_key(|(signal, _)| *signal);
        factors.dedup_by_key(|(signal, _)| *signal);
        match factors[..] {
            [] => Form::constant(true),
            [(_, control)] => self.value(control),
            _ => self
                .multiplied_out(&factors)
                .unwrap_or_else(|| Form::term(self.graph.all(factors.iter().map(|(signal, _)| *signal)))),
        }
    }

    /// The value that makes a control hold.
    fn value(&self, control: Control) -> Form {
        self.values[control.qubit().index()].clone().negated_if(control.is_negated())
    }

    /// The conjunction as an exclusive or of conjunctions, where that is wanted and one operand has two terms.
    fn multiplied_out(&mut self, factors: &[(Signal, Control)]) -> Option<Form> {
        let terms = |control: Control| self.values[control.qubit().index()].terms.len();
        let is_sum = |factor: &&(Signal, Control)| terms(factor.1) > 1;
        let &(sum, control) = factors.iter().find(is_sum)?;
        let only_one = factors.iter().filter(is_sum).count() == 1;
        if self.products == Products::Kept || !only_one || terms(control) > 2 {
            return None;
        }
        let mut rest = Vec::new();
        for &(signal, _) in factors.iter().filter(|(signal, _)| *signal != sum) {
            self.graph.push_factors(signal, &mut rest);
        }
        let value = self.value(control);
        let mut product = Form::default();
        for term in value.terms.into_iter().chain(value.flip.then_some(Signal::YES)) {
            let mut factors = rest.clone();
            self.graph.push_factors(term, &mut factors);
            product.add(&Form::term(self.graph.all(factors)));
        }
        Some(product)
    }

    /// Shows what must hold at the end, and takes the function out.
    fn close(mut self, roles: &Roles) -> Result<Function, Open> {
        for (&qubit, bit) in roles.search.iter().zip(&self.places.searched) {
            if self.values[qubit.index()] != Form::term(self.graph.bit(bit.index())) {
                return Err(Open::Qubit(qubit));
            }
        }
        let dirty = |qubit: &&QubitId| self.values[qubit.index()].as_constant() != Some(false);
        if let Some(&qubit) = roles.work.iter().find(dirty) {
            return Err(Open::Qubit(qubit));
        }
        let (sign, global) = self.turns.sign(&mut self.graph).ok_or(Open::Phase)?;
        let own = self.graph.bit(self.places.search_len());
        let (function, open) = match roles.mark {
            Some(_) if sign.as_constant().is_none() => return Err(Open::Phase),
            Some(mark) => {
                let mut function = std::mem::take(&mut self.values[mark.index()]);
                function.add(&Form::term(own));
                (function, Open::Qubit(mark))
            }
            None => (sign, Open::Phase),
        };
        let root = function.signal(&mut self.graph);
        if self.graph.needed([root])[own.node()] {
            return Err(open);
        }
        Ok(Function { graph: self.graph, root, global })
    }
}
