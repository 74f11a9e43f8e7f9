//! Equal literals: the strongly connected components of the implications that the clauses of two state.
//!
//! B. Aspvall, M. Plass, R. Tarjan, "A linear-time algorithm for testing the truth of certain quantified Boolean
//! formulas", Information Processing Letters 8(3), 1979; the components by R. Tarjan, "Depth-first search and linear
//! graph algorithms", SIAM Journal on Computing 1(2), 1972, without recursion.

use super::form::Form;
use crate::judge::count::engine::lit::Lit;

/// Merges the literals of each component; says whether there were any.
pub(super) fn merge_equal(form: &mut Form) -> bool {
    let mut implied: Vec<Vec<Lit>> = vec![Vec::new(); 2 * form.class.len()];
    for clause in &form.clauses {
        if let [a, b] = clause[..] {
            implied[(!a).index()].push(b);
            implied[(!b).index()].push(a);
        }
    }
    let component = components(&implied);
    let mut first: Vec<Option<Lit>> = vec![None; implied.len()];
    let mut changed = false;
    for index in 0..implied.len() {
        let lit = Lit::from_index(index);
        let slot = &mut first[component[index] as usize];
        match *slot {
            None => *slot = Some(lit),
            Some(other) => {
                // The mirror component holds the negations, so every pair comes twice; the second merge does nothing.
                form.merge(other, lit);
                changed = true;
            }
        }
    }
    if changed {
        form.tidy();
    }
    changed
}

/// The number of the component of each literal.
fn components(next: &[Vec<Lit>]) -> Vec<u32> {
    const NEW: u32 = u32::MAX;
    let mut found = vec![NEW; next.len()];
    let mut low = vec![0u32; next.len()];
    let mut component = vec![NEW; next.len()];
    let (mut path, mut stack) = (Vec::new(), Vec::new());
    let (mut clock, mut count) = (0, 0);
    for root in (0..next.len()).filter(|&root| !next[root].is_empty()) {
        if found[root] != NEW {
            continue;
        }
        path.push((root, 0));
        while let Some(&mut (at, ref mut edge)) = path.last_mut() {
            if *edge == 0 {
                found[at] = clock;
                low[at] = clock;
                clock += 1;
                stack.push(at);
            }
            if let Some(to) = next[at].get(*edge) {
                *edge += 1;
                let to = to.index();
                if found[to] == NEW {
                    // A literal that implies nothing is a component of its own: no need to enter it.
                    if next[to].is_empty() {
                        found[to] = clock;
                        clock += 1;
                        component[to] = count;
                        count += 1;
                    } else {
                        path.push((to, 0));
                    }
                } else if component[to] == NEW {
                    low[at] = low[at].min(found[to]);
                }
                continue;
            }
            path.pop();
            if let Some(&(above, _)) = path.last() {
                low[above] = low[above].min(low[at]);
            }
            if low[at] == found[at] {
                while let Some(member) = stack.pop() {
                    component[member] = count;
                    if member == at {
                        break;
                    }
                }
                count += 1;
            }
        }
    }
    for slot in component.iter_mut().filter(|slot| **slot == NEW) {
        *slot = count;
        count += 1;
    }
    component
}
