//! What a circuit is that was read as a sum over paths: the function that it marks, and what must be 0 for that.
//!
//! For every string `r` of outcomes the operator takes an input `x` to itself with a factor `c_r` and the phase of
//! `f(x)`, if each function in [`Read::zeros`] is 0 on every input. Whatever depends on an outcome and on the input is a
//! polynomial in the outcomes; each of its coefficients must be 0, or a constant where only a phase depends on it.

use std::f64::consts::{FRAC_PI_4, TAU};

use super::polynomial::Polynomial;
use super::reader::{Open, Reader};
use super::sign::sign_of;
use super::space::Space;
use crate::circuit::QubitId;
use crate::id::Id;
use crate::judge::audit::basis::form::Form;
use crate::judge::audit::oracle::Roles;
use crate::judge::audit::state::amplitude::multiples;
use crate::judge::reading::graph::{Graph, Signal};

/// Angles that differ by less are the same.
const TOLERANCE: f64 = 1e-9;
/// The most functions whose phases together are that of one.
const MAX_PIECES: usize = 32;

/// What a circuit does, where everything else was shown.
#[derive(Clone, Debug)]
pub(in crate::judge::audit) struct Read {
    /// The graph of the functions below; input `i` of it is the search qubit `i`, and `mark` the one after them.
    pub(super) graph: Graph,
    /// What is marked.
    pub(super) function: Form,
    /// Phases in multiples of pi/4 on other functions of the inputs: where they do not add up to whole turns on every input,
    /// the circuit is no oracle.
    pub(super) others: Vec<(Form, u8)>,
    /// Functions that must be 0 on every input.
    pub(super) zeros: Vec<Form>,
    /// The phase besides that of the function, in multiples of pi/4; `None` where it depends on outcomes, or is none.
    pub(super) global: Option<u8>,
    /// How many outcomes were free.
    pub(super) outcomes: usize,
    /// How many path variables were summed over.
    pub(super) paths: usize,
}

/// What was read, as nodes of a graph over the inputs.
pub(in crate::judge::audit) struct Functions {
    pub(in crate::judge::audit) graph: Graph,
    /// What is marked.
    pub(in crate::judge::audit) marked: Signal,
    /// What must be 0 on every input, and does not show it by itself.
    pub(in crate::judge::audit) zeros: Vec<Signal>,
    /// Other phases, in multiples of pi/4.
    pub(in crate::judge::audit) others: Vec<(Signal, u8)>,
}

impl Read {
    /// The phase besides that of the function, in multiples of pi/4; `None` where it depends on outcomes, or is none.
    pub(in crate::judge::audit) fn global(&self) -> Option<u8> {
        self.global
    }

    /// The same with no phase besides.
    pub(in crate::judge::audit) fn without_global(&self) -> Self {
        Self { global: Some(0), ..self.clone() }
    }

    /// The graph over the inputs, and nodes of it.
    pub(in crate::judge::audit) fn into_functions(mut self) -> Functions {
        let graph = &mut self.graph;
        let is_open = |zero: &&Form| zero.as_constant() != Some(false);
        let marked = self.function.signal(graph);
        let zeros = self.zeros.iter().filter(is_open).map(|zero| zero.signal(graph)).collect();
        let others = self.others.iter().map(|(form, eighths)| (form.signal(graph), *eighths)).collect();
        Functions { marked, zeros, others, graph: self.graph }
    }

    /// Whether everything but the function was shown.
    pub(in crate::judge::audit) fn is_shown(&self) -> bool {
        self.zeros.iter().all(|zero| zero.as_constant() == Some(false))
    }
}

/// Looks at the end of a circuit that was followed. The phase of what is marked is the angle, or a sign.
pub(super) fn end(mut reader: Reader, roles: &Roles, angle: Option<f64>) -> Result<Read, Open> {
    let mut function = Form::default();
    let search = roles.search.iter().enumerate().map(|(at, &qubit)| (qubit, Some(at)));
    let work = roles.work.iter().map(|&qubit| (qubit, None));
    for (qubit, input) in search.chain(work) {
        let left = left_over(&mut reader, qubit, input)?;
        if left.as_constant() != Some(false) {
            reader.zeros.push(left);
        }
    }
    if let Some(mark) = roles.mark {
        function = left_over(&mut reader, mark, Some(roles.search.len()))?;
        let own = reader.space.graph.bit(roles.search.len());
        if reader.space.graph.needed(function.terms.iter().copied())[own.node()] {
            return Err(Open::Qubit(mark));
        }
    }
    let left = settled(&mut reader);
    let mut phases = Phases::new(&mut reader, left);
    phases.add_angles()?;
    if roles.mark.is_some() {
        phases.none()?;
    } else {
        function = phases.function(angle)?;
    }
    let (global, others) = (phases.global, std::mem::take(&mut phases.others));
    finished(reader, function, others, global)
}

