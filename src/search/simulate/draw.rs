//! Drawing results: points between 0 and 1 from a seed, each of which falls into the string whose share of the whole
//! covers it. The points are sorted, so one pass over the strings draws all.

use super::Options;
use crate::problem::Bits;
use crate::random::SplitMix64;

/// The points at which results are drawn, in increasing order.
fn points(options: &Options) -> Vec<f64> {
    let mut random = SplitMix64::new(options.seed);
    let mut points: Vec<f64> = (0..options.draw).map(|_| random.unit()).collect();
    points.sort_by(f64::total_cmp);
    points
}

/// Draws by one pass over all strings: each point falls into the string whose share of the whole covers it.
pub(super) fn draw(
    bits: usize,
    options: &Options,
    all: impl FnOnce(&mut dyn FnMut(std::ops::Range<usize>, f64)),
) -> Vec<(Bits, u64)> {
    let points = points(options);
    let mut drawn: Vec<(Bits, u64)> = Vec::new();
    let (mut next, mut so_far, mut last) = (0, 0.0, 0);
    let mut take = |value: usize| {
        let bits = Bits::from_number(value as u128, bits);
        match drawn.last_mut() {
            Some(before) if before.0 == bits => before.1 += 1,
            _ => drawn.push((bits, 1)),
        }
    };
    all(&mut |values: std::ops::Range<usize>, chance: f64| {
        if chance > 0.0 {
            last = values.end - 1;
            while next < points.len() && points[next] < so_far + chance * values.len() as f64 {
                let at = ((points[next] - so_far) / chance).max(0.0) as usize;
                take(values.start + at.min(values.len() - 1));
                next += 1;
            }
            so_far += chance * values.len() as f64;
        }
    });
    // Rounding may leave the sum of all a little below 1.
    (next..points.len()).for_each(|_| take(last));
    drawn
}

/// Draws from a list of results with their probabilities.
pub(super) fn draw_from(results: &[(Bits, f64)], options: &Options) -> Vec<(Bits, u64)> {
    let mut sorted: Vec<&(Bits, f64)> = results.iter().collect();
    sorted.sort_by(|a, b| a.0.cmp(&b.0));
    let all: f64 = sorted.iter().map(|result| result.1).sum();
    let (mut at, mut so_far) = (0, 0.0);
    let mut drawn: Vec<(Bits, u64)> = Vec::new();
    for point in points(options) {
        while at + 1 < sorted.len() && point >= (so_far + sorted[at].1) / all {
            so_far += sorted[at].1;
            at += 1;
        }
        match drawn.last_mut() {
            Some(before) if before.0 == sorted[at].0 => before.1 += 1,
            _ => drawn.push((sorted[at].0.clone(), 1)),
        }
    }
    drawn
}
