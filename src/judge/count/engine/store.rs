//! The clause store: clauses by length, laid out flat for the two things that read them.
//!
//! - Clauses of two and three literals lie inside the lists of their literals: propagation and the search for components
//!   read the other literals right there, without a further look-up.
//! - Longer clauses and all learnt clauses lie in one pool; the first two literals of each are its watched ones.
//!
//! A given (not learnt) clause of three or more literals has a number, its *place*, by which the cache names it.

use super::lit::Lit;

/// The other two literals of a clause of three, and its place.
#[derive(Clone, Copy)]
pub(crate) struct Three {
    /// The place of the clause.
    pub(crate) place: u32,
    /// One other literal.
    pub(crate) a: Lit,
    /// The other one.
    pub(crate) b: Lit,
}

/// Lists with one list a key, all in one vector.
pub(crate) struct Lists<T> {
    starts: Vec<u32>,
    items: Vec<T>,
}

impl<T: Copy> Lists<T> {
    /// The lists of these (key, item) pairs, in their order.
    pub(crate) fn new(keys: usize, pairs: &[(usize, T)]) -> Self {
        let mut starts = vec![0u32; keys + 1];
        for &(key, _) in pairs {
            starts[key + 1] += 1;
        }
        for key in 0..keys {
            starts[key + 1] += starts[key];
        }
        let mut order = vec![0u32; pairs.len()];
        let mut next = starts.clone();
        for (at, &(key, _)) in pairs.iter().enumerate() {
            order[next[key] as usize] = at as u32;
            next[key] += 1;
        }
        let items = order.iter().map(|&at| pairs[at as usize].1).collect();
        Self { starts, items }
    }

    /// The list of this key.
    pub(crate) fn of(&self, key: usize) -> &[T] {
        &self.items[self.starts[key] as usize..self.starts[key + 1] as usize]
    }
}

/// Where a clause lies in the pool.
#[derive(Clone, Copy)]
pub(crate) struct Span {
    pub(crate) start: u32,
    pub(crate) len: u32,
}

/// All clauses.
pub(crate) struct Store {
    /// The number of variables.
    pub(crate) var_count: usize,
    /// For a literal, the other literals of its clauses of two.
    pub(crate) twos: Lists<Lit>,
    /// For a literal, the rests of its clauses of three.
    pub(crate) threes: Lists<Three>,
    /// For a literal, its given longer clauses.
    pub(crate) longs: Lists<u32>,
    /// Longer given clauses, then learnt ones.
    pub(crate) spans: Vec<Span>,
    /// The literals of those.
    pub(crate) pool: Vec<Lit>,
    /// How many of the spans are given.
    pub(crate) given: usize,
    /// How many clauses of three there are: the place of longer clause *i* is this plus *i*.
    pub(crate) three_count: usize,
}

impl Store {
    /// Lays out clauses of at least two literals, all over different variables.
    pub(crate) fn new(var_count: usize, clauses: &[Vec<Lit>]) -> Self {
        let (mut twos, mut threes, mut longs) = (Vec::new(), Vec::new(), Vec::new());
        let (mut spans, mut pool) = (Vec::new(), Vec::new());
        let mut three_count = 0;
        for clause in clauses {
            match clause[..] {
                [a, b] => twos.extend([(a.index(), b), (b.index(), a)]),
                [a, b, c] => {
                    let place = three_count as u32;
                    three_count += 1;
                    for (own, a, b) in [(a, b, c), (b, a, c), (c, a, b)] {
                        threes.push((own.index(), Three { place, a, b }));
                    }
                }
                _ => {
                    let id = spans.len() as u32;
                    longs.extend(clause.iter().map(|lit| (lit.index(), id)));
                    spans.push(Span { start: pool.len() as u32, len: clause.len() as u32 });
                    pool.extend_from_slice(clause);
                }
            }
        }
        Self {
            var_count,
            twos: Lists::new(2 * var_count, &twos),
            threes: Lists::new(2 * var_count, &threes),
            longs: Lists::new(2 * var_count, &longs),
            given: spans.len(),
            spans,
            pool,
            three_count,
        }
    }

    /// How many places there are.
    pub(crate) fn places(&self) -> usize {
        self.three_count + self.given
    }

    /// The literals of a longer or learnt clause.
    pub(crate) fn long(&self, id: u32) -> &[Lit] {
        let span = self.spans[id as usize];
        &self.pool[span.start as usize..][..span.len as usize]
    }
}
