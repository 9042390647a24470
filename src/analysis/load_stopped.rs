//! A load that stops by itself, as one with an undervoltage lockout of its own does: no current, and yet its voltage.
//!
//! Only a voltmeter at the load shows it. The switch is then closed, and where the voltage at the load is gone, too, is
//! the board's own trip.

use super::finding::{About, Finding, FindingCode};
use super::plateau::Course;
use crate::units::Volts;

/// The finding, where the load's voltage stood without its current in two successive readings.
pub(super) fn load_stopped(course: &Course<'_>) -> Option<Finding> {
    let (first, count) = course.lasting(|sample| course.stopped[sample])?;
    let current = first.current.amps()?;
    let load = first.load?;
    let volts = || {
        let samples = course.trace.samples.iter().zip(&course.stopped);
        samples.filter(|(_, stopped)| **stopped).map(|(sample, _)| course.terminals(sample))
    };
    let highest = volts().fold(course.terminals(first), Volts::max);
    let lowest = volts().fold(highest, Volts::min);
    Some(Finding {
        code: FindingCode::LoadStopped,
        about: About::Bench,
        text: format!(
            "in {count} readings between {highest} and {lowest} the load drew nothing while its voltage stood \
             at it, first {current} with {load} at the load: the load stops by itself before the board trips. \
             The thresholds are told by the voltage at the load instead; the current just above the trip is \
             not known. Look first at the load: use a resistor, or one without a lockout of its own, and see \
             to its contacts."
        ),
    })
}

#[cfg(test)]
mod tests {
    use super::super::analyse;
    use super::super::fixture::{off, on, profile, staircase};
    use super::*;
    use crate::profile::QuantityName;

    /// The load stops at 6.1 V and starts at 6.5 V; the board trips at 5.95 V and comes back at 6.45 V.
    fn trace(voltmeter: bool) -> crate::trace::Trace {
        let down = [on(7.6), on(6.2), off(6.1), off(6.1), off(6.0), off(5.9), off(5.9), off(5.2)];
        let up = [off(6.3), off(6.4), off(6.5), on(6.6), on(7.6)];
        let mut trace = staircase(&[&down[..], &up].concat());
        for (index, sample) in trace.samples.iter_mut().enumerate() {
            let closed = !(5..=9).contains(&index);
            sample.load = voltmeter.then_some(if closed { sample.set * 0.99 } else { Volts::ZERO });
        }
        trace
    }

    #[test]
    fn the_thresholds_are_where_the_voltage_at_the_load_changes() {
        let analysis = analyse(&trace(true), &profile());
        let value =
            |name| analysis.quantities.iter().find(|quantity| quantity.name == name).map(|found| found.value);
        assert!((value(QuantityName::Trip).expect("a trip") - 5.95).abs() < 0.05);
        assert!((value(QuantityName::ReEnable).expect("a re-enable") - 6.45).abs() < 0.05);
        assert_eq!(value(QuantityName::OnCurrent), None);
        assert_eq!(analysis.findings[0].code, FindingCode::LoadStopped);
        let text = &analysis.findings[0].text;
        assert!(text.contains("in 4 readings between 6.500 V and 6.000 V"), "{text}");
    }

    #[test]
    fn without_a_voltmeter_at_the_load_nothing_is_seen() {
        let codes: Vec<FindingCode> =
            analyse(&trace(false), &profile()).findings.iter().map(|finding| finding.code).collect();
        assert!(!codes.contains(&FindingCode::LoadStopped), "{codes:?}");
    }
}
