//! The definitions as a network over the inputs, and the clauses that are left as its requirements.

use super::definitions::{Definition, Definitions, Rule, Table, column};
use crate::judge::count::engine::{Lit, Prepared};
use crate::judge::reading::graph::{Graph, Signal};
use crate::judge::reading::{Reading, take_apart};
use crate::judge::rows::tape::Tape;
use crate::problem::Clauses;

/// Tapes that evaluate the whole formula: one in which the first input changes slowest, and one in which it changes
/// fastest. What depends on slow inputs only is computed seldom.
pub(super) fn tapes(formula: &Prepared, found: &Definitions) -> [Tape; 2] {
    let reading = reading(formula, found);
    let bits = found.inputs.len();
    let slow: Vec<usize> = (0..bits).rev().collect();
    let fast: Vec<usize> = (0..bits).collect();
    [slow, fast].map(|places| Tape::new(&Clauses::default(), &reading, &places))
}

fn reading(formula: &Prepared, found: &Definitions) -> Reading {
    let mut graph = Graph::over(found.inputs.len());
    let mut signals = vec![Signal::NO; formula.class.len()];
    for (at, &var) in found.inputs.iter().enumerate() {
        signals[var as usize] = graph.bit(at);
    }
    let mut contained = vec![false; formula.clauses.len()];
    for definition in &found.defined {
        signals[definition.var as usize] = define(&mut graph, &signals, definition);
        if !matches!(definition.rule, Rule::Table { forbids: true, .. }) {
            definition.clauses.iter().for_each(|&clause| contained[clause as usize] = true);
        }
    }
    let mut conjuncts = Vec::new();
    for (clause, _) in formula.clauses.iter().zip(&contained).filter(|(_, contained)| !**contained) {
        let some = graph.any(clause.iter().map(|lit| of_literal(&signals, *lit)));
        take_apart(&graph, some, &mut conjuncts);
    }
    if conjuncts.contains(&Signal::NO) {
        conjuncts = vec![Signal::NO];
    }
    conjuncts.sort_unstable();
    conjuncts.dedup();
    Reading { graph, conjuncts }
}

fn of_literal(signals: &[Signal], lit: Lit) -> Signal {
    signals[lit.var()] ^ lit.is_negated()
}

fn define(graph: &mut Graph, signals: &[Signal], definition: &Definition) -> Signal {
    match &definition.rule {
        Rule::All { lit, of } => graph.all(of.iter().map(|&other| of_literal(signals, other))) ^ lit.is_negated(),
        Rule::Table { vars, values, .. } => {
            let signals: Vec<Signal> = vars.iter().map(|&var| signals[var as usize]).collect();
            of_table(graph, &signals, *values, signals.len())
        }
    }
}

/// A function of the first `len` signals by its table: sums and majorities as such, anything else by its last variable.
fn of_table(graph: &mut Graph, signals: &[Signal], values: Table, len: usize) -> Signal {
    if values.iter().all(|&word| word == 0) {
        return Signal::NO;
    }
    if values.iter().all(|&word| word == u64::MAX) {
        return Signal::YES;
    }
    let last = len - 1;
    let (low, high) = halves(values, last);
    if low == high {
        return of_table(graph, signals, low, last);
    }
    if low == high.map(|word| !word) {
        let rest = of_table(graph, signals, low, last);
        return graph.odd(signals[last], rest);
    }
    if len == 3 {
        let [a, b, c] = [column(0), column(1), column(2)];
        let majority: Table = std::array::from_fn(|word| (a[word] & b[word]) | (c[word] & (a[word] | b[word])));
        for flips in 0..16u8 {
            let flipped =
                (0..3).fold(majority, |table, at| if flips >> at & 1 == 1 { mirrored(table, at) } else { table });
            let flip = flips >> 3 == 1;
            if values == flipped.map(|word| if flip { !word } else { word }) {
                let at = |at: usize| signals[at] ^ (flips >> at & 1 == 1);
                return graph.most(at(0), at(1), at(2)) ^ flip;
            }
        }
    }
    let no = of_table(graph, signals, low, last);
    let yes = of_table(graph, signals, high, last);
    graph.choose(signals[last], yes, no)
}

/// The tables for the variable at this place being false, and true; both do not depend on it any more.
fn halves(values: Table, at: usize) -> (Table, Table) {
    let high = column(at);
    let only = |side: bool| -> Table {
        std::array::from_fn(|word| values[word] & if side { high[word] } else { !high[word] })
    };
    let spread = |table: Table| -> Table {
        let other = mirrored(table, at);
        std::array::from_fn(|word| table[word] | other[word])
    };
    (spread(only(false)), spread(only(true)))
}

/// The table with the variable at this place negated.
fn mirrored(table: Table, at: usize) -> Table {
    if at >= 6 {
        return std::array::from_fn(|word| table[word ^ (1 << (at - 6))]);
    }
    let high = column(at)[0];
    let shift = 1 << at;
    table.map(|word| (word & high) >> shift | (word & !high) << shift)
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::judge::reading::graph::Node;
    use crate::random::SplitMix64;

    fn value(graph: &Graph, signal: Signal, row: usize) -> bool {
        let mut values: Vec<bool> = Vec::new();
        for (at, node) in graph.nodes().iter().enumerate() {
            let of = |signal: &Signal| values[signal.node()] != signal.is_negated();
            let operands = graph.operands(at);
            let value = match *node {
                Node::No => false,
                Node::Bit(bit) => row >> bit & 1 == 1,
                Node::All { .. } => operands.iter().all(of),
                Node::Odd { .. } => of(&operands[0]) != of(&operands[1]),
                Node::Most { .. } => operands.iter().filter(|operand| of(operand)).count() >= 2,
            };
            values.push(value);
        }
        values[signal.node()] != signal.is_negated()
    }

    #[test]
    fn a_table_becomes_its_function() {
        let mut random = SplitMix64::new(6);
        for round in 0..200 {
            let len = 1 + random.below(8) as usize;
            let kind = random.below(4);
            // Functions of `len` variables: random ones, sums, majorities, and each of these complemented.
            let truth = |row: usize, noise: u64| match kind {
                0 => noise & 1 == 1,
                1 => row.count_ones() % 2 == 1,
                2 => row.count_ones().is_multiple_of(2),
                _ => row.count_ones() as usize > len / 2,
            };
            let rows: Vec<bool> = (0..1usize << len).map(|row| truth(row, random.next_u64())).collect();
            let values: Table = std::array::from_fn(|word| {
                (0..64).fold(0, |bits, bit| bits | u64::from(rows[(64 * word + bit) % rows.len()]) << bit)
            });
            let mut graph = Graph::over(len);
            let signals: Vec<Signal> = (0..len).map(|bit| graph.bit(bit)).collect();
            let signal = of_table(&mut graph, &signals, values, len);
            for (row, &wanted) in rows.iter().enumerate() {
                assert_eq!(value(&graph, signal, row), wanted, "round {round}, row {row}");
            }
        }
    }

    #[test]
    fn a_sum_of_three_takes_two_nodes_and_a_majority_one() {
        for (values, nodes) in [(0x9696_9696_9696_9696, 2), (0xe8e8_e8e8_e8e8_e8e8u64, 1), (0x8e8e_8e8e_8e8e_8e8e, 1)] {
            let mut graph = Graph::over(3);
            let signals: Vec<Signal> = (0..3).map(|bit| graph.bit(bit)).collect();
            of_table(&mut graph, &signals, [values; 4], 3);
            assert_eq!(graph.nodes().len(), 4 + nodes, "{values:x}");
        }
    }
}
