//! Definitions: variables whose value others fix in every model.
//!
//! Variables are taken in the order of the formula. A variable is determined if its clauses over earlier known variables
//! leave it no choice: for every assignment of those, some clause forbids one of its values. That is tested by a truth
//! table over the other variables of the clauses, so it finds every gate of small width whatever its encoding; a long
//! AND or OR is found by its shape. Earlier variables define later ones, so definitions cannot run in a circle. The same
//! is tried from the other end of the formula, and the better of the two is taken.
//!
//! J.-M. Lagniez, E. Lonca, P. Marquis, "Improving model counting by leveraging definability", IJCAI 2016: what is defined
//! may be projected away without changing the count.

use super::Class;
use super::form::{Form, State};
use crate::columns;
use crate::judge::count::engine::lit::Lit;

/// The most variables of a table.
const MAX_WIDTH: usize = 10;
const WORDS: usize = 1 << (MAX_WIDTH - 6);
/// Clauses of one variable that are looked at; beyond, a variable is left as it is.
const MAX_CLAUSES: usize = 60;

/// Marks determined variables.
pub(super) fn find_definitions(form: &mut Form) {
    let lists = form.occurrences();
    let vars = form.class.len();
    let upwards = determined(form, &lists, &mut (0..vars));
    let downwards = determined(form, &lists, &mut (0..vars).rev());
    let better = if downwards.len() > upwards.len() { downwards } else { upwards };
    for var in better {
        form.class[var] = Class::Determined;
    }
}

/// The variables that those before them in this order determine, and that were not known to be determined.
fn determined(form: &Form, lists: &[Vec<u32>], order: &mut dyn Iterator<Item = usize>) -> Vec<usize> {
    // What is determined already may define only what comes after it was found, or the old and the new reasons could
    // run in a circle; so the old ones are found again, or count as unknown.
    let mut known = vec![false; form.class.len()];
    let mut found = Vec::new();
    for var in order.filter(|&var| form.state[var] == State::Open) {
        let occurs = lists[2 * var].len() + lists[2 * var + 1].len();
        if (1..=MAX_CLAUSES).contains(&occurs) && is_defined(form, lists, &known, var) {
            known[var] = true;
            if form.class[var] != Class::Determined {
                found.push(var);
            }
        } else {
            known[var] = form.class[var] == Class::Counted;
        }
    }
    found
}

fn is_defined(form: &Form, lists: &[Vec<u32>], known: &[bool], var: usize) -> bool {
    let mut clauses: Vec<&[Lit]> = Vec::new();
    for lit in [Lit::new(var as u32, false), Lit::new(var as u32, true)] {
        for &at in &lists[lit.index()] {
            let clause = &form.clauses[at as usize];
            if clause.iter().all(|other| other.var() == var || known[other.var()]) {
                clauses.push(clause);
            }
        }
    }
    let all = support(&clauses, var);
    if all.len() <= MAX_WIDTH {
        return leaves_no_choice(&clauses, var, &all);
    }
    is_long_gate(&clauses, var)
        || clauses.iter().any(|clause| {
            let narrow = support(&[*clause], var);
            narrow.len() <= MAX_WIDTH && leaves_no_choice(&clauses, var, &narrow)
        })
}

/// The other variables of these clauses.
fn support(clauses: &[&[Lit]], var: usize) -> Vec<usize> {
    let mut vars: Vec<usize> = clauses.iter().copied().flatten().map(|lit| lit.var()).filter(|&v| v != var).collect();
    vars.sort_unstable();
    vars.dedup();
    vars
}

/// Whether the clauses over these variables forbid a value of `var` under every assignment of them.
fn leaves_no_choice(clauses: &[&[Lit]], var: usize, vars: &[usize]) -> bool {
    let mut decided = [0u64; WORDS];
    'clauses: for clause in clauses {
        let mut rows = [u64::MAX; WORDS];
        for lit in clause.iter().filter(|lit| lit.var() != var) {
            let Ok(at) = vars.binary_search(&lit.var()) else { continue 'clauses };
            let falsified = column(at, !lit.is_negated());
            for word in 0..WORDS {
                rows[word] &= falsified[word];
            }
        }
        for word in 0..WORDS {
            decided[word] |= rows[word];
        }
    }
    decided.iter().all(|&word| word == u64::MAX)
}

/// The rows in which the variable at this place has the value 1, or 0 if `negated`.
fn column(at: usize, negated: bool) -> [u64; WORDS] {
    let flip = if negated { u64::MAX } else { 0 };
    let mut column = [flip; WORDS];
    for (place, word) in column.iter_mut().enumerate() {
        *word ^= columns::column(at, place);
    }
    column
}

/// Whether one clause says that a literal of `var` or some others hold, and clauses of two exclude it with each of them.
fn is_long_gate(clauses: &[&[Lit]], var: usize) -> bool {
    clauses.iter().any(|clause| {
        let Some(&own) = clause.iter().find(|lit| lit.var() == var) else { return false };
        clause
            .iter()
            .filter(|lit| lit.var() != var)
            .all(|&other| clauses.iter().any(|pair| pair.len() == 2 && pair.contains(&!own) && pair.contains(&!other)))
    })
}