/// Looks at the end of the second of two circuits on the same inputs: what must be 0 for the two to be the same.
/// `ours` is what the qubits of the first hold, `pairs` are the inputs, and the other qubits must be 0.
pub(super) fn difference(mut reader: Reader, ours: &[Form], pairs: &[(QubitId, QubitId)]) -> Result<Read, Open> {
    let (first, second): (Vec<QubitId>, Vec<QubitId>) = pairs.iter().copied().unzip();
    let shared = pairs.iter().map(|&(a, b)| (Some(a), Some(b)));
    let rest = |count: usize, shared: &[QubitId]| -> Vec<QubitId> {
        (0..count).map(QubitId::new).filter(|qubit| !shared.contains(qubit)).collect()
    };
    let (good, other) = (rest(ours.len(), &first), rest(reader.values.len(), &second));
    let alone = good.into_iter().map(|a| (Some(a), None)).chain(other.into_iter().map(|b| (None, Some(b))));
    for (a, b) in shared.chain(alone) {
        let mut left = a.map_or_else(Form::default, |a| ours[a.index()].clone());
        if let Some(b) = b {
            left.add(&reader.values[b.index()]);
            if reader.space.paths(&left.terms).next().is_some() {
                return Err(Open::Qubit(b));
            }
        }
        let parts = reader.space.coefficients(&left);
        reader.zeros.extend(parts.into_values().filter(|part| part.as_constant() != Some(false)));
    }
    let left = settled(&mut reader);
    let mut phases = Phases::new(&mut reader, left);
    phases.add_angles()?;
    phases.none()?;
    let global = phases.global;
    finished(reader, Form::default(), Vec::new(), global)
}

/// The phase, as a sign where it is one.
fn settled(reader: &mut Reader) -> Polynomial {
    let polynomial = std::mem::take(&mut reader.phase);
    match sign_of(&mut reader.space, polynomial) {
        Ok(sign) => {
            let mut left = Polynomial::default();
            left.constant = sign.constant;
            left.add(&reader.space, &sign.form, 4);
            left
        }
        Err(left) => left,
    }
}

fn finished(reader: Reader, function: Form, others: Vec<(Form, u8)>, global: Option<u8>) -> Result<Read, Open> {
    let Reader { space, mut zeros, outcomes, paths, .. } = reader;
    if space.is_too_large() {
        return Err(Open::Limit);
    }
    zeros.sort_unstable();
    zeros.dedup();
    Ok(Read { graph: space.graph, function, others, zeros, global, outcomes, paths })
}

/// By what a qubit ends otherwise than as this input, or as 0: a function of the inputs alone. What depends on outcomes
/// too must be 0.
fn left_over(reader: &mut Reader, qubit: QubitId, input: Option<usize>) -> Result<Form, Open> {
    let mut left = reader.values[qubit.index()].clone();
    if let Some(input) = input {
        left.add(&Form::term(reader.space.graph.bit(input)));
    }
    if reader.space.paths(&left.terms).next().is_some() {
        return Err(Open::Qubit(qubit));
    }
    let mut parts = reader.space.coefficients(&left);
    let alone = parts.remove(&Vec::new()).unwrap_or_default();
    reader.zeros.extend(parts.into_values());
    Ok(alone)
}

/// The phases of a circuit, sorted by what they depend on.
struct Phases<'r, 'a> {
    reader: &'r mut Reader<'a>,
    /// The phase that depends on nothing.
    global: Option<u8>,
    /// Signs on functions of the input alone.
    sign: Form,
    /// Other multiples of pi/4 on such functions.
    eighths: Vec<(Form, u8)>,
    /// Those of them that no rule made part of the sign.
    others: Vec<(Form, u8)>,
    /// Other angles on such functions.
    angles: Vec<(Form, f64)>,
}

impl<'r, 'a> Phases<'r, 'a> {
    fn new(reader: &'r mut Reader<'a>, mut polynomial: Polynomial) -> Self {
        let constant = polynomial.constant;
        let mut phases = Self {
            reader,
            global: Some(constant),
            sign: Form::default(),
            eighths: Vec::new(),
            others: Vec::new(),
            angles: Vec::new(),
        };
        let mut with_outcomes = Form::default();
        for (form, coefficient) in polynomial.take_all() {
            match (phases.reader.space.is_pure(&form), coefficient) {
                (true, 4) => phases.sign.add(&form),
                (false, 4) => with_outcomes.add(&form),
                _ => phases.eighths.push((form, coefficient)),
            }
        }
        // A sign that depends on outcomes must be the same for all inputs.
        let independent = phases.reader.independent(&with_outcomes);
        if !independent.terms.is_empty() {
            phases.global = None;
        }
        let only_outcomes = |space: &Space, form: &Form| {
            let parts = space.coefficients(form);
            parts.values().all(|coefficient| coefficient.as_constant().is_some())
        };
        let space = &phases.reader.space;
        let before = phases.eighths.len();
        phases.eighths.retain(|(form, _)| !only_outcomes(space, form));
        if phases.eighths.len() < before {
            phases.global = None;
        }
        phases
    }

