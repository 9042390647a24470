//! Short readings of the voltage at the board in quick succession: they show what whole mains periods average out.

use super::seconds;
use crate::units::Volts;
use serde::{Deserialize, Serialize};
use std::time::Duration;

/// What a burst of short readings showed. The set-point stood, and so should the readings.
#[derive(Clone, Copy, Debug, PartialEq, Serialize, Deserialize)]
pub struct Burst {
    /// Time over which each was averaged.
    #[serde(rename = "aperture_s", with = "seconds")]
    pub aperture: Duration,
    /// How many there were.
    pub readings: usize,
    /// Median of their distances from their median: of a sine its root mean square, and blind to a few that jump.
    #[serde(rename = "median_deviation_v")]
    pub median_deviation: Volts,
    /// Highest less lowest.
    #[serde(rename = "peak_to_peak_v")]
    pub peak_to_peak: Volts,
}

impl Burst {
    /// Readings that a bench takes for one burst.
    pub const LENGTH: u32 = 40;

    /// Sums up readings of `aperture` each; `None` of fewer than three, or where one is no number.
    pub fn of(aperture: Duration, readings: &[Volts]) -> Option<Self> {
        const FEWEST: usize = 3;
        if readings.len() < FEWEST || readings.iter().any(|volts| !volts.0.is_finite()) {
            return None;
        }
        let middle = median(readings.iter().map(|volts| volts.0).collect());
        let deviation = median(readings.iter().map(|volts| (volts.0 - middle).abs()).collect());
        let lowest = readings.iter().copied().fold(Volts(f64::INFINITY), Volts::min);
        let highest = readings.iter().copied().fold(Volts(f64::NEG_INFINITY), Volts::max);
        Some(Self {
            aperture,
            readings: readings.len(),
            median_deviation: Volts(deviation),
            peak_to_peak: highest - lowest,
        })
    }
}

/// The upper of the two middle ones where their number is even.
fn median(mut values: Vec<f64>) -> f64 {
    let middle = values.len() / 2;
    let (_, median, _) = values.select_nth_unstable_by(middle, f64::total_cmp);
    *median
}

#[cfg(test)]
mod tests {
    use super::*;
    use std::f64::consts::{SQRT_2, TAU};

    fn burst(readings: &[f64]) -> Option<Burst> {
        let readings: Vec<Volts> = readings.iter().copied().map(Volts).collect();
        Burst::of(Duration::from_millis(1), &readings)
    }

    /// Half of a sine's time lies below sin 45° of its amplitude, which is its root mean square.
    #[test]
    fn a_sine_shows_its_root_mean_square_and_twice_its_amplitude() {
        let sine: Vec<f64> =
            (0..400).map(|tick| 6.0 + 0.02 * SQRT_2 * (TAU * f64::from(tick) / 40.0).sin()).collect();
        let burst = burst(&sine).expect("readings");
        assert!((burst.median_deviation.0 - 0.02).abs() < 2e-3, "{burst:?}");
        assert!((burst.peak_to_peak.0 - 0.04 * SQRT_2).abs() < 1e-6, "{burst:?}");
    }

    #[test]
    fn a_few_jumps_show_in_the_peaks_only() {
        let mut readings = [6.0; 40];
        readings[7] = 5.5;
        let burst = burst(&readings).expect("readings");
        assert_eq!((burst.median_deviation, burst.peak_to_peak), (Volts(0.0), Volts(0.5)));
    }

    #[test]
    fn too_few_and_what_is_no_number_say_nothing() {
        assert_eq!(burst(&[6.0, 6.0]), None);
        assert_eq!(burst(&[6.0, f64::NAN, 6.0]), None);
    }
}
