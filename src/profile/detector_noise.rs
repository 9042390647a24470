//! How much noise there is at a board's detector before anything is measured, and how fast it is.
//!
//! Noise here is what the detector follows: rms at the board's terminals, in its own bandwidth. What is faster than the
//! delay behind the comparator is averaged out, so that one delay holds one independent value.

use super::{Profile, Timing};
use crate::units::Volts;
use std::time::Duration;

/// A level of noise that is about normal in its logarithm.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct DetectorNoise {
    /// In the middle: as many boards have more as have less.
    pub level: Volts,
    /// One standard deviation, as a factor to either side.
    pub factor: f64,
}

/// What detectors usually have, as a share of the voltage at the terminals: 60 µV on 6 V. Detectors and references of a
/// microampere or less show tens of microvolts on a few volts in the kilohertz they follow, and what circuit and leads
/// pick up comes on top; from part to part and from layout to layout it differs by a factor of about two. Common practice.
const USUAL: (f64, f64) = (1e-5, 2.0);

/// How far the boards of one design lie from the level that its profile states, as a factor: a standard deviation is known to
/// about 1 / sqrt(2 n) from n + 1 values (JCGM 100:2008, E.4.3), 16 % from twenty, and parts differ besides.
const STATED_FACTOR: f64 = 1.2;

/// Rates of noise that make sense, per second.
const RATES: (f64, f64) = (1.0, 1000.0);

impl DetectorNoise {
    /// What detectors usually have, for a board with `volts` at its terminals.
    pub fn usual(volts: Volts) -> Self {
        Self { level: volts.abs() * USUAL.0, factor: USUAL.1 }
    }

    /// About this level.
    pub fn stated(level: Volts) -> Self {
        Self { level, factor: STATED_FACTOR }
    }

    /// The level so many standard deviations above the middle.
    pub fn above(&self, deviations: f64) -> Volts {
        self.level * self.factor.powf(deviations)
    }
}

/// Independent values, in a second, of the noise that a detector with this delay follows.
pub fn noise_rate(delay: Duration) -> f64 {
    (1.0 / delay.as_secs_f64()).clamp(RATES.0, RATES.1)
}

impl Profile {
    /// The noise at the detector, as the profile states it or else as is usual, with `volts` at the terminals.
    pub fn detector_noise(&self, volts: Volts) -> DetectorNoise {
        let stated = self.parts.and_then(|parts| parts.detector.noise);
        stated.map_or_else(|| DetectorNoise::usual(volts), DetectorNoise::stated)
    }
}

impl Timing {
    /// The delay of a good board in one direction, of which no more is known than the longest that the design allows.
    pub(crate) fn likely(longest: Duration) -> Duration {
        longest / 2
    }
}

#[cfg(test)]
mod tests {
    use super::super::sample::RIVER_NODE;
    use super::*;

    fn noise_with(line: &str) -> DetectorNoise {
        let text = RIVER_NODE.replacen("[detector] ", &format!("[detector]\n{line}\n# "), 1);
        let profile = Profile::read("p.toml", &text).unwrap_or_else(|problems| panic!("{problems}"));
        profile.detector_noise(Volts(6.0))
    }

    #[test]
    fn a_profile_states_the_noise_or_it_is_what_is_usual() {
        let usual = noise_with("");
        assert!((usual.level - Volts(60e-6)).abs() < Volts(1e-12), "{usual:?}");
        assert!((usual.above(-1.0) - Volts(30e-6)).abs() < Volts(1e-12), "{usual:?}");
        assert_eq!(noise_with("noise = \"0.3 mV\""), DetectorNoise::stated(Volts(0.3e-3)));
        assert_eq!(noise_with("noise = \"0 V\"").above(3.0), Volts::ZERO);
    }

    #[test]
    fn one_delay_holds_one_value() {
        assert!((noise_rate(Duration::from_millis(5)) - 200.0).abs() < 1e-9);
        assert!((noise_rate(Duration::from_micros(10)) - 1000.0).abs() < 1e-9, "no detector is that fast");
    }
}
