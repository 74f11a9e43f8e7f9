//! Plans: what to run, for what is known and for what is wanted.
//!
//! | known | wanted | module | what is run |
//! |---|---|---|---|
//! | M | the highest success | [`peak`] | k plain iterations |
//! | M | the least work until a solution is found | [`restart`] | k plain iterations, and again |
//! | M | a solution for certain | [`certainty`] | iterations with matched phases, or from a weakened start |
//! | M lies in an interval | the best worst case | [`interval`] | k plain iterations |
//! | M is at least so many | a success of so much | [`fixed_point`] | iterations with a sequence of phases |
//! | nothing | a solution | [`schedule`] | random numbers of plain iterations |
//! | nothing | M | [`estimate`] | controlled iterations and a Fourier transform |
//! | values to compare | the least of them | [`minimum`] | the random schedule, threshold by threshold |
//! | M | all solutions | [`collect`] | a plan again and again |
//! | M and an error rate | the best there is | [`noise`] | fewer plain iterations |
//! | a margin of success | how near M must be known | [`tolerance`] | |
//! | M and a depth | the same on shallow machines | [`split`] | some bits guessed, the rest searched |
//!
//! Everywhere N is the size of the start state, M the number of its states that are marked, and `theta` the angle with
//! `sin^2 theta = M/N`; [`mod@success`] has the formula that all rest on. One iteration is one phase oracle and one
//! reflection about the start state.

pub mod certainty;
pub mod collect;
pub mod estimate;
pub mod fixed_point;
pub mod interval;
pub mod ladder;
pub mod minimum;
pub mod noise;
pub mod outline;
pub mod peak;
pub mod question;
pub mod restart;
pub mod schedule;
pub mod split;
pub mod success;
pub mod tolerance;

pub use outline::Outline;
pub use question::{Answer, Details, Erring, Known, NoiseFigures, Question, Unanswerable, answer};
pub use success::{exact_fraction, success, theta};

use num_bigint::BigUint;
use num_traits::Zero;
use serde::Serialize;

use crate::search::Advice;
use crate::search::number::Wide;
use success::{short_fraction, success_wide};

/// What a plan makes as good as it can.
#[derive(Clone, Copy, PartialEq, Eq, Debug, Serialize)]
#[serde(rename_all = "kebab-case")]
pub enum Aim {
    /// The highest success probability at the first peak.
    HighestSuccess,
    /// The highest success probability of all counts within a bound.
    HighestWithinBound,
    /// The least expected work, when every result is checked and failures are repeated.
    LeastWork,
    /// A marked state for certain.
    Certainty,
    /// The best worst case over an interval of counts.
    BestWorstCase,
    /// A wanted success for every count from a least one on.
    AtLeastSoMany,
    /// A marked state with nothing known of the count.
    NothingKnown,
    /// The count itself.
    CountOnMachine,
}

impl Aim {
    /// Every aim.
    pub const ALL: [Aim; 8] = [
        Aim::HighestSuccess,
        Aim::HighestWithinBound,
        Aim::LeastWork,
        Aim::Certainty,
        Aim::BestWorstCase,
        Aim::AtLeastSoMany,
        Aim::NothingKnown,
        Aim::CountOnMachine,
    ];

    /// Its name on the command line and in reports.
    pub fn name(self) -> &'static str {
        match self {
            Aim::HighestSuccess => "highest-success",
            Aim::HighestWithinBound => "highest-within-bound",
            Aim::LeastWork => "least-work",
            Aim::Certainty => "certainty",
            Aim::BestWorstCase => "best-worst-case",
            Aim::AtLeastSoMany => "at-least-so-many",
            Aim::NothingKnown => "nothing-known",
            Aim::CountOnMachine => "count-on-machine",
        }
    }

    /// Whether it rests on the exact number of marked states.
    pub fn needs_count(self) -> bool {
        matches!(self, Aim::HighestSuccess | Aim::HighestWithinBound | Aim::LeastWork | Aim::Certainty)
    }
}

