//! A tree decomposition of the primal graph (two variables are joined if a clause holds both), and the order it gives.
//!
//! The decomposition is that of an elimination order by least fill-in: U. Kjærulff, "Triangulation of graphs: algorithms
//! giving small total state space", Aalborg University R-90-09, 1990. The bag of a variable is itself with its neighbours
//! at the time it is eliminated; the tree is rooted at a bag that leaves no more than half of the bags on any side; a
//! variable ranks by the depth of the highest bag that holds it (T. Korhonen, M. Järvisalo, "Integrating tree
//! decompositions into decision heuristics of propositional model counters", CP 2021, section 4).

use super::lit::Lit;

/// Variables above which no decomposition is tried: adjacency is a bit matrix.
const MAX_VARS: usize = 4000;
/// Words of the matrix that the elimination may read before it gives up.
const WORK: usize = 400_000_000;

/// Ranks of the variables, and the number of variables in the largest bag.
pub(crate) struct Decomposition {
    /// For a variable, the depth of its highest bag.
    pub(crate) ranks: Vec<u32>,
    /// The size of the largest bag.
    pub(crate) largest: usize,
}

/// Decomposes the primal graph; `None` if it is too large.
pub(crate) fn decompose(var_count: usize, clauses: &[Vec<Lit>]) -> Option<Decomposition> {
    if var_count == 0 || var_count > MAX_VARS {
        return None;
    }
    let mut graph = Graph::new(var_count, clauses);
    let bags = graph.eliminate_all()?;
    let largest = bags.iter().map(Vec::len).max().unwrap_or(0);
    Some(Decomposition { ranks: ranks(var_count, &bags), largest })
}

struct Graph {
    words: usize,
    rows: Vec<u64>,
    alive: Vec<bool>,
    work: usize,
}

impl Graph {
    fn new(vars: usize, clauses: &[Vec<Lit>]) -> Self {
        let words = vars.div_ceil(64);
        let mut graph = Self { words, rows: vec![0; vars * words], alive: vec![true; vars], work: 0 };
        for clause in clauses {
            for a in clause {
                for b in clause {
                    graph.join(a.var(), b.var());
                }
            }
        }
        graph
    }

    fn join(&mut self, a: usize, b: usize) {
        if a != b {
            self.rows[a * self.words + b / 64] |= 1 << (b % 64);
        }
    }

    fn row(&self, var: usize) -> &[u64] {
        &self.rows[var * self.words..][..self.words]
    }

    fn neighbours(&self, var: usize) -> Vec<usize> {
        let mut list = Vec::new();
        for (at, &word) in self.row(var).iter().enumerate() {
            let mut word = word;
            while word != 0 {
                list.push(at * 64 + word.trailing_zeros() as usize);
                word &= word - 1;
            }
        }
        list
    }

    /// Pairs of neighbours that are not joined, doubled.
    fn fill(&mut self, var: usize) -> usize {
        let list = self.neighbours(var);
        self.work += list.len() * self.words;
        let own = self.row(var);
        let joined = |other: &usize| -> usize {
            self.row(*other).iter().zip(own).map(|(a, b)| (a & b).count_ones() as usize).sum()
        };
        list.iter().map(|other| list.len() - 1 - joined(other)).sum()
    }

    /// Eliminates all variables; gives the bags in the order of elimination, each with its own variable first.
    fn eliminate_all(&mut self) -> Option<Vec<Vec<usize>>> {
        let vars = self.alive.len();
        let mut fills: Vec<(usize, usize)> =
            (0..vars).map(|var| (self.fill(var), self.neighbours(var).len())).collect();
        let mut bags = Vec::with_capacity(vars);
        for _ in 0..vars {
            if self.work > WORK {
                return None;
            }
            let var = (0..vars).filter(|&var| self.alive[var]).min_by_key(|&var| (fills[var], var))?;
            let list = self.neighbours(var);
            let mut stale = list.clone();
            if fills[var].0 > 0 {
                // New edges change the fill of whoever sees both ends.
                stale.extend(list.iter().flat_map(|&other| self.neighbours(other)));
            }
            self.remove(var, &list);
            stale.sort_unstable();
            stale.dedup();
            for other in stale.into_iter().filter(|&other| other != var) {
                fills[other] = (self.fill(other), self.neighbours(other).len());
            }
            bags.push(std::iter::once(var).chain(list).collect());
        }
        Some(bags)
    }

