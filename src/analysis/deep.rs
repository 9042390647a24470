//! Below the ramp's floor: the most current down to the deep floor, and whether the switch conducts again.
//!
//! A detector below its minimum operating voltage says anything, and a switch that conducts then drains the battery it was
//! to save. Such readings are told from the rest of a run by their set-points alone: below the floor, after the
//! board was on, and above zero.

use super::finding::{About, Finding, FindingCode};
use super::plateau::{Course, SAME_SET, pulled_down};
use super::quantity::Quantity;
use super::zero;
use crate::profile::QuantityName;
use crate::trace::SwitchState;
use crate::units::{Amps, Volts};

/// Terminals this near to the deep floor, in volts and as a share of it, have reached it.
const REACHED: (f64, f64) = (0.02, 0.02);

/// One reading of the sweep.
#[derive(Clone, Copy, Debug)]
struct Reading {
    set: Volts,
    volts: Volts,
    /// Into the board; at least the range where the meter overflowed.
    amps: Amps,
    range: Option<Amps>,
    state: SwitchState,
}

impl Reading {
    /// At its set-point, with the switch open.
    fn rests(&self) -> bool {
        let (volts, set) = (self.volts.0, self.set.0);
        self.state == SwitchState::Off && (volts - set).abs() <= REACHED.0 + REACHED.1 * set
    }
}

/// The deep current, where the sweep got down to the deep floor, and what is to be said about it.
pub(super) fn deep(course: &Course<'_>) -> (Option<Quantity>, Vec<Finding>) {
    let Some(deep_floor) = course.profile.measure.deep_floor else {
        return (None, conducts(course, &pulled(course)).into_iter().collect());
    };
    let swept = swept(course);
    let mut findings: Vec<Finding> =
        conducts(course, &swept).or_else(|| conducts(course, &pulled(course))).into_iter().collect();
    let Some(lowest) = swept.iter().map(|reading| reading.volts).min_by(|a, b| a.0.total_cmp(&b.0)) else {
        return (None, findings);
    };
    if lowest > deep_floor * (1.0 + REACHED.1) + Volts(REACHED.0) {
        findings.push(Finding {
            code: FindingCode::DeepFloorNotReached,
            about: About::Bench,
            text: format!(
                "the deep sweep got down to {lowest} and not to {deep_floor}: the supply does not pull the terminals down. Fit a \
                 bleed resistor across it, or raise measure.deep_floor."
            ),
        });
        return (None, findings);
    }
    (most(course, &swept), findings)
}

/// The readings below the floor, after the board was on for the first time.
fn swept(course: &Course<'_>) -> Vec<Reading> {
    let floor = course.profile.supply.floor.0 - SAME_SET;
    let on = course.in_scope().find(|plateau| plateau.settled == SwitchState::On);
    let armed = on.map_or(usize::MAX, |plateau| plateau.samples.end);
    let plateaus = course.plateaus.iter().filter(|plateau| {
        plateau.samples.start >= armed && plateau.set.0 > SAME_SET && plateau.set.0 < floor
    });
    plateaus.flat_map(|plateau| plateau.samples.clone()).filter_map(|at| reading(course, at)).collect()
}

/// Readings where a small range of the ammeter took the terminals of an open board down there, and it held on.
fn pulled(course: &Course<'_>) -> Vec<Reading> {
    let samples = course.in_scope().flat_map(|plateau| plateau.samples.clone());
    let down = |at: &usize| pulled_down(&course.trace.samples[*at], &course.trace.claims, course.profile);
    samples.filter(down).filter_map(|at| reading(course, at)).collect()
}

fn reading(course: &Course<'_>, index: usize) -> Option<Reading> {
    let sample = &course.trace.samples[index];
    let volts = course.terminals(sample);
    let amps = match sample.current.amps() {
        Some(amps) => amps - course.voltmeter_current(volts),
        None => sample.range?,
    };
    Some(Reading { set: sample.set, volts, amps, range: sample.range, state: course.states[index] })
}

/// The switch conducts again.
fn conducts(course: &Course<'_>, swept: &[Reading]) -> Option<Finding> {
    let below = course.profile.supply.floor * CLEARLY_BELOW;
    let conducting =
        || swept.iter().filter(|reading| reading.state != SwitchState::Off && reading.volts < below);
    let most = conducting().max_by(|a, b| a.amps.0.total_cmp(&b.amps.0))?;
    let lowest = conducting().map(|reading| reading.volts).fold(most.volts, Volts::min);
    let highest = conducting().map(|reading| reading.volts).fold(most.volts, Volts::max);
    Some(Finding {
        code: FindingCode::ConductsWhenDeep,
        about: About::Board,
        text: format!(
            "far below the trip the switch conducts again: seen from {highest} down to {lowest}, most at {}, where {} flow and the \
             load alone would draw {}. Look first at the lowest voltage the detector works at, against the voltage that opens \
             the switch's gate, and at what holds the gate when the detector no longer does.",
            most.volts,
            most.amps,
            most.volts / course.profile.load.resistance
        ),
    })
}

/// Share of the floor below which conduction is no late trip.
const CLEARLY_BELOW: f64 = 0.98;

