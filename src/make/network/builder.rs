//! Building nodes: folding, structural hashing, and trying several ways to keep the cheapest.

use super::table::Table;
use super::{Conjunct, Lit, Network, Node, NodeId, mark_live};
use crate::id::{Id, IdVec};
use crate::problem::BitId;

/// A network under construction.
pub(super) struct Builder {
    nodes: Vec<Node>,
    known: Table,
    ands: usize,
}

impl Builder {
    /// The constant and one input for each searched bit.
    pub(super) fn new(searched: &[BitId]) -> Self {
        let inputs = searched.iter().map(|&bit| Node::Input(bit));
        let nodes: Vec<Node> = std::iter::once(Node::Const).chain(inputs).collect();
        Self { nodes, known: Table::with_capacity(0), ands: 0 }
    }

    /// The same with room for so many nodes.
    pub(super) fn with_capacity(searched: &[BitId], nodes: usize) -> Self {
        let mut builder = Self { known: Table::with_capacity(nodes), ..Self::new(searched) };
        builder.nodes.reserve(nodes);
        builder
    }

    /// Both hold.
    pub(super) fn and(&mut self, a: Lit, b: Lit) -> Lit {
        let (a, b) = if a <= b { (a, b) } else { (b, a) };
        if a == Lit::NO || a == !b {
            return Lit::NO;
        }
        if a == Lit::YES || a == b {
            return b;
        }
        if let Some(folded) = self.absorb(a, b).or_else(|| self.absorb(b, a)) {
            return folded;
        }
        self.node(Node::And(a, b))
    }

    /// `outer AND inner` where `inner` is an AND, or the complement of one, that shares an operand with `outer`.
    fn absorb(&mut self, outer: Lit, inner: Lit) -> Option<Lit> {
        let Node::And(p, q) = self.nodes[inner.node().index()] else { return None };
        let (hit, other) = match outer {
            o if o == p || o == !p => (p, q),
            o if o == q || o == !q => (q, p),
            _ => return None,
        };
        Some(match (hit == outer, inner.is_complemented()) {
            (true, false) => inner,
            (true, true) => self.and(outer, !other),
            (false, false) => Lit::NO,
            (false, true) => outer,
        })
    }

    /// Exactly one holds.
    pub(super) fn xor(&mut self, a: Lit, b: Lit) -> Lit {
        let flip = a.is_complemented() ^ b.is_complemented();
        let (a, b) = (a.complement_if(a.is_complemented()), b.complement_if(b.is_complemented()));
        let (a, b) = if a <= b { (a, b) } else { (b, a) };
        if a == b {
            return Lit::constant(flip);
        }
        if a == Lit::NO {
            return b.complement_if(flip);
        }
        for (outer, inner) in [(a, b), (b, a)] {
            if let Node::Xor(p, q) = self.nodes[inner.node().index()] {
                if p == outer {
                    return q.complement_if(flip);
                }
                if q == outer {
                    return p.complement_if(flip);
                }
            }
        }
        self.node(Node::Xor(a, b)).complement_if(flip)
    }

    fn node(&mut self, node: Node) -> Lit {
        let id = self.known.find_or_add(&self.nodes, &node).unwrap_or_else(|| {
            self.nodes.push(node);
            self.ands += usize::from(matches!(node, Node::And(..)));
            NodeId::new(self.nodes.len() - 1)
        });
        Lit::new(id, false)
    }

    /// How many ANDs there are.
    pub(super) fn and_count(&self) -> usize {
        self.ands
    }

    /// What a node computes.
    pub(super) fn node_at(&self, node: NodeId) -> Node {
        self.nodes[node.index()]
    }

    /// At least one holds.
    pub(super) fn or(&mut self, a: Lit, b: Lit) -> Lit {
        !self.and(!a, !b)
    }

    /// `yes` where `condition` holds, else `no`: one AND.
    pub(super) fn choose(&mut self, condition: Lit, yes: Lit, no: Lit) -> Lit {
        if no.is_constant() {
            return self.and(condition, yes.complement_if(no == Lit::YES)).complement_if(no == Lit::YES);
        }
        if yes.is_constant() {
            return self.and(!condition, no.complement_if(yes == Lit::YES)).complement_if(yes == Lit::YES);
        }
        let differ = self.xor(yes, no);
        let flip = self.and(condition, differ);
        self.xor(flip, no)
    }

