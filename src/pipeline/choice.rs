//! The stage that decides what is searched: each candidate is priced as a whole search, and the cheapest is taken.
//!
//! The price is iterations times (oracle + reflection), counted in ANDs. The iterations go with the root of N / M. What M is
//! need not be known here: narrowing one for one leaves it as it is, and where one state stands for several solutions N
//! shrinks at least as far as M does, because a state of k searched bits stands for at most 2^(n - k) solutions. So a
//! candidate that costs no more for each iteration is never worse, and of one that costs more the price for a single
//! solution is taken, which is the case that a search is for.

use std::convert::Infallible;

use super::{Error, Settings};
use crate::budget::Budget;
use crate::make::lower;
use crate::make::narrow::{self, Options};
use crate::make::network::{self, pass};
use crate::places::{Claim, Places};
use crate::problem::Problem;

/// Whether bits may be computed instead of searched.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub enum Narrowing {
    /// Every bit is searched as given.
    Off,
    /// Bits that solutions determine are computed, and hidden bits for which some value will do.
    OneForOne,
    /// One solution may stand for many: any bit for which some value will do.
    OneForMany,
}

/// Networks of more ANDs are priced as they are built; of smaller ones the passes take some hundredths of a second.
const MAX_SIMPLIFIED: usize = 1 << 12;

/// A way to search, and what it would cost.
#[derive(Clone, PartialEq, Eq, Debug)]
pub struct Candidate {
    /// What is searched and what is computed.
    pub places: Places,
    /// ANDs of the oracle and of the reflection together; `None` where there is no oracle.
    pub ands: Option<u64>,
}

impl Candidate {
    fn new(problem: &Problem, places: Places, settings: Settings, budget: &Budget) -> Self {
        let mut network = network::build(problem, &places);
        if network.and_count() <= MAX_SIMPLIFIED {
            let Ok(simplified) = pass::simplify(network, budget, |_| Ok::<(), Infallible>(()));
            network = simplified;
        }
        let oracle = lower::and_count(&network, settings.mark, budget).ok();
        let ands = oracle.map(|ands| ands + places.search_len().saturating_sub(1) as u64);
        Self { places, ands }
    }

    /// The logarithm to base 2 of iterations times ANDs, for a single marked state and up to what all candidates share.
    pub fn price(&self) -> f64 {
        let each = self.ands.map_or(1.0, |ands| ands.max(1) as f64);
        self.places.search_len() as f64 / 2.0 + each.log2()
    }
}

/// Decides what is searched. Gives the winner first, then what it was held against.
pub fn choose(
    problem: &Problem,
    narrowing: Narrowing,
    settings: Settings,
    budget: &Budget,
) -> Result<(Candidate, Option<Candidate>), Error> {
    let as_given = Places::as_given(problem);
    if narrowing == Narrowing::Off {
        return Ok((Candidate { places: as_given, ands: None }, None));
    }
    let mut best: Option<Candidate> = None;
    for places in narrowings(problem, narrowing, settings, budget) {
        let candidate = Candidate::new(problem, places, settings, budget);
        if best.as_ref().is_none_or(|best| candidate.price() < best.price()) {
            best = Some(candidate);
        }
    }
    let Some(narrowed) = best else {
        return Ok((Candidate { places: as_given, ands: None }, None));
    };
    let plain = Candidate::new(problem, as_given, settings, budget);
    if narrowed.ands <= plain.ands || narrowed.price() <= plain.price() {
        return Ok((narrowed, Some(plain)));
    }
    Ok((plain, Some(narrowed)))
}

/// The narrowings to choose from. Where one solution may stand for many, one for one is a narrowing too: the other may leave
/// nothing to search, and a register of no qubits is no search.
fn narrowings(problem: &Problem, narrowing: Narrowing, settings: Settings, budget: &Budget) -> Vec<Places> {
    let kinds: &[bool] = if narrowing == Narrowing::OneForMany { &[true, false] } else { &[false] };
    let mut found: Vec<Places> = Vec::new();
    for &one_for_many in kinds {
        let options = Options { one_for_many, seed: settings.seed, ..Options::default() };
        let places = narrow::narrow(problem, &options, budget).places;
        let is_search = !places.computed.is_empty() && places.search_len() > 0;
        if is_search && is_wanted(&places, narrowing) && !found.contains(&places) {
            found.push(places);
        }
    }
    found
}

/// Whether the claim is one that was asked for.
fn is_wanted(places: &Places, narrowing: Narrowing) -> bool {
    narrowing == Narrowing::OneForMany || places.claim != Claim::OneForMany
}
