//! The parameters of the meters, and how a true mean becomes a reading.

use crate::trace::Accuracy;
use crate::units::{Amps, Ohms};
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
}

/// A voltmeter that finds its range by itself.
#[derive(Clone, Debug, PartialEq)]
pub struct VoltmeterModel {
    /// Ranges, smallest first; never empty.
    pub ranges: Vec<MeterRange>,
    /// Time over which a reading is averaged.
    pub integration: Duration,
    /// Resistance between its terminals.
    pub input_resistance: Ohms,
}

impl AmmeterModel {
    /// Index of the smallest range that holds `current`, or of the largest.
    pub(super) fn range_for(&self, current: Amps) -> usize {
        let holds = |range: &AmmeterRange| range.meter.full_scale * 1.000_001 >= current.0.abs();
        self.ranges.iter().position(holds).unwrap_or(self.ranges.len().saturating_sub(1))
    }
}
