//! `places.json`: the places themselves, with the names and values that people look for.

use serde_json::{Value, json};

use crate::id::Id;
use crate::places::Places;
use crate::problem::{Domain, Problem};
use crate::report::json::problem_json;
use crate::source::Loaded;

/// The places of a problem as a JSON value that [`Places::from_json`] reads back.
pub fn places_json(loaded: &Loaded, places: &Places) -> Value {
    let mut value = places.to_json();
    value["problem"] = problem_json(loaded);
    value["variables"] = variables(&loaded.problem, places).into();
    value
}

fn variables(problem: &Problem, places: &Places) -> Vec<Value> {
    let mut qubit_of = vec![None; problem.bit_count()];
    for (qubit, bit) in places.searched.iter().enumerate() {
        qubit_of[bit.index()] = Some(qubit);
    }
    let one = |(id, var): (crate::problem::VarId, &crate::problem::Var)| {
        let bits: Vec<usize> = (0..usize::from(var.width)).map(|at| var.first_bit.index() + at).collect();
        let qubits: Vec<String> =
            bits.iter().filter_map(|&bit| qubit_of[bit]).map(|qubit| format!("search[{qubit}]")).collect();
        json!({ "name": problem.var_name(id), "domain": domain(problem, var.domain), "bits": bits, "qubits": qubits })
    };
    problem.vars().iter().map(one).collect()
}

/// A domain in the words of the language: `yes/no`, `1 to 4`, `bow | stern`.
pub fn domain(problem: &Problem, domain: Domain) -> String {
    match domain {
        Domain::YesNo => "yes/no".to_owned(),
        Domain::Range { lo, hi } => format!("{lo} to {hi}"),
        Domain::Kind(kind) => problem.kinds[kind].values.join(" | "),
    }
}
