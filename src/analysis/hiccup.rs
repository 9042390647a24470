//! A supply that gives way each time the board switches on: a current limit that is too low, or a capacitor behind the
//! switch that takes longer to charge than the detector waits.
//!
//! The board switches on, the limit pulls its terminals down, the detector switches it off, and after its release delay
//! it tries again. Meters average over that and show next to nothing; a supply that keeps the flag until it is read
//! shows it again and again, where a good board is on and draws less than the limit.

use super::finding::{About, Finding, FindingCode};
use super::plateau::{Course, Plateau, REACHED};
use crate::profile::QuantityName;
use crate::trace::SwitchState;
use crate::units::Volts;

/// How often the supply may limit at one set-point: once while a capacitor charges, and that may fall into two readings.
const MOST: usize = 2;

/// A supply that limited again and again where every board of this profile must be on.
pub(super) fn hiccup(course: &Course<'_>) -> Option<Finding> {
    let surely_on = surely_on(course);
    let limited = |plateau: &Plateau| {
        // The first reading also tells of the way here.
        plateau.samples.clone().skip(1).filter(|at| gave_way(course, *at)).count()
    };
    let (plateau, count) = course
        .in_scope()
        .filter(|plateau| plateau.set >= surely_on)
        .map(|plateau| (plateau, limited(plateau)))
        .max_by_key(|(_, count)| *count)?;
    if count <= MOST {
        return None;
    }
    let samples = &course.trace.samples[plateau.samples.clone()];
    let most = samples.iter().filter_map(|sample| sample.current.amps()).reduce(|a, b| a.max(b))?;
    let supply = &course.profile.supply;
    Some(Finding {
        code: FindingCode::CurrentLimit,
        about: About::Bench,
        text: format!(
            "at {} the supply limited the current between one reading and the next in {count} of {} readings, and no more than {most} \
             flowed on average, where the load draws {}: the board switches on, the limit pulls it down, it switches off and tries \
             again. Raise the current limit (set: {}) above what charges the capacitors behind the switch within the detect \
             delay of {}; if it is high enough, look whether the supply holds what it is set to.",
            plateau.set,
            samples.len(),
            plateau.set / course.profile.load.resistance,
            supply.current_limit,
            crate::units::prefixed(
                course.profile.timing.detect_delay.as_secs_f64(),
                crate::units::Unit::Second
            ),
        ),
    })
}

/// A board that drew the load's current all the same was on: a contact that closed again has charged its capacitor.
fn gave_way(course: &Course<'_>, at: usize) -> bool {
    let sample = &course.trace.samples[at];
    let briefly = sample.was_limited == Some(true) && course.states[at] != SwitchState::On;
    sample.limited == Some(true) || briefly
}

/// From here up every board of the profile is on: above the highest re-enable, else at the start.
fn surely_on(course: &Course<'_>) -> Volts {
    let start = course.profile.supply.start * (1.0 - REACHED);
    let limit = course.profile.limits.get(&QuantityName::ReEnable).and_then(|limit| limit.max);
    limit.map_or(start, |highest| Volts(highest * (1.0 + REACHED)).min(start))
}

#[cfg(test)]
mod tests {
    use super::super::fixture::{off, on, profile, staircase};
    use super::*;

    fn found(readings: &[(f64, f64)], limited: &[usize]) -> bool {
        let mut trace = staircase(readings);
        for at in limited {
            trace.samples[*at].was_limited = Some(true);
        }
        let profile = profile();
        hiccup(&Course::new(&trace, &profile)).is_some()
    }

    #[test]
    fn limiting_again_and_again_where_the_board_must_be_on_is_the_supply() {
        let arming = [off(7.6); 8];
        assert!(found(&arming, &[1, 3, 6]));
        assert!(!found(&arming, &[]), "an open switch");
        assert!(!found(&[off(7.6), on(7.6), on(7.6), on(7.6)], &[0, 1, 2]), "a capacitor that charges once");
        assert!(!found(&[on(7.6); 8], &[1, 3, 6]), "on all the same");
    }

    /// The highest re-enable is 6.56 V.
    #[test]
    fn near_the_thresholds_a_board_may_switch_by_itself() {
        assert!(!found(&[off(6.4); 8], &[1, 3, 5, 7]));
    }
}
