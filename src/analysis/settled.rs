//! The settled readings at one set-point and range: the last ones, as far back as they agree.

use super::plateau::Course;
use crate::trace::{Drift, Sample};
use crate::units::{Amps, Volts};
use std::ops::Range;

/// Fewest readings that show a drift beside their scatter.
const FEWEST: usize = 6;

/// Volts by which terminals that have arrived may still move: a capacitor of 10 uF makes 40 nA of so slow a fall.
const STANDS: f64 = 0.02;

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
        Self::mean(course, &samples[samples.len() - count..])
    }

    /// The readings at the end of `samples` of which neither current nor voltage moves, as far as their scatter tells;
    /// `None` when the last is overloaded or still moves. Fewer than six show no drift and have to agree.
    pub(super) fn standing(course: &Course<'_>, samples: Range<usize>) -> Option<Self> {
        let all = &course.trace.samples[samples.clone()];
        let last = all.last()?;
        let last_amps = last.current.amps()?;
        let from = all.iter().rposition(|sample| sample.current.amps().is_none()).map_or(0, |at| at + 1);
        let good = &all[from..];
        if good.len() < FEWEST {
            return Self::of(course, samples);
        }
        let claimed = course.current_uncertainty(last.range, last_amps);
        let budget = course.profile.off_drift().max(claimed).0;
        let newest = |length: usize| &good[good.len() - length.min(good.len())..];
        let mut length = FEWEST;
        // Six readings may seem to move by chance; more of them tell.
        while !stands(course, newest(length), budget) {
            if length >= good.len() {
                return None;
            }
            length *= 2;
        }
        let mut found = Self::mean(course, newest(length))?;
        // Older readings count as long as they tell the same; a transient at the beginning does not.
        while length < good.len() {
            let (wider, older) = (newest(length * 2), length.min(good.len() - length));
            let before = Self::mean(course, &wider[..older])?;
            let spread = found.squares / (found.count as f64 - 1.0);
            let apart = (spread / found.count as f64 + spread / older as f64).sqrt();
            let agrees = (before.amps - found.amps).abs().0 <= (SURELY * apart).max(SAME * budget);
            if !agrees || !stands(course, wider, budget) {
                break;
            }
            found = Self::mean(course, wider)?;
            length *= 2;
        }
        Some(found)
    }

    fn mean(course: &Course<'_>, settled: &[Sample]) -> Option<Self> {
        let (count, last) = (settled.len(), settled.last()?);
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

/// Standard deviations of a difference that are no accident.
const SURELY: f64 = 4.0;
/// Share of what a reading may drift, below which a difference does not matter.
const SAME: f64 = 0.2;

/// Whether neither current nor voltage moves.
fn stands(course: &Course<'_>, samples: &[Sample], budget: f64) -> bool {
    let currents = samples.iter().filter_map(|it| Some((it.at, it.current.amps()?.0)));
    let voltages = samples.iter().map(|it| (it.at, course.terminals(it).0));
    let moves = |drift: Option<Drift>, budget| drift.is_some_and(|it| it.is_surely_beyond(budget));
    !moves(Drift::of(currents), budget) && !moves(Drift::of(voltages), STANDS)
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

    fn standing(amps: &[f64]) -> Option<Settled> {
        let readings: Vec<(f64, f64)> = amps.iter().map(|amps| (5.8, *amps)).collect();
        let (trace, profile) = (staircase(&readings), profile());
        Settled::standing(&Course::new(&trace, &profile), 0..amps.len())
    }

    /// Noise of 2 % is no drift, and none of it is left out: all of it counts in the scatter.
    #[test]
    fn noise_stands_and_a_transient_is_forgotten() {
        let noise = [2.55e-6, 2.45e-6, 2.55e-6, 2.45e-6, 2.55e-6, 2.45e-6];
        assert_eq!(standing(&noise).expect("stands").count, 6);
        let transient = [&[9e-6, 7e-6, 5e-6, 3e-6, 2.51e-6, 2.5e-6][..], &noise].concat();
        assert_eq!(standing(&transient).expect("stands").count, 6);
    }

    /// 100 nA in every tenth of a second go on to 5 uA in five seconds; the limit of 4 uA allows 40 nA.
    #[test]
    fn a_steady_fall_does_not_stand() {
        let fall: Vec<f64> = (0..20).map(|i| 6e-6 - 1e-7 * f64::from(i)).collect();
        assert_eq!(standing(&fall), None);
    }

    #[test]
    fn a_single_reading_is_taken_as_it_is() {
        assert_eq!(settled(&[2.5e-6]).expect("one").scatter(), None);
    }
}
