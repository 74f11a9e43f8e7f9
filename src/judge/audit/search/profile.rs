//! What a search must be after j iterations, and how far a state is from it.
//!
//! With N start strings of which M are marked and sin^2 theta = M/N, after j iterations each marked string has the
//! amplitude sin((2j+1) theta) / sqrt(M) and each other one cos((2j+1) theta) / sqrt(N-M), up to a global phase.
//!
//! # References
//! - M. Boyer, G. Brassard, P. Hoyer, A. Tapp: _Tight bounds on quantum searching_, Fortschritte der Physik 46:493,
//!   1998, section 3.

use crate::judge::audit::state::amplitude::Complex;
use crate::places::Start;

/// The search, as the problem says it.
pub(super) struct Profile<'t> {
    truth: &'t [u64],
    start: &'t Start,
    /// All strings of the register.
    strings: usize,
    /// Start strings.
    all: f64,
    /// Marked ones.
    marked: f64,
    pub(super) theta: f64,
}

/// How a state compares with a profile.
#[derive(Clone, Copy, Debug)]
pub(super) struct Fit {
    /// The largest distance of an amplitude from what it must be.
    pub(super) deviation: f64,
    /// The global phase that was taken out.
    pub(super) phase: Complex,
}

/// What a state is made of: sums over the marked and over the other strings.
#[derive(Clone, Copy, Debug)]
pub(super) struct Sums {
    marked: Complex,
    other: Complex,
    /// The probability of the marked strings.
    pub(super) success: f64,
}

impl<'t> Profile<'t> {
    /// The profile of a search over the strings of the start state; bit `v` of `truth` says whether string `v` is marked.
    pub(super) fn new(truth: &'t [u64], bits: usize, start: &'t Start) -> Self {
        let strings = 1usize << bits;
        let mut profile = Self { truth, start, strings, all: 0.0, marked: 0.0, theta: 0.0 };
        let held = (0..strings).filter(|&value| profile.is_held(value));
        let (all, marked) =
            held.fold((0u64, 0u64), |(all, marked), value| (all + 1, marked + u64::from(profile.is_marked(value))));
        (profile.all, profile.marked) = (all as f64, marked as f64);
        profile.theta = (profile.marked / profile.all).sqrt().asin();
        profile
    }

    /// Whether the start state holds a string.
    pub(super) fn is_held(&self, value: usize) -> bool {
        self.start.allows(|qubit| value >> qubit & 1 == 1)
    }

    pub(super) fn is_marked(&self, value: usize) -> bool {
        self.truth[value / 64] >> (value % 64) & 1 == 1
    }

    /// The amplitudes of a marked string and of another one after `turns` iterations.
    pub(super) fn amplitudes(&self, turns: u64) -> (f64, f64) {
        let (sin, cos) = ((2.0 * turns as f64 + 1.0) * self.theta).sin_cos();
        let others = self.all - self.marked;
        let per = |value: f64, number: f64| if number > 0.0 { value / number.sqrt() } else { 0.0 };
        (per(sin, self.marked), per(cos, others))
    }

    /// The success probability after `turns` iterations.
    pub(super) fn success(&self, turns: u64) -> f64 {
        ((2.0 * turns as f64 + 1.0) * self.theta).sin().powi(2)
    }

    /// How many strings are marked.
    pub(super) fn marked(&self) -> u64 {
        self.marked as u64
    }

    /// How many strings of the start state are not.
    pub(super) fn others(&self) -> u64 {
        (self.all - self.marked) as u64
    }

    /// The least number of iterations with the highest success at the first peak: of the two whole numbers around
    /// pi / (4 theta) - 1/2, where the angle is pi/2, the better one.
    pub(super) fn planned(&self) -> u64 {
        if self.marked == 0.0 {
            return 0;
        }
        let below = (std::f64::consts::FRAC_PI_4 / self.theta - 0.5).max(0.0).floor() as u64;
        if self.success(below + 1) > self.success(below) + 1e-12 { below + 1 } else { below }
    }

