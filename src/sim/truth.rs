//! What a simulated board really is, to hold measurements against.

use super::board::State;
use super::{BoardModel, Setup, Wiring};
use crate::profile::{Profile, QuantityName};
use crate::units::{Amps, Celsius, Ohms, Siemens, Volts};
use std::time::Duration;

/// What the board really is, noise and meters apart, at its terminals.
///
/// Thresholds and delays are the detector's at the temperature it has, without hum or contacts that come and go; a
/// stuck switch does not obey it. Currents are the board's own, without other sources and meters.
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
    /// Whether it stays off once tripped, until its supply has gone; the re-enable is then that of a board just
    /// connected.
    pub latches: bool,
    /// Temperature of the board.
    pub temperature: Celsius,
    board: BoardModel,
    wiring: Wiring,
}

impl Truth {
    pub(super) fn of(setup: &Setup) -> Self {
        let board = &setup.board;
        Self {
            trip: board.trip,
            re_enable: board.re_enable(),
            hysteresis: board.hysteresis,
            detect_delay: board.detect_delay,
            release_delay: board.release_time(),
            latches: board.latches,
            temperature: setup.temperature,
            board: *board,
            wiring: Wiring { feed: None, stray: Siemens::ZERO, ..setup.wiring },
        }
    }

    /// The true value of a quantity as `profile` wants it measured, in the SI unit of its name; `None` where the profile
    /// does not say what it depends on, and for the deep current.
    pub fn value(&self, name: QuantityName, profile: &Profile) -> Option<f64> {
        let off_at = || profile.limits.get(&QuantityName::OffCurrent)?.at;
        Some(match name {
            QuantityName::Trip => self.trip.0,
            QuantityName::ReEnable => self.re_enable.0,
            QuantityName::Hysteresis => self.hysteresis.0,
            QuantityName::OnCurrent => self.on_current(self.trip).0,
            QuantityName::OffCurrent => self.off_current(off_at()?).0,
            QuantityName::OffConductance => {
                let line = profile.off_line()?;
                self.off_conductance(line.from, line.to).0
            }
            QuantityName::OffConstantCurrent => {
                let line = profile.off_line()?;
                self.off_constant_current(line.from, line.to).0
            }
            QuantityName::DetectDelay => self.detect_delay.as_secs_f64(),
            QuantityName::ReleaseDelay => self.release_delay.as_secs_f64(),
            QuantityName::DeepCurrent => return None,
            QuantityName::ReboundMargin => {
                (self.hysteresis - profile.pack.rebound?.rise(self.on_current(self.trip))).0
            }
            QuantityName::OnResistance => self.on_resistance().0,
            QuantityName::StorageTime => {
                let storage = profile.pack.storage?;
                storage.remaining / (self.off_current(storage.at.or_else(off_at)?) + storage.self_discharge)
            }
        })
    }

    /// Current into the board at `at` across its terminals while the detector says off.
    pub fn off_current(&self, at: Volts) -> Amps {
        self.current(false, at)
    }

    /// Current into the board at `at` across its terminals while the detector says on.
    pub fn on_current(&self, at: Volts) -> Amps {
        self.current(true, at)
    }

    /// Change of the off current between two voltages, for each volt.
    pub fn off_conductance(&self, from: Volts, to: Volts) -> Siemens {
        Siemens((self.off_current(to) - self.off_current(from)).0 / (to - from).0)
    }

    /// What of the off current would be left at no voltage, if it went on as between these two.
    pub fn off_constant_current(&self, from: Volts, to: Volts) -> Amps {
        self.off_current(from) - from * self.off_conductance(from, to)
    }

    /// Resistance of the closed switch.
    pub fn on_resistance(&self) -> Ohms {
        self.board.on_resistance
    }

    fn current(&self, on: bool, at: Volts) -> Amps {
        let branches = self.board.branches(&self.wiring, State { on, load_runs: true }, 0.0, at.0);
        Amps(branches.beside + branches.load_current)
    }
}
