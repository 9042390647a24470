//! The settled readings at one set-point and range: the last ones, as far back as they agree.

use super::plateau::Course;
use crate::trace::Sample;
use crate::units::{Amps, Volts};
use std::ops::Range;

/// Readings that differ from the last by less than this share of it have settled.
const AGREES: f64 = 0.02;

/// The mean of the settled readings at the end of a plateau.
#[derive(Clone, Copy, Debug, PartialEq)]
pub(super) struct Settled {
    /// Voltage at the terminals.
    pub(super) volts: Volts,
    /// Current into the board: the reading less what the voltmeter draws.
    pub(super) amps: Amps,
    /// Full scale of the ammeter's range.
    pub(super) range: Option<Amps>,
    /// How many readings agree.
    pub(super) count: usize,
    /// Sum of the squared deviations of the current from its mean.
    pub(super) squares: f64,
}

impl Settled {
    /// The settled readings at the end of `samples`, which share one range; `None` when the last is overloaded or
    /// does not agree with the one before it.
    pub(super) fn of(course: &Course<'_>, samples: Range<usize>) -> Option<Self> {
        let samples = &course.trace.samples[samples];
        let last = samples.last()?;
        let last_amps = last.current.amps()?;
        let tolerance = (last_amps.abs() * AGREES).max(course.current_uncertainty(last.range, last_amps));
        let agrees = |sample: &&Sample| {
            sample.current.amps().is_some_and(|amps| (amps - last_amps).abs() <= tolerance)
        };
        let count = samples.iter().rev().take_while(agrees).count();
        if count == 0 || (count == 1 && samples.len() > 1) {
            return None;
        }
        let settled = &samples[samples.len() - count..];
        let mean = |value: &dyn Fn(&Sample) -> f64| settled.iter().map(value).sum::<f64>() / count as f64;
        let amps = |sample: &Sample| {
            let passing = course.voltmeter_current(course.terminals(sample));
            sample.current.amps().map_or(f64::NAN, |amps| (amps - passing).0)
        };
        let mean_amps = mean(&amps);
        Some(Self {
            volts: Volts(mean(&|sample| course.terminals(sample).0)),
            amps: Amps(mean_amps),
            range: last.range,
            count,
            squares: settled.iter().map(|sample| (amps(sample) - mean_amps).powi(2)).sum(),
        })
    }

    /// Standard deviation of the mean current (JCGM 100:2008, 4.2.3); `None` from one reading.
    pub(super) fn scatter(&self) -> Option<f64> {
        let count = self.count as f64;
        (self.count > 1).then(|| (self.squares / (count - 1.0) / count).sqrt())
    }
}

#[cfg(test)]
mod tests {
    use super::super::fixture::{profile, staircase};
    use super::*;

    fn settled(amps: &[f64]) -> Option<Settled> {
        let readings: Vec<(f64, f64)> = amps.iter().map(|amps| (5.8, *amps)).collect();
        let (trace, profile) = (staircase(&readings), profile());
        Settled::of(&Course::new(&trace, &profile), 0..amps.len())
    }

    #[test]
    fn readings_before_the_settled_ones_are_left_out() {
        let found = settled(&[9e-6, 4e-6, 2.50e-6, 2.51e-6, 2.49e-6]).expect("settled");
        assert_eq!(found.count, 3);
        assert!((found.amps.0 - 2.5e-6).abs() < 1e-12);
        // s = 10 nA, of the mean of three 5.77 nA.
        assert!((found.scatter().expect("three") - 5.77e-9).abs() < 1e-11);
    }

    #[test]
    fn a_current_still_on_its_way_is_not_settled() {
        assert_eq!(settled(&[9e-6, 6e-6, 4e-6]), None);
    }

    #[test]
    fn a_single_reading_is_taken_as_it_is() {
        assert_eq!(settled(&[2.5e-6]).expect("one").scatter(), None);
    }
}
