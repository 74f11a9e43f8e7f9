//! Which search a list of steps is: the phases of every iteration against the published schedules.
//!
//! # References
//! - L. K. Grover: _A fast quantum mechanical algorithm for database search_, STOC 1996: both phases pi.
//! - G. L. Long: _Grover algorithm with zero theoretical failure rate_, Physical Review A 64:022307, 2001: one phase for all
//!   marks and reflections, with success 1 (from memory).
//! - T. J. Yoder, G. H. Low, I. L. Chuang: _Fixed-point quantum search with an optimal number of queries_, Physical Review
//!   Letters 113:210501, 2014, equation 11: `alpha_j = -beta_(l-j+1) = 2 arccot(tan(2 pi j / L) sqrt(1 - gamma^2))` with
//!   `L = 2 l + 1` and `1 / gamma = T_(1/L)(1 / delta)` (from memory).

use std::f64::consts::PI;

use super::plane::{Step, wrapped};

/// A schedule of phases.
#[derive(Clone, Copy, PartialEq, Debug)]
pub(super) enum Schedule {
    /// Every phase is pi.
    Plain,
    /// Every phase is this one, and success is certain.
    Certain { phase: f64 },
    /// The failure is at most `failure`, whatever the number of marked strings above a bound.
    FixedPoint { failure: f64 },
}

/// The phases of an iteration: of the marked strings, and of the start state.
pub(super) type Phases = (f64, f64);

/// The steps as iterations: a mark, then a reflection. `None` where they do not alternate so.
pub(super) fn iterations(steps: &[Step]) -> Option<Vec<Phases>> {
    let pairs = steps.chunks(2).map(|pair| match *pair {
        [Step::Mark(mark), Step::Reflect(start)] => Some((mark, start)),
        _ => None,
    });
    pairs.collect()
}

/// The schedule of these iterations, if it is a published one; `success` is what they reach, `angle` how far each phase may
/// be off.
pub(super) fn recognise(phases: &[Phases], success: f64, angle: f64) -> Result<Schedule, String> {
    let near = |a: f64, b: f64| wrapped(a - b).abs() <= angle;
    if phases.iter().all(|&(mark, start)| near(mark, PI) && near(start, PI)) {
        return Ok(Schedule::Plain);
    }
    let (first, _) = phases[0];
    if phases.iter().all(|&(mark, start)| near(mark, first) && near(start, first)) {
        if (1.0 - success).abs() <= angle {
            return Ok(Schedule::Certain { phase: first });
        }
        // A fixed-point schedule of one iteration has equal phases too.
        if phases.len() > 1 {
            return Err(format!("every phase is {first:.9}, and the success is {success:.9} instead of 1"));
        }
    }
    fixed_point(phases, angle)
}

/// The fixed-point schedule with these phases.
fn fixed_point(phases: &[Phases], angle: f64) -> Result<Schedule, String> {
    let len = phases.len();
    let order = (2 * len + 1) as f64;
    let tangent = |at: usize| (2.0 * PI * (at + 1) as f64 / order).tan();
    // The start is turned by -alpha; all signs at once may be the other way round, which is the complex conjugate.
    let (_, start) = phases[0];
    let root = (-start / 2.0).tan().recip() / tangent(0);
    let (root, sign) = (root.abs(), root.signum());
    let (root, is_one) = (root.min(1.0), root > 1.0);
    let alpha = |at: usize| 2.0 * (tangent(at) * root).recip().atan() * sign;
    for (at, &(mark, start)) in phases.iter().enumerate() {
        let wanted = (-alpha(len - 1 - at), -alpha(at));
        let off = wrapped(mark - wanted.0).abs().max(wrapped(start - wanted.1).abs());
        if is_one || off > angle {
            return Err(format!(
                "the phases follow no known schedule: iteration {} marks by {mark:.9} and reflects by {start:.9}, where the \
                 fixed-point schedule that begins with the same phase has {:.9} and {:.9}",
                at + 1,
                wrapped(wanted.0),
                wrapped(wanted.1)
            ));
        }
    }
    let gamma = (1.0 - root * root).sqrt();
    // T_L(1 / gamma) = 1 / delta.
    let delta = (order * gamma.recip().acosh()).cosh().recip();
    Ok(Schedule::FixedPoint { failure: delta * delta })
}

#[cfg(test)]
mod tests {
    use super::*;

    fn phases(iterations: usize, delta: f64) -> Vec<Phases> {
        let order = (2 * iterations + 1) as f64;
        let gamma = ((1.0 / delta).acosh() / order).cosh().recip();
        let alpha = |j: usize| {
            let tangent = (2.0 * PI * j as f64 / order).tan() * (1.0 - gamma * gamma).sqrt();
            2.0 * tangent.recip().atan()
        };
        (1..=iterations).map(|j| (wrapped(-alpha(iterations - j + 1)), wrapped(-alpha(j)))).collect()
    }

    #[test]
    fn a_fixed_point_schedule_tells_its_failure_and_one_wrong_phase_shows() {
        for (iterations, delta) in [(1, 0.5), (2, 0.1), (5, 0.3), (8, 0.02)] {
            let good = phases(iterations, delta);
            let Ok(Schedule::FixedPoint { failure }) = recognise(&good, 0.7, 1e-7) else { panic!("{good:?}") };
            assert!((failure - delta * delta).abs() < 1e-9, "{failure}");
            for at in 0..2 * iterations {
                let mut wrong = good.clone();
                let phase = &mut wrong[at / 2];
                *(if at % 2 == 0 { &mut phase.0 } else { &mut phase.1 }) += 1e-3;
                assert!(recognise(&wrong, 0.7, 1e-7).is_err(), "{iterations}, {at}");
            }
        }
    }

    #[test]
    fn equal_phases_are_a_certain_search_only_where_it_is_certain() {
        assert_eq!(recognise(&[(PI, PI), (-PI, PI)], 0.3, 1e-7), Ok(Schedule::Plain));
        assert_eq!(recognise(&[(1.5, 1.5), (1.5, 1.5)], 1.0, 1e-7), Ok(Schedule::Certain { phase: 1.5 }));
        assert!(recognise(&[(1.5, 1.5), (1.5, 1.5)], 0.999, 1e-7).is_err());
        assert_eq!(iterations(&[Step::Mark(1.0), Step::Reflect(2.0), Step::Mark(3.0)]), None);
    }
}
