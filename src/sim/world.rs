//! The board on its bench, moving in simulated time.

use super::draw::{Concern, Draw};
use super::meter::MeterRange;
use super::{LoadWiring, Setup, Switch};
use crate::trace::Current;
use crate::units::{Amps, Ohms, Volts};
use std::time::Duration;

/// A board on its bench.
#[derive(Clone, Debug)]
pub struct World {
    setup: Setup,
    now: Duration,
    noise: Draw,
    set: Volts,
    current_limit: Amps,
    over_voltage: Volts,
    output: bool,
    range: usize,
    on: bool,
}

/// A moment from which meters integrate.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Mark {
    at: Duration,
}

/// What the board really is, noise apart, at its terminals.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Truth {
    /// Voltage below which the switch opens.
    pub trip: Volts,
    /// Voltage above which it closes.
    pub re_enable: Volts,
    /// Re-enable less trip.
    pub hysteresis: Volts,
    /// Time below the trip until the switch opens.
    pub detect_delay: Duration,
    /// Time above the re-enable until it closes.
    pub release_delay: Duration,
}

impl World {
    /// A bench just switched on: output off, supply at zero volts, ammeter on its largest range.
    pub fn new(setup: &Setup) -> Self {
        Self {
            setup: setup.clone(),
            now: Duration::ZERO,
            noise: Draw::new(setup.seed, Concern::MeterNoise),
            set: Volts::ZERO,
            current_limit: setup.supply.max_current,
            over_voltage: setup.supply.max_voltage * 1.1,
            output: false,
            range: setup.ammeter.ranges.len().saturating_sub(1),
            on: false,
        }
    }

    /// Time since the bench was switched on.
    pub fn now(&self) -> Duration {
        self.now
    }

    /// Lets time pass until `until`; does nothing when that is in the past.
    pub fn advance_to(&mut self, until: Duration) {
        self.now = self.now.max(until);
        let board = &self.setup.board;
        let volts = self.terminals();
        if volts < board.trip {
            self.on = false;
        } else if volts > board.re_enable() {
            self.on = true;
        }
    }

    /// Sets the voltage, as the supply keeps it: clipped to its range and rounded to its step.
    pub fn set_volts(&mut self, volts: Volts) {
        let supply = &self.setup.supply;
        let clipped = volts.max(Volts::ZERO).min(supply.max_voltage);
        self.set = Volts((clipped / supply.set_step).round() * supply.set_step.0);
    }

    /// The voltage as the supply keeps it.
    pub fn volts(&self) -> Volts {
        self.set
    }

    /// Sets the current limit, clipped to the supply's range.
    pub fn set_current_limit(&mut self, limit: Amps) {
        let supply = &self.setup.supply;
        self.current_limit = limit.max(supply.min_current).min(supply.max_current);
    }

    /// The current limit as the supply keeps it.
    pub fn current_limit(&self) -> Amps {
        self.current_limit
    }

    /// Sets the level at which the supply switches its output off by itself.
    pub fn set_over_voltage(&mut self, level: Volts) {
        self.over_voltage = level;
    }

    /// The over-voltage level as the supply keeps it.
    pub fn over_voltage(&self) -> Volts {
        self.over_voltage
    }

    /// True after over-voltage protection has switched the output off, until it is switched on again.
    pub fn over_voltage_tripped(&self) -> bool {
        false
    }

    /// Switches the output.
    pub fn set_output(&mut self, on: bool) {
        self.output = on;
    }

    /// Whether the output is on.
    pub fn output(&self) -> bool {
        self.output
    }

    /// Whether the supply is limiting the current.
    pub fn limited(&self) -> bool {
        false
    }

    /// What a power cut leaves: output off, everything set forgotten.
    pub fn restart_supply(&mut self) {
        self.output = false;
        self.set = Volts::ZERO;
        self.current_limit = self.setup.supply.max_current;
        self.over_voltage = self.setup.supply.max_voltage * 1.1;
    }

    /// Puts the ammeter on its smallest range that holds `current`, or its largest; returns the full scale.
    pub fn set_range(&mut self, current: Amps) -> Amps {
        self.range = self.setup.ammeter.range_for(current);
        self.range()
    }

    /// Full scale of the ammeter's range.
    pub fn range(&self) -> Amps {
        Amps(self.setup.ammeter.ranges[self.range].meter.full_scale)
    }

    /// Puts the ammeter on its largest range, as when it is switched on.
    pub fn reset_meter_range(&mut self) {
        self.range = self.setup.ammeter.ranges.len().saturating_sub(1);
    }

    /// The moment from which a reading is averaged.
    pub fn mark(&self) -> Mark {
        Mark { at: self.now }
    }

    /// Reads the voltmeter at the board's terminals, averaged since the mark.
    pub fn read_sense(&mut self, since: &Mark) -> Volts {
        let _ = since.at;
        self.terminals()
    }

    /// Reads the voltmeter at the load, averaged since the mark.
    pub fn read_load(&mut self, since: &Mark) -> Volts {
        let _ = since.at;
        if self.closed() { self.terminals() } else { Volts::ZERO }
    }

    /// Reads the ammeter on its present range, averaged since the mark.
    pub fn read_current(&mut self, since: &Mark) -> Current {
        let _ = since.at;
        let range: MeterRange = self.setup.ammeter.ranges[self.range].meter;
        let current = self.current();
        if current.0.abs() > 1.2 * range.full_scale {
            return Current::OVERLOAD;
        }
        Current::Value(Amps(current.0 + range.noise * self.noise.normal()))
    }

    /// The supply's own reading of its output, averaged since the mark.
    pub fn read_supply(&mut self, since: &Mark) -> (Volts, Amps) {
        let _ = since.at;
        (self.terminals(), self.current())
    }

    /// What the board really is.
    pub fn truth(&self) -> Truth {
        let board = &self.setup.board;
        Truth {
            trip: board.trip,
            re_enable: board.re_enable(),
            hysteresis: board.hysteresis,
            detect_delay: board.detect_delay,
            release_delay: board.release_delay,
        }
    }

    fn closed(&self) -> bool {
        match self.setup.board.switch {
            Switch::Working => self.on,
            Switch::StuckClosed => true,
            Switch::StuckOpen => false,
        }
    }

    fn terminals(&self) -> Volts {
        if self.output { self.set } else { Volts::ZERO }
    }

    fn current(&self) -> Amps {
        let board = &self.setup.board;
        let volts = self.terminals();
        let through = if self.closed() && self.setup.wiring.load == LoadWiring::Connected {
            volts / Ohms(board.load.0 + board.on_resistance.0)
        } else {
            volts / board.pull_up
        };
        through + board.detector_current
    }
}
