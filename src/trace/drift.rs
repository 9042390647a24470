//! Whether readings still move: their slope over time, held against how far they may go on moving.

use crate::statistics::line::{Line, Point};
use std::time::Duration;

/// Seconds ahead for which a settled reading must stand. Five seconds to one per cent are common practice for
/// microamperes, where the absorption of capacitors goes on for minutes.
const HORIZON: f64 = 5.0;

/// Standard uncertainties that are no accident: few readings know their own scatter badly.
const SURELY: f64 = 4.0;

/// Shortest time over which a slope is taken: ten whole periods of 50 Hz mains and twelve of 60 Hz.
pub const WHOLE_LINE_PERIODS: Duration = Duration::from_millis(200);

/// The slope of readings over time.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Drift {
    /// Change in a second.
    pub slope: f64,
    /// Its standard uncertainty, from the scatter of the readings about the line.
    pub uncertainty: f64,
}

impl Drift {
    /// The slope through readings with their times; `None` of fewer than three.
    pub fn of(readings: impl Iterator<Item = (Duration, f64)> + Clone) -> Option<Self> {
        let line = Line::fit(readings.map(|(at, value)| Point::plain(at.as_secs_f64(), value)))?;
        Some(Self { slope: line.slope, uncertainty: line.slope_uncertainty(line.scatter?) })
    }

    /// True when going on like this moves the reading by less than `budget`.
    pub fn is_within(&self, budget: f64) -> bool {
        self.slope.abs() * HORIZON < budget
    }

    /// True when it moves by more than `budget`, whatever the scatter.
    pub fn is_surely_beyond(&self, budget: f64) -> bool {
        (self.slope.abs() - SURELY * self.uncertainty) * HORIZON > budget
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    fn readings(slope: f64, scatter: f64) -> Vec<(Duration, f64)> {
        let noise = |index: u32| if index.is_multiple_of(2) { scatter } else { -scatter };
        (0..10).map(|i| (Duration::from_millis(25) * i, slope * 0.025 * f64::from(i) + noise(i))).collect()
    }

    fn drift(slope: f64, scatter: f64) -> Drift {
        Drift::of(readings(slope, scatter).into_iter()).expect("ten readings")
    }

    /// 10 nA/s go on to 50 nA in the horizon of five seconds; by hand.
    #[test]
    fn a_slope_is_held_against_what_it_leads_to() {
        let steady = drift(10e-9, 0.0);
        assert!((steady.slope - 10e-9).abs() < 1e-15);
        assert!(steady.is_within(51e-9) && !steady.is_within(49e-9));
        assert!(steady.is_surely_beyond(49e-9) && !steady.is_surely_beyond(51e-9));
    }

    #[test]
    fn scatter_alone_is_no_drift() {
        let noisy = drift(10e-9, 20e-9);
        assert!(!noisy.is_surely_beyond(40e-9), "{noisy:?}");
        assert_eq!(Drift::of(readings(0.0, 0.0).into_iter().take(2)), None);
    }
}
