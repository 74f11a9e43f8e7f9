//! `def`: subroutines that are circuits. Each call appends their gates; the value, if any, is a measurement.

use super::define::Defined;
use super::operand::Lanes;
use super::scope::{Meaning, Sort};
use super::{Builder, Checked, constant, gates};
use crate::circuit::qasm::read::ast::{
    Call, Expr, Given, Index, Kind, Name, Operand, Place, Source, Statement, Step, Subroutine,
};
use crate::circuit::qasm::read::fault::Fault;

/// A subroutine that was defined.
pub(super) struct Known<'a, 'p> {
    definition: &'p Subroutine<'a>,
    /// How deep its calls go.
    depth: usize,
}

impl<'a, 'p> Builder<'a, 'p> {
    /// Checks a definition, and gives its name a meaning if it is right.
    pub(super) fn define_subroutine(&mut self, definition: &'p Subroutine<'a>) -> Checked {
        let name = definition.name;
        self.check_definition(name)?;
        match self.check_subroutine(definition) {
            Ok(()) => {
                self.subroutines.push(Known { definition, depth: self.deepest });
                self.scope.declare(name, Meaning::Subroutine(self.subroutines.len() as u32 - 1), false);
                Ok(())
            }
            Err(mistake) => self.excuse(name, mistake),
        }
    }

    fn check_subroutine(&mut self, definition: &'p Subroutine<'a>) -> Checked {
        let name = definition.name;
        if let Some((_, bits)) = definition.parameters.iter().find(|(given, _)| matches!(given, Given::Bits)) {
            return Err((bits.place, Fault::BitParameter));
        }
        self.deepest = 1;
        self.depth += 1;
        let checked = self.check_calls(&definition.body);
        self.depth -= 1;
        checked?;
        let (last, others) = match definition.body.split_last() {
            Some((last, others)) => (Some(last), others),
            None => (None, [].as_slice()),
        };
        others.iter().try_for_each(no_return)?;
        match last.map(|last| (&last.kind, last.place)) {
            Some((Kind::Return(Some(_)), place)) if !definition.returns => return Err((place, Fault::NoValue)),
            Some((Kind::ReturnValue, place)) => return Err((place, Fault::ReturnValue)),
            Some((Kind::Return(value), _)) if value.is_some() == definition.returns => {}
            _ if definition.returns => return Err((name.place, Fault::NoReturn)),
            _ => last.map_or(Ok(()), no_return)?,
        }
        Ok(())
    }

