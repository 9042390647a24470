//! Thresholds and delays from ramps of several rates.
//!
//! While the set-point keeps moving, a board with delay `d` changes when the voltage has gone `rate * d` past the
//! threshold. So the voltage at the change against the rate is a straight line: its intercept is the threshold at
//! rest, its slope the delay, with whatever the readings themselves lag behind.

use super::accuracy;
use super::contribution::Contribution;
use super::diagnosis;
use super::edges::{Direction, Edge, Edges};
use super::finding::Finding;
use super::hysteresis::hysteresis;
use super::plateau::Course;
use super::quantity::Quantity;
use super::terminals::Rail;
use super::{Analysis, analyse, trust};
use crate::profile::{Profile, QuantityName};
use crate::statistics::line::{Line, Point};
use crate::trace::Trace;
use crate::units::Volts;

/// Steps before a change over which the rate is taken.
const RATE_STEPS: usize = 10;

/// Reads the thresholds at rest, the hysteresis and the delays from ramps of one board at two or more rates; what the board
/// draws while it is off, from the longest of them. A single trace has no rates to compare: thresholds and delays are absent.
///
/// The findings are those of the single ramps that concern the switch or the trust in the numbers.
pub fn from_rates(traces: &[Trace], profile: &Profile) -> Analysis {
    let mut analysis = Analysis::default();
    let courses: Vec<Course<'_>> = traces.iter().map(|trace| Course::new(trace, profile)).collect();
    let found: Vec<Edges> = courses.iter().map(Edges::find).collect();
    let [down, up] = [Direction::Down, Direction::Up].map(|direction| {
        let ramps =
            courses.iter().zip(&found).filter_map(|(course, found)| Ramp::of(course, found, direction));
        AtRest::fit(&ramps.collect::<Vec<_>>(), direction)
    });
    let threshold = |name, at_rest: &AtRest| {
        let claimed = courses.first().map(|course| accuracy::of_voltage(course, Volts(at_rest.value)));
        let parts = std::iter::once(at_rest.contribution()).chain(claimed.into_iter().flatten());
        Quantity::new(name, at_rest.value, parts.collect())
    };
    let delay = |name, at_rest: &AtRest| {
        let part = Contribution::normal("line through the rates", at_rest.delay_uncertainty);
        Quantity::new(name, at_rest.delay, vec![part])
    };
    let trip = down.as_ref().map(|down| threshold(QuantityName::Trip, down));
    let re_enable = up.as_ref().map(|up| threshold(QuantityName::ReEnable, up));
    let difference =
        trip.as_ref().zip(re_enable.as_ref()).map(|(trip, re_enable)| hysteresis(trip, re_enable));
    analysis.quantities.extend([trip, re_enable, difference].into_iter().flatten());
    analysis.quantities.extend(down.as_ref().map(|down| delay(QuantityName::DetectDelay, down)));
    analysis.quantities.extend(up.as_ref().map(|up| delay(QuantityName::ReleaseDelay, up)));
    analysis.quantities.extend(at_leisure(traces, profile));
    analysis.quantities.sort_by_key(|quantity| quantity.name);
    for (course, found) in courses.iter().zip(&found) {
        note(&mut analysis.findings, diagnosis::diagnose(course, found));
        for finding in trust::accuracy(course) {
            note(&mut analysis.findings, Some(finding));
        }
    }
    analysis
}

/// What does not depend on a rate, from the ramp that gave it the most time.
fn at_leisure(traces: &[Trace], profile: &Profile) -> Vec<Quantity> {
    let longest = traces.iter().max_by_key(|trace| trace.samples.last().map(|sample| sample.at));
    let mut quantities = longest.map(|trace| analyse(trace, profile).quantities).unwrap_or_default();
    quantities.retain(|quantity| RATELESS.contains(&quantity.name));
    quantities
}

/// Quantities into which neither threshold enters.
const RATELESS: [QuantityName; 5] = [
    QuantityName::OffCurrent,
    QuantityName::OffConductance,
    QuantityName::OffConstantCurrent,
    QuantityName::DeepCurrent,
    QuantityName::StorageTime,
];

/// Keeps one finding of a sort, however many ramps show it.
fn note(findings: &mut Vec<Finding>, finding: Option<Finding>) {
    if let Some(finding) = finding.filter(|new| findings.iter().all(|old| old.code != new.code)) {
        findings.push(finding);
    }
}