/// A plan of plain iterations for a known number of marked states.
#[derive(Clone, PartialEq, Debug)]
pub struct Plan {
    /// What it makes as good as it can.
    pub aim: Aim,
    /// N: the states of the start state.
    pub space: BigUint,
    /// M: how many of them are marked.
    pub marked: BigUint,
    /// k: how many iterations. Of a count beyond [`PRINTED_BITS`](crate::search::number::PRINTED_BITS) bits only as
    /// many leading bits are computed.
    pub iterations: BigUint,
    /// p_k: the probability that one run gives a marked state.
    pub success: f64,
    /// p_k as an exact fraction in lowest terms, where it is short enough to be read.
    pub success_exact: Option<(BigUint, BigUint)>,
    /// Oracle calls until a run succeeds, on average, when every result is checked and failures are repeated; `None`
    /// where no run can succeed.
    pub expected_oracle_calls: Option<Wide>,
    /// Runs until one succeeds, on average.
    pub expected_runs: Option<Wide>,
    /// When the search is pointless, and what the figures do not say.
    pub advice: Vec<Advice>,
}

/// A fraction with a denominator of more bits is computed but not shown.
const MAX_SHOWN_BITS: u64 = 96;

/// The plan for `marked` states out of `space` with the highest success at the first peak; `marked` is at most `space`
/// and `space` is not 0.
pub fn plan(space: &BigUint, marked: &BigUint) -> Plan {
    check(space, marked);
    Plan::of(Aim::HighestSuccess, space, marked, peak::first_peak(space, marked))
}

/// The plan with the highest success among all counts up to `bound`, at whichever peak.
pub fn plan_within(space: &BigUint, marked: &BigUint, bound: &BigUint) -> Plan {
    check(space, marked);
    Plan::of(Aim::HighestWithinBound, space, marked, peak::best_within(space, marked, bound))
}

/// The plan with the least expected work, where a try costs `try_cost` besides its iterations, in units of one
/// iteration (preparing, measuring and checking).
pub fn plan_for_least_work(space: &BigUint, marked: &BigUint, try_cost: f64) -> Plan {
    check(space, marked);
    Plan::of(Aim::LeastWork, space, marked, restart::least_work(space, marked, try_cost))
}

fn check(space: &BigUint, marked: &BigUint) {
    assert!(marked <= space && !space.is_zero(), "marked states are among those of the start state");
}

impl Plan {
    /// The figures of this many iterations.
    fn of(aim: Aim, space: &BigUint, marked: &BigUint, iterations: BigUint) -> Self {
        let exact = short_fraction(space, marked, &iterations);
        let success = match &exact {
            Some((numerator, denominator)) => Wide::ratio(numerator, denominator),
            None => success_wide(space, marked, &iterations),
        };
        let runs = (!success.is_zero()).then(|| Wide::ONE / success);
        Self {
            aim,
            space: space.clone(),
            marked: marked.clone(),
            success: success.to_f64(),
            success_exact: exact.filter(|(_, denominator)| denominator.bits() <= MAX_SHOWN_BITS),
            expected_oracle_calls: runs.map(|_| Wide::of(&iterations) / success),
            expected_runs: runs,
            advice: Advice::on_numbers(space, marked),
            iterations,
        }
    }

    /// The expected work until a run succeeds, where a try costs `try_cost` besides its iterations.
    pub fn expected_work(&self, try_cost: f64) -> Option<Wide> {
        Some(self.expected_oracle_calls? + self.expected_runs? * Wide::new(try_cost))
    }
}

#[cfg(test)]
mod tests {
    use num_traits::One;

    use super::*;

    fn big(number: u64) -> BigUint {
        BigUint::from(number)
    }

