//! Whether a pass kept its word: the network before equals the network after.
//!
//! Takes the network before a pass and what the pass made of it; gives how the equality of their roots was shown, or an
//! input on which they, or a node and what the map names for it, differ.
//!
//! First by running: every input where there are at most [`MAX_INPUTS`] of them, else random ones of several densities.
//! Where not every input was run, the two roots are also held against each other by a SAT engine, which stops after
//! [`SAT_STEPS`] conflicts and decisions.

use super::Passed;
use crate::budget::Budget;
use crate::columns::column;
use crate::id::{Id, IdVec};
use crate::make::network::{Lit, Network, Node, NodeId};
use crate::random::SplitMix64;
use crate::sat::{self, Answer, Batsat, Engine};

/// Up to so many searched bits every input is run.
const MAX_INPUTS: usize = 16;

/// Words of 64 random inputs each.
const RANDOM_WORDS: usize = 64;

/// Conflicts and decisions of the SAT engine for one pass.
const SAT_STEPS: u64 = 2_000;

/// How two networks were found to be equal.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub enum Shown {
    /// Every input was run.
    EveryInput,
    /// A SAT engine found no input on which they differ, and there is none.
    Refuted,
    /// Random inputs were run; the engine stopped before it knew.
    RandomInputs,
}

impl std::fmt::Display for Shown {
    fn fmt(&self, f: &mut std::fmt::Formatter<'_>) -> std::fmt::Result {
        f.write_str(match self {
            Shown::EveryInput => "equal on every input",
            Shown::Refuted => "equal, proven by refutation",
            Shown::RandomInputs => "equal on random inputs, not proven within the limit",
        })
    }
}

/// An input on which a pass changed what it had to keep: the values of the searched bits.
#[derive(Clone, PartialEq, Eq, Debug, thiserror::Error)]
#[error("{what} differs after the pass at input {}", digits(.input))]
pub struct Difference {
    /// The root, or a node of the old network with its number.
    pub what: String,
    /// The values of the searched bits, in the order of the search register.
    pub input: Vec<bool>,
}

fn digits(input: &[bool]) -> String {
    input.iter().map(|&bit| if bit { '1' } else { '0' }).collect()
}

/// Compares a network with what a pass made of it.
pub fn check(before: &Network, passed: &Passed, seed: u64, budget: &Budget) -> Result<Shown, Difference> {
    let count = before.searched().len();
    if count <= MAX_INPUTS {
        for first in (0..1u64 << count).step_by(64) {
            compare(before, passed, &|at| column(at, first as usize / 64))?;
        }
        return Ok(Shown::EveryInput);
    }
    let mut random = SplitMix64::new(seed);
    for round in 0..RANDOM_WORDS {
        let words: Vec<u64> = (0..count).map(|_| draw(&mut random, round)).collect();
        compare(before, passed, &|at| words[at])?;
    }
    refute(before, &passed.network, budget)
}

/// Random words in which a half, a quarter, three quarters, an eighth or seven eighths of the bits are set.
fn draw(random: &mut SplitMix64, round: usize) -> u64 {
    let mut next = || random.next_u64();
    match round % 5 {
        0 => next(),
        1 => next() & next(),
        2 => next() | next(),
        3 => next() & next() & next(),
        _ => next() | next() | next(),
    }
}

fn compare(before: &Network, passed: &Passed, input: &dyn Fn(usize) -> u64) -> Result<(), Difference> {
    let (old, new) = (values(before, input), values(&passed.network, input));
    let of = |values: &IdVec<NodeId, u64>, lit: Lit| values[lit.node()] ^ if lit.is_complemented() { !0 } else { 0 };
    let difference = |what: String, bits: u64| {
        let row = bits.trailing_zeros();
        let input = (0..before.searched().len()).map(|at| input(at) >> row & 1 == 1).collect();
        Err(Difference { what, input })
    };
    let bits = of(&old, before.root()) ^ of(&new, passed.network.root());
    if bits != 0 {
        return difference("the root".to_owned(), bits);
    }
    for (id, lit) in passed.map.iter() {
        let bits = lit.map_or(0, |lit| old[id] ^ of(&new, lit));
        if bits != 0 {
            return difference(format!("node {id}"), bits);
        }
    }
    Ok(())
}

fn values(network: &Network, input: &dyn Fn(usize) -> u64) -> IdVec<NodeId, u64> {
    let mut values: IdVec<NodeId, u64> = IdVec::new();
    for (id, node) in network.nodes().iter() {
        let of = |lit: Lit| values[lit.node()] ^ if lit.is_complemented() { !0 } else { 0 };
        let value = match *node {
            Node::Const => 0,
            Node::Input(_) => input(id.index() - 1),
            Node::And(a, b) => of(a) & of(b),
            Node::Xor(a, b) => of(a) ^ of(b),
        };
        values.push(value);
    }
    values
}

/// Looks for an input on which the roots differ.
fn refute(before: &Network, after: &Network, budget: &Budget) -> Result<Shown, Difference> {
    let inputs = before.searched().len();
    let mut engine = Batsat::new();
    engine.limit(SAT_STEPS);
    engine.add_clause(&[sat::Lit::new(0, false)]);
    let mut next = inputs + 1;
    let p = encode(before, &mut engine, &mut next);
    let q = encode(after, &mut engine, &mut next);
    engine.add_clause(&[p, q]);
    engine.add_clause(&[!p, !q]);
    match engine.solve(&[], budget) {
        Answer::Unsat => Ok(Shown::Refuted),
        Answer::Stopped => Ok(Shown::RandomInputs),
        Answer::Sat => {
            let input = (1..=inputs).map(|at| engine.value(at)).collect();
            Err(Difference { what: "the root".to_owned(), input })
        }
    }
}

/// Clauses for what the root needs (G. S. Tseitin, 1968). Variable 0 is *no*, the inputs follow.
fn encode(network: &Network, engine: &mut Batsat, next: &mut usize) -> sat::Lit {
    let live = network.live(&[network.root()]);
    let mut variables: IdVec<NodeId, usize> = IdVec::new();
    let of = |variables: &IdVec<NodeId, usize>, lit: Lit| sat::Lit::new(variables[lit.node()], !lit.is_complemented());
    for (id, node) in network.nodes().iter() {
        let own = match node {
            Node::Const | Node::Input(_) => id.index(),
            _ => *next,
        };
        let x = sat::Lit::new(own, true);
        match *node {
            Node::And(a, b) if live[id] => {
                let (a, b) = (of(&variables, a), of(&variables, b));
                [&[!x, a][..], &[!x, b], &[x, !a, !b]].iter().for_each(|clause| engine.add_clause(clause));
                *next += 1;
            }
            Node::Xor(a, b) if live[id] => {
                let (a, b) = (of(&variables, a), of(&variables, b));
                let clauses = [[!x, a, b], [!x, !a, !b], [x, !a, b], [x, a, !b]];
                clauses.iter().for_each(|clause| engine.add_clause(clause));
                *next += 1;
            }
            _ => {}
        }
        variables.push(own);
    }
    of(&variables, network.root())
}
