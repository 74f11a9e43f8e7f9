//! The JSON contract: every object has `schema`, `command`, `problem`, `warnings` and `partial`; numbers that may be
//! beyond 2^53 are strings.

use num_bigint::BigUint;
use serde_json::{Map, Value, json};

use crate::circuit::{self, Circuit, Level, Mark, Product};
use crate::diag::Diagnostic;
use crate::id::Id;
use crate::judge::audit::{SearchVerdict, Verdict, Witness};
use crate::judge::count::Counted;
use crate::places::{Computed, Places};
use crate::problem::{BitId, Bits, Problem};
use crate::search::Plan;
use crate::search::number::{Wide, in_words};
use crate::search::price::{PRECISION, t_gates_of_rotation};
use crate::source::Loaded;
use crate::span::Sources;

/// The version of the shape of these objects.
pub const SCHEMA: u32 = 1;

/// The object that every command starts from.
pub fn envelope(command: &str, loaded: &Loaded, sources: &Sources, partial: bool) -> Map<String, Value> {
    let warnings: Vec<Value> = loaded.warnings.iter().map(|warning| diagnostic_json(warning, sources)).collect();
    let mut object = bare_envelope(command, partial);
    object.insert("problem".to_owned(), problem_json(loaded));
    object.insert("warnings".to_owned(), warnings.into());
    object
}

/// The same where there is no problem: `problem` is null.
pub fn bare_envelope(command: &str, partial: bool) -> Map<String, Value> {
    let value = json!({
        "schema": SCHEMA,
        "command": command,
        "problem": null,
        "warnings": [],
        "partial": partial,
    });
    match value {
        Value::Object(map) => map,
        _ => unreachable!("an object literal"),
    }
}

/// The object of a command that was given no problem.
pub fn envelope_without_problem(command: &str) -> Map<String, Value> {
    let value = json!({ "schema": SCHEMA, "command": command, "problem": null, "warnings": [], "partial": false });
    match value {
        Value::Object(map) => map,
        _ => unreachable!("an object literal"),
    }
}

/// `problem`.
pub fn problem_json(loaded: &Loaded) -> Value {
    json!({
        "title": loaded.problem.title,
        "file": loaded.file,
        "format": loaded.format.name(),
        "sha256": loaded.sha256,
        "bits": loaded.problem.bit_count(),
        "constraints": loaded.problem.constraint_count(),
    })
}

/// An error or a warning as data.
pub fn diagnostic_json(diagnostic: &Diagnostic, sources: &Sources) -> Value {
    let position = diagnostic.span().map(|span| sources.position(span));
    let file = diagnostic.span().map(|span| sources.file(span.file).name.to_string()).or(diagnostic.file.clone());
    json!({
        "code": diagnostic.code.0,
        "message": diagnostic.message,
        "file": file,
        "line": position.map(|p| p.line),
        "column": position.map(|p| p.column),
        "found": diagnostic.found,
        "expected": diagnostic.expected,
        "help": diagnostic.help,
    })
}

/// `tally`. `space` and `marked` are those of the start state; `marked` is null where it is not known.
pub fn tally_json(counted: &Counted) -> Value {
    let tally = &counted.tally;
    json!({
        "count": tally.exact().map(BigUint::to_string),
        "exact": tally.exact().is_some(),
        "low": tally.low.to_string(),
        "high": tally.high.to_string(),
        "confidence": tally.confidence,
        "method": tally.method,
        "checked_by": tally.checked_by,
        "space": counted.space.to_string(),
        "marked": counted.marked().map(BigUint::to_string),
    })
}

/// `narrowing`. `computed` names each computed bit with what it is of the others.
pub fn narrowing_json(problem: &Problem, places: &Places) -> Value {
    let one = |of: &Computed| json!({ "bit": of.bit, "name": bit_name(problem, of.bit), "is": of.formula.to_string() });
    json!({
        "bits_before": problem.bit_count(),
        "bits_after": places.search_len(),
        "claim": places.claim,
        "computed": places.computed.iter().map(one).collect::<Vec<Value>>(),
    })
}

/// A bit by the variable it belongs to: `lamp`, or `load.2` for bit 2 of an integer.
pub fn bit_name(problem: &Problem, bit: u32) -> String {
    let (var, at) = problem.var_of(BitId::new(bit as usize));
    let name = problem.var_name(var);
    if problem.vars()[var].width > 1 { format!("{name}.{at}") } else { name }
}

