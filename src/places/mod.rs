//! What is searched, and what a marked state stands for: plain data that the maker writes and the judge re-proves.
//!
//! The text form is JSON (`places.json` beside a circuit). [`Places`] holds only what is needed to judge a circuit;
//! names and values are added to the file for people by the writer and are ignored by the reader.

mod formula;
mod start;

use serde::{Deserialize, Serialize};
use thiserror::Error;

use crate::id::Id;
use crate::problem::{BitId, Bits, Problem};

pub use formula::{Digit, Formula};
pub use start::{Part, Start};

/// What a marked state stands for.
#[derive(Clone, Copy, PartialEq, Eq, Debug, Serialize, Deserialize)]
#[serde(rename_all = "kebab-case")]
pub enum Claim {
    /// Each marked state is one solution, and each solution one marked state.
    OneForOne,
    /// Hidden bits are searched too: several marked states may stand for one shown solution.
    ManyForOne,
    /// One solution is enough: a marked state extends to a solution, and a solution's searched part is marked, but
    /// several solutions may share it.
    OneForMany,
}

/// A bit that the circuit computes instead of searching it.
#[derive(Clone, PartialEq, Eq, Debug, Serialize, Deserialize)]
pub struct Computed {
    /// The bit, by its index.
    pub bit: u32,
    /// What it is of searched bits and of bits computed before it.
    pub formula: Formula,
}

/// Where the bits of a problem are in a circuit.
#[derive(Clone, PartialEq, Eq, Debug)]
pub struct Places {
    /// The start state.
    pub start: Start,
    /// The bits that are searched: `search[i]` carries `searched[i]`.
    pub searched: Vec<BitId>,
    /// The other bits, each after those that its formula mentions.
    pub computed: Vec<Computed>,
    /// What a marked state stands for.
    pub claim: Claim,
}

/// Places that do not fit a problem.
#[derive(Clone, PartialEq, Eq, Debug, Error)]
pub enum PlacesError {
    /// The text is not JSON of the expected shape.
    #[error("not a places file: {0}")]
    Syntax(String),
    /// The places speak of another number of bits than the problem has.
    #[error("these places are for {found} bits, the problem has {expected}")]
    OtherProblem {
        /// Bits the places name.
        found: usize,
        /// Bits of the problem.
        expected: usize,
    },
    /// A bit is placed twice or never.
    #[error("bit {0} is not placed exactly once")]
    NotOnce(usize),
    /// A formula mentions a bit that is neither searched nor computed before it.
    #[error("bit {0} is computed from a bit that is not known before it")]
    NotBefore(usize),
    /// The numbers of a formula do not fit 62 bits.
    #[error("the numbers that bit {0} is computed from are too large")]
    TooLarge(usize),
    /// A part of the start state is empty, too large, or shares a qubit.
    #[error("part {0} of the start state does not fit the search register")]
    Start(usize),
}

/// The JSON shape of [`Places`].
#[derive(Serialize, Deserialize)]
struct PlacesFile {
    start: Start,
    claim: Claim,
    searched: Vec<u32>,
    #[serde(default, skip_serializing_if = "Vec::is_empty")]
    computed: Vec<Computed>,
}

impl Places {
    /// Every bit searched as given, from all bit strings.
    pub fn as_given(problem: &Problem) -> Self {
        let hidden = problem.shown.as_ref().is_some_and(|shown| shown.len() < problem.bit_count());
        Self {
            start: Start::AllStrings,
            searched: problem.bits().collect(),
            computed: Vec::new(),
            claim: if hidden { Claim::ManyForOne } else { Claim::OneForOne },
        }
    }

    /// The size of the search register.
    pub fn search_len(&self) -> usize {
        self.searched.len()
    }

    /// The bits of the problem where the search register reads `search`: searched bits as they are, computed ones from
    /// their formulas. The places passed [`check`](Places::check).
    pub fn assignment(&self, search: &Bits) -> Bits {
        let mut bits = Bits::zeros(self.searched.len() + self.computed.len());
        self.searched.iter().enumerate().for_each(|(at, &bit)| bits.set(bit, search.get(BitId::new(at))));
        for computed in &self.computed {
            let value = computed.formula.holds(&bits);
            bits.set(BitId::new(computed.bit as usize), value);
        }
        bits
    }

