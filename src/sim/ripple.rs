//! Hum of the mains at the board: what a detector makes of it, and what is left of it in an averaged reading.
//!
//! It is far too fast to be followed sample by sample and needs no following: a detector trips when the sum of voltage
//! and hum stays below its threshold for the detect delay, so hum moves the trip by a fixed amount. The comparator
//! flips back at the first crest and keeps its state by its hysteresis while the release delay runs.

use crate::units::Volts;
use std::f64::consts::{PI, SQRT_2, TAU};
use std::time::Duration;

/// A sinusoidal hum.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Ripple {
    /// Root mean square.
    pub rms: Volts,
    /// Frequency, Hz.
    pub frequency: f64,
}

impl Ripple {
    fn amplitude(&self) -> f64 {
        self.rms.0 * SQRT_2
    }

    /// How far above its trip voltage a detector of this delay trips, V; negative for one so slow that whole crests
    /// must lie below its trip.
    ///
    /// A trough of a sine of amplitude `a` lies below `-a cos(pi f t)` for the time `t`.
    pub(super) fn trip_shift(&self, detect_delay: Duration) -> f64 {
        let periods = (self.frequency * detect_delay.as_secs_f64()).min(1.0);
        self.amplitude() * (PI * periods).cos()
    }

    /// How far below its re-enable voltage a detector comes back, V.
    pub(super) fn re_enable_shift(&self) -> f64 {
        self.amplitude()
    }

    /// Mean of the hum between two times of a run, V; nothing over whole periods.
    pub(super) fn mean(&self, from: Duration, to: Duration) -> f64 {
        let phase = |time: Duration| TAU * (self.frequency * time.as_secs_f64()).fract();
        let periods = self.frequency * (to.saturating_sub(from)).as_secs_f64();
        if periods < 1e-6 {
            return self.amplitude() * phase(from).sin();
        }
        self.amplitude() * (phase(from).cos() - phase(to).cos()) / (TAU * periods)
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    const HUM: Ripple = Ripple { rms: Volts(20e-3), frequency: 50.0 };

    /// The longest time in one period for which the hum lies below `-shift`, in steps of 1 µs.
    fn time_below(shift: f64) -> f64 {
        (0..20_000).filter(|us| HUM.amplitude() * (TAU * 50.0 * f64::from(*us) * 1e-6).sin() < -shift).count()
            as f64
            * 1e-6
    }

    #[test]
    fn the_trip_moves_to_where_a_trough_outlasts_the_detect_delay() {
        for micros in [300, 2000, 5000, 10_000, 15_000] {
            let delay = Duration::from_micros(micros);
            let below = time_below(HUM.trip_shift(delay));
            assert!((below - delay.as_secs_f64()).abs() < 20e-6, "{delay:?}: {below} s");
        }
        assert!((HUM.trip_shift(Duration::from_secs(1)) + HUM.amplitude()).abs() < 1e-12);
    }

    #[test]
    fn whole_periods_average_to_nothing_and_others_to_what_a_fine_sum_gives() {
        let from = Duration::from_millis(123);
        assert!(HUM.mean(from, from + Duration::from_millis(20)).abs() < 1e-12);
        let to = from + Duration::from_millis(7);
        let sum: f64 = (0..7000).map(|us| (TAU * 50.0 * (0.123 + (f64::from(us) + 0.5) * 1e-6)).sin()).sum();
        assert!((HUM.mean(from, to) - HUM.amplitude() * sum / 7000.0).abs() < 1e-9);
    }
}
