//! Literals that hold, and literals that are equal.
//!
//! Binary clauses are implications; literals that imply each other around a circle are equal. The circles are the strongly
//! connected components: R. Tarjan, "Depth-first search and linear graph algorithms", SIAM J. Comput. 1972.

use super::{Fact, Finding, Tidy};
use crate::id::Id;
use crate::problem::{BitId, BitLit};

pub(super) fn find(tidy: &Tidy) -> Vec<Finding> {
    let mut findings = Vec::new();
    for at in 0..tidy.len() {
        if let [lit] = *tidy.get(at) {
            findings.push(Finding::new(Fact::Holds(lit), vec![tidy.origin(at)]));
        }
    }
    let component = components(tidy);
    // The clauses inside each component show that its literals are equal.
    let mut inside: Vec<Vec<u32>> = vec![Vec::new(); 2 * tidy.bit_count()];
    for at in 0..tidy.len() {
        if let [a, b] = *tidy.get(at)
            && component[(!a).index()] == component[b.index()]
        {
            inside[component[b.index()] as usize].push(tidy.origin(at));
            inside[component[a.index()] as usize].push(tidy.origin(at));
        }
    }
    let mut first: Vec<Option<BitLit>> = vec![None; 2 * tidy.bit_count()];
    for lit in tidy.all_lits() {
        let own = component[lit.index()] as usize;
        match first[own] {
            None => first[own] = Some(lit),
            // A component and that of the negations say the same; the one whose first literal is positive is told.
            Some(other) if !other.is_negated() => {
                findings.push(Finding::new(Fact::Equal(lit, other), inside[own].clone()));
            }
            Some(_) => {}
        }
    }
    findings
}

/// The component of each literal, by its place.
fn components(tidy: &Tidy) -> Vec<u32> {
    const OPEN: u32 = u32::MAX;
    let count = 2 * tidy.bit_count();
    let lit = |index: usize| BitLit::new(BitId::new(index >> 1), index & 1 == 0);
    let mut component = vec![OPEN; count];
    let (mut order, mut low) = (vec![0u32; count], vec![0u32; count]);
    let (mut next, mut closed) = (1, 0);
    let (mut path, mut stack): (Vec<usize>, Vec<(usize, usize)>) = (Vec::new(), Vec::new());
    for root in 0..count {
        if order[root] != 0 {
            continue;
        }
        stack.push((root, 0));
        while let Some((node, at)) = stack.pop() {
            if at == 0 {
                (order[node], low[node]) = (next, next);
                next += 1;
                path.push(node);
            }
            // A literal implies the other one of each binary clause with its negation.
            let clauses = tidy.with(!lit(node));
            let mut at = at;
            let mut goes_down = false;
            while at < clauses.len() {
                let clause = tidy.get(clauses[at] as usize);
                at += 1;
                if clause.len() != 2 {
                    continue;
                }
                let to = if clause[0] == !lit(node) { clause[1] } else { clause[0] }.index();
                if order[to] == 0 {
                    stack.push((node, at));
                    stack.push((to, 0));
                    goes_down = true;
                    break;
                }
                if component[to] == OPEN {
                    low[node] = low[node].min(order[to]);
                }
            }
            if goes_down {
                continue;
            }
            if low[node] == order[node] {
                while let Some(member) = path.pop() {
                    component[member] = closed;
                    if member == node {
                        break;
                    }
                }
                closed += 1;
            }
            if let Some(&(parent, _)) = stack.last() {
                low[parent] = low[parent].min(low[node]);
            }
        }
    }
    component
}
