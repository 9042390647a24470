//! Another source at the board: a charger, a USB port, a programmer.

use crate::units::{Ohms, Volts};

/// Drop of the diode in its way, V: a silicon diode at milliamperes, common practice.
const DIODE: f64 = 0.7;

/// A source behind a diode and a resistance, across the board's terminals.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Feed {
    /// Voltage of the source.
    pub source: Volts,
    /// Resistance in its way.
    pub resistance: Ohms,
}

impl Feed {
    /// The voltage above which it feeds nothing, V.
    pub(super) fn open_voltage(self) -> f64 {
        self.source.0 - DIODE
    }

    /// What it feeds in at `volts` across the terminals, A.
    pub(super) fn current(self, volts: f64) -> f64 {
        ((self.open_voltage() - volts) / self.resistance.0).max(0.0)
    }
}