    /// Adds angles that are no multiples of pi/4, those on the same function together.
    fn add_angles(&mut self) -> Result<(), Open> {
        for (mut angle, mut form) in std::mem::take(&mut self.reader.angles) {
            if form.flip {
                (angle, form.flip) = (-angle, false);
                self.global = None;
            }
            match self.angles.iter_mut().find(|(other, _)| *other == form) {
                Some((_, sum)) => *sum += angle,
                None => self.angles.push((form, angle)),
            }
        }
        self.angles.retain(|(_, angle)| !is_turn(*angle));
        let space = &self.reader.space;
        for (form, _) in &self.angles {
            if !space.is_pure(form) {
                return Err(Open::Phase);
            }
        }
        let before = self.angles.len();
        self.angles.retain(|(form, _)| form.as_constant().is_none());
        if self.angles.len() < before {
            self.global = None;
        }
        Ok(())
    }

    /// Shows that no phase depends on the input.
    fn none(&mut self) -> Result<(), Open> {
        if !self.eighths.is_empty() || !self.angles.is_empty() {
            return Err(Open::Phase);
        }
        self.constant_sign();
        Ok(())
    }

    /// Notes that the sign must be the same for all inputs.
    fn constant_sign(&mut self) {
        let sign = std::mem::take(&mut self.sign);
        let value = self.reader.independent(&sign);
        if value.as_constant() == Some(true) {
            self.global = self.global.map(|global| (global + 4) % 8);
        }
    }

    /// The function that has this phase.
    fn function(&mut self, angle: Option<f64>) -> Result<Form, Open> {
        let angle = angle.unwrap_or(std::f64::consts::PI);
        let is_pure = self.eighths.iter().all(|(form, _)| self.reader.space.is_pure(form));
        match multiples(angle, FRAC_PI_4) {
            // What the rules leave of a sign is one all the same if it is so on every input.
            Some(4) if is_pure && self.angles.is_empty() => {
                self.others = std::mem::take(&mut self.eighths);
                Ok(std::mem::take(&mut self.sign))
            }
            Some(eighths) if eighths != 4 && self.angles.is_empty() => self.of_eighths(eighths),
            None if self.eighths.is_empty() => self.of_angle(angle),
            _ => Err(Open::Phase),
        }
    }

    fn of_eighths(&mut self, wanted: u8) -> Result<Form, Open> {
        let mut pieces = Vec::new();
        for (form, coefficient) in std::mem::take(&mut self.eighths) {
            if coefficient == wanted {
                pieces.push(form);
            } else if coefficient == 8 - wanted {
                // -k f = k (1 - f) - k
                self.global = self.global.map(|global| (global + coefficient) % 8);
                pieces.push(form.negated_if(true));
            } else {
                return Err(Open::Phase);
            }
        }
        let pairs = self.pairs(&pieces)?;
        if wanted.is_multiple_of(2) {
            // 2 (f xor g) = 2 f + 2 g + 4 f g
            for pair in pairs {
                self.sign.add(&pair);
            }
        } else {
            self.reader.zeros.extend(pairs.into_iter().filter(|pair| pair.as_constant() != Some(false)));
        }
        self.constant_sign();
        Ok(together(&pieces))
    }

    fn of_angle(&mut self, wanted: f64) -> Result<Form, Open> {
        let mut pieces = Vec::new();
        for (form, angle) in std::mem::take(&mut self.angles) {
            if is_turn(angle - wanted) {
                pieces.push(form);
            } else if is_turn(angle + wanted) {
                self.global = None;
                pieces.push(form.negated_if(true));
            } else {
                return Err(Open::Phase);
            }
        }
        let pairs = self.pairs(&pieces)?;
        self.reader.zeros.extend(pairs.into_iter().filter(|pair| pair.as_constant() != Some(false)));
        self.constant_sign();
        Ok(together(&pieces))
    }

    /// The conjunctions of any two.
    fn pairs(&mut self, pieces: &[Form]) -> Result<Vec<Form>, Open> {
        if pieces.len() > MAX_PIECES || pieces.iter().any(|piece| !self.reader.space.is_pure(piece)) {
            return Err(Open::Phase);
        }
        let pairs = pieces.iter().enumerate().flat_map(|(at, a)| pieces[at + 1..].iter().map(move |b| (a, b)));
        Ok(pairs.map(|(a, b)| self.reader.space.product(&[a.clone(), b.clone()])).collect())
    }
}

fn together(pieces: &[Form]) -> Form {
    let mut sum = Form::default();
    pieces.iter().for_each(|piece| sum.add(piece));
    sum
}

/// Whether an angle is a multiple of a full turn.
fn is_turn(angle: f64) -> bool {
    let rest = angle.rem_euclid(TAU);
    rest < TOLERANCE || TAU - rest < TOLERANCE
}
