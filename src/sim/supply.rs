//! The parameters of one programmable supply.

use super::meter::round_to;
use crate::trace::Accuracy;
use crate::units::{Amps, Farads, Ohms, Volts};
use std::time::Duration;

/// One supply, its errors already drawn.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct SupplyModel {
    /// Highest voltage it can be set to.
    pub max_voltage: Volts,
    /// Highest level of its over-voltage protection, and the level after switching on.
    pub max_over_voltage: Volts,
    /// Highest current it can be limited to.
    pub max_current: Amps,
    /// Lowest current it can be limited to.
    pub min_current: Amps,
    /// The current at which it gives way whatever limit is set; infinite for one in order.
    pub gives_way: Amps,
    /// Smallest step of the set-point.
    pub set_step: Volts,
    /// What its maker claims of the set-point.
    pub claim: Accuracy,
    /// Error of this one, as a share of the set-point.
    pub gain_error: f64,
    /// Error of this one, fixed.
    pub offset_error: Volts,
    /// How fast its output drifts, V/s; its own reading drifts along and does not show it.
    pub drift: f64,
    /// How far it has drifted by the time the bench is switched on.
    pub drifted: Volts,
    /// Error of the voltage it reads back, fixed.
    pub read_back_voltage_error: Volts,
    /// Error of the current it reads back, fixed.
    pub read_back_current_error: Amps,
    /// Time constant of settling.
    pub time_constant: Duration,
    /// Fastest change of the output in volts per second.
    pub slew: f64,
    /// Overshoot on upward steps, as a share of the step.
    pub overshoot: f64,
    /// Whether it can pull its output down; otherwise only the load and the bleed discharge the capacitor.
    pub sinks: bool,
    /// Capacitor across the output.
    pub output_capacitance: Farads,
    /// Current the supply itself always takes from its output.
    pub bleed: Amps,
    /// Resistor across the output while it is switched off.
    pub off_resistance: Ohms,
}

/// Digit of the supply's own voltage and current readings, V and A.
const READ_BACK_DIGIT: f64 = 1e-3;

impl SupplyModel {
    /// A set-point as the supply keeps it: clipped to its range and rounded to its step.
    pub(super) fn kept(&self, volts: Volts) -> Volts {
        Volts(round_to(volts.max(Volts::ZERO).min(self.max_voltage).0, self.set_step.0))
    }

    /// The true voltage behind a kept set-point.
    pub(super) fn true_output(&self, kept: Volts) -> f64 {
        (kept.0 * (1.0 + self.gain_error) + self.offset_error.0).max(0.0)
    }

    /// A current limit as the supply keeps it.
    pub(super) fn kept_limit(&self, limit: Amps) -> Amps {
        limit.max(self.min_current).min(self.max_current)
    }

    /// The current at which it really gives way under a kept limit, A.
    pub(super) fn true_limit(&self, kept: Amps) -> f64 {
        kept.min(self.gives_way).0
    }

    /// How far its output and its own reading have drifted this long after the bench was switched on, V.
    pub(super) fn drift_at(&self, now: Duration) -> f64 {
        self.drifted.0 + self.drift * now.as_secs_f64()
    }

    /// An over-voltage level as the supply keeps it.
    pub(super) fn kept_over_voltage(&self, level: Volts) -> Volts {
        level.max(Volts::ZERO).min(self.max_over_voltage)
    }

    /// What the supply says of its own output.
    pub(super) fn read_back(&self, volts: f64, amps: f64) -> (Volts, Amps) {
        (
            Volts(round_to(volts + self.read_back_voltage_error.0, READ_BACK_DIGIT)),
            Amps(round_to(amps + self.read_back_current_error.0, READ_BACK_DIGIT)),
        )
    }
}
