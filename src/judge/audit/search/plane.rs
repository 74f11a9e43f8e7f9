//! States in the plane of a search: one amplitude for every marked string of the start state, one for every other.
//!
//! Input: a state and the marked strings. Output: the two amplitudes, where the state is of this kind, with every other qubit 0;
//! and what leads from one such state to another: a phase on the marked strings, or a phase on the start state.

use std::f64::consts::PI;

use super::profile::Profile;
use crate::circuit::QubitId;
use crate::judge::audit::state::State;
use crate::judge::audit::state::amplitude::Complex;

/// A state of the plane.
#[derive(Clone, Copy, Debug)]
pub(super) struct Plane {
    pub(super) marked: Complex,
    pub(super) other: Complex,
}

/// What leads from a state of the plane to the next, up to a global phase. Angles are above -pi and at most pi.
#[derive(Clone, Copy, PartialEq, Debug)]
pub(super) enum Step {
    /// The marked strings are turned by this angle.
    Mark(f64),
    /// The start state is turned by this angle.
    Reflect(f64),
}

/// Looks for states of the plane.
pub(super) struct Looker<'p, 't> {
    pub(super) profile: &'p Profile<'t>,
    pub(super) search: &'p [QubitId],
}

impl Looker<'_, '_> {
    /// The state as one of the plane, where it is one up to `tolerance` in each amplitude.
    pub(super) fn look(&self, state: &State<Complex>, tolerance: f64) -> Option<Plane> {
        let mut found: [(u64, Complex); 2] = [(0, Complex { re: 0.0, im: 0.0 }); 2];
        for entry in state.entries(0) {
            if entry.amplitude.norm() <= tolerance * tolerance {
                continue;
            }
            let ones: u32 = entry.row.iter().map(|word| word.count_ones()).sum();
            let bit = |(at, &qubit): (usize, &QubitId)| usize::from(entry.qubit(qubit)) << at;
            let value: usize = self.search.iter().enumerate().map(bit).sum();
            if ones != value.count_ones() || !self.profile.is_held(value) {
                return None;
            }
            let (seen, first) = &mut found[usize::from(self.profile.is_marked(value))];
            if *seen == 0 {
                *first = entry.amplitude;
            } else if distance(*first, entry.amplitude) > 2.0 * tolerance {
                return None;
            }
            *seen += 1;
        }
        let sizes = [self.profile.others(), self.profile.marked()];
        let is_whole = |(&(seen, _), size): (&(u64, Complex), u64)| seen == 0 || seen == size;
        let [(_, other), (_, marked)] = found;
        found.iter().zip(sizes).all(is_whole).then_some(Plane { marked, other })
    }
}

impl Plane {
    /// Whether this is the start state up to a global phase.
    pub(super) fn is_start(&self, tolerance: f64) -> bool {
        distance(self.marked, self.other) <= 2.0 * tolerance
    }

    /// Whether two states are the same up to a global phase.
    pub(super) fn is_same(&self, other: &Plane, profile: &Profile, angle: f64) -> bool {
        let (marked, others) = (profile.marked() as f64, profile.others() as f64);
        let marks = times_conjugate(other.marked, self.marked).scaled(marked);
        let rest = times_conjugate(other.other, self.other).scaled(others);
        // Of two unit vectors the overlap is 1 less half of the squared distance.
        let overlap = Complex { re: marks.re + rest.re, im: marks.im + rest.im }.norm().sqrt();
        1.0 - overlap <= angle * angle
    }

    /// The step to another state; `angle` is how far angles may be off.
    pub(super) fn step_to(&self, to: &Plane, profile: &Profile, angle: f64) -> Option<Step> {
        let is_near = |a: f64, b: f64| (a - b).abs() <= angle * a.max(b);
        let [m, u, to_m, to_u] =
            [self.marked, self.other, to.marked, to.other].map(|amplitude| amplitude.norm().sqrt());
        if is_near(m, to_m) && is_near(u, to_u) {
            let turn = times_conjugate(to.marked, self.marked).angle() - times_conjugate(to.other, self.other).angle();
            return Some(Step::Mark(wrapped(turn)));
        }
        // Turning the start state adds the same to every amplitude; so differences show the global phase.
        let (before, after) = (self.marked.minus(self.other), to.marked.minus(to.other));
        let size = before.norm();
        let phase = times_conjugate(after, before).scaled(1.0 / size);
        if (phase.norm().sqrt() - 1.0).abs() > angle {
            return None;
        }
        let (marked, others) = (profile.marked() as f64, profile.others() as f64);
        let sum = self.marked.scaled(marked).plus(self.other.scaled(others));
        let mean = sum.scaled(1.0 / (marked + others));
        let added = times_conjugate(to.other, phase).minus(self.other);
        let turn = times_conjugate(added, mean).scaled(1.0 / mean.norm()).plus(Complex { re: 1.0, im: 0.0 });
        ((turn.norm().sqrt() - 1.0).abs() <= angle).then(|| Step::Reflect(wrapped(turn.angle())))
    }
}

fn times_conjugate(a: Complex, b: Complex) -> Complex {
    a.times(Complex { re: b.re, im: -b.im })
}

fn distance(a: Complex, b: Complex) -> f64 {
    a.minus(b).norm().sqrt()
}

/// The angle above -pi and at most pi.
pub(super) fn wrapped(angle: f64) -> f64 {
    let turned = angle.rem_euclid(2.0 * PI);
    if turned > PI { turned - 2.0 * PI } else { turned }
}
