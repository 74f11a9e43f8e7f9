//! Lists by number: which clauses a node or a literal is in, in one piece of memory.

use super::view::Clause;
use crate::id::Id;
use crate::make::network::Lit;

/// For each number below a bound a list, in the order the entries came.
pub(super) struct Lists {
    /// Where each list starts; one more for the end.
    starts: Vec<u32>,
    items: Vec<u32>,
}

impl Lists {
    /// The lists of the second parts by the first ones, which are below `count`.
    pub(super) fn new(count: usize, entries: impl Iterator<Item = (usize, usize)> + Clone) -> Self {
        let mut starts = vec![0u32; count + 1];
        entries.clone().for_each(|(list, _)| starts[list + 1] += 1);
        for list in 0..count {
            starts[list + 1] = starts[list].checked_add(starts[list + 1]).expect("fewer than 2^32 entries");
        }
        let mut items = vec![0; starts[count] as usize];
        let mut places = starts.clone();
        for (list, item) in entries {
            items[places[list] as usize] = u32::try_from(item).expect("fewer than 2^32 items");
            places[list] += 1;
        }
        Self { starts, items }
    }

    /// One list.
    pub(super) fn of(&self, list: usize) -> &[u32] {
        &self.items[self.starts[list] as usize..self.starts[list + 1] as usize]
    }
}

/// The clauses of each literal, with the set of each clause's nodes, hashed into 64 bits: a look before the comparison
/// that costs no way to the clause.
pub(super) struct ClauseLists {
    lists: Lists,
    /// For each entry of the lists.
    nodes: Vec<u64>,
}

impl ClauseLists {
    /// The lists of those clauses that `take` takes.
    pub(super) fn new(clauses: &[Clause], take: impl Fn(&Clause) -> bool) -> Self {
        let last = clauses.iter().flat_map(|clause| &clause.lits).map(|lit| lit.0 | 1).max().unwrap_or(0);
        let entries = clauses.iter().enumerate().filter(|(_, clause)| take(clause));
        let entries = entries.flat_map(|(at, clause)| clause.lits.iter().map(move |lit| (lit.0 as usize, at)));
        let lists = Lists::new(last as usize + 1, entries);
        let sets: Vec<u64> = clauses.iter().map(|clause| node_set(&clause.lits)).collect();
        let nodes = lists.items.iter().map(|&at| sets[at as usize]).collect();
        Self { lists, nodes }
    }

    /// How many clauses have the literal.
    pub(super) fn len(&self, lit: Lit) -> usize {
        self.lists.of(lit.0 as usize).len()
    }

    /// The next clause from this place of a literal's list on that may have all of these nodes, and the place after it.
    pub(super) fn next(&self, lit: Lit, place: usize, set: u64) -> Option<(usize, usize)> {
        let start = self.lists.starts[lit.0 as usize] as usize;
        let sets = &self.nodes[start..self.lists.starts[lit.0 as usize + 1] as usize];
        let found = place + sets[place..].iter().position(|nodes| set & !nodes == 0)?;
        Some((self.lists.items[start + found] as usize, found + 1))
    }
}

/// The nodes of literals as a set, hashed into 64 bits.
pub(super) fn node_set(lits: &[Lit]) -> u64 {
    lits.iter().fold(0, |set, lit| set | 1 << (lit.node().index() % 64))
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn each_list_holds_its_entries_in_order() {
        let lists = Lists::new(4, [(2, 7), (0, 1), (2, 3), (3, 9), (2, 8)].into_iter());
        assert_eq!(
            (0..4).map(|list| lists.of(list).to_vec()).collect::<Vec<_>>(),
            [vec![1], vec![], vec![7, 3, 8], vec![9]]
        );
    }
}
