//! Hum of the mains on the voltage at the board.
//!
//! A detector follows it and meters that average whole periods do not show it: the trip rises by the depth of its
//! troughs, the re-enable falls by the height of its crests, and every reading looks steady.

use super::finding::{About, Finding, FindingCode};
use super::plateau::Course;
use crate::profile::QuantityName;
use crate::units::Volts;
use std::f64::consts::SQRT_2;

/// Crests above this share of the least hysteresis are too much: both thresholds move by them, towards each other.
const TOO_HIGH: f64 = 0.05;
/// Where no limit says how much hysteresis there is: crests above this share of the lowest voltage of the ramp.
const TOO_HIGH_OF_FLOOR: f64 = 2e-3;
/// Peak to peak over root mean square of a steady hum is 2.8, of noise in some dozen readings 4 to 5; what jumps once is
/// far above.
const STEADY: f64 = 8.0;

/// Short readings that scatter by more than the board can stand.
pub(super) fn ripple(course: &Course<'_>) -> Option<Finding> {
    let burst = course.trace.claims.burst?;
    let rms = burst.median_deviation;
    let crests = rms * SQRT_2;
    let most = most(course);
    (crests > most && burst.peak_to_peak < rms * STEADY).then(|| Finding {
        code: FindingCode::Ripple,
        about: About::Bench,
        text: format!(
            "{} readings of {} each scatter by {rms} about their middle, {} from lowest to highest, while the set-point stood: hum \
             with crests of about {crests}, more than {most}. It moves trip and re-enable towards each other by its crests and \
             averages out of every other reading. Look first for a ground loop, then at the supply and at open shields.",
            burst.readings,
            crate::units::prefixed(burst.aperture.as_secs_f64(), crate::units::Unit::Second),
            burst.peak_to_peak,
        ),
    })
}

fn most(course: &Course<'_>) -> Volts {
    let hysteresis =
        course.profile.limits.get(&QuantityName::Hysteresis).and_then(|limit| limit.min.or(limit.max));
    hysteresis.map_or(course.profile.supply.floor * TOO_HIGH_OF_FLOOR, |least| Volts(least * TOO_HIGH))
}

#[cfg(test)]
mod tests {
    use super::super::fixture::{on, profile, staircase};
    use super::*;
    use crate::trace::Burst;
    use std::time::Duration;

    fn found(rms: f64, peaks: f64) -> bool {
        let mut trace = staircase(&[on(7.6)]);
        trace.claims.burst = Some(Burst {
            aperture: Duration::from_millis(1),
            readings: 40,
            median_deviation: Volts(rms),
            peak_to_peak: Volts(peaks),
        });
        let profile = profile();
        ripple(&Course::new(&trace, &profile)).is_some()
    }

    /// The least hysteresis is 300 mV, a twentieth of that 15 mV: 10.6 mV as a root mean square.
    #[test]
    fn crests_count_against_the_least_hysteresis() {
        assert!(!found(10e-3, 28e-3));
        assert!(found(11e-3, 31e-3));
    }

    #[test]
    fn a_single_jump_is_no_hum() {
        assert!(!found(11e-3, 0.3));
    }
}
