//! The integer with the least cost in a range.

use super::Wide;

/// A range of at most this many integers is tried one by one.
const SCANNED: u64 = 1 << 10;
/// A longer range is tried at this many places first.
const PLACES: u64 = 1 << 8;

/// The smallest integer of `low..=high` whose cost is least.
///
/// A short range is tried whole. In a longer one the neighbourhood of the best of 256 places is searched by thirds,
/// down to a range that is tried whole: that is exact where the cost falls and then rises between the two places beside
/// the best one, which is so for every cost of this room (smooth in k, with one valley after at most one rise), up to
/// costs that a double cannot tell apart.
pub fn least(low: u64, high: u64, cost: impl Fn(u64) -> Wide) -> u64 {
    let (mut low, mut high) = (low, high.max(low));
    if high - low > SCANNED {
        let step = (high - low) / PLACES;
        let places = (0..=PLACES).map(|at| low + at * step).chain([high]);
        let best = first_least(places, &cost);
        (low, high) = (best.saturating_sub(step).max(low), best.saturating_add(step).min(high));
    }
    while high - low > SCANNED {
        let third = (high - low) / 3;
        let (left, right) = (low + third, high - third);
        if cost(left) <= cost(right) { high = right } else { low = left }
    }
    first_least(low..=high, &cost)
}

fn first_least(candidates: impl Iterator<Item = u64>, cost: impl Fn(u64) -> Wide) -> u64 {
    let costs = candidates.map(|k| (cost(k), k));
    costs.reduce(|best, next| if next.0 < best.0 { next } else { best }).expect("the range is not empty").1
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn finds_the_valley_in_short_and_long_ranges() {
        for valley in [0u64, 17, 8000, 1 << 20, (1 << 30) + 12345, 1 << 33] {
            let found = least(0, 1 << 33, |k| Wide::new(k.abs_diff(valley) as f64));
            assert_eq!(found, valley);
        }
        assert_eq!(least(3, 3, |_| Wide::ONE), 3);
        assert_eq!(least(3, 9, |_| Wide::ONE), 3);
    }
}
