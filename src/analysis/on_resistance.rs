//! The resistance of the closed switch: what drops between terminals and load, over the current.
//!
//! Read at the lowest voltages at which the board stayed on, where the gate is driven least. Two voltmeters stand behind
//! it, and what each errs counts on the whole of its voltage, not on the small difference: nothing on the bench shows
//! how far they differ under load, for with the switch open the one at the load reads nearly nothing. Both must sit on
//! the board's own pads; a clip between pad and voltmeter counts as the switch.

use super::accuracy;
use super::plateau::{Course, SAME_SET};
use super::quantity::{Contribution, Quantity};
use super::threshold::Threshold;
use crate::profile::QuantityName;
use crate::trace::{Sample, SwitchState};
use crate::units::{Amps, Ohms, Unit, Volts};

/// The resistance at the set-point next to `trip`; `None` without a voltmeter at the terminals and one at the load.
pub(super) fn on_resistance(course: &Course<'_>, trip: &Threshold) -> Option<Quantity> {
    let set = course.plateaus[trip.stayed].set;
    let near = |sample: &&Sample| {
        sample.set.0 > set.0 - SAME_SET && sample.set <= set * (1.0 + NEAR) && sample.limited != Some(true)
    };
    let on = course.trace.samples.iter().zip(&course.states);
    let readings: Vec<Reading> = on
        .filter(|(sample, state)| **state == SwitchState::On && near(sample))
        .filter_map(|(sample, _)| Reading::of(sample))
        .collect();
    let readings = without_caught(readings)?;
    let count = readings.len() as f64;
    let mean = |value: &dyn Fn(&Reading) -> f64| readings.iter().map(value).sum::<f64>() / count;
    let (sense, load, amps) = (mean(&|it| it.sense), mean(&|it| it.load), mean(&|it| it.amps));
    let resistance = mean(&Reading::resistance);
    if !resistance.is_finite() {
        return None;
    }
    let mut parts = Vec::new();
    if readings.len() > 1 {
        let squares: f64 = readings.iter().map(|it| (it.resistance() - resistance).powi(2)).sum();
        let scatter = (squares / (count - 1.0) / count).sqrt();
        parts.push(Contribution::scatter("scatter of the readings", scatter, count - 1.0));
    }
    let claims = &course.trace.claims;
    let range = readings.first()?.range;
    // What a voltmeter errs on its whole voltage counts in the small difference.
    let of_voltage = |lines: Vec<Contribution>, sensitivity: f64| {
        lines.into_iter().map(move |line| line.times(sensitivity, Unit::Volt))
    };
    parts.extend(of_voltage(accuracy::of_voltmeter(claims, Volts(sense)), 1.0 / amps));
    parts.extend(of_voltage(accuracy::of_load_voltmeter(claims, Volts(load)), -1.0 / amps));
    let of_current = accuracy::of_current(claims, range, Amps(amps));
    parts.extend(of_current.into_iter().map(|line| line.times(-resistance / amps, Unit::Ampere)));
    Some(Quantity::new(QuantityName::OnResistance, resistance, parts))
}

/// Set-points this share above the lowest still count for it; a gate hardly notices.
const NEAR: f64 = 0.02;
/// Readings farther from the median than this many robust standard deviations caught the switch as it opened or closed.
const OUTLIER: f64 = 5.0;
/// Median absolute deviation to standard deviation, for a normal distribution.
const MAD_TO_SIGMA: f64 = 1.4826;
/// Ohms below which a deviation is arithmetic.
const ROUNDING: f64 = 1e-9;

/// Leaves out readings in the midst of which the switch opened or closed: a thousandth of such a reading with the switch
/// open looks like as much resistance again.
fn without_caught(mut readings: Vec<Reading>) -> Option<Vec<Reading>> {
    let middle = median(readings.iter().map(Reading::resistance))?;
    let deviation = median(readings.iter().map(|it| (it.resistance() - middle).abs()))?;
    let farthest = OUTLIER * MAD_TO_SIGMA * deviation + ROUNDING;
    readings.retain(|it| (it.resistance() - middle).abs() <= farthest);
    Some(readings)
}

/// The lower of the two in the middle: what was caught only ever reads high.
fn median(values: impl Iterator<Item = f64>) -> Option<f64> {
    let mut values: Vec<f64> = values.collect();
    values.sort_by(f64::total_cmp);
    values.get(values.len().checked_sub(1)? / 2).copied()
}

struct Reading {
    sense: f64,
    load: f64,
    amps: f64,
    range: Option<Amps>,
}

impl Reading {
    fn of(sample: &Sample) -> Option<Self> {
        let (sense, load, amps): (Volts, Volts, _) = (sample.sense?, sample.load?, sample.current.amps()?);
        Some(Self { sense: sense.0, load: load.0, amps: amps.0, range: sample.range })
    }

    fn resistance(&self) -> f64 {
        Ohms((self.sense - self.load) / self.amps).0
    }
}

#[cfg(test)]
mod tests {
    use super::super::fixture::{off, on, profile, staircase};
    use crate::analysis::{Quantity, analyse};
    use crate::profile::QuantityName;
    use crate::trace::{Accuracy, Trace};
    use crate::units::Volts;

    /// 60 mohm of switch: at 6 V and 55 ohm 109 mA and 6.5 mV.
    fn trace() -> Trace {
        let mut trace =
            staircase(&[on(7.6), on(6.1), on(6.0), on(6.0), off(5.9), off(5.2), off(6.3), on(6.5)]);
        for sample in &mut trace.samples {
            let amps = sample.current.amps().expect("a number").0;
            sample.load = Some(Volts(if amps > 0.01 { sample.set.0 - 0.06 * amps } else { 0.0 }));
        }
        trace
    }

    fn found(trace: &Trace) -> Option<Quantity> {
        let found = analyse(trace, &profile()).quantities;
        found.into_iter().find(|quantity| quantity.name == QuantityName::OnResistance)
    }

    /// By hand: two meters of 0.0035 % + 50 uV at 6 V err by up to 0.21 mV and 0.05 mV, 0.125 mV standard; over 109 mA
    /// 1.14 mohm each.
    #[test]
    fn it_is_the_drop_over_the_current_and_both_voltmeters_count_whole() {
        let mut trace = trace();
        assert!((found(&trace).expect("two voltmeters").value - 0.06).abs() < 1e-9);
        let claim = Accuracy { relative: 35e-6, absolute: 50e-6, resolution: 0.0 };
        (trace.claims.sense, trace.claims.load) = (Some(claim), Some(claim));
        let quantity = found(&trace).expect("two voltmeters");
        let wanted = 2.0_f64.sqrt() * (210e-6_f64.hypot(50e-6) / 3.0_f64.sqrt()) / (6.0 / 55.0);
        // The reading at 6.1 V counts as well and moves it by a two-hundredth at most.
        assert!((quantity.standard_uncertainty / wanted - 1.0).abs() < 5e-3, "{quantity:?}");
    }

    /// In one reading in three the switch was open for the last hundredth of it.
    #[test]
    fn a_reading_that_caught_the_switch_opening_does_not_count() {
        let mut trace = trace();
        trace.samples[2].load = Some(Volts(5.9935 * 0.99));
        let value = found(&trace).expect("two voltmeters").value;
        assert!((value - 0.06).abs() < 1e-6, "{value}");
    }

    #[test]
    fn without_a_voltmeter_at_the_load_there_is_none() {
        let mut trace = trace();
        for sample in &mut trace.samples {
            sample.load = None;
        }
        assert_eq!(found(&trace), None);
    }
}
