//! The exact identity: values that every phase treats alike keep one amplitude rule, so any number of iterations costs one
//! pass over the values.
//!
//! Let `a` be the start vector and `s` the axis of the reflection `1 - (1 - f)|s><s|`. A class is a set of values to
//! which every diagonal gives the same factor. After any number of steps the amplitude of a value v of class c is
//! `x_c s_v + p_c a_v`: a diagonal multiplies both numbers by the factor of the class, and the reflection takes
//! `(1 - f) <s|state>` from every `x_c`. The sums of `s^2`, `s a` and `a^2` over each class are all that is needed.

use super::complex::Complex;
use super::vector::Vector;

/// Sums over one class.
#[derive(Clone, Copy, Debug, Default)]
struct Sums {
    /// Values with an amplitude at the start.
    size: u64,
    axis: f64,
    both: f64,
    start: f64,
}

/// The amplitude rule of one class.
#[derive(Clone, Copy, Debug)]
struct Rule {
    axis: Complex,
    start: Complex,
}

/// The classes of a search, and where it stands.
pub(super) struct Classes<'r> {
    planes: &'r [Vec<u64>],
    start: &'r Vector,
    axis: &'r Vector,
    sums: Vec<Sums>,
    rules: Vec<Rule>,
}

impl<'r> Classes<'r> {
    /// Reads the sums: one pass.
    pub(super) fn new(bits: usize, planes: &'r [Vec<u64>], start: &'r Vector, axis: &'r Vector) -> Self {
        let mut sums = vec![Sums::default(); 1 << planes.len()];
        let same = std::ptr::eq(start, axis) || start == axis;
        let level = axis.level().filter(|_| same);
        each_run(bits, planes, |class, values| {
            let sum = &mut sums[class];
            if level.is_some() {
                sum.size += values.len() as u64;
            } else {
                for value in values {
                    let (s, a) = (axis.at(value), start.at(value));
                    sum.size += u64::from(is_there(a));
                    sum.axis += s * s;
                    sum.both += s * a;
                    sum.start += a * a;
                }
            }
        });
        if let Some(level) = level {
            for sum in &mut sums {
                let share = sum.size as f64 * level * level;
                (sum.axis, sum.both, sum.start) = (share, share, share);
            }
        }
        let rules = vec![Rule { axis: Complex::ZERO, start: Complex::ONE }; sums.len()];
        Self { planes, start, axis, sums, rules }
    }

    /// How many values have an amplitude at the start, and how many of these are in some plane.
    pub(super) fn sizes(&self) -> (u64, u64) {
        let marked: u64 = self.sums[1..].iter().map(|sum| sum.size).sum();
        (self.sums[0].size + marked, marked)
    }

    /// Multiplies the values of a plane by its factor.
    pub(super) fn turn(&mut self, plane: usize, factor: Complex) {
        for (class, rule) in self.rules.iter_mut().enumerate() {
            if class >> plane & 1 == 1 {
                *rule = Rule { axis: rule.axis * factor, start: rule.start * factor };
            }
        }
    }

    /// `1 - (1 - f)|s><s|`.
    pub(super) fn reflect(&mut self, factor: Complex) {
        let parts = self.rules.iter().zip(&self.sums);
        let along = parts
            .fold(Complex::ZERO, |along, (rule, sum)| along + rule.axis.scaled(sum.axis) + rule.start.scaled(sum.both));
        let taken = (Complex::ONE - factor) * along;
        self.rules.iter_mut().for_each(|rule| rule.axis = rule.axis - taken);
    }

    /// The probability of the values that are in some plane.
    pub(super) fn success(&self) -> f64 {
        (1..self.rules.len()).map(|class| self.chance(class)).sum::<f64>().max(0.0)
    }

    fn chance(&self, class: usize) -> f64 {
        let (rule, sum) = (&self.rules[class], &self.sums[class]);
        let cross = rule.axis.conj() * rule.start;
        rule.axis.norm() * sum.axis + 2.0 * cross.re * sum.both + rule.start.norm() * sum.start
    }

    /// Calls `each` with runs of values of one class and the probability of every value in them (where the vectors are
    /// not level, runs of one value).
    pub(super) fn chances(&self, bits: usize, mut each: impl FnMut(std::ops::Range<usize>, f64)) {
        let levels = self.axis.level().zip(self.start.level());
        let flat: Option<Vec<f64>> = levels
            .map(|(s, a)| self.rules.iter().map(|rule| (rule.axis.scaled(s) + rule.start.scaled(a)).norm()).collect());
        each_run(bits, self.planes, |class, values| match &flat {
            Some(flat) => each(values, flat[class]),
            None => {
                let rule = &self.rules[class];
                for value in values {
                    let amplitude = rule.axis.scaled(self.axis.at(value)) + rule.start.scaled(self.start.at(value));
                    each(value..value + 1, amplitude.norm());
                }
            }
        });
    }
}

/// Whether an amplitude is more than what rounding leaves: that of 2^30 strings is above 3e-5.
pub(super) fn is_there(amplitude: f64) -> bool {
    amplitude.abs() > 1e-9
}

/// Calls `each` with runs of neighbouring values of one class, in order.
fn each_run(bits: usize, planes: &[Vec<u64>], mut each: impl FnMut(usize, std::ops::Range<usize>)) {
    let all = 1usize << bits;
    for word in 0..all.div_ceil(64) {
        let (from, to) = (word * 64, all.min(word * 64 + 64));
        let class_at = |at: usize| {
            planes.iter().enumerate().fold(0, |class, (plane, set)| class | ((set[word] >> at & 1) as usize) << plane)
        };
        if planes.iter().all(|set| set[word] == 0) {
            each(0, from..to);
            continue;
        }
        let mut start = from;
        while start < to {
            let class = class_at(start - from);
            let end = (start + 1..to).find(|&at| class_at(at - from) != class).unwrap_or(to);
            each(class, start..end);
            start = end;
        }
    }
}