/// `circuit`.
pub fn circuit_json(product: &Product) -> Value {
    let figures = &product.figures;
    let has_t = product.level >= Level::CliffordT;
    json!({
        "level": product.level.name(),
        "mark": mark_name(product.mark),
        "qubits": figures.qubits,
        "search": register_len(&product.circuit, circuit::SEARCH),
        "work": register_len(&product.circuit, circuit::WORK),
        "and_count": product.and_count,
        "t_count": has_t.then_some(figures.t_count),
        "t_count_expected": (product.level == Level::Feedback).then_some(figures.t_count_expected),
        "t_depth": has_t.then_some(figures.t_depth),
        "cx_count": figures.cx_count,
        "depth": figures.depth,
        "gates": figures.gates,
        "rotations": figures.rotations,
        "t_count_of_a_rotation": t_of_a_rotation(product),
        "rotation_precision": (figures.rotations > 0).then_some(PRECISION),
        "measurements": figures.measurements,
        "bounds": product.bounds,
    })
}

/// T gates of a rotation of a circuit that has some, where all of them together keep to the precision.
pub(super) fn t_of_a_rotation(product: &Product) -> Option<f64> {
    let rotations = product.figures.rotations;
    (rotations > 0).then(|| t_gates_of_rotation(Wide::new(rotations as f64), PRECISION))
}

/// `phase` or `bit`.
pub fn mark_name(mark: Mark) -> &'static str {
    match mark {
        Mark::Phase => "phase",
        Mark::Bit => "bit",
    }
}

fn register_len(circuit: &Circuit, name: &str) -> usize {
    circuit.register(name).len()
}

/// `audit`.
pub fn audit_json(problem: &Problem, verdict: &Verdict) -> Value {
    json!({
        "verdict": verdict.outcome,
        "how": verdict.how,
        "inputs": verdict.inputs.to_string(),
        "work_clean": verdict.work_clean,
        "phases": verdict.phases,
        "witness": verdict.witness.as_ref().map(|witness| witness_json(problem, witness)),
        "notes": verdict.notes,
        "proof": verdict.certificate.as_ref().map(|certificate| json!({
            "clauses": certificate.formula.len(),
            "equivalences": certificate.equivalences,
            "steps": certificate.proof.len(),
            "checked": certificate.checked.additions,
        })),
    })
}

fn witness_json(problem: &Problem, witness: &Witness) -> Value {
    json!({
        "bits": witness.bits.to_string(),
        "values": values_json(problem, &witness.bits),
        "expected": witness.expected,
        "got": witness.got,
    })
}

/// Values by the names of their variables; null where a code lies outside its domain.
pub(super) fn values_json(problem: &Problem, bits: &Bits) -> Option<Map<String, Value>> {
    let values = problem.decode(bits)?;
    let named = problem
        .vars()
        .iter()
        .zip(values)
        .map(|((id, var), value)| (problem.var_name(id), Value::String(problem.value_name(var.domain, value))));
    Some(named.collect())
}

/// The verdict on a whole search circuit.
pub fn search_json(verdict: &SearchVerdict) -> Value {
    json!({
        "verdict": verdict.outcome,
        "iterations": verdict.iterations.to_string(),
        "planned": verdict.planned.map(|planned| planned.to_string()),
        "iterations_checked": verdict.iterations_checked.to_string(),
        "success": verdict.success,
        "deviation": verdict.deviation,
        "notes": verdict.notes,
    })
}

/// `plan`.
pub fn plan_json(plan: &Plan) -> Value {
    json!({
        "aim": plan.aim,
        "iterations": in_words(&plan.iterations),
        "success": plan.success,
        "success_low": plan.success,
        "success_high": plan.success,
        "success_exact": plan.success_exact.as_ref().map(|(n, d)| format!("{n}/{d}")),
        "expected_oracle_calls": plan.expected_oracle_calls.map(|calls| calls.to_string()),
        "advice": plan.advice,
    })
}

/// A whole search: its circuit and the verdict on it.
pub fn search_product_json(product: &Product, verdict: &SearchVerdict) -> Value {
    json!({ "circuit": circuit_json(product), "audit": search_json(verdict) })
}

/// A solution as values by name.
pub fn solution_json(problem: &Problem, bits: &Bits) -> Value {
    json!({ "bits": bits.to_string(), "values": values_json(problem, bits) })
}

/// The object as text.
pub fn print(object: Map<String, Value>) -> String {
    format!("{:#}\n", Value::Object(object))
}
