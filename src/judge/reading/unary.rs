//! Counting by sorting: the truths are sorted, those that hold first, and entry `k` then says "more than `k` hold".
//!
//! The network is odd-even merge sort: K. Batcher, "Sorting networks and their applications", AFIPS Spring Joint
//! Computer Conference 1968 (from memory), in the iterative form for any length (D. Knuth, "The Art of Computer
//! Programming", volume 3, section 5.2.2, algorithm M, from memory). A comparator on truths is one OR and one AND.

use crate::judge::reading::graph::{Graph, Signal};

/// The truths sorted, those that hold first.
pub(crate) fn sort(graph: &mut Graph, truths: &[Signal]) -> Vec<Signal> {
    let mut sorted = truths.to_vec();
    let len = sorted.len();
    if len < 2 {
        return sorted;
    }
    let top = len.next_power_of_two() / 2;
    let mut p = top;
    while p > 0 {
        let (mut q, mut r, mut d) = (top, 0, p);
        loop {
            for at in 0..len - d {
                if at & p == r {
                    let (a, b) = (sorted[at], sorted[at + d]);
                    sorted[at] = graph.or(a, b);
                    sorted[at + d] = graph.and(a, b);
                }
            }
            if q == p {
                break;
            }
            (d, q, r) = (q - p, q / 2, p);
        }
        p /= 2;
    }
    sorted
}

/// The count behind a sorted list in binary, low bit first: bit `j` is set from each odd multiple of 2^j to the next
/// even one.
pub(crate) fn to_binary(graph: &mut Graph, sorted: &[Signal]) -> Vec<Signal> {
    let at_least = |count: usize| sorted.get(count - 1).copied().unwrap_or(Signal::NO);
    let width = usize::BITS - sorted.len().leading_zeros();
    let bit = |graph: &mut Graph, step: usize| {
        let from = (step..=sorted.len()).step_by(2 * step);
        let runs: Vec<Signal> = from.map(|from| graph.and(at_least(from), !at_least(from + step))).collect();
        graph.any(runs)
    };
    (0..width).map(|j| bit(graph, 1 << j)).collect()
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::judge::reading::graph::Node;

    /// The value of every node for one input.
    fn evaluate(graph: &Graph, input: usize) -> Vec<bool> {
        let mut values: Vec<bool> = Vec::new();
        for (at, node) in graph.nodes().iter().enumerate() {
            let mut operands = graph.operands(at).iter().map(|signal| values[signal.node()] != signal.is_negated());
            let value = match node {
                Node::No => false,
                Node::Bit(bit) => input >> bit & 1 == 1,
                Node::All { .. } => operands.all(|value| value),
                Node::Odd { .. } => operands.filter(|&value| value).count() == 1,
                Node::Most { .. } => operands.filter(|&value| value).count() >= 2,
            };
            values.push(value);
        }
        values
    }

    #[test]
    fn every_length_is_sorted_and_counted() {
        for len in 0..=11 {
            let mut graph = Graph::over(len);
            let truths: Vec<Signal> = (0..len).map(|bit| graph.bit(bit)).collect();
            let sorted = sort(&mut graph, &truths);
            let binary = to_binary(&mut graph, &sorted);
            for input in 0..1usize << len {
                let values = evaluate(&graph, input);
                let of = |signal: &Signal| values[signal.node()] != signal.is_negated();
                let count = input.count_ones() as usize;
                assert!(sorted.iter().enumerate().all(|(k, signal)| of(signal) == (count > k)), "{input:b} of {len}");
                let number = binary.iter().enumerate().map(|(j, signal)| usize::from(of(signal)) << j).sum::<usize>();
                assert_eq!(number, count, "{input:b} of {len}");
            }
        }
    }
}
