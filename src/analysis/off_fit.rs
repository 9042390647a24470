//! The off current as a line over voltage: `constant + conductance * voltage`.
//!
//! Weighted least squares over the settled readings at four voltages or more, each weighted by its own scatter. What the
//! ammeter and the voltmeter err in common is not averaged down: an error does to the line what the line through the
//! errors says, so an offset of the ammeter goes into the constant part whole and into the conductance not at all, and
//! its gain into both (JCGM 100:2008, 5.2.2). Nothing is said of voltages outside the span.

use super::off_current::off_readings;
use super::off_noise::{Noise, scale};
use super::plateau::Course;
use super::quantity::{Contribution, Quantity};
use super::residuals::{Residuals, Shape};
use super::settled::Settled;
use super::zero::INPUT_RESISTANCE;
use crate::profile::QuantityName;
use crate::statistics::line::{Line, Point};
use crate::units::{Amps, Volts};
use std::collections::BTreeMap;

/// Fewest different voltages: two make the line, the others show whether it is one.
const FEWEST: usize = 4;
/// Voltages closer than this share of the span are one.
const APART: f64 = 0.05;
/// The span must be this share of the highest voltage.
const SPAN: f64 = 0.05;
/// A point this share beside the wanted span still counts: the supply may set it a little off.
const BESIDE: f64 = 0.01;

/// The line and what is known of it.
#[derive(Clone, Debug)]
pub(super) struct OffFit {
    /// Its slope, in siemens.
    pub(super) conductance: Quantity,
    /// Its value at no voltage, in amperes.
    pub(super) constant: Quantity,
    /// How the points lie about it.
    pub(super) shape: Shape,
    /// Lowest and highest voltage.
    pub(super) span: (Volts, Volts),
}

/// Fits the line through readings `below` which the board rests off, where the profile asks for it and the trace holds enough; neither conductance nor constant part is
/// stated otherwise.
pub(super) fn off_fit(course: &Course<'_>, below: Volts) -> Option<OffFit> {
    let readings = chosen(course, below)?;
    let noise = Noise::of(course, &readings);
    let points: Vec<Point> = readings.iter().map(|settled| noise.point(settled)).collect();
    let line = Line::fit(points.iter().copied())?;
    let residuals = Residuals::of(&points, &line);
    let shape = if noise.is_known { residuals.shape() } else { Shape::Straight };
    // Scatter that the readings' own noise does not explain counts in full; so does all of it where noise is not known.
    let (sigma, degrees_of_freedom) = if noise.is_known && shape == Shape::Straight {
        (1.0, noise.degrees_of_freedom)
    } else {
        (line.scatter?, points.len() as f64 - 2.0)
    };
    // A bend no larger than what the meter itself may do is counted, and laid to nobody.
    let straight_for_the_meter = residuals.largest() <= noise.meter_bends;
    let scatter = |uncertainty| Contribution::scatter(SCATTER, uncertainty, degrees_of_freedom);
    let mut conductance = vec![scatter(line.slope_uncertainty(sigma))];
    let mut constant = vec![scatter(line.uncertainty_at(0.0, sigma))];
    for (contribution, errors) in common_errors(course, &readings, &line) {
        let point = |(point, error): (&Point, &f64)| Point { y: *error, ..*point };
        let Some(error) = Line::fit(points.iter().zip(&errors).map(point)) else { continue };
        let counts = |error: f64, value: f64| (error.abs() > ARITHMETIC * value.abs()).then_some(error);
        conductance.extend(counts(error.slope, line.slope).map(contribution));
        constant.extend(counts(error.at(0.0), line.at(0.0)).map(contribution));
    }
    Some(OffFit {
        conductance: Quantity::new(QuantityName::OffConductance, line.slope, conductance),
        constant: Quantity::new(QuantityName::OffConstantCurrent, line.at(0.0), constant),
        shape: if straight_for_the_meter { Shape::Straight } else { shape },
        span: span(&readings)?,
    })
}

/// An error below this share of the value is what the arithmetic leaves of one that cancels.
const ARITHMETIC: f64 = 1e-12;

/// Name of the readings' own scatter in the budget.
const SCATTER: &str = "scatter of the readings";

/// The readings of the line: inside its span, and on as few of the smallest ranges as show enough of it.
fn chosen(course: &Course<'_>, below: Volts) -> Option<Vec<Settled>> {
    let wanted = course.profile.off_line()?;
    let (lowest, highest) = (wanted.from * (1.0 - BESIDE), wanted.to * (1.0 + BESIDE));
    let inside = |settled: &Settled| settled.volts >= lowest && settled.volts <= highest;
    let readings: Vec<Settled> = off_readings(course, below).into_iter().filter(inside).collect();
    let mut scales: Vec<f64> = readings.iter().map(scale).collect();
    scales.sort_by(f64::total_cmp);
    scales.dedup();
    scales.into_iter().find_map(|largest| {
        let upto: Vec<Settled> = readings.iter().filter(|it| scale(it) <= largest).copied().collect();
        let chosen = most_sensitive(&upto);
        span(&chosen).map(|_| chosen)
    })
}

