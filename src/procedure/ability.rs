//! What a bench can do, as far as a procedure must know.

use crate::trace::Slew;
use crate::units::{Amps, Volts};
use std::time::Duration;

/// The abilities of a bench, from its instruments' definitions.
#[derive(Clone, Debug, PartialEq)]
pub struct Ability {
    /// A voltmeter (or the supply's sense leads) reads the board's terminals.
    pub voltmeter: bool,
    /// A voltmeter reads the load, behind the switch.
    pub load_voltmeter: bool,
    /// Time of one burst of readings far shorter than a mains period; `None` where the voltmeter at the terminals takes
    /// none.
    pub short_readings: Option<Duration>,
    /// Full scales of the ammeter's ranges, smallest first; never empty.
    pub ranges: Vec<Amps>,
    /// Longest an ammeter range change needs until its readings are good.
    pub range_settle: Duration,
    /// Highest voltage the supply can be set to.
    pub max_voltage: Volts,
    /// Highest current the supply can be limited to.
    pub max_current: Amps,
    /// Lowest current the supply can be limited to.
    pub min_current: Amps,
    /// Smallest step of the supply's voltage.
    pub set_step: Volts,
    /// Time the supply needs after a small step until its output has settled, board on.
    pub settle: Duration,
    /// How much longer it needs the farther it goes.
    pub slew: Slew,
    /// Share of an upward step by which the supply may overshoot its set-point; 0 where it does not.
    pub overshoot: f64,
    /// Time one reading of all roles takes, wire included.
    pub read_time: Duration,
    /// How far a settled voltage at the terminals may lie from the set-point, lead drop aside.
    pub arrival_tolerance: Volts,
    /// Standard uncertainty of a reading near zero, a value for each of the ranges.
    pub zero_uncertainties: Vec<Amps>,
}

impl Ability {
    /// Standard uncertainty of an off current: near zero, on the smallest range.
    pub fn off_current_uncertainty(&self) -> Amps {
        self.zero_uncertainties.first().copied().unwrap_or(Amps(f64::INFINITY))
    }
}
