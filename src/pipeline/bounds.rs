//! The stage that says what no oracle of a problem can go below.

use num_bigint::BigUint;

use crate::circuit::Mark;
use crate::circuit::bounds::{Bounds, degree, degree_from_marked};
use crate::judge::restate::restate;
use crate::judge::rows;
use crate::places::Places;
use crate::problem::Problem;

/// The degree is read off the truth table of a predicate over at most so many bits.
const MOST_BITS: usize = 16;

/// The bounds; none where nothing that is known gives one. States outside the start state may be marked or not, so a
/// start state of its own leaves nothing to say.
pub(super) fn bounds(problem: &Problem, places: &Places, mark: Mark, marked: Option<&BigUint>) -> Option<Bounds> {
    let bits = places.search_len();
    if !places.start.parts().is_empty() || bits == 0 {
        return None;
    }
    let degree = if bits <= MOST_BITS {
        let restated = restate(problem, places);
        degree(rows::truth(&restated.problem, &restated.places.searched), bits)
    } else {
        degree_from_marked(bits as u64, marked?)
    };
    Some(Bounds::of_degree(degree, mark))
}
