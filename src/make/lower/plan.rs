//! Which node sits where.
//!
//! Input:  a network whose root is not constant.
//! Output: a [`Plan`]: a home for every node that gets a qubit, and what the root is the XOR of.
//! After:  a homeless XOR is expanded wherever it is used, a homeless AND is part of the AND that uses it or is marked
//!         directly.

use crate::circuit::{Level, Mark, PerQubit, QubitId};
use crate::id::{ConstraintId, Id, IdVec};
use crate::make::lower::Options;
use crate::make::network::{Lit, Network, Node, NodeId};

/// A XOR of at least this many qubits that is used more than once gets an ancilla: fewer are collected each time.
const LONG_XOR: usize = 8;

/// Where a node's value is.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub(super) enum Home {
    /// Nowhere.
    None,
    /// In this qubit: an input, an AND or a XOR with an ancilla of its own.
    Own(QubitId),
    /// In the ancilla of the first node, which nothing else uses: the other literal is added to it.
    TakenOver(QubitId, NodeId, Lit),
}

impl Home {
    fn qubit(self) -> Option<QubitId> {
        match self {
            Home::None => None,
            Home::Own(qubit) | Home::TakenOver(qubit, ..) => Some(qubit),
        }
    }
}

/// A part of the root, which is the XOR of its terms.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub(super) enum Term {
    /// A node that is in a qubit.
    Held(QubitId),
    /// An AND that is marked without being held anywhere.
    Direct(NodeId),
}

/// Homes, and how the root is marked.
pub(super) struct Plan<'a> {
    pub(super) network: &'a Network,
    pub(super) homes: IdVec<NodeId, Home>,
    /// Whether a node's qubit holds its complement.
    pub(super) complemented: IdVec<NodeId, bool>,
    /// An AND that is part of the only AND that uses it.
    pub(super) collapsed: IdVec<NodeId, bool>,
    /// The constraint a node serves: the first one that needs it.
    pub(super) owners: IdVec<NodeId, Option<ConstraintId>>,
    /// The root is the XOR of these, complemented where `root_complemented` is set.
    pub(super) terms: Vec<Term>,
    pub(super) root_complemented: bool,
    pub(super) search: usize,
    pub(super) mark: Option<QubitId>,
    /// The first ancilla; they follow each other.
    pub(super) first_work: usize,
    pub(super) work: usize,
}

impl Plan<'_> {
    /// The qubits whose XOR is the literal, and whether that is complemented; in increasing order.
    pub(super) fn expand(&self, lit: Lit) -> (Vec<QubitId>, bool) {
        let mut qubits = Vec::new();
        let mut complemented = lit.is_complemented();
        let mut open = vec![lit.node()];
        while let Some(node) = open.pop() {
            if let Some(qubit) = self.homes[node].qubit() {
                complemented ^= self.complemented[node];
                qubits.push(qubit);
                continue;
            }
            match self.network.nodes()[node] {
                Node::Xor(a, b) => open.extend([b.node(), a.node()]),
                other => unreachable!("{node} is {other:?} and has no home"),
            }
        }
        if qubits.len() > 1 {
            keep_odd(&mut qubits);
        }
        (qubits, complemented)
    }

    /// The literals an AND is the AND of.
    pub(super) fn operands(&self, and: NodeId) -> Vec<Lit> {
        let mut operands = Vec::new();
        let mut open = vec![Lit::new(and, false)];
        while let Some(lit) = open.pop() {
            match self.network.nodes()[lit.node()] {
                Node::And(a, b) if lit.node() == and || (self.collapsed[lit.node()] && !lit.is_complemented()) => {
                    open.extend([b, a]);
                }
                _ => operands.push(lit),
            }
        }
        operands
    }

    /// Something for every qubit.
    pub(super) fn per_qubit<T: Clone>(&self, value: T) -> PerQubit<T> {
        vec![value; self.first_work + self.work].into()
    }
}

