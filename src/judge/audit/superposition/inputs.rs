//! The inputs of an audit in superposition: which are tried, what each must do.

use rustc_hash::FxHashSet;

use crate::id::Id;
use crate::judge::audit::Options;
use crate::judge::audit::oracle::Roles;
use crate::judge::audit::support;
use crate::places::Places;
use crate::problem::{Bits, Problem};
use crate::random::SplitMix64;

/// So many neighbours and so many drawn inputs stand beside one that is to be confirmed.
const NEAR: usize = 24;

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
    pub(super) fn start(&self, places: &Places, roles: &Roles, qubits: usize) -> Bits {
        let mut state = Bits::zeros(qubits);
        for (qubit, &bit) in roles.search.iter().zip(&places.searched) {
            state.set_at(qubit.index(), self.bits.get(bit));
        }
        if let Some(mark) = roles.mark {
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
        let mut values = if are_all { all(places) } else { sample(places, options, most) };
        values.retain(|bits| support::holds(places, bits));
        Self { are_all, ..Self::listed(problem, has_mark, &values) }
    }

    /// These values of the search register, each once.
    pub(super) fn listed(problem: &Problem, has_mark: bool, values: &[Bits]) -> Self {
        let mut list = Vec::with_capacity(values.len() << usize::from(has_mark));
        for bits in values {
            let holds = problem.holds(bits);
            list.push(Input { bits: bits.clone(), holds, mark: false });
            if has_mark {
                list.push(Input { bits: bits.clone(), holds, mark: true });
            }
        }
        Self { list, are_all: false, values: values.len() as u128 }
    }

    /// An input, some of its neighbours, and drawn ones.
    pub(super) fn near(problem: &Problem, has_mark: bool, input: &Bits, seed: u64) -> Self {
        let (mut seen, mut list) = (FxHashSet::default(), vec![input.clone()]);
        let mut random = SplitMix64::new(seed);
        seen.insert(input.clone());
        let neighbours = (0..input.len().min(NEAR)).map(|at| {
            let mut near = input.clone();
            near.set_at(at, !near.at(at));
            near
        });
        let drawn = (0..NEAR).map(|_| (0..input.len()).map(|_| random.coin()).collect());
        list.extend(neighbours.chain(drawn).filter(|bits| seen.insert(bits.clone())));
        Self::listed(problem, has_mark, &list)
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

/// Those with few ones first, so that a witness is one of these where there is one.
fn all(places: &Places) -> Vec<Bits> {
    let mut numbers: Vec<u64> = (0..1u64 << places.search_len()).collect();
    numbers.sort_by_key(|number| number.count_ones());
    numbers.into_iter().map(|number| value(places, number)).collect()
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
