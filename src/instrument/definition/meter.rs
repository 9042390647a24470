//! The part of a definition that describes a meter: its ranges with the maker's claims, and its commands.

use super::Template;
use crate::trace::{Accuracy, RangeAccuracy};
use crate::units::{Amps, Ohms, Quantity, Volts};
use std::time::Duration;

/// A meter that reads current.
pub type Ammeter = Meter<Amps>;

/// A meter that reads voltage.
pub type Voltmeter = Meter<Volts>;

/// A meter with fixed ranges.
#[derive(Clone, Debug, PartialEq)]
pub struct Meter<Q> {
    /// Ranges, smallest first; never empty.
    pub ranges: Vec<Range<Q>>,
    /// Time over which one reading is averaged.
    pub integration: Duration,
    /// Commands sent once after [`super::Definition::setup`], in order.
    pub setup: Vec<String>,
    /// Asks for one reading.
    pub read: String,
    /// Changes the range; `None` only for a meter of one range.
    pub range: Option<RangeCommands>,
}

/// One range of a meter.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Range<Q> {
    /// Largest magnitude it reads.
    pub full_scale: Q,
    /// The maker's claim.
    pub accuracy: Accuracy,
    /// Of an ammeter the burden in series, of a voltmeter the input resistance.
    pub resistance: Ohms,
    /// Time after changing to this range until readings are good.
    pub settle: Duration,
}

/// How a range is set and asked for.
#[derive(Clone, Debug, PartialEq)]
pub struct RangeCommands {
    /// Sets the range by its full scale.
    pub set: Template,
    /// Asks for the range's full scale.
    pub ask: String,
}

impl<Q: Quantity> Meter<Q> {
    /// The smallest range that holds `value`, if any does.
    pub fn range_for(&self, value: Q) -> Option<&Range<Q>> {
        self.ranges.iter().find(|range| value.si().abs() <= range.full_scale.si())
    }
}

impl Meter<Amps> {
    /// The claims, a line per range, smallest range first.
    pub fn claims(&self) -> Vec<RangeAccuracy> {
        let line =
            |range: &Range<Amps>| RangeAccuracy { full_scale: range.full_scale, accuracy: range.accuracy };
        self.ranges.iter().map(line).collect()
    }
}
