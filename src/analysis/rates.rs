//! Thresholds and delays from ramps of several rates.
//!
//! While the set-point keeps moving, a board with delay `d` changes when the voltage has gone `rate * d` past the
//! threshold. So the voltage at the change against the rate is a straight line: its intercept is the threshold at
//! rest, its slope the delay, with whatever the readings themselves lag behind. The two are correlated (JCGM 100:2008,
//! H.3): a threshold found too high goes with a delay found too long.
//!
//! Noise at the detector makes each change come early, more so on a slow ramp. Each ramp's change is put where it lies in
//! the light of that noise, whose level is common to all of them.

use super::accuracy;
use super::cause::Cause;
use super::contribution::Contribution;
use super::diagnosis;
use super::edges::{Direction, Edge, Edges};
use super::finding::Finding;
use super::hysteresis::hysteresis;
use super::noise::{Evidence, Noise};
use super::plateau::Course;
use super::quantity::Quantity;
use super::terminals::Rail;
use super::{Analysis, analyse, trust};
use crate::profile::{Profile, QuantityName};
use crate::statistics::line::{Line, Point};
use crate::trace::Trace;
use crate::units::{Unit, Volts};
use std::time::Duration;

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
        let mut ramps: Vec<Ramp> = ramps.collect();
        allow_for_noise(&mut ramps, direction, profile);
        ThroughRates::fit(&ramps, direction)
    });
    let threshold = |name, at_rest: &ThroughRates| {
        let claimed = courses.first().map(|course| accuracy::of_voltage(course, Volts(at_rest.value)));
        let parts = at_rest.threshold_lines().into_iter().chain(claimed.into_iter().flatten());
        Quantity::new(name, at_rest.value, parts.collect())
    };
    let delay = |name, at_rest: &ThroughRates| Quantity::new(name, at_rest.delay, at_rest.delay_lines());
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
#[derive(Clone, Debug)]
struct Ramp {
    /// Rate at the terminals, V/s, positive in the direction of the change.
    rate: f64,
    /// Voltage at the terminals halfway between the last sample before and the first after.
    volts: f64,
    /// Its standard uncertainty: the step as a rectangle (JCGM 100:2008, 4.3.7), and the readings' scatter.
    uncertainty: f64,
    /// What the level of the noise does to it, one standard uncertainty of it, V.
    noise: f64,
    /// How long the board stayed at each step, and when it changed.
    evidence: Evidence,
    /// Standard uncertainty of the voltage at the terminals, the step aside.
    rail: f64,
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
        let timing = &course.profile.timing;
        // On a ramp that goes on, the delay is the slope of the line and no part of a step.
        let mut evidence = Evidence::new(timing, Duration::ZERO, Duration::ZERO);
        let stood = |at: usize| {
            let volts = direction.along(rail.at(samples[at].set));
            (volts, samples[at].at.saturating_sub(samples[at - 1].at))
        };
        for (along, time) in (edge.seen.saturating_sub(STAYS).max(1)..edge.seen).map(stood) {
            evidence.stayed(along, time);
        }
        let (along, time) = stood(edge.seen);
        evidence.changed(along, time);
        evidence.sort();
        (rate.is_finite() && rate > 0.0 && uncertainty > 0.0).then(|| Self {
            rate,
            volts: rail.at(set).0,
            uncertainty,
            noise: 0.0,
            evidence,
            rail: rail.uncertainty(set),
        })
    }
}

/// Steps before a change at which noise may have made it.
const STAYS: usize = 200;

/// Puts the changes of all ramps of one direction where they lie in the light of noise; they share its level.
fn allow_for_noise(ramps: &mut [Ramp], direction: Direction, profile: &Profile) {
    let Some(volts) = ramps.first().map(|ramp| Volts(ramp.volts)) else { return };
    let evidence: Vec<&Evidence> = ramps.iter().map(|ramp| &ramp.evidence).collect();
    let Some(noise) = Noise::find(&evidence, profile.detector_noise(volts), volts) else { return };
    for (ramp, located) in ramps.iter_mut().zip(noise.located) {
        ramp.volts = direction.volts(located.along).0;
        ramp.uncertainty = located.own.hypot(ramp.rail);
        ramp.noise = direction.volts(located.level).0;
    }
}

/// Rates closer than this share are one.
const SAME_RATE: f64 = 1e-6;

/// A threshold and its delay, from a line through several rates.
#[derive(Clone, Copy, Debug)]
struct ThroughRates {
    value: f64,
    delay: f64,
    /// The quantity that the slope is.
    name: QuantityName,
    /// What the threshold changes by for a second more of the delay: to the middle of the rates, V/s.
    per_second: f64,
    /// Standard uncertainty where the line is independent of its slope, V.
    at_middle: f64,
    delay_uncertainty: f64,
    /// One standard uncertainty of the level of the noise, as the ramp sees it that it moves most, V.
    level: f64,
    /// What that does to threshold and delay.
    noise: (f64, f64),
}

