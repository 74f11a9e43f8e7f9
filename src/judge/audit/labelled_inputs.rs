//! The inputs of an audit in superposition: where they are in the circuit, which are tried, what each must do.

use rustc_hash::FxHashSet;

use super::{AuditError, Options};
use crate::circuit::{Circuit, MARK, QubitId, SEARCH, WORK};
use crate::id::Id;
use crate::places::Places;
use crate::problem::{Bits, Problem};
use crate::random::SplitMix64;

/// The registers of an oracle.
pub(super) struct Registers {
    pub(super) search: Vec<QubitId>,
    pub(super) mark: Option<QubitId>,
    pub(super) work: Vec<QubitId>,
}

impl Registers {
    /// The registers, where they fit the places and the places fit the problem.
    pub(super) fn of(problem: &Problem, places: &Places, circuit: &Circuit) -> Result<Self, AuditError> {
        places.check(problem)?;
        if places.search_len() == 0 {
            return Err(AuditError::NothingToSearch);
        }
        let unknown = circuit.qubits.iter().find(|register| ![SEARCH, MARK, WORK].contains(&register.name.as_str()));
        if let Some(unknown) = unknown {
            return Err(AuditError::UnknownRegister(unknown.name.clone()));
        }
        let search = circuit.register(SEARCH);
        if search.is_empty() {
            return Err(AuditError::NoRegister(SEARCH));
        }
        let sized = |name, found: usize, expected: usize| {
            if found == expected { Ok(()) } else { Err(AuditError::RegisterSize { name, found, expected }) }
        };
        sized(SEARCH, search.len(), places.search_len())?;
        let mark = circuit.register(MARK);
        sized(MARK, mark.len().max(1), 1)?;
        Ok(Self { search, mark: mark.first().copied(), work: circuit.register(WORK) })
    }
}

/// One basis state of the inputs.
pub(super) struct Input {
    /// The searched bits, over the bits of the problem.
    pub(super) bits: Bits,
    /// Whether they are a solution.
    pub(super) holds: bool,
    /// The value of `mark` at the start.
    pub(super) mark: bool,
}

impl Input {
    /// All qubits at the start.
    pub(super) fn start(&self, places: &Places, registers: &Registers, qubits: usize) -> Bits {
        let mut state = Bits::zeros(qubits);
        for (qubit, &bit) in registers.search.iter().zip(&places.searched) {
            state.set_at(qubit.index(), self.bits.get(bit));
        }
        if let Some(mark) = registers.mark {
            state.set_at(mark.index(), self.mark);
        }
        state
    }
}

/// The inputs that are tried.
pub(super) struct Inputs {
    pub(super) list: Vec<Input>,
    /// Whether these are all there are.
    pub(super) are_all: bool,
    /// How many different values of the search register.
    pub(super) values: u128,
}

impl Inputs {
    /// All inputs, where there are at most 2^`all_bits` values of the search register, else at most `most` of them.
    pub(super) fn choose(
        problem: &Problem,
        places: &Places,
        has_mark: bool,
        options: &Options,
        all_bits: usize,
        most: usize,
    ) -> Self {
        let len = places.search_len();
        let are_all = len <= all_bits;
        let values = if are_all { all(places) } else { sample(places, options, most) };
        let mut list = Vec::with_capacity(values.len() << usize::from(has_mark));
        for bits in &values {
            let holds = problem.holds(bits);
            list.push(Input { bits: bits.clone(), holds, mark: false });
            if has_mark {
                list.push(Input { bits: bits.clone(), holds, mark: true });
            }
        }
        Self { list, are_all, values: values.len() as u128 }
    }
}

/// The bits of the problem, where `search[i]` carries bit `i` of the number.
fn value(places: &Places, number: u64) -> Bits {
    let mut bits = Bits::zeros(places.search_len());
    for (at, &bit) in places.searched.iter().enumerate() {
        bits.set(bit, number >> at & 1 == 1);
    }
    bits
}

fn all(places: &Places) -> Vec<Bits> {
    (0..1u64 << places.search_len()).map(|number| value(places, number)).collect()
}

/// Known solutions, their one-bit neighbours, and drawn inputs, each once.
fn sample(places: &Places, options: &Options, most: usize) -> Vec<Bits> {
    let (mut seen, mut list) = (FxHashSet::default(), Vec::new());
    let mut add = |list: &mut Vec<Bits>, bits: &Bits| {
        if list.len() < most && seen.insert(bits.clone()) {
            list.push(bits.clone());
        }
    };
    let len = places.search_len();
    for known in &options.known {
        add(&mut list, known);
    }
    for known in &options.known {
        for at in 0..len {
            let mut near = known.clone();
            near.set_at(at, !known.at(at));
            add(&mut list, &near);
        }
    }
    let mut random = SplitMix64::new(options.seed);
    for _ in 0..options.sample.min(most) {
        let mut bits = Bits::zeros(len);
        (0..len).for_each(|at| bits.set_at(at, random.coin()));
        add(&mut list, &bits);
    }
    list
}
