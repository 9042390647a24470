//! A contact between supply and board that comes and goes.
//!
//! What supply and board have between them, as volts lost for each ampere, is one number for a whole run. Where it jumps
//! between two readings of a board that was on throughout, a contact is bad; and the board switches wherever a burst of
//! it happens to strike.

use super::finding::{About, Finding, FindingCode};
use super::plateau::{Course, REACHED};
use crate::profile::QuantityName;
use crate::trace::{Sample, SwitchState};
use crate::units::{Ohms, Volts};

/// A jump of the terminals above this share of the least hysteresis can switch a board.
const JUMP: f64 = 0.1;
/// Where no limit says how much hysteresis there is: above this share of the lowest voltage of the ramp.
const JUMP_OF_FLOOR: f64 = 5e-3;
/// Multiples of the claimed errors of supply and voltmeter: what is fixed in them is no jump.
const CLAIMS: f64 = 2.0;
/// How closely the current is the load's: its tolerance, and what flows besides.
const LIKE_THE_LOADS: f64 = 0.1;
/// How closely current and voltage keep their proportion while the board is on; a board that was off for 0.3 ms of a
/// reading of 20 ms is farther off.
const STEADY: f64 = 0.01;
/// Set-points within this share of each other have the same errors.
const NEAR: f64 = 0.03;

/// Readings between which the resistance of the supply line jumped, or a burst of short ones in which the voltage did.
/// Of a board that is `restless` the burst proves something only where no board of this profile switches by itself.
pub(super) fn contact(course: &Course<'_>, restless: bool) -> Option<Finding> {
    let tolerance = tolerance(course);
    let text = between_readings(course, tolerance).or_else(|| {
        if restless && !rests_at_start(course) { None } else { within_burst(course, tolerance) }
    })?;
    Some(Finding {
        code: FindingCode::Contact,
        about: About::Bench,
        text: format!(
            "{text}: a contact between supply and board comes and goes, and the board switches wherever that strikes. Clean and \
             reseat probes and plugs, then test the same board again."
        ),
    })
}

fn between_readings(course: &Course<'_>, tolerance: Volts) -> Option<String> {
    let readings = steadily_on(course, tolerance);
    let jump = |pair: &&[&Sample]| match pair {
        [a, b] => {
            let near = (a.set - b.set).abs() <= a.set * NEAR;
            let moved = b.current.amps().map(|current| lost(b) - current * resistance(a));
            near && moved.is_some_and(|moved| moved.abs() > tolerance)
        }
        _ => false,
    };
    let jumps: Vec<&[&Sample]> = readings.windows(2).filter(jump).collect();
    let [a, b] = jumps.first()? else { return None };
    Some(format!(
        "supply line and contacts lost {} at {} and {} at {} with the board on, {} and {} for each ampere, and they jumped like that {} \
         times in {} such readings",
        lost(a),
        a.set,
        lost(b),
        b.set,
        resistance(a),
        resistance(b),
        jumps.len(),
        readings.len()
    ))
}

/// The readings through which the board was on, after one that also shows it on. Current and voltage at the load keep
/// the proportion to the terminals that they have in the others; while the board is off, or its load charges, they do
/// not.
fn steadily_on<'t>(course: &Course<'t>, tolerance: Volts) -> Vec<&'t Sample> {
    let samples = &course.trace.samples;
    let current =
        |sample: &Sample| Some(sample.current.amps()? / (sample.sense? / course.profile.load.resistance));
    let load = |sample: &Sample| sample.load.zip(sample.sense).map_or(1.0, |(load, sense)| load / sense);
    let candidate = |at: &usize| {
        let sample = &samples[*at];
        let before = at.checked_sub(1).and_then(|before| course.states.get(before));
        before == Some(&SwitchState::On)
            && sample.set >= course.profile.supply.floor
            && sample.limited != Some(true)
            && lost(sample) > -tolerance
            && current(sample).is_some_and(|share| (share - 1.0).abs() < LIKE_THE_LOADS)
    };
    let candidates: Vec<&Sample> = (0..samples.len()).filter(candidate).map(|at| &samples[at]).collect();
    let usual_current = median(candidates.iter().filter_map(|sample| current(sample)).collect());
    let usual_load = median(candidates.iter().map(|sample| load(sample)).collect());
    let usual = |share: f64, usual: Option<f64>| usual.is_some_and(|usual| (share - usual).abs() < STEADY);
    let steady = |sample: &&Sample| {
        current(sample).is_some_and(|share| usual(share, usual_current)) && usual(load(sample), usual_load)
    };
    candidates.into_iter().filter(steady).collect()
}

fn median(mut values: Vec<f64>) -> Option<f64> {
    let middle = values.len() / 2;
    values.sort_unstable_by(f64::total_cmp);
    values.get(middle).copied()
}

fn lost(sample: &Sample) -> Volts {
    sample.set - sample.terminals()
}

fn resistance(sample: &Sample) -> Ohms {
    sample.current.amps().map_or(Ohms::ZERO, |current| lost(sample) / current)
}

