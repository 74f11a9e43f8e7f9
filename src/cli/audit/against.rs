//! A whole search against one that is known to be good.

use serde_json::{Value, json};

use crate::budget::Budget;
use crate::circuit::{Circuit, SEARCH};
use crate::judge::audit::AuditError;
use crate::judge::audit::compare::{Parting, parting};
use crate::judge::audit::faults::proof::{Proof, same_search};
use crate::problem::Bits;

/// What came of it: the verdict, why, and where the two part.
pub(super) struct Compared {
    verdict: &'static str,
    why: Option<String>,
    parting: Option<Parting>,
}

/// Whether two searches end in the same state, and where they part, if that is found.
pub(super) fn searches(good: &Circuit, circuit: &Circuit, budget: &Budget) -> Result<Compared, AuditError> {
    Ok(match same_search(good, circuit, budget) {
        Proof::Harmless => Compared { verdict: "equal", why: None, parting: None },
        Proof::Open(why) => Compared { verdict: "undecided", why: Some(why), parting: None },
        Proof::Harmful(why) => {
            let start = Bits::zeros(circuit.register(SEARCH).len());
            // Exact amplitudes may not hold these gates, or the registers differ: then only the end is compared.
            let parting = parting(good, circuit, &start, budget).ok().flatten();
            Compared { verdict: "differs", why: Some(why), parting }
        }
    })
}

/// Adds `against` to the verdict on a search.
pub(super) fn add_json(audit: &mut Value, compared: &Compared) {
    let parting = compared.parting.as_ref().map(Parting::in_words);
    audit["against"] = json!({ "verdict": compared.verdict, "why": compared.why, "parting": parting });
}

/// The same for people.
pub(super) fn text(compared: &Compared) -> String {
    let why = compared.why.as_ref().map_or_else(String::new, |why| format!(": {why}"));
    let parting = compared
        .parting
        .as_ref()
        .map_or_else(String::new, |parting| format!("parts       from the good one {}\n", parting.in_words()));
    format!("{:<12}{}{why}\n{parting}", "against", compared.verdict)
}
