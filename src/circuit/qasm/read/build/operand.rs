//! Operands: which qubits or bits a name with an index stands for.

use super::scope::{Meaning, Sort};
use super::{Builder, Checked, constant};
use crate::circuit::qasm::read::ast::{Index, Operand, Place, Start};
use crate::circuit::qasm::read::fault::Fault;

/// At most so many elements of all aliases that are no plain ranges.
const MAX_LISTED: u64 = 1 << 24;

/// Some qubits or bits, in order: an arithmetic sequence, or one of places in the pool [`Builder::listed`].
#[derive(Clone, Copy, Debug)]
pub(super) struct Lanes {
    list: Option<u32>,
    first: u32,
    step: i64,
    pub(super) len: u32,
}

impl Lanes {
    /// So many elements from this one on.
    pub(super) fn run(first: u32, len: u32) -> Self {
        Self { list: None, first, step: 1, len }
    }

    /// Some of these elements.
    fn part(self, from: u32, step: i64, len: u32) -> Self {
        Self { first: self.place(from), step: self.step * step, len, ..self }
    }

    fn place(self, at: u32) -> u32 {
        (i64::from(self.first) + self.step * i64::from(at)) as u32
    }
}

impl<'a> Builder<'a, '_> {
    /// The element for lane `at` of a broadcast: a single element serves every lane.
    pub(super) fn element(&self, lanes: Lanes, at: u32) -> u32 {
        let place = lanes.place(if lanes.len == 1 { 0 } else { at });
        match lanes.list {
            None => place,
            Some(start) => self.listed[(start + place) as usize],
        }
    }

    /// All elements.
    pub(super) fn elements(&self, lanes: Lanes) -> impl Iterator<Item = u32> {
        (0..lanes.len).map(move |at| self.element(lanes, at))
    }

    /// The elements that an operand stands for.
    pub(super) fn resolve(&mut self, sort: Sort, operand: &Operand<'a>) -> Checked<Lanes> {
        let name = operand.name;
        match self.whole_operand(operand)? {
            (found, lanes) if found == sort => self.indexed(operand, lanes),
            (found, lanes) => {
                let found = Meaning::Elements(found, lanes).words();
                let wanted = if sort == Sort::Qubit { "qubit" } else { "bit" };
                Err((operand.place, Fault::WrongName { name: name.to_owned(), found, wanted }))
            }
        }
    }

    /// The register of an operand, without its index.
    pub(super) fn whole_operand(&self, operand: &Operand<'a>) -> Checked<(Sort, Lanes)> {
        let name = operand.name;
        match self.scope.get(name) {
            Some(Meaning::Elements(sort, lanes)) => Ok((sort, lanes)),
            Some(other) => {
                let fault = Fault::WrongName { name: name.to_owned(), found: other.words(), wanted: "register" };
                Err((operand.place, fault))
            }
            None => Err((operand.place, Fault::Undeclared(name.to_owned()))),
        }
    }

    /// The elements of a register that an operand names.
    pub(super) fn indexed(&mut self, operand: &Operand<'a>, all: Lanes) -> Checked<Lanes> {
        let name = operand.name;
        match operand.index {
            Index::Whole => Ok(all),
            Index::At(expr) => {
                let index = self.integer(expr)?;
                let at = inside(name, index, all.len).map_err(|fault| (expr.place, fault))?;
                Ok(all.part(at, 1, 1))
            }
            Index::Span(span) => {
                let fail = |fault| (operand.place, fault);
                let (from, step, to) = constant::span(self.ast, &self.scope, span).map_err(fail)?;
                let from = inside(name, from, all.len).map_err(|fault| (span.start.place, fault))?;
                let to = inside(name, to, all.len).map_err(|fault| (span.stop.place, fault))?;
                match constant::count(from.into(), step, to.into()).map_err(fail)? {
                    0 => Err(fail(Fault::EmptyRange)),
                    count => Ok(all.part(from, step, count as u32)),
                }
            }
            Index::Set(set) => self.chosen(operand, all, set),
        }
    }

    fn chosen(&mut self, operand: &Operand<'a>, all: Lanes, set: Start) -> Checked<Lanes> {
        let mut list = Vec::new();
        for at in set.start..set.end {
            let expr = self.ast.members[at as usize];
            let index = self.integer(expr)?;
            let at = inside(operand.name, index, all.len).map_err(|fault| (expr.place, fault))?;
            list.push(self.element(all.part(at, 1, 1), 0));
        }
        self.list(&list, operand.place)
    }

    /// These elements as lanes; at least one.
    pub(super) fn list(&mut self, elements: &[u32], place: Place) -> Checked<Lanes> {
        if elements.is_empty() {
            return Err((place, Fault::EmptyRange));
        }
        let start = self.listed.len();
        if (start + elements.len()) as u64 > MAX_LISTED {
            return Err((place, Fault::Limit { what: "the number of elements of aliases", most: MAX_LISTED }));
        }
        self.listed.extend_from_slice(elements);
        Ok(Lanes { list: Some(start as u32), ..Lanes::run(0, elements.len() as u32) })
    }
}

/// The place in a register; as in the standard, -1 is its last element.
fn inside(register: &str, index: i64, len: u32) -> Result<u32, Fault> {
    let at = if index < 0 { index.checked_add(i64::from(len)) } else { Some(index) };
    match at {
        Some(at) if (0..i64::from(len)).contains(&at) => Ok(at as u32),
        _ => Err(Fault::OutsideRegister { register: register.to_owned(), index, len }),
    }
}