    /// Checks that the places are about this problem: every bit is placed exactly once, formulas mention known bits
    /// only, and the parts of the start state share no qubit.
    pub fn check(&self, problem: &Problem) -> Result<(), PlacesError> {
        let expected = problem.bit_count();
        let found = self.searched.len() + self.computed.len();
        if found != expected {
            return Err(PlacesError::OtherProblem { found, expected });
        }
        let mut seen = vec![false; expected];
        let place = |bit: usize, seen: &mut Vec<bool>| match seen.get_mut(bit) {
            Some(seen) if !*seen => {
                *seen = true;
                Ok(())
            }
            _ => Err(PlacesError::NotOnce(bit)),
        };
        self.searched.iter().try_for_each(|bit| place(bit.index(), &mut seen))?;
        for Computed { bit, formula } in &self.computed {
            let mut is_known = true;
            formula.for_each_bit(&mut |of| is_known &= seen.get(of.index()).is_some_and(|&seen| seen));
            if !is_known {
                return Err(PlacesError::NotBefore(*bit as usize));
            }
            if !formula.is_small() {
                return Err(PlacesError::TooLarge(*bit as usize));
            }
            place(*bit as usize, &mut seen)?;
        }
        self.check_start()
    }

    fn check_start(&self) -> Result<(), PlacesError> {
        let mut taken = vec![false; self.searched.len()];
        for (at, part) in self.start.parts().iter().enumerate() {
            let mut is_free = |&qubit: &u32| taken.get_mut(qubit as usize).is_some_and(|t| !std::mem::replace(t, true));
            if !part.is_sound() || !part.qubits().iter().all(&mut is_free) {
                return Err(PlacesError::Start(at));
            }
        }
        Ok(())
    }

    /// The JSON value; a writer may add members for people.
    pub fn to_json(&self) -> serde_json::Value {
        let searched = self.searched.iter().map(|bit| bit.index() as u32).collect();
        let (start, computed) = (self.start.clone(), self.computed.clone());
        serde_json::to_value(PlacesFile { start, claim: self.claim, searched, computed }).expect("plain data")
    }

    /// Reads what [`Places::to_json`] gives; members it does not know are ignored.
    pub fn from_json(text: &str) -> Result<Self, PlacesError> {
        let file: PlacesFile = serde_json::from_str(text).map_err(|error| PlacesError::Syntax(error.to_string()))?;
        let bit = |&index: &u32| {
            if index == u32::MAX { Err(PlacesError::NotOnce(index as usize)) } else { Ok(BitId::new(index as usize)) }
        };
        let searched = file.searched.iter().map(bit).collect::<Result<_, _>>()?;
        Ok(Self { start: file.start, searched, computed: file.computed, claim: file.claim })
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn reads_back_what_it_writes_and_refuses_what_does_not_fit() {
        let mut problem = Problem::new();
        problem.add_numbered_vars(3);
        let mut places = Places::as_given(&problem);
        places.searched.swap(0, 2);
        assert_eq!(Places::from_json(&places.to_json().to_string()), Ok(places.clone()));
        assert_eq!(places.check(&problem), Ok(()));
        places.searched[0] = places.searched[1];
        assert_eq!(places.check(&problem), Err(PlacesError::NotOnce(1)));
        places.searched.pop();
        assert_eq!(places.check(&problem), Err(PlacesError::OtherProblem { found: 2, expected: 3 }));
    }

    #[test]
    fn computed_bits_follow_what_they_are_computed_from() {
        let mut problem = Problem::new();
        problem.add_numbered_vars(4);
        let bit = BitId::new;
        let either = Formula::Or(vec![Formula::Bit(bit(1)), Formula::literal(bit(3), true)]);
        let computed = vec![
            Computed { bit: 0, formula: either },
            Computed { bit: 2, formula: Formula::Xor(vec![Formula::Bit(bit(0)), Formula::Bit(bit(1))]) },
        ];
        let start = Start::Parts(vec![Part::Weight { qubits: vec![1, 0], ones: 1 }]);
        let mut places = Places { start, searched: vec![bit(3), bit(1)], computed, claim: Claim::OneForMany };
        assert_eq!(Places::from_json(&places.to_json().to_string()), Ok(places.clone()));
        assert_eq!(places.check(&problem), Ok(()));
        let mut search = Bits::zeros(2);
        search.set(bit(1), true);
        let bits = places.assignment(&search);
        assert_eq!((0..4).map(|at| bits.get(bit(at))).collect::<Vec<_>>(), [true, true, false, false]);
        assert!(places.start.allows(|qubit| qubit == 1) && !places.start.allows(|_| true));

        places.start = Start::Parts(vec![Part::Weight { qubits: vec![1, 0], ones: 3 }]);
        assert_eq!(places.check(&problem), Err(PlacesError::Start(0)));
        let shared = vec![Part::Below { qubits: vec![0], size: 1 }, Part::Below { qubits: vec![0, 1], size: 3 }];
        places.start = Start::Parts(shared);
        assert_eq!(places.check(&problem), Err(PlacesError::Start(1)));
        places.start = Start::AllStrings;
        places.computed.swap(0, 1);
        assert_eq!(places.check(&problem), Err(PlacesError::NotBefore(2)));
    }
}
