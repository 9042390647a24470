//! Swapped leads of the ammeter: every current has the other sign.
//!
//! Another source on the board also drives a current out of it, but that is not just what the load draws, and it lifts
//! the terminals above the set-point.

use super::finding::{About, Finding, FindingCode};
use super::plateau::Course;
use crate::trace::Sample;

/// How closely the current, without its sign, is the load's: its tolerance, the switch, the meter.
const LIKE_THE_LOADS: f64 = 0.1;
/// Share of the set-point down to which leads and burden may pull the terminals.
const STOOD: f64 = 0.8;
/// Share of the set-point by which a supply may be too high.
const ABOVE: f64 = 0.02;

/// Readings of the load's current with its sign turned, while the terminals follow the set-point.
pub(super) fn meter_reversed(course: &Course<'_>) -> Option<Finding> {
    let load = course.profile.load.resistance;
    let turned = |sample: &&Sample| {
        let at = course.terminals(sample);
        let drawn = at / load;
        let follows = at >= sample.set * STOOD && at <= sample.set * (1.0 + ABOVE);
        let current = sample.current.amps();
        follows && current.is_some_and(|amps| (amps + drawn).abs() < drawn * LIKE_THE_LOADS)
    };
    let reaches = |sample: &&Sample| sample.set >= course.profile.supply.floor;
    let sample = course.trace.samples.iter().filter(reaches).find(turned)?;
    let (at, current) = (course.terminals(sample), sample.current.amps()?);
    Some(Finding {
        code: FindingCode::MeterReversed,
        about: About::Bench,
        text: format!(
            "{current} at {at}, where the load of {load} draws {}: its current with the sign turned, and the terminals follow the \
             set-point of {}. Swap the ammeter's leads. Only if they are right, look for another source on the board.",
            at / load,
            sample.set
        ),
    })
}

#[cfg(test)]
mod tests {
    use super::super::fixture::{on, profile, staircase};
    use super::*;
    use crate::units::Volts;

    fn found(set: f64, sense: f64, amps: f64) -> bool {
        let mut trace = staircase(&[(0.3, 0.0), (set, amps)]);
        trace.samples[1].sense = Some(Volts(sense));
        let profile = profile();
        meter_reversed(&Course::new(&trace, &profile)).is_some()
    }

    #[test]
    fn the_loads_current_with_its_sign_turned_is_the_meter() {
        assert!(found(7.6, 7.5, -7.5 / 55.0));
        assert!(!found(7.6, 7.5, on(7.5).1));
        assert!(!found(7.6, 7.5, -0.02), "another current");
        assert!(!found(6.0, 7.5, -7.5 / 55.0), "something lifts the terminals");
        assert!(!found(7.6, 7.6, f64::NAN));
    }
}