    /// Sums over a state; `amplitude` gives that of each string.
    pub(super) fn sums(&self, amplitude: impl Fn(usize) -> Complex) -> Sums {
        let nothing = Complex { re: 0.0, im: 0.0 };
        let mut sums = Sums { marked: nothing, other: nothing, success: 0.0 };
        for value in 0..self.strings {
            let a = amplitude(value);
            let sum = if self.is_marked(value) {
                sums.success += a.norm();
                &mut sums.marked
            } else {
                &mut sums.other
            };
            *sum = Complex { re: sum.re + a.re, im: sum.im + a.im };
        }
        sums
    }

    /// How far a state with these sums is from `turns` iterations.
    pub(super) fn fit(&self, turns: u64, sums: &Sums, amplitude: impl Fn(usize) -> Complex) -> Fit {
        let (marked, other) = self.amplitudes(turns);
        // The overlap with what must be gives the phase that fits best.
        let overlap = Complex {
            re: sums.marked.re * marked + sums.other.re * other,
            im: sums.marked.im * marked + sums.other.im * other,
        };
        let size = overlap.norm().sqrt();
        let phase = if size > 0.5 { overlap.scaled(1.0 / size) } else { Complex { re: 1.0, im: 0.0 } };
        let mut deviation: f64 = 0.0;
        for value in 0..self.strings {
            let size = match (self.is_held(value), self.is_marked(value)) {
                (false, _) => 0.0,
                (true, true) => marked,
                (true, false) => other,
            };
            let wanted = phase.scaled(size);
            let a = amplitude(value);
            let apart = Complex { re: a.re - wanted.re, im: a.im - wanted.im };
            deviation = deviation.max(apart.norm());
        }
        Fit { deviation: deviation.sqrt(), phase }
    }

    /// Whether the sums alone rule out `turns` iterations, whatever the phase: a cheap test before [`Profile::fit`].
    pub(super) fn is_excluded(&self, turns: u64, sums: &Sums, tolerance: f64) -> bool {
        (self.success(turns) - sums.success).abs() > tolerance
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn the_planned_number_is_that_of_the_first_peak() {
        // Boyer et al. 1998, section 3; N = 2^bits, M, k, computed from the formula with 40-digit arithmetic outside this
        // program (the table of the plan's own tests).
        let table = [(2, 1, 1), (3, 1, 2), (3, 2, 1), (3, 3, 1), (3, 5, 0), (3, 7, 0), (4, 1, 3), (4, 2, 2), (4, 3, 1)];
        let table = table.into_iter().chain([(6, 1, 6), (6, 5, 2), (6, 32, 0), (6, 64, 0), (6, 0, 0)]);
        for (bits, marked, planned) in table {
            let truth = [if marked == 64 { u64::MAX } else { (1u64 << marked) - 1 }];
            assert_eq!(Profile::new(&truth, bits, &Start::AllStrings).planned(), planned, "{marked} of 2^{bits}");
        }
    }

    #[test]
    fn success_is_that_of_the_published_table() {
        // Boyer et al. 1998, as exact fractions p_k = a s_k^2 computed by hand: N, M, k, p.
        let table = [
            (2, 1, 1, 1.0),
            (3, 1, 0, 1.0 / 8.0),
            (3, 1, 1, 25.0 / 32.0),
            (3, 1, 2, 121.0 / 128.0),
            (3, 1, 3, 169.0 / 512.0),
            (3, 1, 6, 32761.0 / 32768.0),
            (3, 3, 1, 27.0 / 32.0),
            (3, 6, 0, 3.0 / 4.0),
            (3, 6, 1, 0.0),
            (4, 3, 1, 243.0 / 256.0),
            (4, 3, 2, 2523.0 / 4096.0),
        ];
        for (bits, marked, turns, expected) in table {
            let truth = [(1u64 << marked) - 1];
            let profile = Profile::new(&truth, bits, &Start::AllStrings);
            assert!((profile.success(turns) - expected).abs() < 1e-12, "{bits} {marked} {turns}");
        }
    }
}
