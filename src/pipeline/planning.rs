//! The stage between a tally and a search: the plan, and what has to be said about it.

use crate::judge::count::Counted;
use crate::places::{Claim, Places};
use crate::problem::{BitId, Problem};
use crate::search::{Advice, Plan, plan};

/// What a tally says to every plan.
pub fn advice_on(problem: &Problem, places: &Places, counted: &Counted) -> Vec<Advice> {
    let mut advice = Vec::new();
    if problem.bit_count() == 0 {
        advice.push(Advice::nothing_to_search());
    }
    if let Some(count) = counted.tally.exact() {
        advice.push(Advice::already_decided(count));
    }
    let hidden = |bit: &&BitId| problem.shown.as_ref().is_some_and(|shown| shown.binary_search(bit).is_err());
    let hidden = places.searched.iter().filter(hidden).count();
    match places.claim {
        Claim::ManyForOne => advice.push(Advice::hidden_bits_searched(hidden)),
        Claim::OneForMany => advice.push(Advice::one_stands_for_many()),
        Claim::OneForOne => {}
    }
    if counted.marked().is_none() {
        advice.push(Advice::marked_unknown());
    }
    advice
}

/// The plan for a tally, with advice; `None` where the number of marked states is not known.
pub fn plan_for(problem: &Problem, places: &Places, counted: &Counted) -> (Option<Plan>, Vec<Advice>) {
    let mut advice = advice_on(problem, places, counted);
    let Some(marked) = counted.marked() else { return (None, advice) };
    let mut plan = plan(&counted.space, marked);
    advice.append(&mut plan.advice);
    plan.advice.clone_from(&advice);
    (Some(plan), advice)
}
