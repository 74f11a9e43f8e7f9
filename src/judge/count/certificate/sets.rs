//! Which variables each node of a graph speaks of, and that the parts of a conjunction share none.

use super::Refusal;
use super::graph::{Graph, Node};
use crate::id::Id;
use crate::problem::BitId;

/// Bytes that the sets of one certificate may take.
const MAX_BYTES: usize = 2 << 30;

/// For each node the set of its variables.
#[derive(Debug)]
pub(super) struct VarSets {
    words: Vec<u64>,
    per_node: usize,
    /// The shown variables.
    shown: Vec<u64>,
    /// For each node, how many of its variables are shown.
    shown_count: Vec<u32>,
}

impl VarSets {
    /// The sets; refused where two parts of a conjunction share a variable.
    pub(super) fn of(graph: &Graph, var_count: usize, shown: Option<&[BitId]>) -> Result<Self, Refusal> {
        let per_node = var_count.div_ceil(64).max(1);
        let nodes = graph.nodes();
        if nodes.len().saturating_mul(8 * per_node) > MAX_BYTES {
            return Err(Refusal::TooLarge { nodes: nodes.len(), vars: var_count });
        }
        let mut words = vec![0u64; nodes.len() * per_node];
        for (at, node) in nodes.iter().enumerate() {
            let (below, own) = words.split_at_mut(at * per_node);
            let own = &mut own[..per_node];
            match *node {
                Node::Never => {}
                Node::Lit(lit) => set(own, lit.bit()),
                Node::All { .. } => {
                    for child in graph.children(node) {
                        for (word, (own, &theirs)) in own.iter_mut().zip(set_of(below, per_node, child)).enumerate() {
                            if *own & theirs != 0 {
                                let var = 64 * word + (*own & theirs).trailing_zeros() as usize;
                                return Err(Refusal::Shared { node: at, var: var + 1 });
                            }
                            *own |= theirs;
                        }
                    }
                }
                Node::Either { bit, yes, no } => {
                    for child in [yes, no] {
                        own.iter_mut().zip(set_of(below, per_node, child)).for_each(|(own, theirs)| *own |= theirs);
                    }
                    set(own, bit);
                }
            }
        }
        let mut mask = vec![0; per_node];
        match shown {
            Some(shown) => shown.iter().for_each(|&bit| set(&mut mask, bit)),
            None => (0..var_count).for_each(|var| set(&mut mask, BitId::new(var))),
        }
        let shown_count = words
            .chunks(per_node)
            .map(|own| own.iter().zip(&mask).map(|(own, mask)| (own & mask).count_ones()).sum())
            .collect();
        Ok(Self { words, per_node, shown: mask, shown_count })
    }

    /// The set of a node.
    fn own(&self, node: usize) -> &[u64] {
        set_of(&self.words, self.per_node, node as u32)
    }

    /// Whether a node speaks of a variable.
    pub(super) fn contains(&self, node: usize, bit: BitId) -> bool {
        self.own(node)[bit.index() / 64] >> (bit.index() % 64) & 1 == 1
    }

    /// How many shown variables a node speaks of.
    pub(super) fn shown_in(&self, node: usize) -> u32 {
        self.shown_count[node]
    }

    /// How many variables are shown.
    pub(super) fn shown_in_all(&self) -> u32 {
        self.shown.iter().map(|word| word.count_ones()).sum()
    }

    /// Whether a variable is shown.
    pub(super) fn is_shown(&self, bit: BitId) -> bool {
        self.shown[bit.index() / 64] >> (bit.index() % 64) & 1 == 1
    }

    /// The variables of a node, in increasing order.
    pub(super) fn vars(&self, node: usize) -> impl Iterator<Item = BitId> {
        members(self.own(node).iter().copied())
    }

    /// The shown variables of a node that one of its children does not speak of.
    pub(super) fn gap(&self, node: usize, child: usize) -> impl Iterator<Item = BitId> {
        let words = self.own(node).iter().zip(self.own(child)).zip(&self.shown);
        members(words.map(|((own, theirs), shown)| own & !theirs & shown))
    }

    /// The shown variables that a node does not speak of.
    pub(super) fn outside(&self, node: usize) -> impl Iterator<Item = BitId> {
        members(self.own(node).iter().zip(&self.shown).map(|(own, shown)| shown & !own))
    }
}

fn set(words: &mut [u64], bit: BitId) {
    words[bit.index() / 64] |= 1 << (bit.index() % 64);
}

fn set_of(words: &[u64], per_node: usize, node: u32) -> &[u64] {
    &words[node as usize * per_node..][..per_node]
}

fn members(words: impl Iterator<Item = u64>) -> impl Iterator<Item = BitId> {
    words.enumerate().flat_map(|(at, word)| {
        let mut rest = word;
        std::iter::from_fn(move || {
            let low = rest.trailing_zeros();
            (rest != 0).then(|| {
                rest &= rest - 1;
                BitId::new(64 * at + low as usize)
            })
        })
    })
}
