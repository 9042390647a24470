//! The decision about one quantity.
//!
//! Four statements with a guard band as wide as the expanded uncertainty: ILAC-G8:09/2019, 4.2.3.

use crate::analysis::Quantity;
use crate::profile::Limit;
use serde::{Deserialize, Serialize};

/// Coverage factor k of every expanded uncertainty: about 95 % for a normal distribution (JCGM 100:2008, 6.3.3).
pub const COVERAGE_FACTOR: f64 = 2.0;

/// The decision about one quantity: the four statements of ILAC-G8:09/2019, 4.2.3. The order is from best to worst.
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord, Serialize, Deserialize)]
#[serde(rename_all = "snake_case")]
pub enum Decision {
    /// Inside the limits by at least the guard band.
    Pass,
    /// Inside the limits, but within the guard band.
    ConditionalPass,
    /// Outside the limits, but within the guard band.
    ConditionalFail,
    /// Outside the limits by more than the guard band.
    Fail,
}

impl Decision {
    /// Decides about `value` against `limit` with a guard band of `guard` on either side, all in one unit.
    ///
    /// Every comparison is in the passing sense, so NaN fails.
    pub fn about(value: f64, guard: f64, limit: &Limit) -> Self {
        let inside = |margin: f64| {
            limit.min.is_none_or(|min| value - min >= margin)
                && limit.max.is_none_or(|max| max - value >= margin)
        };
        if !(value.is_finite() && guard >= 0.0) {
            Decision::Fail
        } else if inside(guard) {
            Decision::Pass
        } else if inside(0.0) {
            Decision::ConditionalPass
        } else if inside(-guard) {
            Decision::ConditionalFail
        } else {
            Decision::Fail
        }
    }
}

/// A quantity with the limit it was held against.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize)]
pub struct Judged {
    /// What was measured.
    pub quantity: Quantity,
    /// Coverage factor k.
    pub coverage_factor: f64,
    /// The limit, where the profile sets one.
    pub limit: Option<Limit>,
    /// The decision, where there is a limit.
    pub decision: Option<Decision>,
}

impl Judged {
    /// Holds `quantity` against `limit`.
    pub fn new(quantity: Quantity, limit: Option<Limit>) -> Self {
        let mut judged = Self { quantity, coverage_factor: COVERAGE_FACTOR, limit, decision: None };
        let guard = judged.expanded_uncertainty();
        judged.decision = limit.map(|limit| Decision::about(judged.quantity.value, guard, &limit));
        judged
    }

    /// Coverage factor times standard uncertainty, in the quantity's unit.
    pub fn expanded_uncertainty(&self) -> f64 {
        self.coverage_factor * self.quantity.standard_uncertainty
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use proptest::prelude::*;

    const LIMIT: Limit = Limit { at: None, min: Some(5.0), max: Some(7.0) };

    /// ILAC-G8:09/2019, 4.2.3, with w = U = 0.5.
    #[test]
    fn the_four_statements_at_their_borders() {
        for (value, decision) in [
            (6.0, Decision::Pass),
            (6.5, Decision::Pass),
            (6.51, Decision::ConditionalPass),
            (7.0, Decision::ConditionalPass),
            (7.01, Decision::ConditionalFail),
            (7.5, Decision::ConditionalFail),
            (7.51, Decision::Fail),
            (5.5, Decision::Pass),
            (4.99, Decision::ConditionalFail),
            (4.49, Decision::Fail),
        ] {
            assert_eq!(Decision::about(value, 0.5, &LIMIT), decision, "{value}");
        }
    }

    #[test]
    fn one_sided_limits_leave_the_other_side_open() {
        let limit = Limit { at: None, min: None, max: Some(7.0) };
        assert_eq!(Decision::about(-1e9, 0.5, &limit), Decision::Pass);
        assert_eq!(Decision::about(8.0, 0.5, &limit), Decision::Fail);
    }

    proptest! {
        #[test]
        fn what_is_not_a_number_never_passes(value in proptest::num::f64::ANY, guard in proptest::num::f64::ANY) {
            let decision = Decision::about(value, guard, &LIMIT);
            if !value.is_finite() || guard.is_nan() || guard < 0.0 {
                prop_assert_eq!(decision, Decision::Fail);
            }
            if decision == Decision::Pass {
                prop_assert!((5.0..=7.0).contains(&value));
            }
        }

        #[test]
        fn more_uncertainty_never_turns_a_doubt_into_a_pass(value in 4.0..8.0_f64, guard in 0.0..1.0_f64, more in 0.0..1.0_f64) {
            let narrow = Decision::about(value, guard, &LIMIT);
            let wide = Decision::about(value, guard + more, &LIMIT);
            prop_assert!(wide != Decision::Pass || narrow == Decision::Pass);
        }
    }
}
