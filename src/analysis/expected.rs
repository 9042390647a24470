//! The budgets to be expected of a run before it begins: from the ramp, the makers' claims and the middle of the limits.
//!
//! A run can only be worse: scatter, noise and delays show in its trace. What a profile does not limit is not foreseen.

use super::accuracy;
use super::contribution::Contribution;
use super::hysteresis::hysteresis;
use super::quantity::Quantity;
use super::threshold::{BRACKET, lead_drop};
use super::zero::meter_loading;
use crate::profile::{Limit, Profile, QuantityName, Ramp};
use crate::trace::Claims;
use crate::units::{Amps, Unit, Volts};

/// What `profile` limits and a bench with these `claims` will measure, each at the middle of its limits.
pub fn expected(profile: &Profile, claims: &Claims) -> Vec<Quantity> {
    let bench = Foreseen { profile, claims };
    let trip = bench.threshold(QuantityName::Trip);
    let re_enable = bench.threshold(QuantityName::ReEnable);
    let hysteresis = hysteresis(&trip, &re_enable);
    let found = [Some(trip), Some(re_enable), Some(hysteresis), bench.on_current(), bench.off_current()];
    found.into_iter().flatten().filter(|quantity| profile.limits.contains_key(&quantity.name)).collect()
}

struct Foreseen<'f> {
    profile: &'f Profile,
    claims: &'f Claims,
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

    fn middle(&self, name: QuantityName) -> Option<f64> {
        middle(self.profile.limits.get(&name)?)
    }

    fn range_for(&self, current: Amps) -> Option<Amps> {
        self.claims.current.iter().map(|line| line.full_scale).find(|full_scale| *full_scale >= current)
    }
}

/// The middle of a pair of limits, or the only one there is.
fn middle(limit: &Limit) -> Option<f64> {
    match (limit.min, limit.max) {
        (Some(min), Some(max)) => Some((min + max) / 2.0),
        (min, max) => min.or(max),
    }
}
