//! What is searched, and what a marked state stands for: plain data that the maker writes and the judge re-proves.
//!
//! The text form is JSON (`places.json` beside a circuit). [`Places`] holds only what is needed to judge a circuit;
//! names and values are added to the file for people by the writer and are ignored by the reader.

use serde::{Deserialize, Serialize};
use thiserror::Error;

use crate::id::Id;
use crate::problem::{BitId, Problem};

/// The superposition the search begins from.
#[derive(Clone, Copy, PartialEq, Eq, Debug, Serialize, Deserialize)]
#[serde(rename_all = "kebab-case")]
pub enum Start {
    /// Every bit string of the search register, each equally.
    AllStrings,
}

/// What a marked state stands for.
#[derive(Clone, Copy, PartialEq, Eq, Debug, Serialize, Deserialize)]
#[serde(rename_all = "kebab-case")]
pub enum Claim {
    /// Each marked state is one solution, and each solution one marked state.
    OneForOne,
    /// Hidden bits are searched too: several marked states may stand for one shown solution.
    ManyForOne,
}

/// Where the bits of a problem are in a circuit.
#[derive(Clone, PartialEq, Eq, Debug)]
pub struct Places {
    /// The start state.
    pub start: Start,
    /// The bits that are searched: `search[i]` carries `searched[i]`.
    pub searched: Vec<BitId>,
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
}

/// The JSON shape of [`Places`].
#[derive(Serialize, Deserialize)]
struct PlacesFile {
    start: Start,
    claim: Claim,
    searched: Vec<u32>,
}

impl Places {
    /// Every bit searched as given, from all bit strings.
    pub fn as_given(problem: &Problem) -> Self {
        let hidden = problem.shown.as_ref().is_some_and(|shown| shown.len() < problem.bit_count());
        Self {
            start: Start::AllStrings,
            searched: problem.bits().collect(),
            claim: if hidden { Claim::ManyForOne } else { Claim::OneForOne },
        }
    }

    /// The size of the search register.
    pub fn search_len(&self) -> usize {
        self.searched.len()
    }

    /// Checks that the places are about this problem: every bit is placed exactly once.
    pub fn check(&self, problem: &Problem) -> Result<(), PlacesError> {
        let expected = problem.bit_count();
        if self.searched.len() != expected {
            return Err(PlacesError::OtherProblem { found: self.searched.len(), expected });
        }
        let mut seen = vec![false; expected];
        for bit in &self.searched {
            match seen.get_mut(bit.index()) {
                Some(seen) if !*seen => *seen = true,
                _ => return Err(PlacesError::NotOnce(bit.index())),
            }
        }
        Ok(())
    }

    /// The JSON value; a writer may add members for people.
    pub fn to_json(&self) -> serde_json::Value {
        let searched = self.searched.iter().map(|bit| bit.index() as u32).collect();
        serde_json::to_value(PlacesFile { start: self.start, claim: self.claim, searched }).expect("plain data")
    }

    /// Reads what [`Places::to_json`] gives; members it does not know are ignored.
    pub fn from_json(text: &str) -> Result<Self, PlacesError> {
        let file: PlacesFile = serde_json::from_str(text).map_err(|error| PlacesError::Syntax(error.to_string()))?;
        let bit = |&index: &u32| {
            if index == u32::MAX { Err(PlacesError::NotOnce(index as usize)) } else { Ok(BitId::new(index as usize)) }
        };
        let searched = file.searched.iter().map(bit).collect::<Result<_, _>>()?;
        Ok(Self { start: file.start, claim: file.claim, searched })
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
}
