//! The parameters of the meters, and how a true mean becomes a reading.

use super::draw::Draw;
use crate::trace::{Accuracy, Current};
use crate::units::{Amps, Ohms, Siemens, Volts};
use std::time::Duration;

/// One range of a meter, its errors already drawn.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct MeterRange {
    /// Full scale, in the SI unit of the meter.
    pub full_scale: f64,
    /// What the maker claims.
    pub claim: Accuracy,
    /// Error of this one, as a share of the reading.
    pub gain_error: f64,
    /// Error of this one, fixed, in the SI unit of the meter.
    pub offset_error: f64,
    /// Standard deviation of readings at the meter's integration time, in its SI unit.
    pub noise: f64,
}

/// A range of an ammeter.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct AmmeterRange {
    /// Scale and errors.
    pub meter: MeterRange,
    /// Resistance in the board's supply line.
    pub burden: Ohms,
}

/// An ammeter in the board's supply line.
#[derive(Clone, Debug, PartialEq)]
pub struct AmmeterModel {
    /// Ranges, smallest first; never empty.
    pub ranges: Vec<AmmeterRange>,
    /// Time over which a reading is averaged.
    pub integration: Duration,
    /// Time until readings are good after a change of range.
    pub range_settle: Duration,
    /// Whether its leads are swapped.
    pub reversed: bool,
    /// Whether its fuse is blown: the path is open, and it reads exactly nothing.
    pub fuse_blown: bool,
    /// Index of the range on which its relay hangs whatever it is told and says, where it does.
    pub stuck_on: Option<usize>,
}

/// A voltmeter that finds its range by itself.
#[derive(Clone, Debug, PartialEq)]
pub struct VoltmeterModel {
    /// Ranges, smallest first; never empty.
    pub ranges: Vec<MeterRange>,
    /// Time over which a reading is averaged.
    pub integration: Duration,
    /// What its maker states of the resistance between its terminals; `None` for the sense of a source-measure unit,
    /// whose current does not pass the ammeter.
    pub input_resistance: Option<Ohms>,
    /// How far the true resistance is off what is stated, as a share.
    pub input_error: f64,
}

/// Resistance of a path whose fuse is blown, ohm.
const OPEN: f64 = 100e9;

/// A meter reads up to this multiple of a range's full scale; a fifth more is common practice for bench meters.
const OVER_RANGE: f64 = 1.2;

/// Error just after a change of the ammeter's range, as a share of its full scale.
const RANGE_CHANGE_ERROR: f64 = 0.01;

/// Time constants of that error in the stated settling time: it has fallen to a thousandth.
const RANGE_SETTLE_CONSTANTS: f64 = 7.0;

/// Shortest averaging that noise is scaled to, s.
const SHORTEST_APERTURE: f64 = 1e-4;

impl MeterRange {
    /// Whether the range can show `value`.
    pub(super) fn holds(&self, value: f64) -> bool {
        value.abs() <= OVER_RANGE * self.full_scale
    }

    /// The reading of `value` with a draw of noise, `normal` of it, scaled to the averaging time.
    fn reading(&self, value: f64, normal: f64, averaging: f64) -> f64 {
        let exact = value * (1.0 + self.gain_error) + self.offset_error + self.noise * normal * averaging;
        round_to(exact, self.claim.resolution)
    }
}

/// Rounds to a step; a step of zero leaves the value alone.
pub(super) fn round_to(value: f64, step: f64) -> f64 {
    if step <= 0.0 {
        return value;
    }
    let (steps, per_unit) = ((value / step).round(), (1.0 / step).round());
    // Dividing by a whole number gives the very number a decimal text would: 7.6 and not 7.600_000_000_000_000_5.
    if (per_unit * step - 1.0).abs() < 1e-9 { steps / per_unit } else { steps * step }
}

/// How much larger the noise of a reading over `aperture` is than at the meter's own integration time.
fn averaging(integration: Duration, aperture: Duration) -> f64 {
    (integration.as_secs_f64() / aperture.as_secs_f64().max(SHORTEST_APERTURE)).sqrt()
}

impl AmmeterModel {
    /// Index of the smallest range that holds `current`, or of the largest.
    pub(super) fn range_for(&self, current: Amps) -> usize {
        let holds = |range: &AmmeterRange| range.meter.full_scale * 1.000_001 >= current.0.abs();
        self.ranges.iter().position(holds).unwrap_or(self.largest())
    }

    /// Index of the largest range.
    pub(super) fn largest(&self) -> usize {
        self.ranges.len().saturating_sub(1)
    }

    /// Resistance in the board's supply line on a range, ohm.
    pub(super) fn burden(&self, range: usize) -> f64 {
        if self.fuse_blown { OPEN } else { self.ranges[self.true_range(range)].burden.0 }
    }

    /// The range it is really on while it says that it is on this one.
    pub(super) fn true_range(&self, range: usize) -> usize {
        self.stuck_on.unwrap_or(range)
    }

    /// The reading of a true mean over `aperture`, `settled` after the range was last changed.
    pub(super) fn read(
        &self,
        range: usize,
        mean: f64,
        aperture: Duration,
        settled: Duration,
        noise: &mut Draw,
    ) -> Current {
        if self.fuse_blown {
            return Current::Value(Amps::ZERO);
        }
        let mean = if self.reversed { -mean } else { mean };
        let range = &self.ranges[self.true_range(range)].meter;
        let constants = RANGE_SETTLE_CONSTANTS / self.range_settle.as_secs_f64().max(1e-9);
        let disturbance = RANGE_CHANGE_ERROR * range.full_scale * (-settled.as_secs_f64() * constants).exp();
        if !range.holds(mean) {
            return Current::OVERLOAD;
        }
        let noise = noise.normal();
        Current::Value(Amps(range.reading(mean + disturbance, noise, averaging(self.integration, aperture))))
    }
}

impl VoltmeterModel {
    /// What it draws through the ammeter for a volt.
    pub fn input_conductance(&self) -> Siemens {
        let stated = self.input_resistance.filter(|stated| *stated > Ohms::ZERO);
        Siemens(stated.map_or(0.0, |stated| 1.0 / (stated.0 * (1.0 + self.input_error))))
    }

    /// The range on which it reads `volts`, by its own choice.
    pub fn range_for(&self, volts: Volts) -> Option<&MeterRange> {
        self.ranges.iter().find(|range| range.holds(volts.0)).or(self.ranges.last())
    }

    /// The reading of a true mean over `aperture`.
    pub(super) fn read(&self, mean: f64, aperture: Duration, noise: &mut Draw) -> Volts {
        let normal = noise.normal();
        let averaging = averaging(self.integration, aperture);
        Volts(self.range_for(Volts(mean)).map_or(mean, |range| range.reading(mean, normal, averaging)))
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn rounding_gives_the_number_a_decimal_text_would() {
        for (value, step, text) in
            [(7.600_04, 1e-3, "7.6"), (2.774_62e-6, 1e-10, "0.0000027746"), (7.6, 0.0, "7.6")]
        {
            assert_eq!(round_to(value, step).to_string(), text);
        }
        assert!((round_to(7.6, 0.3) - 7.5).abs() < 1e-12);
    }
}