/// Keeps, sorted, what occurs an odd number of times.
pub(super) fn keep_odd<T: Ord + Copy>(items: &mut Vec<T>) {
    items.sort_unstable();
    let mut kept = 0;
    let mut at = 0;
    while at < items.len() {
        let run = items[at..].iter().take_while(|&&item| item == items[at]).count();
        if run % 2 == 1 {
            items[kept] = items[at];
            kept += 1;
        }
        at += run;
    }
    items.truncate(kept);
}

/// How the live nodes use a node.
#[derive(Clone, Copy, Default)]
struct Uses {
    all: u32,
    /// By ANDs, plain and complemented.
    plain: u32,
    complemented: u32,
}

/// Decides where everything sits.
pub(super) fn plan<'a>(network: &'a Network, options: &Options) -> Plan<'a> {
    let search = network.searched().len();
    let mark = (options.mark == Mark::Bit).then(|| QubitId::new(search));
    let len = network.nodes().len();
    let mut plan = Plan {
        network,
        homes: vec![Home::None; len].into(),
        complemented: vec![false; len].into(),
        collapsed: vec![false; len].into(),
        owners: owners(network),
        terms: Vec::new(),
        root_complemented: network.root().is_complemented(),
        search,
        mark,
        first_work: search + usize::from(mark.is_some()),
        work: 0,
    };
    let live = network.live(&[network.root()]);
    let uses = uses(network, &live);
    let (roots, spread) = root_terms(network, &uses, options);
    collapse(&mut plan, &live, &uses, &roots, options);
    let mut direct: IdVec<NodeId, bool> = vec![false; len].into();
    roots.iter().for_each(|&(node, is_direct)| direct[node] = is_direct);
    for (id, &node) in network.nodes().iter() {
        match node {
            Node::Input(_) => plan.homes[id] = Home::Own(QubitId::new(id.index() - 1)),
            _ if !live[id] || spread[id] || plan.collapsed[id] => {}
            Node::And(..) if direct[id] => {}
            Node::And(..) => {
                plan.homes[id] = Home::Own(plan.ancilla());
                let stored = options.level != Level::Wide && uses[id].complemented > uses[id].plain;
                plan.complemented[id] = stored;
            }
            Node::Xor(a, b) => plan.place_xor(id, a, b, &uses),
            Node::Const => {}
        }
    }
    plan.finish_root(&roots);
    plan
}

impl Plan<'_> {
    fn ancilla(&mut self) -> QubitId {
        self.work += 1;
        QubitId::new(self.first_work + self.work - 1)
    }

    fn place_xor(&mut self, id: NodeId, a: Lit, b: Lit, uses: &IdVec<NodeId, Uses>) {
        for (held, other) in [(b, a), (a, b)] {
            let node = held.node();
            let owned = self.homes[node].qubit().filter(|qubit| qubit.index() >= self.first_work);
            if let Some(qubit) = owned
                && uses[node].all == 1
            {
                self.homes[id] = Home::TakenOver(qubit, node, other);
                self.complemented[id] = self.complemented[node] ^ self.expand(other).1;
                return;
            }
        }
        if uses[id].all > 1 {
            let (qubits, complemented) = self.expand(Lit::new(id, false));
            if qubits.len() >= LONG_XOR {
                self.homes[id] = Home::Own(self.ancilla());
                self.complemented[id] = complemented;
            }
        }
    }

    /// Turns the root's terms into qubits and direct ANDs, once homes are known.
    fn finish_root(&mut self, roots: &[(NodeId, bool)]) {
        let mut held = Vec::new();
        for &(node, direct) in roots {
            if direct {
                self.terms.push(Term::Direct(node));
            } else {
                let (qubits, complemented) = self.expand(Lit::new(node, false));
                self.root_complemented ^= complemented;
                held.extend(qubits);
            }
        }
        keep_odd(&mut held);
        self.terms.extend(held.into_iter().map(Term::Held));
    }
}

