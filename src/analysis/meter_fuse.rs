//! A blown fuse of the ammeter reads like a perfect board: no current at all.
//!
//! Two signs, each on a range smaller than the one that carried the load: readings of exactly zero where something must
//! flow (the budget, the least the limit allows, the voltmeter's own input) and the last digit would show it; and
//! terminals that fall away from the set-point while nothing flows, for behind an open fuse the board lives on its
//! capacitors. Where the fuse of every range is blown nothing reaches the board: zeros throughout, and no voltage.

use super::finding::{About, Finding, FindingCode};
use super::plateau::{Course, SAME_SET};
use crate::profile::QuantityName;
use crate::trace::{Sample, SwitchState};
use crate::units::{Amps, Volts};

/// Fewest readings of exactly zero, in a row or not: noise would have shown in one of them.
const FEWEST: usize = 4;
/// What flows must be this many steps of the last digit.
const STEPS: f64 = 3.0;
/// Terminals this much below the set-point have fallen away, in volts and as a share of it.
const FALLEN: (f64, f64) = (0.05, 0.02);

/// Below this nothing is at the terminals.
const NOTHING: Volts = Volts(0.1);

/// The suspicion, where there is cause for it.
pub(super) fn meter_fuse(course: &Course<'_>) -> Option<Finding> {
    if let Some(finding) = nothing_passes(course) {
        return Some(finding);
    }
    let on = course.trace.samples.iter().zip(&course.states).filter(|(_, state)| **state == SwitchState::On);
    let carried = on.filter_map(|(sample, _)| sample.range).max_by(|a, b| a.0.total_cmp(&b.0))?;
    let mut ranges: Vec<Amps> = Vec::new();
    for range in course.trace.samples.iter().filter_map(|sample| sample.range) {
        if !ranges.contains(&range) {
            ranges.push(range);
        }
    }
    ranges.into_iter().filter(|range| *range < carried).find_map(|range| on_range(course, range))
}

/// Every reading is exactly zero, and nothing arrives at the board whatever is set.
fn nothing_passes(course: &Course<'_>) -> Option<Finding> {
    let samples = &course.trace.samples;
    let zero = |sample: &Sample| sample.current.amps() == Some(Amps::ZERO);
    let supplied: Vec<&Sample> =
        samples.iter().filter(|sample| sample.set >= course.profile.supply.floor).collect();
    let dead = |sample: &&Sample| sample.sense.is_some_and(|at| at.abs() < NOTHING);
    if supplied.len() < FEWEST || !samples.iter().all(zero) || !supplied.iter().all(dead) {
        return None;
    }
    let highest = supplied.iter().max_by(|a, b| a.set.0.total_cmp(&b.set.0))?;
    Some(Finding {
        code: FindingCode::MeterFuse,
        about: About::Bench,
        text: format!(
            "all {} readings of the current are exactly zero, without any noise, and only {} stands at the terminals with {} set: \
             nothing passes the ammeter. Look first at its fuse, then at its jacks and leads; check it with a known resistor.",
            samples.len(),
            highest.terminals(),
            highest.set
        ),
    })
}

fn on_range(course: &Course<'_>, range: Amps) -> Option<Finding> {
    let off = |sample: &&Sample| sample.range == Some(range) && sample.set.0 > SAME_SET;
    let readings: Vec<&Sample> = course.trace.samples.iter().filter(off).collect();
    let all_zero = readings.iter().all(|sample| sample.current.amps() == Some(Amps::ZERO));
    if readings.len() < FEWEST || !all_zero {
        return None;
    }
    let fallen =
        |sample: &&&Sample| sample.sense.is_some_and(|at| at.0 < sample.set.0 * (1.0 - FALLEN.1) - FALLEN.0);
    let step = course.trace.claims.current_accuracy(Some(range), Amps::ZERO).map(|claim| claim.resolution);
    let shows = |amps: Amps| step.is_some_and(|step| step > 0.0 && amps.0 >= STEPS * step);
    let why = if let Some(sample) = readings.iter().find(fallen) {
        format!("the terminals fell to {} while {} was set", sample.terminals(), sample.set)
    } else {
        let sample = readings.iter().max_by(|a, b| a.set.0.total_cmp(&b.set.0))?;
        let least = least(course, sample.terminals());
        if !shows(least) {
            return None;
        }
        format!("at {} at least {least} must flow", sample.terminals())
    };
    Some(Finding {
        code: FindingCode::MeterFuse,
        about: About::Bench,
        text: format!(
            "all {} readings on the {range} range are exactly zero, without any noise, and {why}: the ammeter's fuse on this range \
             is blown, or its lead is in the wrong jack. Check it with a known resistor, then test again.",
            readings.len()
        ),
    })
}

