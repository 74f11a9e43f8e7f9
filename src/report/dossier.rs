//! What the main job found out, as plain data.

use crate::circuit::Product;
use crate::judge::audit::{SearchVerdict, Verdict};
use crate::judge::count::Counted;
use crate::search::price::StartPrice;
use crate::search::{Advice, Plan};

/// Everything that the main job finds out.
#[derive(Clone, Debug)]
pub struct Dossier {
    /// The tally.
    pub counted: Counted,
    /// What a search costs from each start state, where there are several; the cheapest first.
    pub starts: Vec<StartPrice>,
    /// The oracle with its verdict, or why there is none.
    pub oracle: Result<Judged<Verdict>, Advice>,
    /// The oracle at every level, for its cost.
    pub levels: Vec<Product>,
    /// The plan, where the number of marked states is known.
    pub plan: Option<Plan>,
    /// The whole search with its verdict, where there is something to search.
    pub search: Option<Judged<SearchVerdict>>,
    /// When the search is pointless, and what the figures do not say.
    pub advice: Vec<Advice>,
}

/// A circuit as it was written, and the verdict on the file that was read back.
#[derive(Clone, Debug)]
pub struct Judged<V> {
    /// The circuit.
    pub product: Product,
    /// The verdict.
    pub verdict: V,
}
