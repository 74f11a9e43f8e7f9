//! Networks of ANDs and XORs written by hand, and the oracles that compute, mark and undo them.

use tallymark::circuit::{Circuit, Control, Op, QubitId, SEARCH, WORK};

/// A node or its negation: `node << 1 | negated`; node 0 is the constant "no", then come the inputs.
pub(super) type Lit = usize;
pub(super) const NO: Lit = 0;
pub(super) const YES: Lit = 1;

#[derive(Clone, Copy)]
enum Gate {
    And(Lit, Lit),
    Xor(Lit, Lit),
}

pub(super) struct Net {
    inputs: usize,
    gates: Vec<Gate>,
}

impl Net {
    pub(super) fn over(inputs: usize) -> Self {
        Self { inputs, gates: Vec::new() }
    }

    pub(super) fn input(&self, at: usize) -> Lit {
        2 * (at + 1)
    }

    pub(super) fn inputs(&self, at: impl IntoIterator<Item = usize>) -> Vec<Lit> {
        at.into_iter().map(|at| self.input(at)).collect()
    }

    fn add(&mut self, gate: Gate) -> Lit {
        self.gates.push(gate);
        2 * (self.inputs + self.gates.len())
    }

    pub(super) fn and(&mut self, a: Lit, b: Lit) -> Lit {
        match (a.min(b), a.max(b)) {
            (NO, _) => NO,
            (YES, b) => b,
            (a, b) if a == b => a,
            (a, b) if a == b ^ 1 => NO,
            (a, b) => self.add(Gate::And(a, b)),
        }
    }

    pub(super) fn or(&mut self, a: Lit, b: Lit) -> Lit {
        self.and(a ^ 1, b ^ 1) ^ 1
    }

    pub(super) fn xor(&mut self, a: Lit, b: Lit) -> Lit {
        let flip = (a ^ b) & 1;
        match ((a & !1).min(b & !1), (a & !1).max(b & !1)) {
            (a, b) if a == b => flip,
            (NO, b) => b ^ flip,
            (a, b) => self.add(Gate::Xor(a, b)) ^ flip,
        }
    }

    pub(super) fn all(&mut self, lits: &[Lit]) -> Lit {
        lits.iter().fold(YES, |all, &lit| self.and(all, lit))
    }

    pub(super) fn any(&mut self, lits: &[Lit]) -> Lit {
        lits.iter().fold(NO, |any, &lit| self.or(any, lit))
    }

    pub(super) fn odd(&mut self, lits: &[Lit]) -> Lit {
        lits.iter().fold(NO, |odd, &lit| self.xor(odd, lit))
    }

    /// The sum and the carry of three, with one AND.
    pub(super) fn add_three(&mut self, [a, b, c]: [Lit; 3]) -> (Lit, Lit) {
        let (x, y) = (self.xor(a, c), self.xor(b, c));
        let both = self.and(x, y);
        (self.xor(x, b), self.xor(both, c))
    }

    /// How many hold, low bit first: full adders column by column.
    pub(super) fn weight(&mut self, lits: &[Lit]) -> Vec<Lit> {
        let mut columns = vec![lits.to_vec()];
        let mut bits = Vec::new();
        while let Some(mut column) = columns.pop() {
            let mut carries = Vec::new();
            while column.len() > 1 {
                let rest = column.split_off(column.len().min(3));
                let (sum, carry) = self.add_three([column[0], column[1], column.get(2).copied().unwrap_or(NO)]);
                carries.push(carry);
                column = rest;
                column.push(sum);
            }
            bits.extend(column);
            if !carries.is_empty() {
                columns.push(carries);
            }
        }
        bits
    }

    /// A number is this constant.
    pub(super) fn is(&mut self, bits: &[Lit], value: usize) -> Lit {
        let bits: Vec<Lit> = bits.iter().enumerate().map(|(at, &bit)| bit ^ (!value >> at & 1)).collect();
        self.all(&bits)
    }

    /// A number is at most this constant.
    pub(super) fn at_most(&mut self, bits: &[Lit], value: usize) -> Lit {
        let below = |net: &mut Self, below, (at, &bit): (usize, &Lit)| match value >> at & 1 {
            1 => net.or(bit ^ 1, below),
            _ => net.and(bit ^ 1, below),
        };
        bits.iter().enumerate().fold(YES, |so_far, bit| below(self, so_far, bit))
    }

    /// The phase oracle that computes every node into an ancilla, marks, and undoes.
    pub(super) fn oracle(&self, root: Lit) -> Circuit {
        let mut circuit = Circuit::new();
        let mut qubits = circuit.add_qubits(SEARCH, self.inputs);
        qubits.extend(circuit.add_qubits(WORK, self.gates.len()));
        let control = |lit: Lit| Control::new(qubits[lit / 2 - 1], lit & 1 == 0);
        let mut steps: Vec<(Vec<Control>, QubitId)> = Vec::new();
        for (gate, &to) in self.gates.iter().zip(&qubits[self.inputs..]) {
            match *gate {
                Gate::And(a, b) => steps.push((vec![control(a), control(b)], to)),
                Gate::Xor(a, b) => steps.extend([(vec![control(a)], to), (vec![control(b)], to)]),
            }
        }
        steps.iter().for_each(|(controls, to)| circuit.push(Op::X, controls, *to));
        let marked = control(root);
        let flips = |circuit: &mut Circuit| {
            if marked.is_negated() {
                circuit.push(Op::X, &[], marked.qubit());
            }
        };
        flips(&mut circuit);
        circuit.push(Op::Z, &[], marked.qubit());
        flips(&mut circuit);
        steps.iter().rev().for_each(|(controls, to)| circuit.push(Op::X, controls, *to));
        circuit
    }
}
