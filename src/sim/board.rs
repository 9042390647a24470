//! The parameters of one board: detector, switch, currents and capacitors.

use super::circuit::BODY_DIODE;
use super::{LoadWiring, Polarity, Wiring, gate};
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
    /// How long the voltage must stay above the re-enable until the detector lets go of the gate.
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
    /// Conductance of what lies across the terminals in either state, as a divider in front of the detector.
    pub divider: Siemens,
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
    /// Capacitance of the gate, charged through the pull-up before the switch closes.
    pub gate_capacitance: Farads,
    /// Whether a board that has tripped stays off until its supply has gone.
    pub latches: bool,
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
    /// The gate hangs on the supply instead of the detector: closed as long as the voltage suffices for it.
    GateTied,
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

    /// Time above the re-enable until the switch closes: the release delay, and the gate's charge.
    pub(super) fn release_time(&self) -> Duration {
        self.release_delay + gate::charge_time(self.re_enable(), self.pull_up, self.gate_capacitance)
    }

    /// The lowest voltage at which the detector works, kept clear of zero.
    pub(super) fn lowest_operating(&self) -> f64 {
        self.minimum_operating.0.max(1e-3)
    }

    /// Whether the switch conducts when the detector says `on`.
    pub(super) fn closed(&self, on: bool) -> bool {
        match self.switch {
            Switch::Working => on,
            Switch::StuckClosed | Switch::GateTied => true,
            Switch::StuckOpen => false,
        }
    }

    /// Resistance of what hangs behind the switch, a voltmeter of `voltmeter` siemens included.
    pub(super) fn load_resistance(&self, wiring: &Wiring, voltmeter: f64) -> f64 {
        match wiring.load {
            LoadWiring::Connected | LoadWiring::LocksOut(_) => 1.0 / (1.0 / self.load.0 + voltmeter),
            LoadWiring::Lifted => 1.0 / voltmeter.max(1e-12),
        }
    }

    /// The currents at `volts` across the terminals, the load's capacitor settled.
    pub(super) fn branches(&self, wiring: &Wiring, state: State, voltmeter: f64, volts: f64) -> Branches {
        let on = state.on;
        let load = self.load_resistance(wiring, voltmeter);
        if wiring.polarity == Polarity::Reversed {
            let current = (volts - BODY_DIODE).max(0.0) / (load + self.on_resistance.0);
            return Branches {
                beside: -wiring.fed(volts),
                load_current: current,
                load_volts: -current * load,
            };
        }
        // Towards zero volts a constant current fades away.
        let awake = (volts / self.lowest_operating()).clamp(0.0, 1.0);
        let pull_up_conducts = match self.pull_up_conducts {
            PullUp::WhenOff => !on,
            PullUp::WhenOn => on,
            PullUp::Always => true,
        };
        let pull_up = if pull_up_conducts { volts / self.pull_up.0 } else { 0.0 };
        let (load_current, load_volts) = if self.closed(on) {
            self.through_closed(wiring, load, state.load_runs, volts)
        } else if wiring.load == LoadWiring::Lifted {
            (0.0, 0.0)
        } else {
            let leak = self.leakage.0 * awake + self.leakage_conductance.0 * volts + self.deep_current(volts);
            (leak, leak * load)
        };
        Branches {
            beside: pull_up
                + self.divider.0 * volts
                + self.detector_current.0 * awake
                + wiring.stray.0 * volts
                - wiring.fed(volts),
            load_current,
            load_volts,
        }
    }

    /// Current through a closed switch and the voltage behind it.
    fn through_closed(&self, wiring: &Wiring, load: f64, running: bool, volts: f64) -> (f64, f64) {
        let tied = if self.switch == Switch::GateTied { gate::share(volts) } else { 1.0 };
        if let Some(lockout) = wiring.lockout().filter(|_| running) {
            let current = lockout.current(volts, self.load) * tied;
            return (current, volts * tied - current * self.on_resistance.0);
        }
        // A load that has stopped leaves the whole voltage standing.
        let current = if running { volts / (load + self.on_resistance.0) * tied } else { 0.0 };
        (current, if running { current * load } else { volts * tied })
    }

    fn deep_current(&self, volts: f64) -> f64 {
        let Some(DeepConduction { from, to, peak }) = self.deep_conduction else { return 0.0 };
        let half_width = (to - from).0 / 2.0;
        let from_middle = (volts - (from + to).0 / 2.0).abs();
        peak.0 * (1.0 - from_middle / half_width).max(0.0)
    }
}

/// What the board and its load are doing.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(super) struct State {
    /// Whether the detector says that the board is on.
    pub(super) on: bool,
    /// Whether the load would draw its current.
    pub(super) load_runs: bool,
}

/// The currents of a board at one voltage.
#[derive(Clone, Copy, Debug, PartialEq)]
pub(super) struct Branches {
    /// Through the detector and the pull-up, A.
    pub(super) beside: f64,
    /// Through switch and load, A.
    pub(super) load_current: f64,
    /// Across the load, V; negative on a reversed board.
    pub(super) load_volts: f64,
}
