//! What the source says of a constraint, in one line.

use crate::id::Id;
use crate::problem::{ConstraintId, Problem};
use crate::span::Sources;

/// The line and the text of a constraint, or the literals of a clause.
pub fn note(problem: &Problem, sources: &Sources, id: ConstraintId) -> String {
    let text = match problem.constraints.get(id.index()) {
        Some(constraint) => constraint.origin.span.map_or_else(String::new, |span| {
            let bindings = &constraint.origin.bindings;
            let bindings: Vec<String> = bindings.iter().map(|(name, value)| format!("{name} = {value}")).collect();
            let place = format!("line {}: {}", sources.position(span).line, sources.text(span));
            if bindings.is_empty() { place } else { format!("{place} with {}", bindings.join(", ")) }
        }),
        None => {
            let clause = problem.clauses.get(id.index() - problem.constraints.len());
            let lits: Vec<String> = clause.iter().map(|lit| lit.to_dimacs().to_string()).collect();
            format!("clause {}", lits.join(" "))
        }
    };
    text.split_whitespace().collect::<Vec<_>>().join(" ")
}
