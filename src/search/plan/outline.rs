//! What every plan has in common, whatever its aim: one row of a table, one object of a report.

use num_bigint::BigUint;
use serde::Serialize;

use super::certainty::Certainty;
use super::estimate::Estimation;
use super::fixed_point::FixedPoint;
use super::interval::Interval;
use super::schedule::Schedule;
use super::{Aim, Plan};
use crate::search::Advice;
use crate::search::number::{Wide, as_text};

/// The common figures of a plan.
#[derive(Clone, PartialEq, Debug, Serialize)]
pub struct Outline {
    /// What the plan makes as good as it can.
    pub aim: Aim,
    /// Iterations of one attempt; of the random schedule, the most that can be drawn until it stops.
    #[serde(serialize_with = "as_text")]
    pub iterations: BigUint,
    /// The success of one attempt, at least.
    pub success_low: f64,
    /// The success of one attempt, at most.
    pub success_high: f64,
    /// Oracle calls until an attempt succeeds, on average in the worst case, where that is known; controlled ones and
    /// ones in angle form count as one.
    pub expected_oracle_calls: Option<Wide>,
    /// When the search is pointless, and what the figures do not say.
    pub advice: Vec<Advice>,
}

impl Plan {
    /// The common figures.
    pub fn outline(&self) -> Outline {
        Outline {
            aim: self.aim,
            iterations: self.iterations.clone(),
            success_low: self.success,
            success_high: self.success,
            expected_oracle_calls: self.expected_oracle_calls,
            advice: self.advice.clone(),
        }
    }
}

impl Certainty {
    /// The common figures.
    pub fn outline(&self) -> Outline {
        Outline {
            aim: Aim::Certainty,
            iterations: self.iterations.clone(),
            success_low: 1.0,
            success_high: 1.0,
            expected_oracle_calls: Some(Wide::of(&self.iterations)),
            advice: vec![Advice::needs_the_exact_count()],
        }
    }
}

impl FixedPoint {
    /// The common figures.
    pub fn outline(&self) -> Outline {
        Outline {
            aim: Aim::AtLeastSoMany,
            iterations: self.iterations.clone(),
            success_low: 1.0 - self.failure,
            success_high: 1.0,
            expected_oracle_calls: Some(Wide::of(&self.iterations) / Wide::new(1.0 - self.failure)),
            advice: Vec::new(),
        }
    }
}

impl Interval {
    /// The common figures; `low` is the lower end that the interval was planned for.
    pub fn outline(&self, low: &BigUint) -> Outline {
        Outline {
            aim: Aim::BestWorstCase,
            iterations: self.iterations.clone(),
            success_low: self.worst,
            success_high: self.best,
            expected_oracle_calls: self.expected_oracle_calls,
            advice: if low.bits() == 0 { vec![Advice::if_there_is_any()] } else { Vec::new() },
        }
    }
}

impl Schedule {
    /// The common figures when it stops with at most this error.
    pub fn outline(&self, error: f64) -> Outline {
        let stop = self.stop(error);
        Outline {
            aim: Aim::NothingKnown,
            success_low: 1.0 - stop.error,
            success_high: 1.0,
            expected_oracle_calls: None,
            advice: vec![Advice::stopping_shows_nothing(stop.error)],
            iterations: stop.most_iterations,
        }
    }
}

impl Estimation {
    /// The common figures; success is an estimate within the precision.
    pub fn outline(&self) -> Outline {
        Outline {
            aim: Aim::CountOnMachine,
            iterations: self.all_iterations.clone(),
            success_low: 1.0 - self.error,
            success_high: 1.0,
            expected_oracle_calls: Some(Wide::of(&self.all_iterations)),
            advice: Vec::new(),
        }
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::search::plan::{fixed_point::fixed_point, interval::interval, plan};

    #[test]
    fn numbers_that_may_be_large_are_strings() {
        let (space, one) = (BigUint::from(1024u32), BigUint::from(1u32));
        let value = serde_json::to_value(plan(&space, &one).outline()).unwrap();
        assert_eq!(value["iterations"], "25");
        assert_eq!(value["aim"], "highest-success");
        assert!(value["expected_oracle_calls"].as_str().unwrap().starts_with("25.013"));
        let schedule = serde_json::to_value(Schedule::new(&space).outline(0.01)).unwrap();
        assert_eq!(schedule["expected_oracle_calls"], serde_json::Value::Null);
        assert_eq!(schedule["advice"][0]["code"], "stopping-shows-nothing");
        assert!(!schedule.to_string().contains("unsat"));
    }

    #[test]
    fn each_aim_has_its_figures() {
        let (space, one, ten) = (BigUint::from(1024u32), BigUint::from(1u32), BigUint::from(10u32));
        let fixed = fixed_point(&space, &one, 0.1).unwrap().outline();
        assert_eq!((fixed.iterations, fixed.success_low), (BigUint::from(29u32), 0.9));
        let between = interval(&space, &BigUint::from(0u32), &ten);
        let outline = between.outline(&BigUint::from(0u32));
        assert_eq!((outline.success_low, outline.advice.len()), (between.worst, 1));
        let certain = super::super::certainty::certainty(&space, &one).unwrap().outline();
        assert_eq!((certain.iterations, certain.success_low), (BigUint::from(25u32), 1.0));
    }
}