    fn remove(&mut self, var: usize, list: &[usize]) {
        self.alive[var] = false;
        let own = self.row(var).to_vec();
        for &other in list {
            let row = &mut self.rows[other * self.words..][..self.words];
            for (word, own) in row.iter_mut().zip(&own) {
                *word |= own;
            }
            row[other / 64] &= !(1 << (other % 64));
            row[var / 64] &= !(1 << (var % 64));
        }
        self.work += list.len() * self.words;
    }
}

/// Ranks by the depth of the highest bag, the root being the middle of each tree.
fn ranks(var_count: usize, bags: &[Vec<usize>]) -> Vec<u32> {
    let mut place = vec![0; var_count];
    for (at, bag) in bags.iter().enumerate() {
        place[bag[0]] = at;
    }
    // The bag above is that of the next neighbour to be eliminated; it comes later in the list.
    let above: Vec<Option<usize>> = bags.iter().map(|bag| bag[1..].iter().map(|&var| place[var]).min()).collect();
    let mut size = vec![1usize; bags.len()];
    let mut joined: Vec<Vec<usize>> = vec![Vec::new(); bags.len()];
    for at in 0..bags.len() {
        if let Some(up) = above[at] {
            size[up] += size[at];
            joined[up].push(at);
            joined[at].push(up);
        }
    }
    let mut ranks = vec![u32::MAX; var_count];
    for root in (0..bags.len()).filter(|&at| above[at].is_none()) {
        let middle = middle(root, size[root], &size, &above, &joined);
        spread(middle, bags, &joined, &mut ranks);
    }
    ranks
}

/// The bag from which no side holds more than half of the tree.
fn middle(root: usize, total: usize, size: &[usize], above: &[Option<usize>], joined: &[Vec<usize>]) -> usize {
    let mut at = root;
    while let Some(&heavy) = joined[at].iter().find(|&&below| above[below] == Some(at) && size[below] * 2 > total) {
        at = heavy;
    }
    at
}

/// Walks the tree from its middle outwards.
fn spread(middle: usize, bags: &[Vec<usize>], joined: &[Vec<usize>], ranks: &mut [u32]) {
    let mut queue = std::collections::VecDeque::from([(middle, usize::MAX, 0)]);
    while let Some((at, from, depth)) = queue.pop_front() {
        for &var in &bags[at] {
            ranks[var] = ranks[var].min(depth);
        }
        queue.extend(joined[at].iter().filter(|&&next| next != from).map(|&next| (next, at, depth + 1)));
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    fn clauses(pairs: &[(u32, u32)]) -> Vec<Vec<Lit>> {
        pairs.iter().map(|&(a, b)| vec![Lit::new(a, false), Lit::new(b, true)]).collect()
    }

    #[test]
    fn known_widths() {
        // Treewidth of a path 1, of a cycle 2, of a clique n - 1 (Bodlaender, "A partial k-arboretum of graphs with
        // bounded treewidth", 1998, from memory); the largest bag has one more. Least fill-in is exact on these.
        let path: Vec<(u32, u32)> = (0..9).map(|at| (at, at + 1)).collect();
        assert_eq!(decompose(10, &clauses(&path)).unwrap().largest, 2);
        let mut cycle = path.clone();
        cycle.push((9, 0));
        assert_eq!(decompose(10, &clauses(&cycle)).unwrap().largest, 3);
        let clique: Vec<(u32, u32)> = (0..6).flat_map(|a| (0..a).map(move |b| (a, b))).collect();
        assert_eq!(decompose(6, &clauses(&clique)).unwrap().largest, 6);
    }

    #[test]
    fn the_middle_of_a_path_ranks_first() {
        let path: Vec<(u32, u32)> = (0..14).map(|at| (at, at + 1)).collect();
        let ranks = decompose(15, &clauses(&path)).unwrap().ranks;
        let first: Vec<usize> = (0..15).filter(|&var| ranks[var] == 0).collect();
        assert!(first.iter().all(|var| (5..=9).contains(var)), "{first:?}");
        assert!(ranks[0] > 4 && ranks[14] > 4);
    }
}
