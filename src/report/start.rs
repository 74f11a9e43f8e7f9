//! What a search costs from each start state, as text and as `starts`, and what is to be said about it.

use serde_json::Value;

use crate::report::summary::line;
use crate::search::Advice;
use crate::search::number::in_words;
use crate::search::price::StartPrice;

/// `starts`: the cheapest first.
pub fn json(prices: &[StartPrice]) -> Value {
    serde_json::to_value(prices).expect("plain data")
}

/// A line for each.
pub fn lines(prices: &[StartPrice]) -> String {
    let one = |price: &StartPrice| {
        let StartPrice { start, space, t_gates_of_iteration, rotations_of_iteration, t_gates, precision, .. } = price;
        let rotations = match rotations_of_iteration {
            0 => String::new(),
            number => format!(" with {number} rotations, all of the search within {precision:e} together"),
        };
        let costs = format!("{t_gates_of_iteration:.0} T an iteration{rotations}; {t_gates:.0} T for one marked state");
        line("start", format!("{start}: {} states, {costs}", in_words(space)))
    };
    prices.iter().map(one).collect()
}

/// Says that another start than the one taken is cheaper.
pub fn advice(prices: &[StartPrice], taken: &str) -> Option<Advice> {
    let here = prices.iter().find(|price| price.start == taken)?;
    let cheapest = prices.first().filter(|first| first.start != taken && first.t_gates < here.t_gates)?;
    Some(Advice::cheaper_start(cheapest, here))
}
