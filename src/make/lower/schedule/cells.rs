//! Cells: the ANDs of a network as what a schedule computes and erases.
//!
//! Input:  a network whose root is not constant.
//! Output: [`Cells`]: an AND of two forms each; a form is a XOR of searched qubits and of other cells.
//! After:  a cell's operands have smaller ids. Where the root is an AND, its conjuncts are the *items*, and the cells of
//!         the *chain* gather them one after the other: the last link is the root.
//!
//! XORs are free of T gates and are collected in place wherever they are used, so only ANDs need an ancilla.

#![allow(unreachable_pub, reason = "the macro of ids makes them public")]

use super::counter::Groups;
use crate::define_id;
use crate::id::{ConstraintId, Id, IdVec};
use crate::make::lower::plan::{keep_odd, owners};
use crate::make::network::{Lit, Network, Node, NodeId};

define_id! {
    /// An AND that a schedule may hold in an ancilla.
    CellId, "k"
}

/// A XOR of searched qubits (by their place in the register) and cells, complemented or not.
#[derive(Clone, PartialEq, Eq, Debug, Default)]
pub(in crate::make::lower) struct Form {
    pub(in crate::make::lower) inputs: Vec<u32>,
    pub(in crate::make::lower) cells: Vec<CellId>,
    pub(in crate::make::lower) complemented: bool,
}

impl Form {
    fn cell(cell: CellId) -> Self {
        Self { cells: vec![cell], ..Self::default() }
    }

    fn complement_if(mut self, flip: bool) -> Self {
        self.complemented ^= flip;
        self
    }

    fn sum(&self, other: &Self) -> Self {
        let mut inputs = [self.inputs.as_slice(), &other.inputs].concat();
        let mut cells = [self.cells.as_slice(), &other.cells].concat();
        keep_odd(&mut inputs);
        keep_odd(&mut cells);
        Self { inputs, cells, complemented: self.complemented ^ other.complemented }
    }
}

/// The AND of two forms.
#[derive(Clone, PartialEq, Eq, Debug)]
pub(in crate::make::lower) struct Cell {
    pub(in crate::make::lower) operands: [Form; 2],
    /// The cells that must be held to compute or to erase this one; sorted.
    pub(in crate::make::lower) needs: Vec<CellId>,
    /// The first constraint that needs it.
    pub(in crate::make::lower) owner: Option<ConstraintId>,
}

/// A part of the root, which is the XOR of its terms.
#[derive(Clone, PartialEq, Eq, Debug)]
pub(in crate::make::lower) enum Term {
    /// The cell is marked without being held: its operands are.
    Direct(CellId),
    /// The form is marked.
    Held(Form),
}

impl Term {
    /// The form that is held for marking.
    pub(in crate::make::lower) fn held(&self) -> Option<&Form> {
        match self {
            Self::Held(form) => Some(form),
            Self::Direct(_) => None,
        }
    }
}

/// The ANDs of a network.
pub(in crate::make::lower) struct Cells {
    pub(in crate::make::lower) list: IdVec<CellId, Cell>,
    pub(in crate::make::lower) terms: Vec<Term>,
    pub(in crate::make::lower) root_complemented: bool,
    /// The links that gather the conjuncts of the root, in order; link *i* is the AND of items 0 to *i* + 1. Empty where
    /// the root is not an AND.
    pub(in crate::make::lower) chain: Vec<CellId>,
    /// The conjuncts of the root, in the order of the chain.
    pub(in crate::make::lower) items: Vec<Form>,
    /// The conjuncts in groups of several sizes.
    pub(in crate::make::lower) groups: Vec<Groups>,
}

impl Cells {
    /// Appends the AND of two forms.
    pub(in crate::make::lower) fn push_and(&mut self, operands: [Form; 2]) -> Form {
        let owner = operands[1].cells.iter().rev().find_map(|&cell| self.list[cell].owner);
        Form::cell(self.list.push(Cell::new(operands, owner)))
    }

    /// The cells that are marked without being held.
    pub(in crate::make::lower) fn direct(&self) -> impl Iterator<Item = CellId> + '_ {
        self.terms.iter().filter_map(|term| match term {
            Term::Direct(cell) => Some(*cell),
            Term::Held(_) => None,
        })
    }

    /// The cells to hold for marking; sorted.
    pub(in crate::make::lower) fn marked_from(&self) -> Vec<CellId> {
        let mut needed: Vec<CellId> = Vec::new();
        for term in &self.terms {
            match term {
                Term::Direct(cell) => needed.extend(&self.list[*cell].needs),
                Term::Held(form) => needed.extend(&form.cells),
            }
        }
        needed.sort_unstable();
        needed.dedup();
        needed
    }

    /// The cells that these need, themselves included, without those of `stop` and what only they need; in order.
    pub(in crate::make::lower) fn cone(&self, of: &[CellId], stop: impl Fn(CellId) -> bool) -> Vec<CellId> {
        let mut seen = rustc_hash::FxHashSet::default();
        let mut open: Vec<CellId> = of.iter().copied().filter(|&cell| !stop(cell)).collect();
        let mut cone = Vec::new();
        while let Some(cell) = open.pop() {
            if seen.insert(cell) {
                cone.push(cell);
                open.extend(self.list[cell].needs.iter().copied().filter(|&cell| !stop(cell)));
            }
        }
        cone.sort_unstable();
        cone
    }
}