/// The least that flows at `volts` through a good bench and board.
fn least(course: &Course<'_>, volts: Volts) -> Amps {
    let budget = course.profile.off_budget();
    let paths = budget.map_or(Amps::ZERO, |budget| budget.current.least + volts * budget.conductance.least);
    let limit = course.profile.limits.get(&QuantityName::OffCurrent);
    let limit =
        limit.filter(|limit| limit.at.is_none_or(|at| volts >= at * 0.98)).and_then(|limit| limit.min);
    paths.max(Amps(limit.unwrap_or(0.0))) + course.voltmeter_current(volts)
}

#[cfg(test)]
mod tests {
    use super::super::fixture::{off, on, profile, staircase};
    use super::*;
    use crate::trace::{Accuracy, Current, RangeAccuracy, Trace};
    use crate::units::Ohms;

    fn run(amps: f64, resolution: f64) -> Trace {
        let readings = [on(7.6), off(5.9), (5.8, amps), (5.8, amps), (5.8, amps), (5.8, amps), on(6.5)];
        let mut trace = staircase(&readings);
        for (index, sample) in trace.samples.iter_mut().enumerate() {
            sample.range = Some(Amps(if (2..6).contains(&index) { 1e-4 } else { 1.0 }));
        }
        let accuracy = Accuracy { relative: 5e-4, absolute: 25e-9, resolution };
        trace.claims.current = vec![RangeAccuracy { full_scale: Amps(1e-4), accuracy }];
        trace
    }

    fn suspected(trace: &Trace, profile: &crate::profile::Profile) -> bool {
        meter_fuse(&Course::new(trace, profile)).is_some()
    }

    #[test]
    fn zeros_without_noise_where_something_must_flow_are_a_blown_fuse() {
        assert!(suspected(&run(0.0, 1e-10), &profile()));
        assert!(!suspected(&run(1e-10, 1e-10), &profile()), "one count is a reading");
        let mut noisy = run(0.0, 1e-10);
        noisy.samples[3].current = Current::Value(Amps(1e-10));
        assert!(!suspected(&noisy, &profile()), "noise shows that the meter lives");
    }

    #[test]
    fn zeros_throughout_and_no_voltage_at_the_board_are_a_blown_fuse() {
        let mut trace = staircase(&[(0.3, 0.0), (1.0, 0.0), (7.6, 0.0), (7.6, 0.0), (7.6, 0.0), (7.6, 0.0)]);
        assert!(!suspected(&trace, &profile()), "the voltage arrives");
        for sample in &mut trace.samples {
            sample.sense = Some(Volts(3e-5));
        }
        assert!(suspected(&trace, &profile()));
        trace.samples[3].current = Current::Value(Amps(1e-6));
        assert!(!suspected(&trace, &profile()), "noise shows that the meter lives");
    }

    #[test]
    fn a_digit_too_coarse_to_show_anything_proves_nothing() {
        assert!(!suspected(&run(0.0, 1e-5), &profile()));
    }

    #[test]
    fn where_nothing_is_known_to_flow_the_voltmeter_still_does() {
        let mut profile = profile();
        profile.limits.clear();
        profile.off_paths.clear();
        let mut trace = run(0.0, 1e-10);
        assert!(!suspected(&trace, &profile));
        trace.claims.sense_resistance = Some(Ohms(10e6));
        assert!(suspected(&trace, &profile));
    }

    #[test]
    fn terminals_that_fall_away_show_an_open_line() {
        let mut profile = profile();
        profile.limits.clear();
        profile.off_paths.clear();
        let mut trace = run(0.0, 1e-10);
        trace.samples[5].sense = Some(Volts(4.9));
        assert!(suspected(&trace, &profile));
    }
}
