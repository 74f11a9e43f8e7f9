//! Lists by number: which clauses a node or a literal is in, in one piece of memory.

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
