//! Symmetric functions recognised and rebuilt from the weight.
//!
//! Takes a network; gives one in which a conjunct over few bits whose value depends only on how many of them hold is made
//! from their number, in the cheapest of three ways: a comparison, an equality modulo a power of two, or a function of
//! the digits that matter (J. Boyar, R. Peralta, "Tight bounds for the multiplicative complexity of symmetric functions",
//! Theoretical Computer Science 396, 2008).
//!
//! Holds after: no conjunct that is a symmetric function of up to [`MAX_INPUTS`] bits, and no clause, has more ANDs of
//! its own than the cheapest of these ways.

use std::cell::RefCell;
use std::collections::BTreeSet;

use super::Passed;
use super::cone::Uses;
use super::copy::Copy;
use super::view::{self, Clause, View};
use crate::make::network::build::Conjuncts;
use crate::make::network::builder::Builder;
use crate::make::network::linear::Linear;
use crate::make::network::small::{INPUTS, Small};
use crate::make::network::{Lit, Network, Node, NodeId};

/// Conjuncts over more bits are left as they are: their rows are tried one by one.
const MAX_INPUTS: usize = 12;

/// Nodes of a cone that is looked at.
const MAX_NODES: usize = 4096;

/// The pass.
pub(super) fn symmetric(view: View<'_>) -> Option<Passed> {
    let network = view.network;
    // A clause of many literals is a symmetric function at its least already.
    let found = |clause: &Clause| if clause.lits.len() == 1 { values(network, clause.root) } else { None };
    let found: Vec<_> = view.clauses().iter().map(found).collect();
    if found.iter().all(Option::is_none) {
        return None;
    }
    let mut uses = Uses::new(network);
    let small = RefCell::new(Small::new());
    let mut copy = Copy::new(network);
    let mut conjuncts = Conjuncts::default();
    for (clause, found) in view.clauses().iter().zip(found) {
        if let Some((inputs, values)) = found {
            let ones: Vec<Linear> = inputs.iter().map(|&input| Linear::truth(Lit::new(input, false))).collect();
            let before = copy.builder.and_count();
            let lit = by_weight(&mut copy.builder, &small, &Linear::sum(&ones), &values);
            if copy.builder.and_count() - before < uses.freed(&[clause.root], &[]) {
                conjuncts.add(lit, clause.constraint);
                continue;
            }
        }
        view::add(&mut copy, &mut conjuncts, clause);
    }
    Some(copy.finish(conjuncts))
}

/// The bits of a cone and its value for each number of them that hold, where that is all that matters.
fn values(network: &Network, root: Lit) -> Option<(Vec<NodeId>, Vec<bool>)> {
    let mut seen = BTreeSet::from([root.node()]);
    let mut open = vec![root.node()];
    let mut inputs = Vec::new();
    while let Some(node) = open.pop() {
        if let Node::Input(_) = network.nodes()[node] {
            inputs.push(node);
        }
        if let Node::And(a, b) | Node::Xor(a, b) = network.nodes()[node] {
            open.extend([a.node(), b.node()].into_iter().filter(|&next| seen.insert(next)));
        }
        if seen.len() > MAX_NODES || inputs.len() > MAX_INPUTS {
            return None;
        }
    }
    inputs.sort_unstable();
    let nodes: Vec<NodeId> = seen.into_iter().collect();
    if inputs.len() < 3 {
        return None;
    }
    let rows = 1usize << inputs.len();
    let mut tables: Vec<Vec<bool>> = Vec::with_capacity(nodes.len());
    let place = |node: NodeId| nodes.binary_search(&node).expect("a node of the cone");
    for &node in &nodes {
        let of = |lit: Lit, row: usize| tables[place(lit.node())][row] ^ lit.is_complemented();
        let table = match network.nodes()[node] {
            Node::Const => vec![false; rows],
            Node::Input(_) => {
                let input = inputs.binary_search(&node).expect("an input");
                (0..rows).map(|row| row >> input & 1 == 1).collect()
            }
            Node::And(a, b) => (0..rows).map(|row| of(a, row) && of(b, row)).collect(),
            Node::Xor(a, b) => (0..rows).map(|row| of(a, row) ^ of(b, row)).collect(),
        };
        tables.push(table);
    }
    let table = &tables[place(root.node())];
    let value = |row: usize| table[row] ^ root.is_complemented();
    let values: Vec<bool> = (0..=inputs.len()).map(|weight| value((1 << weight) - 1)).collect();
    (0..rows).all(|row| value(row) == values[row.count_ones() as usize]).then_some((inputs, values))
}

/// The function of the weight, in the cheapest way.
fn by_weight(builder: &mut Builder, small: &RefCell<Small>, weight: &Linear, values: &[bool]) -> Lit {
    // The digits that matter, and the value for each residue; residues out of reach have none.
    let residues = |digits: usize| -> Option<Vec<Option<bool>>> {
        let mut of = vec![None; 1 << digits];
        values
            .iter()
            .enumerate()
            .all(|(at, &value)| {
                let slot = &mut of[at % (1 << digits)];
                *slot.get_or_insert(value) == value
            })
            .then_some(of)
    };
    let (digits, of) = (0..).find_map(|digits| Some((digits, residues(digits)?))).expect("each weight has a residue");
    let table = |fill: bool| {
        (0..32).fold(0u32, |table, row| {
            let value = if row < of.len() { of[row].unwrap_or(fill) } else { false };
            table | u32::from(value) << row
        })
    };
    let of_digits = |builder: &mut Builder| {
        let bits = builder.digits(weight, 0, digits).digits;
        let mut small = small.borrow_mut();
        // A function of few digits does not depend on the inputs that are not there.
        let spread = |table: u32| (digits..INPUTS).fold(table, |table, at| table | table << (1 << at));
        let best = [false, true].map(|fill| spread(table(fill))).into_iter().min_by_key(|&table| small.ands(table));
        small.build(builder, best.expect("two"), &bits)
    };
    let only = |wanted: bool| {
        let mut places = (0..of.len()).filter(|&at| of[at] == Some(wanted));
        places.next().filter(|_| places.next().is_none())
    };
    let equal = |builder: &mut Builder| match (only(true), only(false)) {
        (Some(residue), _) => Some(builder.equal_modulo(weight, residue as i128, digits)),
        (_, Some(residue)) => Some(!builder.equal_modulo(weight, residue as i128, digits)),
        _ => None,
    };
    let turns: Vec<usize> = (1..values.len()).filter(|&at| values[at] != values[at - 1]).collect();
    let compared = |builder: &mut Builder| {
        turns.iter().fold(Lit::constant(values[0]), |value, &turn| {
            let reached = builder.at_least(weight, turn as i128);
            builder.xor(value, reached)
        })
    };
    let equal_or_digits = |builder: &mut Builder| equal(builder).unwrap_or_else(|| of_digits(builder));
    match digits <= INPUTS {
        true => builder.cheapest(&[&of_digits, &equal_or_digits, &compared]),
        false => compared(builder),
    }
}
