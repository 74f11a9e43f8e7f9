//! Functions given by their values: constant rows under an index, tables of allowed rows, small divisions.
//!
//! Two ways are tried and the one with fewer ANDs is kept: a tree of choices over the bits (one AND a choice, choices of
//! constants free, equal branches shared), and the sum of products of the algebraic normal form, whose products are
//! shared by all digits. Values that no assignment asks for are filled in as suits each way.

use rustc_hash::FxHashMap;

use super::Lit;
use super::builder::Builder;
use super::linear::{Linear, Range, width};

/// Beyond this many bits only the tree of choices is tried: a normal form may have a product for every subset.
const MAX_PRODUCT_BITS: usize = 8;

impl Builder {
    /// The value under a binary index; `None` where the index never is. At least one value is given.
    pub(super) fn lookup(&mut self, index: &[Lit], values: &[Option<i128>]) -> Linear {
        let known = || values.iter().copied().flatten();
        let range = Range { lo: known().min().expect("a value"), hi: known().max().expect("a value") };
        let codes: Vec<Option<u128>> = values.iter().map(|v| v.map(|v| v.abs_diff(range.lo))).collect();
        let digit = |at: usize| -> Vec<Option<bool>> { codes.iter().map(|c| c.map(|c| c >> at & 1 == 1)).collect() };
        let digits: Vec<Vec<Option<bool>>> = (0..width(range.span())).map(digit).collect();
        let choices = |b: &mut Builder| digits.iter().map(|values| b.choices(index, values)).collect::<Vec<Lit>>();
        let products = |b: &mut Builder| digits.iter().map(|values| b.products(index, values)).collect::<Vec<Lit>>();
        let lits = if index.len() > MAX_PRODUCT_BITS { choices(self) } else { self.cheapest(&[&choices, &products]) };
        Linear::binary(range.lo, &lits, range)
    }

    /// A tree of choices over the highest bit first.
    fn choices(&mut self, index: &[Lit], values: &[Option<bool>]) -> Lit {
        let mut wanted = values.iter().copied().flatten();
        let Some(first) = wanted.next() else { return Lit::NO };
        if wanted.all(|value| value == first) {
            return Lit::constant(first);
        }
        let (&top, rest) = index.split_last().expect("two values need a bit");
        let half = 1 << rest.len();
        let (low, high) = values.split_at(half.min(values.len()));
        if high.iter().all(Option::is_none) {
            return self.choices(rest, low);
        }
        if low.iter().all(Option::is_none) {
            return self.choices(rest, high);
        }
        let (low, high) = (self.choices(rest, low), self.choices(rest, high));
        self.choose(top, high, low)
    }

    /// The algebraic normal form: the XOR of products of bits.
    fn products(&mut self, index: &[Lit], values: &[Option<bool>]) -> Lit {
        let size = 1usize << index.len();
        let mut sum = Lit::NO;
        let mut used = vec![false; size];
        for code in 0..size {
            // The product of `code` must make up for those of the subsets; a value nobody asks for needs none.
            let Some(&Some(wanted)) = values.get(code) else { continue };
            let mut got = false;
            let mut subset = code;
            while subset > 0 {
                subset = (subset - 1) & code;
                got ^= used[subset];
            }
            used[code] = got != wanted;
            if used[code] {
                let bits: Vec<Lit> = (0..index.len()).filter(|at| code >> at & 1 == 1).map(|at| index[at]).collect();
                // A chain, so that products with common low bits share them.
                let product = bits.into_iter().fold(Lit::YES, |product, lit| self.and(product, lit));
                sum = self.xor(sum, product);
            }
        }
        sum
    }

    /// The element under a binary index; elements beyond the end of the row are never asked for.
    pub(super) fn select(&mut self, index: &[Lit], items: &[Lit]) -> Lit {
        let Some((&top, rest)) = index.split_last() else { return items[0] };
        let half = 1 << rest.len();
        if items.len() <= half {
            return self.select(rest, items);
        }
        let (low, high) = items.split_at(half);
        let (low, high) = (self.select(rest, low), self.select(rest, high));
        self.choose(top, high, low)
    }

    /// Whether the bits are one of the rows, each row a string of as many bits.
    pub(super) fn one_of(&mut self, bits: &[Lit], rows: &[Vec<bool>]) -> Lit {
        let reversed: Vec<Lit> = bits.iter().rev().copied().collect();
        let sorted = |flip: bool| {
            let turn = |row: &Vec<bool>| if flip { row.iter().rev().copied().collect() } else { row.clone() };
            let mut rows: Vec<Vec<bool>> = rows.iter().map(turn).collect();
            rows.sort();
            rows.dedup();
            rows
        };
        let (forward, backward) = (sorted(false), sorted(true));
        let ahead = |b: &mut Builder| b.trie(bits, &forward.iter().map(Vec::as_slice).collect::<Vec<_>>());
        let back = |b: &mut Builder| b.trie(&reversed, &backward.iter().map(Vec::as_slice).collect::<Vec<_>>());
        if bits.len() > MAX_PRODUCT_BITS {
            return self.cheapest(&[&ahead, &back]);
        }
        let mut table = vec![Some(false); 1 << bits.len()];
        for row in rows {
            table[row.iter().rev().fold(0, |code, &bit| code << 1 | usize::from(bit))] = Some(true);
        }
        self.cheapest(&[&ahead, &back, &|b| b.products(bits, &table)])
    }

    fn trie(&mut self, bits: &[Lit], rows: &[&[bool]]) -> Lit {
        let mut known = FxHashMap::default();
        self.branch(bits, rows, &mut known)
    }

    /// Whether the bits are one of the sorted rows: a choice on the first bit between the rows that begin with 1 and
    /// those that begin with 0. Equal sets of remainders are built once.
    fn branch<'a>(
        &mut self,
        bits: &[Lit],
        rows: &[&'a [bool]],
        known: &mut FxHashMap<(usize, Vec<&'a [bool]>), Lit>,
    ) -> Lit {
        let Some((&first, rest)) = bits.split_first() else { return Lit::constant(!rows.is_empty()) };
        if rows.is_empty() {
            return Lit::NO;
        }
        if bits.len() < 64 && rows.len() == 1 << bits.len() {
            return Lit::YES;
        }
        let key = (bits.len(), rows.to_vec());
        if let Some(&lit) = known.get(&key) {
            return lit;
        }
        let split = rows.partition_point(|row| !row[0]);
        let tails: Vec<&[bool]> = rows.iter().map(|row| &row[1..]).collect();
        let no = self.branch(rest, &tails[..split], known);
        let yes = self.branch(rest, &tails[split..], known);
        let lit = self.choose(first, yes, no);
        known.insert(key, lit);
        lit
    }
}