impl ThroughRates {
    fn fit(ramps: &[Ramp], direction: Direction) -> Option<Self> {
        let through = |y: fn(&Ramp) -> f64| {
            let point =
                move |ramp: &Ramp| Point { x: ramp.rate, y: y(ramp), weight: ramp.uncertainty.powi(-2) };
            Line::fit(ramps.iter().map(point))
        };
        let first = ramps.first()?.rate;
        ramps.iter().find(|ramp| (ramp.rate - first).abs() > SAME_RATE * first.abs())?;
        let line = through(|ramp| ramp.volts)?;
        let noise = through(|ramp| ramp.noise)?;
        let (towards, name) = match direction {
            Direction::Down => (-1.0, QuantityName::DetectDelay),
            Direction::Up => (1.0, QuantityName::ReleaseDelay),
        };
        Some(Self {
            value: line.at(0.0),
            delay: towards * line.slope,
            name,
            per_second: -towards * line.middle(),
            at_middle: line.uncertainty_at(line.middle(), 1.0),
            delay_uncertainty: line.slope_uncertainty(1.0),
            level: ramps.iter().map(|ramp| ramp.noise.abs()).fold(0.0, f64::max),
            noise: (noise.at(0.0), towards * noise.slope),
        })
    }

    fn threshold_lines(&self) -> Vec<Contribution> {
        let level = Contribution::normal("line through the rates, at their middle", self.at_middle);
        [level, self.slope(self.per_second)].into_iter().chain(self.level_of_noise(self.noise.0)).collect()
    }

    fn delay_lines(&self) -> Vec<Contribution> {
        std::iter::once(self.slope(1.0)).chain(self.level_of_noise(self.noise.1)).collect()
    }

    /// The slope of the line, which threshold and delay share.
    fn slope(&self, sensitivity: f64) -> Contribution {
        Contribution::normal("slope of the line through the rates", self.delay_uncertainty)
            .through(sensitivity, Unit::Second)
            .due_to(Cause::Slope(self.name))
            .estimated(self.delay)
    }

    /// One standard uncertainty of the level of the noise moves the quantity by `moved`.
    fn level_of_noise(&self, moved: f64) -> Option<Contribution> {
        let line = Contribution::normal("level of the noise at the detector", self.level);
        (self.level > 0.0).then(|| line.through(moved / self.level, Unit::Volt).due_to(Cause::DetectorNoise))
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

    /// The ramps' changes at the readings and corrections of JCGM 100:2008, H.3, about 20 degrees, all as good as any
    /// other: intercept and slope have the covariance printed there.
    #[test]
    fn threshold_and_delay_are_correlated_as_intercept_and_slope_of_the_gum() {
        let text = include_str!("../../tests/data/statistics/gum_h3_thermometer.json");
        let file: serde_json::Value = serde_json::from_str(text).expect("reference data");
        let list =
            |key: &str| -> Vec<f64> { serde_json::from_value(file["data"][key].clone()).expect("a list") };
        // The printed scatter, 3.5 mK, stands for the uncertainty of each point.
        let ramp = |(t, b): (&f64, &f64)| Ramp {
            rate: t - 20.0,
            volts: *b,
            uncertainty: 0.0035,
            noise: 0.0,
            evidence: Evidence::default(),
            rail: 0.0,
        };
        let ramps: Vec<Ramp> = list("t_degC").iter().zip(&list("b_degC")).map(ramp).collect();
        let at_rest = ThroughRates::fit(&ramps, Direction::Up).expect("a line");
        let threshold = Quantity::new(QuantityName::ReEnable, at_rest.value, at_rest.threshold_lines());
        let delay = Quantity::new(QuantityName::ReleaseDelay, at_rest.delay, at_rest.delay_lines());
        let product = threshold.standard_uncertainty * delay.standard_uncertainty;
        let correlation = threshold.covariance(&delay) / product;
        assert!((correlation + 0.930).abs() < 5e-4, "{correlation}");
        assert!((threshold.standard_uncertainty - 0.0029).abs() < 5e-5, "{threshold:?}");
        assert!((delay.standard_uncertainty - 0.00067).abs() < 5e-6, "{delay:?}");
        // Downwards the sign of the delay turns, and that of the correlation with it.
        let at_rest = ThroughRates::fit(&ramps, Direction::Down).expect("a line");
        let threshold = Quantity::new(QuantityName::Trip, at_rest.value, at_rest.threshold_lines());
        let delay = Quantity::new(QuantityName::DetectDelay, at_rest.delay, at_rest.delay_lines());
        assert!((threshold.covariance(&delay) / product - 0.930).abs() < 5e-4);
    }

    #[test]
    fn the_level_of_the_noise_is_a_line_of_threshold_and_delay() {
        let analysis = from_rates(&[ramp(0.013, 0.5), ramp(0.11, 0.5)], &profile());
        for name in [QuantityName::Trip, QuantityName::DetectDelay] {
            let quantity = analysis.quantities.iter().find(|quantity| quantity.name == name).expect("found");
            let noise = |line: &&Contribution| line.cause == Some(Cause::DetectorNoise);
            let line = quantity.contributions.iter().find(noise).expect("noise in the budget");
            assert!(line.standard_uncertainty > 0.0, "{quantity:?}");
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