/// The change of one ramp.
#[derive(Clone, Copy, Debug)]
struct Ramp {
    /// Rate at the terminals, V/s, positive in the direction of the change.
    rate: f64,
    /// Voltage at the terminals halfway between the last sample before and the first after.
    volts: f64,
    /// Its standard uncertainty: the step as a rectangle (JCGM 100:2008, 4.3.7), and the readings' scatter.
    uncertainty: f64,
}

impl Ramp {
    fn of(course: &Course<'_>, found: &Edges, direction: Direction) -> Option<Self> {
        if !found.reversals.is_empty() {
            return None;
        }
        let edge: &Edge = found.edges.iter().find(|edge| edge.direction == direction)?;
        let before = edge.seen.checked_sub(1)?;
        let earlier = edge.seen.checked_sub(RATE_STEPS)?;
        let samples = &course.trace.samples;
        let along = |sample: usize| direction.along(samples[sample].set);
        let time = (samples[edge.seen].at.saturating_sub(samples[earlier].at)).as_secs_f64();
        let rail = Rail::near(course, &found.stays, direction, samples[edge.seen].set)?;
        let rate = (along(edge.seen) - along(earlier)) / time * rail.slope();
        let set = direction.volts((along(before) + along(edge.seen)) / 2.0);
        let width = (along(edge.seen) - along(before)).abs() * rail.slope();
        let uncertainty = (width.powi(2) / 12.0 + rail.uncertainty(set).powi(2)).sqrt();
        (rate.is_finite() && rate > 0.0 && uncertainty > 0.0).then(|| Self {
            rate,
            volts: rail.at(set).0,
            uncertainty,
        })
    }
}

/// A threshold and its delay, from a line through several rates.
#[derive(Clone, Copy, Debug)]
struct AtRest {
    value: f64,
    uncertainty: f64,
    delay: f64,
    delay_uncertainty: f64,
}

impl AtRest {
    fn fit(ramps: &[Ramp], direction: Direction) -> Option<Self> {
        let points =
            ramps.iter().map(|ramp| Point { x: ramp.rate, y: ramp.volts, weight: ramp.uncertainty.powi(-2) });
        let line = Line::fit(points)?;
        let towards = match direction {
            Direction::Down => -1.0,
            Direction::Up => 1.0,
        };
        Some(Self {
            value: line.at(0.0),
            uncertainty: line.uncertainty_at(0.0, 1.0),
            delay: towards * line.slope,
            delay_uncertainty: line.slope_uncertainty(1.0),
        })
    }

    fn contribution(&self) -> Contribution {
        Contribution::normal("line through the rates", self.uncertainty)
    }
}

#[cfg(test)]
mod tests {
    use super::super::fixture::{off, on, profile, staircase};
    use super::*;

    /// A ramp down at `rate` V/s that trips at 6 V with `delay` seconds, read every 100 ms.
    fn ramp(rate: f64, delay: f64) -> Trace {
        let steps = (1.8 / (rate * 0.1)) as u32;
        let readings: Vec<(f64, f64)> = (0..steps)
            .map(|step| 7.6 - rate * 0.1 * f64::from(step))
            .map(|volts| if volts + rate * delay >= 6.0 { on(volts) } else { off(volts) })
            .collect();
        staircase(&readings)
    }

    #[test]
    fn two_rates_give_the_threshold_at_rest_and_the_delay() {
        let analysis = from_rates(&[ramp(0.013, 0.5), ramp(0.11, 0.5)], &profile());
        for (name, truth) in [(QuantityName::Trip, 6.0), (QuantityName::DetectDelay, 0.5)] {
            let quantity = analysis.quantities.iter().find(|quantity| quantity.name == name).expect("found");
            let error = (quantity.value - truth).abs();
            assert!(error <= 2.0 * quantity.standard_uncertainty, "{quantity:?}");
        }
    }

    #[test]
    fn one_rate_gives_neither() {
        let rateless = |traces: &[Trace]| {
            let quantities = from_rates(traces, &profile()).quantities;
            quantities.iter().all(|quantity| RATELESS.contains(&quantity.name))
        };
        assert!(rateless(&[ramp(0.1, 0.5)]));
        assert!(rateless(&[]));
    }

    #[test]
    fn the_off_current_is_that_of_the_longest_ramp() {
        let (slow, fast) = (ramp(0.013, 0.5), ramp(0.11, 0.5));
        let off = |analysis: Analysis| {
            analysis.quantities.into_iter().find(|quantity| quantity.name == QuantityName::OffCurrent)
        };
        assert!(off(analyse(&slow, &profile())).is_some());
        assert_eq!(off(from_rates(&[fast, slow.clone()], &profile())), off(analyse(&slow, &profile())));
    }
}
