//! Tallies by value: in how many solutions each pick takes each of its values.
//!
//! Picks of one bit: one pass up for the counts of all nodes and one pass down for the number of times each node is
//! used, as derivatives of the count. A. Darwiche, "On the tractable counting of theory models and its application to
//! truth maintenance and belief revision", Journal of Applied Non-Classical Logics 11, 2001 (from memory). Picks of
//! several bits: the graph is counted again with the bits of each value.

use num_bigint::BigUint;
use num_traits::{One, Zero};

use super::number::Counted;
use super::sets::VarSets;
use super::{Certificate, Formula, Node, Proof, Refusal};
use crate::budget::Budget;
use crate::id::Id;
use crate::problem::{BitId, BitLit, Problem, VarId};

/// Values of a pick beyond which it is not tallied.
const MAX_VALUES: u64 = 1 << 10;

/// The tally of one pick.
#[derive(Clone, PartialEq, Eq, Debug)]
pub struct PickValues {
    /// The pick.
    pub var: VarId,
    /// For each value, in the order of the domain, the number of solutions with it; `None` where the pick has more than
    /// 1024 values.
    pub counts: Option<Vec<BigUint>>,
}

impl PickValues {
    /// The place of the only value that the pick takes, where it is one: the pick belongs to the backbone.
    pub fn only(&self) -> Option<usize> {
        let counts = self.counts.as_ref()?;
        let mut taken = (0..counts.len()).filter(|&at| !counts[at].is_zero());
        taken.next().filter(|_| taken.next().is_none())
    }

    /// The places of the values that the pick never takes.
    pub fn never(&self) -> Vec<usize> {
        let counts = self.counts.as_deref().unwrap_or_default();
        (0..counts.len()).filter(|&at| counts[at].is_zero()).collect()
    }
}

/// The tallies of all picks whose bits are counted over, from a checked certificate.
pub fn values(
    problem: &Problem,
    formula: &Formula,
    certificate: &Certificate,
    budget: &Budget,
) -> Result<Vec<PickValues>, Refusal> {
    let shown = |bit: BitId| formula.shown.as_ref().is_none_or(|shown| shown.binary_search(&bit).is_ok());
    let picks = problem.vars().iter().filter(|(_, var)| bits(var.first_bit, var.width).all(shown));
    let Proof::Graph { graph, .. } = &certificate.proof else {
        let none = |(id, var): (VarId, &crate::problem::Var)| {
            let size = problem.size(var.domain);
            PickValues { var: id, counts: (size < MAX_VALUES).then(|| vec![BigUint::zero(); size as usize + 1]) }
        };
        return Ok(picks.map(none).collect());
    };
    let sets = VarSets::of(graph, formula.var_count, formula.shown.as_deref())?;
    let counted = Counted::new(graph, &sets);
    let total = counted.total();
    let ones = ones(&counted, &total);
    let mut tallies = Vec::new();
    for (id, var) in picks {
        if budget.spent() {
            return Err(Refusal::OutOfTime);
        }
        let size = problem.size(var.domain);
        let counts = match var.width {
            _ if size >= MAX_VALUES => None,
            0 => Some(vec![total.clone()]),
            1 => {
                let one = ones[var.first_bit.index()].clone();
                Some(vec![&total - &one, one])
            }
            width => Some((0..=size).map(|code| with_code(&counted, var.first_bit, width, code)).collect()),
        };
        tallies.push(PickValues { var: id, counts });
    }
    Ok(tallies)
}

fn bits(first: BitId, width: u8) -> impl Iterator<Item = BitId> {
    (first.index()..first.index() + usize::from(width)).map(BitId::new)
}

fn with_code(counted: &Counted<'_>, first: BitId, width: u8, code: u64) -> BigUint {
    let given: Vec<BitLit> =
        bits(first, width).enumerate().map(|(at, bit)| BitLit::new(bit, code >> at & 1 == 1)).collect();
    counted.total_given(&given)
}

/// For each variable that is shown, the number of solutions in which it is 1.
fn ones(counted: &Counted<'_>, total: &BigUint) -> Vec<BigUint> {
    let Counted { graph, sets, counts } = counted;
    let vars = graph.nodes().iter().enumerate();
    let mut ones: Vec<BigUint> = Vec::new();
    let mut add = |bit: BitId, number: BigUint| {
        if ones.len() <= bit.index() {
            ones.resize(bit.index() + 1, BigUint::zero());
        }
        ones[bit.index()] += number;
    };
    // How often each node is used: the number of ways to complete one of its models to a solution.
    let mut used = vec![BigUint::zero(); graph.nodes().len()];
    let root = graph.root();
    used[root] = BigUint::one() << sets.outside(root).count();
    sets.outside(root).for_each(|bit| add(bit, total >> 1));
    for (at, node) in vars.rev() {
        let own = std::mem::take(&mut used[at]);
        if own.is_zero() || sets.shown_in(at) == 0 {
            continue;
        }
        match *node {
            Node::Lit(lit) if !lit.is_negated() => add(lit.bit(), own),
            Node::Never | Node::Lit(_) => {}
            Node::All { .. } => {
                let children: Vec<usize> = graph.children(node).map(|child| child as usize).collect();
                for (&child, others) in children.iter().zip(products_of_others(&children, counts)) {
                    used[child] += &own * others;
                }
            }
            Node::Either { yes, no, .. } => {
                for child in [yes as usize, no as usize] {
                    let gap = sets.gap(at, child).count();
                    let models = &own * &counts[child];
                    used[child] += &own << gap;
                    if gap > 0 && !models.is_zero() {
                        sets.gap(at, child).for_each(|bit| add(bit, &models << (gap - 1)));
                    }
                }
            }
        }
    }
    let last = sets.outside(root).chain(sets.vars(root)).map(|bit| bit.index() + 1).max().unwrap_or(0);
    ones.resize(last.max(ones.len()), BigUint::zero());
    ones
}

/// For each child, the product of the counts of all others.
fn products_of_others(children: &[usize], counts: &[BigUint]) -> Vec<BigUint> {
    let mut behind = vec![BigUint::one()];
    for &child in children.iter().rev() {
        let last = behind[behind.len() - 1].clone();
        behind.push(if counts[child].is_one() { last } else { last * &counts[child] });
    }
    behind.pop();
    let mut before = BigUint::one();
    let mut products = Vec::with_capacity(children.len());
    for (&child, behind) in children.iter().zip(behind.into_iter().rev()) {
        products.push(&before * behind);
        if !counts[child].is_one() {
            before *= &counts[child];
        }
    }
    products
}