    /// N, M, theta, first-peak k, p there. Source: Boyer, Brassard, Hoyer, Tapp 1998, section 3 gives the formula;
    /// the values were computed from it with 40-digit arithmetic, outside this program.
    const TABLE: &[(u64, u64, f64, u64, f64)] = &[
        (4, 1, 0.523598775598299, 1, 1.0),
        (8, 1, 0.361367123906708, 2, 0.9453125),
        (8, 2, 0.523598775598299, 1, 1.0),
        (8, 3, 0.659058035826409, 1, 0.84375),
        (8, 5, 0.911738290968488, 0, 0.625),
        (8, 7, 1.20942920288819, 0, 0.875),
        (16, 1, 0.252680255142079, 3, 0.961318969726563),
        (16, 2, 0.361367123906708, 2, 0.9453125),
        (16, 3, 0.447832396928932, 1, 0.94921875),
        (64, 1, 0.125327831168065, 6, 0.996585680786799),
        (64, 5, 0.283282165310539, 2, 0.976353883743286),
        (256, 1, 0.0625407617964914, 12, 0.999947042103274),
        (1024, 1, 0.0312550884994952, 25, 0.999461244744408),
        (1024, 2, 0.0442085726072247, 17, 0.999448026154011),
        (1024, 3, 0.0541530516382455, 14, 0.999999871958208),
        (1024, 10, 0.0989827295998270, 7, 0.992612733670239),
        (1 << 16, 1, 0.00390625993417568, 201, 0.999988259646167),
        (1 << 20, 1, 9.76562655220496e-4, 804, 0.999999756965361),
        (1 << 20, 4, 1.95312624176556e-3, 402, 0.999997838225859),
        (1 << 20, 10, 3.08816668603020e-3, 254, 0.999998832484776),
        (1 << 20, 1000, 0.0308865283837320, 25, 0.999980493587761),
        (1 << 20, 1 << 18, 0.523598775598299, 1, 1.0),
        (1 << 30, 1, 3.05175781297370e-5, 25735, 0.999999999320726),
    ];

    #[test]
    fn the_published_formula_at_the_first_peak() {
        for &(n, m, theta_wanted, k, p) in TABLE {
            let plan = plan(&big(n), &big(m));
            assert!((theta(&big(n), &big(m)) / theta_wanted - 1.0).abs() < 1e-14, "theta of {m} in {n}");
            assert_eq!(plan.iterations, big(k), "iterations for {m} in {n}");
            assert!((plan.success - p).abs() < 1e-14, "success for {m} in {n}: {} not {p}", plan.success);
        }
    }

    #[test]
    fn edges() {
        let codes = |n, m| plan(&big(n), &big(m)).advice.iter().map(|a| a.code).collect::<Vec<_>>();
        let none = plan(&big(16), &big(0));
        assert_eq!((none.iterations, none.success, none.expected_oracle_calls), (big(0), 0.0, None));
        assert_eq!(codes(16, 0), ["no-solution"]);
        let all = plan(&big(16), &big(16));
        assert_eq!((all.iterations, all.success), (big(0), 1.0));
        assert_eq!(codes(16, 16), ["everything-marked"]);
        let half = plan(&big(16), &big(8));
        assert_eq!((half.iterations, half.success), (big(0), 0.5));
        let most = plan(&big(8), &big(6));
        assert_eq!((most.iterations, most.success), (big(0), 0.75));
        assert_eq!(codes(8, 6), ["guess-instead"]);
        assert_eq!(plan(&big(1), &big(1)).iterations, big(0));
    }

    #[test]
    fn searches_beyond_floating_point() {
        let plan = plan(&(BigUint::one() << 120u32), &BigUint::one());
        assert_eq!(plan.success, 1.0);
        for (space, marked) in [(3000u32, 0u32), (3000, 2500), (20000, 0)] {
            let (space, marked) = (BigUint::one() << space, BigUint::one() << marked);
            let wide = super::plan(&space, &marked);
            let half = (space.bits() - marked.bits()) / 2;
            assert_eq!(wide.iterations.bits(), half, "pi/4 2^half has half bits");
            assert_eq!(wide.success, 1.0);
            let calls = wide.expected_oracle_calls.unwrap();
            assert!((calls.log2() - (half as f64 + std::f64::consts::FRAC_PI_4.log2())).abs() < 1e-9);
        }
    }
}
