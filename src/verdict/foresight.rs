//! Whether a run can tell good boards from bad ones, before it begins: the width of each limit against twice the U to be
//! expected, and what to improve where that is too little.

use crate::analysis::Spread;
use crate::analysis::{Quantity, expected};
use crate::profile::{Limit, Profile};
use crate::trace::Claims;
use crate::units::prefixed;
use std::fmt;
use std::time::Duration;

/// A limited quantity whose uncertainty will be too large for its limits.
#[derive(Clone, Debug, PartialEq)]
pub struct Doubt {
    /// What is to be expected of it.
    pub quantity: Quantity,
    /// Expanded uncertainty to be expected, in its unit.
    pub expanded_uncertainty: f64,
    /// Width of its limits; the limit itself where there is only one.
    pub width: f64,
    /// Ratio the profile asks for.
    pub wanted: f64,
}

/// All quantities limited in `profile` whose width of the limits, over twice the U that a bench with these `claims` will
/// have, is below the ratio of the profile's decision rule. `reading` is the time one reading of all roles takes.
pub fn doubts(profile: &Profile, claims: &Claims, reading: Duration) -> Vec<Doubt> {
    let rule = &profile.decision;
    let doubt = |quantity: Quantity| {
        let width = width(profile.limits.get(&quantity.name)?)?;
        let expanded_uncertainty =
            Spread::of(&quantity).coverage_factor(rule.coverage) * quantity.standard_uncertainty;
        let doubt = Doubt { quantity, expanded_uncertainty, width, wanted: rule.least_ratio };
        (doubt.ratio() < doubt.wanted).then_some(doubt)
    };
    expected(profile, claims, reading).into_iter().filter_map(doubt).collect()
}

fn width(limit: &Limit) -> Option<f64> {
    match (limit.min, limit.max) {
        (Some(min), Some(max)) => Some(max - min),
        (min, max) => min.or(max).map(f64::abs),
    }
}

impl Doubt {
    /// Width of the limits over twice the expanded uncertainty; infinite where nothing is uncertain.
    pub fn ratio(&self) -> f64 {
        self.width / (2.0 * self.expanded_uncertainty)
    }
}

impl fmt::Display for Doubt {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        let (quantity, unit) = (&self.quantity, self.quantity.unit());
        write!(
            f,
            "the limits of the {} are {} wide and its U will be {}: {:.1} : 1, wanted {} : 1 or more",
            quantity.name.title(),
            prefixed(self.width, unit),
            prefixed(self.expanded_uncertainty, unit),
            self.ratio(),
            self.wanted
        )?;
        if let Some(line) = quantity.largest() {
            let share = 100.0 * quantity.share(line);
            write!(f, "; improve first: {}, {share:.0} % of the variance", line.source)?;
        }
        Ok(())
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::analysis::fixture::profile;
    use crate::profile::{QuantityName, Ramp};
    use crate::trace::{Accuracy, RangeAccuracy, Times};
    use crate::units::{Amps, Volts};
    use insta::assert_snapshot as says;

    fn claims() -> Claims {
        let sense = Accuracy { relative: 35e-6, absolute: 50e-6, resolution: 10e-6 };
        let low = Accuracy { relative: 0.5e-3, absolute: 25e-9, resolution: 1e-10 };
        Claims {
            sense: Some(sense),
            current: vec![RangeAccuracy { full_scale: Amps(1e-4), accuracy: low }],
            ..Claims::default()
        }
    }

    /// 2 ms until it begins, 20 ms of integration, 2 ms on the wire.
    const READING: Duration = Duration::from_millis(24);

    fn told(profile: &Profile, claims: &Claims) -> String {
        doubts(profile, claims, READING).iter().map(ToString::to_string).collect::<Vec<_>>().join("\n")
    }

    #[test]
    fn a_good_bench_leaves_no_doubt() {
        assert_eq!(doubts(&profile(), &claims(), READING), []);
    }

    #[test]
    fn a_coarse_voltmeter_is_named_with_its_share() {
        let mut claims = claims();
        claims.sense = Some(Accuracy { relative: 0.001, absolute: 0.04, resolution: 0.01 });
        says!(told(&profile(), &claims), @r#"the limits of the trip voltage are 240.0 mV wide and its U will be 39.73 mV: 3.0 : 1, wanted 4 : 1 or more; improve first: voltmeter offset, 96 % of the variance"#);
    }

    #[test]
    fn a_coarse_ramp_is_named_for_the_hysteresis_whose_offset_cancels() {
        let mut profile = profile();
        profile.ramp = Ramp::Staircase { step: Volts(0.05) };
        says!(told(&profile, &claims()), @r#"the limits of the hysteresis are 200.0 mV wide and its U will be 38.82 mV: 2.6 : 1, wanted 4 : 1 or more; improve first: trip: width of the bracket, 50 % of the variance"#);
    }

    /// A set-point good to 0.05 % + 5 mV: 8 mV at 6 V, and 95 % of the sum of two rectangles of 3 and 5 mV. 240 mV over
    /// twice that is far above 4, but not above 20.
    #[test]
    fn the_ratio_is_the_profiles() {
        let mut profile = profile();
        profile.limits.retain(|name, _| *name == QuantityName::Trip);
        let set = Accuracy { relative: 0.5e-3, absolute: 5e-3, resolution: 1e-3 };
        let claims = Claims { sense: None, set: Some(set), ..claims() };
        assert_eq!(doubts(&profile, &claims, READING), []);
        profile.decision.least_ratio = 20.0;
        says!(told(&profile, &claims), @r#"the limits of the trip voltage are 240.0 mV wide and its U will be 6.393 mV: 18.8 : 1, wanted 20 : 1 or more; improve first: set-point of the supply offset, 71 % of the variance"#);
    }

    /// Of 24 ms a reading of 20 ms leaves 4 ms open: three times that and twice 0.6 ms are 13.2 ms, and 95 % of half of it
    /// 6.27 ms. Two instruments that take turns leave 28 ms open: 85.2 ms, and U is 40.5 ms.
    #[test]
    fn a_delay_that_the_readings_cannot_tell_is_named_before_the_run() {
        let mut profile = profile();
        profile.limits.clear();
        let limit = Limit { at: None, min: None, max: Some(20e-3) };
        profile.limits.insert(QuantityName::DetectDelay, limit);
        let mut claims = claims();
        assert_eq!(doubts(&profile, &claims, READING), [], "nothing is known of its readings");
        let settle = Duration::from_millis(15);
        claims.times = Some(Times { integration: Duration::from_millis(20), settle });
        says!(told(&profile, &claims), @"the limits of the detect delay are 20.00 ms wide and its U will be 6.270 ms: 1.6 : 1, wanted 4 : 1 or more; improve first: a reading of 20.00 ms takes 24.00 ms, 100 % of the variance");
        let turns = doubts(&profile, &claims, READING * 2);
        assert!((turns[0].expanded_uncertainty - 40.47e-3).abs() < 1e-5, "{turns:?}");
        profile.limits.insert(QuantityName::DetectDelay, Limit { max: Some(85e-3), ..limit });
        assert_eq!(doubts(&profile, &claims, READING), []);
    }
}
