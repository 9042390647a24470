//! A board that is not at room temperature: its thresholds shift, its leakage grows.

use super::BoardModel;
use crate::units::{Celsius, Volts};

/// Temperature at which a board's parameters hold.
pub(super) const ROOM: Celsius = Celsius(25.0);

/// Shift of a detector's thresholds, a share per kelvin; 100 ppm is typical of the standard class.
const THRESHOLD_SHIFT: f64 = -100e-6;

/// Leakage of semiconductors doubles in so many kelvin: the usual rule of thumb.
const LEAKAGE_DOUBLES: f64 = 10.0;

impl BoardModel {
    /// The same board at another temperature.
    pub(super) fn at(self, temperature: Celsius) -> Self {
        let warmer = temperature.0 - ROOM.0;
        let shifted = |volts: Volts| volts * (1.0 + THRESHOLD_SHIFT * warmer);
        let leaks = (warmer / LEAKAGE_DOUBLES).exp2();
        Self {
            trip: shifted(self.trip),
            hysteresis: shifted(self.hysteresis),
            leakage: self.leakage * leaks,
            leakage_conductance: self.leakage_conductance * leaks,
            ..self
        }
    }
}
