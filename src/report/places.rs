//! `places.json`: the places themselves, with the names and values that people look for.

use serde_json::{Value, json};

use crate::diag::{Code, Diagnostic};
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

/// A warning where a places file was written for a problem file with another digest.
pub fn other_file(text: &str, loaded: &Loaded) -> Option<Diagnostic> {
    let file: Value = serde_json::from_str(text).ok()?;
    let digest = file["problem"]["sha256"].as_str().filter(|&digest| digest != loaded.sha256)?;
    let message = "the places were written for another problem file, or for another state of it";
    let warning = Diagnostic::warning(Code("P004"), message).found(format!("sha256 {digest}"));
    Some(warning.expected(format!("sha256 {}", loaded.sha256)))
}

/// Holds what a places file says for people against the problem it is used for: which bits and qubits carry each
/// variable. What the file does not say is not held against it.
pub fn check(text: &str, loaded: &Loaded, places: &Places) -> Result<(), Box<Diagnostic>> {
    let file: Value = serde_json::from_str(text).unwrap_or_default();
    let Some(said) = file["variables"].as_array() else { return Ok(()) };
    if places.check(&loaded.problem).is_err() {
        return Ok(());
    }
    let known = variables(&loaded.problem, places);
    for variable in said {
        let same = known.iter().find(|known| known["name"] == variable["name"]);
        let told = |value: &Value| format!("{}: bits {}, qubits {}", value["name"], value["bits"], value["qubits"]);
        let expected = match same {
            Some(known) if known["bits"] == variable["bits"] && known["qubits"] == variable["qubits"] => continue,
            Some(known) => told(known),
            None => "a variable of the problem".to_owned(),
        };
        let message = "what the places say of a variable contradicts them, or the problem";
        return Err(Box::new(Diagnostic::error(Code("P005"), message).found(told(variable)).expected(expected)));
    }
    Ok(())
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
