//! The off current as a line over voltage: `constant + conductance * voltage`.
//!
//! Weighted least squares over the settled readings at four voltages or more, each weighted by its own scatter. What the
//! ammeter and the voltmeter err in common is not averaged down: an error does to the line what the line through the
//! errors says, so an offset of the ammeter goes into the constant part whole and into the conductance not at all, and
//! its gain into both (JCGM 100:2008, 5.2.2). Where the bench's zero was read it is taken off each point, and what is left of
//! the offset counts. Nothing is said of voltages outside the span.

use super::cause::Cause;
use super::off_current::off_readings;
use super::off_noise::{Noise, scale};
use super::plateau::Course;
use super::quantity::{Contribution, Quantity};
use super::residuals::{Residuals, Shape};
use super::settled::Settled;
use super::zero::{self, Baseline, INPUT_RESISTANCE};
use crate::profile::QuantityName;
use crate::statistics::line::{Line, Point};
use crate::units::{Amps, Ohms, Unit, Volts};
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

/// Fits the line through what was read at or below `below`, where the board rests off, if the profile asks for it and the
/// trace holds enough; neither conductance nor constant part is stated otherwise.
pub(super) fn off_fit(course: &Course<'_>, below: Volts) -> Option<OffFit> {
    let read = chosen(course, below)?;
    let zeros: Vec<Option<Baseline<'_>>> =
        read.iter().map(|it| Baseline::of(&course.trace.claims.zero, it.range, it.volts)).collect();
    let zero = |zero: &Option<Baseline<'_>>| Amps(zero.as_ref().map_or(0.0, Baseline::current));
    let readings: Vec<Settled> =
        read.iter().zip(&zeros).map(|(it, at)| Settled { amps: it.amps - zero(at), ..*it }).collect();
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
    let (slope, mut constant) = scatter(&line, sigma, degrees_of_freedom);
    let mut conductance = vec![slope];
    for error in common_errors(course, &readings, &zeros, &line) {
        let point = |(point, effect): (&Point, &f64)| Point { y: *effect, ..*point };
        let Some(effect) = Line::fit(points.iter().zip(&error.effects).map(point)) else { continue };
        let counts = |sensitivity: f64, value: f64| {
            let line = error.influence.clone().through(sensitivity, error.unit).estimated(0.0);
            (line.standard_uncertainty > ARITHMETIC * value.abs()).then_some(line)
        };
        conductance.extend(counts(effect.slope, line.slope));
        constant.extend(counts(effect.at(0.0), line.at(0.0)));
    }
    Some(OffFit {
        conductance: Quantity::new(QuantityName::OffConductance, line.slope, conductance),
        constant: Quantity::new(QuantityName::OffConstantCurrent, line.at(0.0), constant),
        shape: if straight_for_the_meter { Shape::Straight } else { shape },
        span: span(&readings)?,
    })
}

/// The readings' own scatter in slope and constant part. The two are correlated (JCGM 100:2008, H.3.5): the constant part
/// moves with the slope by the distance to the middle of the points, and by the scatter there, which is independent.
fn scatter(line: &Line, sigma: f64, degrees_of_freedom: f64) -> (Contribution, Vec<Contribution>) {
    let (middle, slope) = (line.middle(), line.slope_uncertainty(sigma));
    let cause = Cause::Slope(QuantityName::OffConductance);
    let of_slope = |sensitivity: f64, degrees: f64| {
        Contribution::scatter(SCATTER, slope, degrees).through(sensitivity, Unit::Siemens).due_to(cause)
    };
    let at_middle = line.uncertainty_at(middle, sigma);
    // Both parts rest on one scatter; shared out like this Welch and Satterthwaite's number is that of the whole.
    let share = |part: f64| degrees_of_freedom * (part / line.uncertainty_at(0.0, sigma)).powi(2);
    let level = Contribution::scatter(LEVEL, at_middle, share(at_middle));
    (of_slope(1.0, degrees_of_freedom), vec![level, of_slope(-middle, share(middle * slope))])
}

/// An error below this share of the value is what the arithmetic leaves of one that cancels.
const ARITHMETIC: f64 = 1e-12;

