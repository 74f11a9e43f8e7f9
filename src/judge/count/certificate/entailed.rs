//! Every model of the graph satisfies every clause.
//!
//! A clause follows from a decomposable graph if the graph has no model with all literals of the clause false, and
//! whether it has one is seen bottom up: a conjunction has one if all its parts do, since they share no variable. That
//! is done for many clauses in one pass, one bit each. A. Darwiche, P. Marquis, "A knowledge compilation map", Journal
//! of Artificial Intelligence Research 17, 2002, section 4 (clausal entailment; from memory).

use super::graph::{Graph, Node};
use super::{Formula, Refusal};
use crate::budget::Budget;
use crate::problem::BitLit;

/// Words of one pass.
const WORDS: usize = 4;
type Row = [u64; WORDS];

/// Checks all clauses.
pub(super) fn check(formula: &Formula, graph: &Graph, budget: &Budget) -> Result<(), Refusal> {
    let clauses: Vec<&[BitLit]> = formula.clauses.iter().collect();
    let mut falsified = vec![[0u64; WORDS]; 2 * formula.var_count];
    let mut rows = vec![[0u64; WORDS]; graph.nodes().len()];
    for (pass, batch) in clauses.chunks(64 * WORDS).enumerate() {
        if budget.spent() {
            return Err(Refusal::OutOfTime);
        }
        for (at, clause) in batch.iter().enumerate() {
            clause.iter().for_each(|lit| falsified[lit.index()][at / 64] |= 1 << (at % 64));
        }
        fill(graph, &falsified, &mut rows);
        let root = rows[graph.root()];
        for (at, clause) in batch.iter().enumerate() {
            // A clause with both literals of a variable is never false.
            let holds = clause.iter().any(|lit| clause.contains(&!*lit));
            if root[at / 64] >> (at % 64) & 1 == 1 && !holds {
                return Err(Refusal::Clause { clause: 64 * WORDS * pass + at + 1 });
            }
        }
        batch.iter().copied().flatten().for_each(|lit| falsified[lit.index()] = [0; WORDS]);
    }
    Ok(())
}

/// For each node and each clause of the batch, whether the node has a model that falsifies the clause as far as it
/// speaks of its variables.
fn fill(graph: &Graph, falsified: &[Row], rows: &mut [Row]) {
    for (at, node) in graph.nodes().iter().enumerate() {
        rows[at] = match *node {
            Node::Never => [0; WORDS],
            Node::Lit(lit) => falsified[lit.index()].map(|word| !word),
            Node::All { .. } => {
                let mut all = [u64::MAX; WORDS];
                for child in graph.children(node) {
                    all.iter_mut().zip(rows[child as usize]).for_each(|(word, other)| *word &= other);
                }
                all
            }
            Node::Either { yes, no, .. } => {
                let (yes, no) = (rows[yes as usize], rows[no as usize]);
                std::array::from_fn(|word| yes[word] | no[word])
            }
        };
    }
}
