//! The parameters of one board: detector, switch, currents and capacitors.

use crate::units::{Amps, Farads, Ohms, Siemens, Volts};
use std::time::Duration;

/// One board with an undervoltage cut-off, all tolerances already drawn.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct BoardModel {
    /// Voltage at the terminals below which the switch opens.
    pub trip: Volts,
    /// Re-enable less trip.
    pub hysteresis: Volts,
    /// How long the voltage must stay below the trip until the switch opens.
    pub detect_delay: Duration,
    /// How long the voltage must stay above the re-enable until the switch closes.
    pub release_delay: Duration,
    /// Standard deviation of the noise at the detector's input, as slow as the detector can follow.
    pub noise: Volts,
    /// Independent values of that noise in a second, Hz.
    pub noise_rate: f64,
    /// Below this the detector does not work.
    pub minimum_operating: Volts,
    /// Resistor at the detector's output.
    pub pull_up: Ohms,
    /// The state in which it conducts.
    pub pull_up_conducts: PullUp,
    /// Supply current of the detector, independent of voltage.
    pub detector_current: Amps,
    /// Leakage through the open switch and the load, independent of voltage.
    pub leakage: Amps,
    /// Leakage through the open switch and the load, in proportion to voltage.
    pub leakage_conductance: Siemens,
    /// Capacitor across the terminals.
    pub input_capacitance: Farads,
    /// Load behind the switch.
    pub load: Ohms,
    /// Capacitor across the load, charged when the switch closes.
    pub load_capacitance: Farads,
    /// Whether the switch obeys the detector.
    pub switch: Switch,
    /// Resistance of the closed switch.
    pub on_resistance: Ohms,
    /// Conduction below the minimum operating voltage, on boards that show it.
    pub deep_conduction: Option<DeepConduction>,
}

/// The state in which the pull-up resistor conducts; it depends on the topology.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum PullUp {
    /// Low-side switch: the detector pulls the gate down through it while the board is off.
    WhenOff,
    /// High-side switch with an inverter.
    WhenOn,
    /// A divider.
    Always,
}

/// Whether the switch obeys the detector.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Switch {
    /// It does.
    Working,
    /// A shorted transistor.
    StuckClosed,
    /// A broken transistor or joint.
    StuckOpen,
}

/// A window of voltages in which the undefined detector lets the switch conduct: a triangle of current.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct DeepConduction {
    /// Lower end.
    pub from: Volts,
    /// Upper end.
    pub to: Volts,
    /// Current half way between.
    pub peak: Amps,
}

impl BoardModel {
    /// Voltage at the terminals above which the switch closes again.
    pub fn re_enable(&self) -> Volts {
        self.trip + self.hysteresis
    }
}