/// The most current of the sweep. With the switch open a coarse range only blurs what a finer one says of the same place,
/// so of open readings those on the finest range count that was used all the way; closed ones count always.
fn most(course: &Course<'_>, swept: &[Reading]) -> Option<Quantity> {
    let scale = |reading: &Reading| reading.range.map_or(f64::INFINITY, |range| range.0);
    let used = swept
        .chunk_by(|a, b| a.set.0.total_cmp(&b.set.0).is_eq())
        .filter_map(|place| place.iter().filter(|reading| reading.rests()).map(scale).min_by(f64::total_cmp))
        .fold(0.0, f64::max);
    let counts = |reading: &&Reading| reading.state != SwitchState::Off || scale(reading) <= used;
    let most = swept.iter().filter(counts).max_by(|a, b| a.amps.0.total_cmp(&b.amps.0))?;
    let passing = course.voltmeter_current(most.volts);
    let (amps, parts) = zero::without_zero(course, most.range, most.volts, most.amps.0, passing);
    Some(Quantity::new(QuantityName::DeepCurrent, amps, parts))
}

#[cfg(test)]
mod tests {
    use super::super::fixture::{off, on, profile, staircase};
    use super::*;
    use crate::trace::{Accuracy, Current, RangeAccuracy, Trace};

    fn sweep(readings: &[(f64, f64)]) -> Trace {
        let before = [(0.3, 0.0), (1.0, 0.0), on(7.6), off(5.9), off(5.2), on(6.5), off(5.8)];
        let mut trace = staircase(&[&before[..], readings, &[(0.0, 0.0)]].concat());
        for sample in &mut trace.samples {
            sample.range = Some(Amps(1.0));
        }
        let line = |full_scale: f64| RangeAccuracy {
            full_scale: Amps(full_scale),
            accuracy: Accuracy { relative: 1e-3, absolute: full_scale * 1e-4, resolution: 0.0 },
        };
        trace.claims.current = vec![line(1e-4), line(1.0)];
        trace
    }

    fn found(trace: &Trace) -> (Option<Quantity>, Vec<Finding>) {
        let mut profile = profile();
        profile.measure.deep_floor = Some(Volts(0.3));
        deep(&Course::new(trace, &profile))
    }

    fn codes(findings: &[Finding]) -> Vec<FindingCode> {
        findings.iter().map(|finding| finding.code).collect()
    }

    #[test]
    fn a_switch_that_stays_open_has_a_small_deep_current() {
        let (quantity, findings) = found(&sweep(&[off(5.2), (2.0, 3e-6), (0.9, 1e-6), (0.3, 4e-7)]));
        let quantity = quantity.expect("down to the deep floor");
        assert!((quantity.value - 3e-6).abs() < 1e-9, "{quantity:?}");
        // 100 uA of the large range, as a rectangle.
        assert!((quantity.standard_uncertainty - 1e-4 / 3.0_f64.sqrt()).abs() < 1e-8, "{quantity:?}");
        assert!(findings.is_empty(), "{findings:?}");
    }

    #[test]
    fn a_finer_look_at_every_place_counts_and_one_at_some_places_does_not() {
        let noisy = [(2.0, 6e-5), (2.0, 2e-6), (0.3, -5e-5), (0.3, 4e-7)];
        let mut trace = sweep(&noisy);
        let begin = trace.samples.len() - 1 - noisy.len();
        trace.samples[begin + 1].range = Some(Amps(1e-4));
        let value = |trace: &Trace| found(trace).0.expect("a deep current").value;
        assert!((value(&trace) - 6e-5).abs() < 1e-12);
        trace.samples[begin + 3].range = Some(Amps(1e-4));
        assert!((value(&trace) - 2e-6).abs() < 1e-12);
    }

    #[test]
    fn conduction_is_named_with_its_place_and_is_the_deep_current() {
        let (quantity, findings) =
            found(&sweep(&[off(5.2), off(2.0), (0.8, 0.006), (0.7, 0.02), (0.6, 0.006), (0.3, 4e-7)]));
        assert!((quantity.expect("a deep current").value - 0.02).abs() < 1e-12);
        assert_eq!(codes(&findings), [FindingCode::ConductsWhenDeep]);
        let text = &findings[0].text;
        assert!(text.contains("800.0 mV down to 600.0 mV, most at 700.0 mV, where 20.00 mA"), "{text}");
    }

    #[test]
    fn a_sweep_that_ended_early_gives_no_figure_and_says_how_far_it_got() {
        let (quantity, findings) = found(&sweep(&[off(5.2), off(2.4)]));
        assert_eq!((quantity, codes(&findings)), (None, vec![FindingCode::DeepFloorNotReached]));
        assert!(findings[0].text.contains("2.400 V"), "{}", findings[0].text);
    }

    #[test]
    fn an_overload_is_at_least_the_range() {
        let mut trace = sweep(&[off(5.2), off(0.7), (0.3, 4e-7)]);
        let at = trace.samples.len() - 3;
        trace.samples[at].current = Current::OVERLOAD;
        let (quantity, findings) = found(&trace);
        assert!((quantity.expect("a deep current").value - 1.0).abs() < 1e-12);
        assert_eq!(codes(&findings), [FindingCode::ConductsWhenDeep]);
    }

    #[test]
    fn the_pre_check_and_the_discharge_are_no_sweep() {
        assert_eq!(found(&sweep(&[])), (None, Vec::new()));
    }
}