/// True when the board, on at the start set-point where bursts are taken, has all of its leads' drop and still more
/// than any re-enable voltage its limits allow.
fn rests_at_start(course: &Course<'_>) -> bool {
    let highest = course.profile.limits.get(&QuantityName::ReEnable).and_then(|limit| limit.max);
    let start = course.profile.supply.start * (1.0 - REACHED);
    let samples = course.trace.samples.iter().zip(&course.states);
    let on = samples.filter(|(sample, state)| **state == SwitchState::On && sample.set >= start);
    let usual = median(on.map(|(sample, _)| course.terminals(sample).0).collect());
    usual.zip(highest).is_some_and(|(usual, highest)| usual > highest)
}

fn within_burst(course: &Course<'_>, tolerance: Volts) -> Option<String> {
    /// Peak to peak over median deviation: a steady hum has 2.8, noise in some dozen readings 6 to 8.
    const JUMPS: f64 = 12.0;
    let burst = course.trace.claims.burst?;
    let jumped = burst.peak_to_peak > tolerance && burst.peak_to_peak > burst.median_deviation * JUMPS;
    jumped.then(|| {
        format!(
            "of {} short readings at one set-point a few lay up to {} from the others, which scatter by {}",
            burst.readings, burst.peak_to_peak, burst.median_deviation
        )
    })
}

fn tolerance(course: &Course<'_>) -> Volts {
    let profile = course.profile;
    let least = profile.limits.get(&QuantityName::Hysteresis).and_then(|limit| limit.min.or(limit.max));
    let harms = least.map_or(profile.supply.floor * JUMP_OF_FLOOR, |least| Volts(least * JUMP));
    let claims = &course.trace.claims;
    let at = profile.supply.start.0;
    let errors: f64 = [claims.set, claims.sense].iter().flatten().map(|claim| claim.limit(at)).sum();
    harms.max(Volts(errors * CLAIMS))
}

#[cfg(test)]
mod tests {
    use super::super::fixture::{on, profile, staircase};
    use super::*;
    use crate::trace::{Burst, Trace};
    use std::time::Duration;

    /// A board that is on, behind resistances of so many ohms.
    fn behind(ohms: &[f64]) -> Trace {
        let sets: Vec<(f64, f64)> = (0..ohms.len()).map(|step| on(7.6 - 0.02 * step as f64)).collect();
        let mut trace = staircase(&sets);
        for (sample, ohms) in trace.samples.iter_mut().zip(ohms) {
            let sense = sample.set.0 * 55.0 / (55.0 + ohms);
            sample.sense = Some(Volts(sense));
            sample.current = crate::trace::Current::Value(crate::units::Amps(sense / 55.0));
        }
        trace
    }

    fn found(trace: &Trace) -> bool {
        let profile = profile();
        contact(&Course::new(trace, &profile), false).is_some()
    }

    /// A tenth of 300 mV of hysteresis at 138 mA: 0.22 ohm.
    #[test]
    fn a_resistance_that_jumps_is_a_contact_and_a_steady_one_is_not() {
        assert!(!found(&behind(&[0.1; 6])));
        assert!(!found(&behind(&[3.0; 6])), "high, but steady");
        assert!(!found(&behind(&[0.1, 0.1, 0.1, 0.2, 0.1])), "too little to switch a board");
        assert!(found(&behind(&[0.1, 0.1, 0.1, 0.6, 0.1])));
    }

    #[test]
    fn a_reading_in_which_the_board_switched_proves_nothing() {
        for share in [0.98, 0.65] {
            let mut switched = behind(&[0.1, 0.1, 0.6, 0.1]);
            let current = switched.samples[2].current.amps().expect("a number");
            switched.samples[2].current = crate::trace::Current::Value(current * share);
            assert!(!found(&switched), "{share}");
        }
    }

    #[test]
    fn a_few_short_readings_that_jump_are_a_contact_too() {
        let mut trace = behind(&[0.1; 4]);
        let burst = |median_deviation, peak_to_peak| Burst {
            aperture: Duration::from_millis(1),
            readings: 40,
            median_deviation: Volts(median_deviation),
            peak_to_peak: Volts(peak_to_peak),
        };
        trace.claims.burst = Some(burst(1e-4, 0.4));
        assert!(found(&trace));
        trace.claims.burst = Some(burst(0.02, 0.06));
        assert!(!found(&trace), "hum");
    }

    /// The highest re-enable is 6.56 V; through 5 ohm 6.97 V are left of 7.6 V, through 20 ohm 5.57 V.
    #[test]
    fn behind_a_high_resistance_a_burst_counts_only_where_no_board_switches() {
        let profile = profile();
        let found = |ohms| {
            let mut trace = behind(&[ohms; 4]);
            trace.claims.burst = Some(Burst {
                aperture: Duration::from_millis(1),
                readings: 40,
                median_deviation: Volts(1e-4),
                peak_to_peak: Volts(0.4),
            });
            contact(&Course::new(&trace, &profile), true).is_some()
        };
        assert!(found(5.0) && !found(20.0));
    }
}
