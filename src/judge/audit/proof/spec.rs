//! The problem in the graph of the proof: its conjuncts, over the qubits of the search register.
//!
//! The clauses are taken as they are, everything else from the judge's own reading of expressions and domains.

use super::graph::{Graph, Signal};
use crate::id::Id;
use crate::judge::reading::graph::Node as Read;
use crate::judge::reading::{self, Reading};
use crate::places::{Part, Places, Start};
use crate::problem::Problem;

/// What must hold: sorted, each once. "Always" is left out.
pub(super) fn conjuncts(graph: &mut Graph, problem: &Problem, places: &Places) -> Vec<Signal> {
    let mut bits = vec![Signal::NO; problem.bit_count()];
    places.searched.iter().enumerate().for_each(|(at, bit)| bits[bit.index()] = Signal::of(at + 1));
    let mut found = Vec::new();
    let mut clause = Vec::new();
    for lits in problem.clauses.iter() {
        clause.clear();
        clause.extend(lits.iter().map(|lit| bits[lit.bit().index()] ^ lit.is_negated()));
        found.push(graph.any(&clause));
    }
    expressions(graph, problem, &bits, &mut found);
    let mut conjuncts: Vec<Signal> = found.into_iter().flat_map(|signal| graph.conjuncts(signal)).collect();
    conjuncts.sort_unstable();
    conjuncts.dedup();
    conjuncts
}

/// What a start state says of its strings.
pub(super) fn support(graph: &mut Graph, start: &Start) -> Vec<Signal> {
    let mut found = Vec::new();
    for part in start.parts() {
        let signals: Vec<Signal> = part.qubits().iter().map(|&qubit| Signal::of(qubit as usize + 1)).collect();
        let holds = match part {
            Part::Below { size, .. } => below(graph, &signals, *size),
            Part::Weight { ones, .. } => exactly(graph, &signals, *ones as usize),
        };
        found.extend(graph.conjuncts(holds));
    }
    found
}

/// The number that the signals spell, low bit first, is below `size`.
fn below(graph: &mut Graph, signals: &[Signal], size: u64) -> Signal {
    let mut is_below = Signal::NO;
    for (at, &signal) in signals.iter().enumerate() {
        // From the low bits up: this bit decides unless it is that of the size.
        is_below = match size >> at & 1 {
            1 => graph.any(&[!signal, is_below]),
            _ => graph.all(&[!signal, is_below]),
        };
    }
    if signals.len() < 64 && size >> signals.len() != 0 { !Signal::NO } else { is_below }
}

/// Exactly so many hold: `row[j]` says that j of those so far do.
fn exactly(graph: &mut Graph, signals: &[Signal], ones: usize) -> Signal {
    let mut row = vec![Signal::NO; ones + 1];
    row[0] = !Signal::NO;
    for &signal in signals {
        for j in (0..=ones).rev() {
            let stays = graph.all(&[row[j], !signal]);
            let grows = if j > 0 { graph.all(&[row[j - 1], signal]) } else { Signal::NO };
            row[j] = graph.any(&[stays, grows]);
        }
    }
    row[ones]
}

fn expressions(graph: &mut Graph, problem: &Problem, bits: &[Signal], found: &mut Vec<Signal>) {
    let Reading { graph: read, conjuncts } = reading::read(problem);
    let needed = read.needed(conjuncts.iter().copied());
    let mut moved = vec![Signal::NO; read.nodes().len()];
    for (at, &node) in read.nodes().iter().enumerate().filter(|&(at, _)| needed[at]) {
        let operands: Vec<Signal> =
            read.operands(at).iter().map(|operand| moved[operand.node()] ^ operand.is_negated()).collect();
        moved[at] = match node {
            Read::No => Signal::NO,
            Read::Bit(bit) => bits[bit as usize],
            Read::All { .. } => graph.all(&operands),
            Read::Odd { .. } => graph.odd(&operands),
            Read::Most { .. } => graph.most(operands[0], operands[1], operands[2]),
        };
    }
    found.extend(conjuncts.iter().map(|conjunct| moved[conjunct.node()] ^ conjunct.is_negated()));
}