/// At each voltage only what the smallest range read there.
fn most_sensitive(readings: &[Settled]) -> Vec<Settled> {
    let place = |settled: &Settled| (settled.volts.0.ln() / SAME_VOLTAGE).round() as i64;
    let mut finest: BTreeMap<i64, f64> = BTreeMap::new();
    for settled in readings {
        let here = finest.entry(place(settled)).or_insert(f64::INFINITY);
        *here = here.min(scale(settled));
    }
    let kept = |it: &&Settled| finest.get(&place(it)).is_some_and(|finest| scale(it) <= *finest);
    readings.iter().filter(kept).copied().collect()
}

/// Share by which two readings of one voltage may differ.
const SAME_VOLTAGE: f64 = 2e-3;

/// Lowest and highest voltage; `None` where there are too few, or they lie too close, for a line.
fn span(readings: &[Settled]) -> Option<(Volts, Volts)> {
    let mut volts: Vec<Volts> = readings.iter().map(|settled| settled.volts).collect();
    volts.sort_by(|a, b| a.0.total_cmp(&b.0));
    let (lowest, highest) = (*volts.first()?, *volts.last()?);
    let apart = (highest - lowest) * APART;
    let mut count = 1;
    let mut before = lowest;
    for volts in volts {
        if volts - before > apart {
            (count, before) = (count + 1, volts);
        }
    }
    (count >= FEWEST && highest - lowest >= highest * SPAN).then_some((lowest, highest))
}

/// Makes a line of the budget of what an error does.
type Budgeted = fn(f64) -> Contribution;

/// Errors that all points share, as far as they are claimed: what each does to every point, and its line of the budget.
fn common_errors(course: &Course<'_>, readings: &[Settled], line: &Line) -> Vec<(Budgeted, Vec<f64>)> {
    let mut errors: Vec<(Budgeted, Vec<f64>)> = Vec::new();
    let claims = &course.trace.claims;
    let mut ranges: Vec<Option<Amps>> = readings.iter().map(|settled| settled.range).collect();
    ranges.sort_by(|a, b| a.partial_cmp(b).unwrap_or(std::cmp::Ordering::Equal));
    ranges.dedup();
    for range in ranges {
        let on_range = |error: &dyn Fn(&Settled) -> f64| -> Vec<f64> {
            readings.iter().map(|it| if it.range == range { error(it) } else { 0.0 }).collect()
        };
        let reading = |settled: &Settled| settled.amps + course.voltmeter_current(settled.volts);
        let claim = |settled: &Settled| claims.current_accuracy(range, reading(settled));
        errors.push((
            |error| Contribution::rectangular("ammeter's gain", error),
            on_range(&|it| claim(it).map_or(0.0, |claim| claim.relative * reading(it).0)),
        ));
        errors.push((
            |error| Contribution::rectangular("ammeter's offset", error),
            on_range(&|it| claim(it).map_or(0.0, |claim| claim.absolute)),
        ));
    }
    if let Some(voltage) = super::accuracy::voltage_claim(course) {
        let gain = |settled: &Settled| line.slope * voltage.relative * settled.volts.0;
        errors.push((
            |error| Contribution::rectangular("gain of the voltage", error),
            readings.iter().map(gain).collect(),
        ));
        errors.push((
            |error| Contribution::rectangular("offset of the voltage", error),
            vec![line.slope * voltage.absolute; readings.len()],
        ));
    }
    let input = |settled: &Settled| INPUT_RESISTANCE * course.voltmeter_current(settled.volts).0;
    errors.push((
        |error| Contribution::rectangular("voltmeter's input current", error),
        readings.iter().map(input).collect(),
    ));
    errors.retain(|(_, errors)| errors.iter().any(|error| *error != 0.0));
    errors
}

#[cfg(test)]
mod tests {
    use super::super::fixture::{off, on, profile, staircase};
    use super::*;
    use crate::trace::{Accuracy, RangeAccuracy, Trace};
    use crate::units::Ohms;

    /// Off at these voltages, `current` there with six readings that scatter by `noise` (standard deviation).
    pub(in super::super) fn run(volts: &[f64], noise: f64, current: impl Fn(f64) -> f64) -> Trace {
        let down = [on(7.6), on(6.1), off(5.9), off(5.2)];
        // Six values of standard deviation one and mean zero.
        let normal = [-1.5, -0.5, 0.3, 0.6, 1.2, -0.1].map(|z: f64| z / 0.938_083);
        let read: Vec<(f64, f64)> =
            volts.iter().flat_map(|v| normal.map(|z| (*v, current(*v) + noise * z))).collect();
        let mut trace = staircase(&[&down[..], &read[..], &[off(6.3), on(6.5)][..]].concat());
        for (index, sample) in trace.samples.iter_mut().enumerate() {
            let low = (down.len()..down.len() + read.len()).contains(&index);
            sample.range = Some(Amps(if low { 1e-4 } else { 1.0 }));
        }
        trace
    }

