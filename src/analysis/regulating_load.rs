//! A load that is no resistor, seen without a voltmeter at it.
//!
//! A resistor draws in proportion to its voltage. A load that regulates what it gives draws the same power at any
//! voltage, and so the more current the lower it falls; and loads of that kind have a lockout of their own. Where the
//! current then goes, the load may have stopped or the switch opened, and only a voltmeter at the load tells which.
//!
//! The current goes with a power of the voltage: 1 for a resistor, 0 for a constant current, -1 for a constant power. The
//! power is the slope of a line through the logarithms; what is fixed in the meters' errors, as a share of the reading,
//! does nothing to it (JCGM 100:2008, 5.1.6).

use super::finding::{About, Finding, FindingCode};
use super::plateau::Course;
use crate::statistics::line::{Line, Point};
use crate::trace::{Sample, SwitchState};
use crate::units::{Amps, Volts};

/// Half way between a resistor and a constant current. The filament of a lamp, which heats up, has 0.55.
const NO_RESISTOR: f64 = 0.5;
/// Standard uncertainties below that.
const SURELY: f64 = 3.0;
/// Fewest readings, two make the line.
const FEWEST: usize = 4;
/// The readings must span this share of the voltage.
const SPAN: f64 = 0.03;

/// The finding, where the board seemed to switch and the load, which no voltmeter watches, is surely no resistor.
pub(super) fn may_have_stopped(course: &Course<'_>) -> Option<Finding> {
    let samples = &course.trace.samples;
    if samples.iter().any(|sample| sample.load.is_some()) {
        return None;
    }
    let readings = on_throughout(course);
    let volts = |sample: &Sample| -> Volts { course.terminals(sample) };
    let highest = *readings.iter().max_by(|a, b| volts(a).0.total_cmp(&volts(b).0))?;
    let lowest = *readings.iter().min_by(|a, b| volts(a).0.total_cmp(&volts(b).0))?;
    let span = (volts(highest) / volts(lowest)).ln();
    if readings.len() < FEWEST || span < SPAN {
        return None;
    }
    let (power, uncertainty) = power(course, &readings, span)?;
    let stops = course.in_scope().any(|plateau| plateau.settled == SwitchState::Off);
    (stops && power + SURELY * uncertainty < NO_RESISTOR).then(|| Finding {
        code: FindingCode::LoadStopped,
        about: About::Bench,
        text: format!(
            "the load is no resistor: {} flowed at {} and {} at {}, as the voltage to the power of {power:.2}, where a resistor has \
             1. A load that regulates may stop by itself before the board trips, and without a voltmeter at the load that \
             looks the same: nothing is stated of the board. Use a resistor, or connect a voltmeter at the load.",
            amps(highest),
            volts(highest),
            amps(lowest),
            volts(lowest)
        ),
    })
}

/// Readings of a board that was on before, is on and was not seen to change at that set-point: in none of them it switched.
fn on_throughout<'t>(course: &Course<'t>) -> Vec<&'t Sample> {
    let on = |at: usize| course.states.get(at) == Some(&SwitchState::On);
    let left = |at: usize, set: Volts| course.trace.samples.get(at).is_none_or(|next| next.set != set);
    let steady = |at: usize, sample: &Sample| {
        at > 0
            && on(at - 1)
            && on(at)
            && (on(at + 1) || left(at + 1, sample.set))
            && sample.set >= course.profile.supply.floor
            && sample.current.amps().is_some()
            && sample.limited != Some(true)
            && sample.was_limited != Some(true)
    };
    let samples = course.trace.samples.iter().enumerate();
    samples.filter(|(at, sample)| steady(*at, sample)).map(|(_, sample)| sample).collect()
}

/// The power of the voltage with which the current goes, and its standard uncertainty: the scatter about the line, and
/// the fixed parts of the meters' claims at either end of it.
fn power(course: &Course<'_>, readings: &[&Sample], span: f64) -> Option<(f64, f64)> {
    let points =
        readings.iter().map(|sample| Point::plain(course.terminals(sample).0.ln(), amps(sample).0.ln()));
    let line = Line::fit(points.filter(|point| point.x.is_finite() && point.y.is_finite()))?;
    let fixed = |sample: &&&Sample| {
        let (volts, amps) = (course.terminals(sample), amps(sample));
        let claims = &course.trace.claims;
        let of_volts = claims.sense.map_or(0.0, |claim| claim.absolute / volts.0);
        let of_amps =
            claims.current_accuracy(sample.range, amps).map_or(0.0, |claim| claim.absolute / amps.0);
        of_volts.hypot(of_amps)
    };
    let fixed = readings.iter().map(|sample| fixed(&sample)).fold(0.0, f64::max) / 3.0_f64.sqrt() / span;
    Some((line.slope, line.slope_uncertainty(line.scatter.unwrap_or(0.0)).hypot(fixed)))
}

fn amps(sample: &Sample) -> Amps {
    sample.current.amps().unwrap_or(Amps::ZERO)
}

#[cfg(test)]
mod tests {
    use super::super::analyse;
    use super::super::fixture::{off, profile, staircase};
    use super::*;

    /// What flows through 55 ohm at 7.6 V goes with a power of the voltage.
    fn codes(power: f64) -> (usize, Vec<FindingCode>) {
        let on = |volts: f64| (volts, 7.6 / 55.0 * (volts / 7.6).powf(power));
        let readings = [
            on(7.6),
            on(7.6),
            on(7.0),
            on(6.5),
            on(6.2),
            on(6.1),
            off(6.0),
            off(5.2),
            off(6.3),
            on(6.4),
            on(6.4),
        ];
        let analysis = analyse(&staircase(&readings), &profile());
        let codes = analysis.findings.iter().map(|finding| finding.code).collect();
        (analysis.quantities.len(), codes)
    }

    #[test]
    fn a_resistor_and_a_lamp_are_loads_as_any() {
        for power in [1.0, 0.55] {
            let (quantities, codes) = codes(power);
            assert!(!codes.contains(&FindingCode::LoadStopped) && quantities > 2, "{power}: {codes:?}");
        }
    }

    #[test]
    fn behind_a_constant_current_or_power_nothing_is_stated_of_the_board() {
        for power in [0.0, -1.0] {
            let (quantities, codes) = codes(power);
            assert_eq!((quantities, codes.first()), (0, Some(&FindingCode::LoadStopped)), "{power}");
        }
    }

    #[test]
    fn its_power_is_known_as_well_as_the_meters_fixed_errors_allow() {
        let mut trace = staircase(&[(7.6, 0.1), (7.6, 0.1), (7.6, 0.1), (7.0, 0.1), (7.0, 0.1), (7.0, 0.1)]);
        let accuracy = crate::trace::Accuracy { relative: 0.1, absolute: 0.005, resolution: 0.0 };
        trace.claims.current = vec![crate::trace::RangeAccuracy { full_scale: Amps(1.0), accuracy }];
        let profile = profile();
        let course = Course::new(&trace, &profile);
        let span = (7.6_f64 / 7.0).ln();
        let (found, uncertainty) = power(&course, &on_throughout(&course), span).expect("a line");
        assert!(found.abs() < 1e-12, "{found}");
        // 5 % of the reading, as a rectangle, over the span; a share of the reading does nothing.
        assert!((uncertainty - 0.05 / 3.0_f64.sqrt() / span).abs() < 1e-6, "{uncertainty}");
    }
}