/// Names of the readings' own scatter in the budget: in the slope, and of the points as a whole.
const SCATTER: &str = "scatter of the readings";
const LEVEL: &str = "scatter of the readings together";

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

/// An error that points share.
struct CommonError {
    /// What it is, in its own unit.
    influence: Contribution,
    unit: Unit,
    /// What one unit of it does to the current of each point, in amperes.
    effects: Vec<f64>,
}

/// Errors that points share, as far as they are claimed or, for the zero that was taken off, read.
fn common_errors(
    course: &Course<'_>,
    readings: &[Settled],
    zeros: &[Option<Baseline<'_>>],
    line: &Line,
) -> Vec<CommonError> {
    let mut errors: Vec<CommonError> = Vec::new();
    let mut add = |influence: Contribution, unit: Unit, effects: Vec<f64>| {
        let acts = influence.standard_uncertainty > 0.0 && effects.iter().any(|effect| *effect != 0.0);
        errors.extend(acts.then_some(CommonError { influence, unit, effects }));
    };
    let claims = &course.trace.claims;
    // A zero taken at the voltage holds what the voltmeter draws.
    let holds_voltmeter = |zero: &Option<Baseline<'_>>| zero.as_ref().is_some_and(|zero| zero.at_voltage);
    let each = |effect: &dyn Fn(&Settled, &Option<Baseline<'_>>) -> f64| -> Vec<f64> {
        readings.iter().zip(zeros).map(|(settled, zero)| effect(settled, zero)).collect()
    };
    let mut ranges: Vec<Option<Amps>> = readings.iter().map(|settled| settled.range).collect();
    ranges.sort_by(|a, b| a.partial_cmp(b).unwrap_or(std::cmp::Ordering::Equal));
    ranges.dedup();
    for range in ranges {
        let largest =
            readings.iter().filter(|it| it.range == range).map(|it| it.amps).fold(Amps::ZERO, Amps::max);
        let Some(claim) = claims.current_accuracy(range, largest) else { continue };
        let on_range = |effect: &dyn Fn(&Settled, &Option<Baseline<'_>>) -> f64| {
            each(&|settled, zero| if settled.range == range { effect(settled, zero) } else { 0.0 })
        };
        let reading = |settled: &Settled, zero: &Option<Baseline<'_>>| {
            let passing = course.voltmeter_current(settled.volts);
            (settled.amps + if holds_voltmeter(zero) { Amps::ZERO } else { passing }).0
        };
        let gain = Contribution::rectangular("ammeter's gain", claim.relative);
        add(gain.due_to(Cause::AmmeterGain(range)), Unit::Percent, on_range(&reading));
        // Where the offset is in the zero, only what it has moved since counts.
        let offset = Contribution::rectangular("ammeter's offset", claim.absolute);
        let untouched = on_range(&|_, zero| if zero.is_none() { 1.0 } else { 0.0 });
        add(offset.due_to(Cause::AmmeterOffset(range)), Unit::Ampere, untouched);
        let drift = Contribution::rectangular("drift since the zero", claim.absolute);
        let moved = on_range(&|_, zero| zero.as_ref().map_or(0.0, Baseline::moved));
        add(drift, Unit::Ampere, moved);
    }
    for zero in &claims.zero {
        let shares = each(&|_, at| -at.as_ref().map_or(0.0, |at| at.share_of(zero)));
        add(zero::scatter(zero), Unit::Ampere, shares);
    }
    if let Some(voltage) = super::accuracy::voltage_claim(course) {
        let (gain, offset) = if course.has_voltmeter() {
            (Cause::VoltmeterGain, Cause::VoltmeterOffset)
        } else {
            (Cause::SetPointGain, Cause::SetPointOffset)
        };
        // A voltage read too high makes the current there look too small.
        let of_gain = Contribution::rectangular("gain of the voltage", voltage.relative).due_to(gain);
        add(of_gain, Unit::Percent, each(&|settled, _| -line.slope * settled.volts.0));
        let of_offset = Contribution::rectangular("offset of the voltage", voltage.absolute).due_to(offset);
        add(of_offset, Unit::Volt, each(&|_, _| -line.slope));
    }
    if let Some(input) = claims.sense_resistance.filter(|input| *input > Ohms::ZERO) {
        let drawn = |settled: &Settled, zero: &Option<Baseline<'_>>| {
            if holds_voltmeter(zero) { 0.0 } else { settled.volts.0 / input.0.powi(2) }
        };
        let resistance = Contribution::rectangular("voltmeter's input current", INPUT_RESISTANCE * input.0);
        add(resistance.due_to(Cause::VoltmeterInput), Unit::Ohm, each(&drawn));
    }
    errors
}

