//! The tally: how many solutions, how that is known, and who confirmed it.

use num_bigint::BigUint;
use serde::Serialize;

use crate::problem::Bits;

/// A way of counting.
#[derive(Clone, Copy, PartialEq, Eq, PartialOrd, Ord, Hash, Debug, Serialize)]
#[serde(rename_all = "kebab-case")]
pub enum Method {
    /// Every bit string tried, many at a time.
    Sweep,
    /// Every assignment of the inputs tried, many at a time, and all else computed from them.
    Inputs,
    /// Variables in a line, all that is kept of the past being which clauses wait.
    Frontier,
    /// Search that splits into components and remembers their counts.
    Components,
    /// A certificate of the search, checked apart from it.
    Certificate,
    /// Solutions listed one by one by the first solver (varisat).
    Listing,
    /// Solutions listed one by one by the second solver (batsat).
    SecondListing,
    /// Random equations, and the solutions of a few cells: an interval with a confidence.
    Hashing,
}

impl Method {
    /// Every way.
    pub const ALL: [Method; 8] = [
        Method::Sweep,
        Method::Inputs,
        Method::Frontier,
        Method::Components,
        Method::Certificate,
        Method::Listing,
        Method::SecondListing,
        Method::Hashing,
    ];
}

impl std::fmt::Display for Method {
    fn fmt(&self, f: &mut std::fmt::Formatter<'_>) -> std::fmt::Result {
        f.write_str(match self {
            Method::Sweep => "sweep",
            Method::Inputs => "inputs",
            Method::Frontier => "frontier",
            Method::Components => "components",
            Method::Certificate => "certificate",
            Method::Listing => "listing",
            Method::SecondListing => "second listing",
            Method::Hashing => "hashing",
        })
    }
}

/// A number of solutions, or the bounds that are proven.
#[derive(Clone, PartialEq, Debug)]
pub struct Tally {
    /// At least so many.
    pub low: BigUint,
    /// At most so many; equal to `low` where the tally is exact.
    pub high: BigUint,
    /// 1 where `low` and `high` are proven; else the probability, over the seeds, with which both hold.
    pub confidence: f64,
    /// How it was obtained.
    pub method: Method,
    /// Other ways that gave the same number.
    pub checked_by: Vec<Method>,
    /// Some of the solutions, over all bits of the problem, in increasing order; all of them where `complete`.
    pub solutions: Vec<Bits>,
    /// Whether `solutions` lists every solution.
    pub complete: bool,
}

impl Tally {
    /// Proven bounds, or a number if they are equal, without solutions and without anyone who confirms them.
    pub(super) fn between(low: BigUint, high: BigUint, method: Method) -> Self {
        Self { low, high, confidence: 1.0, method, checked_by: Vec::new(), solutions: Vec::new(), complete: false }
    }

    /// The number, where it is known exactly.
    pub fn exact(&self) -> Option<&BigUint> {
        (self.low == self.high && self.confidence >= 1.0).then_some(&self.low)
    }

    /// Whether the number is known, or an interval with the confidence that was asked for.
    pub fn is_answer(&self) -> bool {
        self.exact().is_some() || self.confidence < 1.0
    }

    /// `410 solutions (sweep, confirmed by listing)` or `between 12 and 4096 solutions (listing, unfinished)`.
    pub fn in_words(&self, one: &str, many: &str) -> String {
        let Some(count) = self.exact() else {
            let how = match self.confidence < 1.0 {
                true => format!("with confidence {}", self.confidence),
                false => "unfinished".to_owned(),
            };
            return format!("between {} and {} {many} ({}, {how})", self.low, self.high, self.method);
        };
        let noun = if count == &BigUint::from(1u32) { one } else { many };
        let confirmed = match self.checked_by.as_slice() {
            [] => "stands alone".to_owned(),
            others => {
                let names: Vec<String> = others.iter().map(Method::to_string).collect();
                format!("confirmed by {}", names.join(" and "))
            }
        };
        format!("{count} {noun} ({}, {confirmed})", self.method)
    }
}
