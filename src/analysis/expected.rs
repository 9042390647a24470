//! The budgets to be expected of a run before it begins: from the ramp, the makers' claims and the middle of the limits.
//!
//! A run can only be worse: scatter, noise and delays show in its trace. What a profile does not limit is not foreseen.

use super::accuracy;
use super::contribution::Contribution;
use super::hysteresis::hysteresis;
use super::quantity::Quantity;
use super::switching_time::SHARE;
use super::threshold::{BRACKET, lead_drop};
use super::zero::meter_loading;
use crate::profile::{Limit, Profile, QuantityName, Ramp};
use crate::trace::Claims;
use crate::units::{Amps, Unit, Volts, prefixed};
use std::time::Duration;

/// What `profile` limits and a bench with these `claims` will measure, each at the middle of its limits. `reading` is the time
/// one reading of all roles takes, wire included.
pub fn expected(profile: &Profile, claims: &Claims, reading: Duration) -> Vec<Quantity> {
    let bench = Foreseen { profile, claims, reading };
    let trip = bench.threshold(QuantityName::Trip);
    let re_enable = bench.threshold(QuantityName::ReEnable);
    let hysteresis = hysteresis(&trip, &re_enable);
    let delay = |name| bench.delay(name);
    let found = [
        Some(trip),
        Some(re_enable),
        Some(hysteresis),
        bench.on_current(),
        bench.off_current(),
        delay(QuantityName::DetectDelay),
        delay(QuantityName::ReleaseDelay),
    ];
    found.into_iter().flatten().filter(|quantity| profile.limits.contains_key(&quantity.name)).collect()
}

struct Foreseen<'f> {
    profile: &'f Profile,
    claims: &'f Claims,
    reading: Duration,
}

impl Foreseen<'_> {
    fn threshold(&self, name: QuantityName) -> Quantity {
        let supply = &self.profile.supply;
        let at = self.middle(name).map_or((supply.start + supply.floor) / 2.0, Volts);
        let resolution = match self.profile.ramp {
            Ramp::Staircase { step } => step,
            Ramp::Search { resolution } => resolution,
        };
        let bracket = Contribution::rectangular(BRACKET, resolution.0 / 2.0);
        let mut lines = vec![bracket.through(1.0, Unit::Volt).estimated(at.0)];
        if self.claims.sense.is_some() {
            lines.extend(accuracy::of_voltmeter(self.claims, at));
        } else {
            lines.extend(accuracy::of_set_point(self.claims, at));
        }
        if name == QuantityName::Trip {
            lines.extend(lead_drop(self.claims, at / self.profile.load.resistance));
        }
        Quantity::new(name, at.0, lines)
    }

    fn on_current(&self) -> Option<Quantity> {
        let current = Amps(self.middle(QuantityName::OnCurrent)?);
        let range = self.range_for(self.profile.supply.current_limit);
        let lines = accuracy::of_current(self.claims, range, current);
        Some(Quantity::new(QuantityName::OnCurrent, current.0, lines))
    }

    /// On the smallest range that holds twice the limit, as a run takes it.
    fn off_current(&self) -> Option<Quantity> {
        let limit = self.profile.limits.get(&QuantityName::OffCurrent)?;
        let current = Amps(middle(limit)?);
        let range = self.range_for(limit.max.map_or(current, Amps) * 2.0);
        let at = limit.at.unwrap_or(self.profile.supply.floor);
        let loading = self.claims.sense_resistance.and_then(|input| meter_loading(input, at));
        let passing = self.claims.sense_resistance.map_or(Amps::ZERO, |input| at / input);
        let mut lines = accuracy::of_current(self.claims, range, current + passing);
        lines.extend(loading);
        Some(Quantity::new(QuantityName::OffCurrent, current.0, lines))
    }

    /// Readings follow each other without a pause. Of each the middle is known; where in the time it takes it integrates is
    /// not, and that leaves open when the set-point moved (once as much) and when the switch changed (twice as much).
    fn delay(&self, name: QuantityName) -> Option<Quantity> {
        let integration = self.claims.times?.integration;
        let open = self.reading.saturating_sub(integration).as_secs_f64();
        let source = format!(
            "a reading of {} takes {}",
            spoken(integration.as_secs_f64()),
            spoken(self.reading.as_secs_f64())
        );
        let part =
            Contribution::rectangular(&source, (3.0 * open + 2.0 * SHARE * integration.as_secs_f64()) / 2.0);
        Some(Quantity::new(name, self.middle(name)?, vec![part]))
    }

    fn middle(&self, name: QuantityName) -> Option<f64> {
        middle(self.profile.limits.get(&name)?)
    }

    fn range_for(&self, current: Amps) -> Option<Amps> {
        self.claims.current.iter().map(|line| line.full_scale).find(|full_scale| *full_scale >= current)
    }
}

fn spoken(seconds: f64) -> String {
    prefixed(seconds, Unit::Second)
}

/// The middle of a pair of limits, or the only one there is.
fn middle(limit: &Limit) -> Option<f64> {
    match (limit.min, limit.max) {
        (Some(min), Some(max)) => Some((min + max) / 2.0),
        (min, max) => min.or(max),
    }
}
