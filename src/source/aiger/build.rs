//! From a graph to a problem.

use std::collections::{BTreeSet, HashMap};

use super::Graph;
use crate::id::Id;
use crate::problem::{Domain, Expr, ExprId, Origin, Problem, VarId};

/// The problem: the output is 1. Where the output is an AND, or one of ANDs, each operand is a constraint of its own.
pub(super) fn build(graph: &Graph) -> Problem {
    let mut builder = Builder { problem: Problem::new(), nodes: HashMap::new() };
    let taken: BTreeSet<&String> = graph.names.iter().flatten().collect();
    for (at, name) in graph.names.iter().enumerate() {
        let mut usual = format!("x{}", at + 1);
        while name.is_none() && taken.contains(&usual) {
            usual.push('_');
        }
        builder.problem.add_var(name.clone().unwrap_or(usual), Domain::YesNo, None);
    }
    for (at, &literal) in graph.inputs.iter().enumerate() {
        let node = builder.problem.exprs.node(Expr::Var(VarId::new(at)));
        builder.nodes.insert(literal, node);
    }
    for (and, _) in graph.ands.iter().zip(used(graph)).filter(|(_, used)| *used) {
        let operands = [builder.node(and.left), builder.node(and.right)];
        let node = builder.problem.exprs.over(Expr::All, &operands);
        builder.nodes.insert(and.out, node);
    }
    for literal in conjuncts(graph) {
        let node = builder.node(literal);
        builder.problem.must(node, Origin::default());
    }
    builder.problem
}

/// Which ANDs the output depends on.
fn used(graph: &Graph) -> Vec<bool> {
    let mut wanted = BTreeSet::from([graph.output / 2]);
    let mut used = vec![false; graph.ands.len()];
    for (at, and) in graph.ands.iter().enumerate().rev() {
        if wanted.remove(&(and.out / 2)) {
            used[at] = true;
            wanted.extend([and.left / 2, and.right / 2]);
        }
    }
    used
}

/// The literals that must hold, each once, in increasing order.
fn conjuncts(graph: &Graph) -> BTreeSet<u64> {
    let mut all = BTreeSet::from([graph.output]);
    for and in graph.ands.iter().rev() {
        if all.remove(&and.out) {
            all.extend([and.left, and.right]);
        }
    }
    all
}

struct Builder {
    problem: Problem,
    /// The nodes of literals, even ones and negated ones.
    nodes: HashMap<u64, ExprId>,
}

impl Builder {
    fn node(&mut self, literal: u64) -> ExprId {
        if let Some(&node) = self.nodes.get(&literal) {
            return node;
        }
        let exprs = &mut self.problem.exprs;
        let node = match literal {
            0 | 1 => exprs.node(Expr::Truth(literal == 1)),
            _ => exprs.node(Expr::Not(self.nodes[&(literal - 1)])),
        };
        self.nodes.insert(literal, node);
        node
    }
}
