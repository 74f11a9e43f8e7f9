//! Elimination over parities: what a system of exclusive ors determines.
//!
//! Input: parities and an order of the bits. Output: rows equivalent to them, each with a bit of its own (its pivot) that no
//! other row has: the last of its bits in the order. So the bits without a row are free, and each pivot is the parity
//! of free bits that come before it. Gauss and Jordan, over the field of two elements.

use rustc_hash::FxHashMap;

use crate::id::Id;
use crate::problem::BitId;

/// A parity: an odd number of the bits is 1, or an even one.
#[derive(Clone, PartialEq, Eq, Hash, Debug)]
pub struct Row {
    /// In increasing order.
    pub bits: Vec<BitId>,
    /// Whether the number is odd.
    pub odd: bool,
}

/// The most rows that are eliminated together; a larger connected system is left as it is. A thousand rows over a few thousand
/// bits take some tenths of a second.
const MAX_ROWS: usize = 1 << 10;

/// The reduced rows of every connected part that is not too large; a contradiction is left out, since it determines
/// nothing. `rank` gives the place of each bit in the order.
pub fn reduce(rows: &[Row], rank: &[u32]) -> Vec<Row> {
    parts(rows, rank.len())
        .into_iter()
        .filter(|part| part.len() <= MAX_ROWS)
        .flat_map(|part| reduce_part(&part, rank))
        .collect()
}

/// Which of `asked` are sums of some of `rows`.
pub fn are_sums(rows: &[Row], asked: &[Row], bit_count: usize) -> Vec<bool> {
    let rank: Vec<u32> = (0..bit_count as u32).collect();
    let by_pivot: FxHashMap<BitId, Row> = parts(rows, bit_count)
        .into_iter()
        .filter(|part| part.len() <= MAX_ROWS)
        .flat_map(|part| reduce_part(&part, &rank))
        .filter_map(|row| row.bits.last().copied().map(|pivot| (pivot, row)))
        .collect();
    let given: rustc_hash::FxHashSet<&Row> = rows.iter().collect();
    let is_sum = |row: &Row| {
        // Each pivot stands in one row only, so the rows of its pivots are the only ones that can sum to it.
        let mut sum: FxHashMap<BitId, bool> = FxHashMap::default();
        let mut odd = row.odd;
        let mut add = |bits: &[BitId]| bits.iter().for_each(|&bit| *sum.entry(bit).or_insert(false) ^= true);
        add(&row.bits);
        for used in row.bits.iter().filter_map(|bit| by_pivot.get(bit)) {
            add(&used.bits);
            odd ^= used.odd;
        }
        !odd && sum.values().all(|&is_left| !is_left)
    };
    asked.iter().map(|row| given.contains(row) || is_sum(row)).collect()
}

/// The rows that hang together by common bits.
fn parts(rows: &[Row], bit_count: usize) -> Vec<Vec<&Row>> {
    let mut parent: Vec<u32> = (0..bit_count as u32).collect();
    fn root(parent: &mut [u32], mut at: u32) -> u32 {
        while parent[at as usize] != at {
            parent[at as usize] = parent[parent[at as usize] as usize];
            at = parent[at as usize];
        }
        at
    }
    for row in rows {
        for pair in row.bits.windows(2) {
            let (a, b) = (root(&mut parent, pair[0].index() as u32), root(&mut parent, pair[1].index() as u32));
            parent[a.max(b) as usize] = a.min(b);
        }
    }
    let mut place: FxHashMap<u32, usize> = FxHashMap::default();
    let mut parts: Vec<Vec<&Row>> = Vec::new();
    for row in rows.iter().filter(|row| !row.bits.is_empty()) {
        let root = root(&mut parent, row.bits[0].index() as u32);
        let at = *place.entry(root).or_insert(parts.len());
        if at == parts.len() {
            parts.push(Vec::new());
        }
        parts[at].push(row);
    }
    parts
}

fn reduce_part(rows: &[&Row], rank: &[u32]) -> Vec<Row> {
    let mut bits: Vec<BitId> = rows.iter().flat_map(|row| row.bits.iter().copied()).collect();
    // The last in the order becomes the first column, so that it is taken as a pivot first.
    bits.sort_unstable_by_key(|bit| std::cmp::Reverse(rank[bit.index()]));
    bits.dedup();
    let column: FxHashMap<BitId, usize> = bits.iter().enumerate().map(|(at, &bit)| (bit, at)).collect();
    let words = bits.len() / 64 + 1;
    // The column after the last one is the constant.
    let mut matrix: Vec<Vec<u64>> = rows
        .iter()
        .map(|row| {
            let mut line = vec![0u64; words];
            let mut flip = |at: usize| line[at / 64] ^= 1 << (at % 64);
            row.bits.iter().for_each(|bit| flip(column[bit]));
            if row.odd {
                flip(bits.len());
            }
            line
        })
        .collect();
    let is_set = |line: &[u64], at: usize| line[at / 64] >> (at % 64) & 1 == 1;
    let mut done = 0;
    for at in 0..bits.len() {
        let Some(found) = (done..matrix.len()).find(|&line| is_set(&matrix[line], at)) else { continue };
        matrix.swap(done, found);
        let pivot = matrix[done].clone();
        for (line, row) in matrix.iter_mut().enumerate() {
            if line != done && is_set(row, at) {
                row.iter_mut().zip(&pivot).for_each(|(word, other)| *word ^= other);
            }
        }
        done += 1;
    }
    let row_of = |line: &Vec<u64>| {
        let mut of_line: Vec<BitId> = (0..bits.len()).filter(|&at| is_set(line, at)).map(|at| bits[at]).collect();
        of_line.sort_unstable();
        Row { bits: of_line, odd: is_set(line, bits.len()) }
    };
    matrix[..done].iter().map(row_of).collect()
}

#[cfg(test)]
mod tests {
    use super::*;

    fn row(bits: &[usize], odd: bool) -> Row {
        Row { bits: bits.iter().map(|&bit| BitId::new(bit)).collect(), odd }
    }

    #[test]
    fn pivots_are_the_last_bits_and_stand_once() {
        let rows = [row(&[0, 1, 2], true), row(&[1, 2, 3], false), row(&[0, 3], true)];
        // The third is the sum of the others.
        let reduced = reduce(&rows, &[0, 1, 2, 3]);
        assert_eq!(reduced, [row(&[0, 3], true), row(&[0, 1, 2], true)]);
        let other_order = reduce(&rows, &[3, 2, 1, 0]);
        assert_eq!(other_order, [row(&[0, 3], true), row(&[1, 2, 3], false)]);
        let asked = [row(&[0, 1, 2], true), row(&[0, 1, 2], false), row(&[1, 2], true), row(&[0, 3], true)];
        assert_eq!(are_sums(&rows[..2], &asked, 4), [true, false, false, true]);
    }
}