/// Reads the cells off a network. `direct` says whether an AND may be marked without being held.
pub(in crate::make::lower) fn cells(network: &Network, direct: bool) -> Cells {
    let mut reader = Reader::new(network);
    let root = Lit::new(network.root().node(), false);
    let root_complemented = network.root().is_complemented();
    let items = reader.items(root);
    reader.read(&items);
    let items: Vec<Form> = items.into_iter().map(|lit| reader.form(lit)).collect();
    let mut cells = Cells {
        list: reader.list,
        terms: Vec::new(),
        root_complemented,
        chain: Vec::new(),
        items: Vec::new(),
        groups: Vec::new(),
    };
    match <[Form; 1]>::try_from(items) {
        Ok([form]) => {
            cells.root_complemented ^= form.complemented;
            cells.terms = vec![Term::Held(Form { complemented: false, ..form })];
        }
        Err(items) => {
            let last = cells.gather(&items);
            cells.terms = vec![if direct { Term::Direct(last) } else { Term::Held(Form::cell(last)) }];
        }
    }
    cells.spread(direct);
    cells
}

impl Cells {
    /// Appends the chain over the items: the two that need the fewest cells, then from the one that needs the most.
    /// What needs much room comes while most ancillas are free.
    fn gather(&mut self, items: &[Form]) -> CellId {
        let mut order: Vec<(usize, &Form)> =
            items.iter().map(|form| (self.cone(&form.cells, |_| false).len(), form)).collect();
        order.sort_by_key(|(size, _)| std::cmp::Reverse(*size));
        let first = order.len() - 2;
        order.rotate_left(first);
        self.items = order.into_iter().map(|(_, form)| form.clone()).collect();
        let mut gathered = self.items[0].clone();
        for at in 1..self.items.len() {
            gathered = self.push_and([gathered, self.items[at].clone()]);
            self.chain.extend(&gathered.cells);
        }
        *self.chain.last().expect("at least two items")
    }

    /// A root that is a XOR of cells is marked term by term; a cell that nothing else needs is marked directly.
    fn spread(&mut self, direct: bool) {
        let [Term::Held(form)] = self.terms.as_slice() else { return };
        let form = form.clone();
        let needed = |cell: CellId| self.list.values().any(|other| other.needs.binary_search(&cell).is_ok());
        let (apart, held): (Vec<CellId>, Vec<CellId>) = form.cells.iter().partition(|&&cell| direct && !needed(cell));
        self.terms = apart.into_iter().map(Term::Direct).collect();
        if !held.is_empty() || !form.inputs.is_empty() {
            self.terms.push(Term::Held(Form { cells: held, ..form }));
        }
    }
}

impl Cell {
    fn new(operands: [Form; 2], owner: Option<ConstraintId>) -> Self {
        let mut needs = [operands[0].cells.as_slice(), &operands[1].cells].concat();
        needs.sort_unstable();
        needs.dedup();
        Self { operands, needs, owner }
    }
}

struct Reader<'a> {
    network: &'a Network,
    /// What a node is, once read.
    forms: IdVec<NodeId, Form>,
    list: IdVec<CellId, Cell>,
}

impl<'a> Reader<'a> {
    fn new(network: &'a Network) -> Self {
        Self { network, forms: vec![Form::default(); network.nodes().len()].into(), list: IdVec::new() }
    }

    /// The literals the root is the AND of; the root itself where it is no AND.
    fn items(&self, root: Lit) -> Vec<Lit> {
        let nodes = self.network.nodes();
        let live = self.network.live(&[root]);
        let mut users: IdVec<NodeId, u32> = vec![0; nodes.len()].into();
        for (id, node) in nodes.iter() {
            if let Node::And(a, b) | Node::Xor(a, b) = *node
                && live[id]
            {
                users[a.node()] += 1;
                users[b.node()] += 1;
            }
        }
        let mut items = Vec::new();
        let mut open = vec![root];
        while let Some(lit) = open.pop() {
            match nodes[lit.node()] {
                Node::And(a, b) if !lit.is_complemented() && (lit == root || users[lit.node()] == 1) => {
                    open.extend([b, a]);
                }
                _ => items.push(lit),
            }
        }
        items
    }

    fn form(&self, lit: Lit) -> Form {
        self.forms[lit.node()].clone().complement_if(lit.is_complemented())
    }

    /// Reads the nodes that the items need.
    fn read(&mut self, items: &[Lit]) {
        let live = self.network.live(items);
        let owners = owners(self.network);
        for (id, node) in self.network.nodes().iter().filter(|&(id, _)| live[id]) {
            self.forms[id] = match *node {
                Node::Const => Form::default(),
                Node::Input(_) => Form { inputs: vec![id.index() as u32 - 1], ..Form::default() },
                Node::Xor(a, b) => self.form(a).sum(&self.form(b)),
                Node::And(a, b) => {
                    let operands = [self.form(a), self.form(b)];
                    Form::cell(self.list.push(Cell::new(operands, owners[id])))
                }
            };
        }
    }
}
