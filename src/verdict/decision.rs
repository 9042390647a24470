//! The decision about one quantity, by the rule of the profile.
//!
//! With simple acceptance a value passes or fails (ILAC-G8:09/2019, 4.2.1). With a guard band there are four statements
//! (4.2.3); so there are where the probability of a wrong acceptance is bounded (JCGM 106:2012), which makes the guard band
//! as wide as the spread of the error asks for. Every decision tells its specific risk.

use crate::analysis::{Quantity, Spread};
use crate::profile::{Acceptance, DecisionRule, Limit};
use serde::{Deserialize, Serialize};

/// Coverage factor of figures that come without a budget: about 95 % for a normal distribution (JCGM 100:2008, 6.3.3).
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

impl Decision {
    /// Decides about `value` by the probability `risk` that the decision were wrong: it is sure when that is at most
    /// `largest`. A risk that is not known is never small enough.
    pub fn at_risk(value: f64, risk: Option<f64>, largest: f64, limit: &Limit) -> Self {
        let sure = risk.is_some_and(|risk| risk <= largest);
        match (Self::about(value, 0.0, limit), sure) {
            (Decision::Pass, true) => Decision::Pass,
            (Decision::Pass, false) => Decision::ConditionalPass,
            (_, false) if value.is_finite() => Decision::ConditionalFail,
            _ => Decision::Fail,
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
    /// Probability with which k times the standard uncertainty covers the true value; absent in records that took k = 2.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub coverage_probability: Option<f64>,
    /// The limit, where the profile sets one.
    pub limit: Option<Limit>,
    /// The decision, where there is a limit.
    pub decision: Option<Decision>,
    /// Width of the guard band the decision was made with, in the quantity's unit; absent where the risk decided, or no
    /// limit is set.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub guard_band: Option<f64>,
    /// Specific risk of the decision: the probability that a value found inside its limits lies outside them, or one found
    /// outside lies inside. Nothing is taken as known of the board beforehand.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub risk: Option<f64>,
}

impl Judged {
    /// Holds `quantity` against `limit` by the usual rule: a guard band as wide as U at 95 %.
    pub fn new(quantity: Quantity, limit: Option<Limit>) -> Self {
        Self::by(&DecisionRule::default(), quantity, limit)
    }

    /// Holds `quantity` against `limit` by `rule`.
    pub fn by(rule: &DecisionRule, quantity: Quantity, limit: Option<Limit>) -> Self {
        let spread = Spread::of(&quantity);
        let coverage_factor = spread.coverage_factor(rule.coverage);
        let mut judged = Self {
            quantity,
            coverage_factor,
            coverage_probability: Some(rule.coverage),
            limit,
            decision: None,
            guard_band: None,
            risk: None,
        };
        if let Some(limit) = limit {
            judged.decide(rule.acceptance, &spread, &limit);
        }
        judged
    }

    fn decide(&mut self, acceptance: Acceptance, spread: &Spread, limit: &Limit) {
        let value = self.quantity.value;
        let risk = spread.risk(value, limit);
        let guard = match acceptance {
            Acceptance::Simple => Some(0.0),
            Acceptance::GuardBand { of_expanded } => Some(of_expanded * self.expanded_uncertainty()),
            Acceptance::WrongAcceptance { .. } => None,
        };
        self.decision = Some(match acceptance {
            Acceptance::Simple | Acceptance::GuardBand { .. } => {
                Decision::about(value, guard.unwrap_or(f64::NAN), limit)
            }
            Acceptance::WrongAcceptance { largest } => Decision::at_risk(value, risk, largest, limit),
        });
        (self.guard_band, self.risk) = (guard, risk);
    }

    /// Coverage factor times standard uncertainty, in the quantity's unit.
    pub fn expanded_uncertainty(&self) -> f64 {
        self.coverage_factor * self.quantity.standard_uncertainty
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::analysis::Contribution;
    use crate::profile::QuantityName;
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

    fn judged(acceptance: Acceptance, value: f64) -> Judged {
        let rule = DecisionRule { acceptance, ..DecisionRule::default() };
        let quantity = Quantity::new(QuantityName::Trip, value, vec![Contribution::normal("all", 0.1)]);
        Judged::by(&rule, quantity, Some(LIMIT))
    }

    /// ILAC-G8:09/2019, 4.2.1: inside passes, outside fails, and at the limit it is right every other time.
    #[test]
    fn simple_acceptance_knows_only_pass_and_fail() {
        for (value, decision, risk) in [
            (6.0, Decision::Pass, 0.0),
            (7.0, Decision::Pass, 0.5),
            (7.000_001, Decision::Fail, 0.5),
            (4.9, Decision::Fail, 0.158_655),
        ] {
            let judged = judged(Acceptance::Simple, value);
            assert_eq!(judged.decision, Some(decision), "{value}");
            assert!((judged.risk.expect("a limit") - risk).abs() < 1e-4, "{value}: {:?}", judged.risk);
        }
    }

    /// The guard band that JCGM 106:2012, 8.3.2.2 gives for one limit and a normal error: 1.960 u at 2.5 %, 1.645 u at 5 %
    /// (quantiles of the normal distribution).
    #[test]
    fn a_bounded_risk_is_a_guard_band_of_its_quantile() {
        for (largest, band) in [(0.025, 0.195_996), (0.05, 0.164_485), (0.001, 0.309_023)] {
            let at = |value| judged(Acceptance::WrongAcceptance { largest }, value).decision;
            assert_eq!(at(7.0 - band - 1e-4), Some(Decision::Pass), "{largest}");
            assert_eq!(at(7.0 - band + 1e-4), Some(Decision::ConditionalPass), "{largest}");
            assert_eq!(at(5.0 - band + 1e-4), Some(Decision::ConditionalFail), "{largest}");
            assert_eq!(at(5.0 - band - 1e-4), Some(Decision::Fail), "{largest}");
        }
    }

    /// A rectangle ends: half its width is a guard band without any risk, where two standard uncertainties would be more.
    #[test]
    fn the_shape_of_the_error_counts() {
        let rule = DecisionRule {
            acceptance: Acceptance::WrongAcceptance { largest: 1e-6 },
            ..DecisionRule::default()
        };
        let at = |value| {
            let bracket = Contribution::rectangular("bracket", 0.1);
            let quantity = Quantity::new(QuantityName::Trip, value, vec![bracket]);
            Judged::by(&rule, quantity, Some(LIMIT)).decision
        };
        assert_eq!(at(6.8999), Some(Decision::Pass));
        assert_eq!(at(6.9002), Some(Decision::ConditionalPass));
    }

    #[test]
    fn a_guard_band_is_a_multiple_of_u() {
        let judged = judged(Acceptance::GuardBand { of_expanded: 1.5 }, 6.75);
        assert!((judged.guard_band.expect("a band") - 1.5 * 0.195_996).abs() < 1e-4);
        assert_eq!(judged.decision, Some(Decision::ConditionalPass));
        assert_eq!(judged.coverage_probability, Some(0.95));
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