    /// Whether all that is called was defined before: then calls end.
    fn check_calls(&mut self, statements: &'p [Statement<'a>]) -> Checked {
        statements.iter().try_for_each(|statement| match &statement.kind {
            Kind::Call(call) | Kind::Write(_, Source::Call(call)) | Kind::Bits(_, _, Some(Source::Call(call))) => {
                self.check_callee(call.gate)
            }
            Kind::If(choice) => {
                self.check_calls(&choice.then)?;
                self.check_calls(&choice.otherwise)
            }
            Kind::For(repeat) => {
                self.depth += 1;
                let checked = self.check_calls(&repeat.body);
                self.depth -= 1;
                checked
            }
            Kind::Gate(_) | Kind::Subroutine(_) => Err((statement.place, Fault::InnerDefinition)),
            Kind::Qubits(..) | Kind::Bits(..) => Err((statement.place, Fault::InnerDeclaration)),
            _ => Ok(()),
        })
    }

    fn check_callee(&mut self, name: Name<'a>) -> Checked {
        let is_old = self.scope.is_old;
        match self.scope.get(name.text) {
            Some(Meaning::Subroutine(number)) => self.go_to(self.subroutines[number as usize].depth, name.place),
            Some(Meaning::Gate(number)) => {
                let Defined { depth, .. } = self.gates[number as usize];
                self.go_to(depth, name.place)
            }
            _ if gates::built_in(name.text, is_old).or(gates::library(name.text, is_old)).is_some() => Ok(()),
            _ => Err((name.place, Fault::UnknownGate(name.text.to_owned()))),
        }
    }

    /// Calls a subroutine; its value goes to `into`.
    pub(super) fn enter(
        &mut self,
        number: u32,
        call: &'p Call<'a>,
        into: Option<&Operand<'a>>,
        place: Place,
    ) -> Checked {
        let definition = self.subroutines[number as usize].definition;
        let name = || call.gate.text.to_owned();
        if !call.modifiers.is_empty() || !call.operands.is_empty() {
            return Err((place, Fault::NotAGate(name())));
        }
        match (definition.returns, into) {
            (true, None) => return Err((place, Fault::Unwritten)),
            (false, Some(_)) => return Err((place, Fault::NoValue)),
            _ => {}
        }
        let arguments = &self.ast.arguments[call.arguments.start as usize..call.arguments.end as usize];
        let (wanted, found) = (definition.parameters.len(), arguments.len());
        if wanted != found {
            return Err((call.gate.place, Fault::Parameters { name: name(), wanted, found }));
        }
        self.spend(place)?;
        let into = into.map(|into| self.resolve(Sort::Bit, into).map(|lanes| (lanes, into.place))).transpose()?;
        let mut given = Vec::with_capacity(wanted);
        for (&(kind, name), &argument) in definition.parameters.iter().zip(arguments) {
            given.push((name, self.argument(kind, argument)?));
        }
        self.check_distinct(&given, place)?;
        let before = self.scope.enter_frame();
        let outer = std::mem::replace(&mut self.destination, into);
        let declared = self.declare_all(given.into_iter());
        if declared.is_ok() {
            self.block(&definition.body);
        }
        self.destination = outer;
        self.scope.leave_frame(&before);
        declared
    }

    fn argument(&mut self, kind: Given, expr: Expr) -> Checked<Meaning> {
        let fail = |fault| (expr.place, fault);
        match kind {
            Given::Constant(kind, size) => {
                let size = size.map(|size| self.integer(size)).transpose()?;
                let value = constant::value(self.ast, &self.scope, expr).map_err(fail)?;
                constant::cast(value, kind, size).map(Meaning::Value).map_err(fail)
            }
            Given::Qubits(size) => {
                let wanted = size.map_or(Ok(1), |size| self.integer(size))?;
                let operand = match self.ast.steps[expr.start as usize..expr.end as usize] {
                    [Step::Name(name)] => Operand { name, index: Index::Whole, place: expr.place },
                    [.., Step::Element(at)] => self.ast.elements[at as usize],
                    _ => return Err(fail(Fault::QubitsExpected)),
                };
                let lanes = self.resolve(Sort::Qubit, &operand)?;
                if i64::from(lanes.len) != wanted {
                    return Err(fail(Fault::Lengths(u32::try_from(wanted).unwrap_or(u32::MAX), lanes.len)));
                }
                Ok(Meaning::Elements(Sort::Qubit, lanes))
            }
            Given::Bits => Err(fail(Fault::BitParameter)),
        }
    }

    /// Whether no qubit is given twice.
    fn check_distinct(&self, given: &[(Name<'a>, Meaning)], place: Place) -> Checked {
        let lanes = given.iter().filter_map(|(_, meaning)| match meaning {
            Meaning::Elements(_, lanes) => Some(*lanes),
            _ => None,
        });
        let mut qubits: Vec<u32> = lanes.flat_map(|lanes: Lanes| self.elements(lanes).collect::<Vec<_>>()).collect();
        qubits.sort_unstable();
        match qubits.windows(2).find(|pair| pair[0] == pair[1]) {
            Some(pair) => Err((place, Fault::Repeated(self.circuit.qubit_name(crate::id::Id::new(pair[0] as usize))))),
            None => Ok(()),
        }
    }

    /// `return` at the end of a subroutine.
    pub(super) fn leave(&mut self, value: Option<&Operand<'a>>, place: Place) -> Checked {
        match (value, self.destination) {
            (Some(from), Some((into, into_place))) => {
                let qubits = self.resolve(Sort::Qubit, from)?;
                self.measure(qubits, into, into_place, place)
            }
            _ if self.scope.is_outside() => Err((place, Fault::OutsideReturn)),
            _ => Ok(()),
        }
    }
}

/// Refuses `return` before the end.
fn no_return(statement: &Statement<'_>) -> Checked {
    match &statement.kind {
        Kind::Return(_) | Kind::ReturnValue => Err((statement.place, Fault::EarlyReturn)),
        Kind::If(choice) => choice.then.iter().chain(&choice.otherwise).try_for_each(no_return),
        Kind::For(repeat) => repeat.body.iter().try_for_each(no_return),
        _ => Ok(()),
    }
}