fn uses(network: &Network, live: &IdVec<NodeId, bool>) -> IdVec<NodeId, Uses> {
    let mut uses: IdVec<NodeId, Uses> = vec![Uses::default(); network.nodes().len()].into();
    uses[network.root().node()].all += 1;
    for (_, &node) in network.nodes().iter().filter(|&(id, _)| live[id]) {
        match node {
            Node::And(a, b) => {
                for lit in [a, b] {
                    uses[lit.node()].all += 1;
                    uses[lit.node()].plain += u32::from(!lit.is_complemented());
                    uses[lit.node()].complemented += u32::from(lit.is_complemented());
                }
            }
            Node::Xor(a, b) => [a, b].iter().for_each(|lit| uses[lit.node()].all += 1),
            Node::Const | Node::Input(_) => {}
        }
    }
    uses
}

/// The nodes whose XOR is the root (with whether each is marked directly), and the XORs spread out on the way.
fn root_terms(
    network: &Network,
    uses: &IdVec<NodeId, Uses>,
    options: &Options,
) -> (Vec<(NodeId, bool)>, IdVec<NodeId, bool>) {
    // The mark of a bit oracle is not known to be 0, so the AND of four T gates cannot write it.
    let direct = options.mark == Mark::Phase || options.level != Level::Feedback;
    let mut spread: IdVec<NodeId, bool> = vec![false; network.nodes().len()].into();
    let mut terms = Vec::new();
    let mut open = vec![network.root().node()];
    while let Some(node) = open.pop() {
        match network.nodes()[node] {
            Node::Xor(a, b) if uses[node].all == 1 => {
                spread[node] = true;
                open.extend([b.node(), a.node()]);
            }
            Node::And(..) => terms.push((node, direct && uses[node].all == 1)),
            _ => terms.push((node, false)),
        }
    }
    (terms, spread)
}

/// Makes ANDs part of the only AND that uses them, where the level has the gates for it.
fn collapse(
    plan: &mut Plan<'_>,
    live: &IdVec<NodeId, bool>,
    uses: &IdVec<NodeId, Uses>,
    roots: &[(NodeId, bool)],
    options: &Options,
) {
    let network = plan.network;
    let fits = |lit: Lit| {
        let and = matches!(network.nodes()[lit.node()], Node::And(..));
        and && !lit.is_complemented() && uses[lit.node()].all == 1
    };
    match (options.level, options.mark) {
        (Level::Wide, _) => {
            for (id, &node) in network.nodes().iter() {
                if let Node::And(a, b) = node
                    && live[id]
                {
                    [a, b].iter().filter(|&&lit| fits(lit)).for_each(|lit| plan.collapsed[lit.node()] = true);
                }
            }
        }
        // A Z with two controls marks an AND of three.
        (Level::Toffoli | Level::CliffordT, Mark::Phase) => {
            for &(id, _) in roots.iter().filter(|(_, direct)| *direct) {
                if let Node::And(a, b) = network.nodes()[id]
                    && let Some(lit) = [b, a].into_iter().find(|&lit| fits(lit))
                {
                    plan.collapsed[lit.node()] = true;
                }
            }
        }
        _ => {}
    }
}

/// The first constraint that needs each node.
pub(super) fn owners(network: &Network) -> IdVec<NodeId, Option<ConstraintId>> {
    let mut owners: IdVec<NodeId, Option<ConstraintId>> = vec![None; network.nodes().len()].into();
    let mut seen: IdVec<NodeId, bool> = vec![false; network.nodes().len()].into();
    let mut open = Vec::new();
    for conjunct in network.conjuncts() {
        open.push(conjunct.lit.node());
        while let Some(node) = open.pop() {
            if std::mem::replace(&mut seen[node], true) {
                continue;
            }
            owners[node] = conjunct.constraint;
            if let Node::And(a, b) | Node::Xor(a, b) = network.nodes()[node] {
                open.extend([a.node(), b.node()]);
            }
        }
    }
    owners
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn what_occurs_an_odd_number_of_times_stays() {
        let mut items = vec![3, 1, 3, 2, 2, 2, 5];
        keep_odd(&mut items);
        assert_eq!(items, [1, 2, 5]);
    }
}
