//! Elimination by resolution of variables that do not count, where the formula does not grow.
//!
//! M. Davis, H. Putnam, "A computing procedure for quantification theory", Journal of the ACM 7(3), 1960; the bound by
//! N. Eén, A. Biere, "Effective preprocessing in SAT through variable and clause elimination", SAT 2005, section 3. The
//! resolvents on a variable are the formula with that variable quantified away: the models on all other variables stay.

use super::Class;
use super::form::{Form, State};
use crate::judge::count::engine::lit::Lit;

/// Occurrences of each sign above which a variable is left alone.
const MAX_SIDE: usize = 16;
/// Literals of a resolvent above which a variable is left alone: long clauses propagate badly.
const MAX_LEN: usize = 12;

/// Eliminates what it can; says whether there was anything.
pub(super) fn eliminate(form: &mut Form) -> bool {
    let mut changed = false;
    loop {
        let round = round(form);
        if !round || form.contradiction {
            return changed | round;
        }
        changed = true;
    }
}

/// One pass over the variables, rarest first; the clauses of a variable that was eliminated are not touched again before
/// the next pass.
fn round(form: &mut Form) -> bool {
    let mut lists = form.occurrences();
    let mut order: Vec<usize> = (0..form.class.len())
        .filter(|&var| form.class[var] != Class::Counted && form.state[var] == State::Open)
        .filter(|&var| !(lists[2 * var].is_empty() && lists[2 * var + 1].is_empty()))
        .collect();
    order.sort_by_key(|&var| (lists[2 * var].len() * lists[2 * var + 1].len(), var));
    let mut changed = false;
    for var in order {
        let (yes, no) = (&lists[2 * var], &lists[2 * var + 1]);
        let alive = |list: &[u32]| -> Vec<u32> {
            list.iter().copied().filter(|&at| !form.clauses[at as usize].is_empty()).collect()
        };
        let (yes, no) = (alive(yes), alive(no));
        if yes.len() > MAX_SIDE || no.len() > MAX_SIDE {
            continue;
        }
        let Some(resolvents) = resolvents(form, var, &yes, &no) else { continue };
        changed = true;
        form.state[var] = State::Gone;
        for &at in yes.iter().chain(&no) {
            form.clauses[at as usize].clear();
        }
        for clause in resolvents {
            if clause.is_empty() {
                form.contradiction = true;
                return true;
            }
            for lit in &clause {
                lists[lit.index()].push(form.clauses.len() as u32);
            }
            form.clauses.push(clause);
        }
    }
    form.clauses.retain(|clause| !clause.is_empty());
    form.tidy();
    changed
}

/// The resolvents on a variable, if they are no more and not too long.
fn resolvents(form: &Form, var: usize, yes: &[u32], no: &[u32]) -> Option<Vec<Vec<Lit>>> {
    let mut all: Vec<Vec<Lit>> = Vec::new();
    for &a in yes {
        for &b in no {
            let both = form.clauses[a as usize].iter().chain(&form.clauses[b as usize]);
            let mut clause: Vec<Lit> = both.copied().filter(|lit| lit.var() != var).collect();
            clause.sort_unstable();
            clause.dedup();
            if clause.windows(2).any(|pair| pair[0] == !pair[1]) {
                continue;
            }
            if clause.len() > MAX_LEN || all.len() == yes.len() + no.len() {
                return None;
            }
            all.push(clause);
        }
    }
    Some(all)
}
