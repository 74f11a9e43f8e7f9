//! The plain clause form of a problem, for the solvers.
//!
//! Input: a checked [`Problem`]. Output: a [`Cnf`] in which variable `i` below the number of bits is bit `i` and every
//! other variable is defined, both ways, by those before it. So each solution extends to exactly one model, and counts
//! and lists projected on the bits are exact.
//!
//! The problem's own clauses stand first, copied as they are. Definitions are two-sided: G. Tseitin, "On the complexity
//! of derivation in propositional calculus", 1968 (from memory).

use crate::id::Id;
use crate::judge::reading::graph::{Graph, Node, Signal};
use crate::judge::reading::{Reading, read};
use crate::problem::{BitId, BitLit, Clauses, Problem};

/// Clauses over the bits of a problem and defined variables.
#[derive(Clone, PartialEq, Eq, Debug)]
pub struct Cnf {
    /// How many variables; those below the problem's number of bits are its bits.
    pub var_count: usize,
    /// The clauses.
    pub clauses: Clauses,
}

/// The clause form of a problem.
pub fn encode(problem: &Problem) -> Cnf {
    let Reading { graph, conjuncts } = read(problem);
    let mut writer = Writer::new(problem, &graph, &conjuncts);
    writer.define(&graph);
    conjuncts.iter().for_each(|&conjunct| writer.require(&graph, conjunct));
    Cnf { var_count: writer.var_count, clauses: writer.clauses }
}

/// Writes definitions of nodes.
struct Writer {
    clauses: Clauses,
    /// The variable of a node, where it has one.
    vars: Vec<Option<BitId>>,
    var_count: usize,
    /// Which nodes need a variable.
    needed: Vec<bool>,
}

impl Writer {
    fn new(problem: &Problem, graph: &Graph, conjuncts: &[Signal]) -> Self {
        // A conjunct that is a disjunction becomes a clause of its operands and needs no variable of its own.
        let roots = conjuncts.iter().flat_map(|conjunct| match graph.factors(conjunct.node()) {
            [] => std::slice::from_ref(conjunct),
            operands => operands,
        });
        let needed = graph.needed(roots.copied());
        Self {
            clauses: problem.clauses.clone(),
            vars: vec![None; graph.nodes().len()],
            var_count: problem.bit_count(),
            needed,
        }
    }

    fn lit(&self, signal: Signal) -> BitLit {
        let var = self.vars[signal.node()].expect("operands are defined before their users");
        BitLit::new(var, !signal.is_negated())
    }

    fn define(&mut self, graph: &Graph) {
        for (at, &node) in graph.nodes().iter().enumerate() {
            if let Node::Bit(bit) = node {
                self.vars[at] = Some(BitId::new(bit as usize));
            } else if self.needed[at] && node != Node::No {
                let operands: Vec<BitLit> = graph.operands(at).iter().map(|&operand| self.lit(operand)).collect();
                let defined = self.new_var(at);
                self.define_node(node, defined, &operands);
            }
        }
    }

    fn define_node(&mut self, node: Node, defined: BitLit, operands: &[BitLit]) {
        match (node, operands) {
            (Node::Odd { .. }, &[a, b]) => {
                for clause in [[!defined, a, b], [!defined, !a, !b], [defined, a, !b], [defined, !a, b]] {
                    self.clauses.push(&clause);
                }
            }
            (Node::Most { .. }, &[a, b, c]) => {
                for [one, other] in [[a, b], [a, c], [b, c]] {
                    self.clauses.push(&[!defined, one, other]);
                    self.clauses.push(&[defined, !one, !other]);
                }
            }
            _ => {
                operands.iter().for_each(|&operand| self.clauses.push(&[!defined, operand]));
                self.clauses.push_lit(defined);
                operands.iter().for_each(|&operand| self.clauses.push_lit(!operand));
                self.clauses.end_clause();
            }
        }
    }

    fn new_var(&mut self, node: usize) -> BitLit {
        let var = BitId::new(self.var_count);
        self.vars[node] = Some(var);
        self.var_count += 1;
        BitLit::new(var, true)
    }

    /// Adds the clause that says a conjunct holds. Conjunctions have been taken apart, so a conjunct is a negated
    /// conjunction, an exclusive or, a bit or "never".
    fn require(&mut self, graph: &Graph, conjunct: Signal) {
        if conjunct == Signal::NO {
            return self.clauses.push(&[]);
        }
        match graph.factors(conjunct.node()) {
            [] => self.clauses.push(&[self.lit(conjunct)]),
            operands => {
                operands.iter().for_each(|&operand| self.clauses.push_lit(!self.lit(operand)));
                self.clauses.end_clause();
            }
        }
    }
}