    fn fit(trace: &Trace) -> OffFit {
        let mut profile = profile();
        profile.off_line = Some(crate::profile::OffLine { from: Volts(1.0), to: Volts(2.8), points: 4 });
        off_fit(&Course::new(trace, &profile), Volts(f64::INFINITY)).expect("a line")
    }

    fn share(quantity: &Quantity, source: &str) -> f64 {
        let part = quantity.contributions.iter().find(|part| part.source == source);
        part.map_or(0.0, |part| part.standard_uncertainty)
    }

    const VOLTS: [f64; 4] = [1.0, 1.6, 2.2, 2.8];

    /// Worked by hand: the squares of the distances from the mean of 1.9 V add up to 1.8 V². A mean of six readings of
    /// 49 nA is known to 20 nA, so the slope to 20/sqrt(1.8) = 14.9 nA/V and the constant to
    /// 20 sqrt(1/4 + 1.9²/1.8) = 30.0 nA.
    #[test]
    fn the_uncertainty_of_slope_and_constant_is_that_of_the_textbook() {
        let fit = fit(&run(&VOLTS, 20e-9 * 6.0_f64.sqrt(), |volts| 1.05e-6 + 1e-6 * volts));
        assert!((fit.conductance.value - 1e-6).abs() < 1e-12, "{:?}", fit.conductance);
        assert!((fit.constant.value - 1.05e-6).abs() < 1e-12, "{:?}", fit.constant);
        assert!((share(&fit.conductance, SCATTER) - 14.9e-9).abs() < 0.1e-9, "{:?}", fit.conductance);
        assert!((share(&fit.constant, SCATTER) - 30.0e-9).abs() < 0.1e-9, "{:?}", fit.constant);
        assert_eq!(fit.shape, Shape::Straight);
    }

    /// An offset of the meter shifts the constant part whole, however many points there are; its gain scales both.
    #[test]
    fn what_the_meters_err_in_common_is_not_averaged_down() {
        let mut trace = run(&VOLTS, 1e-9, |volts| 1.05e-6 + 1e-6 * volts);
        let accuracy = Accuracy { relative: 5e-4, absolute: 25e-9, resolution: 0.0 };
        trace.claims.current = vec![RangeAccuracy { full_scale: Amps(1e-4), accuracy }];
        let fit = fit(&trace);
        let root3 = 3.0_f64.sqrt();
        let near = |value: f64, wanted: f64| assert!((value / wanted - 1.0).abs() < 1e-6, "{value} {wanted}");
        near(share(&fit.constant, "ammeter's offset"), 25e-9 / root3);
        assert!(share(&fit.conductance, "ammeter's offset") < 1e-18);
        near(share(&fit.constant, "ammeter's gain"), 5e-4 * 1.05e-6 / root3);
        near(share(&fit.conductance, "ammeter's gain"), 5e-4 * 1e-6 / root3);
    }

    /// 10 Mohm at the terminals: 0.1 uA/V of the reading, known to within 1 %.
    #[test]
    fn the_voltmeters_own_path_is_taken_off_the_slope() {
        let mut trace = run(&VOLTS, 1e-9, |volts| 1.05e-6 + 1.1e-6 * volts);
        trace.claims.sense_resistance = Some(Ohms(10e6));
        let fit = fit(&trace);
        assert!((fit.conductance.value - 1e-6).abs() < 1e-12);
        let input = share(&fit.conductance, "voltmeter's input current");
        assert!((input - 1e-9 / 3.0_f64.sqrt()).abs() < 1e-13, "{input}");
    }

    #[test]
    fn three_voltages_or_a_narrow_span_make_no_line() {
        let mut profile = profile();
        profile.off_line = Some(crate::profile::OffLine { from: Volts(1.0), to: Volts(2.8), points: 4 });
        let found = |volts: &[f64]| {
            let trace = run(volts, 1e-9, |volts| 1e-6 + 1e-6 * volts);
            off_fit(&Course::new(&trace, &profile), Volts(f64::INFINITY)).is_some()
        };
        assert!(found(&VOLTS));
        assert!(!found(&[2.80, 2.81, 2.82, 2.83]));
        // Below the detector's lowest voltage nothing counts, though the floor and the way down still do.
        assert!(!found(&[0.4, 0.6, 0.8, 0.9]));
    }

    #[test]
    fn a_diode_bends_the_line_and_its_scatter_counts() {
        let diode = |volts: f64| 1e-6 + 1e-6 * volts + 0.5e-6 * ((volts - 2.2) / 0.2).exp();
        let fit = fit(&run(&VOLTS, 20e-9, diode));
        assert_eq!(fit.shape, Shape::BendsUp);
        assert!(fit.conductance.standard_uncertainty > 1e-6, "{:?}", fit.conductance);
    }
}