#[cfg(test)]
mod tests {
    use super::super::fixture::{off, on, profile, staircase};
    use super::*;
    use crate::trace::{Accuracy, RangeAccuracy, Trace, Zero};
    use crate::units::Ohms;
    use std::time::Duration;

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
        let constant = share(&fit.constant, SCATTER).hypot(share(&fit.constant, LEVEL));
        assert!((constant - 30.0e-9).abs() < 0.1e-9, "{:?}", fit.constant);
        // JCGM 100:2008, H.3.5: -sum x / sqrt(n sum x²), by hand -7.6 / sqrt(4 x 16.24).
        let product = fit.constant.standard_uncertainty * fit.conductance.standard_uncertainty;
        let correlation = fit.constant.covariance(&fit.conductance) / product;
        assert!((correlation + 0.94296).abs() < 1e-4, "{correlation}");
        // One scatter, of four times five degrees of freedom, in both.
        for quantity in [&fit.constant, &fit.conductance] {
            let degrees = quantity.effective_degrees_of_freedom().expect("scatter");
            assert!((degrees - 20.0).abs() < 1e-6, "{degrees}");
        }
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

    /// An ammeter off by 20 nA and a leak of 0.1 uA/V in the fixture, read as zeros at 1 V and 2.8 V an hour before, each
    /// to 0.3 nA. The board's line is what is left. By hand: 1/24 of 25 nA as a rectangle is left of the offset, 0.601 nA;
    /// two zeros of 0.3 nA on 1.8 V leave 0.236 nA/V, and 0.3 nA x sqrt(2.8² + 1.0²) / 1.8 = 0.496 nA at no voltage.
    #[test]
    fn the_zero_of_the_bench_is_taken_off() {
        let bench = |volts: f64| 20e-9 + 0.1e-6 * volts;
        let mut trace = run(&VOLTS, 1e-10, |volts| 1.05e-6 + 1e-6 * volts + bench(volts));
        let accuracy = Accuracy { relative: 0.0, absolute: 25e-9, resolution: 0.0 };
        trace.claims.current = vec![RangeAccuracy { full_scale: Amps(1e-4), accuracy }];
        let with_offset = fit(&trace);
        assert!((with_offset.constant.value - 1.07e-6).abs() < 1e-12, "{:?}", with_offset.constant);
        let zero = |at: f64| Zero {
            full_scale: Amps(1e-4),
            at: Volts(at),
            current: Amps(bench(at)),
            standard_uncertainty: Amps(0.3e-9),
            readings: 20,
            age: Duration::from_secs(3600),
        };
        trace.claims.zero = vec![zero(1.0), zero(2.8)];
        let fit = fit(&trace);
        assert!((fit.constant.value - 1.05e-6).abs() < 1e-12, "{:?}", fit.constant);
        assert!((fit.conductance.value - 1e-6).abs() < 1e-12, "{:?}", fit.conductance);
        assert!(share(&fit.constant, "ammeter's offset") < 1e-18, "{:?}", fit.constant);
        assert!((share(&fit.constant, "drift since the zero") - 0.6014e-9).abs() < 1e-13);
        let zeros = |quantity: &Quantity| -> f64 {
            let lines = quantity.contributions.iter().filter(|part| part.source == "zero of the bench");
            lines.map(|part| part.standard_uncertainty.powi(2)).sum::<f64>().sqrt()
        };
        assert!((zeros(&fit.conductance) - 0.2357e-9).abs() < 1e-12, "{:?}", fit.conductance);
        assert!((zeros(&fit.constant) - 0.4955e-9).abs() < 1e-12, "{:?}", fit.constant);
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
