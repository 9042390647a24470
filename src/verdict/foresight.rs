//! Whether a run can tell good boards from bad ones, before it begins: the width of each limit against twice the U to be
//! expected, and what to improve where that is too little.

use super::spread::Spread;
use crate::analysis::{Quantity, expected};
use crate::profile::{Limit, Profile};
use crate::trace::Claims;
use crate::units::prefixed;
use std::fmt;

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
/// have, is below the ratio of the profile's decision rule.
pub fn doubts(profile: &Profile, claims: &Claims) -> Vec<Doubt> {
    let rule = &profile.decision;
    let doubt = |quantity: Quantity| {
        let width = width(profile.limits.get(&quantity.name)?)?;
        let expanded_uncertainty =
            Spread::of(&quantity).coverage_factor(rule.coverage) * quantity.standard_uncertainty;
        let doubt = Doubt { quantity, expanded_uncertainty, width, wanted: rule.least_ratio };
        (doubt.ratio() < doubt.wanted).then_some(doubt)
    };
    expected(profile, claims).into_iter().filter_map(doubt).collect()
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
    use crate::trace::{Accuracy, RangeAccuracy};
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

    fn told(profile: &Profile, claims: &Claims) -> String {
        doubts(profile, claims).iter().map(ToString::to_string).collect::<Vec<_>>().join("\n")
    }

    #[test]
    fn a_good_bench_leaves_no_doubt() {
        assert_eq!(doubts(&profile(), &claims()), []);
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
        assert_eq!(doubts(&profile, &claims), []);
        profile.decision.least_ratio = 20.0;
        says!(told(&profile, &claims), @r#"the limits of the trip voltage are 240.0 mV wide and its U will be 6.393 mV: 18.8 : 1, wanted 20 : 1 or more; improve first: set-point of the supply offset, 71 % of the variance"#);
    }
}
