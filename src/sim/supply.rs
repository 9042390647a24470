//! The parameters of one programmable supply.

use crate::trace::Accuracy;
use crate::units::{Amps, Farads, Ohms, Volts};
use std::time::Duration;

/// One supply, its errors already drawn.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct SupplyModel {
    /// Highest voltage it can be set to.
    pub max_voltage: Volts,
    /// Highest current it can be limited to.
    pub max_current: Amps,
    /// Lowest current it can be limited to.
    pub min_current: Amps,
    /// Smallest step of the set-point.
    pub set_step: Volts,
    /// What its maker claims of the set-point.
    pub claim: Accuracy,
    /// Error of this one, as a share of the set-point.
    pub gain_error: f64,
    /// Error of this one, fixed.
    pub offset_error: Volts,
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
