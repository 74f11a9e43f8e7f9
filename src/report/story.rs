//! The smallest story of a difference: the assignment in the problem's own terms, which constraint holds or fails, what
//! the circuit did, and where it parted from a good one.

use serde_json::{Map, Value, json};

use crate::judge::audit::Witness;
use crate::judge::audit::compare::Parting;
use crate::problem::Problem;
use crate::report::explain::{self, ConstraintLine};
use crate::report::summary::line;
use crate::span::Sources;

/// Why the witness is a solution or none.
#[derive(Debug)]
pub enum Reason {
    /// Every constraint holds.
    AllHold,
    /// This one, the first, fails.
    Fails(ConstraintLine),
    /// A variable has a code outside its domain: its name, its code and how many values it has.
    Outside(String, u64, u64),
}

/// Why the witness is a solution of the problem, or why not.
pub fn reason(problem: &Problem, sources: &Sources, witness: &Witness) -> Reason {
    match problem.decode(&witness.bits) {
        Some(values) => match problem.broken(&values, &witness.bits) {
            Some(id) => Reason::Fails(explain::constraint(problem, sources, id)),
            None => Reason::AllHold,
        },
        None => {
            let mut codes = problem
                .vars()
                .iter()
                .map(|(id, var)| (problem.var_name(id), problem.code_of(id, &witness.bits), problem.size(var.domain)));
            let (name, code, last) = codes.find(|(_, code, last)| code > last).expect("a code is outside its domain");
            Reason::Outside(name, code, last + 1)
        }
    }
}

impl Reason {
    /// In one sentence.
    pub fn in_words(&self) -> String {
        match self {
            Self::AllHold => "every constraint holds".to_owned(),
            Self::Fails(constraint) => format!("{} fails", constraint.in_words()),
            Self::Outside(name, code, values) => {
                format!("{name} has the code {code}, and it has {values} values, from code 0")
            }
        }
    }

    /// As data: `constraint` is null where all hold, or where a code lies outside its domain.
    pub fn json(&self) -> Value {
        let constraint = match self {
            Self::Fails(constraint) => constraint.json(),
            _ => Value::Null,
        };
        json!({ "holds": matches!(self, Self::AllHold), "constraint": constraint, "text": self.in_words() })
    }
}

/// The lines that a text adds to a witness.
pub fn text(reason: Option<&Reason>, parting: Option<&Parting>) -> String {
    let mut text = reason.map_or_else(String::new, |reason| line("because", reason.in_words()));
    if let Some(parting) = parting {
        text += &line("parts", parting.in_words());
    }
    text
}

/// Adds the story to the `witness` of an `audit` object.
pub fn add_json(audit: &mut Value, reason: Option<&Reason>, parting: Option<&Parting>) {
    let Some(witness) = audit.get_mut("witness").and_then(Value::as_object_mut) else { return };
    if let Some(reason) = reason {
        witness.insert("because".to_owned(), reason.json());
    }
    if let Some(parting) = parting {
        witness.insert("parting".to_owned(), Value::Object(parting_json(parting)));
    }
}

fn parting_json(parting: &Parting) -> Map<String, Value> {
    let gate = |gate: &Option<(usize, String)>| {
        gate.as_ref().map_or(Value::Null, |(at, text)| json!({ "number": at, "text": text }))
    };
    let mut map = Map::new();
    map.insert("input".to_owned(), parting.input.to_string().into());
    map.insert("gate".to_owned(), gate(&parting.gate));
    map.insert("good_gate".to_owned(), gate(&parting.good_gate));
    map.insert("qubit".to_owned(), parting.qubit.clone().into());
    map.insert("value".to_owned(), parting.values.map(|(value, _)| value).into());
    map.insert("good_value".to_owned(), parting.values.map(|(_, good)| good).into());
    map.insert("text".to_owned(), parting.in_words().into());
    map
}
