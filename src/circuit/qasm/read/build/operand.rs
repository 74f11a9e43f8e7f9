//! Operands: which qubits or bits a name with an index stands for.

use super::{Builder, Checked, constant};
use crate::circuit::qasm::read::ast::{Index, Operand, Place};
use crate::circuit::qasm::read::fault::Fault;

/// What a register is made of.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub(super) enum Sort {
    Qubit,
    Bit,
}

impl Sort {
    fn words(self) -> (&'static str, &'static str) {
        match self {
            Sort::Qubit => ("qubits", "qubit"),
            Sort::Bit => ("bits", "bit"),
        }
    }
}

/// A register that was declared.
#[derive(Clone, Copy, Debug)]
pub(super) struct Declared {
    pub(super) sort: Sort,
    pub(super) start: u32,
    pub(super) len: u32,
    pub(super) place: Place,
}

/// The elements of an operand, in order.
#[derive(Clone, Copy, Debug)]
pub(super) struct Lanes {
    first: u32,
    step: i64,
    pub(super) len: u32,
}

impl Lanes {
    /// The element for lane `at` of a broadcast: a single element serves every lane.
    pub(super) fn at(self, at: u32) -> u32 {
        if self.len == 1 { self.first } else { (i64::from(self.first) + self.step * i64::from(at)) as u32 }
    }

    pub(super) fn iter(self) -> impl Iterator<Item = u32> {
        (0..self.len).map(move |at| self.at(at))
    }
}

impl<'a> Builder<'a, '_> {
    /// The elements that an operand stands for.
    pub(super) fn resolve(&self, sort: Sort, operand: &Operand<'a>) -> Checked<Lanes> {
        let fail = |fault| (operand.place, fault);
        let name = operand.name;
        let declared = *self.names.get(name).ok_or_else(|| fail(Fault::Undeclared(name.to_owned())))?;
        if declared.sort != sort {
            let (found, wanted) = (declared.sort.words().0, sort.words().1);
            return Err(fail(Fault::WrongRegister { name: name.to_owned(), found, wanted }));
        }
        let Declared { start, len, .. } = declared;
        match operand.index {
            Index::Whole => Ok(Lanes { first: start, step: 1, len }),
            Index::At(expr) => {
                let index = constant::whole(self.ast, &self.variables, expr).map_err(|fault| (expr.place, fault))?;
                let at = inside(name, index, len).map_err(|fault| (expr.place, fault))?;
                Ok(Lanes { first: start + at, step: 1, len: 1 })
            }
            Index::Span(span) => {
                let (from, step, to) = constant::span(self.ast, &self.variables, span).map_err(fail)?;
                let from = inside(name, from, len).map_err(|fault| (span.start.place, fault))?;
                let to = inside(name, to, len).map_err(|fault| (span.stop.place, fault))?;
                match constant::count(from.into(), step, to.into()).map_err(fail)? {
                    0 => Err(fail(Fault::EmptyRange)),
                    count => Ok(Lanes { first: start + from, step, len: count as u32 }),
                }
            }
        }
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
