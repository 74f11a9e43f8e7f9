//! The hash: random equations over GF(2).
//!
//! Input:  coins. Output: a [`Hash`]: equations, each over a random half of the bits with a random right side.
//! Holds:  under the first m equations each bit string passes with probability 2^-m, and two different ones pass
//!         independently of each other: J. L. Carter, M. N. Wegman, "Universal classes of hash functions", Journal of
//!         Computer and System Sciences 18(2), 1979, section 3 (the class H_3; from memory).
//!
//! The cells of a longer prefix lie within those of a shorter one, so their sizes can be searched by halving.

/// Random equations over so many bits.
#[derive(Clone, Debug)]
pub(super) struct Hash {
    /// For an equation, the bits in it (64 a word) and whether their sum is odd.
    rows: Vec<(Vec<u64>, bool)>,
}

impl Hash {
    /// Draws so many equations over `bits` bits.
    pub(super) fn draw(bits: usize, rows: usize, mut coin: impl FnMut() -> bool) -> Self {
        let mut row = || {
            let mut words = vec![0u64; bits.div_ceil(64)];
            (0..bits).for_each(|bit| words[bit / 64] |= u64::from(coin()) << (bit % 64));
            (words, coin())
        };
        Self { rows: (0..rows).map(|_| row()).collect() }
    }

    /// The first `count` equations, solved for one bit each. `None` if they contradict each other: the cell is empty.
    pub(super) fn solved(&self, count: usize) -> Option<Solved> {
        let mut solved: Vec<Equation> = Vec::new();
        for (bits, odd) in &self.rows[..count] {
            let mut next = Equation { bits: bits.clone(), odd: *odd, pivot: 0 };
            for other in &solved {
                if next.has(other.pivot) {
                    next.plus(other);
                }
            }
            let Some(word) = next.bits.iter().position(|&word| word != 0) else {
                if next.odd {
                    return None;
                }
                continue;
            };
            next.pivot = 64 * word + next.bits[word].trailing_zeros() as usize;
            for other in solved.iter_mut().filter(|other| other.has(next.pivot)) {
                other.plus(&next);
            }
            solved.push(next);
        }
        Some(Solved { equations: solved })
    }
}

/// Equations each of which gives one bit, its pivot, from bits that are no pivots.
#[derive(Clone, Debug, Default)]
pub(super) struct Solved {
    pub(super) equations: Vec<Equation>,
}

/// A sum of bits and its parity.
#[derive(Clone, Debug)]
pub(super) struct Equation {
    bits: Vec<u64>,
    /// Whether the sum is odd.
    pub(super) odd: bool,
    pivot: usize,
}

impl Solved {
    /// Which of so many bits the equations leave free: they tell the members of the cell apart.
    pub(super) fn free(&self, bits: usize) -> Vec<usize> {
        let mut free = vec![true; bits];
        self.equations.iter().for_each(|equation| free[equation.pivot] = false);
        (0..bits).filter(|&bit| free[bit]).collect()
    }
}

impl Equation {
    fn has(&self, bit: usize) -> bool {
        self.bits[bit / 64] >> (bit % 64) & 1 == 1
    }

    fn plus(&mut self, other: &Equation) {
        self.bits.iter_mut().zip(&other.bits).for_each(|(word, other)| *word ^= other);
        self.odd ^= other.odd;
    }

    /// The bits in the sum.
    pub(super) fn bits(&self) -> impl Iterator<Item = usize> {
        (0..64 * self.bits.len()).filter(|&bit| self.has(bit))
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::random::SplitMix64;

    /// Which strings of so many bits pass the first `rows` equations.
    fn passes(hash: &Hash, bits: usize, rows: usize) -> Vec<bool> {
        let holds = |solved: &Solved, string: usize| {
            solved
                .equations
                .iter()
                .all(|sum| sum.bits().filter(|&bit| string >> bit & 1 == 1).count() % 2 == usize::from(sum.odd))
        };
        let solved = hash.solved(rows);
        (0..1 << bits).map(|string| solved.as_ref().is_some_and(|solved| holds(solved, string))).collect()
    }

    /// Over all coin sequences each string passes equally often, and each pair of strings as often as if the two had
    /// nothing to do with each other.
    #[test]
    fn pairwise_independent_over_all_coins() {
        for (bits, rows) in [(2usize, 1usize), (2, 2), (3, 2), (3, 3)] {
            let coins = rows * (bits + 1);
            let strings = 1 << bits;
            let mut pairs = vec![0u64; strings * strings];
            for word in 0..1u64 << coins {
                let mut at = 0;
                let hash = Hash::draw(bits, rows, || {
                    at += 1;
                    word >> (at - 1) & 1 == 1
                });
                let passing = passes(&hash, bits, rows);
                for a in (0..strings).filter(|&a| passing[a]) {
                    for b in (0..strings).filter(|&b| passing[b]) {
                        pairs[a * strings + b] += 1;
                    }
                }
            }
            for a in 0..strings {
                for b in 0..strings {
                    let want = if a == b { coins - rows } else { coins - 2 * rows };
                    assert_eq!(pairs[a * strings + b], 1 << want, "{a} and {b} of {bits} bits under {rows} rows");
                }
            }
        }
    }

    /// The same of the hash that is used, by its seeds: for 200 pairs the frequencies lie within five standard
    /// deviations of 1/16 and 1/256.
    #[test]
    fn pairwise_independent_by_statistics() {
        let (bits, rows, draws) = (8usize, 4usize, 20_000u32);
        let mut random = SplitMix64::new(77);
        let mut own = vec![0u32; 1 << bits];
        let pairs: Vec<(usize, usize)> = (0..200)
            .map(|_| (random.below(256) as usize, random.below(255) as usize))
            .map(|(a, b)| (a, if b >= a { b + 1 } else { b }))
            .collect();
        let mut both = vec![0u32; pairs.len()];
        for _ in 0..draws {
            let hash = Hash::draw(bits, rows, || random.coin());
            let passing = passes(&hash, bits, rows);
            passing.iter().zip(&mut own).for_each(|(&passed, count)| *count += u32::from(passed));
            for (count, &(a, b)) in both.iter_mut().zip(&pairs) {
                *count += u32::from(passing[a] && passing[b]);
            }
        }
        let near = |count: u32, chance: f64| {
            let (mean, spread) = (f64::from(draws) * chance, (f64::from(draws) * chance * (1.0 - chance)).sqrt());
            (f64::from(count) - mean).abs() < 5.0 * spread
        };
        assert!(own.iter().all(|&count| near(count, 1.0 / 16.0)));
        assert!(both.iter().all(|&count| near(count, 1.0 / 256.0)), "{both:?}");
    }

    #[test]
    fn cells_of_a_longer_prefix_lie_within() {
        let mut random = SplitMix64::new(3);
        for _ in 0..50 {
            let hash = Hash::draw(6, 6, || random.coin());
            for rows in 1..=6 {
                let (outer, inner) = (passes(&hash, 6, rows - 1), passes(&hash, 6, rows));
                assert!(outer.iter().zip(&inner).all(|(&outer, &inner)| outer || !inner));
            }
        }
    }
}