    /// All hold: a balanced tree, so that the depth is the logarithm of the length.
    pub(super) fn all(&mut self, lits: &[Lit]) -> Lit {
        match lits {
            [] => Lit::YES,
            [lit] => *lit,
            [a, b] => self.and(*a, *b),
            _ => {
                let (left, right) = lits.split_at(lits.len().next_power_of_two() / 2);
                let (left, right) = (self.all(left), self.all(right));
                self.and(left, right)
            }
        }
    }

    /// An odd number hold.
    pub(super) fn odd(&mut self, lits: &[Lit]) -> Lit {
        lits.iter().fold(Lit::NO, |sum, &lit| self.xor(sum, lit))
    }

    /// Builds in each of the ways and keeps the one with the fewest new ANDs, the first of them where several are
    /// equal.
    pub(super) fn cheapest<T>(&mut self, ways: &[&dyn Fn(&mut Builder) -> T]) -> T {
        let (start, ands) = (self.nodes.len(), self.ands);
        let mut best = (usize::MAX, 0);
        for (at, way) in ways.iter().enumerate() {
            way(self);
            best = best.min((self.ands - ands, at));
            self.forget_from(start);
        }
        ways[best.1](self)
    }

    fn forget_from(&mut self, start: usize) {
        while self.nodes.len() > start {
            self.known.forget_last(&self.nodes);
            let node = self.nodes.pop();
            self.ands -= usize::from(matches!(node, Some(Node::And(..))));
        }
    }

    /// The network of the nodes that are used, and where each node of the builder went.
    pub(super) fn finish(
        self,
        searched: Vec<BitId>,
        mut conjuncts: Vec<Conjunct>,
        root: Lit,
    ) -> (Network, IdVec<NodeId, Option<Lit>>) {
        let nodes: IdVec<NodeId, Node> = self.nodes.into();
        let roots: Vec<Lit> = conjuncts.iter().map(|conjunct| conjunct.lit).chain([root]).collect();
        let live = mark_live(&nodes, &roots);
        let mut kept: IdVec<NodeId, Node> = IdVec::new();
        let mut moved: IdVec<NodeId, Option<Lit>> = vec![None; nodes.len()].into();
        let follow = |moved: &IdVec<NodeId, Option<Lit>>, lit: Lit| {
            moved[lit.node()].expect("used, so kept").complement_if(lit.is_complemented())
        };
        for (id, &node) in nodes.iter() {
            let lit = |lit: Lit| follow(&moved, lit);
            let new = match node {
                Node::Const | Node::Input(_) => node,
                _ if !live[id] => continue,
                Node::And(a, b) => Node::And(lit(a), lit(b)),
                Node::Xor(a, b) => Node::Xor(lit(a), lit(b)),
            };
            moved[id] = Some(Lit::new(kept.push(new), false));
        }
        conjuncts.iter_mut().for_each(|conjunct| conjunct.lit = follow(&moved, conjunct.lit));
        let root = follow(&moved, root);
        (Network { nodes: kept, searched, conjuncts, root }, moved)
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn trivial_cases_fold_and_equal_nodes_are_one() {
        let searched: Vec<BitId> = (0..3).map(BitId::new).collect();
        let mut b = Builder::new(&searched);
        let [x, y, z] = [1, 2, 3].map(|at| Lit::new(NodeId::new(at), false));
        assert_eq!((b.and(x, x), b.and(x, !x), b.and(x, Lit::YES)), (x, Lit::NO, x));
        assert_eq!((b.xor(x, x), b.xor(x, !x), b.xor(x, Lit::YES)), (Lit::NO, Lit::YES, !x));
        assert_eq!(b.and(x, y), b.and(y, x));
        assert_eq!(b.xor(x, !y), !b.xor(!y, !x));
        let (and, xor) = (b.and(x, y), b.xor(x, z));
        assert_eq!((b.and(and, x), b.and(and, !x), b.and(!and, !x)), (and, Lit::NO, !x));
        assert_eq!(b.and(!and, x), b.and(x, !y));
        assert_eq!(b.xor(xor, !z), !x);
    }

    #[test]
    fn the_cheapest_way_is_kept_and_the_others_leave_nothing_behind() {
        let searched: Vec<BitId> = (0..3).map(BitId::new).collect();
        let mut b = Builder::new(&searched);
        let lits: Vec<Lit> = (1..4).map(|at| Lit::new(NodeId::new(at), false)).collect();
        let dear = |b: &mut Builder| b.all(&lits);
        let cheap = |b: &mut Builder| b.odd(&lits);
        let kept = b.cheapest(&[&dear, &cheap]);
        assert_eq!((b.ands, b.nodes.len()), (0, 6));
        assert_eq!(kept, b.odd(&lits));
    }
}
