//! Measured strings as answers: decoded into the problem's bits, and each checked against the problem itself.

use crate::places::{Places, PlacesError};
use crate::problem::{Bits, Problem};

use super::Shots;

/// A measured string in the problem's terms.
#[derive(Clone, PartialEq, Eq, Debug)]
pub struct Answer {
    /// The string of the search register as measured.
    pub measured: Bits,
    /// The problem's bits that it stands for.
    pub bits: Bits,
    /// How often it was measured.
    pub count: u64,
    /// Whether it is a solution.
    pub holds: bool,
}

/// All measured strings, checked.
#[derive(Clone, PartialEq, Eq, Debug)]
pub struct Checked {
    /// The answers, the most frequent first, equal counts in the order of their strings.
    pub answers: Vec<Answer>,
    /// How many shots gave a solution.
    pub hits: u64,
    /// How many shots there were.
    pub total: u64,
    /// How many different solutions were seen.
    pub solutions: u64,
}

/// Checks every measured string against the problem. The shots must have been read for this width of search register.
pub fn check(problem: &Problem, places: &Places, shots: &Shots) -> Result<Checked, PlacesError> {
    places.check(problem)?;
    assert_eq!(shots.width, places.search_len(), "shots of this search register");
    let answer = |(measured, count): &(Bits, u64)| {
        let bits = places.assignment(measured);
        Answer { measured: measured.clone(), holds: problem.holds(&bits), bits, count: *count }
    };
    let mut answers: Vec<Answer> = shots.counts.iter().map(answer).collect();
    answers.sort_by(|a, b| (b.count, &a.measured).cmp(&(a.count, &b.measured)));
    let good = || answers.iter().filter(|answer| answer.holds);
    let (hits, solutions) = (good().map(|answer| answer.count).sum(), good().count() as u64);
    Ok(Checked { hits, solutions, total: shots.total, answers })
}
